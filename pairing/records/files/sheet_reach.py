"""What the XML of a sheet holds, found out as it streams by and without keeping the cells.

The reach of each sheet is known before the reader sets memory aside for it, and so is what
the reader cannot tell: the text of error cells, formulas saved without their value, and
numbers shown with zeros in front.
"""

from __future__ import annotations

import re
from array import array
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from pairing.records.files.shown_zeros import Digits, digits_of_format, digits_of_text

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

MOST_PLACES = 20_000_000
"""Places for cells, blank ones counted, that a sheet may span: full height at twenty columns."""
_MOST_LETTERS = 500_000_000
_MOST_LISTED = 10_000
_LONGEST_TAG = 1 << 20
_MOST_STYLES = 65_536
"""Spreadsheet programs stop a little below (common practice, no source)."""
_MOST_SOUGHT = 100


@dataclass(slots=True)
class Sheet:
    """What the XML of one sheet holds; rows and columns are counted from 0."""

    first: tuple[int, int] | None = None
    last: tuple[int, int] = (0, 0)
    letters: int = 0
    errors: dict[tuple[int, int], str] = field(default_factory=dict)
    unsaved: list[tuple[int, int]] = field(default_factory=list)
    digits: Digits = field(default_factory=Digits)

    @property
    def places(self) -> int:
        """Cells between the first and the last filled one, blank ones counted."""
        if self.first is None:
            return 0
        return (self.last[0] - self.first[0] + 1) * (self.last[1] - self.first[1] + 1)

    @property
    def too_large(self) -> bool:
        """Whether reading the sheet would take more memory than any real table needs."""
        return self.places > MOST_PLACES or self.letters > _MOST_LETTERS

    def reach(self, row: int, column: int, rows: int = 1, columns: int = 1) -> None:
        """Note a block of filled cells."""
        first = self.first or (row, column)
        self.first = (min(first[0], row), min(first[1], column))
        self.last = (max(self.last[0], row + rows - 1), max(self.last[1], column + columns - 1))


def place_name(row: int, column: int) -> str:
    """Name of a cell as spreadsheets write it, such as ``B7``; both counted from 0."""
    letters = ""
    column += 1
    while column:
        column, letter = divmod(column - 1, 26)
        letters = chr(65 + letter) + letters
    return f"{letters}{row + 1}"


class Handler:
    """Takes the events of an XML file; tags may carry a prefix."""

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        """An element begins."""

    def end(self, tag: str) -> None:
        """An element ends."""

    def text(self, text: str) -> None:
        """Some of an element's text."""


class Elements(Handler):
    """Attributes of every element of the kinds asked for."""

    def __init__(self, *kinds: str) -> None:
        self.found: dict[str, list[dict[str, str]]] = {kind: [] for kind in kinds}

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        """See `Handler.start`."""
        kind = tag.rpartition(":")[2]
        if kind in self.found:
            self.found[kind].append(attributes)


class SharedText(Handler):
    """Length of each text that cells refer to by number."""

    def __init__(self) -> None:
        self.lengths = array("Q")
        self._length = 0

    def text(self, text: str) -> None:
        """See `Handler.text`."""
        self._length += len(text)

    def end(self, tag: str) -> None:
        """See `Handler.end`."""
        if tag == "si" or tag.endswith(":si"):
            self.lengths.append(self._length)
            self._length = 0


class Formats(Handler):
    """Styles of an .xlsx workbook whose number format is zeros only."""

    def __init__(self) -> None:
        self._digits: dict[str, int] = {}
        self._styles: list[str] = []
        self._in_cells = False

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        """See `Handler.start`."""
        kind = tag.rpartition(":")[2]
        if kind == "numFmt":
            digits = digits_of_format(attributes.get("formatCode", ""))
            if digits and len(self._digits) < _MOST_STYLES:
                self._digits[attributes.get("numFmtId", "")] = digits
        elif kind == "cellXfs":
            self._in_cells = True
        elif kind == "xf" and self._in_cells and len(self._styles) < _MOST_STYLES:
            self._styles.append(attributes.get("numFmtId", "0"))

    def end(self, tag: str) -> None:
        """See `Handler.end`."""
        if tag.rpartition(":")[2] == "cellXfs":
            self._in_cells = False

    @property
    def styles(self) -> dict[int, int]:
        """Number of a style to the digits it shows at least."""
        return {
            place: self._digits[number]
            for place, number in enumerate(self._styles)
            if number in self._digits
        }


_PLAIN_CELL = re.compile(rb'<c r="([A-Z]{1,3})([0-9]{1,7})"')
_ANY_CELL = re.compile(rb"<(?:[^<>\s/:]*:)?c[\s/>]")
_NOT_PLAIN = re.compile(rb"<(?:[^<>\s/:]*:)?f[\s/>]|[\"' ]e[\"']|<![^-]|&#")
"""Formulas, error cells, declarations and letters in disguise: all that `plain_sheet` leaves."""


def plain_sheet(
    pieces: Iterator[bytes], lengths: array[int], padded: Mapping[int, int]
) -> Sheet | None:
    """Reach of a sheet written as most programs do, or None if it takes an XML parser to tell.

    Many times faster than `Cells`, because no piece of Python runs for each cell but for those
    of the styles in `padded`.
    A cell without content counts as filled here, so that the reach may come out too large.
    """
    if 0 in padded:
        return None
    padded_cell = _padded_cell(padded)
    sheet = Sheet()
    columns: set[bytes] = set()
    rows: set[bytes] = set()
    cells, begun, rest = 0, False, b""
    for piece in pieces:
        text = rest + piece
        if not begun and not text.startswith(_PLAIN_STARTS):
            return None
        begun = True
        cut = text.rfind(b"<")
        text, rest = text[:cut], text[cut:]
        found = _PLAIN_CELL.findall(text)
        if _NOT_PLAIN.search(text) or len(_ANY_CELL.findall(text)) != len(found):
            return None
        if len(rest) > _LONGEST_TAG:
            return None
        cells += len(found)
        columns.update(column for column, _row in found)
        rows.update(row for _column, row in found)
        if padded_cell:
            for column, row, style in padded_cell.findall(text):
                digits = padded.get(int(style), 0)
                if digits:
                    sheet.digits.note(int(row) - 1, _column_number(column.decode()), digits)
    if not cells:
        return None
    numbers = sorted(map(_column_number, (column.decode() for column in columns)))
    sheet.letters = cells * max(lengths, default=0)
    sheet.reach(min(map(int, rows)) - 1, numbers[0])
    sheet.reach(max(map(int, rows)) - 1, numbers[-1])
    return sheet


def _padded_cell(padded: Mapping[int, int]) -> re.Pattern[bytes] | None:
    """Place and style of a cell that may have one of these styles; None where there are none."""
    few = len(padded) <= _MOST_SOUGHT
    styles = "|".join(map(str, padded)).encode() if few else rb"[0-9]{1,9}"
    return re.compile(_PLAIN_CELL.pattern + rb'[^<>]*? s="(' + styles + rb')"') if padded else None


_PLAIN_STARTS = (
    b'<?xml version="1.0" encoding="UTF-8"',
    b'<?xml version="1.0" encoding="utf-8"',
    b'<?xml version="1.0"?>',
    b"<worksheet",
)
_PLACE = re.compile(r"([A-Za-z]{1,7})([0-9]{1,10})")


def _column_number(letters: str) -> int:
    """Column of the letters a spreadsheet gives it, counted from 0."""
    number = 0
    for letter in letters.upper():
        number = number * 26 + ord(letter) - 64
    return number - 1


class Cells(Handler):
    """Cells of an .xlsx sheet: where they stand, errors, and formulas without a value.

    `padded` are the styles of numbers with zeros in front, with the digits that they show.
    """

    def __init__(self, lengths: array[int], padded: Mapping[int, int]) -> None:
        self.sheet = Sheet()
        self._lengths = lengths
        self._padded = {str(style): digits for style, digits in padded.items()}
        self._digits = 0
        self._row, self._column = -1, -1
        self._kind = ""
        self._formula = self._value = self._in_value = False
        self._text = ""

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        """See `Handler.start`."""
        if ":" in tag:
            tag = tag.rpartition(":")[2]
        if tag == "v":
            self._in_value = True
        elif tag == "c":
            self._place(attributes.get("r"))
            self._kind = attributes.get("t", "n")
            self._digits = self._padded.get(attributes.get("s", "0"), 0)
            self._formula = self._value = False
            self._text = ""
        elif tag == "f":
            self._formula = True
        elif tag == "is":
            self._value = True
        elif tag == "row":
            number = attributes.get("r")
            self._row = int(number) - 1 if number else self._row + 1
            self._column = -1

    def text(self, text: str) -> None:
        """See `Handler.text`."""
        if self._in_value:
            self._text += text

    def end(self, tag: str) -> None:
        """See `Handler.end`."""
        if ":" in tag:
            tag = tag.rpartition(":")[2]
        if tag == "v":
            self._in_value = False
            self._value = bool(self._text) or self._kind == "str"
        elif tag == "c":
            self._note()

    def _place(self, name: str | None) -> None:
        found = _PLACE.fullmatch(name) if name else None
        if not found:
            self._column += 1
            return
        self._row, self._column = int(found.group(2)) - 1, _column_number(found.group(1))

    def _note(self) -> None:
        place = (self._row, self._column)
        if self._value:
            self.sheet.reach(*place)
            if self._kind == "s" and self._text.isdigit():
                number = int(self._text)
                self.sheet.letters += self._lengths[number] if number < len(self._lengths) else 0
            elif self._kind == "e":
                self.sheet.errors[place] = self._text
            elif self._digits:
                self.sheet.digits.note(*place, self._digits)
        elif self._formula:
            self.sheet.unsaved.append(place)


_LONGEST_NUMBER = 40
_ODS_CELLS = frozenset({"table:table-cell", "table:covered-table-cell"})


class Tables(Handler):
    """Sheets of an .ods workbook: rows and cells may each stand for many.

    The reader knows the tags by these very prefixes too.
    """

    def __init__(self) -> None:
        self.sheets: dict[str, Sheet] = {}
        self._sheet = Sheet()
        self._row = self._column = 0
        self._rows = self._columns = 1
        self._filled: list[tuple[int, int, str | None, int]] = []
        self._attributes: dict[str, str] = {}
        self._letters = self._row_letters = 0
        self._text = ""
        self._in_cell = self._error = self._number = False

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        """See `Handler.start`."""
        if tag in _ODS_CELLS:
            self._attributes = attributes
            self._error = attributes.get("calcext:value-type") == "error"
            self._number = attributes.get("office:value-type") == "float"
            self._columns = int(attributes.get("table:number-columns-repeated", "1"))
            self._in_cell, self._text, self._letters = True, "", 0
        elif tag == "table:table-row":
            self._rows = int(attributes.get("table:number-rows-repeated", "1"))
            self._column, self._filled, self._row_letters = 0, [], 0
        elif tag == "table:table":
            # A table inside a cell, or a second one of the same name, adds to the first.
            self._sheet = self.sheets.setdefault(attributes.get("table:name", ""), Sheet())
            self._row = 0

    def text(self, text: str) -> None:
        """See `Handler.text`."""
        if self._in_cell:
            self._letters += len(text)
            if self._error or (self._number and self._letters <= _LONGEST_NUMBER):
                self._text += text

    def end(self, tag: str) -> None:
        """See `Handler.end`."""
        if tag in _ODS_CELLS:
            self._end_cell()
        elif tag == "table:table-row":
            self._end_row()

    def _end_cell(self) -> None:
        self._in_cell = False
        if self._letters or "office:value-type" in self._attributes:
            error = self._text if self._error else None
            digits = digits_of_text(self._text) if self._number else 0
            self._filled.append((self._column, self._columns, error, digits))
            self._row_letters += self._columns * max(
                self._letters, len(self._attributes.get("office:string-value", ""))
            )
        elif "table:formula" in self._attributes and len(self._sheet.unsaved) < _MOST_LISTED:
            self._sheet.unsaved.append((self._row, self._column))
        self._column += self._columns

    def _end_row(self) -> None:
        self._sheet.letters += self._row_letters * self._rows
        for column, columns, error, digits in self._filled:
            self._sheet.reach(self._row, column, self._rows, columns)
            if digits and not self._sheet.too_large:
                for place in range(column, column + columns):
                    self._sheet.digits.note(self._row, place, digits, self._rows)
            if error:
                for row in range(self._row, self._row + min(self._rows, _MOST_LISTED)):
                    self._sheet.errors.update(
                        ((row, place), error)
                        for place in range(column, column + min(columns, _MOST_LISTED // 100))
                    )
        self._row += self._rows
