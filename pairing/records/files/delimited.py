"""Tables from delimited text: encoding, line ends, comments and delimiter found out by content."""

from __future__ import annotations

import csv
import hashlib
import re
from typing import TYPE_CHECKING

from pairing.errors import RecordsError
from pairing.records.files.beginnings import DELIMITERS, find_delimiter, without_comments
from pairing.records.files.large_delimited import LARGE, read_large
from pairing.records.files.raw import ANIMALS, RawTable, Sought, raw_table

if TYPE_CHECKING:
    from collections.abc import Iterator

_LINE_WITH_END = re.compile(r"[^\r\n]*(?:\r\n|\r|\n)|[^\r\n]+")
_LONGEST_CELL = 1_000_000
_SAVE_AS = "Save it from your spreadsheet as CSV or .xlsx and try again."


def read_delimited(name: str, content: bytes, sought: Sought = ANIMALS) -> RawTable:
    """A table from comma, semicolon, tab or pipe separated text, found out by content."""
    if len(content) >= LARGE:
        table = _by_columns(name, content, sought)
        if table is not None:
            return table
    text, encoding = _decoded(name, content)
    text, skipped = without_comments(text, sought)
    delimiter = find_delimiter(text, sought)
    rows: list[list[str]] = []
    lines: list[int] = []
    csv.field_size_limit(_LONGEST_CELL)
    reader = csv.reader(_lines(text), delimiter=delimiter)
    start = 1
    try:
        for row in reader:
            rows.append(row)
            lines.append(start + skipped)
            start = reader.line_num + 1
    except csv.Error as error:
        raise _unreadable_row(name, start + skipped, str(error)) from None
    if rows and _ends_in_quotes(text, delimiter):
        raise _unreadable_row(name, lines[-1], "a quotation mark is never closed")
    kind = f"{DELIMITERS[delimiter]}-separated text, {encoding}"
    digest = hashlib.sha256(content).hexdigest()
    return raw_table(name, kind, digest, rows, lines, sought=sought)


def _by_columns(name: str, content: bytes, sought: Sought = ANIMALS) -> RawTable | None:
    """The table by the quicker reader, where it can be had and is sure of the file."""
    try:
        import pyarrow  # noqa: F401
    except ImportError:
        return None
    text, encoding = content, "UTF-8"
    if content.startswith((b"\xef\xbb\xbf", b"\xff\xfe", b"\xfe\xff")) or not _is_utf8(content):
        decoded, encoding = _decoded(name, content)
        text = decoded.encode()
    return read_large(name, content, text, encoding, sought)


def _is_utf8(content: bytes) -> bool:
    """Whether bytes are UTF-8 text without NUL."""
    if content.isascii():
        return b"\x00" not in content
    try:
        content.decode("utf-8")
    except UnicodeDecodeError:
        return False
    return b"\x00" not in content


def _unreadable_row(name: str, line: int, why: str) -> RecordsError:
    return RecordsError(
        f"{name}, line {line}: the row cannot be read ({why}).",
        remedy="Look for a quotation mark that is opened and never closed.",
    )


def _ends_in_quotes(text: str, delimiter: str) -> bool:
    """Whether the end of the text stands inside quotation marks, so that rows were swallowed."""
    if text.count('"') % 2 == 0:
        return False
    try:
        for _row in csv.reader(_lines(text), delimiter=delimiter, strict=True):
            pass
    except csv.Error as error:
        return "unexpected end of data" in str(error)
    return False


def _decoded(name: str, content: bytes) -> tuple[str, str]:
    for mark, encoding in (
        (b"\xef\xbb\xbf", "utf-8-sig"),
        (b"\xff\xfe", "utf-16"),
        (b"\xfe\xff", "utf-16"),
    ):
        if content.startswith(mark):
            try:
                text = content.decode(encoding)
            except UnicodeDecodeError:
                raise _not_a_table(name) from None
            if "\x00" in text:
                raise _not_a_table(name)
            return text, encoding.upper().removesuffix("-SIG")
    if b"\x00" in content:
        raise _not_a_table(name)
    try:
        return content.decode("utf-8"), "UTF-8"
    except UnicodeDecodeError:
        pass
    try:
        text = content.decode("cp1252")
    except UnicodeDecodeError:
        raise _not_a_table(name) from None
    if any(ord(letter) < 32 and letter not in "\t\r\n\f\v" for letter in text[:4096]):
        raise _not_a_table(name)
    return text, "Windows-1252"


def _not_a_table(name: str) -> RecordsError:
    return RecordsError(
        f"{name}: this is not a table of text.",
        details=["Expected comma, semicolon, tab or pipe separated text, or an .xlsx workbook."],
        remedy=_SAVE_AS,
    )


def _lines(text: str) -> Iterator[str]:
    """Lines with their ends, one at a time: a file in memory would hold the text again."""
    return (found.group() for found in _LINE_WITH_END.finditer(text))
