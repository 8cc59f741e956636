"""Rows that stand for several animals: tanks, shoals and harems known by counts."""

from __future__ import annotations

from typing import TYPE_CHECKING

from pairing.records.findings import Finding

if TYPE_CHECKING:
    from pairing.records.animals import Animals
    from pairing.records.rules import RecordRules


def group_rows(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Rows that stand for another number of animals than one."""
    counts = animals.values.get("count")
    if counts is None:
        return []
    return [
        Finding(
            "group-row",
            f"{animals.names[place]} stands for {counts[place]} animals that are not told apart.",
            "Its figures are those of one animal drawn from them at random; give each animal a "
            "row of its own where you can.",
            id=animals.names[place],
            row=animals.line(place),
            column=animals.records.columns.get("count"),
            found=animals.cell("count", place),
        )
        for place in counts.places(lambda count: count != 1)
    ]
