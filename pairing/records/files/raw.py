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
    """

    name: str
    kind: str
    sha256: str
    header: tuple[str, ...]
    header_line: int
    columns: tuple[Sequence[str], ...]
    lines: Sequence[int]
    overlong: Mapping[int, tuple[str, ...]] = field(default_factory=dict)


def raw_table(
    name: str, kind: str, sha256: str, rows: Sequence[Sequence[str]], lines: Sequence[int]
) -> RawTable:
    """A table from rows of text, the header among the first of them.

    Lines above the header (a title, a date of printing) are passed over: the header is the
    first row, unless a fuller one soon below it names two of our fields and the first none.

    Raises
    ------
    RecordsError
        If there is no row at all, or none below the header.
    """
    filled = [place for place, row in enumerate(rows) if any(map(str.strip, row))]
    if not filled:
        raise RecordsError(f"{name}: the file is empty.", remedy="Expected a table of animals.")
    first = header_place(rows, filled)
    header = tuple(" ".join(cell.split()) for cell in rows[filled[first]])
    while header and not header[-1]:
        header = header[:-1]
    below = filled[first + 1 :]
    if not below:
        raise RecordsError(
            f"{name}: there is a header but no animal.",
            details=[f"Line {lines[filled[first]]} reads: {', '.join(header)}"],
            remedy="Expected one row an animal below the header.",
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
    )


def known_columns(cells: Iterable[str]) -> int:
    """How many cells are spellings of our fields."""
    return sum(folded(cell.strip('"')) in SPELLINGS for cell in cells)


def header_place(rows: Sequence[Sequence[str]], filled: Sequence[int]) -> int:
    """Which of the `filled` rows is the header."""

    def cells(place: int) -> list[str]:
        return [cell for cell in rows[filled[place]] if cell.strip()]

    if known_columns(cells(0)):
        return 0
    for place in range(1, min(len(filled), _MOST_LINES_ABOVE)):
        if known_columns(cells(place)) >= 2 and len(cells(place)) > len(cells(0)):
            return place
    return 0
