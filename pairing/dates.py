"""Dates as keepers write them: a day, a month, a year, or a range of days.

A date of reduced precision is an interval from its earliest to its latest possible day.
A check may call something impossible only when it is so over the whole interval.
Forms read: ISO 8601 (``2019-05-31``, ``2019-05``, ``2019``), and of EDTF the qualifiers
(``2019?``, ``2019~``, ``~2019``), the set form ``[2018..2020]`` and the intervals
``2018/2020``, ``../2019``, ``2019/..``.
"""

from __future__ import annotations

import calendar
import datetime
import re
from dataclasses import dataclass
from functools import lru_cache

_FIRST = datetime.date.min.toordinal()
_LAST = datetime.date.max.toordinal()
_POINT = re.compile(r"(\d{4})(?:-(\d{1,2})(?:-(\d{1,2}))?)?(?:[T ]00:00(?::00(?:\.0+)?)?)?$")
_SET = re.compile(r"\[\s*(.*?)\s*\.\.\s*(.*?)\s*\]$")
_INTERVAL = re.compile(r"(\S*?)\s*/\s*(\S*)$")
_QUALIFIERS = "~?% "

EXPECTED = "a day as 2019-05-31, a month as 2019-05 or a year as 2019"


@dataclass(frozen=True, slots=True)
class DateRange:
    """The days a recorded date may mean, both ends included.

    `earliest` and `latest` are proleptic ordinals (day 1 is 0001-01-01). `approximate` is
    true when the writer marked the date as uncertain.
    """

    earliest: int
    latest: int
    text: str
    approximate: bool = False

    @property
    def midpoint(self) -> float:
        """The middle of the interval, as an ordinal; used for ages and means."""
        return (self.earliest + self.latest) / 2

    @property
    def year(self) -> int:
        """Calendar year of the latest possible day."""
        return datetime.date.fromordinal(self.latest).year

    @property
    def exact(self) -> bool:
        """Whether the date is one day."""
        return self.earliest == self.latest


@lru_cache(maxsize=65536)
def parse_date(text: str) -> DateRange | None:
    """The days that `text` may mean, or None when it is not in a known form."""
    bare = text.strip()
    bounded = _SET.match(bare) or _INTERVAL.match(bare)
    if bounded:
        return _interval(bounded.group(1), bounded.group(2), text)
    approximate = bare[:1] == "~" or bare[-1:] in ("?", "~", "%")
    point = _point(bare.strip(_QUALIFIERS))
    if point is None:
        return None
    return DateRange(point[0], point[1], text, approximate)


def _interval(first: str, last: str, text: str) -> DateRange | None:
    open_ends = [end in ("", "..") for end in (first, last)]
    start, end = (_point(part.strip(_QUALIFIERS)) for part in (first, last))
    if all(open_ends) or (not start and not open_ends[0]) or (not end and not open_ends[1]):
        return None
    earliest = start[0] if start else _FIRST
    latest = end[1] if end else _LAST
    return DateRange(earliest, latest, text, approximate=True) if earliest <= latest else None


def _point(text: str) -> tuple[int, int] | None:
    match = _POINT.match(text)
    if not match:
        return None
    year, month, day = (int(part) if part else None for part in match.groups())
    try:
        first = datetime.date(year or 0, 1 if month is None else month, 1 if day is None else day)
    except ValueError:
        return None
    if day is not None:
        return first.toordinal(), first.toordinal()
    if month is not None:
        last = first.replace(day=calendar.monthrange(first.year, month)[1])
    else:
        last = first.replace(month=12, day=31)
    return first.toordinal(), last.toordinal()


def iso(ordinal: int) -> str:
    """ISO 8601 text of an ordinal day."""
    return datetime.date.fromordinal(ordinal).isoformat()


@dataclass(frozen=True, slots=True)
class Age:
    """A length of life in completed `unit`: "years", "months", "weeks" or "days"."""

    count: float
    unit: str = "years"

    def __str__(self) -> str:
        count = f"{self.count:g}"
        return f"{count} {self.unit[:-1] if count == '1' else self.unit}"


@dataclass(frozen=True, slots=True)
class AgeWindow:
    """Ages, in completed units, from which and up to which something holds."""

    youngest: Age
    oldest: Age


_AGE = re.compile(r"(\d+(?:\.\d+)?)\s*(year|month|week|day)s?$", re.IGNORECASE)


def parse_age(value: object) -> Age | None:
    """An age from a number of years or a phrase such as ``"8 weeks"``; None when neither."""
    if isinstance(value, bool):
        return None
    if isinstance(value, int | float):
        return Age(float(value)) if value >= 0 else None
    match = _AGE.match(value.strip()) if isinstance(value, str) else None
    return Age(float(match.group(1)), f"{match.group(2).lower()}s") if match else None


def completed(born: int, on: int, unit: str) -> float:
    """Completed units of life on day `on` of an animal born on day `born` (both ordinals).

    Years count by completed months, in twelfths, so that a limit of 1.5 years works.
    """
    if unit in ("days", "weeks"):
        return (on - born) / (7 if unit == "weeks" else 1)
    start, end = datetime.date.fromordinal(born), datetime.date.fromordinal(on)
    months = (end.year - start.year) * 12 + end.month - start.month
    if end.day < start.day:
        months -= 1
    return months if unit == "months" else months / 12
