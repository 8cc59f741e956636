"""Delimited text of herdbook size, parsed into Arrow's columns instead of rows of cells.

It reads only what it surely reads as the row-by-row reader would: where a file is untidy in
a way that could be read differently, it declines and the other reader takes over.
"""

from __future__ import annotations

import codecs
import csv
import hashlib
import io
from concurrent.futures import ThreadPoolExecutor
from functools import partial
from itertools import islice
from typing import TYPE_CHECKING, Any

import numpy as np

from pairing.records.columns import ArrowText
from pairing.records.files.beginnings import DELIMITERS, find_delimiter, without_comments
from pairing.records.files.raw import ANIMALS, RawTable, Sought, header_place

if TYPE_CHECKING:
    from collections.abc import Sequence

    import numpy.typing as npt

LARGE = 4_000_000
"""From so many bytes on, text is parsed by columns."""

_SAMPLE = 1 << 18
_BLOCK = 1 << 22
_FEW_WORDS = 0.1
_MOST_LINES_ABOVE = 40


def read_large(
    name: str, content: bytes, text: bytes, encoding: str, sought: Sought = ANIMALS
) -> RawTable | None:
    """A table from the UTF-8 `text` of a file with the bytes `content`; None when it declines."""
    import pyarrow

    top = _Top.of(text, sought)
    if top is None:
        return None
    body = memoryview(text)[top.size :]
    # Arrow would take a mark of the encoding here for one of the whole text, and drop it.
    if not body or text.startswith(codecs.BOM_UTF8, top.size):
        return None
    quoted = text.find(b'"', top.size) >= 0
    if quoted and not _plainly_quoted(body, top.delimiter):
        return None
    returns = text.find(b"\r", top.size) >= 0
    if returns and text.count(b"\r", top.size) != text.count(b"\r\n", top.size):
        return None
    with ThreadPoolExecutor(1) as beside:
        digest = beside.submit(lambda: hashlib.sha256(content).hexdigest())
        table, lines, long = _rows(text, body, top, quoted=quoted)
        sha256 = digest.result()
    if table is None or lines is None or table.num_rows == 0:
        return None
    with ThreadPoolExecutor() as pool:
        columns = list(pool.map(partial(_column, table), table.column_names))
    del table
    filled = _filled_rows(columns)
    if filled is not None:
        if not len(filled):
            return None
        columns = [ArrowText(each.array.take(pyarrow.array(filled))) for each in columns]
        lines = np.asarray(lines)[filled].tolist()
    width = len(top.header)
    overlong = {
        row: tuple(each[row] for each in columns)
        for extra in columns[width:]
        for row in np.flatnonzero(~_blank(extra)).tolist()
    }
    places = {int(lines[row]): row for row in _places_of(lines, sorted(long))}
    overlong.update(
        (places[line], cells)
        for line, cells in long.items()
        if line in places and any(map(str.strip, cells[width:]))
    )
    kind = f"{top.delimiter_name}-separated text, {encoding}"
    return RawTable(
        name, kind, sha256, top.header, top.line, tuple(columns[:width]), lines, overlong
    )


def _places_of(lines: Sequence[int], wanted: Sequence[int]) -> list[int]:
    """Rows that stand on some lines, both ascending."""
    if isinstance(lines, range):
        return [line - lines.start for line in wanted]
    known = np.asarray(lines)
    at = np.searchsorted(known, np.asarray(wanted, dtype=np.int64))
    return [
        place
        for place, line in zip(at.tolist(), wanted, strict=True)
        if place < len(known) and known[place] == line
    ]


class _Top:
    """What stands above the data: comments, titles, the header."""

    def __init__(
        self, delimiter: str, header: tuple[str, ...], width: int, line: int, size: int, lines: int
    ) -> None:
        self.delimiter = delimiter
        self.header = header
        self.width = width
        self.line = line
        self.size = size
        self.lines = lines

    @property
    def delimiter_name(self) -> str:
        """The delimiter in words."""
        return DELIMITERS[self.delimiter]

    @classmethod
    def of(cls, text: bytes, sought: Sought) -> _Top | None:
        """Found out from the beginning of the file as the row-by-row reader does."""
        sample = text[:_SAMPLE]
        whole = len(text) <= _SAMPLE
        end = len(sample) if whole else sample.rfind(b"\n") + 1
        start = sample[:end].decode("utf-8", "replace")
        below, skipped = without_comments(start, sought)
        if not below or not start.endswith(below):
            return None
        delimiter = find_delimiter(below, sought)
        rows, ends = [], []
        reader = csv.reader(io.StringIO(below, newline=""), delimiter=delimiter)
        try:
            for row in islice(reader, _MOST_LINES_ABOVE):
                rows.append(row)
                ends.append(reader.line_num)
        except csv.Error:
            return None
        filled = [place for place, row in enumerate(rows) if any(map(str.strip, row))]
        if not filled or not (whole or len(rows) == _MOST_LINES_ABOVE):
            return None
        place = filled[header_place(rows, filled, sought)]
        header = tuple(" ".join(cell.split()) for cell in rows[place])
        while header and not header[-1]:
            header = header[:-1]
        line = (ends[place - 1] if place else 0) + 1 + skipped
        size = 0
        for _line in range(ends[place] + skipped):
            size = text.find(b"\n", size) + 1
            if not size:
                return None
        if text.count(b"\r", 0, size) != text.count(b"\r\n", 0, size):
            return None
        return cls(delimiter, header, len(rows[place]), line, size, ends[place] + skipped)


def _plainly_quoted(body: memoryview, delimiter: str) -> bool:
    """Whether every quotation mark stands at the edge of a cell or beside another one."""
    letters = np.frombuffer(body, np.uint8)
    at = np.flatnonzero(letters == ord('"'))
    edges = np.zeros(256, dtype=bool)
    edges[[ord(delimiter), ord("\n"), ord("\r"), ord('"')]] = True
    before = np.where(at > 0, edges[letters[at - 1]], True)
    last = len(letters) - 1
    after = np.where(at < last, edges[letters[np.minimum(at + 1, last)]], True)
    return bool((before | after).all()) and len(at) % 2 == 0


def _rows(
    text: bytes, body: memoryview, top: _Top, *, quoted: bool
) -> tuple[Any, Any, dict[int, tuple[str, ...]]]:
    """The parsed table, the line of each row, and by line the cells of rows that are too long.

    None and None where it cannot be sure.
    """
    import pyarrow

    refused = (pyarrow.ArrowInvalid, pyarrow.ArrowNotImplementedError)
    long: dict[int, tuple[str, ...]] = {}
    try:
        table = _parsed(body, top, quoted=quoted, blank_lines=False)
    except refused:
        if not quoted:
            evened, long = _evened(body, top)
            body = memoryview(evened)
        try:
            table = _parsed(body, top, quoted=quoted, blank_lines=True)
        except refused:
            return None, None, {}
        return table, _lines(text, top, table.num_rows, quoted=quoted), long
    if quoted:
        return table, _lines(text, top, table.num_rows, quoted=True), long
    first = top.lines + 1
    return table, range(first, first + table.num_rows), long


def _evened(body: memoryview, top: _Top) -> tuple[bytes, dict[int, tuple[str, ...]]]:
    """The text with every line that holds anything as wide as the header.

    Short lines get blank cells; of long ones the cells beyond are cut, and all of them are
    returned by line.
    """
    letters = np.frombuffer(body, np.uint8)
    ends = np.flatnonzero(letters == ord("\n"))
    if not len(ends) or ends[-1] != len(letters) - 1:
        ends = np.append(ends, len(letters))
    starts = np.append(0, ends[:-1] + 1)
    before = np.searchsorted(np.flatnonzero(letters == ord(top.delimiter)), np.append(0, ends))
    delimiter = top.delimiter.encode()
    pieces: list[bytes | memoryview] = []
    long: dict[int, tuple[str, ...]] = {}
    copied = 0
    for line in np.flatnonzero(np.diff(before) != top.width - 1).tolist():
        start, end = int(starts[line]), int(ends[line])
        bare = bytes(body[start:end]).rstrip(b"\r")
        if not bare:
            continue
        cells = bare.split(delimiter)
        if len(cells) > len(top.header):
            long[top.lines + 1 + line] = tuple(cell.decode("utf-8", "replace") for cell in cells)
        cells = [*cells, *[b""] * top.width][: top.width]
        pieces += [body[copied:start], delimiter.join(cells)]
        copied = end
    return b"".join([*pieces, body[copied:]]), long


def _parsed(body: memoryview, top: _Top, *, quoted: bool, blank_lines: bool) -> Any:
    import pyarrow
    import pyarrow.csv

    names = [str(place) for place in range(top.width)]
    few = _columns_of_few_words(body, top)
    return pyarrow.csv.read_csv(
        pyarrow.BufferReader(pyarrow.py_buffer(body)),
        read_options=pyarrow.csv.ReadOptions(column_names=names, block_size=_BLOCK),
        parse_options=pyarrow.csv.ParseOptions(
            delimiter=top.delimiter,
            quote_char='"' if quoted else False,
            newlines_in_values=quoted,
            ignore_empty_lines=blank_lines,
        ),
        convert_options=pyarrow.csv.ConvertOptions(
            column_types={
                name: pyarrow.dictionary(pyarrow.int32(), pyarrow.string())
                if place in few
                else pyarrow.string()
                for place, name in enumerate(names)
            },
            strings_can_be_null=False,
            quoted_strings_can_be_null=False,
        ),
    )


def _columns_of_few_words(body: memoryview, top: _Top) -> set[int]:
    """Columns that repeat few words near the end of the file: kept as words and codes."""
    end = bytes(body[-_SAMPLE:])
    text = end[end.find(b"\n") + 1 :].decode("utf-8", "replace")
    try:
        rows = list(csv.reader(text.splitlines(), delimiter=top.delimiter))
    except csv.Error:
        return set()
    rows = [row for row in rows if len(row) == top.width]
    if not rows:
        return set()
    return {
        place
        for place in range(top.width)
        if len({row[place] for row in rows}) <= max(2, _FEW_WORDS * len(rows))
    }


def _lines(text: bytes, top: _Top, rows: int, *, quoted: bool) -> Any:
    """Line of each row; None where line ends inside cells make them hard to tell."""
    first = top.lines + 1
    if text.count(b"\n", top.size) + (not text.endswith(b"\n")) == rows:
        return range(first, first + rows)
    if quoted:
        return None
    letters = np.frombuffer(text, np.uint8)[top.size :]
    breaks = np.append(np.flatnonzero(letters == ord("\n")), len(letters))
    starts = np.append(0, breaks[:-1] + 1)
    length = breaks - starts
    empty = (length == 0) | ((length == 1) & (letters[np.minimum(starts, len(letters) - 1)] == 13))
    filled = np.flatnonzero(~empty)
    return (filled + first).tolist() if len(filled) == rows else None


def _column(table: Any, name: str) -> ArrowText:
    import pyarrow

    column = table[name]
    if pyarrow.types.is_dictionary(column.type):
        column = column.unify_dictionaries()
    array = column.combine_chunks()
    if isinstance(array, pyarrow.ChunkedArray):
        array = array.chunk(0)
    return ArrowText(array)


def _blank(column: ArrowText) -> npt.NDArray[np.bool_]:
    if column.is_coded:
        words = column.coded()
        says_nothing = np.array([not word.strip() for word in words.words], dtype=bool)
        flags: npt.NDArray[np.bool_] = says_nothing[words.codes]
        return flags
    ends, _text = column.bytes_of()
    blank: npt.NDArray[np.bool_] = np.diff(ends) == 0
    for row in column.untidy_rows().tolist():
        blank[row] = not column[row].strip()
    return blank


def _filled_rows(columns: list[ArrowText]) -> npt.NDArray[np.int64] | None:
    """Rows with anything in them; None when all have."""
    blank = _blank(columns[0])
    for column in columns[1:]:
        if not blank.any():
            return None
        blank &= _blank(column)
    return np.flatnonzero(~blank) if blank.any() else None
