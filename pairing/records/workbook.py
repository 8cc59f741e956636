"""Tables from spreadsheet workbooks; formulas are never evaluated."""

from __future__ import annotations

import datetime
import hashlib
import io

from pairing.errors import RecordsError
from pairing.records.raw import RawTable, raw_table

_SAVE_AS = "Save it from your spreadsheet as CSV or .xlsx and try again."


def read_workbook(name: str, content: bytes, table: str | None = None) -> RawTable:
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
    rows = [[_cell_text(cell) for cell in row] for row in values]
    sheet_name = chosen[0] if chosen else ""
    return raw_table(
        name,
        f'workbook, sheet "{sheet_name}"',
        hashlib.sha256(content).hexdigest(),
        rows,
        range(1, len(rows) + 1),
    )


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
