"""What a stored value says, as the text a keeper would read in its cell."""

from __future__ import annotations

import datetime
import uuid
from decimal import Decimal

_MIDNIGHT = datetime.time()
_MOST_EXACT = 1e15


def cell_text(value: object) -> str | None:
    """A single value as text, or None if its kind has no plain text (bytes, lists, records).

    Text stays exactly as it is and nothing (also a float that is not a number) is blank.
    Whole numbers lose ``.0``, truths become yes and no, dates are written in ISO form with the
    time of day left out at midnight, and lengths of time as hours, minutes and seconds.
    """
    if value is None:
        return ""
    if isinstance(value, str):
        return value
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, int | uuid.UUID):
        return str(value)
    if isinstance(value, float | Decimal):
        return _number_text(value)
    if isinstance(value, datetime.datetime):
        return _moment_text(value)
    if isinstance(value, datetime.date | datetime.time):
        return value.isoformat()
    if isinstance(value, datetime.timedelta):
        return _duration_text(value)
    return None


def _number_text(number: float | Decimal) -> str:
    if number != number:  # only what is not a number differs from itself
        return ""
    if isinstance(number, Decimal):
        text = format(number, "f")
        return text.rstrip("0").rstrip(".") if "." in text else text
    return str(int(number)) if number.is_integer() and abs(number) < _MOST_EXACT else str(number)


def _moment_text(moment: datetime.datetime) -> str:
    """Date, and time of day after a blank unless it is midnight; a stated zone is kept."""
    if moment.time() == _MIDNIGHT:
        return moment.date().isoformat()
    return moment.isoformat(sep=" ")


def _duration_text(duration: datetime.timedelta) -> str:
    sign = "-" if duration < datetime.timedelta() else ""
    length = abs(duration)
    minutes, seconds = divmod(length.seconds, 60)
    hours, minutes = divmod(minutes, 60)
    fraction = f".{length.microseconds:06d}" if length.microseconds else ""
    return f"{sign}{length.days * 24 + hours}:{minutes:02d}:{seconds:02d}{fraction}"
