"""Coverage-guided fuzzing of all that reads records: ``python -m tests.fuzz.coverage_guided``.

Words after it are libFuzzer's options, such as ``-max_total_time=60``, or a file to try again.
It sets out from the same tables as the other mutated files, and stops at the first failure,
whose bytes it leaves as a file and names.
"""

from __future__ import annotations

import hashlib
import random
import sys
import tempfile
import warnings
from pathlib import Path

import atheris

ROOT = Path(__file__).parent.parent.parent
COMPILED = [
    ".".join(path.relative_to(ROOT).with_suffix("").parts)
    for path in (ROOT / "pairing").rglob("*.py")
    if "import numba" in path.read_text("utf-8") or "from numba" in path.read_text("utf-8")
]
"""Modules with compiled functions: with counters in them they could not be compiled."""

with atheris.instrument_imports(include=["pairing"], exclude=COMPILED):
    import pairing.records.files.large_delimited
    import pairing.records.files.parquet
    import pairing.records.files.workbook  # noqa: F401
    from tests.fuzz.journey import Tables, travel
    from tests.fuzz.mutations import again_mutated, seeds

_BETWEEN = b"\n\x1e\n"
_STRICT = b"strict"
_WORDS = (
    '"id" "sire" "dam" "sex" "born" "died" "clone_of" "genetic_dam" "litter" "group" "count" '
    '"status" "origin" "wild" "merge" "set" "drop-link" "use-row" "accept" "decision" "also" '
    '"," ";" "\\x09" "|" "\\x22" "\\x0d\\x0a" "\\x0d" "#" "A1" "A2:0.5|A3:0.5" "2019-05-31" '
    '"[2018..2020]" "~2019" "03/04/2019" "../2019" "43586" "\\xef\\xbb\\xbf" "\\xff\\xfe"'
)


def joined(tables: Tables) -> bytes:
    """The tables of one call as the bytes of one file."""
    beside = (tables.facts, tables.events, tables.decisions)
    parts = [tables.records, *(part or b"" for part in beside)]
    return _BETWEEN.join([*parts, _STRICT] if tables.strict else parts)


def parted(data: bytes) -> Tables:
    """The tables of one call from the bytes of one file."""
    records, *beside = data.split(_BETWEEN)
    strict = bool(beside) and beside[-1] == _STRICT
    facts, events, decisions = [*(part or None for part in beside), None, None, None][:3]
    return Tables(records, facts, events, decisions, strict=strict)


def changed(data: bytes, most: int, seed: int) -> bytes:
    """A file damaged further: by libFuzzer's own means, or as a table of cells."""
    chance = random.Random(seed)
    if chance.random() < 0.6:
        return bytes(atheris.Mutate(data, most))
    tables = again_mutated(parted(data), chance)
    return joined(tables)[:most]


def main() -> None:
    """Fuzz until an option of libFuzzer says stop, or a file fails."""
    warnings.simplefilter("error")
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        corpus, words = folder / "corpus", folder / "words"
        corpus.mkdir()
        for tables in seeds():
            content = joined(tables)
            (corpus / hashlib.sha256(content).hexdigest()).write_bytes(content)
        travel(seeds()[0], folder, thorough=True)  # compiles what is compiled, out of time
        words.write_text("\n".join(_WORDS.split(" ")) + "\n", encoding="ascii")
        options = [f"-dict={words}", "-timeout=10", "-max_len=40000", "-rss_limit_mb=2048"]
        tried_again = [word for word in sys.argv[1:] if not word.startswith("-")]
        places = [] if tried_again else [str(corpus)]
        atheris.Setup(
            [sys.argv[0], *options, *sys.argv[1:], *places],
            lambda data: travel(parted(data), folder, thorough=True),
            custom_mutator=changed,
        )
        atheris.Fuzz()


if __name__ == "__main__":
    main()
