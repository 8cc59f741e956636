"""Inbreeding of all animals, a block of parents at a time; arrays only.

The inbreeding of an animal is the kinship of its parents. For the pivots of a block (see
`pairs`) one pass up and one down the condensed pedigree gives kinship with every kept animal
(COLLEAU_2002); kinship with a mate is then the sum along its line of ancestors of what the
kept ones on it contribute.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from pairing.compiling import kernel
from pairing.kinship.compiled.condensed import (
    ABOVE,
    FARTHEST,
    NEEDED,
    Condensed,
    Passes,
    pass_down,
    pass_up,
)
from pairing.kinship.compiled.pairs import IN_PART, Blocks, Pairs, Parents

if TYPE_CHECKING:
    import numpy.typing as npt

    ByteArray = npt.NDArray[np.uint8]
    PlaceArray = npt.NDArray[np.int32]
    FloatArray = npt.NDArray[np.float64]


class Lines(NamedTuple):
    """Work space for the lines of a block's mates.

    Attributes
    ----------
    at, slot
        Parents that unfinished lines have come to, and whose lines they are.
    lane
        Column of the pivot of each mate.
    met, met_slot
        Kept animals met, nearest first, and on whose line.
    """

    at: PlaceArray
    slot: PlaceArray
    lane: ByteArray
    met: PlaceArray
    met_slot: PlaceArray


@kernel
def run_blocks(
    which: tuple[int, int, int],
    blocks: Blocks,
    parents: Parents,
    pairs: Pairs,
    pedigree: Condensed,
    lines: PlaceArray,
    inbreeding: FloatArray,
    variance: FloatArray,
    passes: Passes,
    work: Lines,
) -> None:
    """Find the inbreeding of the pairs of some blocks: first, last + 1, step.

    Parameters
    ----------
    inbreeding
        One a pair; -1 for no animal.
    variance
        Mendelian sampling variance D of each kept animal, negative until it is known.
    """
    steps = np.zeros(FARTHEST + 2, np.int32)
    for block in range(which[0], which[1], which[2]):
        pivots = blocks.pivots[blocks.bounds[block] : blocks.bounds[block + 1]]
        columns = pedigree.number[pivots]
        above = pass_up(columns, pedigree, passes)
        for each in passes.listed[:above]:
            if variance[each] < 0.0:
                variance[each] = _variance(each, parents, pairs, pedigree, inbreeding)
        top = _follow_lines(
            pivots, parents, pairs, pedigree, lines, inbreeding, passes, work, steps
        )
        pass_down(top, pedigree, variance, passes)
        _sum_lines(pairs.starts[pivots[0]], inbreeding, passes.reached, work, steps)
        for pair in range(pairs.starts[pivots[0]], pairs.starts[pivots[-1] + 1]):
            inbreeding[pair] *= 0.5
        passes.mark[: max(top, columns[-1]) + 1] = 0


@kernel
def _own_variance(each: int, parents: Parents, pairs: Pairs, inbreeding: FloatArray) -> float:
    """D of a parent: 1/2 - (F_s + F_d) / 4, an unknown parent counting as F = -1."""
    first: float = inbreeding[pairs.of_parent[parents.first[each]]]
    second: float = inbreeding[pairs.of_parent[parents.second[each]]]
    return 0.5 - 0.25 * (first + second)


@kernel
def _variance(
    kept: int, parents: Parents, pairs: Pairs, pedigree: Condensed, inbreeding: FloatArray
) -> float:
    total = 0.0
    for at in range(pedigree.merged_starts[kept], pedigree.merged_starts[kept + 1]):
        each = pedigree.merged[at]
        own = _own_variance(each, parents, pairs, inbreeding)
        total += 0.25 ** pedigree.distance[each] * own
    return total


@kernel
def _follow_lines(
    pivots: PlaceArray,
    parents: Parents,
    pairs: Pairs,
    pedigree: Condensed,
    lines: PlaceArray,
    inbreeding: FloatArray,
    passes: Passes,
    work: Lines,
    steps: PlaceArray,
) -> int:
    """Note and mark the kept animals that the mates' lines meet; the youngest of them.

    All lines go on together, one generation at a time, so that the far reads of one need not
    wait for those of another. A mate may itself stand above a pivot: what arises in it and
    in such ancestors on its line is added at once.
    """
    at, slot, lane, met, met_slot = work
    mark, passed = passes.mark, passes.passed
    base = pairs.starts[pivots[0]]
    top = open_lines = many = 0
    for column in range(len(pivots)):
        for pair in range(pairs.starts[pivots[column]], pairs.starts[pivots[column] + 1]):
            inbreeding[pair] = 0.0
            lane[pair - base] = column
            code = pairs.mate[pair]
            if code > 0:
                met[many] = code
                met_slot[many] = pair - base
                many += 1
                mark[code] |= NEEDED
                top = max(top, code)
            else:
                at[open_lines] = -code
                slot[open_lines] = pair - base
                open_lines += 1
    steps[1] = many
    share = 1.0
    for step in range(1, FARTHEST + 1):
        left = 0
        for line in range(open_lines):
            here, mine = at[line], slot[line]
            kept, onward = lines[here, 0], lines[here, 1]
            if kept & IN_PART:
                kept ^= IN_PART
                owner, column = pedigree.owner[here], lane[mine]
                if mark[owner] & ABOVE and passed[owner, column] != 0.0:
                    own = _own_variance(here, parents, pairs, inbreeding)
                    part = 0.5 ** pedigree.distance[here] * passed[owner, column]
                    inbreeding[base + mine] += share * part * own
            if kept:
                met[many] = kept
                met_slot[many] = mine
                many += 1
                mark[kept] |= NEEDED
                top = max(top, kept)
            if onward > 0:
                met[many] = onward
                met_slot[many] = mine
                many += 1
                mark[onward] |= NEEDED
                top = max(top, onward)
            elif onward < 0:
                at[left] = -onward
                slot[left] = mine
                left += 1
        open_lines = left
        share *= 0.5
        steps[step + 1] = many
    return top


@kernel
def _sum_lines(
    base: int, inbreeding: FloatArray, reached: FloatArray, work: Lines, steps: PlaceArray
) -> None:
    share = 1.0
    for step in range(FARTHEST + 1):
        for each in range(steps[step], steps[step + 1]):
            mine = work.met_slot[each]
            inbreeding[base + mine] += share * reached[work.met[each], work.lane[mine]]
        share *= 0.5
