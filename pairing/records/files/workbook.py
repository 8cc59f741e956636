"""Tables from spreadsheet workbooks; formulas are never evaluated."""

from __future__ import annotations

import hashlib
import io
from contextlib import contextmanager
from itertools import islice
from typing import TYPE_CHECKING, Any

from pairing.errors import RecordsError
from pairing.records.files.cells import cell_text
from pairing.records.files.package import damaged_workbook, examined, sheet_too_large
from pairing.records.files.raw import RawTable, known_columns, raw_table
from pairing.records.files.sheet_reach import Sheet, place_name
from pairing.spelling import did_you_mean, listed, visible

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

_ROWS_LOOKED_AT = 21


def read_workbook(name: str, content: bytes, table: str | None = None) -> RawTable:
    """A table from one sheet of a workbook (.xlsx, .ods, .xls).

    Cells hold what the workbook saved: a formula is its last saved value, an error cell its
    text (``#N/A``), merged cells stand in their first place. Rows are numbered as in the sheet.

    Parameters
    ----------
    name
        The file's own name.
    content
        Its bytes.
    table
        Name of the sheet, case and blanks ignored.
        Without it: the first sheet with a row that names two of our fields, or else the first
        that holds anything; hidden sheets are looked at last.

    Raises
    ------
    RecordsError
        If the file is no workbook, damaged, cut short, protected by a password or made to
        exhaust memory, if there is no such sheet, or it holds no table.
    """
    import python_calamine

    sheets = examined(name, content)
    with _told(name):
        book = python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(content))
    titles = _titles(book)
    if not titles.keys() <= sheets.keys():
        raise damaged_workbook(name, "it names a sheet that it does not hold")
    title = _named(name, list(titles), table) if table is not None else None
    if title is None:
        title = _likeliest(name, book, titles, sheets)
    rows: list[list[str]] = []
    lines: list[int] = []
    if title is not None:
        rows, lines = _rows(name, book, title, sheets.get(title))
    if table is not None and not rows:
        raise RecordsError(
            f'{name}: the sheet "{title}" is empty.', remedy="Expected a table of animals."
        )
    kind = _reading(title or "", titles, sheets)
    return raw_table(name, kind, hashlib.sha256(content).hexdigest(), rows, lines)


@contextmanager
def _told(name: str) -> Iterator[None]:
    """Failures of the reader as a `RecordsError`."""
    import python_calamine

    try:
        yield
    except (python_calamine.CalamineError, ValueError, OSError, OverflowError) as error:
        # What the reader cannot even begin to read was found to be a workbook before.
        why = "it is damaged" if "detect file format" in str(error) else visible(str(error))
        raise damaged_workbook(name, why) from None
    except BaseException as error:
        # A panic inside the reader is no Exception, and its class cannot be imported.
        if type(error).__name__ != "PanicException":
            raise
        raise damaged_workbook(name, "it is damaged") from None


def _titles(book: Any) -> dict[str, bool]:
    """Names of the sheets that hold cells, and whether each is hidden."""
    import python_calamine

    return {
        sheet.name: sheet.visible != python_calamine.SheetVisibleEnum.Visible
        for sheet in book.sheets_metadata
        if sheet.typ == python_calamine.SheetTypeEnum.WorkSheet
    }


def _named(name: str, titles: Sequence[str], table: str) -> str:
    def key(title: str) -> str:
        return "".join(title.split()).casefold()

    alike = [title for title in titles if key(title) == key(table)]
    if table in alike or len(alike) == 1:
        return table if table in alike else alike[0]
    quoted = listed((f'"{title}"' for title in alike or titles), most=20)
    if alike:
        raise RecordsError(
            f'{name}: "{table}" could be any of several sheets.',
            details=[f"They are {quoted}."],
            remedy="Write the name exactly as it stands in the workbook.",
        )
    raise RecordsError(
        f'{name}: there is no sheet "{table}".',
        details=[f"The workbook has {quoted}." if titles else "The workbook has no sheets."],
        remedy=did_you_mean(table, titles) or "Name one of its sheets with --table.",
    )


def _likeliest(
    name: str, book: Any, titles: dict[str, bool], sheets: dict[str, Sheet]
) -> str | None:
    """The first sheet that looks like a table of animals, or else the first with any cell."""
    filled: list[str] = []
    for title in sorted(titles, key=titles.__getitem__):
        if title in sheets and sheets[title].too_large:
            filled.append(title)
            continue
        with _told(name):
            first = list(islice(_filled_rows(book, title, sheets.get(title)), _ROWS_LOOKED_AT))
        if any(known_columns(row) >= 2 for _line, row in first):
            return title
        if first:
            filled.append(title)
    return filled[0] if filled else None


def _filled_rows(
    book: Any, title: str, examined_sheet: Sheet | None
) -> Iterator[tuple[int, list[str]]]:
    """Rows that hold anything as text, each with its number in the sheet counted from 1."""
    sheet = book.get_sheet_by_name(title)
    if sheet.start is None:
        return
    first_column = sheet.start[1]
    errors: dict[int, dict[int, str]] = {}
    for (line, column), text in (examined_sheet.errors if examined_sheet else {}).items():
        errors.setdefault(line, {})[column - first_column] = text
    for line, row in enumerate(sheet.iter_rows()):
        texts = ["" if cell == "" else cell_text(cell) or "" for cell in row]
        for column, text in errors.get(line, {}).items():
            # The reader leaves errors blank; a value it did find is not overwritten.
            if 0 <= column < len(texts) and not texts[column]:
                texts[column] = text
        if any(texts):
            yield line + 1, texts


def _rows(
    name: str, book: Any, title: str, examined_sheet: Sheet | None
) -> tuple[list[list[str]], list[int]]:
    """The sheet's filled rows and their numbers."""
    if examined_sheet and examined_sheet.too_large:
        raise sheet_too_large(name, title, examined_sheet)
    rows: list[list[str]] = []
    lines: list[int] = []
    with _told(name):
        for line, row in _filled_rows(book, title, examined_sheet):
            rows.append(row)
            lines.append(line)
    return rows, lines


def _reading(title: str, titles: dict[str, bool], sheets: dict[str, Sheet]) -> str:
    """How the table was read, in words: the sheet, the others, and what could not be read."""
    said = f'workbook, sheet "{title}"'
    others = [f'"{other}"' for other in titles if other != title]
    if others:
        said += f" of {len(titles)} (not read: {listed(others)})"
    if titles.get(title):
        said += ", a hidden sheet"
    unsaved = sheets[title].unsaved if title in sheets else []
    if unsaved:
        said += (
            f", {len(unsaved)} formula{'s' if len(unsaved) > 1 else ''} saved without a value "
            f"read as blank (first: {place_name(*unsaved[0])})"
        )
    return said
