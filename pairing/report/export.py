"""Writing an answer: for people, as CSV, as JSON; and putting a file in place whole."""

from __future__ import annotations

import csv
import io
import json
import os
import re
import tempfile
import unicodedata
from pathlib import Path
from typing import TYPE_CHECKING, Any

from pairing.errors import OptionError

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Sequence
    from typing import IO, TextIO

    from pairing.report.content import Answer

_BEGIN_A_FORMULA = frozenset("=+-@−")
_BREAKS = frozenset("\t\r\n")
_BLANKS = (
    "".join(sign for sign in map(chr, range(0x3001)) if sign.isspace()) + "\u200b\u2060\ufeff\x00"
)
"""Signs that a spreadsheet may drop at the start of a cell, some of them without width."""
_NUMBER = re.compile(r"[+-]?\d+(?:[.,]\d+)?(?:[eE][+-]?\d+)?", re.ASCII)


def to_json(answer: Answer) -> str:
    """One JSON document: `about`, `notes`, then the fields; numbers unrounded."""
    document = {"about": answer.about, "notes": list(answer.notes), **answer.fields}
    return json.dumps(document, indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def to_csv(answer: Answer) -> str:
    """One CSV table; numbers unrounded, missing blank, booleans true and false; texts exact."""
    return csv_text(answer)


def csv_text(answer: Answer, *, for_spreadsheet: bool = False) -> str:
    """One CSV table, exact, or `for_spreadsheet` with no text that would run as a formula."""
    out = io.StringIO()
    _write_csv(answer.csv_columns, answer.csv_rows, out, for_spreadsheet=for_spreadsheet)
    return out.getvalue()


def _write_csv(
    header: Sequence[str], rows: Iterable[Sequence[Any]], out: TextIO, *, for_spreadsheet: bool
) -> None:
    writer = csv.writer(_LineFeeds(out), lineterminator="\r\n")
    if for_spreadsheet:
        rows = ([harmless(cell) if isinstance(cell, str) else cell for cell in row] for row in rows)
        header = [harmless(cell) for cell in header]
    writer.writerow(header)
    writer.writerows([_csv_cell(cell) for cell in row] for row in rows)


class _LineFeeds:
    """Ends rows in a line feed, and lets the writer quote a cell with a lone carriage return.

    The writer quotes cells with a sign of its own line end, so that end must have both signs.
    """

    def __init__(self, out: TextIO) -> None:
        self._out = out

    def write(self, row: str) -> int:
        """Write one row."""
        return self._out.write(f"{row[:-2]}\n")


def _csv_cell(value: Any) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "true" if value else "false"
    return repr(value) if isinstance(value, float) else str(value)


def harmless(text: str) -> str:
    """A text as it is, or behind an apostrophe where a spreadsheet would run it as a formula.

    That is where it begins with ``=``, ``+``, ``-``, ``@``, a tab or a line end, also behind
    blanks or in another width or height; a plain number such as ``-12`` stays.
    """
    beginning = text[: len(text) - len(text.lstrip(_BLANKS))]
    if text.isprintable() and text.isascii() and text[:1] not in "=+-@ ":
        return text
    first = unicodedata.normalize("NFKC", text[len(beginning) :][:1])
    runs = first[:1] in _BEGIN_A_FORMULA if first else False
    if _BREAKS.intersection(beginning) or (runs and not _NUMBER.fullmatch(text.strip())):
        return f"'{text}"
    return text


def to_text(answer: Answer) -> str:
    """The terminal's layout as plain text, without colour."""
    from pairing.report.terminal import plain_text

    out = io.StringIO()
    plain_text(answer, out)
    return out.getvalue()


def to_workbook(answer: Answer) -> bytes:
    """An .xlsx workbook: the table (or the answer's own sheets), then what it rests on."""
    from pairing.report.spreadsheet import AnswerInSheets, Sheet, workbook_bytes

    sheets = (
        answer.sheets
        if isinstance(answer, AnswerInSheets)
        else (Sheet("Answer", answer.csv_columns, answer.csv_rows),)
    )
    said = [*answer.headline, *answer.notes, *answer.cautions]
    rests_on = [(name, value) for name, value in answer.about.items() if value is not None]
    rows: list[tuple[Any, ...]] = [*((sentence,) for sentence in said), (), *rests_on]
    return workbook_bytes([*sheets, Sheet("About", (), rows)])


WRITERS: dict[str, Callable[[Answer], str | bytes]] = {
    "table": to_text,
    "csv": to_csv,
    "json": to_json,
    "xlsx": to_workbook,
}
"""Kinds of output by name: text, or bytes where the kind is not text."""


def written(answer: Answer, kind: str, *, for_spreadsheet: bool = False) -> bytes:
    """An answer as one of the `WRITERS` gives it; text is UTF-8.

    `for_spreadsheet` makes texts of CSV harmless; the other kinds do not need it.
    """
    if kind == "csv" and for_spreadsheet:
        content: str | bytes = csv_text(answer, for_spreadsheet=True)
    else:
        content = WRITERS[kind](answer)
    return content.encode() if isinstance(content, str) else content


def write_view(
    header: Sequence[str],
    rows: Iterable[Sequence[str]],
    out: Path,
    *,
    inputs: Sequence[Path],
    for_spreadsheet: bool = False,
) -> tuple[str, ...]:
    """Write a table of text as the ending of `out` says: .xlsx a workbook, all else CSV.

    Every cell stays text, also in a workbook: `007` is not 7 there.
    What a workbook could not hold is given back as sentences.

    Raises
    ------
    OptionError
        As `write_file`; or if the package that writes workbooks is missing.
    """
    notes: tuple[str, ...] = ()

    def fill(file: IO[bytes]) -> None:
        nonlocal notes
        if out.suffix.lower() == ".xlsx":
            from pairing.report.spreadsheet import Sheet, write_workbook

            notes = write_workbook([Sheet("View", tuple(header), rows)], file)
            return
        text = io.TextIOWrapper(file, encoding="utf-8", newline="")
        _write_csv(header, rows, text, for_spreadsheet=for_spreadsheet)
        text.flush()
        text.detach()

    _put_in_place(fill, out, inputs, option="--view")
    return notes


def write_file(content: str | bytes, out: Path, *, inputs: Sequence[Path]) -> None:
    """Put `content` in place as `out`, whole or not at all; write into a device or pipe.

    Raises
    ------
    OptionError
        If `out` is an input of the call, a folder, or cannot be written.
    """
    data = content.encode() if isinstance(content, str) else content

    def fill(file: IO[bytes]) -> None:
        file.write(data)

    _put_in_place(fill, out, inputs, option="--out")


def _put_in_place(
    fill: Callable[[IO[bytes]], object], out: Path, inputs: Sequence[Path], *, option: str
) -> None:
    clash = [path for path in inputs if _same_file(path, out)]
    if clash:
        raise OptionError(
            f"{out} is an input of this call and would be written over.",
            remedy=f"Give {option} another name; records are never changed.",
        )
    if out.is_dir():
        raise OptionError(f"{out} is a folder.", remedy=f"Give {option} the name of a file in it.")
    try:
        if out.exists() and not out.is_file():
            _fill_device(fill, out)
            return
        handle, temporary = tempfile.mkstemp(dir=out.parent, prefix=f".{out.name}.")
        try:
            with os.fdopen(handle, "wb") as file:
                fill(file)
            _usual_permissions(temporary)
            Path(temporary).replace(out)
        except BaseException:
            Path(temporary).unlink(missing_ok=True)
            raise
    except OSError as error:
        raise OptionError(
            f"{out} cannot be written ({error.strerror or error}).",
            remedy="Check that the folder exists and that you may write in it.",
        ) from None


def _fill_device(fill: Callable[[IO[bytes]], object], out: Path) -> None:
    """Write into a device or pipe, which cannot be sought in as a workbook needs."""
    content = io.BytesIO()
    fill(content)
    out.write_bytes(content.getvalue())


def _same_file(first: Path, second: Path) -> bool:
    try:
        return first.samefile(second)
    except OSError:
        return first.resolve() == second.resolve()


def _usual_permissions(path: str) -> None:
    """Temporary files are private; a result should be readable as other files are."""
    mask = os.umask(0)
    os.umask(mask)
    Path(path).chmod(0o666 & ~mask)
