"""Pairs of parents in blocks, for the inbreeding of all animals; arrays only.

Parents are numbered from 1 on, parents before their young; 0 is no animal. Each animal with
two known parents comes from a pair, and all from one pair are inbred alike. Of the two the
one with more young is the pair's pivot (after SARGOLZAEI_2005).
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from pairing.compiling import kernel
from pairing.kinship.compiled.condensed import FARTHEST, Condensed
from pairing.kinship.compiled.rows import LANES

if TYPE_CHECKING:
    import numpy.typing as npt

    PlaceArray = npt.NDArray[np.int32]
    FloatArray = npt.NDArray[np.float64]

NO_ANIMAL, NO_PAIR, FIRST_PAIR = 0, 1, 2
"""Pairs of no animal, of animals that lack a parent, and the first true one."""


class Parents(NamedTuple):
    """The animals that have young, P of them, with an entry 0 for none.

    Attributes
    ----------
    number
        Number of each animal of the pedigree, 0 if it has no young, shape (n,).
    first, second
        Numbers of the parents' own parents, shape (P + 1,).
    young
        How many young, shape (P + 1,).
    """

    number: PlaceArray
    first: PlaceArray
    second: PlaceArray
    young: PlaceArray


class Pairs(NamedTuple):
    """The different pairs, in order of their pivots.

    Attributes
    ----------
    starts
        Pairs of parent p as pivot are ``starts[p]:starts[p + 1]``, shape (P + 2,).
    mate
        The other parent of each pair.
    of_animal
        Pair each animal comes from, shape (n,).
    of_parent
        The same for each parent, shape (P + 1,).
    """

    starts: PlaceArray
    mate: PlaceArray
    of_animal: PlaceArray
    of_parent: PlaceArray


class Blocks(NamedTuple):
    """Pivots in blocks, none of which needs an inbreeding coefficient it finds itself.

    Attributes
    ----------
    pivots, bounds
        Pivots of block b are ``pivots[bounds[b]:bounds[b + 1]]``; they ascend.
    waits
        How many blocks, from the first on, must be done before each.
    """

    pivots: PlaceArray
    bounds: PlaceArray
    waits: PlaceArray


@kernel
def number_parents(sire: PlaceArray, dam: PlaceArray) -> Parents:
    """Number the animals that have young."""
    n = len(sire)
    number = np.zeros(n, np.int32)
    for each in range(n):
        for parent in (sire[each], dam[each]):
            if parent >= 0:
                number[parent] += 1
    count = 1
    for each in range(n):
        count += number[each] > 0
    first = np.zeros(count, np.int32)
    second = np.zeros(count, np.int32)
    young = np.zeros(count, np.int32)
    at = 0
    for each in range(n):
        if number[each]:
            at += 1
            young[at] = number[each]
            number[each] = at
            if sire[each] >= 0:
                first[at] = number[sire[each]]
            if dam[each] >= 0:
                second[at] = number[dam[each]]
    return Parents(number, first, second, young)


@kernel
def _pivot_first(a: int, b: int, young: PlaceArray) -> tuple[int, int]:
    more = young[a] > young[b] or (young[a] == young[b] and a >= b)
    return (a, b) if more else (b, a)


@kernel
def pair_up(sire: PlaceArray, dam: PlaceArray, parents: Parents) -> Pairs:
    """Find the different pairs."""
    number, young = parents.number, parents.young
    n, count = len(sire), len(young)
    bounds = np.zeros(count + 1, np.int32)
    for each in range(n):
        if sire[each] >= 0 and dam[each] >= 0:
            pivot, _mate = _pivot_first(number[sire[each]], number[dam[each]], young)
            bounds[pivot + 1] += 1
    for pivot in range(count):
        bounds[pivot + 1] += bounds[pivot]
    at = bounds.copy()
    mate = np.empty(bounds[count] + FIRST_PAIR, np.int32)
    animal = np.empty(bounds[count], np.int32)
    for each in range(n):
        if sire[each] >= 0 and dam[each] >= 0:
            pivot, other = _pivot_first(number[sire[each]], number[dam[each]], young)
            mate[FIRST_PAIR + at[pivot]] = other
            animal[at[pivot]] = each
            at[pivot] += 1
    of_animal = np.full(n, NO_PAIR, np.int32)
    starts = np.empty(count + 1, np.int32)
    latest = np.zeros(count, np.int32)
    pairs = FIRST_PAIR
    for pivot in range(count):
        starts[pivot] = pairs
        for entry in range(bounds[pivot], bounds[pivot + 1]):
            other = mate[FIRST_PAIR + entry]
            if latest[other] < starts[pivot]:
                latest[other] = pairs
                mate[pairs] = other
                pairs += 1
            of_animal[animal[entry]] = latest[other]
    starts[count] = pairs
    of_parent = np.zeros(count, np.int32)
    for each in range(n):
        if number[each]:
            of_parent[number[each]] = of_animal[each]
    return Pairs(starts, mate[:pairs].copy(), of_animal, of_parent)


@kernel
def block_pivots(parents: Parents, pairs: Pairs) -> Blocks:
    """Put pivots into blocks of `LANES`, closing one early where it would need itself."""
    count = len(parents.young)
    pivot_of = np.zeros(len(pairs.mate), np.int32)
    for pivot in range(1, count):
        pivot_of[pairs.starts[pivot] : pairs.starts[pivot + 1]] = pivot
    ready = np.zeros(count, np.int32)
    block = np.zeros(count, np.int32)
    pivots = np.empty(count, np.int32)
    bounds = np.zeros(count + 1, np.int32)
    waits = np.zeros(count, np.int32)
    many = 0
    here = 0
    for each in range(1, count):
        after = 0
        for parent in (parents.first[each], parents.second[each]):
            if parent:
                found_in = block[pivot_of[pairs.of_parent[parent]]]
                after = max(after, ready[parent], found_in)
        ready[each] = after
        if pairs.starts[each + 1] > pairs.starts[each]:
            if here == 0 or many - bounds[here - 1] == LANES or after == here:
                bounds[here] = many
                here += 1
            block[each] = here
            pivots[many] = each
            many += 1
            waits[here - 1] = max(waits[here - 1], after)
    bounds[here] = many
    return Blocks(pivots[:many].copy(), bounds[: here + 1].copy(), waits[:here].copy())


IN_PART = np.int32(1 << 30)


@kernel
def lines_of(parents: Parents, pedigree: Condensed) -> tuple[PlaceArray, PlaceArray]:
    """What a line of ancestors meets at each parent that is not kept.

    One of an animal's two known parents is a pivot and so kept: a line along the other does
    not branch.

    Returns
    -------
    lines
        Shape (P + 1, 2): a kept parent, plus `IN_PART` if the animal was merged into
        a kept one; and a second kept parent, or minus the one the line goes on with.
    length
        Kept parents along the whole line, shape (P + 1,), up to `FARTHEST` steps.
    """
    number = pedigree.number
    lines = np.zeros((len(number), 2), np.int32)
    length = np.zeros(len(number), np.int32)
    for each in range(1, len(number)):
        if number[each] > 0:
            length[each] = 1
            continue
        a, b = parents.first[each], parents.second[each]
        if a and number[a] <= 0:
            a, b = b, a
        lines[each, 0] = a
        if a:
            lines[each, 0] = number[a]
        if b:
            lines[each, 1] = number[b] if number[b] > 0 else -b
        if pedigree.owner[each]:
            lines[each, 0] |= IN_PART
        length[each] = min((a > 0) + length[b], 2 * FARTHEST)
    return lines, length


@kernel
def code_mates(pairs: Pairs, blocks: Blocks, number: PlaceArray, length: PlaceArray) -> int:
    """Turn mates into kept numbers or minus parents; the most kept ones a block's lines meet."""
    mate = pairs.mate
    most = 0
    for block in range(len(blocks.waits)):
        begin = pairs.starts[blocks.pivots[blocks.bounds[block]]]
        end = pairs.starts[blocks.pivots[blocks.bounds[block + 1] - 1] + 1]
        meets = 0
        for pair in range(begin, end):
            meets += length[mate[pair]]
            kept = number[mate[pair]]
            mate[pair] = kept if kept > 0 else -mate[pair]
        most = max(most, meets)
    return most
