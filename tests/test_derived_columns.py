"""Columns that a keeper asks for with --map: parts of cells, and dates between two bounds."""

from __future__ import annotations

import datetime

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.errors import RecordsError
from pairing.records.audit import Audit, audit_records
from pairing.records.readers import read_records
from pairing.records.rules import RecordRules


def audited(text: str, *column_map: str) -> Audit:
    """The audit of CSV text under a column map."""
    return audit_records(read_records("-", stdin=text.encode(), column_map=column_map))


def born(text: str, *column_map: str) -> list[tuple[str, str] | None]:
    """First and last possible day of birth of each animal."""
    animals = audited(text, *column_map).animals
    dates = [animals.born(place) for place in range(len(animals))]
    day = datetime.date.fromordinal
    return [each and (str(day(each.earliest)), str(day(each.latest))) for each in dates]


OPEN = ("0001-01-01", "9999-12-31")


@pytest.mark.parametrize(
    ("cells", "days"),
    [
        ("2001-02-03,2004-05-06", ("2001-02-03", "2004-05-06")),
        ("2001,2004-05", ("2001-01-01", "2004-05-31")),
        ("31/05/2001,13/06/2001", ("2001-05-31", "2001-06-13")),
        ("2001-02-03,2001-02-03", ("2001-02-03", "2001-02-03")),
        ("2001-02-03,", ("2001-02-03", OPEN[1])),
        (",2004-05-06", (OPEN[0], "2004-05-06")),
        ("NA,2004-05-06", (OPEN[0], "2004-05-06")),
        (",", None),
        ("NA,unknown", None),
    ],
)
def test_date_between_two_bounds(cells, days):
    """`A/B=born` is the interval from the first day of A to the last of B; blanks are open ends."""
    text = f"id,sire,dam,first,last\nA,,,{cells}\n"
    assert born(text, "first/last=born") == [days]


@pytest.mark.parametrize(
    ("cells", "days"),
    [
        ("2001-02-03,2003,2004-05-06", ("2001-02-03", "2004-05-06")),
        (",2003-01-01,2004-05-06", ("2003-01-01", "2004-05-06")),
        ("2001-02-03,2003-01-01,", ("2001-02-03", "2003-01-01")),
        (",2003-01-01,", ("2003-01-01", "2003-01-01")),
        (",,2004", (OPEN[0], "2004-12-31")),
        (",,", None),
    ],
)
def test_estimate_stands_in_for_a_bound(cells, days):
    """`A/estimate/B=born` takes the estimate where a bound is blank."""
    text = f"id,sire,dam,first,guess,last\nA,,,{cells}\n"
    assert born(text, "first/guess/last=born") == [days]


def test_bounds_the_wrong_way_round():
    """A first day after the last is no date, and is reported as it stands."""
    audit = audited("id,sire,dam,first,last\nA,,,2005,2001\n", "first/last=born")
    (finding,) = [each for each in audit.findings if each.kind == "unreadable-date"]
    assert finding.found == "2005 / 2001"
    assert finding.column == "first/last"


def test_columns_of_a_derived_one_are_carried_along():
    """The bounds stay as they are beside the interval made of them, and so do other cells."""
    records = audited(
        "id,sire,dam,first,last\nM1,,,2001,2004\n", "first/last=born", "id~^([MF])=sex"
    ).records
    assert records.fields["born"] == ("2001 / 2004",)
    assert records.fields["sex"] == ("M",)
    assert dict(records.carried) == {"first": ("2001",), "last": ("2004",)}
    assert "first/last = born" in records.reading


def test_heading_with_a_slash_is_a_column():
    """A column that is called so is taken whole, also spelled with other blanks."""
    text = "id,Sire / Father,dam,Born / Hatched\nA,,,\nB,A,,2019\n"
    records = audited(text, "Sire / Father=sire", "born/hatched=born").records
    assert records.fields["sire"] == ("", "A")
    assert records.fields["born"] == ("", "2019")


@pytest.mark.parametrize(
    ("entry", "problem"),
    [
        (
            "first/lst=born",
            '--map "first/lst=born": there is no column "lst". Did you mean "last"?',
        ),
        (
            "first/last=holder",
            '--map "first/last=holder": a slash stands between the columns of the earliest day and '
            "the latest day of a date (and an estimate between them); expected "
            "Earliest/Latest=born or Earliest/Date/Latest=born.",
        ),
        (
            "first/id/dam/last=born",
            '--map "first/id/dam/last=born": a slash stands between the columns of the earliest '
            "day and the latest day of a date (and an estimate between them); expected "
            "Earliest/Latest=born or Earliest/Date/Latest=born.",
        ),
        ("first~(=sex", '--map "first~(=sex": "(" is no regular expression (missing ), '),
        (
            "frst~x=sex",
            '--map "frst~x=sex": there is no column "frst". Did you mean "first"?',
        ),
    ],
)
def test_entry_that_cannot_be_followed(entry, problem):
    """What is wrong with an entry is told, with the nearest column or the form expected."""
    with pytest.raises(RecordsError, match=r"the columns cannot be told apart") as caught:
        audited("id,sire,dam,first,last\nA,,,2001,2004\n", entry)
    assert problem in str(caught.value)


def test_row_that_is_too_long_is_told_with_the_width_of_the_file():
    """A derived column does not widen the header that a row is measured by."""
    audit = audited("id,sire,dam\nM1,,,x\n", "id~^([MF])=sex")
    (finding,) = audit.stopping
    assert finding.kind == "extra-cells"
    assert finding.message == "the row has 4 cells, the header 3."
    assert finding.found == "x"


DAYS = st.dates(datetime.date(1900, 1, 1), datetime.date(2100, 1, 1))
BOUNDS = st.tuples(st.lists(DAYS, min_size=3, max_size=3).map(sorted), st.sets(st.integers(0, 2)))


@given(st.lists(BOUNDS, min_size=1, max_size=6))
def test_bounds_in_the_order_of_day_and_month_that_the_policy_says(rows):
    """Bounds written day first mean the days that they mean in ISO form, some being blank."""

    def table(form: str) -> str:
        lines = [
            ",".join(
                [f"A{number}", "", ""]
                + ["" if place in blank else day.strftime(form) for place, day in enumerate(days)]
            )
            for number, (days, blank) in enumerate(rows)
        ]
        return "\n".join(["id,sire,dam,first,guess,last", *lines])

    settle = "first/guess/last=born"
    records = read_records("-", stdin=table("%d/%m/%Y").encode(), column_map=(settle,))
    told = audit_records(records, RecordRules(date_order="day-first")).animals
    plain = audited(table("%Y-%m-%d"), settle).animals
    for place in range(len(rows)):
        days = [
            each and (each.earliest, each.latest) for each in (told.born(place), plain.born(place))
        ]
        assert days[0] == days[1]


def test_pattern_that_finds_nothing_is_told():
    """A pattern that fits no cell of its column is a slip, and is not passed over in silence."""
    with pytest.raises(RecordsError, match="finds nothing") as caught:
        read_records("-", column_map=["id~^(X)=sex"], stdin=b"id,sire,dam\nM1,,\nF2,M1,\n")
    assert (
        '--map "id~^(X)=sex": "^(X)" finds nothing in any of the 2 filled cells of "id", such as '
        '"M1".' in str(caught.value)
    )
