"""Dates as keepers write them: a day, a month, a year, or a range of days.

A date of reduced precision is an interval from its earliest to its latest possible day.
A check may call something impossible only when it is so over the whole interval.
Only what can be read in one way is read, whatever else is in the file; the forms that a whole
column must settle (``03/04/2019``) belong to `pairing.records.date_columns`.
Years have four digits, 1000 to 2999.

=====================  ==========================================================================
form                   examples
=====================  ==========================================================================
day                    ``2019-05-31``, ``2019/5/31``, ``2019.05.31``, ``20190531``
day and month's name   ``May 29, 1978``, ``29-May-1978``, ``29th of May 1978``, ``29MAY1978``,
                       ``1978 May 29``
month                  ``2019-05``, ``05/2019``, ``May 1978``, ``Sept 2019``, ``1978 May``
week                   ``2019-W22`` (Monday to Sunday), ``2019-W22-5``
year                   ``2019``, ``2019.0`` (as spreadsheets and statistics programs export it)
decade                 ``1970s``; ``1900s`` may be a decade or a century and covers both
time of day            after a day, with or without a zone; it is dropped, the day is not moved
unspecified digits     ``201X``, ``2004-XX``, ``2004-06-XX``, ``2004-1X``, ``2004-06-??``
about                  ``2019?``, ``~2019``, ``2019-05~``, ``2019-05?-31``, ``c. 2019``,
                       ``about May 2019``; the days stay those of the bare date
part of                ``early 2019``, ``mid-May 2019``, ``end of 2019``: the whole year or month,
                       as nobody knows where "early" ends
limit                  ``before 2019``, ``<2019`` (till 31 December 2018), ``after 2019``,
                       ``>2019`` (from 1 January 2020), ``until 2019``, ``since 2019`` and
                       ``<=``, ``>=`` (2019 included)
interval               ``2018/2020``, ``../2019``, ``2019/..``, ``1985-04/..``
set                    ``[2018..2020]``, ``[..2019]``, ``[2018..]``, ``[2017,2019]``,
                       ``2018 or 2020``, ``between 2018 and 2020``: from the first to the last
=====================  ==========================================================================

Not read, because each may mean two things: ``2019/05`` and ``2019.05`` (a month, a span of
years as in 2018/19, or a decimal number); ``2018-2020`` (one day within, or a life from birth to
death); ``summer 2019`` and ISO's codes for seasons such as ``2019-22`` (other months in each
hemisphere, and some summers and winters have two years).

Forms by ISO 8601-1; intervals, sets, qualifiers and unspecified digits by EDTF, ISO 8601-2:2019
(from memory); words such as "circa" and the orders of a month's name: common practice, no source.
"""

from __future__ import annotations

import calendar
import datetime
import re
from dataclasses import dataclass
from functools import lru_cache
from itertools import product

_FIRST = datetime.date.min.toordinal()
_LAST = datetime.date.max.toordinal()
FIRST_YEAR, LAST_YEAR = 1000, 2999
"""Years that are read; others are rather slips of the pen."""
LONGEST = 200
"""Characters of the longest text that is looked at."""
_DASHES = str.maketrans(dict.fromkeys("\u2010\u2011\u2012\u2013\u2014\u2212", "-"))

EXPECTED = "a day as 2019-05-31 or 31 May 2019, a month as 2019-05 or a year as 2019"

MONTHS: dict[str, int] = {
    name[:length].lower(): month
    for month, name in enumerate(calendar.month_name)
    if month
    for length in (3, 4, len(name))
}
"""English names of months, in full or their first three or four letters, to their numbers."""

MONTH_PATTERN = "(?:" + "|".join(sorted(MONTHS, key=len, reverse=True)) + ")"
GAP_PATTERN = r"[ ,./-]{0,3}"
ORDINAL_PATTERN = r"(?:st|nd|rd|th)?"
"""Parts of regular expressions for dates with the name of a month."""


def _forms(*patterns: str) -> tuple[re.Pattern[str], ...]:
    parts = {
        "GAP": GAP_PATTERN,
        "NAME": f"(?P<month>{MONTH_PATTERN})",
        "DAY": rf"(?:the )?(?P<day>\d{{1,2}}){ORDINAL_PATTERN}",
        "YEAR": r"(?P<year>\d{4})",
    }
    filled = [re.sub("|".join(parts), lambda word: parts[word[0]], pattern) for pattern in patterns]
    return tuple(re.compile(pattern, re.ASCII | re.IGNORECASE) for pattern in filled)


_CALENDAR_FORMS = _forms(
    r"YEAR(?:-(?P<month>\d{1,2})(?:-(?P<day>\d{1,2}))?)?",
    r"YEAR([./-]) ?(?P<month>\d{1,2})\2 ?(?P<day>\d{1,2})\.?",
    r"YEAR(?P<month>\d\d)(?P<day>\d\d)",
    r"(?P<month>\d{1,2})[./-]YEAR",
    r"YEAR\.0",
    r"NAMEGAPDAY[ ,./-]{1,3}YEAR",
    r"DAYGAP(?:of )?NAMEGAPYEAR",
    r"YEARGAPNAMEGAPDAY",
    r"NAMEGAP(?:of )?YEAR",
    r"YEARGAPNAME\.?",
)
_TIME_OF_DAY = re.compile(
    r"[T ] ?(?:(?:(?:[01]?\d|2[0-3]):[0-5]\d|24:00)(?::(?:[0-5]\d|60)(?:[.,]\d+)?)?"
    r"|(?<=T)(?:[01]\d|2[0-3])[0-5]\d(?:[0-5]\d)?)"
    r" ?(?:[ap]m)? ?(?:z|utc|gmt|[+-]\d\d(?::?\d\d)?)?$",
    re.ASCII | re.IGNORECASE,
)
_WEEK = re.compile(r"(\d{4})-?W(\d\d)(?:-?([1-7]))?", re.ASCII | re.IGNORECASE)
_DECADE = re.compile(r"(?:the )?(\d{3}0)'?s", re.ASCII | re.IGNORECASE)
_UNSPECIFIED = re.compile(
    r"(\d\d(?:\d\d|\dX|XX))(?:-(\d\d|\dX|XX)(?:-(\d\d|\dX|XX))?)?", re.ASCII | re.IGNORECASE
)
_PLACEHOLDER = re.compile(r"(?:(?<=-)|(?<=^\d\d))\?\?(?=-|$)", re.ASCII)
_QUALIFIER = re.compile(r"(?:^|(?<=[ ./-]))[?~%]+|[?~%]+(?=$|[ ./-])")
_LOST_DIGIT = re.compile(r"(?<!\d)\d\?|\?\d(?!\d)", re.ASCII)
_ABOUT = re.compile(
    r"(?:circa|cca|ca|c|about|abt|around|approximately|approx|estimated|est|probably|prob"
    r"|possibly|perhaps|early|mid|middle of|late|beginning of|start of|end of)\b[.:]?[ -]*"
    r"|ca?(?=\d)",
    re.IGNORECASE,
)
_LIMIT = re.compile(
    r"(?:(?P<until><=|≤|(?:until|till|up to|not after|not later than)\b)"
    r"|(?P<since>>=|≥|(?:since|not before|not earlier than)\b)"
    r"|(?P<before><|(?:before|bef|prior to|earlier than)\b\.?)"
    r"|(?P<after>>|(?:after|aft|later than)\b\.?)) ?",
    re.IGNORECASE,
)
_BETWEEN = re.compile(r"between (.+?) and (.+)", re.IGNORECASE)
_EITHER = re.compile(r"(?:either )?(.+?) or (.+)", re.IGNORECASE)

Days = tuple[int, int]


@dataclass(frozen=True, slots=True)
class DateRange:
    """The days a recorded date may mean, both ends included.

    `earliest` and `latest` are proleptic ordinals (day 1 is 0001-01-01). `approximate` is
    true when the writer marked the date as uncertain or gave limits or alternatives, and when
    the records leave open which day is meant.
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
    bare = plain_date_text(text)
    if len(bare) > LONGEST:
        return None
    days = _point(bare)
    if days is not None:
        return DateRange(*days, text)
    days = _doubtful(bare) or _limit(bare) or _set(bare) or _interval(bare)
    return None if days is None else DateRange(*days, text, approximate=True)


def plain_date_text(text: str) -> str:
    """Text of a date, trimmed, with single blanks and plain hyphens for every dash."""
    if not text.isascii():
        text = text.translate(_DASHES)
    return " ".join(text.split())


def _point(text: str) -> Days | None:
    """Days of a date without a word of doubt."""
    days = _calendar_form(text)
    if days is not None:
        return days
    timed = _TIME_OF_DAY.search(text)
    if timed:
        days = _calendar_form(text[: timed.start()].rstrip())
        return days if days and days[0] == days[1] else None
    return _week(text) or _decade(text) or _unspecified(text)


def _calendar_form(text: str) -> Days | None:
    for form in _CALENDAR_FORMS:
        match = form.fullmatch(text)
        if match:
            parts = match.groupdict()
            month, day = parts.get("month"), parts.get("day")
            return _days(
                int(parts["year"]),
                None if month is None else MONTHS.get(month.lower()) or int(month),
                None if day is None else int(day),
            )
    return None


def _days(year: int, month: int | None, day: int | None) -> Days | None:
    """First and last day of a year, of a month, or a day twice; None where there is none."""
    if not FIRST_YEAR <= year <= LAST_YEAR:
        return None
    try:
        first = datetime.date(year, 1 if month is None else month, 1 if day is None else day)
    except ValueError:
        return None
    if day is not None:
        return first.toordinal(), first.toordinal()
    if month is not None:
        last = first.replace(day=calendar.monthrange(year, month)[1])
    else:
        last = first.replace(month=12, day=31)
    return first.toordinal(), last.toordinal()


def _week(text: str) -> Days | None:
    match = _WEEK.fullmatch(text)
    if not match or not FIRST_YEAR <= int(match[1]) <= LAST_YEAR:
        return None
    try:
        first = datetime.date.fromisocalendar(int(match[1]), int(match[2]), int(match[3] or 1))
    except ValueError:
        return None
    return first.toordinal(), first.toordinal() + (0 if match[3] else 6)


def _decade(text: str) -> Days | None:
    match = _DECADE.fullmatch(text)
    if not match:
        return None
    year = int(match[1])
    return _hull([_days(year, None, None), _days(year + (9 if year % 100 else 99), None, None)])


def _unspecified(text: str) -> Days | None:
    """First and last day that fits digits of which some are given as X."""
    match = _UNSPECIFIED.fullmatch(_PLACEHOLDER.sub("XX", text))
    if not match:
        return None
    year, month, day = match.groups()
    parts = ((year, LAST_YEAR), (month, 12), (day, 31))
    choices = [_fitting(digits, most) for digits, most in parts if digits is not None]
    first = _first_day(choices)
    last = _first_day([list(reversed(each)) for each in choices])
    return _hull([first, last])


def _fitting(digits: str, most: int) -> list[int]:
    """Numbers up to `most` that fit digits of which the last may be given as X, in order."""
    lowest, highest = (int(re.sub("[Xx]", digit, digits)) for digit in "09")
    return list(range(max(lowest, 1), min(highest, most) + 1))


def _first_day(choices: list[list[int]]) -> Days | None:
    """Days of the first combination of year, month and day that the calendar has."""
    for year, *rest in product(*choices):
        days = _days(year, *(*rest, None, None)[:2])
        if days is not None:
            return days
    return None


def _doubtful(text: str) -> Days | None:
    """Days of a date with a mark or a word of doubt; ``2019-1?`` may have lost a digit."""
    if _LOST_DIGIT.search(text):
        return None
    plain = _QUALIFIER.sub("", text.replace("(?)", "?")).strip()
    about = _ABOUT.match(plain)
    if about:
        plain = plain[about.end() :]
    return _point(plain) if plain != text else None


def _limit(text: str) -> Days | None:
    """Days up to or from a date; only a date without doubt is itself left out of them."""
    match = _LIMIT.match(text)
    if not match:
        return None
    rest = text[match.end() :]
    sure = _point(rest)
    days = sure or _doubtful(rest)
    if days is None:
        return None
    return {
        "until": (_FIRST, days[1]),
        "since": (days[0], _LAST),
        "before": (_FIRST, days[0] - 1 if sure else days[1]),
        "after": (days[1] + 1 if sure else days[0], _LAST),
    }[str(match.lastgroup)]


def _set(text: str) -> Days | None:
    if text[:1] == "[" and text[-1:] == "]":
        return _hull([_member(part.strip()) for part in text[1:-1].split(",")])
    if between := _BETWEEN.fullmatch(text):
        return _forward(between[1], between[2])
    if either := _EITHER.fullmatch(text):
        return _hull([_end(either[1]), _end(either[2])])
    return None


def _member(text: str) -> Days | None:
    first, dots, last = (part.strip() for part in text.partition(".."))
    return _forward(first, last) if dots else _end(first)


def _interval(text: str) -> Days | None:
    """Days from one date to another; where a date has slashes too, blanks tell which is which."""
    slash = " / " if " / " in text else "/"
    parts = text.split(slash)
    return _forward(*(part.strip() for part in parts)) if len(parts) == 2 else None


def _forward(first: str, last: str) -> Days | None:
    """From the first day of one date to the last of another; one end may be open."""
    open_start, open_end = (end in ("", "..") for end in (first, last))
    start, end = _end(first), _end(last)
    if (open_start and open_end) or not (start or open_start) or not (end or open_end):
        return None
    days = start[0] if start else _FIRST, end[1] if end else _LAST
    return days if days[0] <= days[1] else None


def _end(text: str) -> Days | None:
    return _point(text) or _doubtful(text)


def _hull(parts: list[Days | None]) -> Days | None:
    """From the earliest to the latest day of all parts; None where one part is no date."""
    known = [part for part in parts if part is not None]
    if len(known) < len(parts):
        return None
    return min(first for first, _last in known), max(last for _first, last in known)


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
