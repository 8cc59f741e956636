"""Possible parents that cannot be: set aside before the chances of the others are weighed.

The list stays in the record as written; only the view leaves a candidate out. Dates are
intervals of days, and a candidate goes only where it is impossible on every one of them.
"""

from __future__ import annotations

import math
from collections import defaultdict
from dataclasses import replace
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from pairing.dates import completed
from pairing.records.animals import ROLES, UNKNOWN
from pairing.records.checks.breeding_ages import ANY_GESTATION_DAYS, longest_days
from pairing.records.checks.parentage import PARENT_SEX
from pairing.records.findings import Finding
from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Mapping

    from pairing.dates import Age, AgeWindow
    from pairing.records.animals import Animals, BoolArray, Parents, PlaceArray
    from pairing.records.rules import RecordRules

KIND = "possible-parent-impossible"
_SURE = 1 - 1e-9
_Side = tuple[str, int]
"""Role and animal."""


def set_aside_impossible(animals: Animals, rules: RecordRules) -> tuple[Animals, list[Finding]]:
    """The view without possible parents that cannot be the parent, and who they are.

    Set aside is the animal itself, its own descendant, one recorded as the other sex, born too
    late, dead before the conception (a dam: before the birth), or outside the ages at which
    births are believed. The chances of the others are scaled so that their total stays. A
    single one left with all of it is the parent; with none left the side is unknown. A row
    that stands for several animals stays, and so does every candidate of an animal whose
    finding a decision accepts, unless kinship would be undefined with it.
    """
    findings: list[Finding] = []
    accepted = {
        animals.names.find(animals.aliases.get(each.id, each.id))
        for each in rules.decisions
        if each.decision == "accept" and each.kind == KIND
    }
    said: set[tuple[_Side, str]] = set()
    while animals.possible:
        found = _impossible_ones(animals, rules)
        out = {
            side: {each.candidate for each in reasons if each.must or side[1] not in accepted}
            for side, reasons in found.items()
        }
        after = _without(animals, out) if any(out.values()) else animals
        for side, reasons in found.items():
            new = [each for each in reasons if (side, each.candidate) not in said]
            said.update((side, each.candidate) for each in new)
            findings += [_finding(after, side, each, out[side]) for each in new]
        # Who is the sure parent now may show a candidate elsewhere to be a descendant.
        same = all(getattr(animals, role) is getattr(after, role) for role in ROLES)
        animals = after
        if same:
            break
    return animals, findings


class _Reason(NamedTuple):
    """Why a candidate cannot be the parent; `must` where kinship would be undefined with it."""

    candidate: str
    why: str
    must: bool


def _impossible_ones(animals: Animals, rules: RecordRules) -> dict[_Side, list[_Reason]]:
    """Every list with candidates that cannot be, in the order of the rows."""
    places = _places(animals)
    bred = _with_descendants(animals)
    found = {}
    for role, child in sorted(animals.possible, key=lambda side: (side[1], ROLES.index(side[0]))):
        reasons = []
        for name, _chance in animals.possible[role, child]:
            why = _undefined(animals, child, places[name], bred)
            must = bool(why)
            why = why or _impossible(animals, rules, role, child, places[name])
            if why:
                reasons.append(_Reason(name, why, must))
        if reasons:
            found[role, child] = reasons
    return found


def _places(animals: Animals) -> dict[str, int]:
    """Every possible parent's place."""
    names = list({name for parents in animals.possible.values() for name, _chance in parents})
    found = animals.names.find_all(names).tolist()
    return {
        name: place if place >= 0 else animals.names.find(name)
        for name, place in zip(names, found, strict=True)
    }


def _with_descendants(animals: Animals) -> BoolArray:
    flags = np.zeros(len(animals.names), dtype=bool)
    for role in ROLES:
        parents = getattr(animals, role)
        flags[parents[parents >= 0]] = True
    flags[list(animals.clones.values())] = True
    return flags


# Why not


def _undefined(animals: Animals, child: int, candidate: int, bred: BoolArray) -> str:
    """Why kinship would be undefined with this parent, or ""."""
    name = animals.names[child]
    if candidate == child:
        return f"is {name} itself"
    if animals.clones.get(candidate) == child:
        return f"is a clone of {name}"
    if bred[child] and _descends(animals, candidate, child):
        return f"is a descendant of {name}"
    return ""


def _descends(animals: Animals, place: int, ancestor: int) -> bool:
    """Whether an animal descends from another by sure parents, its own or those of its model."""
    waiting, seen = [place], {place}
    while waiting:
        each = waiting.pop()
        if each >= len(animals):
            continue
        above = [int(getattr(animals, role)[each]) for role in ROLES]
        above.append(animals.clones.get(each, UNKNOWN))
        if ancestor in above:
            return True
        new = {parent for parent in above if parent >= 0} - seen
        seen |= new
        waiting += new
    return False


def _impossible(animals: Animals, rules: RecordRules, role: str, child: int, candidate: int) -> str:
    """Why a candidate cannot be the parent, or ""; one without a row always can."""
    if candidate >= len(animals) or animals.value("count", candidate, 1) != 1:
        return ""
    sex = animals.sex(candidate)
    if sex not in (PARENT_SEX[role], "hermaphrodite", "unknown"):
        return f"is recorded as {sex}"
    return _dead(animals, rules, role, child, candidate) or _wrong_age(
        animals, rules, role, child, candidate
    )


def _dead(animals: Animals, rules: RecordRules, role: str, child: int, candidate: int) -> str:
    own, died = animals.born(child), animals.date("died", candidate)
    if own is None or died is None:
        return ""
    name = animals.names[child]
    if role == "dam":
        # Embryos of a donor that has died can be stored.
        if died.latest < own.earliest and not animals.cell("genetic_dam", child):
            return f"died {died.text}, before {name} was born"
        return ""
    if animals.names[candidate] in rules.stored_semen:
        return ""
    carried = longest_days(rules.gestation) if rules.gestation else ANY_GESTATION_DAYS
    stored = longest_days(rules.sperm_storage) if rules.sperm_storage else 0
    if died.latest + carried + stored < own.earliest:
        return f"died {died.text}, before {name} could be conceived"
    return ""


def _wrong_age(animals: Animals, rules: RecordRules, role: str, child: int, candidate: int) -> str:
    own, theirs = animals.born(child), animals.born(candidate)
    if own is None or theirs is None:
        return ""
    name = animals.names[child]
    one_day = own.exact and theirs.exact and own.earliest == theirs.earliest
    if theirs.earliest > own.latest or one_day:
        return f"was born {theirs.text}, {'as' if one_day else 'after'} {name}"
    window = _window(animals, rules, role, candidate)
    if window is None:
        return ""
    youngest, oldest = window.youngest, window.oldest
    if completed(theirs.earliest, own.latest, youngest.unit) < youngest.count:
        return f"was too young when {name} was born (births are believed from {youngest})"
    died = animals.date("died", candidate)
    last = own.earliest if died is None else min(own.earliest, died.earliest)
    if last > theirs.latest and _past(completed(theirs.latest, last, oldest.unit), oldest):
        return f"was too old when {name} was born (births are believed up to {oldest})"
    return ""


def _window(animals: Animals, rules: RecordRules, role: str, candidate: int) -> AgeWindow | None:
    if not rules.parent_age:
        return None
    sex = PARENT_SEX[role]
    line = animals.text("line", candidate)
    return rules.parent_age.get((line, sex)) or rules.parent_age.get(("", sex))


def _past(age: float, oldest: Age) -> bool:
    """Whether an age lies beyond a limit, which counts completed units where it is whole."""
    whole = float(oldest.count).is_integer()
    return (int(age) if whole else age) > oldest.count


# What remains


def _without(animals: Animals, out: Mapping[_Side, set[str]]) -> Animals:
    """The view without some possible parents."""
    possible = dict(animals.possible)
    settled: dict[str, dict[int, int]] = defaultdict(dict)
    for (role, child), names in out.items():
        left = without(possible[role, child], names)
        if len(left) > 1 or (left and left[0][1] < _SURE):
            possible[role, child] = left
            continue
        del possible[role, child]
        settled[role][child] = animals.names.find(left[0][0]) if left else UNKNOWN
    parents: dict[str, PlaceArray] = {role: getattr(animals, role) for role in ROLES}
    for role, places in settled.items():
        parents[role] = parents[role].copy()
        parents[role][list(places)] = list(places.values())
    return replace(animals, sire=parents["sire"], dam=parents["dam"], possible=possible)


def without(parents: Parents, out: set[str]) -> Parents:
    """Possible parents without some, the chances of the rest scaled to the former total."""
    left = [(name, chance) for name, chance in parents if name not in out]
    if not left or len(left) == len(parents):
        return tuple(left)
    total = math.fsum(chance for _name, chance in parents)
    rest = math.fsum(chance for _name, chance in left)
    if len({chance for _name, chance in left}) == 1:
        return tuple((name, total / len(left)) for name, _chance in left)
    return tuple((name, chance * (total / rest)) for name, chance in left)


def _finding(after: Animals, side: _Side, reason: _Reason, out: set[str]) -> Finding:
    role, child = side
    name = after.names[child]
    left = [parent for parent, _chance in after.parents(role, child)]
    if reason.candidate not in out:
        treated = "a decision keeps it"
    elif not left:
        treated = f"it is set aside. Nobody remains, and the {role} counts as unknown"
    elif side not in after.possible:
        treated = f"it is set aside. {left[0]} remains and counts as the {role}"
    else:
        verb = "remains" if len(left) == 1 else "remain"
        treated = f"it is set aside. {listed(left)} {verb}"
    donor = role == "dam" and after.cell("genetic_dam", child)
    return Finding(
        KIND,
        f'possible {role} "{reason.candidate}" of {name} {reason.why}; {treated}.',
        "Take it from the list, or correct what rules it out.",
        id=name,
        row=after.line(child),
        column=after.records.columns.get("genetic_dam" if donor else role),
        found=reason.candidate,
    )
