"""Dates of a whole column: order of day and month, short years, spreadsheets' day numbers."""

from __future__ import annotations

import csv
import datetime
from itertools import permutations
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.dates import iso
from pairing.records.date_columns import NO_DATE, DateReading, read_date_column
from pairing.records.fields import MISSING_PARENT

DATA = Path(__file__).parents[2] / "shared" / "data"
SETTLES = 'date_order = "day-first" or "month-first" under [records] in the policy'
KINDS = {"unreadable-date", "ambiguous-date", "two-digit-year", "serial-date"}

days = st.dates(datetime.date(1000, 1, 1), datetime.date(2999, 12, 31))
short_days = st.dates(datetime.date(1930, 1, 1), datetime.date(2029, 12, 31))
separators = st.sampled_from(["/", ".", "-", " / ", ". "])


def read(*words: str, order: str | None = None) -> DateReading:
    """The column `born` with these words."""
    return read_date_column(words, field="born", order=order)


def shown(reading: DateReading) -> list[str | None]:
    """Each date as its day, or as its first and last day."""
    return [
        None
        if date is None
        else iso(date.earliest)
        if date.exact
        else f"{iso(date.earliest)}..{iso(date.latest)}"
        for date in reading.dates
    ]


def kinds(reading: DateReading) -> dict[int, str]:
    """The kind of each problem by the place of its word."""
    return {place: kind for place, (kind, _sentence) in reading.problems.items()}


@pytest.mark.parametrize(
    ("words", "dates", "order", "said"),
    [
        (
            ["31/05/2019", "03/04/2019"],
            ["2019-05-31", "2019-04-03"],
            "day-first",
            "born day-first (31/05/2019)",
        ),
        (
            ["5.31.2019", "3.4.2019"],
            ["2019-05-31", "2019-03-04"],
            "month-first",
            "born month-first (5.31.2019)",
        ),
        (
            ["31-5-2019", "3-4-2019"],
            ["2019-05-31", "2019-04-03"],
            "day-first",
            "born day-first (31-5-2019)",
        ),
        (
            ["31. 5. 2019", "3 / 4 / 2019"],
            ["2019-05-31", "2019-04-03"],
            "day-first",
            "born day-first (31. 5. 2019)",
        ),
        (
            ["05/31/2019 00:00", "03/04/2019 14:30:00"],
            ["2019-05-31", "2019-03-04"],
            "month-first",
            "born month-first (05/31/2019 00:00)",
        ),
        (["05/05/2019", "12.12.2018"], ["2019-05-05", "2018-12-12"], None, ""),
        (["2019-05-31", "May 29 1978"], ["2019-05-31", "1978-05-29"], None, ""),
        ([], [], None, ""),
        (["", "?"], [None, None], None, ""),
    ],
)
def test_words_that_work_one_way_settle_the_order(words, dates, order, said):
    """A number above 12 in one word settles which number is the month in all, without a doubt."""
    reading = read(*words)
    assert shown(reading) == dates
    assert (reading.order, reading.said, dict(reading.problems)) == (order, said, {})


@pytest.mark.parametrize(
    ("word", "day_first", "month_first"),
    [
        ("~03/04/2019", "2019-04-03", "2019-03-04"),
        ("03/04/2019?", "2019-04-03", "2019-03-04"),
        ("c. 03/04/2019", "2019-04-03", "2019-03-04"),
        ("before 03/04/2019", "0001-01-01..2019-04-02", "0001-01-01..2019-03-03"),
        (">03/04/2019", "2019-04-04..9999-12-31", "2019-03-05..9999-12-31"),
        ("[03/04/2019..05/06/2019]", "2019-04-03..2019-06-05", "2019-03-04..2019-05-06"),
        ("3.4.2019 / 5.6.2019", "2019-04-03..2019-06-05", "2019-03-04..2019-05-06"),
        ("03/04/2019 or 05/06/2019", "2019-04-03..2019-06-05", "2019-03-04..2019-05-06"),
    ],
)
def test_doubts_and_limits_are_kept(word, day_first, month_first):
    """A word of doubt, a limit or an interval keeps its meaning in either order."""
    assert shown(read("31/05/2019", word))[1] == day_first
    assert shown(read("05/31/2019", word))[1] == month_first
    assert shown(read(word, order="month-first")) == [month_first]
    for order in ("day-first", "month-first"):
        (date,) = read(word, order=order).dates
        assert date.approximate
        assert date.text == word


def test_a_word_that_nothing_settles_is_any_of_its_days():
    """Without a telling word a date covers both readings, and is reported."""
    reading = read("03/04/2019", "2018-01-01", "05/05/2019")
    assert shown(reading) == ["2019-03-04..2019-04-03", "2018-01-01", "2019-05-05"]
    assert reading.dates[0].approximate
    assert reading.order == "ambiguous"
    assert reading.said == "born day-first or month-first, not settled (03/04/2019)"
    assert dict(reading.problems) == {
        0: (
            "ambiguous-date",
            'born "03/04/2019" may be 2019-03-04 or 2019-04-03; the column does not settle which.',
        )
    }


@pytest.mark.parametrize(
    ("word", "dates", "readings"),
    [
        (
            "before 03/04/2019",
            "0001-01-01..2019-04-02",
            "any day up to 2019-03-03 or any day up to 2019-04-02",
        ),
        (
            "after 03/04/2019",
            "2019-03-05..9999-12-31",
            "any day from 2019-03-05 or any day from 2019-04-04",
        ),
    ],
)
def test_an_open_interval_that_nothing_settles(word, dates, readings):
    """Days without a first or a last are told as such."""
    reading = read(word)
    assert shown(reading) == [dates]
    assert f'born "{word}" may be {readings};' in reading.problems[0][1]


@pytest.mark.parametrize("order", ["day-first", "month-first"])
def test_the_policy_settles_the_order(order):
    """A given order settles all words; one that only works the other way is read so and told."""
    reading = read("03/04/2019", "31/05/2019", "05/31/2019", order=order)
    first = "2019-04-03" if order == "day-first" else "2019-03-04"
    assert shown(reading) == [first, "2019-05-31", "2019-05-31"]
    assert (reading.order, reading.said) == (order, f"born {order}, as the policy says")
    other, place, word = (
        ("month-first", 2, "05/31/2019") if order == "day-first" else ("day-first", 1, "31/05/2019")
    )
    assert dict(reading.problems) == {
        place: (
            "ambiguous-date",
            f'born "{word}" can only be {other}, while the policy says {order}, and counts as '
            "2019-05-31.",
        )
    }


def test_a_given_order_is_not_needed():
    """A column without numbers to order has no order, whatever the policy says."""
    assert read("2019-05-31", order="day-first").order is None


def test_one_contradiction_in_twenty_is_borne():
    """Words against 95 % of the telling ones are read as they must be, and reported alone."""
    telling = [f"{day}/01/2019" for day in range(13, 32)]
    reading = read(*telling, "01/31/2018", "03/04/2019")
    assert len(telling) == 19
    assert shown(reading)[-2:] == ["2018-01-31", "2019-04-03"]
    assert (reading.order, reading.said) == ("day-first", "born day-first (13/01/2019)")
    assert dict(reading.problems) == {
        19: (
            "ambiguous-date",
            'born "01/31/2018" can only be month-first, while 19 other words of the column can '
            "only be day-first, and counts as 2018-01-31.",
        )
    }


def test_more_contradictions_settle_nothing():
    """With more than one telling word in twenty against the others, no order is settled."""
    telling = [f"{day}/01/2019" for day in range(13, 31)]
    reading = read(*telling, "01/31/2018", "03/04/2019")
    assert shown(reading)[-2:] == ["2018-01-31", "2019-03-04..2019-04-03"]
    assert reading.order == "ambiguous"
    assert kinds(reading) == {18: "ambiguous-date", 19: "ambiguous-date"}


def test_a_column_at_odds_with_itself_names_both_sides():
    """Where as many words work one way as the other, all of them are reported."""
    reading = read("31/05/2019", "05/31/2018")
    assert shown(reading) == ["2019-05-31", "2018-05-31"]
    assert reading.order == "ambiguous"
    assert reading.said == "born day-first or month-first, not settled"
    assert [sentence for _kind, sentence in reading.problems.values()] == [
        'born "31/05/2019" can only be day-first, while another word of the column can only be '
        "month-first, and counts as 2019-05-31.",
        'born "05/31/2018" can only be month-first, while another word of the column can only be '
        "day-first, and counts as 2018-05-31.",
    ]


@pytest.mark.parametrize(
    ("word", "date"),
    [
        ("31/05/19", "2019-05-31"),
        ("31.5.29", "2029-05-31"),
        ("31/05/30", "1930-05-31"),
        ("31/05/'78", "1978-05-31"),
        ("05/31/99", "1999-05-31"),
        ("31/12/00", "2000-12-31"),
        ("05/05/05", "2005-05-05"),
        ("~31/05/19", "2019-05-31"),
        ("31/05/19 14:30", "2019-05-31"),
        ("31-05-78", "1978-05-31"),
        ("78-05-31", "1978-05-31"),
        ("29-May-78", "1978-05-29"),
        ("29-May-19", "2019-05-29"),
        ("29 May 78", "1978-05-29"),
        ("29 MAY '78", "1978-05-29"),
        ("29May78", "1978-05-29"),
        ("29th of May, 78", "1978-05-29"),
        ("May 29 78", "1978-05-29"),
        ("May 29, '78", "1978-05-29"),
        ("c. 29 May 78", "1978-05-29"),
        ("May '19", "2019-05-01..2019-05-31"),
        ("May-78", "1978-05-01..1978-05-31"),
    ],
)
def test_years_of_two_digits_are_told(word, date):
    """A year of two digits is one of 1930 to 2029, and each is reported with the year used."""
    reading = read(word)
    assert shown(reading) == [date]
    assert reading.dates[0].text == word
    spoken = date.replace("..", " to ")
    assert dict(reading.problems) == {
        0: (
            "two-digit-year",
            f'born "{word}" has a year of two digits and counts as {spoken}, in the hundred '
            "years from 1930.",
        )
    }


@pytest.mark.parametrize(
    ("words", "dates", "order"),
    [
        (["31/05/2018", "03/04/19"], ["2018-05-31", "2019-04-03"], "day-first"),
        (["31/05/78", "03/04/2019"], ["1978-05-31", "2019-04-03"], "day-first"),
        (["78-05-31", "03-04-05"], ["1978-05-31", "2003-04-05"], "year-first"),
        (["31-05-78", "03-04-05"], ["1978-05-31", "2005-04-03"], "day-first"),
        (["05-31-78", "03-04-05"], ["1978-05-31", "2005-03-04"], "month-first"),
        (["78-05-31", "19-05-31"], ["1978-05-31", "2019-05-31"], "year-first"),
        (["19-05-31"], ["1931-05-19..2019-05-31"], "ambiguous"),
        (["03-04-05"], ["2003-04-05..2005-04-03"], "ambiguous"),
        (["03/04/05"], ["2005-03-04..2005-04-03"], "ambiguous"),
        (["78-05-31", "03/04/2019"], ["1978-05-31", "2019-03-04..2019-04-03"], "year-first"),
    ],
)
def test_order_of_short_years(words, dates, order):
    """The column settles the order of words with short years too; with hyphens of three."""
    reading = read(*words)
    assert shown(reading) == dates
    assert reading.order == order
    short = [place for place, word in enumerate(words) if "20" not in word]
    assert set(short) <= set(kinds(reading))


def test_a_short_year_that_stands_first_among_others():
    """A word that only works year-first is told in a column that is day-first."""
    reading = read("31/05/2019", "78-05-31")
    assert shown(reading) == ["2019-05-31", "1978-05-31"]
    assert dict(reading.problems) == {
        1: (
            "ambiguous-date",
            'born "78-05-31" can only be year-first, while another word of the column can only be '
            "day-first, and counts as 1978-05-31.",
        )
    }


@pytest.mark.parametrize(
    ("words", "dates"),
    [
        (["43616"], ["2019-05-31"]),
        (["43616", "43617.0", "43618.75"], ["2019-05-31", "2019-06-01", "2019-06-02"]),
        (["43616", "2019-05-31"], ["2019-05-31", "2019-05-31"]),
        (["43616", "2019-05-31", "2018"], ["2019-05-31", "2019-05-31", "2018-01-01..2018-12-31"]),
        (["43616", "31/05/2019", "?"], ["2019-05-31", "2019-05-31", None]),
        (["20000", "60000"], ["1954-10-03", "2064-04-08"]),
    ],
)
def test_day_numbers_of_spreadsheets(words, dates):
    """A number of five digits among days, or alone, is a spreadsheet's day and reported."""
    reading = read(*words)
    assert shown(reading) == dates
    numbers = [place for place, word in enumerate(words) if word[:1] in "246" and "-" not in word]
    numbers = [place for place in numbers if words[place] != "2018"]
    assert kinds(reading) == dict.fromkeys(numbers, "serial-date")


def test_day_numbers_are_told_to_the_keeper():
    """The sentence and the summary say how a spreadsheet's day number was read."""
    reading = read("43616", "?")
    assert reading.order is None
    assert reading.said == "born with a spreadsheet's day numbers (43616)"
    assert reading.problems[0][1] == (
        'born "43616" is a spreadsheet\'s number of a day and counts as 2019-05-31, 43616 days '
        "after 1899-12-30."
    )


@pytest.mark.parametrize("words", [["20199", "2019", "2018"], ["43616", "soon"], ["19999"]])
def test_other_numbers_are_no_days(words):
    """Among bare years or words, or far from any likely day, five digits are not read."""
    reading = read(*words)
    assert reading.dates[0] is None
    assert kinds(reading)[0] == "unreadable-date"


def test_four_digits_are_years():
    """Bare numbers of four digits are years and never a spreadsheet's days."""
    assert shown(read("2019", "1978")) == ["2019-01-01..2019-12-31", "1978-01-01..1978-12-31"]


@pytest.mark.parametrize("word", sorted(NO_DATE))
def test_words_for_unknown(word):
    """Blanks and words for unknown give no date and no finding, in any case."""
    reading = read(word, word.upper())
    assert reading.dates == (None, None)
    assert reading.problems == {}
    assert (reading.order, reading.said) == (None, "")


def test_words_for_unknown_hold_those_of_parents():
    """What means an unknown parent also means an unknown date, and the usual words do."""
    assert MISSING_PARENT | {"n/a", "-", "none", "nil", "not known"} <= NO_DATE


@pytest.mark.parametrize(
    ("word", "hint"),
    [
        ("spring", "seasons differ between hemispheres; write the months, as 2019-03/2019-05"),
        ("summer 2019", "seasons differ between hemispheres; write the months, as 2019-03/2019-05"),
        ("2019-22", "seasons differ between hemispheres; write the months, as 2019-03/2019-05"),
        ("2019-02-30", "February 2019 has 28 days"),
        ("2020/02/30", "February 2020 has 29 days"),
        ("31/02/2019", "February 2019 has 28 days"),
        ("02/31/2019", "February 2019 has 28 days"),
        ("31.04.2019 10:00", "April 2019 has 30 days"),
        ("31/02/19", "February 2019 has 28 days"),
        ("Feb 30 2019", "February 2019 has 28 days"),
        ("31 June 2019", "June 2019 has 30 days"),
        ("2019 Nov 31", "November 2019 has 30 days"),
        ("32/05/2019", "May 2019 has 31 days"),
        ("31.13.2019", "neither 31 nor 13 is a month"),
        ("2019-13-01", "there is no month 13"),
        ("2019-31-05", "there is no month 31"),
        ("2019-05-00", "leave out what is not known, as 2019-05 or 2019"),
        ("2019-00-00", "leave out what is not known, as 2019-05 or 2019"),
        ("00/05/2019", "leave out what is not known, as 2019-05 or 2019"),
        ("3019-05-31", "years from 1000 to 2999 are read"),
        ("31/05/0019", "years from 1000 to 2999 are read"),
        (
            "2019/05",
            "it may be a month or a span of years; write 2019-05 for a month, 2018/2019 for a span",
        ),
        (
            "2018.19",
            "it may be a month or a span of years; write 2019-05 for a month, 2018/2019 for a span",
        ),
        ("2018-2020", "write 2018/2020 for some day within these years"),
        ("2018 - 2020", "write 2018/2020 for some day within these years"),
        ("2018 to 2020", "write 2018/2020 for some day within these years"),
        ("May", "the year is not told, or not in full"),
        ("29 May", "the year is not told, or not in full"),
        ("May-19", "the year is not told, or not in full"),
        (
            "2019-05-3?",
            "the question mark may stand for a digit; write 2019-05-XX where the day is not known",
        ),
        (
            "20199",
            "it may be a spreadsheet's number of a day, but few other words of the column are days",
        ),
        ("x" * 201, "it is too long"),
    ],
)
def test_why_a_word_is_not_read(word, hint):
    """A word that is no date is unknown, and the sentence says why or how to write it."""
    reading = read("soon", word)
    told = f"{word[:60]}…" if len(word) > 60 else word
    assert reading.dates == (None, None)
    assert dict(reading.problems) == {
        0: ("unreadable-date", 'born "soon" is not understood and counts as unknown.'),
        1: ("unreadable-date", f'born "{told}" is not understood ({hint}) and counts as unknown.'),
    }


@pytest.mark.parametrize(
    "word",
    [
        "31/05/2019 2019",
        "31/05",
        "31/05/019",
        "1/2/3",
        "131/05/2019",
        "31/05-2019",
        "1.2.3.2019",
        "31 05 2019",
    ],
)
def test_other_numbers_are_not_guessed(word):
    """Numbers that are no day in any order stay unread."""
    assert read(word, order="day-first").dates == (None,)
    assert kinds(read(word)) == {0: "unreadable-date"}


def written(day: datetime.date, order: str, separator: str, *, padded: bool = True) -> str:
    """A day in numbers."""
    width = "02d" if padded else "d"
    first, second = (day.day, day.month) if order == "day-first" else (day.month, day.day)
    return f"{first:{width}}{separator}{second:{width}}{separator}{day.year}"


def distinct(words: list[str]) -> list[str]:
    """Words without their repetitions."""
    return list(dict.fromkeys(words))


@given(
    born=st.lists(days, min_size=1, max_size=12),
    telling=days.filter(lambda day: day.day > 12),
    order=st.sampled_from(["day-first", "month-first"]),
    separator=separators,
    padded=st.booleans(),
)
def test_one_telling_word_settles_a_column(born, telling, order, separator, padded):
    """A column in one order with at least one day above 12 is read to the day."""
    born = list(dict.fromkeys([*born, telling]))
    reading = read(*(written(day, order, separator, padded=padded) for day in born))
    assert shown(reading) == [day.isoformat() for day in born]
    assert reading.order == order
    assert not reading.problems
    assert not any(date.approximate for date in reading.dates)


@given(
    born=st.lists(days, min_size=1, max_size=12),
    order=st.sampled_from(["day-first", "month-first"]),
    separator=separators,
)
def test_a_date_is_never_outside_what_is_read(born, order, separator):
    """Settled or not, the interval read holds the day that the writer meant."""
    born = list(dict.fromkeys(born))
    reading = read(*(written(day, order, separator) for day in born))
    for day, date in zip(born, reading.dates, strict=True):
        assert date.earliest <= day.toordinal() <= date.latest
    given_order = read(*(written(day, order, separator) for day in born), order=order)
    assert shown(given_order) == [day.isoformat() for day in born]
    assert not given_order.problems


@given(
    born=st.lists(st.tuples(days, st.sampled_from(["day-first", "month-first"])), max_size=12),
    separator=separators,
)
def test_mixed_columns_are_told_or_right(born, separator):
    """In a column of both orders an exact date is right, or settled by 95 % of telling words."""
    words = distinct([written(day, order, separator) for day, order in born])
    reading = read(*words)
    telling = {"day-first": 0, "month-first": 0}
    for word in words:
        first, second = (int(part) for part in word.split(separator)[:2])
        telling["day-first"] += first > 12
        telling["month-first"] += second > 12
    most = max(telling.values(), default=0)
    settled = most > 0 and most >= 0.95 * sum(telling.values())
    for place, (word, date) in enumerate(zip(words, reading.dates, strict=True)):
        first, second = (int(part) for part in word.split(separator)[:2])
        open_question = max(first, second) <= 12 and first != second
        assert date.exact == (settled or not open_question)
        if open_question and not settled:
            assert kinds(reading)[place] == "ambiguous-date"


@given(day=short_days, separator=st.sampled_from(["/", "."]))
def test_short_years_from_1930_to_2029_are_right(day, separator):
    """Within 1930 to 2029 a year of two digits is the year meant, and is always reported."""
    word = f"{day.day:02d}{separator}{day.month:02d}{separator}{day.year % 100:02d}"
    named = f"{day:%d-%b-%y}"
    reading = read(word, named, order="day-first")
    assert shown(reading) == [day.isoformat()] * 2
    assert kinds(reading) == {0: "two-digit-year", 1: "two-digit-year"}
    hyphens = f"{day:%y-%m-%d}"
    (date,) = read(hyphens).dates
    assert date.earliest <= day.toordinal() <= date.latest


@given(day=st.dates(datetime.date(1954, 10, 3), datetime.date(2064, 4, 8)))
def test_every_day_number_is_that_day(day):
    """The number a spreadsheet has for a day is read as that day."""
    number = (day - datetime.date(1899, 12, 30)).days
    assert shown(read(str(number), f"{number}.25")) == [day.isoformat()] * 2


SEEDS = [
    "2019-05-31", "31/05/2019", "05/31/2019", "03/04/2019", "05/05/2019", "31/05/19", "03-04-05",
    "78-05-31", "29-May-78", "May 29 1978", "May-19", "43616", "20190531", "2019", "2019-05",
    "~2019", "before 03/04/2019", "[03/04/2019..2020]", "2018/2020", "201X", "2019-05-??", "?",
    "31.12.2019 10:00", "2019-02-30", "99/99/9999", "1970s", "summer 2019", "[2017,2019]",
]  # fmt: skip
any_word = st.sampled_from(SEEDS) | st.text(max_size=12) | st.text("0123456789/.-'", max_size=12)


signs = st.sampled_from(["", *"0123456789/.-?~%X'[], :TZ\x00é٣\N{EN DASH}", "May", ".."])


@st.composite
def mutated(draw: st.DrawFn) -> str:
    """A word like those of a column of dates, with some signs lost, changed or added."""
    word = draw(any_word)
    for _ in range(draw(st.integers(0, 3))):
        place = draw(st.integers(0, len(word)))
        sign = draw(signs)
        word = word[:place] + sign + word[place + draw(st.integers(0, 2)) :]
    return word


@given(
    words=st.lists(mutated(), max_size=8),
    order=st.sampled_from([None, "day-first", "month-first"]),
)
def test_no_word_breaks_the_reading_of_a_column(words, order):
    """Whatever the words, each has a date as written, or none; problems name existing words."""
    reading = read(*words, order=order)
    assert len(reading.dates) == len(words)
    for place, (word, date) in enumerate(zip(words, reading.dates, strict=True)):
        if date is not None:
            assert 1 <= date.earliest <= date.latest <= datetime.date.max.toordinal()
            assert date.text == word
        else:
            assert place in reading.problems or word.casefold() in NO_DATE
    assert set(kinds(reading).values()) <= KINDS
    assert set(reading.problems) <= set(range(len(words)))
    assert all(sentence.endswith(".") for _kind, sentence in reading.problems.values())


@given(words=st.lists(mutated(), max_size=8, unique=True), data=st.data())
def test_the_order_of_words_does_not_matter(words, data):
    """Words in any order have the same dates and problems, and the same is said of the column."""
    shuffled = data.draw(st.permutations(words))
    one, other = read(*words), read(*shuffled)
    assert (one.order, one.said) == (other.order, other.said)
    for place, word in enumerate(words):
        elsewhere = shuffled.index(word)
        assert one.dates[place] == other.dates[elsewhere]
        assert one.problems.get(place) == other.problems.get(elsewhere)


def test_every_order_of_a_mixed_column_reads_the_same():
    """Every permutation of a column at odds with itself is read the same."""
    words = ("31/05/2019", "05/31/2018", "03/04/2019", "43616", "03-04-05")
    found = {
        tuple(sorted(zip(order, shown(read(*order)), strict=True))) for order in permutations(words)
    }
    assert len(found) == 1


@given(words=st.lists(st.sampled_from(SEEDS), unique=True), more=st.sampled_from(SEEDS))
def test_an_unsettled_date_is_wide_enough(words, more):
    """A word that is ambiguous in one column holds what another column reads in it."""
    alone = read(*words)
    together = read(*distinct([*words, more]))
    for place, first in enumerate(alone.dates):
        kind, _sentence = alone.problems.get(place, ("", ""))
        second = together.dates[place]
        if kind == "ambiguous-date":
            assert second is not None
            assert first.earliest <= second.earliest <= second.latest <= first.latest or (
                together.problems[place][0] == "ambiguous-date"
            )


def column_of(name: str, heading: str) -> list[str]:
    """The distinct cells of a column of the open data; skips the test when it is absent."""
    path = DATA / name
    if not path.exists():
        pytest.skip(f"open data {name} is absent")
    with path.open(newline="", encoding="latin-1") as file:
        return distinct([" ".join(row[heading].split()) for row in csv.DictReader(file)])


@pytest.mark.parametrize("heading", ["DateOfBirth", "Mat.Birthdate"])
def test_mole_rats_are_born_day_first(heading):
    """The mole-rats' dates are day-first, all of them, without a doubt."""
    words = column_of("mole-rat/Survival_Dataset.csv", heading)
    reading = read(*words)
    assert (reading.order, dict(reading.problems)) == ("day-first", {})
    expected = [datetime.datetime.strptime(word, "%d/%m/%Y").date().isoformat() for word in words]
    assert shown(reading) == expected
    assert len(words) > 10


@pytest.mark.parametrize("heading", ["Birth_Date", "Test_Date"])
def test_border_collies_have_named_months(heading):
    """The Border Collies' dates, such as "May 29 1978", are all read to the day."""
    words = column_of("border-collie/OFA_Border_Collie.csv", heading)
    reading = read(*words)
    assert (reading.order, reading.said, dict(reading.problems)) == (None, "", {})
    expected = [datetime.datetime.strptime(word, "%b %d %Y").date().isoformat() for word in words]
    assert shown(reading) == expected
    assert len(words) > 1000


def test_cattle_are_culled_day_first():
    """The dairy cows' days of culling are day-first, or unknown."""
    words = column_of("langhill-dairy/SurvivalDFRecoded.csv", "CULL_DATE")
    reading = read(*words)
    assert (reading.order, dict(reading.problems)) == ("day-first", {})
    unread = {word for word, date in zip(words, reading.dates, strict=True) if date is None}
    assert unread == {"NULL"}


def test_guppies_and_dolphins_have_iso_dates():
    """Guppies' and dolphins' dates have the year first and need no column to settle them."""
    for name, heading in (
        ("guppy-selection/breeding_data.csv", "date"),
        ("guppy-selection/pedigree.csv", "date_of_birth"),
        ("shark-bay-dolphin/life_history.csv", "Birth.Date"),
    ):
        words = column_of(name, heading)
        reading = read(*words)
        assert (reading.order, reading.said, dict(reading.problems)) == (None, "", {})
        unread = {word for word, date in zip(words, reading.dates, strict=True) if date is None}
        assert unread <= {"", "NA"}
