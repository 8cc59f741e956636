"""Reading a table of animals from a file, whatever program saved it."""

from __future__ import annotations

import csv
import datetime
import hashlib
import io
import re
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from pairing.errors import RecordsError
from pairing.records.fields import SPELLINGS, folded
from pairing.records.table import RawTable, Records, map_columns

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

DELIMITERS = {",": "comma", ";": "semicolon", "\t": "tab", "|": "pipe"}
_LONGEST_CELL = 1_000_000
_WORKBOOK_MAGIC = (b"PK\x03\x04", b"\xd0\xcf\x11\xe0")
_SAVE_AS = "Save it from your spreadsheet as CSV or .xlsx and try again."


def read_records(
    source: str | Path, *, column_map: Sequence[str] = (), stdin: bytes | None = None
) -> Records:
    """Read a table of animals, one row each.

    Parameters
    ----------
    source
        Path of a delimited text file or an ``.xlsx`` workbook (its first sheet that holds a
        table), or ``-`` with the bytes of standard input in `stdin`.
    column_map
        See `map_columns`.

    Raises
    ------
    RecordsError
        If there is no such file, it is empty, has only a header, is not a table, or lacks
        a column for the id or a parent.
    """
    name, content = _content(source, stdin)
    if not content.strip():
        raise RecordsError(f"{name}: the file is empty.", remedy="Expected a table of animals.")
    table = _reader_for(content)(name, content)
    if not table.rows or not any(any(cell.strip() for cell in row) for row in table.rows):
        raise RecordsError(
            f"{name}: there is a header but no animal.",
            details=[f"Line {table.header_line} reads: {', '.join(table.header)}"],
            remedy="Expected one row an animal below the header.",
        )
    return map_columns(table, column_map)


def _content(source: str | Path, stdin: bytes | None) -> tuple[str, bytes]:
    if str(source) == "-":
        return "standard input", sys.stdin.buffer.read() if stdin is None else stdin
    path = Path(source)
    if path.is_dir():
        raise RecordsError(
            f"{path}: this is a folder, not a file.", remedy="Name the file inside it."
        )
    try:
        return path.name.encode("utf-8", "replace").decode(), path.read_bytes()
    except FileNotFoundError:
        close = _similar_files(path)
        raise RecordsError(
            f"{path}: there is no such file.",
            remedy=f"Did you mean {close}?" if close else "Check the path and the spelling.",
        ) from None
    except OSError as error:
        raise RecordsError(
            f"{path}: the file cannot be read ({error.strerror or error}).",
            remedy="Check that you may read it and that no other program holds it.",
        ) from None


def _similar_files(path: Path) -> str:
    from pairing.spelling import nearest_names

    try:
        names = [entry.name for entry in path.parent.iterdir() if entry.is_file()]
    except OSError:
        return ""
    close = nearest_names(path.name, names)
    return str(path.parent / close[0]) if close else ""


def _reader_for(content: bytes) -> Callable[[str, bytes], RawTable]:
    for kind, reader in READERS.items():
        if kind != "delimited text" and content.startswith(_MAGIC[kind]):
            return reader
    return READERS["delimited text"]


def read_delimited(name: str, content: bytes) -> RawTable:
    """A table from comma, semicolon, tab or pipe separated text, found out by content."""
    text, encoding = _decoded(name, content)
    text, skipped = _without_comments(text)
    delimiter = _delimiter(text)
    rows: list[tuple[str, ...]] = []
    lines: list[int] = []
    csv.field_size_limit(_LONGEST_CELL)
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter)
    start = 1
    try:
        for row in reader:
            if rows or any(cell.strip() for cell in row):
                rows.append(tuple(row))
                lines.append(start + skipped)
            start = reader.line_num + 1
    except csv.Error as error:
        raise _unreadable_row(name, start + skipped, str(error)) from None
    if rows and _ends_in_quotes(text, delimiter):
        raise _unreadable_row(name, lines[-1], "a quotation mark is never closed")
    kind = f"{DELIMITERS[delimiter]}-separated text, {encoding}"
    return _raw_table(name, kind, content, rows, lines)


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
        for _row in csv.reader(io.StringIO(text, newline=""), delimiter=delimiter, strict=True):
            pass
    except csv.Error as error:
        return "unexpected end of data" in str(error)
    return False


def _raw_table(
    name: str, kind: str, content: bytes, rows: list[tuple[str, ...]], lines: list[int]
) -> RawTable:
    if not rows:
        raise RecordsError(f"{name}: the file is empty.", remedy="Expected a table of animals.")
    header = tuple(" ".join(cell.split()) for cell in rows[0])
    while header and not header[-1]:
        header = header[:-1]
    digest = hashlib.sha256(content).hexdigest()
    return RawTable(name, kind, digest, header, lines[0], tuple(rows[1:]), tuple(lines[1:]))


def _decoded(name: str, content: bytes) -> tuple[str, str]:
    for mark, encoding in (
        (b"\xef\xbb\xbf", "utf-8-sig"),
        (b"\xff\xfe", "utf-16"),
        (b"\xfe\xff", "utf-16"),
    ):
        if content.startswith(mark):
            try:
                return content.decode(encoding), encoding.upper().removesuffix("-SIG")
            except UnicodeDecodeError:
                raise _not_a_table(name) from None
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


_LINE = re.compile(r"([^\r\n]*)(\r\n|\r|\n|$)")


def _without_comments(text: str) -> tuple[str, int]:
    """The text from its header on, and how many lines stood before it.

    A line beginning with # is a comment, unless it names our columns and the line below
    does not: then it is the header.
    """
    skipped = 0
    while text:
        found = _LINE.match(text)
        line = found.group(1).strip() if found else ""
        if line and not line.startswith("#"):
            break
        rest = text[found.end() :] if found else ""
        header = line.removeprefix("#")
        below = _LINE.match(rest)
        if _known_columns(header) >= 2 > _known_columns(below.group(1) if below else ""):
            return f"{header}\n{rest}", skipped
        text = rest
        skipped += 1
    return text, skipped


def _known_columns(line: str) -> int:
    """How many cells of a line are spellings of our fields, whatever separates them."""
    return sum(folded(cell.strip('"')) in SPELLINGS for cell in re.split(r"[,;\t|]", line))


def _delimiter(text: str) -> str:
    """The delimiter that splits the first rows into the most columns, most evenly."""
    sample = text[:65536].splitlines()[:20]

    def promise(delimiter: str) -> tuple[int, int]:
        try:
            rows = [row for row in csv.reader(sample, delimiter=delimiter) if row]
        except csv.Error:
            return (0, 0)
        width = len(rows[0]) if rows else 0
        return (width if width > 1 else 0, sum(len(row) == width for row in rows))

    return max(DELIMITERS, key=promise)


def read_workbook(name: str, content: bytes) -> RawTable:
    """A table from the first sheet of a workbook that holds one; formulas are not evaluated."""
    import python_calamine

    try:
        book = python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(content))
        sheets = [(sheet, book.get_sheet_by_name(sheet)) for sheet in book.sheet_names]
        chosen = next((pair for pair in sheets if pair[1].total_height), None)
        values = chosen[1].to_python(skip_empty_area=False) if chosen else []
    except (python_calamine.CalamineError, ValueError, OSError) as error:
        raise RecordsError(
            f"{name}: the workbook cannot be read ({error}).", remedy=_SAVE_AS
        ) from None
    rows: list[tuple[str, ...]] = []
    lines: list[int] = []
    for number, row in enumerate(values, start=1):
        if rows or any(cell not in ("", None) for cell in row):
            rows.append(tuple(_cell_text(cell) for cell in row))
            lines.append(number)
    sheet_name = chosen[0] if chosen else ""
    return _raw_table(name, f'workbook, sheet "{sheet_name}"', content, rows, lines)


def _cell_text(cell: object) -> str:
    """A cell's value as a keeper reads it: whole numbers without ``.0``, dates in ISO form."""
    if cell is None:
        return ""
    if isinstance(cell, bool):
        return "yes" if cell else "no"
    if isinstance(cell, float) and cell.is_integer() and abs(cell) < 1e15:
        return str(int(cell))
    if isinstance(cell, datetime.datetime):
        return cell.date().isoformat()
    return str(cell)


READERS: dict[str, Callable[[str, bytes], RawTable]] = {
    "workbook": read_workbook,
    "delimited text": read_delimited,
}
"""How a table can be read; `delimited text` is what is tried when no other kind fits."""

_MAGIC: dict[str, tuple[bytes, ...]] = {"workbook": _WORKBOOK_MAGIC}
