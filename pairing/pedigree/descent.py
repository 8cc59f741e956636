"""`Pedigree`: checked descent, parents before offspring. After this, nobody checks again."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, TypeVar, overload

import numpy as np

from pairing.errors import UnknownAnimalError
from pairing.records.animals import ROLES, UNKNOWN
from pairing.records.audit import Audit, audit_records
from pairing.records.descent_order import LARGE, by_generation, generations
from pairing.records.fields import FOUNDER_ORIGINS
from pairing.spelling import did_you_mean, listed

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    import numpy.typing as npt

    from pairing.dates import DateRange
    from pairing.records.animals import Animal, Animals
    from pairing.records.ids.naming import Names
    from pairing.records.table import Records

    IndexArray = npt.NDArray[np.int32]
    BoolArray = npt.NDArray[np.bool_]

Value = TypeVar("Value")

_DIGITS = re.compile(r"(\d+)")


@dataclass(frozen=True, slots=True)
class PossibleParents:
    """A side that is one of several animals.

    Attributes
    ----------
    parents
        Indices with their chances; chances sum to at most 1, the rest is unknown.
    shared_by
        Name of the litter whose animals surely have the same one, or "" when each animal's
        parent is drawn on its own.
    """

    parents: tuple[tuple[int, float], ...]
    shared_by: str = ""


@dataclass(frozen=True, slots=True)
class Pedigree:
    """Descent of n animals, every one after its parents.

    The order depends on descent and ids only, never on dates or the order of rows, so that
    the same animals give the same numbers however the file is sorted.

    Attributes
    ----------
    ids
        Unique ids, length n.
    index
        Id to place in `ids`.
    sire, dam
        Parent's place, shape (n,), -1 where unknown or one of several.
    possible_sires, possible_dams
        Animal's place to its possible parents, for animals whose parent is one of several.
    generation
        Length of the longest line of descent above each animal, shape (n,).
    founder
        Whether the animal's parents are declared (or presumed) outside the pedigree.
    presumed
        Founders only because both parents are blank and there is no origin column.
    animals
        Each animal's entry in the records; None for a parent without a row of its own.
    view
        The animals of the records by columns, in file order.
    order
        For each place its number among the view's names, shape (n,).
    counts
        Place to the number of animals its row stands for, where that is not one.
    same_genotype_as
        Place of a clone or identical twin to the place of the animal it copies.
    """

    ids: Sequence[str]
    index: Mapping[str, int]
    sire: IndexArray
    dam: IndexArray
    possible_sires: Mapping[int, PossibleParents]
    possible_dams: Mapping[int, PossibleParents]
    generation: IndexArray
    founder: BoolArray
    presumed: BoolArray
    animals: Sequence[Animal | None]
    sexes: Sequence[str]
    file_order: IndexArray
    view: Animals
    order: IndexArray
    counts: Mapping[int, int] = field(default_factory=dict)
    same_genotype_as: Mapping[int, int] = field(default_factory=dict)

    def __len__(self) -> int:
        return len(self.ids)

    def place(self, *ids: str) -> list[int]:
        """Places of animals in the pedigree.

        Raises
        ------
        UnknownAnimalError
            If any is not in it; the message names all of them.
        """
        missing = [each for each in ids if each not in self.index]
        if missing:
            hints = " ".join(
                hint for hint in (did_you_mean(each, self._nearby()) for each in missing) if hint
            )
            raise UnknownAnimalError(
                f"{listed(missing)} {'is' if len(missing) == 1 else 'are'} not in the records.",
                remedy=hints or "Give an id as the records spell it.",
            )
        return [self.index[each] for each in ids]

    def _nearby(self) -> Sequence[str]:
        """Ids among which a mistyped one is looked for: all, unless there are too many."""
        return self.ids if len(self) <= LARGE else ()

    def fact(self, place: int, field_name: str) -> str:
        """A text field of the animal's record, blank when not recorded."""
        animal = self.animals[place]
        return "" if animal is None else animal.text.get(field_name, "")

    def born(self, place: int) -> DateRange | None:
        """When the animal was born, or None."""
        animal = self.animals[place]
        return None if animal is None else animal.born

    def numbers(self, places: npt.NDArray[np.int64]) -> npt.NDArray[np.int64]:
        """How many animals stand at each of some places; 1 unless a row is that of a group."""
        if not self.counts:
            return np.ones(len(places), dtype=np.int64)
        return np.array([self.counts.get(place, 1) for place in places.tolist()], dtype=np.int64)

    def label(self, place: int) -> str:
        """The animal's id with its name beside it, as people read it."""
        name = self.fact(place, "name")
        return f"{self.ids[place]} {name}" if name else self.ids[place]

    def parents_of(self, place: int) -> set[int]:
        """Places of all surely or possibly recorded parents."""
        certain = {int(self.sire[place]), int(self.dam[place])} - {UNKNOWN}
        for possible in (self.possible_sires, self.possible_dams):
            if place in possible:
                certain |= {parent for parent, _chance in possible[place].parents}
        return certain


def natural_key(animal_id: str) -> tuple[object, ...]:
    """Sort key that puts A2 before A10."""
    parts = (
        (0, len(digits := part.lstrip("0")), digits) if part.isdecimal() else (1, 0, part)
        for part in _DIGITS.split(animal_id)
        if part
    )
    return (*parts, (2, 0, animal_id))


def build_pedigree(records: Records | Audit, *, litter_shares_sire: bool = True) -> Pedigree:
    """The pedigree of records, audited on the way if they are not yet.

    A parent without a row becomes an animal of its own with unknown ancestry.

    Parameters
    ----------
    litter_shares_sire
        Whether animals of one litter with the same list of possible sires surely have the
        same one.

    Raises
    ------
    RecordsError
        If a finding leaves kinship undefined.
    """
    audit = records if isinstance(records, Audit) else audit_records(records)
    audit.require_kinship()
    view = audit.animals
    generation = generations(view)
    order = _descent_order(view, generation)
    rank = np.empty(len(order) + 1, dtype=np.int32)
    rank[order] = np.arange(len(order), dtype=np.int32)
    rank[-1] = UNKNOWN
    with_row = order < len(view)
    parents = {role: _parents(view, role, order, rank) for role in ROLES}
    copies = {int(rank[clone]): int(rank[model]) for clone, model in view.clones.items()}
    founder, presumed = _founders(view, order, copies)
    ids: Sequence[str] = Looked(len(order), lambda place: view.names[int(order[place])])
    animals: Sequence[Animal | None] = Looked(
        len(order), lambda place: view[int(order[place])] if with_row[place] else None
    )
    sexes: Sequence[str] = _sexes(view, order)
    small = len(order) <= LARGE
    return Pedigree(
        ids=tuple(ids) if small else ids,
        index=_Index(view.names, rank, view.aliases),
        sire=_frozen(parents["sire"]),
        dam=_frozen(parents["dam"]),
        possible_sires=_possible(view, "sire", rank, shared=litter_shares_sire),
        possible_dams=_possible(view, "dam", rank, shared=False),
        generation=_frozen(generation[order]),
        founder=_frozen_flags(founder),
        presumed=_frozen_flags(presumed),
        animals=tuple(animals) if small else animals,
        sexes=tuple(sexes) if small else sexes,
        file_order=_frozen(rank[:-1].copy()),
        counts=_counts(view, rank),
        same_genotype_as=copies,
        view=view,
        order=_frozen(order),
    )


class _Index(Mapping[str, int]):
    """Places in the pedigree by id."""

    def __init__(self, names: Names, rank: IndexArray, aliases: Mapping[str, str]) -> None:
        self._names = names
        self._rank = rank
        self._aliases = aliases

    def __getitem__(self, animal_id: str) -> int:
        known = self._aliases.get(animal_id, animal_id)
        place = self._names.find(known) if isinstance(known, str) else UNKNOWN
        if place < 0:
            raise KeyError(animal_id)
        return int(self._rank[place])

    def __iter__(self) -> Iterator[str]:
        return iter(self._names)

    def __len__(self) -> int:
        return len(self._names)


class Looked(Sequence[Value]):
    """A sequence whose entries are made when they are looked up."""

    def __init__(self, length: int, look: Callable[[int], Value]) -> None:
        self._length = length
        self._look = look

    def __len__(self) -> int:
        return self._length

    @overload
    def __getitem__(self, place: int) -> Value: ...
    @overload
    def __getitem__(self, place: slice) -> tuple[Value, ...]: ...
    def __getitem__(self, place: int | slice) -> Value | tuple[Value, ...]:
        if isinstance(place, slice):
            return tuple(self[each] for each in range(*place.indices(self._length)))
        if not -self._length <= place < self._length:
            raise IndexError(place)
        return self._look(place % self._length)


def _frozen(values: IndexArray) -> IndexArray:
    values.setflags(write=False)
    return values


def _frozen_flags(values: BoolArray) -> BoolArray:
    values.setflags(write=False)
    return values


def _descent_order(view: Animals, generation: IndexArray) -> IndexArray:
    """Places of the view's names so that parents come first: by generation, then by id.

    In a large pedigree animals of one generation stay in file order: sorting millions of
    ids would cost more than all else.
    """
    if len(generation) > LARGE:
        return by_generation(generation)
    depth = generation.tolist()
    names = list(view.names)
    order = sorted(range(len(names)), key=lambda each: (depth[each], natural_key(names[each])))
    return np.array(order, dtype=np.int32)


def _parents(view: Animals, role: str, order: IndexArray, rank: IndexArray) -> IndexArray:
    """Places of the parents in the pedigree, -1 where unknown or one of several."""
    above = np.full(len(order), UNKNOWN, dtype=np.int32)
    named = getattr(view, role)
    above[: len(view)] = np.where(named >= 0, named, UNKNOWN)
    parents: IndexArray = rank[above[order]]
    return parents


def _possible(
    view: Animals, role: str, rank: IndexArray, *, shared: bool
) -> dict[int, PossibleParents]:
    possible = {}
    for (side, animal), parts in view.possible.items():
        if side != role:
            continue
        litter = view.text("litter", animal) if shared else ""
        possible[int(rank[animal])] = PossibleParents(
            tuple(sorted((int(rank[view.names.find(name)]), chance) for name, chance in parts)),
            f"{litter} of {_dam_in_words(view, animal)}" if litter else "",
        )
    return dict(sorted(possible.items()))


def _dam_in_words(view: Animals, animal: int) -> str:
    """What tells a litter from another dam's of the same number."""
    return "|".join(each for each, _chance in view.parents("dam", animal))


def _founders(
    view: Animals, order: IndexArray, copies: Mapping[int, int]
) -> tuple[BoolArray, BoolArray]:
    """Whether each animal is a founder, and whether only presumed to be one."""
    count = len(view)
    parentless = (view.sire == UNKNOWN) & (view.dam == UNKNOWN)
    origin = view.values.get("origin")
    told = np.zeros(count, dtype=bool)
    outside = np.zeros(count, dtype=bool)
    if origin is not None:
        told = origin.where(lambda value: value != "")
        outside = origin.where(lambda value: value in FOUNDER_ORIGINS)
    presumed = ~told if "origin" not in view.records.fields else np.zeros(count, dtype=bool)
    founder = np.zeros(len(order), dtype=bool)
    founder[:count] = parentless & (outside | presumed)
    only_presumed = np.zeros(len(order), dtype=bool)
    only_presumed[:count] = founder[:count] & ~told
    founder, only_presumed = founder[order], only_presumed[order]
    for clone in copies:
        founder[clone] = only_presumed[clone] = False
    return founder, only_presumed


def _counts(view: Animals, rank: IndexArray) -> dict[int, int]:
    counts = view.values.get("count")
    if counts is None:
        return {}
    return {
        int(rank[place]): int(str(counts[place])) for place in counts.places(lambda each: each != 1)
    }


def _sexes(view: Animals, order: IndexArray) -> Sequence[str]:
    """Recorded sex; of a parent without a row, the sex of its role."""
    sires, dams = view.roles

    def sex(place: int) -> str:
        name = int(order[place])
        if name < len(view):
            return view.sex(name)
        if sires[name] == dams[name]:
            return "unknown"
        return "male" if sires[name] else "female"

    return Looked(len(order), sex)
