"""Making the view: rows to animals, duplicates agreed, decisions applied, cells read."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from pairing.dates import EXPECTED
from pairing.records import fields as words
from pairing.records.animals import ROLES, UNKNOWN, Animals, Dates, Reading
from pairing.records.checks.possible_parents import set_aside_impossible
from pairing.records.columns import Coded, coded, replaced
from pairing.records.date_columns import read_date_column
from pairing.records.decisions import applied_decisions
from pairing.records.duplicates import PARENT_FIELDS, agree
from pairing.records.findings import Finding
from pairing.records.ids.naming import number_animals
from pairing.records.litter_rows import LITTER_NUMBERS, count_of_litters
from pairing.records.parents import ParentCells
from pairing.records.rules import RecordRules
from pairing.records.words import WORD_FIELDS, is_castrate, read_word, same_meaning

if TYPE_CHECKING:
    from collections.abc import Mapping

    from pairing.records.animals import PlaceArray
    from pairing.records.parents import Side
    from pairing.records.table import Records

_MOST_TOLD = 3


def read_animals(
    records: Records, rules: RecordRules | None = None
) -> tuple[Animals, list[Finding]]:
    """Every animal of the records in file order, and what was found on the way."""
    view = _View(records, rules or RecordRules())
    return view.animals(), view.findings


class _View:
    """Builds the view of one set of records; holds what every step needs."""

    def __init__(self, records: Records, rules: RecordRules) -> None:
        self.findings: list[Finding] = []
        self._records = records
        self._rules = rules
        self._aliases = rules.aliases
        self._id_cells = replaced(records.column("id"), self._aliases)
        numbering = number_animals(self._id_cells)
        self._names = numbering.names
        self._first_row = numbering.first_row
        self._animal_of_row = numbering.animal_of_row
        self._patched: dict[str, dict[int, str]] = defaultdict(dict)
        self._rows: dict[int, tuple[int, ...]] = {}
        self._parent_cells = ParentCells(records, self._names, self._aliases)

    def animals(self) -> Animals:
        self._rows_without_id()
        self._agree_on_duplicates()
        self.findings += applied_decisions(
            self._rules, self._records, self._names, self._first_row, self._cell, self._patched
        )
        sire, dam = self._sides()
        self._break_rings_of_clones(sire, dam)
        values, dates = self._values(), self._dates()
        animals = Animals(
            records=self._records,
            names=self._names,
            first_row=self._first_row,
            sire=sire.parent,
            dam=dam.parent,
            possible={
                **{("sire", animal): parents for animal, parents in sire.possible.items()},
                **{("dam", animal): parents for animal, parents in dam.possible.items()},
            },
            values=values,
            dates=dates,
            patched={field: dict(cells) for field, cells in self._patched.items()},
            clones=self._clones_of_animals(values),
            aliases=self._aliases,
            rows=self._rows,
        )
        animals, impossible = set_aside_impossible(animals, self._rules)
        self.findings += impossible
        return animals

    def _line(self, row: int) -> int:
        return int(self._records.lines[row])

    def _cell(self, field: str, animal: int) -> str:
        patched = self._patched.get(field, {}).get(animal)
        if patched is not None:
            return patched
        column = self._records.fields.get(field)
        return "" if column is None else column[int(self._first_row[animal])]

    def _rows_without_id(self) -> None:
        for row in np.flatnonzero(self._animal_of_row == UNKNOWN).tolist():
            self.findings.append(
                Finding(
                    "missing-id",
                    f"the row has no id ({self._first_words(row)}).",
                    "Give the animal an id, or delete the row.",
                    row=self._line(row),
                    column=self._records.columns["id"],
                    found="",
                )
            )

    def _first_words(self, row: int) -> str:
        """What a row without an id can be told by: its first filled cells, and its parents."""
        cells = [
            (self._records.columns.get(field, field), column[row])
            for field, column in self._records.fields.items()
            if field not in ("id", *ROLES)
        ]
        cells += [(heading, column[row]) for heading, column in self._records.carried.items()]
        told = [each for each in cells if each[1].strip()][:_MOST_TOLD]
        told += [(role, self._records.column(role)[row]) for role in ROLES]
        return ", ".join(f'{name} "{cell.strip()}"' for name, cell in told)

    # Rows that share an id

    def _agree_on_duplicates(self) -> None:
        if len(self._first_row) == len(self._animal_of_row):
            return
        known = self._animal_of_row[self._animal_of_row != UNKNOWN]
        several = np.bincount(known, minlength=len(self._first_row)) > 1
        with_id = np.flatnonzero(self._animal_of_row != UNKNOWN)
        rows = with_id[several[self._animal_of_row[with_id]]]
        rows_of: dict[int, list[int]] = defaultdict(list)
        for row in rows.tolist():
            rows_of[int(self._animal_of_row[row])].append(row)
        chosen = {
            self._aliases.get(each.id, each.id): each.row
            for each in self._rules.decisions
            if each.decision == "use-row"
        }
        self._first_row = self._first_row.copy() if rows_of else self._first_row
        self._rows = {animal: tuple(positions) for animal, positions in rows_of.items()}
        for animal, positions in rows_of.items():
            line = chosen.get(self._names[animal])
            own = [row for row in positions if self._line(row) == line]
            if own:
                self._first_row[animal] = own[0]
            else:
                self._agree(animal, positions)

    def _agree(self, animal: int, rows: list[int]) -> None:
        """Patch cells on which the rows of one animal do not agree to blank."""
        agreed = agree(self._records, self._names[animal], rows, self._meaning)
        for field, cell in agreed.patched.items():
            self._patched[field][animal] = cell
        self.findings.append(agreed.finding)

    def _meaning(self, field: str, cell: str) -> object:
        if field not in PARENT_FIELDS:
            return same_meaning(field, cell)
        cell = self._aliases.get(cell, cell)
        if not self._names.has_row(cell) and self._parent_cells.names_nobody(cell):
            return ""
        return frozenset(cell.split("|"))

    # Parents

    def _sides(self) -> tuple[Side, Side]:
        self._parent_cells.look_up_both()
        sire = self._side("sire")
        dam = self._side("dam")
        told = self._coded("genetic_dam")
        if told is not None:
            # A donor that is named, even as not known, is the dam; a blank says nothing.
            named = told.rows_of([place for place, word in enumerate(told.words) if word])
            genetic = self._side("genetic_dam")
            dam.parent[named] = genetic.parent[named]
            for animal in named.tolist():
                dam.possible.pop(animal, None)
            dam.possible.update(genetic.possible)
        for animal in sorted(sire.wild | dam.wild):
            nobody = sire.parent[animal] == UNKNOWN and dam.parent[animal] == UNKNOWN
            if nobody and self._cell("origin", animal) == "":
                self._patched["origin"][animal] = "wild"
        for animal in self._parent_cells.ids_meaning_unknown:
            name = self._names[animal]
            self.findings.append(
                Finding(
                    "id-means-unknown",
                    f'"{name}" is an animal\'s id and also a word for an unknown parent; as '
                    "a parent it is read as unknown.",
                    "Give the animal another id.",
                    id=name,
                    row=self._line(int(self._first_row[animal])),
                    column=self._records.columns["id"],
                    found=name,
                )
            )
        return sire, dam

    def _side(self, field: str) -> Side:
        side = self._parent_cells.side(field, self._first_row, self._patched.get(field, {}))
        for animal, cell in side.unreadable.items():
            self.findings.append(
                Finding(
                    "unreadable-parent",
                    f'"{cell}" cannot be read as a list of possible parents of '
                    f"{self._names[animal]}.",
                    "Write S12|S15 for equal chances or S12:0.7|S15:0.3 for chances that add "
                    "up to at most 1.",
                    id=self._names[animal],
                    row=self._line(int(self._first_row[animal])),
                    column=self._records.columns.get(field),
                    found=cell,
                )
            )
        return side

    def _break_rings_of_clones(self, sire: Side, dam: Side) -> None:
        """Twins that name each other: the first with the most known parents is the model.

        The others copy it; it copies nobody.
        """
        copied = self._clones()

        def known_parents(animal: int) -> int:
            return int(sire.parent[animal] != UNKNOWN) + int(dam.parent[animal] != UNKNOWN)

        settled: set[int] = set()
        for start in copied:
            ring = [start]
            while ring[-1] in copied and ring[-1] not in settled:
                after = copied[ring[-1]]
                if after in ring:
                    ring = ring[ring.index(after) :]
                    model = max(ring, key=lambda each: (known_parents(each), -each))
                    self._patched["clone_of"][model] = ""
                    break
                ring.append(after)
            settled.update(ring)

    def _clones(self) -> dict[int, int]:
        """Animals that are clones of others, by place."""
        column = self._coded("clone_of")
        if column is None:
            return {}
        models = {
            place: self._names.find(self._aliases.get(word, word))
            for place, word in enumerate(column.words)
            if word
        }
        return {
            animal: models[int(column.codes[animal])]
            for animal in column.rows_of(list(models)).tolist()
            if models[int(column.codes[animal])] not in (UNKNOWN, animal)
        }

    def _clones_of_animals(self, values: Mapping[str, Reading[object]]) -> dict[int, int]:
        """Clones whose model is one animal: a row of a group says not which of it."""
        counts = values.get("count")
        return {
            clone: model
            for clone, model in self._clones().items()
            if counts is None or model >= len(self._first_row) or counts[model] == 1
        }

    # Words, numbers and dates

    def _coded(self, field: str) -> Coded | None:
        """A field by animal, as distinct words and codes; None where there is no such column."""
        patched = self._patched.get(field)
        if field not in self._records.fields:
            if not patched:
                return None
            column = Coded(("",), np.zeros(len(self._first_row), dtype=np.int32))
        else:
            column = coded(self._records.fields[field])
            if len(column.codes) != len(self._first_row) or self._moved:
                column = replace(column, codes=column.codes[self._first_row])
        return _with_patches(column, patched or {})

    @property
    def _moved(self) -> bool:
        """Whether animals stand in another row than their own number."""
        n = len(self._first_row)
        return n > 0 and bool((self._first_row != np.arange(n, dtype=np.int32)).any())

    def _values(self) -> dict[str, Reading[object]]:
        values: dict[str, Reading[object]] = {}
        for field in WORD_FIELDS:
            column = self._coded(field)
            if column is None:
                continue
            read = [read_word(field, word) for word in column.words]
            values[field] = Reading(tuple(value for value, _misread in read), column.codes)
            if field == "sex":
                castrates = tuple(is_castrate(word) for word in column.words)
                values["castrated"] = Reading(castrates, column.codes)
            misread = {place: why for place, (_value, why) in enumerate(read) if why is not None}
            for animal in column.rows_of(list(misread)).tolist():
                why = misread[int(column.codes[animal])]
                self._misread(field, animal, column, why.kind, why.expected)
        if any(field in values for field in LITTER_NUMBERS):
            own = self._coded("count")
            counted = np.zeros(len(self._first_row), dtype=bool)
            if own is not None:
                counted = np.array([word != "" for word in own.words], dtype=bool)[own.codes]
            count = count_of_litters(values, counted, len(self._first_row))
            values.update({"count": count} if count is not None else {})
        return values

    def _dates(self) -> dict[str, Dates]:
        dates: dict[str, Dates] = {}
        for field in words.DATE_FIELDS:
            column = self._coded(field)
            if column is None:
                continue
            read = read_date_column(column.words, field=field, order=self._rules.date_order)
            dates[field] = Dates(Reading(read.dates, column.codes), read.said)
            for animal in column.rows_of(list(read.problems)).tolist():
                kind, sentence = read.problems[int(column.codes[animal])]
                self._doubtful_date(field, animal, column, kind, sentence)
        return dates

    def _misread(self, field: str, animal: int, column: Coded, kind: str, expected: str) -> None:
        cell = column.words[int(column.codes[animal])]
        name = self._names[animal]
        treated = "counts as 1" if field == "count" else "counts as unknown"
        self._add(
            kind,
            f'{name}: {field} "{cell}" is not understood and {treated}.',
            f"Expected {expected}",
            field,
            animal,
            cell,
        )

    def _doubtful_date(
        self, field: str, animal: int, column: Coded, kind: str, sentence: str
    ) -> None:
        cell = column.words[int(column.codes[animal])]
        self._add(
            kind,
            f"{self._names[animal]}: {sentence}",
            _DATE_REMEDIES[kind],
            field,
            animal,
            cell,
        )

    def _add(
        self, kind: str, message: str, remedy: str, field: str, animal: int, cell: str
    ) -> None:
        self.findings.append(
            Finding(
                kind,
                message,
                remedy,
                id=self._names[animal],
                row=self._line(int(self._first_row[animal])),
                column=self._records.columns.get(field),
                found=cell,
            )
        )


_DATE_REMEDIES = {
    "unreadable-date": f"Expected {EXPECTED}.",
    "ambiguous-date": 'Say date_order = "day-first" (or "month-first") under [records] in the '
    "policy, or write the day as 2019-05-31; until then any day from the one to the other counts.",
    "two-digit-year": "Write the year with four digits.",
    "serial-date": "Format the column as a date in your spreadsheet and save it again.",
}


def _with_patches(column: Coded, patched: Mapping[int, str]) -> Coded:
    if not patched:
        return column
    places = {word: place for place, word in enumerate(column.words)}
    codes: PlaceArray = column.codes.copy()
    for animal, cell in patched.items():
        codes[animal] = places.setdefault(cell, len(places))
    return Coded(tuple(places), codes)
