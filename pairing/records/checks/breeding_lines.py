"""Doubts about lines: crosses between them, and breaks in brother-sister matings."""

from __future__ import annotations

from collections import defaultdict
from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import ROLES
from pairing.records.checks.wording import some_of, words_by_animal
from pairing.records.fields import MISSING_PARENT
from pairing.records.findings import Finding
from pairing.spelling import listed

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.records.animals import Animals, BoolArray, PlaceArray
    from pairing.records.rules import RecordRules

_MOST_ONE_BY_ONE = 10
_MOST_PAIRS_OF_LINES = 30
_SUCCESSIVE_GENERATIONS = 3
_SHARE_OF_SIB_MATINGS = 0.8


def _lines(animals: Animals) -> tuple[list[str], PlaceArray] | None:
    """Names of the lines and each animal's, -1 where none is recorded; None without any."""
    column = words_by_animal(animals, "line")
    if column is None:
        return None
    names: dict[str, int] = {}
    spelled: list[str] = []
    numbers = []
    for word in column.words:
        folded = word.casefold()
        if folded in MISSING_PARENT and folded != "wild":
            numbers.append(-1)
            continue
        if folded not in names:
            names[folded] = len(spelled)
            spelled.append(word)
        numbers.append(names[folded])
    return (spelled, np.array(numbers, dtype=np.int32)[column.codes]) if spelled else None


# Crosses


def lines_differ(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Animals whose line is not that of both their parents."""
    lines = _lines(animals)
    if lines is None or len(lines[0]) < 2:
        return []
    names, line = lines
    differing = {role: _of_another_line(animals, role, line) for role in ROLES}
    crossed = np.flatnonzero(differing["sire"] | differing["dam"])
    groups: dict[tuple[int, tuple[int, ...]], list[int]] = defaultdict(list)
    for place in crossed.tolist():
        theirs = {
            int(line[int(getattr(animals, role)[place])])
            for role in ROLES
            if differing[role][place]
        }
        groups[int(line[place]), tuple(sorted(theirs))].append(place)
    if len(groups) > _MOST_PAIRS_OF_LINES:
        return [_crossed_as_a_rule(animals, len(groups), crossed.tolist())]
    findings = []
    for (own, others), places in groups.items():
        if len(places) > _MOST_ONE_BY_ONE:
            whose = listed(names[each] for each in others)
            said = f"{'a parent of line' if len(others) == 1 else 'parents of lines'} {whose}"
            findings.append(_many_crosses(animals, names[own], said, places))
        else:
            findings += [_cross(animals, names, line, differing, place) for place in places]
    return findings


def _of_another_line(animals: Animals, role: str, line: PlaceArray) -> BoolArray:
    parents = getattr(animals, role)
    differs = np.zeros(len(animals), dtype=bool)
    known = np.flatnonzero((parents >= 0) & (parents < len(animals)) & (line >= 0))
    theirs = line[parents[known]]
    differs[known] = (theirs >= 0) & (theirs != line[known])
    return differs


def _cross(
    animals: Animals,
    names: list[str],
    line: PlaceArray,
    differing: dict[str, BoolArray],
    place: int,
) -> Finding:
    said = []
    for role in ROLES:
        if differing[role][place]:
            parent = int(getattr(animals, role)[place])
            said.append(f"its {role} {animals.names[parent]} of line {names[line[parent]]}")
    name, own = animals.names[place], names[line[place]]
    return Finding(
        "line-differs",
        f"{name} is of line {own}, {' and '.join(said)}.",
        "Correct the line or the parent; accept it by a decision if the cross was meant.",
        id=name,
        row=animals.line(place),
        column=animals.records.columns.get("line"),
        found=animals.cell("line", place),
    )


def _many_crosses(animals: Animals, own: str, others: str, places: list[int]) -> Finding:
    return Finding(
        "line-differs",
        f"{len(places):,} animals of line {own} have {others}: {some_of(animals, places)}.",
        "Nothing to do if these lines are crossed on purpose; else correct the lines or parents.",
        row=animals.line(places[0]),
        column=animals.records.columns.get("line"),
        found=own,
    )


def _crossed_as_a_rule(animals: Animals, pairs: int, places: list[int]) -> Finding:
    return Finding(
        "line-differs",
        f"{len(places):,} animals, in {pairs:,} combinations of lines, are not of the line of "
        f"both their parents: {some_of(animals, places)}.",
        "If the column does not tell lines that are kept apart, leave it alone with "
        f"--map '{animals.records.columns.get('line', 'line')}='.",
        row=animals.line(places[0]),
        column=animals.records.columns.get("line"),
    )


# Brother-sister matings


def lines_broken(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Other matings in a line that is kept by mating brothers to sisters.

    A line is so kept when at least three successive generations come from full sibs, and at
    least 80 % of its matings are of full sibs. Matings of founders are not judged.
    """
    lines = _lines(animals)
    if lines is None:
        return []
    names, line = lines
    sibs, judged = _sib_matings(animals, line)
    deep = sibs.copy()
    for _generation in range(_SUCCESSIVE_GENERATIONS - 1):
        places = np.flatnonzero(deep)
        deep[places] = deep[animals.sire[places]]
    kept = np.unique(line[deep])
    findings = []
    for number in kept.tolist():
        own = judged & (line == number)
        breaks = _matings(animals, np.flatnonzero(own & ~sibs))
        all_matings = _matings(animals, np.flatnonzero(own))
        if len(breaks) <= (1 - _SHARE_OF_SIB_MATINGS) * len(all_matings) + 1e-9:
            findings += [
                _break(animals, names[number], sire, dam, young)
                for (sire, dam), young in breaks.items()
            ]
    return findings


def _sib_matings(animals: Animals, line: PlaceArray) -> tuple[BoolArray, BoolArray]:
    """For each animal, whether its parents are full sibs, and whether that can be judged."""
    count = len(animals)
    sibs, judged = np.zeros(count, dtype=bool), np.zeros(count, dtype=bool)
    sire, dam = animals.sire, animals.dam
    places = np.flatnonzero((line >= 0) & (sire >= 0) & (dam >= 0) & (sire < count) & (dam < count))
    above: npt.NDArray[np.int32] = np.stack(
        [parent[own[places]] for own in (sire, dam) for parent in (sire, dam)]
    )
    same = (above[0] == above[2]) & (above[1] == above[3]) & (above[:2] >= 0).all(axis=0)
    sibs[places] = same & (sire[places] != dam[places])
    judged[places] = (above[:2] >= 0).all(axis=0) | (above[2:] >= 0).all(axis=0)
    return sibs, judged


def _matings(animals: Animals, places: npt.NDArray[np.int64]) -> dict[tuple[int, int], list[int]]:
    young: dict[tuple[int, int], list[int]] = defaultdict(list)
    pairs = zip(animals.sire[places].tolist(), animals.dam[places].tolist(), strict=True)
    for pair, place in zip(pairs, places.tolist(), strict=True):
        young[pair].append(place)
    return young


def _break(animals: Animals, line: str, sire: int, dam: int, young: list[int]) -> Finding:
    first = animals.names[young[0]]
    more = f" and {len(young) - 1} more" if len(young) > 1 else ""
    return Finding(
        "line-broken",
        f"parents {animals.names[sire]} and {animals.names[dam]} of {first}{more} are not full "
        f"sibs, as line {line} has them before: {_instead(animals, sire, dam)}.",
        "Correct the parent; if the mating was made, accept it by a decision, and the line "
        "counts from there.",
        id=first,
        row=animals.line(young[0]),
        column=animals.records.columns.get("sire"),
        found=animals.names[sire],
    )


def _instead(animals: Animals, sire: int, dam: int) -> str:
    """How the parents of a mating are related, as far as their own parents tell."""
    names = animals.names
    if sire == dam:
        return f"{names[sire]} is both parents"
    for old, young in ((sire, dam), (dam, sire)):
        for role in ROLES:
            if int(getattr(animals, role)[young]) == old:
                return f"{names[old]} is the {role} of {names[young]}"
    above = [[int(getattr(animals, role)[each]) for role in ROLES] for each in (sire, dam)]
    for place, parents in zip((sire, dam), above, strict=True):
        missing = [role for role, each in zip(ROLES, parents, strict=True) if each < 0]
        if missing:
            return f"the {' and the '.join(missing)} of {names[place]} {_is(missing)} not known"
    shared = [names[one] for one, other in zip(*above, strict=True) if one == other]
    if shared:
        return f"they share only {shared[0]}"
    return (
        f"{names[sire]} is of {names[above[0][0]]} and {names[above[0][1]]}, "
        f"{names[dam]} of {names[above[1][0]]} and {names[above[1][1]]}"
    )


def _is(words: list[str]) -> str:
    return "is" if len(words) == 1 else "are"
