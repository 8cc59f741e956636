"""Doubts about rings, chips and tattoos: one mark on several animals."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

from pairing.records.checks.wording import by_animal, some_of, with_line
from pairing.records.findings import Finding
from pairing.records.ids.look_alikes import groups_alike, words_only
from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Sequence

    from pairing.dates import DateRange
    from pairing.records.animals import Animals
    from pairing.records.rules import RecordRules

_MOST_BEARERS = 10
_MOST_ONE_BY_ONE = 50
_PLACEHOLDERS = frozenset(
    {"none", "no", "nil", "nomark", "noring", "nochip", "notag", "notattoo", "notmarked", "x"}
    | {"unmarked", "unringed", "unchipped", "untagged", "unbanded", "noband", "lost", "xx"}
    | {"unreadable", "illegible", "notread", "notknown", "missing", "pending", "yes", "xxx"}
    | {"unknown", "unk", "na", "null", "wild", "0", "00", "000"}
)
"""Words that stand where there is no mark, without blanks and signs."""


def marks_on_several_ids(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Marks that more than one animal bears, at one time or one after the other."""
    if "mark" not in animals.records.fields and "mark" not in animals.patched:
        return []
    findings: list[Finding] = []
    one_by_one: list[list[int]] = []
    for alike in groups_alike(_marks(animals), as_written=True):
        group = [place for place in alike if animals.text("mark", place)]
        if len(group) < 2:
            continue
        mark = words_only(animals.text("mark", group[0]))
        if len(group) > _MOST_BEARERS or mark in _PLACEHOLDERS:
            findings.append(_placeholder(animals, group))
        else:
            one_by_one.append(group)
    if len(one_by_one) > _MOST_ONE_BY_ONE:
        return [*findings, _given_often(animals, one_by_one)]
    for group in one_by_one:
        findings += _bearers(animals, group)
    return findings


def _marks(animals: Animals) -> Sequence[str]:
    cells = by_animal(animals, animals.records.column("mark"))
    patched = animals.patched.get("mark", {})
    return [patched.get(place, cell) for place, cell in enumerate(cells)] if patched else cells


def _bearers(animals: Animals, group: list[int]) -> list[Finding]:
    ordered = sorted(group, key=lambda place: (_first_day(animals, place), place))
    pairs = list(pairwise(ordered))
    if all(_over_before(animals, one, other) for one, other in pairs):
        return [_used_again(animals, one, other) for one, other in pairs]
    first, *others = group
    mark = animals.text("mark", first)
    name = animals.names[others[-1]]
    return [
        Finding(
            "mark-on-two-ids",
            f"{listed((with_line(animals, each) for each in group), most=10)} carry one mark, "
            f'"{mark}".',
            "Read the mark on the animal again and correct it; if it is one animal, enter it once "
            "or merge the ids by a decision.",
            id=name,
            row=animals.line(others[-1]),
            column=animals.records.columns.get("mark"),
            found=animals.text("mark", others[-1]),
        )
    ]


def _used_again(animals: Animals, one: int, other: int) -> Finding:
    mark, name = animals.text("mark", one), animals.names[other]
    ended, began = _end(animals, one), _start(animals, other)
    return Finding(
        "mark-used-again",
        f'mark "{mark}" of {animals.names[one]} ({ended}) is on {name} ({began}) again.',
        "See that young written under this mark have the right parent.",
        id=name,
        row=animals.line(other),
        column=animals.records.columns.get("mark"),
        found=animals.text("mark", other),
    )


def _placeholder(animals: Animals, group: list[int]) -> Finding:
    mark = animals.text("mark", group[0])
    return Finding(
        "mark-on-two-ids",
        f'"{mark}" stands as the mark of {len(group):,} animals ({some_of(animals, group)}); it '
        "tells none of them apart.",
        "Leave the cell blank where an animal has no mark of its own.",
        row=animals.line(group[0]),
        column=animals.records.columns.get("mark"),
        found=mark,
        milder="note",
    )


def _given_often(animals: Animals, groups: list[list[int]]) -> Finding:
    examples = "; ".join(
        f'"{animals.text("mark", group[0])}" of {some_of(animals, group)}' for group in groups[:3]
    )
    return Finding(
        "mark-on-two-ids",
        f"{len(groups):,} marks stand for more than one animal each, for instance {examples}.",
        "If marks are given again every year, nothing needs doing; else correct those that are "
        "wrong. Animals are told apart by id, not by mark.",
        column=animals.records.columns.get("mark"),
    )


def _dated(animals: Animals, place: int, fields: tuple[str, ...]) -> list[tuple[str, DateRange]]:
    found = ((field, animals.date(field, place)) for field in fields)
    return [(field, date) for field, date in found if date is not None]


def _first_day(animals: Animals, place: int) -> int:
    starts = _dated(animals, place, ("born", "entered"))
    return max((date.earliest for _field, date in starts), default=0)


def _over_before(animals: Animals, one: int, other: int) -> bool:
    """Whether one animal surely died or left before another was born or came."""
    ends = _dated(animals, one, ("died", "left"))
    return bool(ends) and min(date.latest for _field, date in ends) < _first_day(animals, other)


def _end(animals: Animals, place: int) -> str:
    ends = _dated(animals, place, ("died", "left"))
    field, date = min(ends, key=lambda each: each[1].latest)
    return f"{field} {date.text}"


def _start(animals: Animals, place: int) -> str:
    starts = _dated(animals, place, ("born", "entered"))
    field, date = max(starts, key=lambda each: each[1].earliest)
    return f"{field} {date.text}"
