"""Doubts about who is who: ids spelled almost alike, and animals that were entered twice."""

from __future__ import annotations

from collections import defaultdict
from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import ROLES
from pairing.records.checks.wording import by_animal, ids_of, some_of, with_line
from pairing.records.columns import ArrowText
from pairing.records.findings import Finding
from pairing.records.ids.look_alikes import (
    essence,
    groups_alike,
    in_latin,
    number_breaks,
    words_only,
)
from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Sequence

    import numpy.typing as npt

    from pairing.records.animals import Animals, PlaceArray
    from pairing.records.rules import RecordRules

    HashArray = npt.NDArray[np.uint64]

_MOST_ONE_BY_ONE = 20
_MOST_IN_A_GROUP = 20
_ANCESTORS_SEARCHED = 3


def look_alike_ids(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Ids that differ only in what is easily mistyped and could be one animal.

    Where many ids differ in one manner it is rather a way of naming animals, and said once.
    """
    by_manner: dict[str, list[list[int]]] = defaultdict(list)
    for group in groups_alike(ids_of(animals), distinct=True):
        for kin in _perhaps_one_animal(animals, group[:_MOST_IN_A_GROUP]):
            names = [animals.names[place] for place in kin]
            by_manner[_difference(names)].append(kin)
    findings = []
    for manner, groups in by_manner.items():
        if len(groups) > _MOST_ONE_BY_ONE:
            findings.append(_way_of_naming(animals, manner, groups))
        else:
            findings += [_look_alike(animals, manner, group) for group in groups]
    return findings


def _look_alike(animals: Animals, manner: str, group: list[int]) -> Finding:
    first, *others = group
    said = listed(f'"{animals.names[each]}" (line {animals.line(each)})' for each in others)
    name = animals.names[others[0]]
    return Finding(
        "look-alike-id",
        f"{said} {'is' if len(others) == 1 else 'are'} spelled almost as "
        f'"{animals.names[first]}" (line {animals.line(first)}); they differ in {manner}.',
        "If they are one animal, use one spelling throughout or merge them by a decision; "
        "until then they count as two."
        if len(others) == 1
        else "Those that are one animal need one spelling throughout, or a decision to merge "
        "them; until then each counts.",
        id=name,
        row=animals.line(others[0]),
        column=animals.records.columns["id"],
        found=name,
    )


def _way_of_naming(animals: Animals, manner: str, groups: list[list[int]]) -> Finding:
    pairs = [
        f'"{animals.names[first]}" (line {animals.line(first)}) and '
        f'"{animals.names[second]}" (line {animals.line(second)})'
        for first, second, *_rest in groups[:3]
    ]
    return Finding(
        "look-alike-id",
        f"{len(groups):,} groups of ids differ in {manner} and nothing else, for instance "
        f"{'; '.join(pairs)}.",
        "Nothing to do if animals are named in this way here; where two are one animal, use one "
        "spelling or merge them by a decision. Until then each id is an animal.",
        column=animals.records.columns["id"],
    )


def _difference(names: list[str]) -> str:
    """In what ids differ, in words; the first manner that explains all of them."""

    def same(fold: object) -> bool:
        return len({fold(name) for name in names}) == 1  # type: ignore[operator]

    if same(str.casefold):
        return "capitals"
    if same(lambda name: in_latin(name).casefold()) or (
        not all(name.isascii() for name in names) and same(words_only)
    ):
        return "letters of another alphabet or accents"
    if same(words_only):
        return "signs or blanks"
    without_letters = [essence(name.translate(_LETTERS_LIKE_DIGITS)) for name in names]
    if len(set(without_letters)) == 1:
        return "leading zeros"
    return "letters that look like digits"


# Out of the alphabet's reach, so that `essence` does not take them for digits.
_LETTERS_LIKE_DIGITS = str.maketrans("oOiIlL", "ØØßßþþ")


def _perhaps_one_animal(animals: Animals, group: list[int]) -> list[list[int]]:
    """Parts of a group of look-alikes that may each be one animal, singles left out."""
    breaks = [number_breaks(animals.names[place]) for place in group]
    left = list(range(len(group)))
    parts = []
    while left:
        part = [left.pop(0)]
        for one in part:
            near = [
                other
                for other in left
                if _comparable(breaks[one], breaks[other])
                and not surely_two_animals(animals, group[one], group[other])
            ]
            part += near
            left = [each for each in left if each not in near]
        if len(part) > 1:
            parts.append(sorted(group[each] for each in part))
    return parts


def _comparable(one: frozenset[int], other: frozenset[int]) -> bool:
    """Whether numbers are divided alike, or not at all in one of the two."""
    return not one or not other or one == other


def surely_two_animals(animals: Animals, one: int, other: int) -> bool:
    """Whether the records contradict that two entries are one animal.

    So it is when sexes, days of birth or parents surely differ, or one is an ancestor or a
    mate of the other.
    """
    sexes = {_sex(animals, each) for each in (one, other)}
    if sexes == {"male", "female"}:
        return True
    born = animals.dates.get("born")
    if born is not None and (
        born.latest[one] < born.earliest[other] or born.latest[other] < born.earliest[one]
    ):
        return True
    for role in ROLES:
        parents = getattr(animals, role)
        mine, theirs = int(parents[one]), int(parents[other])
        known = mine >= 0 and theirs >= 0 and mine != theirs
        if known and essence(animals.names[mine]) != essence(animals.names[theirs]):
            return True
    return other in _forebears(animals, one) or one in _forebears(animals, other)


def _sex(animals: Animals, place: int) -> str:
    """Recorded sex, else the sex of the only role as a parent."""
    recorded = animals.sex(place)
    sires, dams = animals.roles
    if recorded == "unknown" and sires[place] != dams[place]:
        return "male" if sires[place] else "female"
    return recorded


def _forebears(animals: Animals, place: int) -> set[int]:
    """Parents, grandparents and great-grandparents, possible ones too."""
    found: set[int] = set()
    above = {place}
    for _generation in range(_ANCESTORS_SEARCHED):
        above = {
            animals.names.find(name)
            for each in above
            if each < len(animals)
            for role in ROLES
            for name, _chance in animals.parents(role, each)
        }
        found |= above
    return found


# One animal under two ids


def same_animals_twice(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Animals that agree in both parents, day of birth, sex, and in name or holder's number."""
    born = animals.dates.get("born")
    named = [
        (fields, words)
        for fields, words in (("name", "name"), ("local_id+holder", "local id and holder"))
        if all(each in animals.records.fields for each in fields.split("+"))
    ]
    if born is None or not named:
        return []
    full = (animals.sire >= 0) & (animals.dam >= 0) & (born.earliest == born.latest)
    if "count" in animals.values:
        full &= animals.values["count"].where(lambda count: count == 1)
    places = np.flatnonzero(full)
    family = _mixed(animals.sire[places], animals.dam[places], born.earliest[places])
    if "sex" in animals.values:
        family = _mixed(family, animals.values["sex"].codes[places])
    suspects = _held_again(family)
    places, family = places[suspects], family[suspects]
    said: dict[tuple[int, ...], str] = {}
    for fields, words in named:
        for group in _agreeing(animals, places, family, fields.split("+")):
            said.setdefault(tuple(group), words)
    return [_twice(animals, group, words) for group, words in sorted(said.items())]


def _twice(animals: Animals, group: tuple[int, ...], words: str) -> Finding:
    first, *others = group
    name = animals.names[others[0]]
    return Finding(
        "same-animal-twice",
        f"{some_of(animals, group, most=5)} agree in birth, parents, sex and {words}.",
        "If they are one animal, keep one row and use its id throughout, or merge the ids by a "
        f"decision; until then they count as {'two' if len(group) == 2 else len(group)}.",
        id=name,
        row=animals.line(others[0]),
        column=animals.records.columns["id"],
        found=f"{with_line(animals, first)}",
    )


def _agreeing(
    animals: Animals, places: npt.NDArray[np.int64], family: HashArray, fields: list[str]
) -> list[list[int]]:
    """Groups of one family whose fields say the same; words that name nobody are left out."""
    if not len(places):
        return []
    key = family
    filled = np.ones(len(places), dtype=bool)
    for field in fields:
        cells = by_animal(animals, animals.records.fields[field])
        codes, blank = _codes(cells, places)
        filled &= ~blank
        key = _mixed(key, codes)
    places, key = places[filled], key[filled]
    again = _held_again(key)
    groups: dict[int, list[int]] = defaultdict(list)
    for place, value in zip(places[again].tolist(), key[again].tolist(), strict=True):
        groups[value].append(place)
    often: dict[tuple[str, ...], int] = defaultdict(int)
    worded = []
    for group in groups.values():
        words = tuple(animals.cell(field, group[0]).casefold() for field in fields)
        often[words] += 1
        worded.append((words, group))
    return [
        group
        for words, group in worded
        if often[words] < _FAMILIES_OF_A_PLACEHOLDER
        and words[0].strip("()[]-.?* ") not in _NO_NAMES
    ]


_FAMILIES_OF_A_PLACEHOLDER = 3
_NO_NAMES = frozenset(
    {"", "unnamed", "no name", "noname", "none", "unknown", "unk", "na", "n/a", "nn", "null"}
    | {"not named", "nil", "x", "xx", "xxx", "male", "female", "m", "f", "stillborn", "dead"}
)
"""What stands where an animal has no name, folded."""


def _codes(
    cells: Sequence[str], places: npt.NDArray[np.int64]
) -> tuple[PlaceArray, npt.NDArray[np.bool_]]:
    """A number for each distinct word of some cells, without regard to case, and the blanks."""
    if isinstance(cells, ArrowText):
        import pyarrow
        import pyarrow.compute

        taken = cells.array.take(pyarrow.array(places)).cast("string")
        encoded = pyarrow.compute.utf8_lower(taken).dictionary_encode()
        blank = pyarrow.compute.equal(taken, "").to_numpy(zero_copy_only=False)
        return encoded.indices.to_numpy(), blank
    words: dict[str, int] = {}
    picked = [cells[place].casefold() for place in places.tolist()]
    codes = np.array([words.setdefault(word, len(words)) for word in picked], dtype=np.int32)
    return codes, np.array([word == "" for word in picked], dtype=bool)


def _mixed(*columns: npt.NDArray[np.generic]) -> HashArray:
    """One hash of several columns of whole numbers."""
    total = np.zeros(len(columns[0]), dtype=np.uint64)
    for column in columns:
        total = (total ^ column.astype(np.int64).view(np.uint64)) * _MULTIPLIER
        total ^= total >> np.uint64(29)
    return total


_MULTIPLIER = np.uint64(0x9E3779B97F4A7C15)


def _held_again(keys: HashArray) -> npt.NDArray[np.int64]:
    """Places of the keys that occur more than once."""
    ordered = np.sort(keys)
    again = np.unique(ordered[1:][ordered[1:] == ordered[:-1]])
    return np.flatnonzero(np.isin(keys, again)) if len(again) else np.zeros(0, dtype=np.int64)
