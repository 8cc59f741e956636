"""Several rows with one id: what they agree on is used, what they do not is nobody's guess."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from pairing.records.findings import Finding

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence

    from pairing.records.table import Records

PARENT_FIELDS = ("sire", "dam", "genetic_dam")


@dataclass(frozen=True, slots=True)
class Agreed:
    """What several rows of one animal come to.

    Attributes
    ----------
    patched
        Field to the cell that counts, where it is not that of the first row.
    finding
        What the keeper is told.
    """

    patched: Mapping[str, str]
    finding: Finding


def agree(
    records: Records, name: str, rows: Sequence[int], meaning: Callable[[str, str], object]
) -> Agreed:
    """The cells on which the rows of an animal agree; where they contradict each other, blank.

    Parameters
    ----------
    rows
        Places of its rows in the records.
    meaning
        What a cell of a field says, blank when it says nothing, so that ``m`` and ``male``
        agree.
    """
    patched: dict[str, str] = {}
    differing: list[str] = []
    partly_blank: list[str] = []
    for field, column in records.fields.items():
        if field == "id":
            continue
        meant = {meaning(field, column[row]): column[row] for row in reversed(rows)}
        blank = meant.pop("", None) is not None
        agreed = next(iter(meant.values())) if len(meant) == 1 else ""
        if agreed != column[rows[0]]:
            patched[field] = agreed
        if len(meant) > 1:
            differing.append(field)
        elif meant and blank and field in PARENT_FIELDS:
            partly_blank.append(field)
    return Agreed(patched, _duplicate(records, name, rows, differing, partly_blank))


def _duplicate(
    records: Records,
    name: str,
    rows: Sequence[int],
    differing: list[str],
    partly_blank: list[str],
) -> Finding:
    lines = [int(records.lines[row]) for row in rows]
    where = ", ".join(str(line) for line in lines)
    said = "; ".join(_said(records, field, rows) for field in (*differing, *partly_blank))
    message = f"{name} has rows on lines {where} that differ: {said}."
    milder: str | None = "warning"
    fields = "the fields in doubt count as unknown" if differing else ""
    parent = "the parent that is recorded is used" if partly_blank else ""
    if any(field in PARENT_FIELDS for field in differing):
        milder = None
        remedy = "Keep the right row, or give the second animal an id of its own."
    elif differing or partly_blank:
        until = " and ".join(part for part in (fields, parent) if part)
        remedy = f"Keep the right row; until then {until}."
    else:
        milder = "note"
        message = f"{name} has rows on lines {where} that say the same."
        remedy = "They count as one animal; delete all but one."
    return Finding(
        "duplicate-id",
        message,
        remedy,
        id=name,
        row=lines[-1],
        column=records.columns["id"],
        found=name,
        milder=milder,
    )


def _said(records: Records, field: str, rows: Sequence[int]) -> str:
    """What the rows of one animal say about a field, for instance ``sire "A" or blank``."""
    values = dict.fromkeys(records.fields[field][row] for row in rows)
    return f"{field} " + " or ".join(f'"{value}"' if value else "blank" for value in values)
