"""Doubts about time: what cannot be so on any day that the recorded dates allow."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import ROLES
from pairing.records.findings import Finding

if TYPE_CHECKING:
    from pairing.records.animals import Animals
    from pairing.records.rules import RecordRules


def death_before_birth(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Animals that die before they are born."""
    born, died = animals.dates.get("born"), animals.dates.get("died")
    if born is None or died is None:
        return []
    findings = []
    for place in np.flatnonzero(died.latest < born.earliest).tolist():
        birth, death = born.reading[place], died.reading[place]
        if birth is None or death is None:
            continue
        findings.append(
            Finding(
                "death-before-birth",
                f"{animals.names[place]} died {death.text} but was born {birth.text}.",
                "Correct one of the two dates.",
                id=animals.names[place],
                row=animals.line(place),
                column=animals.records.columns.get("died"),
                found=death.text,
            )
        )
    return findings


def parents_younger(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Parents born after their young, or on one exactly known day with it."""
    born = animals.dates.get("born")
    if born is None:
        return []
    findings = []
    # A parent without a row, or unknown (-1, -2 count from the end), may be of any age.
    earliest = np.full(len(animals.names) + 2, np.iinfo(np.int32).min, dtype=np.int32)
    earliest[: len(animals)] = born.earliest
    for role in ROLES:
        parent = getattr(animals, role)
        late = np.flatnonzero(earliest[parent] >= born.latest)
        pairs = list(zip(late.tolist(), parent[late].tolist(), strict=True))
        for (side, animal), parts in animals.possible.items():
            if side == role:
                places = (animals.names.find(name) for name, _chance in parts)
                pairs += [
                    (animal, place)
                    for place in places
                    if place < len(animals) and born.earliest[place] >= born.latest[animal]
                ]
        findings += [
            _parent_younger(animals, role, child, place)
            for child, place in sorted(pairs)
            if child != place and _surely_younger(animals, child, place)
        ]
    return findings


def _surely_younger(animals: Animals, child: int, parent: int) -> bool:
    own, theirs = animals.born(child), animals.born(parent)
    if own is None or theirs is None:
        return False
    return theirs.earliest > own.latest or (theirs.exact and own.exact)


def _parent_younger(animals: Animals, role: str, child: int, parent: int) -> Finding:
    own, theirs = animals.born(child), animals.born(parent)
    said = {each: date.text for each, date in (("own", own), ("theirs", theirs)) if date}
    return Finding(
        "parent-younger",
        f"{role} {animals.names[parent]} of {animals.names[child]} was born {said['theirs']} "
        f"(line {animals.line(parent)}), {animals.names[child]} itself {said['own']}.",
        f"A parent is older than its young. Correct a date or the {role}.",
        id=animals.names[child],
        row=animals.line(child),
        column=animals.records.columns.get(role),
        found=animals.names[parent],
    )
