"""Dates of a whole column, which settles what one cell cannot: 03/04/2019, 31/05/19, 43616.

Nothing is guessed for a single cell. What the column does not settle becomes an interval that
covers every reading, so that no check can fire wrongly, and is reported. All rules look at the
distinct words of a column, whatever their order.
"""

from __future__ import annotations

import calendar
import datetime
import re
from collections import Counter
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from pairing.dates import (
    FIRST_YEAR,
    GAP_PATTERN,
    LAST_YEAR,
    LONGEST,
    MONTH_PATTERN,
    MONTHS,
    ORDINAL_PATTERN,
    DateRange,
    iso,
    parse_date,
    plain_date_text,
)
from pairing.records.fields import MISSING_PARENT

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

NO_DATE = MISSING_PARENT | {
    *("-", "--", "??", "0", "n/a", "#n/a", "nan", "nat", "nil", "none", "unk.", "undated"),
    *("not known", "not recorded", "no date", "0000-00-00", "00/00/0000"),
}
"""Words that say a date is not known, folded; the zeros are those of databases and spreadsheets
(common practice, no source)."""

DAY_FIRST, MONTH_FIRST, YEAR_FIRST = ORDERS = ("day-first", "month-first", "year-first")
SETTLING_SHARE = (19, 20)
"""At least 95 % of the words that can be read in one order only settle the order of the others;
the project's own choice."""
SHORT_YEARS_FROM = 1930
"""A year of two digits is the one of this and the following 99 years, see `read_date_column`."""
SERIALS = range(20_000, 60_001)
"""A spreadsheet's numbers of days taken as dates: 1954-10-03 to 2064-04-08."""
SERIAL_START = datetime.date(1899, 12, 30).toordinal()
"""Day 0 of spreadsheets for days after February 1900 (common practice, no source)."""
_ANY_ORDER = ""
_SHOWN = 60
_MONTHS_IN_A_YEAR = 12

Read = tuple[DateRange | None, tuple[str, str] | None]

_NUMERIC = re.compile(
    r"(?<!\d)(?<!\d[/.-])(\d{1,2}) ?([/.-]) ?(\d{1,2}) ?\2 ?(\d{4}|'?\d\d)(?!\d)(?![/.-]\d)",
    re.ASCII,
)
_SHORT_NAMED = re.compile(
    rf"(?<!\d)(\d{{1,2}}{ORDINAL_PATTERN}{GAP_PATTERN}(?:of )?{MONTH_PATTERN}{GAP_PATTERN}"
    rf"|{MONTH_PATTERN}{GAP_PATTERN}\d{{1,2}}{ORDINAL_PATTERN}[ ,./-]{{1,3}}"
    rf"|{MONTH_PATTERN}{GAP_PATTERN}(?='|3[2-9]|[4-9]\d))'?(\d\d)(?![\d:])",
    re.ASCII | re.IGNORECASE,
)
_SERIAL = re.compile(r"(\d{5})(?:\.\d+)?", re.ASCII)


@dataclass(frozen=True, slots=True)
class DateReading:
    """The dates of a column.

    Attributes
    ----------
    dates
        For each distinct word, None where it is unknown or cannot be read.
    order
        ``day-first``, ``month-first`` or (only among years of two digits) ``year-first``; None
        where no word needed it, ``ambiguous`` where nothing settles it.
    problems
        By place among the words: the kind of finding, and a sentence for the keeper on what was
        found and how it is treated.
    said
        For the summary in one line, such as ``born day-first (31/05/2019)``; may be blank.
    """

    dates: tuple[DateRange | None, ...]
    order: str | None
    problems: Mapping[int, tuple[str, str]]
    said: str


@dataclass(frozen=True, slots=True)
class _Written:
    """What a word may mean by itself: its reading in each order that works; empty when none."""

    readings: Mapping[str, DateRange]
    short_year: bool = False

    @property
    def tells(self) -> str | None:
        """The order, for a word that can be read in one order only."""
        return next(iter(self.readings)) if len(self.readings) == 1 else None


@dataclass(frozen=True, slots=True)
class _Column:
    """What settles the words of a column: its name, a given order, the words that tell theirs."""

    field: str
    given: str | None
    telling: Mapping[str, int]

    def order_among(self, orders: Iterable[str]) -> str | None:
        """The order that is settled among some, or None."""
        candidates = list(orders)
        if self.given in candidates:
            return self.given
        counts = {order: self.telling.get(order, 0) for order in candidates}
        likeliest = max(counts, key=lambda order: counts[order])
        share, whole = SETTLING_SHARE
        total = sum(counts.values())
        return likeliest if total and counts[likeliest] * whole >= total * share else None

    def rivals(self, order: str) -> list[str]:
        """Orders that other words tell and that this one is at odds with.

        A year of two digits that stands first is at odds with both others, and they not with it:
        they may be dates with full years, which cannot be written so.
        """
        return [
            each
            for each in (DAY_FIRST, MONTH_FIRST)
            if each != order and order != _ANY_ORDER and self.telling.get(each)
        ]

    def contradicts(self, order: str) -> bool:
        """Whether a word that tells this order goes against most others, or against as many."""
        if self.given is not None:
            return order not in (self.given, _ANY_ORDER)
        against = sum(self.telling[each] for each in self.rivals(order))
        return 0 < self.telling.get(order, 0) <= against


def read_date_column(words: Sequence[str], *, field: str, order: str | None = None) -> DateReading:
    """Read the distinct words of a column of dates, each in the light of all.

    *Day and month.* ``31/05/2019``, ``5.31.2019`` and the like (also with a qualifier, a limit or
    a time of day, see `pairing.dates`) are read in the order that the words settle which work in
    one order only. Where these disagree by more than one in twenty, or there are none, a word
    that works both ways becomes the interval between its readings.

    *Years of two digits* are read as 1930 to 2029 and every one is reported. An interval over
    both centuries would switch off all checks and put ages in the middle of nowhere, and a
    window that moved with the calendar would change old records; few animals in a managed
    programme were recorded before 1930, and spreadsheets draw the line at the same year (common
    practice, no source). With hyphens the year may stand first (``78-05-31``); that is settled,
    or left open, like the order of day and month.

    *Spreadsheet's day numbers* (``43616``) are read and reported where at least half of the other
    words are days, or there are no other words; among bare years such a number is rather a slip.
    The other calendar of some spreadsheets, counted from 1904, is not guessed.

    Parameters
    ----------
    words
        Distinct cells: NFKC, trimmed, single blanks.
    field
        The field, for the sentences.
    order
        ``day-first`` or ``month-first`` where the programme has settled it.
    """
    written = [_written(word) for word in words]
    telling = Counter(each.tells for each in written if each.tells)
    column = _Column(field, order, {name: telling[name] for name in ORDERS})
    serials = _serials(words, written)
    read = [
        _serial(word, field) if place in serials else _settled(word, each, column)
        for place, (word, each) in enumerate(zip(words, written, strict=True))
    ]
    problems = {place: problem for place, (_date, problem) in enumerate(read) if problem}
    settled, said = _order_and_summary(words, written, column)
    if serials and not said:
        example = min(words[place] for place in serials)
        said = f"{field} with a spreadsheet's day numbers ({example})"
    return DateReading(tuple(date for date, _problem in read), settled, problems, said)


def _written(word: str) -> _Written:
    bare = plain_date_text(word)
    numbers = _NUMERIC.search(bare)
    if numbers is None:
        date = parse_date(word)
        if date is not None:
            return _Written({_ANY_ORDER: date})
        in_full = _SHORT_NAMED.sub(lambda match: f"{match[1]} {_full_year(match[2])}", bare)
        date = parse_date(in_full) if in_full != bare else None
        return _Written({} if date is None else {_ANY_ORDER: replace(date, text=word)}, True)
    short_year = len(numbers[4]) < len("2019")
    orders = ORDERS if short_year and numbers[2] == "-" else ORDERS[:2]
    readings = {
        order: DateRange(date.earliest, date.latest, word, date.approximate)
        for order in orders
        if int(numbers[_MONTH_GROUP[order]]) <= _MONTHS_IN_A_YEAR
        and (date := parse_date(_NUMERIC.sub(_ISO_FORM[order], bare))) is not None
    }
    days = {(date.earliest, date.latest) for date in readings.values()}
    if len(days) == 1 and len(readings) > 1:
        return _Written({_ANY_ORDER: next(iter(readings.values()))}, short_year)
    return _Written(readings, short_year)


def _full_year(digits: str) -> int:
    year = int(digits.lstrip("'"))
    if len(digits) == 4:
        return year
    return SHORT_YEARS_FROM + (year - SHORT_YEARS_FROM) % 100


def _day_first(match: re.Match[str]) -> str:
    return f"{_full_year(match[4])}-{match[3]:0>2}-{match[1]:0>2}"


def _month_first(match: re.Match[str]) -> str:
    return f"{_full_year(match[4])}-{match[1]:0>2}-{match[3]:0>2}"


def _year_first(match: re.Match[str]) -> str:
    if len(match[1]) == len(match[4]) == 2 and match[2] == "-":
        return f"{_full_year(match[1])}-{match[3]}-{match[4]}"
    return "!"


_MONTH_GROUP = {DAY_FIRST: 3, MONTH_FIRST: 1, YEAR_FIRST: 3}
_ISO_FORM = {DAY_FIRST: _day_first, MONTH_FIRST: _month_first, YEAR_FIRST: _year_first}


def _settled(word: str, written: _Written, column: _Column) -> Read:
    """The date of a word, and what the keeper should know of it."""
    readings = written.readings
    if not readings:
        return None, _unread(word, column.field)
    order = written.tells if written.tells is not None else column.order_among(readings)
    if order is None:
        date = _covering(readings.values(), word)
        several = " or ".join(sorted({_shown(each) for each in readings.values()}))
        return date, (
            "ambiguous-date",
            f"{_cell(word, column.field)} may be {several}; the column does not settle which.",
        )
    date = readings[order]
    if column.contradicts(order):
        return date, (
            "ambiguous-date",
            f"{_cell(word, column.field)} can only be {order}, while {_rivals(order, column)}, "
            f"and counts as {_shown(date)}.",
        )
    if written.short_year:
        return date, (
            "two-digit-year",
            f"{_cell(word, column.field)} has a year of two digits and counts as {_shown(date)}, "
            f"in the hundred years from {SHORT_YEARS_FROM}.",
        )
    return date, None


def _rivals(order: str, column: _Column) -> str:
    if column.given is not None:
        return f"the policy says {column.given}"
    rivals = column.rivals(order)
    others = sum(column.telling[each] for each in rivals)
    words = "another word" if others == 1 else f"{others} other words"
    return f"{words} of the column can only be {' or '.join(rivals)}"


def _covering(readings: Iterable[DateRange], word: str) -> DateRange:
    dates = list(readings)
    earliest, latest = min(each.earliest for each in dates), max(each.latest for each in dates)
    return DateRange(earliest, latest, word, approximate=True)


def _shown(date: DateRange) -> str:
    if date.exact:
        return iso(date.earliest)
    if date.earliest == datetime.date.min.toordinal():
        return f"any day up to {iso(date.latest)}"
    if date.latest == datetime.date.max.toordinal():
        return f"any day from {iso(date.earliest)}"
    return f"{iso(date.earliest)} to {iso(date.latest)}"


def _order_and_summary(
    words: Sequence[str], written: Sequence[_Written], column: _Column
) -> tuple[str | None, str]:
    """The order of the column, and how the one-line summary says it."""
    ordered = {
        word: each.tells
        for word, each in zip(words, written, strict=True)
        if each.tells or len(each.readings) > 1
    }
    if not ordered:
        return None, ""
    if column.given is not None:
        return column.given, f"{column.field} {column.given}, as the policy says"
    orders = ORDERS if set(ordered.values()) <= {YEAR_FIRST, None} else (DAY_FIRST, MONTH_FIRST)
    settled = column.order_among(orders)
    if settled is None:
        example = min((word for word, tells in ordered.items() if tells is None), default="")
        unsettled = f"{column.field} day-first or month-first, not settled"
        return "ambiguous", f"{unsettled} ({example})" if example else unsettled
    example = min(word for word, tells in ordered.items() if tells == settled)
    return settled, f"{column.field} {settled} ({example})"


def _serials(words: Sequence[str], written: Sequence[_Written]) -> set[int]:
    """Places of the words that are a spreadsheet's day numbers."""
    numbers, days, others = set(), 0, 0
    for place, (word, each) in enumerate(zip(words, written, strict=True)):
        match = None if each.readings else _SERIAL.fullmatch(word)
        if match and int(match[1]) in SERIALS:
            numbers.add(place)
        elif not _says_unknown(word):
            others += 1
            days += any(date.exact for date in each.readings.values())
    return numbers if 2 * days >= others else set()


def _serial(word: str, field: str) -> Read:
    day = SERIAL_START + int(word[:5])
    found = f"{_cell(word, field)} is a spreadsheet's number of a day"
    counted = f"counts as {iso(day)}, {word[:5]} days after {iso(SERIAL_START)}"
    return DateRange(day, day, word), ("serial-date", f"{found} and {counted}.")


def _cell(word: str, field: str) -> str:
    return f'{field} "{word if len(word) <= _SHOWN else word[:_SHOWN] + "…"}"'


def _says_unknown(word: str) -> bool:
    return word.casefold() in NO_DATE


def _unread(word: str, field: str) -> tuple[str, str] | None:
    if _says_unknown(word):
        return None
    hint = _hint(plain_date_text(word))
    why = f" ({hint})" if hint else ""
    return "unreadable-date", f"{_cell(word, field)} is not understood{why} and counts as unknown."


_YEAR_FIRST_NUMBERS = re.compile(r"(\d{4}) ?[-/.] ?(\d{1,2}) ?[-/.] ?(\d{1,2})\b", re.ASCII)
_NAMED_DAY = re.compile(
    rf"(?=.*?({MONTH_PATTERN}))(?=.*?(?<!\d)(\d{{4}})(?!\d)).*?(?<!\d)(\d{{1,2}})(?!\d)",
    re.ASCII | re.IGNORECASE,
)
_HINTS = tuple(
    (re.compile(pattern, re.ASCII | re.IGNORECASE), hint)
    for pattern, hint in (
        (
            r"\d{4}[/.]\d{1,2}",
            "it may be a month or a span of years; write 2019-05 for a month, 2018/2019 for a span",
        ),
        (
            r"\d{4} ?(?:-|\.\.|to) ?\d{4}",
            "write 2018/2020 for some day within these years",
        ),
        (
            r".*\b(?:spring|summer|autumn|fall|winter)\b.*|\d{4}-2[1-4]",
            "seasons differ between hemispheres; write the months, as 2019-03/2019-05",
        ),
        (
            rf"{MONTH_PATTERN}[ ,.-]*\d{{1,2}}{ORDINAL_PATTERN}|"
            rf"\d{{1,2}}{ORDINAL_PATTERN}[ ,.-]*{MONTH_PATTERN}\.?|{MONTH_PATTERN}\.?",
            "the year is not told, or not in full",
        ),
        (
            r".*(?:(?<!\d)\d\?|\?\d(?!\d)).*",
            "the question mark may stand for a digit; write 2019-05-XX where the day is not known",
        ),
        (
            r"[2-5]\d{4}(?:\.\d+)?",
            "it may be a spreadsheet's number of a day, but few other words of the column are days",
        ),
    )
)


def _hint(text: str) -> str:
    """Why a word is no date, or how to write what it may mean; blank when nobody can tell."""
    fault = ""
    if len(text) > LONGEST:
        return "it is too long"
    if match := _YEAR_FIRST_NUMBERS.match(text):
        fault = _calendar_fault(*(int(part) for part in match.groups()))
    elif match := _NUMERIC.search(text):
        lesser, greater = sorted((int(match[1]), int(match[3])))
        fault = _calendar_fault(_full_year(match[4]), lesser, greater)
        if lesser > _MONTHS_IN_A_YEAR:
            fault = f"neither {match[1]} nor {match[3]} is a month"
    elif match := _NAMED_DAY.match(text):
        fault = _calendar_fault(int(match[2]), MONTHS[match[1].lower()], int(match[3]))
    return fault or next((hint for form, hint in _HINTS if form.fullmatch(text)), "")


def _calendar_fault(year: int, month: int, day: int) -> str:
    if not FIRST_YEAR <= year <= LAST_YEAR:
        return f"years from {FIRST_YEAR} to {LAST_YEAR} are read"
    if month == 0 or day == 0:
        return f"leave out what is not known, as {year}-05 or {year}"
    if month > _MONTHS_IN_A_YEAR:
        return f"there is no month {month}"
    length = calendar.monthrange(year, month)[1]
    return f"{calendar.month_name[month]} {year} has {length} days" if day > length else ""
