"""`Animals`: the cleaned view of records, one entry an animal, cells read as values.

The view is made beside the rows and never instead of them. It is kept by columns, so that
millions of animals can be checked at once; an `Animal` is made when one is asked for.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cached_property
from typing import TYPE_CHECKING, Generic, TypeVar, overload

import numpy as np

from pairing.records.fields import DATE_FIELDS, MISSING_PARENT
from pairing.records.words import counted_by_sex

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    import numpy.typing as npt

    from pairing.dates import DateRange
    from pairing.records.ids.naming import Names
    from pairing.records.table import Records

    PlaceArray = npt.NDArray[np.int32]
    BoolArray = npt.NDArray[np.bool_]

Parents = tuple[tuple[str, float], ...]
"""The possible parents of one side with their chances; empty when unknown, one entry when sure."""

Value = TypeVar("Value")

UNKNOWN = -1
SEVERAL = -2
ROLES = ("sire", "dam")
NAMING_FIELDS = (
    "holder",
    "born_at",
    "line",
    "clone_of",
    "litter",
    "group",
    "mark",
    "reared_by",
)
"""Text fields in which a word for "not known" says nothing."""
TEXT_FIELDS = ("name", "local_id", "may_breed_note", *NAMING_FIELDS)
_EVER = 1 << 30
_MOST_KEPT = 200_000


@dataclass(frozen=True, slots=True)
class Animal:
    """One animal of the records: a cleaned row, or what several rows with its id agree on.

    `count` is the number of animals the row stands for; `by_sex` tells how many of each sex,
    where the count says so.
    """

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
    count: int = 1
    by_sex: Mapping[str, int] = field(default_factory=dict)

    @property
    def born(self) -> DateRange | None:
        """When it was born or hatched."""
        return self.dates.get("born")


@dataclass(frozen=True, slots=True)
class Reading(Generic[Value]):
    """What a column says: the value of each distinct word, and each animal's word."""

    values: tuple[Value, ...]
    codes: PlaceArray

    def __getitem__(self, place: int) -> Value:
        return self.values[int(self.codes[place])]

    def where(self, test: Callable[[Value], bool]) -> BoolArray:
        """For each animal, whether `test` holds of its value."""
        holds: BoolArray = np.array([test(value) for value in self.values], dtype=bool)[self.codes]
        return holds

    def places(self, test: Callable[[Value], bool]) -> list[int]:
        """Animals for whose value `test` holds."""
        held = [test(value) for value in self.values]
        return np.flatnonzero(np.array(held)[self.codes]).tolist() if any(held) else []


@dataclass(frozen=True)
class Dates:
    """A column of dates, as intervals of days.

    An unknown date may be any day, so that comparisons of `earliest` and `latest` hold only
    where they do so over the whole interval. Ordinals, shape (animals,). `said` tells how an
    order of day and month was settled.
    """

    reading: Reading[DateRange | None]
    said: str = ""

    @cached_property
    def earliest(self) -> PlaceArray:
        """First possible day."""
        return self._days([_of(each, "earliest", -_EVER) for each in self.reading.values])

    @cached_property
    def latest(self) -> PlaceArray:
        """Last possible day."""
        return self._days([_of(each, "latest", _EVER) for each in self.reading.values])

    @cached_property
    def known(self) -> BoolArray:
        """Whether anything is recorded."""
        return self.reading.where(lambda value: value is not None)

    @cached_property
    def distinct(self) -> list[tuple[DateRange, int]]:
        """Every distinct date that an animal has, with the number of animals that have it."""
        numbers = np.bincount(self.reading.codes, minlength=len(self.reading.values)).tolist()
        return [
            (date, number)
            for date, number in zip(self.reading.values, numbers, strict=True)
            if date is not None and number
        ]

    def _days(self, values: list[int]) -> PlaceArray:
        days: PlaceArray = np.array(values, dtype=np.int32)[self.reading.codes]
        return days


def _of(date: DateRange | None, end: str, unknown: int) -> int:
    return unknown if date is None else int(getattr(date, end))


@dataclass(frozen=True)
class Animals(Sequence[Animal]):
    """The animals of records, in file order, as the checks and the pedigree see them.

    Attributes
    ----------
    records
        The rows they were read from.
    names
        Ids by place: animals with a row first, then parents without one.
    first_row
        Place in the records of the row that stands for each animal, shape (animals,).
    sire, dam
        Place of the parent among `names`, shape (animals,); -1 unknown, -2 one of several.
    possible
        Role and animal to its possible parents, where they are several.
    values
        Field to what its column says, for fields with a fixed set of words and for numbers.
    dates
        Date field to its column.
    patched
        Field to animals whose cell is not that of their first row: because several rows had
        to agree, or because of a decision.
    clones
        Animals that copy another, by place.
    aliases
        Other ids of an animal to the one it is kept under, by decision.
    rows
        Animal to all its rows, where it has several.
    """

    records: Records
    names: Names
    first_row: PlaceArray
    sire: PlaceArray
    dam: PlaceArray
    possible: Mapping[tuple[str, int], Parents]
    values: Mapping[str, Reading[object]]
    dates: Mapping[str, Dates]
    patched: Mapping[str, Mapping[int, str]]
    clones: Mapping[int, int] = field(default_factory=dict)
    aliases: Mapping[str, str] = field(default_factory=dict)
    rows: Mapping[int, tuple[int, ...]] = field(default_factory=dict)

    def __len__(self) -> int:
        return len(self.first_row)

    @overload
    def __getitem__(self, place: int) -> Animal: ...
    @overload
    def __getitem__(self, place: slice) -> tuple[Animal, ...]: ...
    def __getitem__(self, place: int | slice) -> Animal | tuple[Animal, ...]:
        if isinstance(place, slice):
            return tuple(self[each] for each in range(*place.indices(len(self))))
        if not -len(self) <= place < len(self):
            raise IndexError(place)
        place = int(place) % len(self)
        kept = self._made.get(place)
        if kept is None:
            kept = self._animal(place)
            if len(self._made) < _MOST_KEPT:
                self._made[place] = kept
        return kept

    @cached_property
    def _made(self) -> dict[int, Animal]:
        return {}

    @cached_property
    def places(self) -> PlaceArray:
        """The animals' own places, 0, 1, 2 ..."""
        places: PlaceArray = np.arange(len(self), dtype=np.int32)
        places.setflags(write=False)
        return places

    @cached_property
    def derived(self) -> dict[str, PlaceArray]:
        """Arrays over the names that were worked out from the view and are kept with it."""
        return {}

    @cached_property
    def stubs(self) -> range:
        """Places of the parents without a row of their own."""
        return range(len(self), len(self.names))

    @cached_property
    def roles(self) -> tuple[BoolArray, BoolArray]:
        """Whether each of `names` is recorded as a sire, and as a dam, of another animal."""
        named = []
        for role in ROLES:
            flags = np.zeros(len(self.names), dtype=bool)
            parents = getattr(self, role)
            flags[parents[(parents >= 0) & (parents != self.places)]] = True
            for (side, animal), parts in self.possible.items():
                if side == role:
                    places = (self.names.find(parent) for parent, _chance in parts)
                    flags[[place for place in places if place != animal]] = True
            named.append(flags)
        return named[0], named[1]

    @cached_property
    def children(self) -> Children:
        """Animals by parent."""
        return Children(self)

    def line(self, place: int) -> int:
        """Line (or sheet row) of the row that stands for an animal."""
        return int(self.records.lines[int(self.first_row[place])])

    def cell(self, field_name: str, place: int) -> str:
        """The cell of a field as the view has it."""
        patched = self.patched.get(field_name, {}).get(place)
        if patched is not None:
            return patched
        if field_name not in self.records.fields:
            return ""
        return self.records.fields[field_name][int(self.first_row[place])]

    def text(self, field_name: str, place: int) -> str:
        """A text field, blank where nothing or a word for "not known" is recorded."""
        cell = self.cell(field_name, place)
        if field_name in NAMING_FIELDS and cell.casefold() in MISSING_PARENT:
            return cell if cell.casefold() == "wild" else ""
        return cell

    def parents(self, role: str, place: int) -> Parents:
        """The possible parents of one side of an animal."""
        parent = int(getattr(self, role)[place])
        if parent >= 0:
            return ((self.names[parent], 1.0),)
        return self.possible[role, place] if parent == SEVERAL else ()

    def born(self, place: int) -> DateRange | None:
        """When an animal was born; None for a parent without a row too."""
        return self.date("born", place)

    def date(self, field_name: str, place: int) -> DateRange | None:
        """A recorded date of an animal."""
        if field_name not in self.dates or place >= len(self):
            return None
        return self.dates[field_name].reading[place]

    def value(self, field_name: str, place: int, default: object = None) -> object:
        """What a field with a fixed set of words says of an animal."""
        return self.values[field_name][place] if field_name in self.values else default

    def sex(self, place: int) -> str:
        """Recorded sex; ``unknown`` for a parent without a row."""
        return str(self.value("sex", place, "unknown")) if place < len(self) else "unknown"

    def _animal(self, place: int) -> Animal:
        may_breed, number = self.value("may_breed", place), self.value("merit", place)
        text = {
            name: cell
            for name in TEXT_FIELDS
            if (name in self.records.fields or name in self.patched)
            and (cell := self.text(name, place))
        }
        if self.value("castrated", place, default=False):
            may_breed = False
            text.setdefault("may_breed_note", f'recorded as "{self.cell("sex", place)}"')
        return Animal(
            id=self.names[place],
            row=self.line(place),
            sire=self.parents("sire", place),
            dam=self.parents("dam", place),
            sex=self.sex(place),
            dates={
                name: date
                for name in DATE_FIELDS
                if name in self.dates and (date := self.dates[name].reading[place]) is not None
            },
            text=text,
            status=str(self.value("status", place, "")),
            origin=str(self.value("origin", place, "")),
            end_cause=str(self.value("end_cause", place, "unknown")),
            may_breed=may_breed if isinstance(may_breed, bool) else None,
            merit=number if isinstance(number, float) else None,
            count=int(str(self.value("count", place, 1))),
            by_sex=counted_by_sex(self.cell("count", place)),
        )


class Children:
    """The children of each parent, by role; sorted once, when they are first asked for."""

    def __init__(self, animals: Animals) -> None:
        self._sorted = {}
        for role in ROLES:
            parent = getattr(animals, role)
            child = np.flatnonzero(parent >= 0)
            above = parent[child]
            extra = [
                (animals.names.find(name), place)
                for (side, place), parts in animals.possible.items()
                if side == role
                for name, _chance in parts
            ]
            if extra:
                child = np.concatenate([child, np.array([each for _parent, each in extra])])
                above = np.concatenate([above, np.array([each for each, _child in extra])])
            order = np.lexsort((child, above))
            self._sorted[role] = (above[order], child[order])

    def of(self, parent: int, role: str) -> list[int]:
        """Children of a parent in one role, in file order, the parent itself left out."""
        above, child = self._sorted[role]
        # In the array's own type: else numpy would convert all of it for each parent.
        first, last = np.searchsorted(above, np.array([parent, parent + 1], dtype=above.dtype))
        return [each for each in child[first:last].tolist() if each != parent]
