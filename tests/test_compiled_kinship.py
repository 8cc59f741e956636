"""The compiled kernels for large pedigrees agree with the plain methods, to the last digits."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.kinship import large
from pairing.kinship.indirect import self_kinship as plain_self_kinship
from pairing.kinship.tabular import tabular_kinship
from pairing.pedigree.genotypes import Genotypes, genotypes_of
from tests.pedigrees import as_text, pedigree_of, small_pedigrees

CLOSE = 1e-12


def genotypes(sire: list[int] | np.ndarray, dam: list[int] | np.ndarray) -> Genotypes:
    """Genotypes of parents given as places, -1 where unknown, in any order that has them first."""
    sires, dams = np.asarray(sire, dtype=np.int32), np.asarray(dam, dtype=np.int32)
    level = np.zeros(len(sires), dtype=np.int32)
    for each in range(len(sires)):
        known = [level[parent] for parent in (sires[each], dams[each]) if parent >= 0]
        level[each] = 1 + max(known, default=-1)
    order = np.argsort(level, kind="stable")
    rank = np.full(len(order) + 1, -1, dtype=np.int32)
    rank[order] = np.arange(len(order), dtype=np.int32)
    own = np.arange(len(order), dtype=np.int32)
    return Genotypes(rank[sires][order], rank[dams][order], {}, level[order], own, own)


@st.composite
def herds(draw: st.DrawFn) -> Genotypes:
    """Some hundred animals from a few parents each time, with missing parents and selfing."""
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    animals, founders = draw(st.integers(2, 300)), draw(st.integers(1, 20))
    window = draw(st.sampled_from([5, 40, 300]))
    few = draw(st.sampled_from([1, 3, 30]))
    missing = draw(st.sampled_from([0.0, 0.1, 0.5]))
    sire, dam = np.full(animals, -1), np.full(animals, -1)
    for each in range(min(founders, animals), animals):
        oldest = max(0, each - window)
        sire[each] = oldest + rng.integers(0, min(few, each - oldest))
        dam[each] = rng.integers(oldest, each)
    sire[rng.random(animals) < missing] = -1
    dam[rng.random(animals) < missing] = -1
    return genotypes(sire, dam)


def herd(animals: int, *, sires: int = 40, seed: int = 1) -> Genotypes:
    """A herd with overlapping generations: few sires, many dams, all recent."""
    rng = np.random.default_rng(seed)
    sire, dam = np.full(animals, -1), np.full(animals, -1)
    for each in range(100, animals):
        oldest = max(0, each - 1000)
        sire[each] = oldest + (each - oldest) * rng.integers(0, sires) // sires
        dam[each] = rng.integers(oldest, each)
    return genotypes(sire, dam)


def agrees(one: Genotypes, *, threads: int = 1) -> None:
    """Assert that all compiled answers are those of the table."""
    table = tabular_kinship(one)
    _own, variance = plain_self_kinship(one)
    own, found = large.self_kinship(one, threads=threads)
    np.testing.assert_allclose(own, np.diagonal(table), rtol=0, atol=CLOSE)
    np.testing.assert_allclose(found, variance, rtol=0, atol=CLOSE)
    n = len(one)
    x = np.cos(np.arange(n * 3, dtype=np.float64)).reshape(n, 3)
    np.testing.assert_allclose(
        large.kinship_product(one, found, x), table @ x, rtol=0, atol=n * CLOSE
    )
    np.testing.assert_array_equal(
        large.kinship_product(one, found, x)[:, 1], large.kinship_product(one, found, x[:, 1])
    )
    for rows, columns in (
        (np.arange(n), np.arange(n)),
        (np.arange(n)[::-2], np.arange(n)[:40]),
        (np.array([n - 1]), np.arange(n)),
        (np.array([n // 2, n // 2, 0]), np.array([n - 1, n - 1])),
    ):
        block = large.kinship_block(one, found, rows, columns, threads=threads)
        np.testing.assert_allclose(block, table[np.ix_(rows, columns)], rtol=0, atol=CLOSE)


# --- Agreement ---------------------------------------------------------------


@given(small_pedigrees(selfing=True))
def test_small_pedigrees_agree_with_the_table(rows):
    """Inbreeding, variances, products and blocks are those of the plain methods."""
    agrees(genotypes_of(pedigree_of(as_text(rows))))


@given(herds())
def test_herds_agree_with_the_table(one):
    """The same holds where blocks are full, lines of dams long and inbreeding high."""
    agrees(one)


@given(herds())
def test_herds_agree_on_two_threads(one):
    """The same holds when blocks are shared between threads."""
    agrees(one, threads=2)


def test_values_are_exact_within_few_generations():
    """After twenty generations of brother-sister mating every digit is the table's."""
    sire = [-1, *(2 * (each // 2) - 2 if each > 1 else -1 for each in range(1, 42))]
    dam = [-1, *(2 * (each // 2) - 1 if each > 1 else -1 for each in range(1, 42))]
    one = genotypes(sire, dam)
    own, variance = large.self_kinship(one)
    table = tabular_kinship(one)
    np.testing.assert_array_equal(own, np.diagonal(table))
    everyone = np.arange(len(one))
    np.testing.assert_array_equal(large.kinship_block(one, variance, everyone, everyone), table)


def test_mates_that_are_ancestors_are_counted_in_full():
    """Sons put to their dams and granddams, where what arises in the dam reaches both parents."""
    # 0-3 founders; 4 = 0x1; 5 = 2x4; 6 = 5x4 (son and dam), 7 = 6x4, 8 = 7x1, 9 = 8x5
    sire = [-1, -1, -1, -1, 0, 2, 5, 6, 7, 8]
    dam = [-1, -1, -1, -1, 1, 4, 4, 4, 1, 5]
    agrees(genotypes(sire, dam))


def test_long_lines_of_dams_are_followed_to_where_nothing_is_left():
    """Three hundred dams, each by a sire of her own, mated to sires from all along the line."""
    sire, dam = [-1], [-1]
    line = [0]
    for _generation in range(300):
        sire += [-1, len(sire)]
        dam += [-1, line[-1]]
        line.append(len(sire) - 1)
    for back in (299, 298, 290, 240, 150, 1):
        own_sire = line[back] - 1
        for mate in (line[-1], line[-2], line[150]):
            sire.append(own_sire)
            dam.append(mate)
    agrees(genotypes(sire, dam))


# --- Edges -------------------------------------------------------------------


@pytest.mark.parametrize("animals", [0, 1, 5])
def test_animals_without_parents_are_unrelated(animals):
    """A pedigree of no animal, of one, or of founders only has no inbreeding."""
    one = genotypes([-1] * animals, [-1] * animals)
    own, variance = large.self_kinship(one)
    np.testing.assert_array_equal(own, np.full(animals, 0.5))
    np.testing.assert_array_equal(variance, np.ones(animals))
    everyone = np.arange(animals)
    block = large.kinship_block(one, variance, everyone, everyone)
    np.testing.assert_array_equal(block, np.eye(animals) / 2)


def test_no_rows_or_columns_give_an_empty_block():
    """A block with nothing asked for has the shape asked for."""
    one = herd(200)
    _own, variance = large.self_kinship(one)
    nothing, some = np.array([], dtype=np.int64), np.array([3, 4])
    assert large.kinship_block(one, variance, nothing, some).shape == (0, 2)
    assert large.kinship_block(one, variance, some, nothing).shape == (2, 0)


def test_ten_thousand_generations_of_selfing():
    """F is 1 - 2**-t after t generations, all the way down a line that no matrix could hold."""
    length = 10_001
    line = np.arange(-1, length - 1)
    one = genotypes(line, line)
    own, variance = large.self_kinship(one)
    expected = 1.0 - 0.5 ** np.arange(1, length + 1)
    np.testing.assert_allclose(own, expected, rtol=0, atol=CLOSE)
    ends = np.array([0, length - 1])
    block = large.kinship_block(one, variance, ends, ends)
    np.testing.assert_allclose(block, [[0.5, 0.5], [0.5, 1.0]], rtol=0, atol=CLOSE)


def test_ten_thousand_generations_with_one_parent_known():
    """Nobody is inbred, and kinship along the line halves with each generation."""
    length = 10_001
    one = genotypes(np.arange(-1, length - 1), np.full(length, -1))
    own, variance = large.self_kinship(one)
    np.testing.assert_array_equal(own, np.full(length, 0.5))
    rows = np.array([0, 1, 30, length - 1])
    block = large.kinship_block(one, variance, rows, np.array([0]))
    np.testing.assert_allclose(block[:, 0], 0.5 ** (rows + 1.0), rtol=0, atol=1e-30)


def test_read_only_pedigrees_are_read():
    """Arrays that must not be written to give the same answer and stay as they are."""
    one = herd(500)
    own, variance = large.self_kinship(one)
    for each in (one.sire, one.dam, variance):
        each.setflags(write=False)
    again, _variance = large.self_kinship(one)
    assert again.tobytes() == own.tobytes()
    weights = np.full(len(one), 1 / len(one))
    weights.setflags(write=False)
    assert large.kinship_product(one, variance, weights).shape == (len(one),)
    assert weights[0] == 1 / len(one)


def test_only_ordinary_animals_are_plain():
    """Possible parents, clones and groups are left to the plain methods."""
    assert large.is_plain(herd(200))
    assert not large.is_plain(genotypes_of(pedigree_of("id,sire,dam\na,,\nb,,\nc,a|b,")))


# --- Threads, progress, interruption, first use ------------------------------


@pytest.mark.parametrize("threads", [2, 3])
def test_threads_do_not_change_a_single_bit(threads):
    """Answers of one thread and of several are the same bytes."""
    one = herd(6000)
    own, variance = large.self_kinship(one)
    shared_own, shared_variance = large.self_kinship(one, threads=threads)
    assert (own.tobytes(), variance.tobytes()) == (
        shared_own.tobytes(),
        shared_variance.tobytes(),
    )
    some = np.arange(0, 6000, 29)
    alone = large.kinship_block(one, variance, some, some)
    shared = large.kinship_block(one, variance, some, some, threads=threads)
    assert alone.tobytes() == shared.tobytes()
    np.testing.assert_array_equal(alone, alone.T)


@pytest.mark.parametrize("threads", [1, 2])
def test_progress_rises_to_the_end(threads):
    """Shares of the work done are told in rising order, from nothing to everything."""
    told: list[float] = []
    large.self_kinship(herd(6000), threads=threads, progress=told.append)
    assert told == sorted(told)
    assert (told[0], told[-1]) == (0.0, 1.0)
    assert len(told) > 3


@pytest.mark.parametrize("threads", [1, 2])
def test_an_interruption_stops_the_work(threads):
    """What is raised between two pieces of work comes out at once, and leaves nothing broken."""
    one = herd(6000)

    def interrupt(done: float) -> None:
        if done:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        large.self_kinship(one, threads=threads, progress=interrupt)
    own, _variance = large.self_kinship(one, threads=threads)
    assert own.tobytes() == large.self_kinship(one)[0].tobytes()


AGREES = (
    "from tests.test_compiled_kinship import agrees, herd, large;"
    "agrees(herd(150, sires=3), threads=2)"
)


def python(code: str, folder: Path, **settings: str) -> str:
    """What a fresh interpreter prints that is started in a folder with the package."""
    ended = subprocess.run(
        [sys.executable, "-W", "error", "-c", code],
        env={**os.environ, "PYTHONPATH": str(folder), **settings},
        cwd=folder,
        capture_output=True,
        text=True,
        check=False,
    )
    assert ended.returncode == 0, ended.stderr
    return ended.stdout.strip()


def test_the_kernels_also_run_uncompiled():
    """With compilation switched off the same lines give the same answers."""
    python(AGREES, Path(__file__).parents[1], NUMBA_DISABLE_JIT="1")


def test_nowhere_to_keep_compiled_code_is_no_error(tmp_path, monkeypatch):
    """Where no folder can be written to the kernels still compile, and the folder is None."""
    from numba.core import caching

    from pairing import compiling
    from pairing.kinship.compiled import inbreeding

    monkeypatch.setattr(caching.CacheImpl, "_locator_classes", [])
    kernel = compiling.kernel(lambda x: x + 1)
    assert kernel(1) == 2
    monkeypatch.setattr(inbreeding, "run_blocks", kernel)
    assert large.compiled_folder() is None
    assert not large.is_compiled()


@pytest.mark.slow
def test_first_use_is_told_from_later_ones(tmp_path):
    """Compiled code is found missing before the first use, and there after it."""
    package = Path(large.__file__).parents[1]
    shutil.copytree(
        package, tmp_path / "pairing", ignore=shutil.ignore_patterns("__pycache__", "*.nb?")
    )
    code = (
        "import numpy as np;"
        "from pairing.kinship import large;"
        "from pairing.pedigree.genotypes import Genotypes;"
        "first = large.is_compiled();"
        "parent = np.array([-1, 0], np.int32);"
        "own = np.arange(2, dtype=np.int32);"
        "one = Genotypes(parent, parent, {}, own, own, own);"
        "_own, variance = large.self_kinship(one);"
        "large.kinship_block(one, variance, own, own);"
        "large.kinship_product(one, variance, variance);"
        "print(first, large.is_compiled())"
    )
    cache = str(tmp_path / "compiled")
    assert python(code, tmp_path, NUMBA_CACHE_DIR=cache) == "False True"
    assert python(code, tmp_path, NUMBA_CACHE_DIR=cache) == "True True"
