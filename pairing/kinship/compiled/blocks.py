"""Kinship of some animals with some others, through their ancestors only; arrays only."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from pairing.compiling import kernel
from pairing.kinship.compiled.condensed import (
    NEEDED,
    Condensed,
    Passes,
    condense,
    pass_down,
    pass_up,
)
from pairing.kinship.compiled.rows import LANES

if TYPE_CHECKING:
    import numpy.typing as npt

    PlaceArray = npt.NDArray[np.int32]
    FloatArray = npt.NDArray[np.float64]


class Part(NamedTuple):
    """The condensed ancestry of the animals asked for.

    Attributes
    ----------
    variance
        Mendelian sampling variance D of each kept animal.
    rows, columns
        Kept numbers of the animals asked for.
    """

    pedigree: Condensed
    variance: FloatArray
    rows: PlaceArray
    columns: PlaceArray


@kernel
def part_of(
    sire: PlaceArray,
    dam: PlaceArray,
    variance: FloatArray,
    rows: PlaceArray,
    columns: PlaceArray,
) -> Part:
    """Leave out all but `rows`, `columns` and their ancestors, and condense what remains."""
    wanted = np.zeros(len(sire), np.uint8)
    end = 0
    for asked in (rows, columns):
        for each in asked:
            wanted[each] = 2
            end = max(end, each + 1)
    for each in range(end - 1, -1, -1):
        if wanted[each]:
            if sire[each] >= 0:
                wanted[sire[each]] |= 1
            if dam[each] >= 0:
                wanted[dam[each]] |= 1
    number = np.zeros(end, np.int32)
    count = 1
    for each in range(end):
        if wanted[each]:
            number[each] = count
            count += 1
    first = np.zeros(count, np.int32)
    second = np.zeros(count, np.int32)
    own = np.zeros(count, np.float64)
    keep = np.zeros(count, np.uint8)
    for each in range(end):
        at = number[each]
        if at:
            if sire[each] >= 0:
                first[at] = number[sire[each]]
            if dam[each] >= 0:
                second[at] = number[dam[each]]
            own[at] = variance[each]
            keep[at] = wanted[each] >> 1
    pedigree = condense(first, second, keep)
    kept = len(pedigree.starts) - 2
    total = np.zeros(kept + 1, np.float64)
    for each in range(1, kept + 1):
        for at in range(pedigree.merged_starts[each], pedigree.merged_starts[each + 1]):
            merged = pedigree.merged[at]
            total[each] += 0.25 ** pedigree.distance[merged] * own[merged]
    return Part(pedigree, total, pedigree.number[number[rows]], pedigree.number[number[columns]])


@kernel
def run_columns(
    which: tuple[int, int, int], same: bool, part: Part, passes: Passes, kinship: FloatArray
) -> None:
    """Fill some blocks of `LANES` columns of `kinship`: first, last + 1, step.

    Parameters
    ----------
    same
        Rows and columns are the same animals, ascending: each block then computes only what
        stands above the diagonal, and copies it below.
    """
    for block in range(which[0], which[1], which[2]):
        begin = block * LANES
        columns = part.columns[begin : begin + LANES]
        rows = part.rows[: begin + len(columns)] if same else part.rows
        pass_up(columns, part.pedigree, passes)
        top = 0
        for row in rows:
            top = max(top, row)
            passes.mark[row] |= NEEDED
        pass_down(top, part.pedigree, part.variance, passes)
        passes.mark[:] = 0
        for row in range(len(rows)):
            for lane in range(max(0, row - begin) if same else 0, len(columns)):
                value = 0.5 * passes.reached[rows[row], lane]
                kinship[row, begin + lane] = value
                if same:
                    kinship[begin + lane, row] = value
