"""The view as a table of text again: one row an animal, as it is used, every column kept."""

from __future__ import annotations

from typing import TYPE_CHECKING

from pairing.records.animals import ROLES
from pairing.records.fields import (
    DATE_FIELDS,
    FIELDS,
    HOLDER_STAND_INS,
    MISSING_PARENT,
    SPELLINGS,
    folded,
)
from pairing.records.plain_dates import plain_date

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from pairing.records.animals import Animals
    from pairing.records.audit import Audit

_WORDS = ("sex", "status", "origin", "end_cause")
SOURCE_LINE = "line in the records"
OTHER_IDS = "other ids"


def view_of(audit: Audit) -> tuple[list[str], Iterator[list[str]]]:
    """Header and rows of the view, in file order.

    Fields stand under their own names, in forms that read back to the same values; then every
    other column of the records as it was; then the line each animal comes from and, where ids
    were merged, its other ids.
    """
    animals = audit.animals
    fields = [name for name in FIELDS if name in _present(animals)]
    carried = {_kept_apart(heading): heading for heading in audit.records.carried}
    also: dict[str, list[str]] = {}
    for other, name in animals.aliases.items():
        also.setdefault(name, []).append(other)
    header = [*fields, *carried, SOURCE_LINE, *([OTHER_IDS] if also else [])]
    writers = [_writer(animals, name) for name in fields]
    columns = [audit.records.carried[heading] for heading in carried.values()]

    def rows() -> Iterator[list[str]]:
        for place in range(len(animals)):
            row = int(animals.first_row[place])
            yield [
                *(write(place) for write in writers),
                *(column[row] for column in columns),
                str(animals.line(place)),
                *(["|".join(sorted(also.get(animals.names[place], [])))] if also else []),
            ]

    return header, rows()


def _present(animals: Animals) -> set[str]:
    """Fields that the records have, or that a decision has given some animal.

    An origin that was only read from the word "wild" among the parents is written there again:
    a column of origins would change who else is presumed to be a founder.
    """
    patched = {name for name, cells in animals.patched.items() if any(cells.values())}
    return {"id", *ROLES, *animals.records.fields, *(patched - {"origin"})}


def _kept_apart(heading: str) -> str:
    """A heading that will not be taken for a field when the view is read."""
    bare = folded(heading)
    taken = bare in SPELLINGS or bare in HOLDER_STAND_INS
    return f"{heading} (as recorded)" if taken else heading


def _writer(animals: Animals, name: str) -> Callable[[int], str]:
    if name == "id":
        return lambda place: animals.names[place]
    if name in ROLES:
        return lambda place: _parents(animals, name, place)
    if name in DATE_FIELDS:
        return lambda place: _date(animals, name, place)
    if name in _WORDS:
        return lambda place: _word(animals, name, place)
    return lambda place: animals.cell(name, place)


def _parents(animals: Animals, role: str, place: int) -> str:
    parents = animals.parents(role, place)
    if len(parents) == 1 and parents[0][1] == 1.0:
        return parents[0][0]
    if not parents:
        only_here = "origin" not in animals.records.fields
        wild = animals.patched.get("origin", {}).get(place) == "wild"
        return "wild" if only_here and wild and role == "sire" else ""
    return "|".join(f"{name}:{chance!r}" for name, chance in parents)


def _word(animals: Animals, name: str, place: int) -> str:
    cell = animals.cell(name, place)
    if name == "sex" and animals.value("castrated", place):
        return cell
    value = str(animals.value(name, place, ""))
    said_nothing = cell == "" or cell.casefold() in MISSING_PARENT
    return "" if said_nothing or value == "unknown" else value


def _date(animals: Animals, name: str, place: int) -> str:
    date = animals.date(name, place)
    return "" if date is None else plain_date(date)
