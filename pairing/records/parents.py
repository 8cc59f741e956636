"""Parents as recorded: an id, a word for "not known", or several possible ids with chances."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field
from itertools import product
from typing import TYPE_CHECKING

import numpy as np

from pairing.records import fields as words
from pairing.records.animals import SEVERAL, UNKNOWN, Parents
from pairing.records.columns import picked, replaced
from pairing.records.ids.naming import NOT_FOUND

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from pairing.records.animals import PlaceArray
    from pairing.records.ids.naming import Names
    from pairing.records.table import Records

_MANY = 500_000
_SHORT = max(map(len, words.MISSING_PARENT))


@dataclass(slots=True)
class Side:
    """One parent of every animal.

    Attributes
    ----------
    parent
        Place among the names, -1 unknown, -2 one of several, shape (animals,).
    possible
        Animal to its possible parents.
    wild
        Animals whose cell says ``wild``.
    unreadable
        Animal to a cell that looks like a list and cannot be read as one.
    """

    parent: PlaceArray
    possible: dict[int, Parents] = field(default_factory=dict)
    wild: set[int] = field(default_factory=set)
    unreadable: dict[int, str] = field(default_factory=dict)


class ParentCells:
    """Reads the cells that name parents, against the ids that have a row."""

    def __init__(self, records: Records, names: Names, aliases: Mapping[str, str]) -> None:
        self._records = records
        self._names = names
        self._aliases = aliases
        self._found: dict[str, tuple[Sequence[str], PlaceArray]] = {}
        spelled = [
            "".join(letters)
            for word in words.MISSING_PARENT
            for letters in product(*({letter.lower(), letter.upper()} for letter in word))
        ]
        self._ids_meaning_unknown = [place for place in names.find_all(spelled) if place >= 0]

    @property
    def ids_meaning_unknown(self) -> list[int]:
        """Animals whose id is also a word for an unknown parent."""
        return sorted(self._ids_meaning_unknown)

    def side(self, column: str, first_row: PlaceArray, patched: Mapping[int, str]) -> Side:
        """Read one column of parents, some animals' cells being those of `patched`."""
        if column not in self._records.fields:
            side = Side(np.full(len(first_row), UNKNOWN, dtype=np.int32))
        else:
            cells, found = self._looked_up(column)
            found = found if len(found) == len(first_row) else found[first_row]
            if self._ids_meaning_unknown:
                found[np.isin(found, self._ids_meaning_unknown)] = UNKNOWN
            other = np.flatnonzero(found == NOT_FOUND)
            found[other] = UNKNOWN
            side = Side(found)
            for animal, cell in zip(other.tolist(), picked(cells, first_row[other]), strict=True):
                if animal not in patched:
                    self._read(side, animal, cell)
        for animal, cell in patched.items():
            side.parent[animal] = UNKNOWN
            self._read(side, animal, self._aliases.get(cell, cell))
        return side

    def look_up_both(self) -> None:
        """Find the ids of both parents at once: in a large herdbook that is most of the work."""
        both = [column for column in ("sire", "dam") if column in self._records.fields]
        if len(self._records) < _MANY:
            return
        with ThreadPoolExecutor(len(both)) as pool:
            self._found = dict(zip(both, pool.map(self._looked_up, both), strict=True))

    def _looked_up(self, column: str) -> tuple[Sequence[str], PlaceArray]:
        if column in self._found:
            return self._found.pop(column)
        cells = replaced(self._records.fields[column], self._aliases)
        return cells, self._names.find_all(cells)

    def names_nobody(self, cell: str) -> bool:
        """Whether a cell is blank or one of the words for an unknown parent."""
        if len(cell) > _SHORT:
            return False
        return cell.casefold() in words.MISSING_PARENT or (
            cell == "0" and not self._names.has_row("0")
        )

    def _read(self, side: Side, animal: int, cell: str) -> None:
        if self.names_nobody(cell):
            if cell.casefold() == words.WILD_PARENT:
                side.wild.add(animal)
            return
        place = self._names.find(cell)
        if place >= 0:
            side.parent[animal] = place
            return
        if "|" not in cell and not self._names.has_row(cell.rpartition(":")[0]):
            side.parent[animal] = self._names.add_stub(cell)
            return
        parents = self._several(cell)
        if parents is None:
            side.unreadable[animal] = cell
        elif len(parents) == 1 and parents[0][1] == 1.0:
            side.parent[animal] = self._names.add_stub(parents[0][0])
        elif parents:
            for name, _chance in parents:
                self._names.add_stub(name)
            side.parent[animal] = SEVERAL
            side.possible[animal] = parents

    def _several(self, cell: str) -> Parents | None:
        """Possible parents from ``S12|S15`` or ``S12:0.7|S15:0.3``; None when unreadable."""
        named: list[str] = []
        chances: list[float | None] = []
        for part in (piece.strip() for piece in cell.split("|")):
            name, colon, chance = part.rpartition(":")
            if not colon or self._names.has_row(part):
                named.append(part)
                chances.append(None)
                continue
            try:
                chances.append(float(chance))
            except ValueError:
                return None
            named.append(name.strip())
        if "" in named or len(set(named)) < len(named):
            return None
        given = [chance for chance in chances if chance is not None]
        fits = all(0 < chance <= 1 for chance in given) and sum(given) <= 1 + 1e-9
        if given and (len(given) < len(named) or not fits):
            return None
        weights = given or [1 / len(named)] * len(named)
        merged: dict[str, float] = {}
        for name, weight in zip(named, weights, strict=True):
            kept = self._aliases.get(name, name)
            if self._names.has_row(kept) or not self.names_nobody(kept):
                merged[kept] = merged.get(kept, 0.0) + weight
        return tuple(merged.items())
