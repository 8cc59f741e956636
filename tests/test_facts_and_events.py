"""A second table joined by id, and lists of events from which any day can be rebuilt."""

from __future__ import annotations

import datetime
import textwrap
from typing import TYPE_CHECKING

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.cli.options import Call
from pairing.dates import parse_date
from pairing.errors import RecordsError
from pairing.pedigree.descent import build_pedigree
from pairing.policy.rules import Policy
from pairing.population.living import living_on
from pairing.records.audit import audit_records
from pairing.records.events import EVENT_WORDS, read_events, with_events
from pairing.records.facts import with_facts
from pairing.records.files.raw import RawTable
from pairing.records.findings import Finding
from pairing.records.mapping import map_columns
from pairing.records.readers import read_records, read_table
from pairing.records.rules import Decision, RecordRules
from tests.test_commands import run

if TYPE_CHECKING:
    from pairing.records.table import Records


def raw(text: str, name: str) -> RawTable:
    """A table of its own name from CSV text, which may be indented."""
    table = read_table("-", stdin=textwrap.dedent(text).strip().encode())
    return RawTable(
        name,
        table.kind,
        table.sha256,
        table.header,
        table.header_line,
        table.columns,
        table.lines,
        table.overlong,
    )


def with_second(records: str, facts: str, *column_map: str, order: str | None = None) -> Records:
    """Records joined with facts.csv."""
    first = map_columns(raw(records, "herd.csv"))
    return with_facts(
        first, raw(facts, "facts.csv"), column_map, rules=RecordRules(date_order=order)
    )


def after(
    records: str, events: str, day: str | None = None, rules: RecordRules | None = None
) -> Records:
    """Records after events.csv, up to a day."""
    first = map_columns(raw(records, "herd.csv"))
    as_of = parse_date(day) if day else None
    return with_events(first, raw(events, "events.csv"), as_of=as_of, rules=rules)


def only(records: Records) -> Finding:
    """The one finding of records."""
    (finding,) = records.findings
    return finding


HERD = "id,sire,dam,sex\nA,,,m\nB,,,\nC,A,B,f\n"


# Facts


def test_facts_fill_blank_cells_and_bring_columns_of_their_own():
    """Blank cells and absent fields come from the second table; other columns are carried along."""
    joined = with_second(HERD, "id,sex,born,weight\nB,f,2001,7\nC,,2003-05,\n")
    assert joined.fields["sex"] == ("m", "f", "f")
    assert joined.fields["born"] == ("", "2001", "2003-05")
    assert joined.carried["weight"] == ("", "7", "")
    assert joined.columns["born"] == "born"
    assert joined.findings == ()
    assert "; facts from facts.csv (comma-separated text, UTF-8; columns id, sex, born)" in (
        joined.reading
    )


def test_facts_of_parents_become_parents():
    """A sire told only by the second table counts, and 0 there is no animal."""
    joined = with_second(
        "id,sire,dam\nA,0,0\nB,0,0\nC,0,B\nD,C,0\n", "id,sire,dam\nC,A,0\nD,0,0\nA,0,0\n"
    )
    assert joined.fields["sire"] == ("0", "0", "A", "C")
    assert joined.fields["dam"] == ("0", "0", "B", "0")
    assert joined.findings == ()


def test_zero_is_a_parent_of_the_facts_where_an_animal_is_called_so():
    """With an animal 0 in the records a parent 0 is that animal, in both tables."""
    joined = with_second("id,sire,dam\n0,,\nA,,\nB,,\n", "id,sire\nA,0\n")
    assert joined.fields["sire"] == ("", "0", "")


def test_fact_against_the_records_is_said_and_not_used():
    """A recorded cell is never replaced; the two lines that differ are named."""
    joined = with_second(HERD, "id,sex\nB,f\nA,f\nC,female\n")
    assert joined.fields["sex"] == ("m", "f", "f")
    assert only(joined) == Finding(
        "facts-disagree",
        'A: sex is "f" in facts.csv (line 3); the records\' own "m" is used.',
        "Correct one of the two tables.",
        id="A",
        row=2,
        column="sex",
        found="m",
    )


def test_rows_of_one_animal_that_differ_fill_nothing():
    """Where the rows about one animal differ in a field none of them is used."""
    joined = with_second(HERD, "id,sex\nB,f\nA,male\nB,m\nB,f\nB,NA\n")
    assert joined.fields["sex"] == ("m", "", "f")
    assert only(joined) == Finding(
        "facts-disagree",
        'B: sex is "f" or "m" in facts.csv (lines 2, 4, 5 and 6); none of them is used.',
        "Correct facts.csv.",
        id="B",
        row=3,
        column="sex",
        found="",
    )


@pytest.mark.parametrize(
    ("facts", "message", "remedy", "found"),
    [
        (
            "id,sex\nX,m\nA,m\nY,m\nX,m\n",
            "facts.csv has rows about 2 ids without a row in the records: X and Y (lines 2 and 4).",
            "Correct the ids there or add the animals; until then what facts.csv says of sex is "
            "lost.",
            "X",
        ),
        (
            "id,Sex,colour\n X,m,red\n",
            "facts.csv has rows about 1 id without a row in the records: X (line 2).",
            "Correct the id there or add the animal; until then what facts.csv says of Sex and "
            "colour is lost.",
            "X",
        ),
    ],
)
def test_fact_about_no_animal(facts, message, remedy, found):
    """Rows about ids without a row are named with their lines, and nothing else happens."""
    joined = with_second(HERD, facts)
    assert joined.fields["sex"] == ("m", "", "f")
    assert only(joined) == Finding(
        "fact-without-animal",
        message,
        remedy,
        found=found,
    )


def test_fact_without_an_id():
    """A row of the second table without an id is reported."""
    finding = only(with_second(HERD, "id,sex\n,m\nA,m\n"))
    assert finding.kind == "fact-without-animal"
    assert finding.message == "facts.csv has 1 row without an id (line 2)."
    assert finding.remedy == "Give it an id; it is not used."


def test_many_rows_an_animal_give_the_latest_sighting():
    """Of many days on which an animal was seen the latest counts, in the order of the column.

    Alone, the two days of A could be read either way round; the column settles them.
    """
    joined = with_second(
        HERD,
        "id,last_seen\nA,01/12/2006\nA,12/11/2006\nB,25/05/2006\nB,26/05/2006\nB,1/06/2005\n",
    )
    assert joined.fields["last_seen"] == ("2006-12-01", "2006-05-26", "")
    assert joined.findings == ()
    assert "last_seen day-first" in joined.reading


def test_dates_of_facts_keep_their_own_order_of_day_and_month():
    """A day-first second table keeps its days beside records that are month-first."""
    joined = with_second(
        "id,sire,dam,born\nA,,,05/31/2019\nB,,,\n", "id,born\nB,04/03/2019\nA,31/05/2019\n"
    )
    born = audit_records(joined).animals.dates["born"].reading
    assert [each.text for each in (born[0], born[1])] == ["05/31/2019", "2019-03-04"]
    assert joined.findings == ()


def test_order_of_the_policy_reads_dates_of_facts():
    """Where only the programme can tell day from month, its word counts for facts too."""
    joined = with_second("id,sire,dam\nA,,\n", "id,born\nA,04/03/2019\n", order="month-first")
    assert joined.fields["born"] == ("2019-04-03",)


def test_dates_that_can_both_be_right_do_not_disagree():
    """A year in the records and a day within it in the facts contradict nothing."""
    joined = with_second(
        "id,sire,dam,born\nA,,,2019\nB,,,2019\n", "id,born\nA,2019-05-31\nB,2018\n"
    )
    assert joined.fields["born"] == ("2019", "2019")
    assert only(joined).message == (
        'B: born is "2018" in facts.csv (line 3); the records\' own "2019" is used.'
    )


def test_doubtful_dates_of_facts_are_named_with_their_line():
    """A date of the second table that cannot be read is reported with that table's line."""
    joined = with_second("id,sire,dam\nA,,\nB,,\n", "id,born\nA,soon\nB,04/03/2019\n")
    assert joined.fields["born"] == ("", "[2019-03-04..2019-04-03]")
    first, second = joined.findings
    assert (first.kind, first.found) == ("unreadable-date", "soon")
    assert first.message == (
        'facts.csv, line 2: born "soon" is not understood and counts as unknown.'
    )
    assert (second.kind, second.found) == ("ambiguous-date", "04/03/2019")
    assert second.message.startswith('facts.csv, line 3: born "04/03/2019" may be')


def test_cell_that_cannot_be_read_is_not_replaced_by_a_fact():
    """A recorded word that is no date stays, so that its keeper is asked about it."""
    joined = with_second("id,sire,dam,born\nA,,,soon\n", "id,born\nA,2019\n")
    assert joined.fields["born"] == ("soon",)
    assert [each.kind for each in audit_records(joined).findings] == ["unreadable-date"]


def test_doubts_about_the_second_table_itself_are_told():
    """Columns asked about and rows too long in the second table are said, and do not stop."""
    joined = with_second(HERD, "id,sex,breed\nA,m,x,y\n")
    assert [(each.kind, each.severity, each.row) for each in joined.findings] == [
        ("asked-about", "note", None),
        ("extra-cells", "warning", None),
    ]
    assert joined.findings[1].message == ("facts.csv, line 2: the row has 4 cells, the header 3.")
    build_pedigree(joined)


def test_numbers_of_facts_are_compared_as_numbers():
    """An index of 1 and one of 1.0 are the same."""
    assert with_second("id,sire,dam,merit\nA,,,1\n", "id,merit\nA,1.0\n").findings == ()


def test_columns_in_which_rows_of_an_animal_differ_are_not_carried():
    """A measurement taken twice cannot be carried in one cell; the reading says so."""
    joined = with_second(HERD, "id,weight,ring colour\nA,7,red\nA,8,red\n")
    assert dict(joined.carried) == {"ring colour": ("red", "", "")}
    assert joined.reading.endswith("; not carried, as rows of one animal differ: weight")


def test_column_of_the_same_name_is_kept_beside_the_records_own():
    """A column that both tables have is carried twice, the second under the table's name."""
    joined = with_second("id,sire,dam,note\nA,,,old\n", "id,note\nA,new\n")
    assert dict(joined.carried) == {"note": ("old",), "note (facts.csv)": ("new",)}


def test_facts_without_an_id_column_are_refused():
    """A second table that names no animal is refused with a column that may be meant."""
    with pytest.raises(
        RecordsError, match=r"facts\.csv: the columns cannot be told apart"
    ) as caught:
        with_second(HERD, "animal_key,sex\nA,m\n")
    assert 'No column for id among "animal_key" and "sex".' in str(caught.value)


@given(st.permutations(["A,m,2001", "B,,2002", "B,f,", "C,f,2003-05", "C,,"]))
def test_order_of_facts_does_not_matter(rows):
    """Rows of the second table in any order fill the same cells."""
    joined = with_second(HERD, "\n".join(["id,sex,born", *rows]))
    assert joined.fields["sex"] == ("m", "f", "f")
    assert joined.fields["born"] == ("2001", "2002", "2003-05")
    assert joined.findings == ()


CELL = st.sampled_from(["", "m", "f", "u", "NA", "male"])


@given(st.lists(CELL, min_size=3, max_size=3), st.lists(st.tuples(st.integers(0, 2), CELL)))
def test_facts_never_replace_what_is_recorded(own, told):
    """Whatever the second table says, a cell of the records that says something stays."""
    header = "id,sire,dam,sex"
    records = "\n".join(
        [header, *(f"{name},,,{sex}" for name, sex in zip("ABC", own, strict=True))]
    )
    facts = "\n".join(["id,sex", "A,", *(f"{'ABC'[place]},{sex}" for place, sex in told)])
    joined = with_second(records, facts)
    for before, now in zip(own, joined.fields["sex"], strict=True):
        assert now == before or before in ("", "u", "NA")


def test_both_tables_take_part_in_the_digest():
    """Other facts give another fingerprint of the input."""
    first, second = (with_second(HERD, f"id,sex\nB,{sex}\n") for sex in "mf")
    assert first.sha256 != second.sha256 != map_columns(raw(HERD, "herd.csv")).sha256


# Events

LIFE = """\
id,date,event,from,to
A,2001-05-01,birth,,North Quay
A,2005-06-01,transfer,North Quay,South Pier
A,2007-01-10,departure,South Pier,
A,2008-03-01,arrival,,West Dock
A,2009-12-24,seen,,
A,2011-02-03,death,,
"""


@pytest.mark.parametrize(
    ("day", "lives", "holder", "left", "seen"),
    [
        ("2001-04-30", False, "", "", ""),
        ("2001-05-01", True, "North Quay", "", ""),
        ("2005-05-31", True, "North Quay", "", ""),
        ("2005-06-01", True, "South Pier", "", ""),
        ("2007-01-09", True, "South Pier", "", ""),
        ("2007-01-10", False, "South Pier", "2007-01-10", ""),
        ("2008-02-29", False, "South Pier", "2007-01-10", ""),
        ("2008-03-01", True, "West Dock", "", ""),
        ("2010-01-01", True, "West Dock", "", "2009-12-24"),
        ("2011-02-02", True, "West Dock", "", "2009-12-24"),
        ("2011-02-03", False, "West Dock", "", "2009-12-24"),
    ],
)
def test_life_is_rebuilt_on_any_day(day, lives, holder, left, seen):
    """From events alone follow who lived on a day, where, and when it was last seen."""
    records = after("id,sire,dam\nA,,\n", LIFE, day)
    pedigree = build_pedigree(records)
    assert (living_on(pedigree, as_of=parse_date(day)).places.tolist() == [0]) is lives
    if lives or holder:
        assert records.column("holder") == (holder,)
    assert records.column("left") == (left,)
    assert records.column("last_seen") == (seen,)
    assert records.column("born_at") == ("North Quay",)
    assert records.findings == ()


def test_before_the_first_move_an_animal_is_where_it_moved_from():
    """A day before any event takes the holder that the first event names as left."""
    events = "id,date,event,from,to\nA,2005,move,North,South\nA,2009,move,South,West\n"
    herd = "id,sire,dam,holder\nA,,,West\nB,,,North\n"
    assert after(herd, events, "2004-12-31").fields["holder"] == ("North", "North")
    assert after(herd, events, "2006").fields["holder"] == ("South", "North")
    assert after(herd, events).fields["holder"] == ("West", "North")


def test_holder_before_an_arrival_from_nowhere_is_not_known():
    """Records name the present holder; before an animal came there it was elsewhere."""
    events = "id,date,event,from,to\nA,2005-03-01,arrival,,West\n"
    herd = "id,sire,dam,holder\nA,,,West\n"
    assert after(herd, events, "2004-12-31").column("holder") == ("",)
    assert after(herd, events, "2005-12-31").column("holder") == ("West",)


def test_move_without_a_destination_ends_the_old_holder():
    """An animal that left a holder for nobody knows where is not listed there."""
    events = "id,date,event,from,to\nA,2005-03-01,arrival,,West\nA,2006-03-01,move,West,\n"
    assert after("id,sire,dam,holder\nA,,,West\n", events).column("holder") == ("",)
    assert after("id,sire,dam,holder\nA,,,East\n", events).column("holder") == ("East",)


def test_uncertain_event_counts_once_it_must_have_happened():
    """A death or move of some day in 2005 has surely happened only by its last day."""
    events = "id,date,event,from,to\nA,2005,death,,\nB,2005,move,North,South\n"
    herd = "id,sire,dam,holder\nA,,,North\nB,,,North\n"
    early, late = after(herd, events, "2005-06-30"), after(herd, events, "2005-12-31")
    assert early.fields["holder"] == ("North", "North")
    assert late.fields["holder"] == ("North", "South")
    for records, living in ((early, [0, 1]), (late, [1])):
        day = parse_date("2005-06-30" if records is early else "2005-12-31")
        assert living_on(build_pedigree(records), as_of=day).places.tolist() == living


def test_event_of_birth_against_the_records():
    """A recorded day of birth stays; the line of the list is named."""
    records = after(
        "id,sire,dam,born\nA,,,2001\nB,,,NA\n",
        "id,date,event\nA,2002-05-01,hatched\nB,2001-03-01,born\n",
    )
    assert records.fields["born"] == ("2001", "2001-03-01")
    assert only(records) == Finding(
        "events-disagree",
        'A: events.csv (line 2) has a birth on 2002-05-01, the records say born "2001"; the '
        "records are used.",
        "Correct one of the two.",
        id="A",
        row=2,
        column="born",
        found="2001",
    )


def test_recorded_days_are_read_in_the_light_of_their_column():
    """A birth that the column settles as 4 March contradicts an event of 3 April."""
    herd = "id,sire,dam,born\nA,,,04/03/2019\nB,,,31/05/2019\n"
    records = after(herd, "id,date,event\nA,2019-04-03,birth\nB,2019-05-31,birth\n")
    assert only(records).found == "04/03/2019"


def test_second_death_of_one_animal():
    """Two deaths of one animal contradict each other; the earlier counts."""
    records = after("id,sire,dam\nA,,\n", "id,date,event\nA,2005,death\nA,2004-02-01,death\n")
    assert records.fields["died"] == ("2004-02-01",)
    assert only(records).message == (
        "A: events.csv (line 2) has a death in 2005, an earlier one on 2004-02-01; that is used."
    )


def test_move_from_where_the_animal_was_not():
    """A move from another holder than the last one known is a doubt, and still counts."""
    records = after(
        "id,sire,dam\nA,,\n",
        "id,date,event,from,to\nA,2001-01-02,arrival,,North\nA,2002-01-02,move,South,West\n",
    )
    assert records.fields["holder"] == ("West",)
    assert only(records) == Finding(
        "events-disagree",
        "A: by events.csv (line 3) it left South on 2002-01-02, but it was at North until then.",
        "Look for a move that is missing or misspelled.",
        id="A",
        row=2,
        found="South",
    )


def test_event_of_a_stranger():
    """Events of ids without a row are named once, with the first line."""
    records = after("id,sire,dam\nA,,\n", "id,date,event\nY,2001,seen\nX,2000,seen\nX,2002,seen\n")
    assert only(records) == Finding(
        "fact-without-animal",
        "events.csv has events of 2 ids without a row in the records: Y and X (first on line 2).",
        "Correct the ids there or add the animals; until then 3 sightings are lost.",
        found="Y",
    )


@pytest.mark.parametrize(
    ("row", "message", "remedy"),
    [
        (
            "A,2001-05-01,deth",
            'events.csv: the event "deth" is not known; 1 such row is not used (line 2).',
            'Expected birth, death, move, arrival, departure or sighting. Did you mean "death"?',
        ),
        (
            ",2001-05-01,death",
            "events.csv, line 2: the event has no id; it is not used.",
            "Give its id.",
        ),
        (
            "A,,death",
            "events.csv, line 2: the event has no date; it is not used.",
            "Give its date.",
        ),
    ],
)
def test_event_that_cannot_be_read(row, message, remedy):
    """An event without a word, id or date that is known is named and not used."""
    records = after("id,sire,dam\nA,,\n", f"id,date,event\n{row}\nA,1999,seen\n")
    assert records.column("died") == ("",)
    assert only(records).kind == "event-unreadable"
    assert only(records).message == message
    assert only(records).remedy == remedy


def test_unreadable_day_of_an_event():
    """A day that cannot be read is told in words, and the event is not used."""
    records = after("id,sire,dam\nA,,\n", "id,date,event\nA,soon,death\nA,1999,seen\n")
    assert [(each.kind, each.message) for each in records.findings] == [
        (
            "unreadable-date",
            'events.csv, line 2: date "soon" is not understood and counts as unknown.',
        ),
        (
            "event-unreadable",
            "events.csv, line 2: the event has no date that can be read; it is not used.",
        ),
    ]


@pytest.mark.parametrize(
    ("day", "kind", "born"),
    [
        ("04/03/2019", "ambiguous-date", "[2019-03-04..2019-04-03]"),
        ("31/05/19", "two-digit-year", "2019-05-31"),
        ("43616", "serial-date", "2019-05-31"),
    ],
)
def test_doubtful_day_of_an_event_that_is_used(day, kind, born):
    """A doubtful day is reported as what it is, with its line, and the event counts."""
    records = after("id,sire,dam\nA,,\n", f"id,date,event\n,1999-05-01,\nA,{day},birth\n")
    assert records.fields["born"] == (born,)
    doubts = [each for each in records.findings if each.kind != "event-unreadable"]
    assert [(each.kind, each.found) for each in doubts] == [(kind, day)]
    assert doubts[0].message.startswith(f'events.csv, line 3: date "{day}" ')


def test_order_of_days_of_events_is_said():
    """The sentence on how the list was read tells its order of day and month."""
    events = "id,date,event\nA,31/05/2019,birth\nA,04/03/2020,seen\n"
    records = after("id,sire,dam\nA,,\n", events)
    assert records.fields["last_seen"] == ("2020-03-04",)
    assert records.reading.endswith(
        "; 2 events from events.csv (comma-separated text, UTF-8; date day-first (31/05/2019))"
    )


def test_one_event_is_counted_as_one():
    """A list of a single event is not called events."""
    records = after("id,sire,dam\nA,,\n", "id,date,event\nA,2019,birth\n")
    assert "; 1 event from events.csv (" in records.reading


def test_list_without_its_columns_is_refused():
    """A list that lacks a column names those that it has and those that are wanted."""
    with pytest.raises(
        RecordsError, match=r"^events\.csv: no column for date and event among id and when it was\."
    ) as caught:
        after("id,sire,dam\nA,,\n", "id,when it was\nA,2001\n")
    assert caught.value.remedy == (
        "A list of events has the columns id, date, event, from, to; settle one with "
        "--map 'Their Column=event'."
    )


def test_columns_of_events_in_other_spellings():
    """Headings of a list are found whatever their case and blanks."""
    read = read_events(
        raw("Animal_ID,Event Date,WHAT,From Holder,Holder\nA,2001,Moved,N,S\n", "events.csv")
    )
    assert read.findings == ()
    (event,) = read.events
    assert (event.id, event.kind, event.origin, event.destination) == ("A", "move", "N", "S")


def test_every_word_for_an_event_is_understood():
    """Each word listed means one of the six kinds, in any case and with any signs."""
    written = {f" {word.upper().replace(' ', ' - ')}.": kind for word, kind in EVENT_WORDS.items()}
    rows = "\n".join(f"A,2001,{word}" for word in written)
    read = read_events(raw(f"id,date,event\n{rows}\n", "events.csv"))
    assert read.findings == ()
    assert [each.kind for each in read.events] == list(written.values())
    assert {each.kind for each in read.events} == {
        "birth",
        "death",
        "move",
        "arrival",
        "departure",
        "sighting",
    }


@pytest.mark.parametrize(
    ("word", "kind"),
    [
        ("Breeding loan", "move"),
        ("on loan", "move"),
        ("Loan-in", "move"),
        ("LOAN OUT", "move"),
        ("returned", "move"),
        ("return from loan", "move"),
        ("donation", "move"),
        ("purchase", "arrival"),
        ("confiscated", "arrival"),
        ("escaped", "departure"),
        ("missing", "departure"),
        ("euthanasia", "death"),
    ],
)
def test_words_of_the_trade(word, kind):
    """What keepers write of loans, sales and losses is one of the six kinds of events."""
    (event,) = read_events(raw(f"id,date,event\nA,2001,{word}\n", "events.csv")).events
    assert event.kind == kind


@pytest.mark.parametrize(
    ("word", "hint"),
    [
        ("gone on breeding loan to the coast", 'It holds "on breeding loan": write move, if'),
        ("found dead (fox)", 'It holds "found dead": write death, if it was one.'),
        ("loann", 'Did you mean "loan"?'),
        ("xyzzy", ""),
    ],
)
def test_unknown_word_that_holds_a_known_one(word, hint):
    """An unknown word is not guessed at; the longest known one in it, or like it, is named."""
    read = read_events(raw(f"id,date,event\nA,2001,{word}\nA,2001,seen\n", "events.csv"))
    (finding,) = read.findings
    assert finding.kind == "event-unreadable"
    expected = "Expected birth, death, move, arrival, departure or sighting."
    assert finding.remedy.startswith(f"{expected} {hint}".rstrip())
    assert finding.remedy == expected or hint


def test_blank_word_of_an_event():
    """A row that does not say what happened is told to be blank there."""
    read = read_events(raw("id,date,event\nA,2001,\nA,2001,seen\n", "events.csv"))
    assert read.findings[0].message == (
        "events.csv: what happened is blank; 1 such row is not used (line 2)."
    )


def test_one_place_in_two_spellings_is_one():
    """Case, blanks and punctuation make no other place, and the records' spelling wins."""
    herd = "id,sire,dam,holder\nA,,,Zoo B\nB,,,Pier 1-12\nC,,,Zoo B\nD,,,zoo b\n"
    events = (
        "id,date,event,from,to\nB,2001-01-01,arrival,,zoo-b\nB,2002-01-01,move,ZOO  B,pier 1 12\n"
        "C,2001-01-01,arrival,,west dock\nC,2002-01-01,move,West-Dock,zoo b.\n"
        "A,2003-01-01,move,zoo b,\nD,2003-01-01,arrival,,ZOO B\n"
    )
    records = after(herd, events)
    assert records.findings == ()
    assert records.fields["holder"] == ("", "Pier 1-12", "Zoo B", "zoo b")
    early = after(herd, events, "2001-12-31")
    assert early.fields["holder"][1:3] == ("Zoo B", "west dock")


def test_numbers_in_the_name_of_a_place_stay_apart():
    """Room 1-12 is another than room 11-2, whatever signs are left out of account."""
    events = "id,date,event,from,to\nA,2001,arrival,,room 1-12\nA,2002,move,room 11-2,room 3\n"
    assert only(after("id,sire,dam\nA,,\n", events)).message == (
        "A: by events.csv (line 3) it left room 11-2 in 2002, but it was at room 1-12 until then."
    )


@pytest.mark.parametrize(
    ("day", "said"),
    [
        ("2012", "in 2012"),
        ("2012-05", "in 2012-05"),
        ("2012-05-31", "on 2012-05-31"),
        ("04/03/2012", "on 04/03/2012"),
        ("31 May 2012", "on 31 May 2012"),
        ("May 2012", "in May 2012"),
    ],
)
def test_day_is_on_and_year_is_in(day, said):
    """Messages put the right word before a date of any precision."""
    records = after("id,sire,dam,died\nA,,,2001\n", f"id,date,event\nA,{day},death\n")
    assert f"has a death {said}, the records say" in records.findings[-1].message


LOOK_ALIKES = "id,sire,dam,sex\n0003,,,\nB-12,,,\nB1-2,,,\n"


def test_stranger_that_is_spelled_almost_as_an_animal():
    """An id that the records lack is shown with those of theirs that are almost the same."""
    message = "without a row in the records: 3 (perhaps 0003), b12 (perhaps B-12) and X ("
    joined = with_second(LOOK_ALIKES, "id,sex\n3,m\nb12,m\nX,m\n")
    assert message in only(joined).message
    told = only(after(LOOK_ALIKES, "id,date,event\n3,2001,seen\nb12,2001,died\nX,2001,died\n"))
    assert message in told.message
    assert told.remedy == (
        "Correct the ids there or add the animals; until then 1 sighting and 2 deaths are lost."
    )


def test_ids_of_the_other_tables_are_kept():
    """Records know which ids stand in facts and events, as they are written there."""
    joined = with_second(HERD, "id,sex\nX,m\n,m\nA,m\n")
    assert joined.joined_ids == {"X", "A"}
    events = raw("id,date,event\nY,2001,seen\nZ,,\n", "events.csv")
    assert with_events(joined, events).joined_ids == {"X", "A", "Y", "Z"}


def test_merged_id_that_stands_in_events_only():
    """Merging an id that no row has is no idle decision where events are told of it."""
    rules = RecordRules(decisions=(Decision("merge", "A7", also=("B7",)),))
    text = "id,sire,dam,sex\nA7,,,m\n"
    joined = after(text, "id,date,event\nB7,2020-02-03,death\n", rules=rules)
    assert joined.fields["died"] == ("2020-02-03",)
    audit = audit_records(joined, rules)
    assert (audit.findings, audit.decisions_applied) == ((), 1)


# Columns settled by the keeper


def herd_with(tmp_path, events: str, *column_map: str, facts: str | None = None) -> Records:
    """The small herd with events.csv and facts.csv read from files."""
    (tmp_path / "herd.csv").write_text(HERD)
    (tmp_path / "events.csv").write_text(events)
    told = None
    if facts is not None:
        told = tmp_path / "facts.csv"
        told.write_text(facts)
    return read_records(
        tmp_path / "herd.csv",
        column_map=column_map,
        facts=told,
        events=tmp_path / "events.csv",
    )


def test_column_map_reaches_the_list_of_events(tmp_path):
    """Columns of each table are settled by one map, shared by name of column and field."""
    records = herd_with(
        tmp_path,
        "Book page,Moved on,Kind,Old,New,Remark\nA,2001-02-03,loan,North,South,x\n",
        "Book page=id",
        "Moved on=date",
        "Kind=event",
        "Old=from",
        "New=to",
        "Hatched=born",
        facts="Book page,Hatched\nB,2001\n",
    )
    assert records.fields["holder"] == ("South", "", "")
    assert records.fields["born"] == ("", "2001", "")
    assert records.findings == ()
    assert records.reading.endswith(
        "taken as fields: Book page = id, Moved on = date, Kind = event, Old = from, New = to)"
    )


def test_column_of_a_list_of_events_that_is_left_alone(tmp_path):
    """A column that would be taken is not, where the keeper says so; one may be put for it."""
    events = "id,date,event,to,New\nA,2001-02-03,loan,x,South\n"
    assert herd_with(tmp_path, events, "New=to").fields["holder"] == ("South", "", "")
    assert herd_with(tmp_path, events, "to=").column("holder") == ("", "", "")


def test_id_of_a_list_of_events_is_joined_from_columns(tmp_path):
    """Columns joined to an id, and parts of cells, serve a list of events as they do records."""
    events = "Cage,Tag,When\nA,,2001: died\n"
    records = herd_with(tmp_path, events, "Cage+Tag=id", r"When~^(\d+)=date", r"When~(\w+)$=event")
    assert records.fields["died"] == ("[2001-01-01..2001-12-31]", "", "")


@pytest.mark.parametrize(
    ("entry", "said"),
    [
        ("Knid=event", '--map "Knid=event": there is no column "Knid". Did you mean "Kind"?'),
        ("Kind=evnt", '--map "Kind=evnt": there is no field "evnt". Did you mean "event"?'),
        ("Kind=holder", '--map "Kind=holder": there is no column "Kind".'),
    ],
)
def test_column_map_of_events_that_is_wrong(tmp_path, entry, said):
    """An entry that fits no table of the call is refused and never passed over."""
    with pytest.raises(RecordsError) as caught:
        herd_with(tmp_path, "id,date,event,Kind\nA,2001,seen,x\n", entry)
    assert said in str(caught.value)


def test_fields_of_events_need_a_list_of_events(tmp_path):
    """Without a list of events its fields are refused on the command line, not in a policy."""
    herd = tmp_path / "herd.csv"
    herd.write_text(HERD)
    result = run("audit", herd, "--map", "sex=event")
    assert result.status == 2
    assert 'only a list of events (--events) has a field "event".' in result.err
    policy = Policy(records=RecordRules(column_map=("Kind=event", "sex=")))
    assert "sex" not in Call(records=str(herd)).read(policy).fields


def test_title_above_a_list_of_events(tmp_path):
    """Rows above the header of a list are passed over, also where they name a column."""
    events = "Moves of all herds,,,\nDate,2020-01-01,,\nid,date,event,to\nA,2001,move,South\n"
    assert herd_with(tmp_path, events).fields["holder"] == ("South", "", "")
    mapped = "Moves of all herds,,,\nNo,On,Kind,New\nA,2001,move,South\n"
    column_map = ("No=id", "On=date", "Kind=event", "New=to")
    assert herd_with(tmp_path, mapped, *column_map).fields["holder"] == ("South", "", "")


def test_delimiter_of_a_list_of_events_is_that_of_its_columns(tmp_path):
    """Commas in the cells of a list with semicolons do not split it."""
    events = "id;date;event;to\nA;2001;move;North, the Quay, 1, 2\n"
    assert herd_with(tmp_path, events).fields["holder"] == ("North, the Quay, 1, 2", "", "")


HOLDERS = st.sampled_from(["North", "South", "West", ""])
KINDS = st.sampled_from(["birth", "death", "move", "arrival", "departure", "seen"])


@st.composite
def event_rows(draw: st.DrawFn) -> list[str]:
    """Events of two animals on days of their own."""
    days = draw(st.lists(st.integers(0, 3000), min_size=1, max_size=8, unique=True))
    start = datetime.date(2000, 1, 1)
    return [
        ",".join(
            (
                draw(st.sampled_from("AB")),
                (start + datetime.timedelta(days=day)).isoformat(),
                draw(KINDS),
                draw(HOLDERS),
                draw(HOLDERS),
            )
        )
        for day in days
    ]


def told(records: Records) -> tuple:
    """What records say after events, the lines of the list left out of account."""
    names = ("born", "died", "entered", "left", "last_seen", "holder", "born_at")
    kinds = sorted((each.kind, each.id or "", each.found or "") for each in records.findings)
    return tuple(tuple(records.column(name)) for name in names), kinds


@given(event_rows(), st.data(), st.sampled_from([None, "2003-06-01", "2006"]))
def test_order_of_the_list_does_not_matter(rows, data, day):
    """Events in any order of rows leave the records the same, on any day."""
    shuffled = data.draw(st.permutations(rows))
    header, herd = "id,date,event,from,to", "id,sire,dam,holder\nA,,,West\nB,,,\n"
    one, other = (after(herd, "\n".join([header, *each]), day) for each in (rows, shuffled))
    assert told(one) == told(other)


@given(event_rows(), st.integers(0, 3000))
def test_events_after_a_day_change_nothing_on_it_but_births_and_deaths(rows, number):
    """What happens later does not change where an animal is known to be, or that it left."""
    day = (datetime.date(2000, 1, 1) + datetime.timedelta(days=number)).isoformat()
    header, herd = "id,date,event,from,to", "id,sire,dam\nA,,\nB,,\n"
    early = [row for row in rows if row.split(",")[1] <= day]
    whole = after(herd, "\n".join([header, *rows]), day)
    cut = after(herd, "\n".join([header, *(early or ["C,2000-01-01,seen,,"])]), day)
    for name in ("entered", "left", "last_seen"):
        assert whole.column(name) == cut.column(name)
    for whole_holder, cut_holder in zip(whole.column("holder"), cut.column("holder"), strict=True):
        assert cut_holder in ("", whole_holder)
    lived = [
        living_on(build_pedigree(each), as_of=parse_date(day)).places.tolist()
        for each in (whole, cut)
    ]
    born_later = {row[0] for row in rows if row.split(",")[1] > day and ",birth," in row}
    assert set(lived[1]) - set(lived[0]) <= {"AB".index(name) for name in born_later}


def test_events_reach_a_plan_through_the_program(tmp_path):
    """`--events` with `--as-of` shows the holder and the living of that day."""
    herd, events = tmp_path / "herd.csv", tmp_path / "events.csv"
    herd.write_text("id,sire,dam,sex\nA,,,m\nB,,,f\n")
    events.write_text(f"{LIFE}B,2001-01-01,birth,,North Quay\n")
    words = ("animals", herd, "--events", events, "--format", "json", "--quiet", "--as-of")
    at = {
        day: {
            each["id"]: (each["living"], each["holder"])
            for each in run(*words, day).document["animals"]
        }
        for day in ("2005-12-31", "2007-06-30")
    }
    assert at["2005-12-31"] == {"A": (True, "South Pier"), "B": (True, "North Quay")}
    assert at["2007-06-30"] == {"A": (False, "South Pier"), "B": (True, "North Quay")}


def test_facts_and_events_are_never_written_over(tmp_path):
    """A second table or list of the call is an input and is not taken for an output."""
    herd, facts = tmp_path / "herd.csv", tmp_path / "facts.csv"
    herd.write_text(HERD)
    facts.write_text("id,born\nA,2001\n")
    result = run("audit", herd, "--facts", facts, "--out", facts)
    assert result.status == 2
    assert facts.read_text() == "id,born\nA,2001\n"
    joined = read_records(herd, facts=facts)
    assert joined.fields["born"] == ("2001", "", "")


MERGED = RecordRules(
    decisions=(
        Decision("merge", "A7", also=("B7",)),
        Decision("use-row", "A7", row=2),
    )
)


def test_events_of_a_merged_id_are_the_animals_events():
    """A death listed under the id that was merged away ends the life of the one animal."""
    text = "id,sire,dam,sex,born\nA7,,,m,2015\nB7,,,m,\nC,A7,,f,2018\n"
    joined = after(text, "id,date,event\nB7,2020-02-03,death\n", rules=MERGED)
    audit = audit_records(joined, MERGED)
    assert not audit.stopping
    pedigree = build_pedigree(audit)
    died = pedigree.animals[pedigree.index["B7"]].dates["died"]
    assert died.text == "2020-02-03"
    living = living_on(pedigree, as_of=parse_date("2021-12-31"))
    assert [pedigree.ids[place] for place in living.places.tolist()] == ["C"]


def test_facts_of_a_merged_id_are_the_animals_facts():
    """A fact told under the id that was merged away fills the row that is believed."""
    first = map_columns(raw("id,sire,dam\nA7,,\nB7,,\n", "herd.csv"))
    joined = with_facts(first, raw("id,sex\nB7,f\n", "facts.csv"), (), rules=MERGED)
    audit = audit_records(joined, MERGED)
    assert [animal.sex for animal in audit.animals] == ["female"]
    assert audit.decisions_applied == 2
