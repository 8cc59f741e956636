"""A pedigree without the animals that only pass genes on to one other; arrays only.

An animal with a single child enters kinship through that child alone. Taking it out keeps
K = T D T' / 2 exact: its parents become parents of the child at half the share, and a quarter
of its Mendelian sampling variance goes to the child's. Far fewer rows remain, and these stay
in the cache: in herdbooks nearly all lines of dams vanish. The factors are those of
HENDERSON_1976, the passes those of COLLEAU_2002.

Here animals are numbered from 1 on, parents before their young; 0 is no animal.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from pairing.compiling import kernel
from pairing.kinship.compiled.rows import add_row, add_two, set_row, set_two

if TYPE_CHECKING:
    import numpy.typing as npt

    ByteArray = npt.NDArray[np.uint8]
    PlaceArray = npt.NDArray[np.int32]
    FloatArray = npt.NDArray[np.float64]

FARTHEST = 100
"""Generations on one line after which a share, below 2**-100, counts as none."""

NEEDED, ABOVE = 1, 2
"""Marks of a kept animal: its row is needed; it stands above (or is) a column of the block."""


class Condensed(NamedTuple):
    """The animals kept, numbered anew from 1 on, and the arrows between them.

    Attributes
    ----------
    number
        New number of each animal: 0 for one taken out, -1 outside the part that matters.
    owner, distance
        The kept animal each was merged into, and generations down to it; a kept animal owns
        itself.
    starts, ancestor, share
        Arrows to kept animal k are ``starts[k]:starts[k + 1]``: from whom, and how much.
    merged_starts, merged
        In the same manner the animals merged into k, itself included.
    """

    number: PlaceArray
    owner: PlaceArray
    distance: PlaceArray
    starts: PlaceArray
    ancestor: PlaceArray
    share: FloatArray
    merged_starts: PlaceArray
    merged: PlaceArray


class Passes(NamedTuple):
    """Work space of one thread; tables have one row a kept animal and `LANES` columns.

    Attributes
    ----------
    mark
        `NEEDED` and `ABOVE`, 0 between blocks.
    listed
        Kept animals met, youngest first.
    passed
        What each animal passes to the columns: rows of `ABOVE` animals only.
    reached
        Twice the kinship of each needed animal with the columns.
    """

    mark: ByteArray
    listed: PlaceArray
    passed: FloatArray
    reached: FloatArray


@kernel
def condense(first: PlaceArray, second: PlaceArray, keep: ByteArray) -> Condensed:
    """Keep those in `keep`, and ancestors of theirs with several children among them.

    Parameters
    ----------
    first, second
        Numbers of the parents; entry 0 is no animal.
    """
    number = _kept_numbers(first, second, keep)
    owner, distance = _owners(first, second, number)
    count = len(first)
    kept = number.max()
    starts = np.zeros(kept + 2, np.int32)
    merged_starts = np.zeros(kept + 2, np.int32)
    for each in range(1, count):
        if owner[each] and distance[each] < FARTHEST:
            merged_starts[owner[each] + 1] += 1
            for parent in (first[each], second[each]):
                starts[owner[each] + 1] += number[parent] > 0
    for each in range(kept + 1):
        starts[each + 1] += starts[each]
        merged_starts[each + 1] += merged_starts[each]
    at = starts.copy()
    merged_at = merged_starts.copy()
    ancestor = np.empty(starts[kept + 1], np.int32)
    share = np.empty(starts[kept + 1], np.float64)
    merged = np.empty(merged_starts[kept + 1], np.int32)
    for each in range(count - 1, 0, -1):
        mine = owner[each]
        if mine and distance[each] < FARTHEST:
            merged[merged_at[mine]] = each
            merged_at[mine] += 1
            for parent in (first[each], second[each]):
                if number[parent] > 0:
                    ancestor[at[mine]] = number[parent]
                    share[at[mine]] = 0.5 ** (distance[each] + 1)
                    at[mine] += 1
    return Condensed(number, owner, distance, starts, ancestor, share, merged_starts, merged)


@kernel
def _kept_numbers(first: PlaceArray, second: PlaceArray, keep: ByteArray) -> PlaceArray:
    count = len(first)
    children = np.zeros(count, np.uint8)
    number = np.full(count, -1, np.int32)
    for each in range(count - 1, 0, -1):
        if keep[each] or children[each]:
            number[each] = 1 if keep[each] or children[each] > 1 else 0
            for parent in (first[each], second[each]):
                children[parent] = min(children[parent] + 1, 2)
    number[0] = 0
    kept = 0
    for each in range(1, count):
        if number[each] == 1:
            kept += 1
            number[each] = kept
    return number


@kernel
def _owners(
    first: PlaceArray, second: PlaceArray, number: PlaceArray
) -> tuple[PlaceArray, PlaceArray]:
    count = len(first)
    owner = np.zeros(count, np.int32)
    distance = np.zeros(count, np.int32)
    for each in range(count - 1, 0, -1):
        if number[each] > 0:
            owner[each] = number[each]
        if owner[each]:
            for parent in (first[each], second[each]):
                if parent and number[parent] == 0:
                    owner[parent] = owner[each]
                    distance[parent] = distance[each] + 1
    return owner, distance


@kernel
def pass_up(columns: PlaceArray, pedigree: Condensed, passes: Passes) -> int:
    """Fill `passed` for the ancestors of kept animals `columns`, and list them: how many."""
    mark, listed, passed = passes.mark, passes.listed, passes.passed
    starts, ancestor, share = pedigree.starts, pedigree.ancestor, pedigree.share
    top = 0
    for column in columns:
        top = max(top, column)
        mark[column] = ABOVE
        passed[column, :] = 0.0
    for lane in range(len(columns)):
        passed[columns[lane], lane] = 1.0
    many = 0
    for each in range(top, 0, -1):
        if mark[each] != ABOVE:
            continue
        listed[many] = each
        many += 1
        for at in range(starts[each], starts[each + 1]):
            parent = ancestor[at]
            if mark[parent] == ABOVE:
                add_row(passed, parent, passed, each, share[at])
            else:
                mark[parent] = ABOVE
                set_row(passed, parent, passed, each, share[at])
    return many


@kernel
def pass_down(top: int, pedigree: Condensed, variance: FloatArray, passes: Passes) -> int:
    """Fill `reached` for marked animals up to `top` and what they descend from: how many."""
    mark, listed, passed, reached = passes
    starts, ancestor, share = pedigree.starts, pedigree.ancestor, pedigree.share
    many = 0
    for each in range(top, 0, -1):
        if mark[each] & NEEDED:
            listed[many] = each
            many += 1
            for at in range(starts[each], starts[each + 1]):
                mark[ancestor[at]] |= NEEDED
    for back in range(many - 1, -1, -1):
        each = listed[back]
        at, end = starts[each], starts[each + 1]
        odd = (end - at) % 2
        if mark[each] & ABOVE:
            set_row(reached, each, passed, each, variance[each])
            if odd:
                add_row(reached, each, reached, ancestor[at], share[at])
                at += 1
        elif odd:
            set_row(reached, each, reached, ancestor[at], share[at])
            at += 1
        elif at == end:
            reached[each, :] = 0.0
        else:
            first, second = ancestor[at], ancestor[at + 1]
            set_two(reached, each, reached, first, share[at], second, share[at + 1])
            at += 2
        for more in range(at, end, 2):
            first, second = ancestor[more], ancestor[more + 1]
            add_two(reached, each, reached, first, share[more], second, share[more + 1])
    return many
