"""Doubts about one animal's dates: in an impossible order, far ahead, or against its status.

A date is an interval of days; each doubt holds on every day that the intervals allow.
"""

from __future__ import annotations

import datetime
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from pairing.dates import iso
from pairing.records.fields import DATE_FIELDS
from pairing.records.findings import Finding

if TYPE_CHECKING:
    from pairing.records.animals import Animals, BoolArray, Dates
    from pairing.records.rules import RecordRules

DISPOSAL_DAYS = 31
"""Days after a death on which an animal may still be struck off as having left.

A carcass leaves after its post-mortem, and books are closed at the end of a month: common
practice, no source.
"""
FAR_AHEAD_DAYS = 5 * 366
FAR_AHEAD_OF_FEW_DAYS = 50 * 366
FEW_DATES = 100
HANDFUL = 5
ONE_IN = 1000
"""What is far ahead of all other dates; see `dates_far_ahead`. Common practice, no source."""

_LAST_DAY = datetime.date.max.toordinal()
_IN_WORDS = {
    "born": "born",
    "died": "died",
    "entered": "entered",
    "left": "left",
    "last_seen": "was last seen",
}
_EGGS = " If it came as an egg or in its dam, accept it."


def events_before_birth(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Animals that leave or enter before they are born."""
    born = animals.dates.get("born")
    findings = []
    for field, also in (("left", ""), ("entered", _EGGS)):
        dates = animals.dates.get(field)
        if born is None or dates is None:
            continue
        findings += [
            Finding(
                f"{field}-before-born",
                f"{animals.names[place]} {field} {_text(animals, field, place)} but was born "
                f"{_text(animals, 'born', place)}.",
                f"Correct one of the two dates.{also}",
                id=animals.names[place],
                row=animals.line(place),
                column=animals.records.columns.get(field),
                found=_text(animals, field, place),
            )
            for place in np.flatnonzero(dates.latest < born.earliest).tolist()
        ]
    return findings


def events_after_death(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Animals seen, entering or leaving after they died.

    To leave up to `DISPOSAL_DAYS` after the death is no contradiction: the day on which a dead
    animal was disposed of or struck off is often written there.
    """
    died = animals.dates.get("died")
    findings = []
    for field, allowed in (("last_seen", 0), ("entered", 0), ("left", DISPOSAL_DAYS)):
        dates = animals.dates.get(field)
        if died is None or dates is None:
            continue
        findings += [
            Finding(
                "event-after-death",
                f"{animals.names[place]} died {_text(animals, 'died', place)} but "
                f"{_IN_WORDS[field]} {_text(animals, field, place)}.",
                "Correct one of the two dates; until then it counts as dead.",
                id=animals.names[place],
                row=animals.line(place),
                column=animals.records.columns.get(field),
                found=_text(animals, field, place),
            )
            for place in np.flatnonzero(dates.earliest > died.latest + allowed).tolist()
        ]
    return findings


def dates_far_ahead(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Dates years after all others: mostly misprints, such as 2109 for 2019.

    The clock is not read, so the other dates tell what the present is.
    A few dates are far ahead when each of them lies surely more than five years after all the
    rest; a few are a handful, or one in a thousand of all dates (and fewer than half of them).
    Fewer than a hundred dates do not show how dense the records are: there fifty years are
    asked, which no programme sleeps.
    A date without a last day ("after 2019") may be any, so that it leaves nothing ahead of it.
    """
    ahead, rest, asked = _far_ahead(animals)
    places = [
        (place, field)
        for field, dates in animals.dates.items()
        if ahead and field in DATE_FIELDS
        for place in dates.reading.places(
            lambda date: date is not None and date.earliest > rest + asked
        )
    ]
    others = "every other date" if ahead == 1 else f"all but {ahead} of the dates"
    return [
        Finding(
            "date-far-ahead",
            f"{animals.names[place]}: {field} {_text(animals, field, place)} lies "
            f"{_first_year(animals, field, place) - int(iso(rest)[:4])} years after {others}.",
            "Correct the date. Until then give the day with --as-of or as_of in the policy.",
            id=animals.names[place],
            row=animals.line(place),
            column=animals.records.columns.get(field),
            found=_text(animals, field, place),
        )
        for place, field in sorted(places)
    ]


def _far_ahead(animals: Animals) -> tuple[int, int, int]:
    """How many dates are far ahead, the last possible day of all others, and the days asked."""
    columns = [dates for field, dates in animals.dates.items() if field in DATE_FIELDS]
    number = sum(int(np.count_nonzero(dates.known)) for dates in columns)
    asked = FAR_AHEAD_OF_FEW_DAYS if number < FEW_DATES else FAR_AHEAD_DAYS
    most = min(max(HANDFUL, number // ONE_IN), (number - 1) // 2)
    nothing = 0, _LAST_DAY, asked
    if most < 1:
        return nothing
    # The date that begins last is ahead if any is, and then only as many lie near it.
    near = max(int(dates.earliest.max()) for dates in columns) - asked
    if sum(int(np.count_nonzero(dates.known & (dates.latest >= near))) for dates in columns) > most:
        return nothing
    words = [
        (date.latest, date.earliest, count)
        for dates in columns
        for date, count in zip(dates.reading.values, _counts(dates), strict=True)
        if date is not None and count
    ]
    words.sort(reverse=True)
    found = nothing
    ahead, first = 0, _LAST_DAY
    for (_latest, earliest, count), (rest, *_others) in pairwise(words):
        ahead, first = ahead + count, min(first, earliest)
        if ahead > most:
            break
        if first > rest + asked:
            found = ahead, rest, asked
    return found


def _counts(dates: Dates) -> list[int]:
    """How many animals have each distinct date."""
    counts: list[int] = np.bincount(
        dates.reading.codes, minlength=len(dates.reading.values)
    ).tolist()
    return counts


def statuses_against_dates(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Animals with status living although they died, or left and did not come back.

    Only this is a contradiction: a dead animal without a date of death is merely not dated, a
    gone or lost one may have died since, and a dead one may have left before.
    To have left is a note, for it may live elsewhere. A date without a last day ("after 2019")
    may still come, and says nothing.
    """
    status = animals.values.get("status")
    if status is None:
        return []
    living = status.where(lambda value: value == "living")
    died = living & _over(animals, "died")
    left = living & _over(animals, "left") & ~died & ~may_have_returned(animals)
    findings = []
    for field, flags, milder in (("died", died, None), ("left", left, "note")):
        findings += [
            Finding(
                "status-against-dates",
                f"{animals.names[place]} has status living and {field} "
                f"{_text(animals, field, place)}.",
                "Correct the status or the date; until then it does not count as living.",
                id=animals.names[place],
                row=animals.line(place),
                column=animals.records.columns.get("status"),
                found=animals.cell("status", place),
                milder=milder,
            )
            for place in np.flatnonzero(flags).tolist()
        ]
    return findings


def _over(animals: Animals, field: str) -> BoolArray:
    """Whether a date is recorded and has a last possible day."""
    dates = animals.dates.get(field)
    if dates is None:
        return np.zeros(len(animals), dtype=bool)
    over: BoolArray = dates.latest < _LAST_DAY
    return over


def may_have_returned(animals: Animals) -> BoolArray:
    """Whether each animal is recorded as entering on a day that may be the one it left or later."""
    left, entered = animals.dates.get("left"), animals.dates.get("entered")
    if left is None or entered is None:
        return np.zeros(len(animals), dtype=bool)
    returned: BoolArray = entered.known & (entered.latest >= left.earliest)
    return returned


def _text(animals: Animals, field: str, place: int) -> str:
    date = animals.date(field, place)
    return "" if date is None else date.text


def _first_year(animals: Animals, field: str, place: int) -> int:
    date = animals.date(field, place)
    return 0 if date is None else int(iso(date.earliest)[:4])
