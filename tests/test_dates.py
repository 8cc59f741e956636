"""Dates as keepers write them, and ages."""

from __future__ import annotations

import calendar
import datetime
import re
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.dates import EXPECTED, LONGEST, Age, completed, iso, parse_age, parse_date

days = st.dates(datetime.date(1000, 1, 1), datetime.date(2999, 12, 31))
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
    ("text", "earliest", "latest"),
    [
        ("2019/05/31", "2019-05-31", "2019-05-31"),
        ("2019/5/3", "2019-05-03", "2019-05-03"),
        ("2019.05.31", "2019-05-31", "2019-05-31"),
        ("2019. 5. 31.", "2019-05-31", "2019-05-31"),
        ("20190531", "2019-05-31", "2019-05-31"),
        ("20200229", "2020-02-29", "2020-02-29"),
        ("2019\u201105\u201131", "2019-05-31", "2019-05-31"),
        ("2019.0", "2019-01-01", "2019-12-31"),
        ("05/2019", "2019-05-01", "2019-05-31"),
        ("5.2019", "2019-05-01", "2019-05-31"),
        ("12-2019", "2019-12-01", "2019-12-31"),
        ("2019-W22", "2019-05-27", "2019-06-02"),
        ("2019W22", "2019-05-27", "2019-06-02"),
        ("2019-W22-5", "2019-05-31", "2019-05-31"),
        ("2019-W01", "2018-12-31", "2019-01-06"),
        ("1970s", "1970-01-01", "1979-12-31"),
        ("the 1970's", "1970-01-01", "1979-12-31"),
        ("1900s", "1900-01-01", "1999-12-31"),
        ("1000", "1000-01-01", "1000-12-31"),
        ("2999", "2999-01-01", "2999-12-31"),
    ],
)
def test_other_written_numbers(text, earliest, latest):
    """Forms in numbers that can be read in one way only are read, and as certain."""
    found = parse_date(text)
    assert (found.earliest, found.latest) == (ordinal(earliest), ordinal(latest))
    assert not found.approximate
    assert found.text == text


@pytest.mark.parametrize(
    "text",
    [
        "May 29 1978",
        "May 29 1978 ",
        " May  29   1978",
        "may 29 1978",
        "MAY 29 1978",
        "May 29, 1978",
        "May 29,1978",
        "May. 29, 1978",
        "May 29th 1978",
        "May 29th, 1978",
        "May the 29th, 1978",
        "May-29-1978",
        "May/29/1978",
        "May.29.1978",
        "29 May 1978",
        "29 May, 1978",
        "29. May 1978",
        "29-May-1978",
        "29-MAY-1978",
        "29\u2013May\u20131978",
        "29.May.1978",
        "29/May/1978",
        "29May1978",
        "29th May 1978",
        "29th of May 1978",
        "29th of May, 1978",
        "the 29th of May 1978",
        "29 of May 1978",
        "1978 May 29",
        "1978-May-29",
        "1978/May/29",
        "1978, May 29th",
    ],
)
def test_days_with_the_name_of_a_month(text):
    """A day with the English name of its month is read in every usual order and punctuation."""
    found = parse_date(text)
    assert (iso(found.earliest), iso(found.latest)) == ("1978-05-29", "1978-05-29")
    assert not found.approximate


@pytest.mark.parametrize(
    ("text", "earliest", "latest"),
    [
        ("May 1978", "1978-05-01", "1978-05-31"),
        ("May, 1978", "1978-05-01", "1978-05-31"),
        ("May of 1978", "1978-05-01", "1978-05-31"),
        ("May-1978", "1978-05-01", "1978-05-31"),
        ("May/1978", "1978-05-01", "1978-05-31"),
        ("1978 May", "1978-05-01", "1978-05-31"),
        ("1978-May", "1978-05-01", "1978-05-31"),
        ("Sept 2019", "2019-09-01", "2019-09-30"),
        ("Sept. 2019", "2019-09-01", "2019-09-30"),
        ("2019 Sep.", "2019-09-01", "2019-09-30"),
        ("february 2020", "2020-02-01", "2020-02-29"),
    ],
)
def test_months_by_name(text, earliest, latest):
    """A month by its name is its first to its last day, never one day."""
    found = parse_date(text)
    assert (iso(found.earliest), iso(found.latest)) == (earliest, latest)
    assert not found.approximate


@pytest.mark.parametrize("number", range(1, 13))
@pytest.mark.parametrize("length", [3, 4, 9])
def test_names_of_months(number, length):
    """Every month is known by its full name and by its first three or four letters."""
    name = calendar.month_name[number][:length]
    for word in (name, name.upper(), name.lower()):
        assert iso(parse_date(f"7 {word} 2019").earliest) == f"2019-{number:02d}-07"
        assert parse_date(f"{word} 2019") == replace(
            parse_date(f"2019-{number:02d}"), text=f"{word} 2019"
        )


@pytest.mark.parametrize(
    "time",
    [
        "T00:00:00",
        "T14:30",
        " 14:30",
        " 9:05",
        " 14:30:59",
        " 23:59:60",
        " 24:00",
        "T14:30:59.123456",
        "T14:30:59,5",
        "T14:30:59Z",
        " 14:30:59 UTC",
        "T14:30+02:00",
        "T23:30:00-0800",
        " 14:30:59.123+02",
        " 2:30 PM",
        " 12:00AM",
        "T143059",
        "T1430Z",
    ],
)
@pytest.mark.parametrize("day", ["2019-05-31", "2019/05/31", "20190531", "May 31 2019"])
def test_the_time_of_day_is_dropped(day, time):
    """A time of day after a day, with or without a zone, leaves the day as written."""
    found = parse_date(day + time)
    assert (iso(found.earliest), iso(found.latest)) == ("2019-05-31", "2019-05-31")
    assert not found.approximate


@pytest.mark.parametrize(
    ("text", "earliest", "latest"),
    [
        ("201X", "2010-01-01", "2019-12-31"),
        ("201x", "2010-01-01", "2019-12-31"),
        ("20XX", "2000-01-01", "2099-12-31"),
        ("201X-XX", "2010-01-01", "2019-12-31"),
        ("2004-XX", "2004-01-01", "2004-12-31"),
        ("2004-XX-XX", "2004-01-01", "2004-12-31"),
        ("2004-06-XX", "2004-06-01", "2004-06-30"),
        ("2004-1X", "2004-10-01", "2004-12-31"),
        ("2004-0X", "2004-01-01", "2004-09-30"),
        ("2004-06-1X", "2004-06-10", "2004-06-19"),
        ("2004-02-2X", "2004-02-20", "2004-02-29"),
        ("2004-06-3X", "2004-06-30", "2004-06-30"),
        ("20XX-02-29", "2000-02-29", "2096-02-29"),
        ("2004-XX-31", "2004-01-31", "2004-12-31"),
        ("2004-??-??", "2004-01-01", "2004-12-31"),
        ("2004-06-??", "2004-06-01", "2004-06-30"),
        ("19??", "1900-01-01", "1999-12-31"),
    ],
)
def test_unspecified_digits(text, earliest, latest):
    """Digits given as X may be any that make a day: the interval holds all of those."""
    found = parse_date(text)
    assert (iso(found.earliest), iso(found.latest)) == (earliest, latest)


@pytest.mark.parametrize(
    ("text", "bare"),
    [
        (form.format(date), date)
        for form in (
            "{}?",
            "{} ?",
            "{}~",
            "{}%",
            "{} (?)",
            "~{}",
            "?{}",
            "c. {}",
            "c {}",
            "ca {}",
            "ca. {}",
            "circa {}",
            "Circa {}",
            "about {}",
            "abt. {}",
            "around {}",
            "approx. {}",
            "approximately {}",
            "est. {}",
            "probably {}",
        )
        for date in ("2019", "2019-05", "2019-05-31", "May 2019", "31 May 2019", "2019/05/31")
    ]
    + [("c2019", "2019"), ("ca2019", "2019"), ("2019?-05-31", "2019-05-31")]
    + [("2019-05~-31", "2019-05-31"), ("2019-?05", "2019-05"), ("May? 2019", "May 2019")],
)
def test_marks_and_words_of_doubt(text, bare):
    """A mark or a word of doubt leaves the days of the date and makes it approximate."""
    assert parse_date(text) == replace(parse_date(bare), text=text, approximate=True)


@pytest.mark.parametrize(
    ("text", "whole"),
    [
        (f"{part}{link}{date}", date)
        for part in ("early", "mid", "late", "beginning of", "middle of", "end of")
        for link in (" ", "-" if part == "mid" else "  ")
        for date in ("2019", "May 2019")
    ],
)
def test_part_of_a_year_is_the_whole_of_it(text, whole):
    """Early, mid and late claim no more than the year or the month that they belong to."""
    assert parse_date(text) == replace(parse_date(whole), text=text, approximate=True)


@pytest.mark.parametrize(
    ("text", "latest"),
    [
        ("before 2019", "2018-12-31"),
        ("Before 2019", "2018-12-31"),
        ("bef. 2019", "2018-12-31"),
        ("prior to 2019", "2018-12-31"),
        ("<2019", "2018-12-31"),
        ("< 2019-05", "2019-04-30"),
        ("before 31 May 2019", "2019-05-30"),
        ("before c. 2019", "2019-12-31"),
        ("before late 2019", "2019-12-31"),
        ("<=2019", "2019-12-31"),
        ("\u2264 2019", "2019-12-31"),
        ("until May 2019", "2019-05-31"),
        ("not after 2019-05-31", "2019-05-31"),
    ],
)
def test_limits_above(text, latest):
    """A date said to lie before another, or at the latest on it, has no first day."""
    found = parse_date(text)
    assert found.earliest == datetime.date.min.toordinal()
    assert iso(found.latest) == latest
    assert found.approximate


@pytest.mark.parametrize(
    ("text", "earliest"),
    [
        ("after 2019", "2020-01-01"),
        ("aft. 2019", "2020-01-01"),
        (">2019", "2020-01-01"),
        ("> May 2019", "2019-06-01"),
        ("later than 2019-05-31", "2019-06-01"),
        ("after early 2019", "2019-01-01"),
        ("after 2019?", "2019-01-01"),
        (">=2019", "2019-01-01"),
        ("\u2265 2019", "2019-01-01"),
        ("since May 2019", "2019-05-01"),
        ("not before 2019", "2019-01-01"),
    ],
)
def test_limits_below(text, earliest):
    """A date said to lie after another, or at the earliest on it, has no last day."""
    found = parse_date(text)
    assert iso(found.earliest) == earliest
    assert found.latest == datetime.date.max.toordinal()
    assert found.approximate


@pytest.mark.parametrize(
    ("text", "earliest", "latest"),
    [
        ("[2017,2019]", "2017-01-01", "2019-12-31"),
        ("[2019, 2017]", "2017-01-01", "2019-12-31"),
        ("[2017, 2019-05]", "2017-01-01", "2019-05-31"),
        ("[2015,2017..2019]", "2015-01-01", "2019-12-31"),
        ("[2019]", "2019-01-01", "2019-12-31"),
        ("[May 2018..June 2019]", "2018-05-01", "2019-06-30"),
        ("2018 or 2020", "2018-01-01", "2020-12-31"),
        ("either May 2020 or June 2018", "2018-06-01", "2020-05-31"),
        ("between 2018 and 2020", "2018-01-01", "2020-12-31"),
        ("Between 3 May 2018 and 4 June 2018", "2018-05-03", "2018-06-04"),
        ("May 1978/June 1979", "1978-05-01", "1979-06-30"),
        ("2018 / 2020", "2018-01-01", "2020-12-31"),
        ("2018/05/31 / 2019/06/02", "2018-05-31", "2019-06-02"),
        ("05/2018 / 06/2019", "2018-05-01", "2019-06-30"),
        ("c. 2018/2020", "2018-01-01", "2020-12-31"),
        ("201X/2020", "2010-01-01", "2020-12-31"),
    ],
)
def test_sets_and_alternatives(text, earliest, latest):
    """Several dates, or one between two, become the interval that holds all of them."""
    found = parse_date(text)
    assert (iso(found.earliest), iso(found.latest)) == (earliest, latest)
    assert found.approximate


def test_an_interval_with_one_open_end_keeps_its_month():
    """An interval open at one end runs from the first day of its month."""
    assert iso(parse_date("1985-04/..").earliest) == "1985-04-01"
    assert iso(parse_date("[2015,2018-05..]").earliest) == "2015-01-01"
    assert parse_date("[2015,2018-05..]").latest == datetime.date.max.toordinal()


@pytest.mark.parametrize(
    "text",
    """
    |?|??|~|spring|now|31.05.2019|31/05/2019|05/31/2019|05-05-2019|19|70s|19-05-31|31/05/19
    |43616|43616.0|2019-13|2019-00|2019-05-00|2019-00-00|2019-00-10|2019-02-30|2019-02-29
    |2019-05-32|2019-05-|2019-|0000|0999|3000|9999|0019-05-31|3019-05-31|12019|019|201
    |2019/05|2019.05|2019/20|2018/19|2019/05-31|2019-05/31|2019.5|2019.00|13/2019|0/2019
    |2019/13/01|2019/05/31/2019/06/02|20191301|20190229|31052019|2019053|201905
    |../..|/|[..]|[]|[2020..2018]|2020/2018|2019-05-31/2019-05-30|2018..2020|2018-2020
    |2018 - 2020|2018 to 2020|2018/2019/2020|2018 / 2019 / 2020
    |2018/2019 / 2020|[2018,]|[2018,x]|[2018..2019..2020]|{2018,2020}|2019/spring
    |2019-05-31 25:00|2019-05-31 14:60|2019-05 14:30|2019 14:30|14:30|2019-05-31T
    |2019-05-31 14:30 14:30|summer 2019|2019 spring|2019-21|2019-24|2019-151|2019-W00
    |2019-W53|2019-W54|2019-W22-8|2020-W|1975s|1970 s|s|X|XXXX|XX19|1XXX|2X19|2004-XX-3
    |2004-13-XX|2004-02-3X|2004-04-4X|200X-02-30|2019-1?|2019-05-3?|3? May 2019|201?|20?9
    |2019-?5|20%19|2019 2020|about|c.|early|before|before spring|<|after 2019 2020|about about 2019
    |before after 2019|between 2020 and 2018|between 2018|2018 or|or 2018|May or June 2019
    |May|May 29|29 May|May-19|29 May 78|May 1978 29|29 1978 May|May 32 1978|30 Feb 2019|0 May 2019
    |Mai 1978|Maya 1978|Ju 1978|Mayo 29 1978|May 291978|291978 May|29 May 19780|Monday 29 May 1978
    |29 May 1978 BC|2019-05-31 died|x2019|2019a|+2019|-2019|2019-05-31-02
    |1e3|\u0662\u0660\u0661\u0669
    """.replace("\n", "").split("|"),
)
def test_other_forms_are_not_guessed(text):
    """What is not in a known form, may mean two things or names no day is not read as a date."""
    assert parse_date(text.strip()) is None


def test_a_text_beyond_all_dates_is_not_looked_at():
    """A very long text is no date, even where it would be one if it were shorter."""
    long_set = "[" + ",".join(["2019"] * LONGEST) + "]"
    assert parse_date(long_set) is None
    assert parse_date(long_set[:10] + "]") is not None


def test_what_is_expected_is_read():
    """Every example in the sentence about what is expected is read as a date."""
    examples = re.findall(r"as (.+?)(?: or (?!a )|,| or a|$)", EXPECTED)
    assert examples == ["2019-05-31", "2019-05", "2019"]
    assert "31 May 2019" in EXPECTED
    assert None not in [parse_date(example) for example in [*examples, "31 May 2019"]]


WAYS_TO_WRITE_A_DAY = {
    "ISO": "{0:%Y-%m-%d}",
    "slashes": "{0:%Y}/{0.month}/{0.day}",
    "dots": "{0:%Y.%m.%d}",
    "basic": "{0:%Y%m%d}",
    "with time": "{0:%Y-%m-%d} 07:15:00",
    "month first": "{0:%B} {0.day}, {0:%Y}",
    "short month first": "{0:%b} {0.day} {0:%Y} ",
    "day first": "{0.day} {0:%B} {0:%Y}",
    "hyphens": "{0:%d-%b-%Y}",
    "joined": "{0:%d%b%Y}",
    "ordinal": "{0.day}th of {0:%B} {0:%Y}",
    "year first": "{0:%Y} {0:%b} {0.day}",
}
WAYS_TO_WRITE_A_MONTH = ("{0:%Y-%m}", "{0:%m/%Y}", "{0:%B} {0:%Y}", "{0:%Y} {0:%b}", "{0:%Y-%m}-XX")
WAYS_TO_WRITE_A_YEAR = ("{0:%Y}", "{0:%Y}-XX", "{0:%Y}-XX-XX")
WAYS_TO_DOUBT = ("{}", "{}?", "~{}", "c. {}", "[{}]", "early {}", "<={}", ">={}", "{0} / {0}")


@given(day=days, way=st.sampled_from(list(WAYS_TO_WRITE_A_DAY)))
def test_every_form_reads_back_to_the_day(day, way):
    """A day in any of the forms is read as that day and no other."""
    text = WAYS_TO_WRITE_A_DAY[way].format(day)
    found = parse_date(text)
    assert (found.earliest, found.latest) == (day.toordinal(), day.toordinal())
    assert found.text == text
    assert not found.approximate


@given(day=days)
def test_every_week_reads_back(day):
    """The ISO week of a day is seven days that hold it."""
    year, week, weekday = day.isocalendar()
    if not 1000 <= year <= 2999:
        return
    found = parse_date(f"{year:04d}-W{week:02d}")
    assert found.latest - found.earliest == 6
    assert found.earliest + weekday - 1 == day.toordinal()
    assert parse_date(f"{year:04d}-W{week:02d}-{weekday}").earliest == day.toordinal()


@given(day=days, doubt=st.sampled_from(WAYS_TO_DOUBT), data=st.data())
def test_no_form_claims_more_than_it_says(day, doubt, data):
    """The month or the year of a day holds all its days, in whatever way it is written."""
    precision, ways = data.draw(
        st.sampled_from([("%Y-%m", WAYS_TO_WRITE_A_MONTH), ("%Y", WAYS_TO_WRITE_A_YEAR)])
    )
    text = doubt.format(data.draw(st.sampled_from(ways)).format(day))
    whole, found = parse_date(f"{day:{precision}}"), parse_date(text)
    assert found is not None
    assert found.earliest <= whole.earliest <= day.toordinal() <= whole.latest <= found.latest


@given(day=days, hidden=st.sets(st.sampled_from([3, 6, 9, 5, 8, 2])))
def test_hidden_digits_hold_the_day(day, hidden):
    """A day of which last digits are given as X lies within what is read, unless unread."""
    text = "".join("X" if place in hidden else sign for place, sign in enumerate(day.isoformat()))
    found = parse_date(text)
    if found is not None:
        assert found.earliest <= day.toordinal() <= found.latest
        assert found.exact is False or day.toordinal() == found.earliest
    well_formed = all(last in hidden for first, last in ((2, 3), (5, 6), (8, 9)) if first in hidden)
    assert (found is not None) == well_formed


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


signs = st.sampled_from([*"0123456789-/.,?~%[]<>TWXs ", "May", "or", "..", "before", "c."])


@given(text=st.text(max_size=20) | st.lists(signs, max_size=12).map("".join))
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
