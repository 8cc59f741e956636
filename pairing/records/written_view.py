"""The view as a table of text again: one row an animal, as it is used, every column kept."""

from __future__ import annotations

from typing import TYPE_CHECKING

from pairing.records.animals import ROLES
from pairing.records.fields import (
    DATE_FIELDS,
    FIELDS,
    HOLDER_STAND_INS,
    SPELLINGS,
    folded,
)
from pairing.records.plain_dates import standard_date

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Mapping, Sequence

    from pairing.records.animals import Animals
    from pairing.records.audit import Audit

_WORDS = ("sex", "status", "origin", "end_cause")
_OTHER_ANIMALS = ("clone_of", "reared_by")
_NOBODY = ("unknown", "?", "unk", "null", "na")
_BETWEEN_REMARKS = " / "
SOURCE_LINE = "line in the records"
OTHER_IDS = "other ids"


def view_of(audit: Audit) -> tuple[list[str], Iterator[list[str]]]:
    """Header and rows of the view, in file order.

    Fields stand under their own names, in forms that read back to the same values; then every
    other column of the records as it was; then the line each animal comes from and, where ids
    were merged, its other ids. The view of a view keeps the lines of the first.
    """
    animals = audit.animals
    fields = [name for name in FIELDS if name in _present(animals)]
    carried = _headings(audit.records.carried)
    accounts: dict[str, Callable[[int], str]] = {SOURCE_LINE: lambda place: _lines(animals, place)}
    if animals.aliases:
        accounts[OTHER_IDS] = _other_ids(animals)
    accounts = {name: write for name, write in accounts.items() if name not in carried}
    writers = [_writer(animals, name) for name in fields]
    columns = [audit.records.carried[heading] for heading in carried.values()]

    def rows() -> Iterator[list[str]]:
        for place in range(len(animals)):
            yield [
                *(write(place) for write in writers),
                *(_remarks(animals, column, place) for column in columns),
                *(write(place) for write in accounts.values()),
            ]

    return [*fields, *carried, *accounts], rows()


def _lines(animals: Animals, place: int) -> str:
    """The line an animal comes from; all of them where it has several, the one used first."""
    own = int(animals.first_row[place])
    others = [row for row in animals.rows.get(place, ()) if row != own]
    return ", ".join(str(int(animals.records.lines[row])) for row in (own, *others))


def _remarks(animals: Animals, column: Sequence[str], place: int) -> str:
    """The cell of a column that is carried along; where it is blank, what other rows say."""
    own = column[int(animals.first_row[place])]
    if own.strip() or place not in animals.rows:
        return own
    cells = dict.fromkeys(column[row] for row in animals.rows[place])
    return _BETWEEN_REMARKS.join(cell for cell in cells if cell.strip())


def _other_ids(animals: Animals) -> Callable[[int], str]:
    also: dict[str, set[str]] = {}
    for other, name in animals.aliases.items():
        also.setdefault(name, set()).add(other)
    return lambda place: "|".join(sorted(also.get(animals.names[place], ())))


def _headings(carried: Mapping[str, object]) -> dict[str, str]:
    """Heading in the view to heading in the records, for the columns carried along."""
    headings: dict[str, str] = {}
    for heading in carried:
        name = _kept_apart(heading)
        number = 1
        while name in headings:
            number += 1
            name = f"{_kept_apart(heading)} ({number})"
        headings[name] = heading
    return headings


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
    if name == "dam" and "genetic_dam" in _present(animals):
        return lambda place: _recorded_dam(animals, place) or _parents(animals, "dam", place)
    if name in ROLES:
        return lambda place: _parents(animals, name, place)
    if name == "genetic_dam":
        return lambda place: _genetic_dam(animals, place)
    if name in DATE_FIELDS:
        return lambda place: _date(animals, name, place)
    if name in _WORDS:
        return lambda place: _word(animals, name, place)
    if name in _OTHER_ANIMALS:
        return lambda place: _kept_under(animals, animals.cell(name, place))
    return lambda place: animals.cell(name, place)


def _kept_under(animals: Animals, name: str) -> str:
    return animals.aliases.get(name, name)


def _recorded_dam(animals: Animals, place: int) -> str:
    """The dam as recorded where another is the genetic one, and so the dam that is used."""
    if animals.cell("genetic_dam", place) == "":
        return ""
    return _kept_under(animals, animals.cell("dam", place))


def _genetic_dam(animals: Animals, place: int) -> str:
    if animals.cell("genetic_dam", place) == "":
        return ""
    return _parents(animals, "dam", place) or _word_for_nobody(animals)


def _word_for_nobody(animals: Animals) -> str:
    """A word for an unknown parent that is no animal's id."""
    return next(word for word in _NOBODY if not animals.names.has_row(word))


def _parents(animals: Animals, role: str, place: int) -> str:
    parents = animals.parents(role, place)
    if len(parents) == 1 and parents[0][1] == 1.0:
        return parents[0][0]
    if not parents:
        only_here = "origin" not in animals.records.fields
        wild = animals.patched.get("origin", {}).get(place) == "wild"
        return "wild" if only_here and wild and role == "sire" else ""
    written = [f"{name}:{chance!r}" for name, chance in parents]
    if len(parents) == 1:
        # Alone, a name with a chance could be taken for the name of an animal.
        written.append(f"{_word_for_nobody(animals)}:{1 - parents[0][1]!r}")
    return "|".join(written)


def _word(animals: Animals, name: str, place: int) -> str:
    cell = animals.cell(name, place)
    if name == "sex" and animals.value("castrated", place):
        return cell
    value = str(animals.value(name, place, ""))
    # A blank sex or cause means unknown; an origin that is said to be so says more than a blank.
    said_nothing = cell == "" or (value == "unknown" and name != "origin")
    return "" if said_nothing else value


def _date(animals: Animals, name: str, place: int) -> str:
    date = animals.date(name, place)
    return "" if date is None else standard_date(date)
