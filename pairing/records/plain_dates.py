"""A date as text that means the same days in whatever column it stands."""

from __future__ import annotations

import datetime
import re
from typing import TYPE_CHECKING

from pairing.dates import iso, parse_date

if TYPE_CHECKING:
    from pairing.dates import DateRange

_FIRST = datetime.date.min.toordinal()
_LAST = datetime.date.max.toordinal()
_STANDARD = re.compile(r"~?\d{4}(?:-\d\d){0,2}[?~%]?$|\[|\.\.", re.ASCII)


def plain_date(date: DateRange) -> str:
    """The date as it was written, if that reads alone to the same days, else in ISO form."""
    alone = parse_date(date.text)
    if alone is not None and (alone.earliest, alone.latest) == (date.earliest, date.latest):
        return date.text
    return iso_date(date)


def standard_date(date: DateRange) -> str:
    """The date in ISO 8601 or EDTF form, at the precision it has: for machine-readable answers."""
    if _STANDARD.match(date.text):
        return plain_date(date)
    first, last = (datetime.date.fromordinal(each) for each in (date.earliest, date.latest))
    mark = "~" if date.approximate else ""
    if first.year == last.year and (first.month, first.day, last.month, last.day) == (1, 1, 12, 31):
        return f"{first.year:04d}{mark}"
    next_day = date.latest + 1 if date.latest < _LAST else date.latest
    ends_month = datetime.date.fromordinal(next_day).day == 1
    if (first.year, first.month, first.day) == (last.year, last.month, 1) and ends_month:
        return f"{first.isoformat()[:7]}{mark}"
    return f"{iso_date(date)}{mark if date.exact else ''}"


def iso_date(date: DateRange) -> str:
    """The date in ISO 8601 or EDTF form, to the day; `date` is never without both ends."""
    if date.exact:
        return iso(date.earliest)
    if date.earliest == _FIRST:
        return f"../{iso(date.latest)}"
    if date.latest == _LAST:
        return f"{iso(date.earliest)}/.."
    return f"[{iso(date.earliest)}..{iso(date.latest)}]"
