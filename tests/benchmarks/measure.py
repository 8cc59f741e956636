"""Speed as ratios, measured in turn on one machine: ``python tests/benchmarks/measure.py``.

Nothing here is asserted: machines are noisy, so each figure is the median of runs that
alternate with its yardstick. What to aim for stands beside each.
"""

from __future__ import annotations

import argparse
import os
import resource
import statistics
import subprocess
import sys
import tempfile
import time
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

HERDBOOK = os.environ.get("HERDBOOK", "herd1m")
"""Which herdbook to make: herd1m, or herd10m with some patience."""
SAMPLES = Path(__file__).parents[2] / "sample_pedigrees"


def in_turn(ours: Callable[[], object], theirs: Callable[[], object], runs: int) -> str:
    """Median seconds of both and the median of their ratios, run after run."""
    ours()
    theirs()
    pairs = [(seconds(ours), seconds(theirs)) for _run in range(runs)]
    ratio = statistics.median(a / b for a, b in pairs)
    a, b = (statistics.median(each) for each in zip(*pairs, strict=True))
    return f"{a:8.4f} s against {b:8.4f} s: {ratio:5.2f}x"


def seconds(work: Callable[[], object]) -> float:
    """How long one run takes."""
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def program(*words: str) -> Callable[[], object]:
    """A run of the installed program."""
    installed = Path(sys.executable).with_name("pairing")
    command = [str(installed)] if installed.exists() else [sys.executable, "-m", "pairing"]
    return lambda: subprocess.run([*command, *words], check=True, capture_output=True)


def process(*words: str) -> Callable[[], object]:
    """A run of the interpreter."""
    command = [sys.executable, *words]
    return lambda: subprocess.run(command, check=True, capture_output=True)


def start_up(runs: int) -> None:
    """The help page against the imports it cannot do without."""
    figure = in_turn(program("--help"), process("-c", "import typer, rich.console"), runs)
    print(f"pairing --help / import typer, rich.console        {figure}   (aim: 1.1x)")


def main_job(runs: int) -> None:
    """A studbook's plan as a command against the imports of a usual data stack."""
    records = SAMPLES / "tarn-crane.csv"
    ours = program("propose", str(records), "--policy", str(records.with_suffix(".toml")))
    theirs = process("-c", "import numpy, pandas, scipy.optimize, rich")
    print(
        f"propose, Tarn crane / import numpy, pandas, ...    {in_turn(ours, theirs, runs)}"
        "   (aim: 1.0x and the solve)"
    )


def dense_kinship(runs: int) -> None:
    """The whole kinship table of 5,000 animals against copying it."""
    import numpy as np

    from pairing.kinship.tabular import tabular_kinship
    from pairing.pedigree.genotypes import Genotypes

    rng = np.random.default_rng(1)
    animals, born = 5_000, 250
    generation = np.repeat(np.arange(animals // born), born).astype(np.int32)
    before = (generation - 1) * born
    sire = np.where(generation > 0, before + rng.integers(0, 20, animals), -1).astype(np.int32)
    dam = np.where(generation > 0, before + rng.integers(20, born, animals), -1).astype(np.int32)
    own = np.arange(animals, dtype=np.int32)
    genotypes = Genotypes(sire, dam, {}, generation, own, own)
    table = tabular_kinship(genotypes)
    figure = in_turn(lambda: tabular_kinship(genotypes), table.copy, runs)
    print(f"kinship of 5,000 animals / numpy's copy of it      {figure}   (aim: 5x)")


def plans(runs: int) -> None:
    """Plans of the samples, the reading left out; seconds and proven gaps."""
    from pairing.kinship.engine import kinship
    from pairing.pedigree.descent import build_pedigree
    from pairing.plan.plan import propose_plan
    from pairing.policy.reading import read_policy
    from pairing.population.diversity import living_population
    from pairing.records.readers import read_records

    for name in ("tarn-crane", "lantern-bay-pipefish", "colony-k-voles", "fellmoor-sheep"):
        policy = read_policy(SAMPLES / f"{name}.toml")
        pedigree = build_pedigree(
            read_records(SAMPLES / f"{name}.csv"), litter_shares_sire=policy.litter_shares_sire
        )
        population = living_population(kinship(pedigree), as_of=policy.as_of, rule=policy.living)
        plan = propose_plan(population, policy)
        job = partial(propose_plan, population, policy)
        times = [seconds(job) for _run in range(runs)]
        size = f"{len(plan.matings.males)} x {len(plan.matings.females)}"
        print(
            f"plan of {name:22} {size:>10} {statistics.median(times):8.3f} s, "
            f"proven gap {plan.gap:.1e}"
        )


REFERENCE = Path(__file__).parents[3] / "shared" / "bench"


def herdbooks(runs: int) -> None:
    """A herdbook read, mapped, ordered and checked, against the same floor written in C.

    Clean rows in birth order, the same shuffled, and with faults: one row in a hundred has a
    blank in its id's cell, a date that cannot be read, or a parent without a row.
    """
    if not REFERENCE.exists():
        print("herdbooks: the C reference is absent; nothing measured")
        return
    import ctypes

    from pairing.pedigree.descent import build_pedigree
    from pairing.records.audit import audit_records
    from pairing.records.readers import read_records

    def ours(path: Path) -> None:
        build_pedigree(audit_records(read_records(path)))

    with tempfile.TemporaryDirectory() as folder:
        environment = {**os.environ, "BUILD": folder}
        subprocess.run(
            ["bash", str(REFERENCE / "run_ref.sh")],
            check=True,
            capture_output=True,
            env=environment,
        )
        library = ctypes.CDLL(str(Path(folder, "libref.so")))
        library.csvload_bench.restype = ctypes.c_int64
        generator = [sys.executable, str(REFERENCE / "gen.py"), folder, HERDBOOK, "--csv"]
        subprocess.run(generator, check=True, capture_output=True)
        clean = Path(folder, f"{HERDBOOK}.csv")
        faulty = Path(folder, "faulty.csv")
        faulty.write_text("".join(with_faults(clean)), encoding="utf-8")

        def reference(path: Path) -> None:
            library.csvload_bench(str(path).encode(), (ctypes.c_double * 4)())

        shuffled = Path(folder, f"{HERDBOOK}.shuf.csv")
        for name, path, floor in (
            ("birth order", clean, clean),
            ("shuffled", shuffled, shuffled),
            ("one row in 100 faulty", faulty, clean),
        ):
            figure = in_turn(partial(ours, path), partial(reference, floor), runs)
            print(f"{HERDBOOK}, {name:22} / C reference  {figure}   (aim: clean 3x, 10m 2.5x)")
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e6
    print(f"{HERDBOOK}: peak memory {peak:.2f} GB   (aim: 10m below 2.5 GB)")


def with_faults(path: Path) -> Iterator[str]:
    """Lines of a herdbook with one fault in a hundred."""
    with path.open(encoding="utf-8") as lines:
        for number, line in enumerate(lines):
            if number % 100 or not number:
                yield line
                continue
            name, sire, dam, sex, born = line.rstrip("\n").split(",")
            match number // 100 % 3:
                case 0:
                    yield f" {name},{sire},{dam},{sex},{born}\n"
                case 1:
                    yield f"{name},{sire},{dam},{sex},about then\n"
                case _:
                    yield f"{name},{sire or 'lost' + name},{dam},{sex},{born}\n"


def main() -> None:
    """Measure everything, or what is named."""
    jobs = {"start-up": start_up, "main-job": main_job, "kinship": dense_kinship, "plans": plans}
    jobs["herdbooks"] = herdbooks
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("jobs", nargs="*", choices=[*jobs, []], help="default: all")
    parser.add_argument("--runs", type=int, default=7)
    chosen = parser.parse_args()
    for name, job in jobs.items():
        if not chosen.jobs or name in chosen.jobs:
            job(chosen.runs)


if __name__ == "__main__":
    main()
