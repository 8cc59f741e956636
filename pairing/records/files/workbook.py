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
from pairing.records.files.raw import ANIMALS, RawTable, Sought, raw_table
from pairing.records.files.sheet_reach import Sheet, place_name
from pairing.records.files.shown_zeros import with_zeros
from pairing.spelling import did_you_mean, listed, visible

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Sequence

_ROWS_LOOKED_AT = 21
_MOST_SHEETS = 20
_SURELY, _PERHAPS = 2, 1


def read_workbook(
    name: str,
    content: bytes,
    table: str | None = None,
    *,
    sought: Sought = ANIMALS,
    beside: RawTable | None = None,
) -> RawTable:
    """A table from one sheet of a workbook (.xlsx, .ods, .xls).

    Cells hold what the workbook saved: a formula is its last saved value, an error cell its
    text (``#N/A``), merged cells stand in their first place, a whole number has the zeros in
    front with which it is shown. Rows are numbered as in the sheet.

    Parameters
    ----------
    name
        The file's own name.
    content
        Its bytes.
    table
        Name of the sheet, case and blanks ignored.
        Without it: the first sheet with a row that is surely the header of what is sought, or
        else the first that may hold it; hidden sheets are looked at last.
    sought
        The kind of table that is looked for.
    beside
        Another table of the call: if it came from a sheet of this workbook, that sheet is not
        taken again.

    Raises
    ------
    RecordsError
        If the file is no workbook, damaged, cut short, protected by a password or made to
        exhaust memory, if there is no such sheet, or it holds no table, or if none of several
        sheets has the columns that are needed.
    """
    import python_calamine

    sheets = examined(name, content)
    with _told(name):
        book = python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(content))
    titles = _titles(book)
    if not titles.keys() <= sheets.keys():
        raise damaged_workbook(name, "it names a sheet that it does not hold")
    sha256 = hashlib.sha256(content).hexdigest()
    others: list[str] = []
    if table is not None:
        title: str | None = _named(name, list(titles), table)
    else:
        own = beside.part if beside is not None and beside.sha256 == sha256 else None
        title, others = _likeliest(name, book, titles, sheets, sought, own)
    rows: list[list[str]] = []
    lines: list[int] = []
    with_digits = False
    if title is not None:
        rows, lines, with_digits = _rows(name, book, title, sheets.get(title))
    if table is not None and not rows:
        raise RecordsError(
            f'{name}: the sheet "{title}" is empty.', remedy=f"Expected a {sought.what}."
        )
    if not sought.needed:
        others = [other for other in titles if other != title]
    kind = _reading(title or "", titles, sheets, others, with_digits=with_digits)
    return raw_table(name, kind, sha256, rows, lines, sought=sought, part=title or "")


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
    name: str,
    book: Any,
    titles: dict[str, bool],
    sheets: dict[str, Sheet],
    sought: Sought,
    own: str | None,
) -> tuple[str | None, list[str]]:
    """The sheet that is most surely what is sought, the first of equals, and its equals.

    Of a table of animals any sheet with a cell may be it, and no equals are looked for.
    The sheet called `own` is another table of the call.
    """
    equals: dict[int, list[str]] = {_SURELY: [], _PERHAPS: []}
    lacking: dict[str, list[str]] = {}
    for title in sorted(titles, key=titles.__getitem__):
        if title == own:
            continue
        if title in sheets and sheets[title].too_large:
            lacking[title] = list(sought.needed)
            equals[_PERHAPS] += [] if sought.needed else [title]
            continue
        with _told(name):
            near = islice(_filled_rows(book, title, sheets.get(title)), _ROWS_LOOKED_AT)
            first = [row for _line, row, _zeros in near]
        if any(map(sought.fits, first)):
            if not sought.needed:
                return title, []
            equals[_SURELY].append(title)
        elif first:
            lacking[title] = min(map(sought.lacks, first), key=len)
            equals[_PERHAPS] += [] if lacking[title] else [title]
    likeliest = equals[_SURELY] or equals[_PERHAPS] or (list(lacking) if len(titles) == 1 else [])
    if not likeliest and sought.needed and titles:
        raise _no_sheet(name, titles, lacking, sought, own)
    return (likeliest[0], likeliest[1:]) if likeliest else (None, [])


def _no_sheet(
    name: str,
    titles: Iterable[str],
    lacking: dict[str, list[str]],
    sought: Sought,
    own: str | None,
) -> RecordsError:
    """The refusal of a workbook without the table that is sought; it names the sheets."""
    said = []
    for title in titles:
        if title == own:
            said.append(f'Sheet "{title}", read as records: not looked at.')
        elif title in lacking:
            said.append(f'Sheet "{title}": no column for {listed(lacking[title])}.')
        else:
            said.append(f'Sheet "{title}" is empty.')
    shown = said[:_MOST_SHEETS]
    if len(said) > len(shown):
        shown.append(f"So it is with {len(said) - len(shown)} more.")
    column = sought.needed[-1]
    return RecordsError(
        f"{name}: no sheet looks like a {sought.what}.",
        details=shown,
        remedy=f"Expected columns for {listed(sought.needed)}; settle one with "
        f"--map 'Their Column={column}'.",
    )


def _filled_rows(
    book: Any, title: str, examined_sheet: Sheet | None
) -> Iterator[tuple[int, list[str], bool]]:
    """Rows that hold anything as text, each with its number in the sheet counted from 1.

    The last entry tells whether any number of the row was given the zeros it is shown with.
    """
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
        zeros = False
        for column, least in examined_sheet.digits.of_row(line) if examined_sheet else ():
            place = column - first_column
            if 0 <= place < len(row) and isinstance(row[place], int | float):
                shown = with_zeros(texts[place], least)
                zeros = zeros or shown != texts[place]
                texts[place] = shown
        if any(texts):
            yield line + 1, texts, zeros


def _rows(
    name: str, book: Any, title: str, examined_sheet: Sheet | None
) -> tuple[list[list[str]], list[int], bool]:
    """The sheet's filled rows, their numbers, and whether any has zeros by its format only."""
    if examined_sheet and examined_sheet.too_large:
        raise sheet_too_large(name, title, examined_sheet)
    rows: list[list[str]] = []
    lines: list[int] = []
    with_digits = False
    with _told(name):
        for line, row, zeros in _filled_rows(book, title, examined_sheet):
            rows.append(row)
            lines.append(line)
            with_digits = with_digits or zeros
    return rows, lines, with_digits


def _reading(
    title: str,
    titles: dict[str, bool],
    sheets: dict[str, Sheet],
    others: Sequence[str],
    *,
    with_digits: bool,
) -> str:
    """How the table was read, in words: the sheet, the others, and what could not be read."""
    said = f'workbook, sheet "{title}"'
    if len(titles) > 1:
        said += f" of {len(titles)}"
    if others:
        quoted = (f'"{other}"' for other in others)
        said += f" (not read: {listed(quoted)})"
    if with_digits:
        said += ", leading zeros as the sheet shows them"
    if titles.get(title):
        said += ", a hidden sheet"
    unsaved = sheets[title].unsaved if title in sheets else []
    if unsaved:
        said += (
            f", {len(unsaved)} formula{'s' if len(unsaved) > 1 else ''} saved without a value "
            f"read as blank (first: {place_name(*unsaved[0])})"
        )
    return said
