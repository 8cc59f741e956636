"""Starting fast: what a command loads, and what it leaves alone."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

SAMPLES = Path(__file__).parent.parent / "sample_pedigrees"
HEAVY = frozenset(
    {"numpy", "pandas", "scipy", "numba", "networkx", "pyarrow", "highspy", "matplotlib"}
)
_CALL = """
import json, sys
sys.argv = ["pairing", *{words!r}]
from pairing.cli.app import main
try:
    main()
except SystemExit as end:
    assert not end.code, end.code
print()
print(json.dumps(sorted({{name.partition(".")[0] for name in sys.modules}})))
"""


def loaded_by(code: str) -> set[str]:
    """Top-level modules loaded when a fresh interpreter has run this code."""
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, check=False, encoding="utf-8"
    )
    assert done.returncode == 0, done.stderr
    return set(json.loads(done.stdout.splitlines()[-1]))


def loaded_by_command(*words: str) -> set[str]:
    """Top-level modules loaded when the program has run on these words."""
    return loaded_by(_CALL.format(words=list(words)))


def test_import_loads_nothing_heavy():
    """`import pairing` loads no library that takes long, nor the command line."""
    code = "import json, sys, pairing\nprint(json.dumps(sorted(sys.modules)))"
    loaded = loaded_by(code)
    assert not loaded & (HEAVY | {"typer", "rich"})


@pytest.mark.parametrize(
    "words",
    [(), ("--help",), ("--version",), ("propose", "--help"), ("kinship", "--help")],
    ids=lambda words: " ".join(words) or "alone",
)
def test_help_loads_nothing_heavy(words):
    """Help, version and the three lines come without any library that takes long."""
    assert not loaded_by_command(*words) & HEAVY


def test_audit_of_sound_records_loads_nothing_heavy():
    """Checking records that hold no loop needs numpy and no other library of weight."""
    loaded = loaded_by_command("audit", str(SAMPLES / "tarn-crane.csv"), "--quiet")
    assert loaded & HEAVY == {"numpy"}


@pytest.mark.parametrize(
    ("command", "more"),
    [
        ("propose", ()),
        ("describe", ()),
        ("animals", ()),
        ("kinship", ()),
        ("check", ("--sire", "T251", "--dam", "T285")),
    ],
)
def test_answers_on_cranes_load_only_what_they_need(command, more):
    """A small programme is answered without pandas, scipy, numba, pyarrow and the like."""
    sample = str(SAMPLES / "tarn-crane")
    words = (command, f"{sample}.csv", "--policy", f"{sample}.toml", "--quiet", *more)
    loaded = loaded_by_command(*words)
    assert not loaded & {"pandas", "scipy", "numba", "pyarrow", "networkx", "matplotlib"}
    assert "numpy" in loaded


def test_the_solver_is_loaded_by_propose_only():
    """Only making a plan needs the solver."""
    sample = str(SAMPLES / "tarn-crane")
    for command in ("describe", "animals", "kinship"):
        words = (command, f"{sample}.csv", "--policy", f"{sample}.toml", "--quiet")
        assert "highspy" not in loaded_by_command(*words)
