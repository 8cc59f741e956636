"""Workbooks of the old binary kind (.xls), looked into before any of them is taken whole.

The file is a small file system of sectors (Microsoft, *Compound File Binary File Format*,
MS-CFB) with one stream of records (*Excel Binary File Format*, MS-XLS). A record of a cell
says its row and column, so that two records can claim a table of billions of cells.
"""

from __future__ import annotations

import struct
from array import array
from typing import TYPE_CHECKING

from pairing.records.files.sheet_reach import MOST_PLACES, Sheet

if TYPE_CHECKING:
    from collections.abc import Iterator

_STREAMS = ("Workbook", "Book")
_NO_SECTOR = 0xFFFFFFF0
"""Sector numbers from here on mark the end of a chain and the like."""
_SHEET_NAME, _END = 0x85, 0x0A
_SHARED_TEXT, _DIMENSIONS = 0xFC, 0x200
_FORMULA = frozenset({0x0006, 0x0206, 0x0406})
_SEVERAL_VALUES, _TRUTH_OR_ERROR = 0xBD, 0x205
_ONE_VALUE = frozenset({0x0201, 0x0203, 0x0204, 0x0205, 0x027E, 0x00FD, 0x00D6, *_FORMULA})
_ERRORS = {
    0x00: "#NULL!",
    0x07: "#DIV/0!",
    0x0F: "#VALUE!",
    0x17: "#REF!",
    0x1D: "#NAME?",
    0x24: "#NUM!",
    0x2A: "#N/A",
}


def sheets_of_binary_workbook(content: bytes) -> dict[str, Sheet]:
    """What the records of each sheet hold, in order.

    Raises
    ------
    ValueError
        If the file is damaged or holds no workbook.
    """
    try:
        stream = _workbook_stream(content)
        found: dict[str, Sheet] = {}
        for kind, body in _records(stream, 0):
            if kind == _SHEET_NAME:
                (offset,) = struct.unpack_from("<I", body)
                found[_sheet_name(body[6:])] = _sheet(stream, offset)
            elif kind == _SHARED_TEXT and struct.unpack_from("<I", body, 4)[0] > len(stream):
                raise ValueError("it claims more texts than it has letters")
    except (struct.error, IndexError) as error:
        raise ValueError(f"its records are broken, {error}") from None
    return found


def _sheet_name(body: bytes) -> str:
    """Name after its length; since 1997 a mark says whether letters take one byte or two."""
    length = body[0]
    if len(body) == length + 1:
        return body[1:].decode("cp1252", "replace")
    if body[1] & 1:
        return body[2 : 2 + 2 * length].decode("utf-16-le", "replace")
    return body[2 : 2 + length].decode("latin-1")


def _records(stream: bytes, offset: int) -> Iterator[tuple[int, bytes]]:
    """Kind and body of each record up to the end of its part of the stream."""
    while offset + 4 <= len(stream):
        kind, length = struct.unpack_from("<HH", stream, offset)
        if kind == _END:
            return
        yield kind, stream[offset + 4 : offset + 4 + length]
        offset += 4 + length


def _sheet(stream: bytes, offset: int) -> Sheet:
    sheet = Sheet()
    for kind, body in _records(stream, offset):
        if kind == _DIMENSIONS:
            _check_dimensions(body)
        elif kind in _ONE_VALUE:
            row, column = struct.unpack_from("<HH", body)
            sheet.reach(row, column)
            code = None
            if kind == _TRUTH_OR_ERROR and body[7]:
                code = body[6]
            elif kind in _FORMULA and body[6] == 2 and body[12:14] == b"\xff\xff":
                code = body[8]
            if code is not None:
                sheet.errors[row, column] = _ERRORS.get(code, f"#ERROR {code}")
        elif kind == _SEVERAL_VALUES:
            row, column = struct.unpack_from("<HH", body)
            (last,) = struct.unpack_from("<H", body, len(body) - 2)
            sheet.reach(row, column, columns=max(1, last - column + 1))
    return sheet


def _check_dimensions(body: bytes) -> None:
    """Refuse a claim that no sheet of this kind can hold: the reader sets memory aside for it."""
    layout = "<4H" if len(body) < 14 else "<2I2H"
    first_row, last_row, first_column, last_column = struct.unpack_from(layout, body)
    rows, columns = last_row - first_row, last_column - first_column
    if rows < 0 or columns < 0:
        raise ValueError("its last cell stands before its first")
    if rows * columns > MOST_PLACES:
        raise ValueError(f"it claims {rows:,} rows of {columns:,} columns")


def _workbook_stream(content: bytes) -> bytes:
    """The workbook's records, put together from the sectors of the file."""
    size = 1 << min(16, *struct.unpack_from("<H", content, 30))
    first_directory, smallest = struct.unpack_from("<I4xI", content, 48)
    first_small, _count, first_list, _lists = struct.unpack_from("<4I", content, 60)

    def sector(number: int) -> bytes:
        return content[(number + 1) * size : (number + 2) * size]

    table_sectors = list(struct.unpack_from("<109I", content, 76))
    lists: set[int] = set()
    while first_list < _NO_SECTOR and first_list not in lists:
        lists.add(first_list)
        *more, first_list = struct.unpack(f"<{size // 4}I", sector(first_list))
        table_sectors += more
    following = array("I")
    for number in table_sectors:
        if number < _NO_SECTOR:
            following.frombytes(sector(number))

    def chained(number: int) -> bytes:
        return b"".join(map(sector, _chain(number, following)))

    entries = chained(first_directory)
    for place in range(128, len(entries), 128):
        if _entry_name(entries, place) not in _STREAMS:
            continue
        start, length = struct.unpack_from("<II", entries, place + 116)
        if length >= smallest:
            return chained(start)[:length]
        small = chained(struct.unpack_from("<I", entries, 116)[0])
        small_following = array("I", chained(first_small))
        pieces = (small[n * 64 : n * 64 + 64] for n in _chain(start, small_following))
        return b"".join(pieces)[:length]
    raise ValueError("it is no workbook")


def _chain(number: int, following: array[int]) -> Iterator[int]:
    """Sectors of one chain; a chain longer than all sectors there are is broken."""
    for _step in range(len(following)):
        if number >= _NO_SECTOR:
            return
        yield number
        number = following[number]
    if number < _NO_SECTOR:
        raise ValueError("its sectors run in a circle")


def _entry_name(entries: bytes, place: int) -> str:
    (length,) = struct.unpack_from("<H", entries, place + 64)
    return entries[place : place + max(0, min(length, 64) - 2)].decode("utf-16-le", "replace")
