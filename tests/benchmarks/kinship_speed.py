"""Kinship of large pedigrees against references in C: ``python tests/benchmarks/kinship_speed.py``.

Nothing here is asserted: each figure is the median of ratios of runs that alternate with the
reference, whose rows of kinship are in single precision where ours are in double. The
references and the generator of herdbooks are looked for in ``../shared/bench``.
"""

from __future__ import annotations

import argparse
import ctypes
import importlib.util
import os
import resource
import statistics
import subprocess
import sys
import tempfile
import time
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from pairing.kinship import large
from pairing.pedigree.genotypes import Genotypes

if TYPE_CHECKING:
    from collections.abc import Callable

REFERENCE = Path(__file__).parents[3] / "shared" / "bench"
CANDIDATES = 2000


class Herdbook:
    """A made herdbook with its kinship, and the reference's jobs on it."""

    def __init__(self, folder: Path, name: str, library: ctypes.CDLL) -> None:
        specification = importlib.util.spec_from_file_location("gen", REFERENCE / "gen.py")
        assert specification is not None
        assert specification.loader is not None
        generator = importlib.util.module_from_spec(specification)
        specification.loader.exec_module(generator)
        path = folder / f"{name}.ped"
        if not path.exists():
            command = [sys.executable, str(REFERENCE / "gen.py"), str(folder), name]
            subprocess.run(command, check=True, capture_output=True)
        pedigree = generator.load(str(path))
        places = np.arange(len(pedigree["sire"]), dtype=np.int32)
        # The kernels need parents before their young, not levels: birth order will do.
        self.genotypes = Genotypes(pedigree["sire"], pedigree["dam"], {}, places, places, places)
        self.living = np.flatnonzero(pedigree["living"])
        self._library = library

    def __len__(self) -> int:
        return len(self.genotypes)

    def call(self, job: str, *arguments: Any) -> None:
        """Run a job of the reference on this pedigree."""
        pedigree = (self.genotypes.sire, self.genotypes.dam)
        pointers = [
            ctypes.c_void_p(each.ctypes.data)
            if isinstance(each, np.ndarray)
            else ctypes.c_int(each)
            for each in (*pedigree, *arguments)
        ]
        getattr(self._library, job)(ctypes.c_int(len(self)), *pointers)


def seconds(work: Callable[[], object]) -> float:
    """How long one run takes."""
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def compare(what: str, aim: str, runs: int, theirs: Callable[[], object], **ours: Any) -> None:
    """Print the median of the ratios of each of `ours` to `theirs`, run after run."""
    for each in ours.values():
        each()
    times: dict[str, list[float]] = {name: [] for name in ours}
    ratios: dict[str, list[float]] = {name: [] for name in ours}
    for _run in range(runs):
        base = seconds(theirs)
        for name, work in ours.items():
            times[name].append(seconds(work))
            ratios[name].append(times[name][-1] / base)
    for name in ours:
        print(
            f"{what:22} {name.replace('_', ' '):12} {statistics.median(times[name]):8.4f} s "
            f"{statistics.median(ratios[name]):6.2f}x   ({aim})",
            flush=True,
        )


def inbreeding(herdbook: Herdbook, what: str, runs: int) -> None:
    """All inbreeding coefficients, on one thread and on two."""
    own, _variance = large.self_kinship(herdbook.genotypes)
    found = np.zeros(len(herdbook))
    reference = partial(herdbook.call, "inbr_colleau_f", found, 32)
    compare(
        f"{what}, F",
        "aim: 1.3x; 10m on two threads 0.8x of one",
        runs,
        reference,
        one_thread=partial(large.self_kinship, herdbook.genotypes),
        two_threads=partial(large.self_kinship, herdbook.genotypes, threads=2),
    )
    print(f"{what}, F: largest difference {np.abs(2 * own - 1 - found).max():.1e}")


def products(herdbook: Herdbook, what: str, runs: int) -> None:
    """K w for one vector of weights."""
    own, variance = large.self_kinship(herdbook.genotypes)
    weights = np.zeros(len(herdbook))
    weights[herdbook.living] = 1.0 / len(herdbook.living)
    out = np.empty(len(herdbook))
    compare(
        f"{what}, K w",
        "aim: 1.1x",
        runs,
        partial(herdbook.call, "kw", 2 * own - 1, weights, out),
        one_thread=partial(large.kinship_product, herdbook.genotypes, variance, weights),
    )


def blocks(herdbook: Herdbook, what: str, runs: int) -> None:
    """Kinship among 2,000 living animals."""
    own, variance = large.self_kinship(herdbook.genotypes)
    step = max(1, len(herdbook.living) // CANDIDATES)
    some = herdbook.living[::step][:CANDIDATES].astype(np.int32)
    f = 2 * own - 1

    def reference(job: str, kind: type[np.floating[Any]], lanes: int) -> None:
        table = np.empty((len(some), len(some)), kind)
        herdbook.call(job, f, len(some), some, len(some), some, table, lanes)

    ours = partial(large.kinship_block, herdbook.genotypes, variance, some, some)
    for precision, job, kind, lanes in (
        ("single", "dense_block_f", np.float32, 32),
        ("double", "dense_block", np.float64, 16),
    ):
        compare(
            f"{what}, {len(some)} square",
            f"reference in {precision} precision; aim: 1.3x of single",
            runs,
            partial(reference, job, kind, lanes),
            one_thread=ours,
            two_threads=partial(ours, threads=2),
        )


def main() -> None:
    """Measure what is named on the herdbooks named."""
    jobs = {"inbreeding": inbreeding, "products": products, "blocks": blocks}
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("jobs", nargs="*", choices=[*jobs, []], help="default: all")
    parser.add_argument("--herdbooks", nargs="+", default=["herd1m", "beef1m"])
    parser.add_argument("--folder", type=Path, help="where made herdbooks are kept")
    parser.add_argument("--runs", type=int, default=5)
    chosen = parser.parse_args()
    if not REFERENCE.exists():
        print("The C references are absent; nothing measured.")
        return
    with tempfile.TemporaryDirectory() as folder:
        command = ["bash", str(REFERENCE / "run_ref.sh")]
        subprocess.run(
            command, check=True, capture_output=True, env={**os.environ, "BUILD": folder}
        )
        library = ctypes.CDLL(str(Path(folder, "libref.so")))
        for name in chosen.herdbooks:
            herdbook = Herdbook(chosen.folder or Path(folder), name, library)
            for job in chosen.jobs or jobs:
                jobs[job](herdbook, name, chosen.runs)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e6
    print(f"peak memory {peak:.2f} GB, herdbooks and references included")


if __name__ == "__main__":
    main()
