"""A date as text that means the same days in whatever column it stands."""

from __future__ import annotations

import datetime
from typing import TYPE_CHECKING

from pairing.dates import iso, parse_date

if TYPE_CHECKING:
    from pairing.dates import DateRange

_FIRST = datetime.date.min.toordinal()
_LAST = datetime.date.max.toordinal()


def plain_date(date: DateRange) -> str:
    """The date as it was written, if that reads alone to the same days, else in ISO form."""
    alone = parse_date(date.text)
    if alone is not None and (alone.earliest, alone.latest) == (date.earliest, date.latest):
        return date.text
    return iso_date(date)


def iso_date(date: DateRange) -> str:
    """The date in ISO 8601 or EDTF form, to the day; `date` is never without both ends."""
    if date.exact:
        return iso(date.earliest)
    if date.earliest == _FIRST:
        return f"../{iso(date.latest)}"
    if date.latest == _LAST:
        return f"{iso(date.earliest)}/.."
    return f"[{iso(date.earliest)}..{iso(date.latest)}]"
