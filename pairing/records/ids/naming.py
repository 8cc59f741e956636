"""Ids to places: every animal with a row gets a number in file order, quickly."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, overload

import numpy as np

from pairing.records.columns import ArrowText, picked

if TYPE_CHECKING:
    from collections.abc import Callable

    import numpy.typing as npt

    PlaceArray = npt.NDArray[np.int32]

UNKNOWN = -1
NOT_FOUND = -2


class Names(Sequence[str]):
    """Ids by place, and places by id.

    First come the animals with a row of their own, in file order, then parents without one,
    in the order they are added.
    """

    def __init__(
        self,
        ids: Sequence[str],
        find_one: Callable[[str], int],
        find_all: Callable[[Sequence[str]], PlaceArray],
    ) -> None:
        self._ids = ids
        self._find_one = find_one
        self._find_all = find_all
        self._stubs: list[str] = []
        self._stub_places: dict[str, int] = {}

    def __len__(self) -> int:
        return len(self._ids) + len(self._stubs)

    @overload
    def __getitem__(self, place: int) -> str: ...
    @overload
    def __getitem__(self, place: slice) -> tuple[str, ...]: ...
    def __getitem__(self, place: int | slice) -> str | tuple[str, ...]:
        if isinstance(place, slice):
            return tuple(self[each] for each in range(*place.indices(len(self))))
        with_row = len(self._ids)
        return self._ids[place] if place < with_row else self._stubs[place - with_row]

    def __contains__(self, name: object) -> bool:
        return isinstance(name, str) and self.find(name) >= 0

    def find(self, name: str) -> int:
        """Place of an id, or -1."""
        place = self._find_one(name)
        return place if place >= 0 else self._stub_places.get(name, UNKNOWN)

    def has_row(self, name: str) -> bool:
        """Whether an animal with this id has a row of its own."""
        return self._find_one(name) >= 0

    def find_all(self, cells: Sequence[str]) -> PlaceArray:
        """Place of each cell's id: -1 for a blank cell, -2 where no animal with a row has it."""
        return self._find_all(cells)

    def of_rows(self, places: npt.NDArray[np.int64]) -> list[str]:
        """Ids of animals with a row of their own."""
        return picked(self._ids, places)

    def add_stub(self, name: str) -> int:
        """Place of a parent, which is given one if it has no row."""
        place = self.find(name)
        if place < 0:
            place = self._stub_places[name] = len(self)
            self._stubs.append(name)
        return place


@dataclass(frozen=True, slots=True)
class Numbering:
    """The animals of a table, numbered in file order.

    Attributes
    ----------
    names
        Ids by place.
    first_row
        The first row of each animal, shape (animals,).
    animal_of_row
        Shape (rows,), -1 where the row has no id.
    """

    names: Names
    first_row: PlaceArray
    animal_of_row: PlaceArray


def number_animals(ids: Sequence[str]) -> Numbering:
    """Number the animals of a column of ids."""
    if isinstance(ids, ArrowText):
        numbered = _by_bytes(ids)
        if numbered is not None:
            return numbered
    return _by_dictionary(ids)


def _by_dictionary(ids: Sequence[str]) -> Numbering:
    places: dict[str, int] = {}
    first_row: list[int] = []
    animal_of_row = np.empty(len(ids), dtype=np.int32)
    for row, name in enumerate(ids):
        if name == "":
            animal_of_row[row] = UNKNOWN
            continue
        place = places.setdefault(name, len(places))
        animal_of_row[row] = place
        if place == len(first_row):
            first_row.append(row)
    get = places.get

    def find_all(cells: Sequence[str]) -> PlaceArray:
        return np.fromiter(
            (get(cell, NOT_FOUND) if cell else UNKNOWN for cell in cells),
            dtype=np.int32,
            count=len(cells),
        )

    names = Names(tuple(places), lambda name: get(name, UNKNOWN), find_all)
    return Numbering(names, np.array(first_row, dtype=np.int32), animal_of_row)


def _by_bytes(ids: ArrowText) -> Numbering | None:
    """The same over Arrow's buffers by compiled code; None where that cannot be had."""
    try:
        from pairing.records.ids import hashing
    except ImportError:
        return None
    import pyarrow

    plain = ArrowText(ids.array.cast("string")) if ids.is_coded else ids
    ends, text = plain.bytes_of()
    slots, first = hashing.build(ends, text)
    rows = np.arange(len(ids), dtype=np.int32)
    own = first == rows
    if own.all():
        first_row, animal_of_row, shown = rows, rows, plain
    else:
        first_row = np.flatnonzero(own).astype(np.int32)
        number = np.full(len(ids) + 1, UNKNOWN, dtype=np.int32)
        number[first_row] = np.arange(len(first_row), dtype=np.int32)
        animal_of_row = number[first]
        hashing.renumber(slots, number)
        shown = ArrowText(plain.array.take(pyarrow.array(first_row)))
        ends, text = shown.bytes_of()

    def find_all(cells: Sequence[str]) -> PlaceArray:
        column = (
            cells if isinstance(cells, ArrowText) else ArrowText(pyarrow.array(cells, "string"))
        )
        if column.is_coded:
            words = ArrowText(column.array.dictionary)
            of_word = hashing.find(*words.bytes_of(), ends, text, slots)
            taken: PlaceArray = of_word[column.coded().codes]
            return taken
        found: PlaceArray = hashing.find(*column.bytes_of(), ends, text, slots)
        return found

    def find_one(name: str) -> int:
        return max(int(find_all((name,))[0]), UNKNOWN)

    return Numbering(Names(shown, find_one, find_all), first_row, animal_of_row)
