"""Doubts about founders: who is one, and who only looks like one."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import UNKNOWN
from pairing.records.fields import FOUNDER_ORIGINS
from pairing.records.findings import Finding

if TYPE_CHECKING:
    from pairing.records.animals import Animals
    from pairing.records.rules import RecordRules


def founders_with_parents(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Animals whose origin says founder although both parents are recorded."""
    if "origin" not in animals.values:
        return []
    founder = animals.values["origin"].where(lambda value: value in FOUNDER_ORIGINS)
    with_parents = (animals.sire != UNKNOWN) & (animals.dam != UNKNOWN)
    findings = []
    for place in np.flatnonzero(founder & with_parents).tolist():
        origin = str(animals.value("origin", place))
        findings.append(
            Finding(
                "founder-with-parents",
                f"{animals.names[place]} has origin {origin} and recorded parents; the parents "
                "are used.",
                "Nothing to do if the parents are right.",
                id=animals.names[place],
                row=animals.line(place),
                found=origin,
            )
        )
    return findings


def doubtful_founders(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Presumed founders that were born after the programme's first birth."""
    born = animals.dates.get("born")
    if born is None or "origin" in animals.records.fields:
        return []
    parentless = (animals.sire == UNKNOWN) & (animals.dam == UNKNOWN)
    births = born.earliest[born.known & ~parentless]
    if not len(births):
        return []
    if "origin" in animals.values:
        parentless &= animals.values["origin"].where(lambda value: value == "")
    late = np.flatnonzero(parentless & born.known & (born.earliest > births.min()))
    names = animals.names.of_rows(late)
    return [
        Finding(
            "doubtful-founder",
            f"{name} (born {date.text}) counts as a founder only because both parents are blank.",
            "Add a column origin (wild, foundation, imported, captive, unknown) to settle it.",
            id=name,
            row=animals.line(place),
        )
        for name, place in zip(names, late.tolist(), strict=True)
        if (date := born.reading[place]) is not None
    ]
