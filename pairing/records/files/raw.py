"""`RawTable`: a table of text as it was read, before anybody asks what its columns mean."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from pairing.errors import RecordsError
from pairing.records.fields import SPELLINGS, folded

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

_MOST_LINES_ABOVE = 20


@dataclass(frozen=True, slots=True)
class RawTable:
    """A table as read: its header and, for each heading, the cells below it.

    Attributes
    ----------
    name
        The file's own name, without its folder.
    kind
        How it was read, in words: ``comma-separated text, UTF-8``.
    sha256
        Of the source's bytes.
    header
        Headings, inner blanks folded to one, trailing blank ones cut.
    header_line
        Line (or sheet row) of the header, counted from 1.
    columns
        One sequence of cells a heading, all of one length; wholly blank rows are left out.
    lines
        Line (or sheet row) on which each row starts.
    overlong
        Place of a row to all its cells, where it has more than the header.
    part
        The sheet it was read from; blank where the file holds one table only.
    """

    name: str
    kind: str
    sha256: str
    header: tuple[str, ...]
    header_line: int
    columns: tuple[Sequence[str], ...]
    lines: Sequence[int]
    overlong: Mapping[int, tuple[str, ...]] = field(default_factory=dict)
    part: str = ""


@dataclass(frozen=True, slots=True)
class Sought:
    """What kind of table is looked for, and the headings by which it is known.

    Attributes
    ----------
    what, entry
        The table and one row of it, in words.
    columns
        Spelling of a heading, folded, to the column of ours that it is.
    needed
        Columns without which a row of cells is not the header.
    """

    what: str
    entry: str
    columns: Mapping[str, str]
    needed: tuple[str, ...] = ()

    def lacks(self, cells: Iterable[str]) -> list[str]:
        """Needed columns that no cell names."""
        named = {self.columns.get(folded(cell)) for cell in cells}
        return [column for column in self.needed if column not in named]

    def fits(self, cells: Sequence[str]) -> bool:
        """Whether cells are surely the header: all that is needed, and two headings at least."""
        return known_columns(cells, self) >= _FEWEST and not self.lacks(cells)


_FEWEST = 2
ANIMALS = Sought("table of animals", "animal", SPELLINGS)
"""A table of animals, one row each."""


def raw_table(
    name: str,
    kind: str,
    sha256: str,
    rows: Sequence[Sequence[str]],
    lines: Sequence[int],
    *,
    sought: Sought = ANIMALS,
    part: str = "",
) -> RawTable:
    """A table from rows of text, the header among the first of them.

    Lines above the header (a title, a date of printing) are passed over, see `header_place`.

    Raises
    ------
    RecordsError
        If there is no row at all, or none below the header.
    """
    filled = [place for place, row in enumerate(rows) if any(map(str.strip, row))]
    if not filled:
        raise RecordsError(f"{name}: the file is empty.", remedy=f"Expected a {sought.what}.")
    first = header_place(rows, filled, sought)
    header = tuple(" ".join(cell.split()) for cell in rows[filled[first]])
    while header and not header[-1]:
        header = header[:-1]
    below = filled[first + 1 :]
    if not below:
        raise RecordsError(
            f"{name}: there is a header but no {sought.entry}.",
            details=[f"Line {lines[filled[first]]} reads: {', '.join(header)}"],
            remedy=f"Expected one row an {sought.entry} below the header.",
        )
    width = len(header)
    overlong = {
        place: tuple(rows[row])
        for place, row in enumerate(below)
        if len(rows[row]) > width and any(map(str.strip, rows[row][width:]))
    }
    padding = ("",) * width
    even = [(*rows[row], *padding)[:width] for row in below]
    return RawTable(
        name,
        kind,
        sha256,
        header,
        lines[filled[first]],
        tuple(zip(*even, strict=True)),
        tuple(lines[row] for row in below),
        overlong,
        part,
    )


def known_columns(cells: Iterable[str], sought: Sought = ANIMALS) -> int:
    """How many cells are headings of the table that is looked for."""
    return sum(folded(cell.strip('"')) in sought.columns for cell in cells)


def header_place(
    rows: Sequence[Sequence[str]], filled: Sequence[int], sought: Sought = ANIMALS
) -> int:
    """Which of the `filled` rows is the header.

    It is the first row, unless a fuller one soon below it has two known headings and the
    first none. Where some columns are needed, the first row near the top that has them all.
    """

    def cells(place: int) -> list[str]:
        return [cell for cell in rows[filled[place]] if cell.strip()]

    near = range(min(len(filled), _MOST_LINES_ABOVE))
    if sought.needed:
        fitting = next((place for place in near if sought.fits(cells(place))), None)
        if fitting is not None:
            return fitting
    if known_columns(cells(0), sought):
        return 0
    for place in near[1:]:
        if known_columns(cells(place), sought) >= _FEWEST and len(cells(place)) > len(cells(0)):
            return place
    return 0
