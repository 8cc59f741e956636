"""`Pedigree`: checked descent, parents before offspring. After this, nobody checks again."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from pairing.errors import UnknownAnimalError
from pairing.records.audit import Audit, audit_records
from pairing.records.fields import FOUNDER_ORIGINS
from pairing.spelling import did_you_mean, listed

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

    import numpy.typing as npt

    from pairing.dates import DateRange
    from pairing.records.animals import Animal, Parents
    from pairing.records.table import Records

    IndexArray = npt.NDArray[np.int32]
    BoolArray = npt.NDArray[np.bool_]

UNKNOWN = -1
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
    same_genotype_as
        Place of a clone or identical twin to the place of the animal it copies.
    """

    ids: tuple[str, ...]
    index: Mapping[str, int]
    sire: IndexArray
    dam: IndexArray
    possible_sires: Mapping[int, PossibleParents]
    possible_dams: Mapping[int, PossibleParents]
    generation: IndexArray
    founder: BoolArray
    presumed: BoolArray
    animals: tuple[Animal | None, ...]
    sexes: tuple[str, ...]
    file_order: IndexArray
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
                hint for hint in (did_you_mean(each, self.index) for each in missing) if hint
            )
            raise UnknownAnimalError(
                f"{listed(missing)} {'is' if len(missing) == 1 else 'are'} not in the records.",
                remedy=hints or "Give an id as the records spell it.",
            )
        return [self.index[each] for each in ids]

    def fact(self, place: int, field_name: str) -> str:
        """A text field of the animal's record, blank when not recorded."""
        animal = self.animals[place]
        return "" if animal is None else animal.text.get(field_name, "")

    def born(self, place: int) -> DateRange | None:
        """When the animal was born, or None."""
        animal = self.animals[place]
        return None if animal is None else animal.born

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
        (0, int(part), "") if part.isdecimal() else (1, 0, part)
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
    with_row = {animal.id for animal in audit.animals}
    stubs = [parent for parent in audit.roles if parent not in with_row]
    order, generation = _descent_order(audit.animals, stubs)
    entries: dict[str, Animal | None] = dict.fromkeys(stubs)
    entries.update({animal.id: animal for animal in audit.animals})
    file_place = {
        each: place for place, each in enumerate([*(a.id for a in audit.animals), *stubs])
    }
    index = {each: place for place, each in enumerate(order)}
    has_origin = "origin" in audit.records.fields
    animals = tuple(entries[each] for each in order)
    copies = {
        index[animal.id]: index[original]
        for animal in audit.animals
        if (original := animal.text.get("clone_of", animal.id)) in index and original != animal.id
    }
    founder = np.array(
        [
            place not in copies and _is_founder(animal, has_origin)
            for place, animal in enumerate(animals)
        ],
        dtype=bool,
    )
    declared = np.array(
        [animal is not None and animal.origin != "" for animal in animals], dtype=bool
    )
    sides = {
        role: _side(animals, index, role, litter_shares_sire=litter_shares_sire)
        for role in ("sire", "dam")
    }
    return Pedigree(
        ids=tuple(order),
        index=index,
        sire=_frozen(sides["sire"][0]),
        dam=_frozen(sides["dam"][0]),
        possible_sires=sides["sire"][1],
        possible_dams=sides["dam"][1],
        generation=_frozen(np.array([generation[each] for each in order], dtype=np.int32)),
        founder=_frozen_flags(founder),
        presumed=_frozen_flags(founder & ~declared),
        animals=animals,
        sexes=tuple(
            _sex(animal, audit.roles.get(each, frozenset()))
            for each, animal in zip(order, animals, strict=True)
        ),
        file_order=_frozen(
            np.array(sorted(range(len(order)), key=lambda p: file_place[order[p]]), dtype=np.int32)
        ),
        same_genotype_as=copies,
    )


def _frozen(values: IndexArray) -> IndexArray:
    values.setflags(write=False)
    return values


def _frozen_flags(values: BoolArray) -> BoolArray:
    values.setflags(write=False)
    return values


def _is_founder(animal: Animal | None, has_origin: bool) -> bool:
    if animal is None or animal.sire or animal.dam:
        return False
    if animal.origin:
        return animal.origin in FOUNDER_ORIGINS
    return not has_origin


def _sex(animal: Animal | None, roles: frozenset[str]) -> str:
    if animal is not None:
        return animal.sex
    return {frozenset({"sire"}): "male", frozenset({"dam"}): "female"}.get(roles, "unknown")


def _ancestors_first(animal: Animal) -> Iterable[str]:
    for side in (animal.sire, animal.dam):
        for parent, _chance in side:
            yield parent
    copied = animal.text.get("clone_of", "")
    if copied:
        yield copied


def _descent_order(
    animals: Sequence[Animal], stubs: Sequence[str]
) -> tuple[list[str], dict[str, int]]:
    """Ids so that parents come first, by generation and then by id; and each one's generation."""
    known = {animal.id for animal in animals} | set(stubs)
    generation = dict.fromkeys(known, 0)
    waiting: dict[str, int] = {}
    children: dict[str, list[str]] = {}
    for animal in animals:
        above = {each for each in _ancestors_first(animal) if each in known and each != animal.id}
        waiting[animal.id] = len(above)
        for parent in above:
            children.setdefault(parent, []).append(animal.id)
    ready = [*stubs, *(each for each, count in waiting.items() if count == 0)]
    placed = 0
    while placed < len(ready):
        parent = ready[placed]
        placed += 1
        for child in children.get(parent, ()):
            generation[child] = max(generation[child], generation[parent] + 1)
            waiting[child] -= 1
            if waiting[child] == 0:
                ready.append(child)
    ready.sort(key=lambda each: (generation[each], natural_key(each)))
    return ready, generation


def _dam_in_words(animal: Animal) -> str:
    """What tells a litter from another dam's of the same number."""
    born = animal.born.text if animal.born else ""
    return "|".join(each for each, _chance in animal.dam) or f"unknown dam, born {born}"


def _side(
    animals: Sequence[Animal | None],
    index: Mapping[str, int],
    role: str,
    *,
    litter_shares_sire: bool,
) -> tuple[IndexArray, dict[int, PossibleParents]]:
    parent = np.full(len(animals), UNKNOWN, dtype=np.int32)
    possible: dict[int, PossibleParents] = {}
    for place, animal in enumerate(animals):
        side: Parents = () if animal is None else getattr(animal, role)
        if len(side) == 1 and side[0][1] == 1.0:
            parent[place] = index[side[0][0]]
        elif side and animal is not None:
            litter = animal.text.get("litter", "")
            shared = ""
            if litter and role == "sire" and litter_shares_sire:
                shared = f"{litter} of {_dam_in_words(animal)}"
            possible[place] = PossibleParents(
                tuple(sorted((index[each], chance) for each, chance in side)), shared
            )
    return parent, possible
