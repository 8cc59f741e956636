"""Kinship of large pedigrees, compiled: the plain front of `compiled`.

Inbreeding of all animals goes by blocks of parents on a condensed pedigree, kinship of some
by the same passes, and products K x by one pass up and one down. Every number is computed in
double precision and does not depend on the number of threads. Work runs in pieces of less
than half a second, so that an interruption is answered at once.

Only for pedigrees whose genotypes are all ordinary animals: see `is_plain`.
"""

from __future__ import annotations

import time
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Callable

    import numpy.typing as npt

    from pairing.kinship.compiled.condensed import Passes
    from pairing.pedigree.genotypes import Genotypes

    FloatArray = npt.NDArray[np.float64]
    PlaceArray = npt.NDArray[np.int32]
    Places = npt.NDArray[np.integer[Any]]
    Which = tuple[int, int, int]
    Progress = Callable[[float], None]

COMPILING_SECONDS = 6
"""About how long the first use takes to compile; later ones load what was compiled."""

_SHORT, _LONG = 0.1, 0.25
"""Seconds of one piece of work between which its size stays as it is."""


def is_plain(genotypes: Genotypes) -> bool:
    """Whether all genotypes are ordinary animals: no stand-ins, clones or groups."""
    return not genotypes.copies and not genotypes.members


def is_compiled() -> bool:
    """Whether an earlier run left compiled code to load; if not, the next use compiles it."""
    from numba import config

    from pairing.kinship.compiled import inbreeding

    folder = compiled_folder()
    if config.DISABLE_JIT or folder is None:
        return bool(config.DISABLE_JIT)
    source = Path(inbreeding.__file__)
    kept = folder.glob(f"{source.stem}.{inbreeding.run_blocks.__name__}-*.nbi")
    return any(each.stat().st_mtime >= source.stat().st_mtime for each in kept)


def compiled_folder() -> Path | None:
    """Where compiled code is kept; None if no folder can be written to, or nothing compiled."""
    from pairing.kinship.compiled import inbreeding

    statistics = getattr(inbreeding.run_blocks, "stats", None)
    return Path(statistics.cache_path) if statistics and statistics.cache_path else None


def self_kinship(
    genotypes: Genotypes, *, threads: int = 1, progress: Progress | None = None
) -> tuple[FloatArray, FloatArray]:
    """Self-kinship (1 + F) / 2 and Mendelian sampling variance D of every genotype, shape (N,).

    Parameters
    ----------
    threads
        The result is the same for any number.
    progress
        Called with the share of the work done, in [0, 1].
    """
    from pairing.kinship.compiled.products import sampling_variance

    sire, dam = _writable(genotypes.sire), _writable(genotypes.dam)
    own = _inbreeding(sire, dam, threads, progress or _silent)
    own += 1.0
    own *= 0.5
    return own, sampling_variance(sire, dam, own)


def _inbreeding(sire: PlaceArray, dam: PlaceArray, threads: int, progress: Progress) -> FloatArray:
    from pairing.kinship.compiled.condensed import condense
    from pairing.kinship.compiled.inbreeding import Lines, run_blocks
    from pairing.kinship.compiled.pairs import (
        NO_ANIMAL,
        block_pivots,
        code_mates,
        lines_of,
        number_parents,
        pair_up,
    )

    progress(0.0)
    parents = number_parents(sire, dam)
    pairs = pair_up(sire, dam, parents)
    blocks = block_pivots(parents, pairs)
    keep = np.zeros(len(parents.first), np.uint8)
    keep[blocks.pivots] = 1
    pedigree = condense(parents.first, parents.second, keep)
    lines, length = lines_of(parents, pedigree)
    met = code_mates(pairs, blocks, pedigree.number, length)
    inbreeding = np.zeros(len(pairs.mate))
    inbreeding[NO_ANIMAL] = -1.0
    kept = len(pedigree.starts) - 2
    variance = np.full(kept + 1, -1.0)
    if len(blocks.waits):
        starts = pairs.starts[blocks.pivots[blocks.bounds[:-1]]]
        sizes = np.diff(starts, append=len(pairs.mate))
        mates = int(sizes.max())
        weights = sizes + 2.0 * pedigree.number[blocks.pivots[blocks.bounds[1:] - 1]]
        spaces = [
            (
                _passes(kept),
                Lines(
                    np.empty(mates, np.int32),
                    np.empty(mates, np.int32),
                    np.empty(mates, np.uint8),
                    np.empty(met, np.int32),
                    np.empty(met, np.int32),
                ),
            )
            for _thread in range(threads)
        ]

        def work(which: Which, thread: int) -> None:
            run_blocks(
                which, blocks, parents, pairs, pedigree, lines, inbreeding, variance,
                *spaces[thread],
            )  # fmt: skip

        _in_pieces(work, weights, blocks.waits, threads, progress)
    progress(1.0)
    return inbreeding[pairs.of_animal]


def kinship_product(genotypes: Genotypes, variance: FloatArray, x: FloatArray) -> FloatArray:
    """K x for x of shape (N,) or (N, k), in time linear in N."""
    from pairing.kinship.compiled.products import multiply, multiply_columns

    product = np.array(x, dtype=np.float64, order="C")
    sire, dam = _writable(genotypes.sire), _writable(genotypes.dam)
    run = multiply if product.ndim == 1 else multiply_columns
    run(sire, dam, _writable(variance), product)
    return product


def kinship_block(
    genotypes: Genotypes,
    variance: FloatArray,
    rows: Places,
    columns: Places,
    *,
    threads: int = 1,
    progress: Progress | None = None,
) -> FloatArray:
    """Kinship of `rows` with `columns`, shape (rows, columns), through their ancestors only.

    The same animals as rows and columns, in ascending order, take less time.

    Parameters
    ----------
    rows, columns
        Places of genotypes, in any order, also repeated.
    """
    from pairing.kinship.compiled.blocks import part_of, run_columns
    from pairing.kinship.compiled.rows import LANES

    if len(rows) < len(columns):
        turned = kinship_block(
            genotypes, variance, columns, rows, threads=threads, progress=progress
        )
        return np.ascontiguousarray(turned.T)
    kinship = np.empty((len(rows), len(columns)))
    if not kinship.size:
        return kinship
    part = part_of(
        _writable(genotypes.sire),
        _writable(genotypes.dam),
        _writable(variance),
        np.array(rows, dtype=np.int32),
        np.array(columns, dtype=np.int32),
    )
    same = np.array_equal(rows, columns) and bool(np.all(np.diff(rows) > 0))
    count = -(-len(columns) // LANES)
    kept = len(part.pedigree.starts) - 2
    spaces = [_passes(kept) for _thread in range(min(threads, count))]

    def work(which: Which, thread: int) -> None:
        run_columns(which, same, part, spaces[thread], kinship)

    alone = np.zeros(count, np.int32)
    _in_pieces(work, np.ones(count), alone, len(spaces), progress or _silent)
    return kinship


def _in_pieces(
    work: Callable[[Which, int], None],
    weights: FloatArray,
    waits: PlaceArray,
    threads: int,
    progress: Progress,
) -> None:
    """Do blocks of work in order, in pieces that are neither long nor many.

    Parameters
    ----------
    work
        Does blocks first, last + 1, step in the work space of one thread, without holding the
        interpreter.
    weights
        How much work each block is about.
    waits
        How many blocks, from the first on, must be done before each.
    """
    done = np.cumsum(weights) / weights.sum()
    begin, size = 0, threads
    with ThreadPoolExecutor(max_workers=threads) as pool:
        while begin < len(weights):
            end = min(begin + size, len(weights))
            if threads > 1:
                blocked = np.flatnonzero(waits[begin:end] > begin)
                end = begin + int(blocked[0]) if len(blocked) else end
            since = time.perf_counter()
            if threads == 1:
                work((begin, end, 1), 0)
            else:
                parts = [
                    pool.submit(work, (begin + thread, end, threads), thread)
                    for thread in range(threads)
                ]
                for each in parts:
                    each.result()
            took = time.perf_counter() - since
            if took < _SHORT:
                size *= 2
            elif took > _LONG:
                size = max(threads, size // 2)
            progress(float(done[end - 1]))
            begin = end


def _passes(kept: int) -> Passes:
    """Work space for passes through `kept` animals."""
    from pairing.kinship.compiled.condensed import Passes
    from pairing.kinship.compiled.rows import LANES

    return Passes(
        np.zeros(kept + 1, np.uint8),
        np.empty(kept + 1, np.int32),
        np.empty((kept + 1, LANES)),
        np.empty((kept + 1, LANES)),
    )


def _writable(values: npt.NDArray[Any]) -> npt.NDArray[Any]:
    """The array, or a copy if it is read-only: compiled code would be compiled for both."""
    return np.require(values, requirements=["C", "W"])


def _silent(_done: float) -> None:
    """Report nothing."""
