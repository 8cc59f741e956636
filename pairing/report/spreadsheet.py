"""Workbooks: tables written as sheets, every text as text, the same bytes for the same input."""

from __future__ import annotations

import datetime
import io
import math
import re
from dataclasses import dataclass, field
from itertools import chain, islice
from typing import TYPE_CHECKING, Any

from pairing.errors import OptionError
from pairing.report.content import Answer

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Sequence
    from pathlib import Path
    from typing import IO

MOST_ROWS = 1_048_576
"""Rows of one sheet, the header included: Excel's own limit, as are the next three."""
MOST_COLUMNS = 16_384
LONGEST_TEXT = 32_767
LONGEST_NAME = 31
EXACT_DIGITS = 10**15
"""A spreadsheet keeps 15 digits of a number; longer whole numbers are written as text."""

_WIDEST = 60
_NARROWEST = 8
_WRITTEN = datetime.datetime(2000, 1, 1, tzinfo=datetime.UTC)
_CUT = " [cut here]"
_NOT_IN_NAMES = re.compile(r"[\[\]:*?/\\\x00-\x1f\x7f-\x9f\ud800-\udfff\ufffe\uffff]")
_NOT_IN_XML = re.compile(r"[\ud800-\udfff\ufffe\uffff]")


@dataclass(frozen=True, slots=True)
class Sheet:
    """One sheet of a workbook.

    Attributes
    ----------
    name
        As it is meant; made valid and unique when written.
    header
        Headings, kept in sight; empty for a sheet without.
    rows
        Cells: text, numbers, booleans, None for blank.
    headings
        Places of rows that head a further table below the first.
    """

    name: str
    header: tuple[str, ...]
    rows: Iterable[Sequence[Any]]
    headings: frozenset[int] = field(default=frozenset())


@dataclass(frozen=True, slots=True)
class AnswerInSheets(Answer):
    """An answer that a workbook holds on sheets of its own instead of one table."""

    sheets: tuple[Sheet, ...] = ()


def write_workbook(
    sheets: Iterable[Sheet], path: Path | IO[bytes], *, most_rows: int = MOST_ROWS
) -> tuple[str, ...]:
    """Write sheets as an .xlsx workbook; no text becomes a formula, a number or a link.

    A table longer than a sheet goes on in a further sheet.
    What did not fit is said on a last sheet "Notes" and given back as sentences.

    Raises
    ------
    OptionError
        If the package that writes workbooks is missing, or a table has too many columns.
    """
    sheets = tuple(sheets)
    _refuse_too_wide(sheets)
    workbook = workbook_writer()(
        path if hasattr(path, "write") else str(path), {"constant_memory": True}
    )
    workbook.set_properties({"created": _WRITTEN})
    page = _Page(workbook, workbook.add_format({"bold": True}), most_rows)
    names = SheetNames()
    for sheet, name in zip(sheets, [names.valid(each.name) for each in sheets], strict=True):
        page.write(sheet, name, names)
    notes = page.notes()
    if notes:
        rows = [(note,) for note in notes]
        page.write(Sheet("Notes", ("What did not fit",), rows), names.valid("Notes"), names)
    workbook.close()
    return notes


def workbook_writer() -> Any:
    """The class that writes workbooks, loaded only now; a call may ask for it before long work.

    Raises
    ------
    OptionError
        If the package is missing.
    """
    try:
        from xlsxwriter import Workbook  # type: ignore[import-untyped]
    except ImportError:
        raise OptionError(
            "Writing .xlsx needs the package xlsxwriter.",
            remedy="Install it with: pip install 'pairing[report]'",
        ) from None
    return Workbook


def workbook_bytes(sheets: Iterable[Sheet]) -> bytes:
    """A workbook of these sheets as the content of a file."""
    out = io.BytesIO()
    write_workbook(sheets, out)
    return out.getvalue()


class SheetNames:
    """Names of sheets made valid and given once: 31 characters, no brackets, colons, slashes."""

    def __init__(self) -> None:
        self._taken = {"history"}  # Excel keeps this name for itself.

    def valid(self, wanted: str) -> str:
        """`wanted`, changed as little as a sheet's name needs; numbered if it is taken."""
        name = _NOT_IN_NAMES.sub("-", " ".join(wanted.split())).strip("' ") or "Sheet"
        number, ending = 1, ""
        while True:
            candidate = _cut_to(name, LONGEST_NAME - len(ending)).rstrip("' ") + ending
            if candidate.casefold() not in self._taken:
                self._taken.add(candidate.casefold())
                return candidate
            number += 1
            ending = f" ({number})"


def _cut_to(text: str, units: int) -> str:
    """The beginning of a text in so many units of UTF-16, as spreadsheets count."""
    return text.encode("utf-16-le")[: 2 * units].decode("utf-16-le", errors="ignore")


def _refuse_too_wide(sheets: Iterable[Sheet]) -> None:
    wide = next((each for each in sheets if len(each.header) > MOST_COLUMNS), None)
    if wide is not None:
        raise OptionError(
            f"The table has {len(wide.header):,} columns and a sheet takes {MOST_COLUMNS:,}.",
            remedy="Write it as .csv, or ask for fewer animals.",
        )


class _Page:
    """Writes sheets into one workbook and remembers what did not fit."""

    def __init__(self, workbook: Any, bold: Any, most_rows: int) -> None:
        self._workbook = workbook
        self._bold = bold
        self._most_rows = most_rows
        self._split: list[str] = []
        self._cut = 0

    def notes(self) -> tuple[str, ...]:
        """Sentences on what did not fit, empty when all did."""
        cut = (
            [
                f"A cell takes {LONGEST_TEXT:,} characters; {self._cut:,} longer "
                f'{"text is" if self._cut == 1 else "texts are"} cut, and end in "{_CUT.strip()}". '
                "CSV holds them whole."
            ]
            if self._cut
            else []
        )
        return (*self._split, *cut)

    def write(self, sheet: Sheet, name: str, names: SheetNames) -> None:
        """Write a table on one sheet, or on as many as it needs."""
        rows: Iterator[tuple[int, Sequence[Any]]] = enumerate(sheet.rows)
        room = self._most_rows - bool(sheet.header)
        used = [name]
        self._write_part(sheet, name, islice(rows, room))
        while (following := next(rows, None)) is not None:
            used.append(names.valid(sheet.name))
            self._write_part(sheet, used[-1], chain([following], islice(rows, room - 1)))
        if len(used) > 1:
            listed = ", ".join(f'"{each}"' for each in used)
            self._split.append(
                f"A sheet takes {self._most_rows:,} rows, so the table is on {len(used)} sheets: "
                f"{listed}."
            )

    def _write_part(
        self, sheet: Sheet, name: str, rows: Iterator[tuple[int, Sequence[Any]]]
    ) -> None:
        page = self._workbook.add_worksheet(name)
        widths: dict[int, int] = {}
        line = 0
        if sheet.header:
            self._write_row(page, 0, sheet.header, widths, self._bold)
            page.freeze_panes(1, 0)
            line = 1
        for place, row in rows:
            heading = self._bold if place in sheet.headings else None
            self._write_row(page, line, row, widths, heading)
            line += 1
        for column, width in widths.items():
            page.set_column(column, column, min(max(width, _NARROWEST), _WIDEST) + 2)

    def _write_row(
        self, page: Any, line: int, row: Sequence[Any], widths: dict[int, int], style: Any
    ) -> None:
        # A sentence that stands alone in its row runs over the blank cells beside it.
        alone = len(row) == 1
        for column, value in enumerate(row):
            if value is None or value == "":
                continue
            shown = self._write_cell(page, line, column, value, style)
            if not alone:
                widths[column] = max(widths.get(column, 0), shown)

    def _write_cell(self, page: Any, line: int, column: int, value: Any, style: Any) -> int:
        """Write one cell; the characters it shows, about."""
        if isinstance(value, bool):
            page.write_boolean(line, column, value, style)
            return 5
        if _is_exact_number(value):
            page.write_number(line, column, value, style)
            return min(len(str(value)), 12)
        text = _NOT_IN_XML.sub("\N{REPLACEMENT CHARACTER}", str(value))
        if len(text) > LONGEST_TEXT // 2:
            kept = _cut_to(text, LONGEST_TEXT)
            if len(kept) < len(text):
                text = _cut_to(text, LONGEST_TEXT - len(_CUT)) + _CUT
                self._cut += 1
        page.write_string(line, column, text, style)
        return min(len(text), _WIDEST)


def _is_exact_number(value: object) -> bool:
    if isinstance(value, int):
        return abs(value) < EXACT_DIGITS
    return isinstance(value, float) and math.isfinite(value)
