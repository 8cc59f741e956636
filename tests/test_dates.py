"""Dates as keepers write them, and ages."""

from __future__ import annotations

import calendar
import datetime

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.dates import Age, completed, iso, parse_age, parse_date

days = st.dates(datetime.date(1000, 1, 1), datetime.date(9998, 12, 31))
recent = st.dates(datetime.date(1900, 1, 1), datetime.date(2100, 12, 31))


def ordinal(text: str) -> int:
    """The ordinal of an ISO day."""
    return datetime.date.fromisoformat(text).toordinal()


@pytest.mark.parametrize(
    ("text", "earliest", "latest"),
    [
        ("2019-05-31", "2019-05-31", "2019-05-31"),
        ("2019-5-3", "2019-05-03", "2019-05-03"),
        ("2019-05", "2019-05-01", "2019-05-31"),
        ("2019-02", "2019-02-01", "2019-02-28"),
        ("2020-02", "2020-02-01", "2020-02-29"),
        ("2019-12", "2019-12-01", "2019-12-31"),
        ("2019", "2019-01-01", "2019-12-31"),
        (" 2019 ", "2019-01-01", "2019-12-31"),
        ("2019-05-31T00:00:00", "2019-05-31", "2019-05-31"),
        ("2019-05-31 00:00:00", "2019-05-31", "2019-05-31"),
        ("2019-05-31 00:00", "2019-05-31", "2019-05-31"),
    ],
)
def test_iso_dates(text, earliest, latest):
    """A day, a month or a year is read as its first to its last possible day, and as certain."""
    found = parse_date(text)
    assert (found.earliest, found.latest) == (ordinal(earliest), ordinal(latest))
    assert not found.approximate
    assert found.text == text


@pytest.mark.parametrize(
    ("text", "earliest", "latest"),
    [
        ("2019?", "2019-01-01", "2019-12-31"),
        ("2019~", "2019-01-01", "2019-12-31"),
        ("2019%", "2019-01-01", "2019-12-31"),
        ("~2019", "2019-01-01", "2019-12-31"),
        ("~ 2019", "2019-01-01", "2019-12-31"),
        ("2019-05?", "2019-05-01", "2019-05-31"),
        ("~2019-05", "2019-05-01", "2019-05-31"),
        ("2019-05-31?", "2019-05-31", "2019-05-31"),
    ],
)
def test_qualified_dates(text, earliest, latest):
    """A date marked as uncertain or approximate keeps its days and says that it is."""
    found = parse_date(text)
    assert (found.earliest, found.latest) == (ordinal(earliest), ordinal(latest))
    assert found.approximate


@pytest.mark.parametrize(
    ("text", "earliest", "latest"),
    [
        ("[2018..2020]", "2018-01-01", "2020-12-31"),
        ("[ 2018 .. 2020 ]", "2018-01-01", "2020-12-31"),
        ("[2018-05..2020-02]", "2018-05-01", "2020-02-29"),
        ("[2018-05-31..2018-06-02]", "2018-05-31", "2018-06-02"),
        ("[2018..2018]", "2018-01-01", "2018-12-31"),
        ("2018/2020", "2018-01-01", "2020-12-31"),
        ("2018-05-31/2018-06-02", "2018-05-31", "2018-06-02"),
        ("2018~/2020?", "2018-01-01", "2020-12-31"),
    ],
)
def test_intervals(text, earliest, latest):
    """A set or an interval runs from the first day of its start to the last of its end."""
    found = parse_date(text)
    assert (found.earliest, found.latest) == (ordinal(earliest), ordinal(latest))
    assert found.approximate


@pytest.mark.parametrize("text", ["../2019", "/2019", "[..2019]"])
def test_intervals_without_a_start(text):
    """An interval without a start may begin on any day up to its end."""
    found = parse_date(text)
    assert found.earliest == datetime.date.min.toordinal()
    assert found.latest == ordinal("2019-12-31")


@pytest.mark.parametrize("text", ["2019/..", "2019/", "[2019..]"])
def test_intervals_without_an_end(text):
    """An interval without an end may end on any day from its start."""
    found = parse_date(text)
    assert found.earliest == ordinal("2019-01-01")
    assert found.latest == datetime.date.max.toordinal()


@pytest.mark.parametrize(
    "text",
    [
        "",
        "?",
        "~",
        "spring",
        "31.05.2019",
        "31/05/2019",
        "05/31/2019",
        "2019/05/31",
        "05/2019",
        "19",
        "19-05-31",
        "20190531",
        "2019-13",
        "2019-00",
        "2019-05-00",
        "2019-00-00",
        "2019-00-10",
        "2019-02-30",
        "2019-02-29",
        "2019-05-32",
        "2019-05-",
        "2019-",
        "0000",
        "../..",
        "/",
        "[..]",
        "[2020..2018]",
        "2020/2018",
        "2019-05-31/2019-05-30",
        "2018..2020",
        "[2018,2020]",
        "2019/spring",
        "2019-05-31 14:30",
        "43616",
    ],
)
def test_other_forms_are_not_guessed(text):
    """What is not in a known form, or names no day, is not read as a date."""
    assert parse_date(text) is None


@given(day=days)
def test_every_day_is_read_back(day):
    """Any day in ISO form is read as that day, and written again the same."""
    found = parse_date(day.isoformat())
    assert (found.earliest, found.latest) == (day.toordinal(), day.toordinal())
    assert found.exact
    assert found.year == day.year
    assert found.midpoint == day.toordinal()
    assert iso(found.earliest) == day.isoformat()


@given(day=days)
def test_reduced_precision_contains_the_day(day):
    """The month and the year of a day contain it and are as long as the calendar says."""
    month, year = parse_date(f"{day:%Y-%m}"), parse_date(f"{day:%Y}")
    assert year.earliest <= month.earliest <= day.toordinal() <= month.latest <= year.latest
    assert month.latest - month.earliest + 1 == calendar.monthrange(day.year, day.month)[1]
    assert year.latest - year.earliest + 1 == 365 + calendar.isleap(day.year)
    assert month.year == year.year == day.year
    assert not year.exact


@given(first=days, second=days)
def test_intervals_run_forward(first, second):
    """An interval is read when its ends are in order, and only then."""
    found = parse_date(f"{first.isoformat()}/{second.isoformat()}")
    same = parse_date(f"[{first.isoformat()}..{second.isoformat()}]")
    if first > second:
        assert found is None
        assert same is None
    else:
        assert (found.earliest, found.latest) == (first.toordinal(), second.toordinal())
        assert (same.earliest, same.latest) == (found.earliest, found.latest)
        assert found.midpoint == (first.toordinal() + second.toordinal()) / 2
        assert found.year == second.year


@given(text=st.text(max_size=20))
def test_no_text_breaks_the_reading_of_dates(text):
    """Any text is read as a date or not, and never raises an error."""
    found = parse_date(text)
    assert found is None or found.earliest <= found.latest


@pytest.mark.parametrize(
    ("value", "count", "unit", "shown"),
    [
        (2, 2.0, "years", "2 years"),
        (1.5, 1.5, "years", "1.5 years"),
        (0, 0.0, "years", "0 years"),
        ("8 weeks", 8.0, "weeks", "8 weeks"),
        ("18 months", 18.0, "months", "18 months"),
        ("1 year", 1.0, "years", "1 year"),
        ("90days", 90.0, "days", "90 days"),
        (" 2.5 Years ", 2.5, "years", "2.5 years"),
        ("1 Month", 1.0, "months", "1 month"),
    ],
)
def test_ages(value, count, unit, shown):
    """An age is a number of years, or a number with its unit, and is shown with it."""
    found = parse_age(value)
    assert found == Age(count, unit)
    assert str(found) == shown


@pytest.mark.parametrize("value", [-1, True, False, None, "", "2", "old", "-3 weeks", "2 y", [2]])
def test_other_values_are_no_ages(value):
    """A negative number, a truth value or any other text is no age."""
    assert parse_age(value) is None


@pytest.mark.parametrize(
    ("born", "on", "unit", "expected"),
    [
        ("2018-06-15", "2020-06-14", "months", 23),
        ("2018-06-15", "2020-06-15", "months", 24),
        ("2018-06-15", "2020-06-15", "years", 2),
        ("2018-06-15", "2019-12-15", "years", 1.5),
        ("2018-06-15", "2018-06-15", "years", 0),
        ("2020-02-29", "2021-02-28", "months", 11),
        ("2020-02-29", "2021-03-01", "years", 1),
        ("2020-01-31", "2020-02-29", "months", 0),
        ("2020-01-31", "2020-03-01", "months", 1),
        ("2020-01-01", "2020-02-26", "weeks", 8),
        ("2020-01-01", "2020-01-31", "days", 30),
    ],
)
def test_completed_units_of_life(born, on, unit, expected):
    """Ages are counted by the calendar, so that a birthday completes a year."""
    assert completed(ordinal(born), ordinal(on), unit) == expected


@given(born=recent, years=st.integers(0, 40))
def test_a_birthday_completes_the_year(born, years):
    """On the birthday the years are complete, and on the day before they are not."""
    if (born.month, born.day) == (2, 29):
        born = born.replace(day=28)
    birthday = born.replace(year=born.year + years).toordinal()
    assert completed(born.toordinal(), birthday, "years") == years
    assert completed(born.toordinal(), birthday, "months") == 12 * years
    assert completed(born.toordinal(), birthday - 1, "years") < years


@given(born=recent, first=st.integers(0, 20_000), second=st.integers(0, 20_000))
def test_age_never_falls(born, first, second):
    """An animal is never younger on a later day, in any unit."""
    start = born.toordinal()
    earlier, later = sorted((start + first, start + second))
    for unit in ("years", "months", "weeks", "days"):
        assert completed(start, earlier, unit) <= completed(start, later, unit)
    assert completed(start, later, "days") == later - start
