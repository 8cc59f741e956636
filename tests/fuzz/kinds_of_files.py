"""A table of cells as every kind of file that is read."""

from __future__ import annotations

import csv
import datetime
import io
import re
import zipfile
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import openpyxl
import pyarrow as pa
import pyarrow.parquet as pq

from tests.test_workbooks import ods_cell, ods_row, open_document, saved

if TYPE_CHECKING:
    import random
    from collections.abc import Callable

    from tests.fuzz.seed_tables import Grid

_WITHOUT_CONTROLS = {code: "?" for code in range(32) if chr(code) not in "\t\n\r"}


@dataclass(frozen=True)
class Form:
    """How a grid of cells is written as text."""

    delimiter: str = ","
    line_end: str = "\n"
    encoding: str = "utf-8"
    quoting: Literal[0, 1, 2, 3] = csv.QUOTE_MINIMAL
    above: str = ""
    ends_open: bool = False


def _as_text(grid: Grid, chance: random.Random) -> tuple[bytes, tuple[int, ...] | None]:
    form = Form(
        delimiter=chance.choice(",,,;\t|"),
        line_end=chance.choice(("\n", "\n", "\r\n", "\r")),
        encoding=chance.choice(
            ("utf-8", "utf-8", "utf-8", "utf-8-sig", "utf-16", "utf-16-be", "cp1252", "latin-1")
        ),
        quoting=chance.choice((csv.QUOTE_MINIMAL, csv.QUOTE_MINIMAL, csv.QUOTE_ALL)),
        above=chance.choice(("", "", "", "# a comment\n", '\n#"\n', "#\r\n\r\n", "# id,sire\n")),
        ends_open=chance.random() < 0.3,
    )
    return written_as(grid, form), None


def written_as(grid: Grid, form: Form) -> bytes:
    """A grid as delimited text."""
    out = io.StringIO()
    writer = csv.writer(
        out, delimiter=form.delimiter, lineterminator=form.line_end, quoting=form.quoting
    )
    writer.writerows(grid)
    text = form.above + out.getvalue()
    if form.ends_open:
        text = text.rstrip("\r\n")
    marked = "\ufeff" + text if form.encoding == "utf-16-be" else text
    return marked.encode(form.encoding, "replace")


def _filled(grid: Grid, first: int = 1) -> tuple[int, ...]:
    return tuple(line for line, row in enumerate(grid, first) if any(cell.strip() for cell in row))


def _for_workbook(grid: Grid) -> Grid:
    return [[cell.translate(_WITHOUT_CONTROLS)[:30_000] for cell in row] for row in grid]


def _as_workbook(grid: Grid, chance: random.Random) -> tuple[bytes, tuple[int, ...] | None]:
    grid = _for_workbook(grid)
    book = openpyxl.Workbook()
    sheet = book.active
    for line, row in enumerate(grid, 1):
        for column, cell in enumerate(row, 1):
            if cell:
                place = sheet.cell(line, column)
                place.value, place.data_type = cell, "s"
    _with_values(sheet, chance)
    if chance.random() < 0.2:
        book.create_sheet("Notes").append(["a", "b"])
    return without_times(saved(book)), _filled(grid)


def _with_values(sheet: openpyxl.worksheet.worksheet.Worksheet, chance: random.Random) -> None:
    """Numbers, dates and truths in place of some text."""
    day = datetime.datetime(2019, 5, 31, 12)
    values = (
        7,
        7.5,
        1e300,
        -0.0,
        True,
        day,
        day.date(),
        day.time(),
        datetime.timedelta(3, 4),
        "=1+1",
    )
    for _time in range(chance.randrange(6)):
        row = chance.randint(1, max(1, sheet.max_row))
        place = sheet.cell(row, chance.randint(1, max(1, sheet.max_column)))
        if str(place.value or "").strip():
            place.value = chance.choice(values)


def _as_open_document(grid: Grid, chance: random.Random) -> tuple[bytes, tuple[int, ...] | None]:
    def escaped(cell: str) -> str:
        cell = cell.translate(_WITHOUT_CONTROLS).replace("&", "&amp;").replace("<", "&lt;")
        return cell.replace("\n", "</text:p><text:p>")

    rows = "".join(ods_row(*(ods_cell(escaped(cell)) for cell in row)) for row in grid)
    return without_times(open_document(("Animals", rows))), None


def without_times(content: bytes) -> bytes:
    """The same archive as if it had been made at the beginning of time."""
    out = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(content)) as old,
        zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new,
    ):
        for name in old.namelist():
            part = re.sub(rb"\d{4}-\d\d-\d\dT[\d:]{8}Z", b"1980-01-01T00:00:00Z", old.read(name))
            new.writestr(zipfile.ZipInfo(name), part, zipfile.ZIP_DEFLATED)
    return out.getvalue()


def _as_parquet(grid: Grid, chance: random.Random) -> tuple[bytes, tuple[int, ...] | None]:
    width = len(grid[0])
    even = [[*row, *[""] * width][:width] for row in grid]
    header, *below = even
    columns = []
    for place in range(width):
        cells: pa.Array = pa.array([row[place] for row in below], pa.string())
        if chance.random() < 0.3:
            cells = cells.dictionary_encode()
        columns.append(cells)
    if columns and chance.random() < 0.3:
        days = [datetime.date(2019, 5, 31), None, datetime.date(1, 1, 1)]
        columns[-1] = pa.array([chance.choice(days) for _row in below], pa.date32())
    out = io.BytesIO()
    table = pa.Table.from_arrays(columns, names=header)
    pq.write_table(table, out, compression=chance.choice(("none", "snappy", "gzip", "zstd")))
    return out.getvalue(), None


KINDS: dict[
    str,
    tuple[Callable[[Grid, random.Random], tuple[bytes, tuple[int, ...] | None]], int],
] = {
    "text": (_as_text, 75),
    "workbook": (_as_workbook, 10),
    "open document": (_as_open_document, 7),
    "parquet": (_as_parquet, 8),
}
