"""The cleaned view of records: one entry an animal, cells read as values.

The view is made beside the rows and never instead of them: what cannot be read is a
`Finding`, and counts as unknown here.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, TypeVar

from pairing.dates import EXPECTED, DateRange, parse_date
from pairing.records import fields as words
from pairing.records.findings import Finding
from pairing.spelling import did_you_mean

if TYPE_CHECKING:
    from collections.abc import Mapping

    from pairing.records.table import Records

Parents = tuple[tuple[str, float], ...]
"""The possible parents of one side with their chances; empty when unknown, one entry when sure."""

Value = TypeVar("Value")

_EXPECTED_WORDS = {
    "sex": "male, female, unknown, hermaphrodite",
    "status": "living, dead, gone, lost",
    "origin": "wild, foundation, imported, captive, unknown",
    "end_cause": "natural, euthanised-ill, culled, slaughtered, used, unknown",
    "may_breed": "yes, no",
}
_WORDS: dict[str, Mapping[str, object]] = {
    "sex": words.SEX_WORDS,
    "status": words.STATUS_WORDS,
    "origin": words.ORIGIN_WORDS,
    "may_breed": words.YES_NO_WORDS,
}
_TOO_SHORT_TO_GUESS = 2
_PARENT_FIELDS = ("sire", "dam", "genetic_dam")
_NAMING_FIELDS = ("holder", "born_at", "line", "clone_of", "litter", "group", "mark")
_TEXT_FIELDS = (
    "name",
    "local_id",
    "mark",
    "holder",
    "born_at",
    "line",
    "may_breed_note",
    "clone_of",
    "litter",
    "group",
    "reared_by",
)


@dataclass(frozen=True, slots=True)
class Animal:
    """One animal of the records: a cleaned row, or what several rows with its id agree on."""

    id: str
    row: int
    sire: Parents
    dam: Parents
    sex: str
    dates: Mapping[str, DateRange]
    text: Mapping[str, str]
    status: str
    origin: str
    end_cause: str
    may_breed: bool | None
    merit: float | None

    @property
    def born(self) -> DateRange | None:
        """When it was born or hatched."""
        return self.dates.get("born")


def read_animals(records: Records) -> tuple[list[Animal], list[Finding]]:
    """Every animal of the records in file order, and what was found on the way."""
    findings: list[Finding] = []
    entries: dict[str, list[int]] = {}
    for position, animal_id in enumerate(records.column("id")):
        if animal_id == "":
            findings.append(_missing_id(records, position))
        else:
            entries.setdefault(animal_id, []).append(position)
    reader = _Cells(records, frozenset(entries), findings)
    animals = [reader.animal(animal_id, positions) for animal_id, positions in entries.items()]
    return _one_of_each_set_of_twins(animals), findings


def _one_of_each_set_of_twins(animals: list[Animal]) -> list[Animal]:
    """Twins that name each other as clones: the first with the most known parents is the model.

    The others copy it; it copies nobody.
    """
    by_id = {animal.id: animal for animal in animals}
    models: set[str] = set()
    for animal in animals:
        ring = [animal.id]
        while (copied := by_id[ring[-1]].text.get("clone_of", "")) in by_id:
            if copied in ring:
                ring = ring[ring.index(copied) :]
                models.add(
                    max(ring, key=lambda each: (_known_parents(by_id[each]), -by_id[each].row))
                )
                break
            ring.append(copied)
    return [
        replace(
            animal,
            text={field: value for field, value in animal.text.items() if field != "clone_of"},
        )
        if animal.id in models
        else animal
        for animal in animals
    ]


def _says_nothing(cell: str) -> bool:
    """Whether a cell that should name something holds a word for "not known"."""
    return cell.casefold() in words.MISSING_PARENT and cell.casefold() != words.WILD_PARENT


def _known_parents(animal: Animal) -> int:
    return bool(animal.sire) + bool(animal.dam)


def _missing_id(records: Records, position: int) -> Finding:
    sire, dam = records.column("sire")[position], records.column("dam")[position]
    return Finding(
        "missing-id",
        f'the row has no id (sire "{sire}", dam "{dam}").',
        "Give the animal an id, or delete the row.",
        row=records.lines[position],
        column=records.columns["id"],
        found="",
    )


class _Cells:
    """Reads the cells of one file; holds what every cell's reading needs."""

    def __init__(
        self, records: Records, known_ids: frozenset[str], findings: list[Finding]
    ) -> None:
        self._records = records
        self._known_ids = known_ids
        self._findings = findings
        self._columns = {field: records.column(field) for field in words.FIELDS}

    def animal(self, animal_id: str, positions: list[int]) -> Animal:
        cells = self._agreed(animal_id, positions)
        row = self._records.lines[positions[0]]
        sire = self._parents(cells, "sire", animal_id, row)
        dam_field = "genetic_dam" if cells["genetic_dam"] else "dam"
        dam = self._parents(cells, dam_field, animal_id, row)
        sex_word = cells["sex"].casefold()
        sex = self._word(cells, "sex", words.SEX_WORDS, "unknown", animal_id, row)
        origin = self._word(cells, "origin", words.ORIGIN_WORDS, "", animal_id, row)
        if (
            not sire
            and not dam
            and not origin
            and words.WILD_PARENT in (cells["sire"].casefold(), cells["dam"].casefold())
        ):
            origin = "wild"
        may_breed: bool | None = self._word(
            cells, "may_breed", words.YES_NO_WORDS, None, animal_id, row
        )
        text = {
            field: cells[field]
            for field in _TEXT_FIELDS
            if cells[field] and not (field in _NAMING_FIELDS and _says_nothing(cells[field]))
        }
        if sex_word in words.CASTRATE_WORDS:
            may_breed = False
            text.setdefault("may_breed_note", f'recorded as "{cells["sex"]}"')
        self._check_count(cells, animal_id, row)
        return Animal(
            id=animal_id,
            row=row,
            sire=sire,
            dam=dam,
            sex=sex,
            dates=self._dates(cells, animal_id, row),
            text=text,
            status=self._word(cells, "status", words.STATUS_WORDS, "", animal_id, row),
            origin=origin,
            end_cause=self._word(
                cells,
                "end_cause",
                {cause: cause for cause in words.END_CAUSES},
                "unknown",
                animal_id,
                row,
            ),
            may_breed=may_breed,
            merit=self._number(cells, "merit", animal_id, row),
        )

    def _agreed(self, animal_id: str, positions: list[int]) -> dict[str, str]:
        """The cells of an animal; where its rows contradict each other, blank."""
        if len(positions) == 1:
            position = positions[0]
            return {field: column[position] for field, column in self._columns.items()}
        cells: dict[str, str] = {}
        differing: list[str] = []
        partly_blank: list[str] = []
        for field, column in self._columns.items():
            meant = {self._meaning(field, column[p]): column[p] for p in reversed(positions)}
            blank = meant.pop("", None) is not None
            cells[field] = next(iter(meant.values())) if len(meant) == 1 else ""
            if len(meant) > 1:
                differing.append(field)
            elif meant and blank and field in _PARENT_FIELDS:
                partly_blank.append(field)
        self._findings.append(self._duplicate(animal_id, positions, differing, partly_blank))
        return cells

    def _meaning(self, field: str, cell: str) -> object:
        """What a cell says, so that ``m`` and ``male`` agree, and ``?`` says nothing."""
        if field in _PARENT_FIELDS:
            unknown = cell not in self._known_ids and self._names_nobody(cell)
            return "" if unknown else frozenset(cell.split("|"))
        if field in _WORDS:
            said = _WORDS[field].get(cell.casefold(), cell)
            return "" if said == "unknown" else said
        return cell

    def _names_nobody(self, cell: str) -> bool:
        """Whether a parent's cell is one of the words for an unknown parent."""
        return cell.casefold() in words.MISSING_PARENT or (
            cell == "0" and "0" not in self._known_ids
        )

    def _duplicate(
        self, animal_id: str, positions: list[int], differing: list[str], partly_blank: list[str]
    ) -> Finding:
        lines = [self._records.lines[position] for position in positions]
        where = ", ".join(str(line) for line in lines)
        said = "; ".join(self._said(field, positions) for field in (*differing, *partly_blank))
        message = f"{animal_id} has rows on lines {where} that differ: {said}."
        milder: str | None = "warning"
        fields = "the fields in doubt count as unknown" if differing else ""
        parent = "the parent that is recorded is used" if partly_blank else ""
        if any(field in _PARENT_FIELDS for field in differing):
            milder = None
            remedy = "Keep the right row, or give the second animal an id of its own."
        elif differing or partly_blank:
            until = " and ".join(part for part in (fields, parent) if part)
            remedy = f"Keep the right row; until then {until}."
        else:
            milder = "note"
            message = f"{animal_id} has rows on lines {where} that say the same."
            remedy = "They count as one animal; delete all but one."
        return Finding(
            "duplicate-id",
            message,
            remedy,
            id=animal_id,
            row=lines[-1],
            column=self._records.columns["id"],
            found=animal_id,
            milder=milder,
        )

    def _said(self, field: str, positions: list[int]) -> str:
        """What the rows of one animal say about a field, for instance ``sire "A" or blank``."""
        values = dict.fromkeys(self._columns[field][p] for p in positions)
        return f"{field} " + " or ".join(f'"{value}"' if value else "blank" for value in values)

    def _parents(self, cells: dict[str, str], field: str, animal_id: str, row: int) -> Parents:
        cell = cells[field]
        if self._names_nobody(cell):
            return ()
        if cell in self._known_ids:
            return ((cell, 1.0),)
        if "|" not in cell and cell.rpartition(":")[0] not in self._known_ids:
            return ((cell, 1.0),)
        parents = _possible_parents(cell, self._known_ids)
        if parents is None:
            self._findings.append(
                Finding(
                    "unreadable-parent",
                    f'"{cell}" cannot be read as a list of possible parents of {animal_id}.',
                    "Write S12|S15 for equal chances or S12:0.7|S15:0.3 for chances that add "
                    "up to at most 1.",
                    id=animal_id,
                    row=row,
                    column=self._records.columns.get(field),
                    found=cell,
                )
            )
            return ()
        return parents

    def _dates(self, cells: dict[str, str], animal_id: str, row: int) -> dict[str, DateRange]:
        dates = {}
        for field in words.DATE_FIELDS:
            cell = cells[field]
            if cell == "" or cell.casefold() in words.MISSING_PARENT:
                continue
            read = parse_date(cell)
            if read is None:
                self._unreadable("unreadable-date", cells, field, animal_id, row, EXPECTED)
            else:
                dates[field] = read
        return dates

    def _word(
        self,
        cells: dict[str, str],
        field: str,
        known: Mapping[str, Value],
        default: Value,
        animal_id: str,
        row: int,
    ) -> Value:
        cell = cells[field].casefold()
        if cell == "":
            return default
        if cell in known:
            return known[cell]
        kind = "unreadable-sex" if field == "sex" else "unreadable-value"
        expected = f"one of: {_EXPECTED_WORDS[field]}"
        hint = did_you_mean(cell, known) if len(cell) > _TOO_SHORT_TO_GUESS else ""
        self._unreadable(kind, cells, field, animal_id, row, expected, hint)
        return default

    def _number(self, cells: dict[str, str], field: str, animal_id: str, row: int) -> float | None:
        cell = cells[field]
        if cell == "" or cell.casefold() in words.MISSING_PARENT:
            return None
        try:
            number = float(cell)
        except ValueError:
            number = float("nan")
        if number != number or number in (float("inf"), float("-inf")):
            self._unreadable("unreadable-value", cells, field, animal_id, row, "a number")
            return None
        return number

    def _check_count(self, cells: dict[str, str], animal_id: str, row: int) -> None:
        if cells["count"] in ("", "1"):
            return
        self._findings.append(
            Finding(
                "group-row",
                f'{animal_id} stands for "{cells["count"]}" animals; it is counted as one.',
                "Give each animal a row of its own where you can.",
                id=animal_id,
                row=row,
                column=self._records.columns.get("count"),
                found=cells["count"],
            )
        )

    def _unreadable(
        self,
        kind: str,
        cells: dict[str, str],
        field: str,
        animal_id: str,
        row: int,
        expected: str,
        hint: str = "",
    ) -> None:
        self._findings.append(
            Finding(
                kind,
                f'{animal_id}: {field} "{cells[field]}" is not understood and counts as unknown.',
                f"Expected {expected}. {hint}".rstrip(),
                id=animal_id,
                row=row,
                column=self._records.columns.get(field),
                found=cells[field],
            )
        )


def _possible_parents(cell: str, known_ids: frozenset[str]) -> Parents | None:
    """Possible parents from ``S12|S15`` or ``S12:0.7|S15:0.3``; None when it cannot be read."""
    names: list[str] = []
    chances: list[float | None] = []
    for part in (piece.strip() for piece in cell.split("|")):
        name, colon, chance = part.rpartition(":")
        if part in known_ids or not colon:
            names.append(part)
            chances.append(None)
            continue
        try:
            chances.append(float(chance))
        except ValueError:
            return None
        names.append(name.strip())
    if "" in names or len(set(names)) < len(names):
        return None
    given = [chance for chance in chances if chance is not None]
    fits = all(0 < chance <= 1 for chance in given) and sum(given) <= 1 + 1e-9
    if given and (len(given) < len(names) or not fits):
        return None
    weights = given or [1 / len(names)] * len(names)
    return tuple(
        (name, weight)
        for name, weight in zip(names, weights, strict=True)
        if name in known_ids or (name != "0" and name.casefold() not in words.MISSING_PARENT)
    )
