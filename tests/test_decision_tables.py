"""Decisions in tables: they equal those of the policy file, and every fault is told at once."""

import csv
import hashlib
import io
import tomllib

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.dates import parse_date
from pairing.errors import PolicyError
from pairing.policy.decision_tables import DECISION_WORDS, read_decision_tables
from pairing.policy.keys import KEYS, NEEDS
from pairing.policy.reading import policy_from_tables, read_policy
from pairing.policy.rules import AnimalDecision, PairDecision, Policy
from pairing.records.fields import FIELDS
from pairing.records.findings import KINDS
from pairing.records.rules import Decision
from tests.programmes import careful

MIXED = """\
Sire,Dam,ID,Decision,Litters,Until,Reason,Row,Also,Parent,Field,Value,Kind,Who,When,Remarks
A12,B07,,together,,2028-01-01,bonded pair,,,,,,,,,call the vet
A13,B08,,Together No Young,,,,,,,,,,,,
A14,B09,,MUST-BREED,,2028,,,,,,,,,,
A15,B10,,never,,,,,,,,,,,,
,,C33,rest,,,hip injury,,,,,,,,,
,,C34,must breed,,,,,,,,,,,,
,,C35,at most,2,~2028,,,,,,,,,,
,,D1,use-row,,,the later entry,7,,,,,,keeper,2026-11-02,
,,D2,merge,,,,,D02| d2 |D-2,,,,,,,
,,D3,Drop Link,,,,,,SIRE,,,,,,
,,D4,set,,,,,,,Last Seen,2019-05,,,,
,,D5,set,,,,,,,dam,,,,,
,,D6,accept,,,,,,,,,Parent younger,,2026,
,,,,,,,,,,,,,,,a row of notes alone
"""
MIXED_AS_TOML = """
[[pairs]]
sire = "A12"
dam = "B07"
decision = "together"
until = 2028-01-01
reason = "bonded pair"
[[pairs]]
sire = "A13"
dam = "B08"
decision = "together-no-young"
[[pairs]]
sire = "A14"
dam = "B09"
decision = "must-breed"
until = 2028
[[pairs]]
sire = "A15"
dam = "B10"
decision = "never"
[[animals]]
id = "C33"
decision = "rest"
reason = "hip injury"
[[animals]]
id = "C34"
decision = "must-breed"
[[animals]]
id = "C35"
decision = "at-most"
litters = 2
until = "~2028"
[[records.decisions]]
id = "D1"
decision = "use-row"
row = 7
who = "keeper"
when = 2026-11-02
why = "the later entry"
[[records.decisions]]
id = "D2"
decision = "merge"
also = ["D02", "d2", "D-2"]
[[records.decisions]]
id = "D3"
decision = "drop-link"
parent = "sire"
[[records.decisions]]
id = "D4"
decision = "set"
field = "last_seen"
value = "2019-05"
[[records.decisions]]
id = "D5"
decision = "set"
field = "dam"
value = ""
[[records.decisions]]
id = "D6"
decision = "accept"
kind = "parent-younger"
when = 2026
"""
ALL_WORDS = (
    "together, together-no-young, must-breed, never, rest, at-most, "
    "use-row, merge, drop-link, set, accept"
)


def table_of(tmp_path, text, name="keepers.csv"):
    """A table with this text."""
    path = tmp_path / name
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return path


def decided(policy):
    """The decisions of a policy, apart from everything else in it."""
    return policy.pairs, policy.animals, policy.records.decisions


def faults_of(paths, policy=None):
    """The problems told of tables."""
    with pytest.raises(PolicyError, match="the decisions cannot be used as they are") as told:
        read_decision_tables(paths, policy or Policy())
    assert told.value.exit_status == 2
    assert told.value.remedy == "Correct what is named above and save the table again."
    return list(told.value.details)


def test_table_says_the_same_as_the_policy_file(tmp_path):
    """A table with every decision gives the rules that the policy file gives."""
    read = read_decision_tables([table_of(tmp_path, MIXED)], Policy())
    written = policy_from_tables(tomllib.loads(MIXED_AS_TOML))
    assert decided(read) == decided(written)
    words = [each.decision for kind in decided(read) for each in kind]
    assert set(words) == {word for words in DECISION_WORDS.values() for word in words}


def test_workbook_says_the_same_as_the_policy_file(tmp_path):
    """A workbook with numbers and dates in its cells gives the same rules as the table of text."""
    import datetime

    import openpyxl

    book = openpyxl.Workbook()
    for row in csv.reader(io.StringIO(MIXED)):
        cells = [int(cell) if cell in ("2", "7", "2028", "2026") else cell or None for cell in row]
        book.active.append(
            [
                datetime.date.fromisoformat(cell) if cell in ("2028-01-01", "2026-11-02") else cell
                for cell in cells
            ]
        )
    book.save(tmp_path / "keepers.xlsx")
    read = read_decision_tables([tmp_path / "keepers.xlsx"], Policy())
    assert decided(read) == decided(policy_from_tables(tomllib.loads(MIXED_AS_TOML)))


def test_tables_come_after_the_policy_and_leave_the_rest(tmp_path):
    """Entries are added behind the policy's own, and no other rule changes."""
    (tmp_path / "rules.toml").write_text(
        '[limits]\nyoung = 4\n[records]\nselfing = true\n[[pairs]]\nsire = "A"\ndam = "B"\n'
        'decision = "never"\n[[animals]]\nid = "C"\ndecision = "rest"\n'
        '[[records.decisions]]\nid = "D"\ndecision = "use-row"\nrow = 3\n'
    )
    policy = read_policy(tmp_path / "rules.toml")
    first = table_of(tmp_path, "id,decision,row\nE,use-row,4\nC2,rest,\n", "first.csv")
    second = table_of(tmp_path, "sire;dam;decision\nA;B2;never\n", "second.csv")
    read = read_decision_tables([first, second], policy)
    assert (read.limits, read.records.selfing) == (policy.limits, True)
    assert read.pairs == (*policy.pairs, PairDecision("A", "B2", "never"))
    assert read.animals == (*policy.animals, AnimalDecision("C2", "rest"))
    assert read.records.decisions == (
        *policy.records.decisions,
        Decision("use-row", "E", row=4),
    )


def test_digest_covers_the_policy_and_every_table(tmp_path):
    """The digest is that of all digests, one a line, in the order given."""
    first = table_of(tmp_path, "id,decision,reason\nC2,rest,hip\n", "first.csv")
    second = table_of(tmp_path, "sire;dam;decision\nA;B2;never\n", "second.csv")
    digests = [hashlib.sha256(path.read_bytes()).hexdigest() for path in (first, second)]

    def digest(*lines):
        return hashlib.sha256("\n".join(lines).encode()).hexdigest()

    assert read_decision_tables([first], Policy()).sha256 == digest("", digests[0])
    policy = Policy(sha256="ab" * 32)
    both = read_decision_tables([first, second], policy)
    assert both.sha256 == digest("ab" * 32, *digests)
    assert read_decision_tables([second, first], policy).sha256 != both.sha256
    assert read_decision_tables([], policy) is policy


def test_reason_and_why_are_the_same_column(tmp_path):
    """Either heading serves both kinds of decision, and both may stand side by side."""
    for heading in ("why", "REASON"):
        path = table_of(tmp_path, f"id,row,decision,{heading}\nA,,rest,hip\nB,3,use-row,later\n")
        read = read_decision_tables([path], Policy())
        assert (read.animals[0].reason, read.records.decisions[0].why) == ("hip", "later")
    path = table_of(tmp_path, "id,row,decision,why,reason\nA,,rest,,hip\nB,3,use-row,later,\n")
    read = read_decision_tables([path], Policy())
    assert (read.animals[0].reason, read.records.decisions[0].why) == ("hip", "later")


@pytest.mark.parametrize(
    "heading", ["Remarks", "Notes", "Comment", "Colour", "Name", "Where", "Date", "Keeper", ""]
)
def test_columns_of_the_keeper_are_left_alone(tmp_path, heading):
    """Columns and rows that hold only notes are passed over."""
    path = table_of(tmp_path, f"{heading},id,decision\nlame,A,rest\nask the vet,,\n")
    assert read_decision_tables([path], Policy()).animals == (AnimalDecision("A", "rest"),)


@pytest.mark.parametrize("key", sorted({key for table in DECISION_WORDS for key in KEYS[table]}))
def test_misspelled_columns_are_told(tmp_path, key):
    """Each heading with its last letter doubled is offered as it should be."""
    path = table_of(tmp_path, f"{key + key[-1]},id,decision,notes\n,A,rest,\n")
    assert faults_of([path]) == [
        f'keepers.csv, line 1, column "{key + key[-1]}": not known. Did you mean "{key}"? If it '
        "holds notes of your own, give it another name."
    ]


def test_who_and_when_may_stand_beside_any_decision(tmp_path):
    """Who decided and when is allowed in rows about the season, which keep no such thing."""
    path = table_of(tmp_path, "id,decision,who,when\nA,rest,keeper,last week\n")
    assert read_decision_tables([path], Policy()).animals == (AnimalDecision("A", "rest"),)


def test_date_of_a_decision_may_be_of_reduced_precision(tmp_path):
    """A year stands for all its days."""
    path = table_of(tmp_path, "id,decision,until\nA,rest,2028\n")
    (animal,) = read_decision_tables([path], Policy()).animals
    assert animal.until == parse_date("2028")


def test_every_fault_is_told_at_once(tmp_path):
    """Faults of header, rows and cells of two tables come in one error with line and column."""
    fields = ", ".join(name for name in FIELDS if name != "id")
    kinds = ", ".join(name for name, kind in KINDS.items() if not kind.stops)
    seasons = table_of(
        tmp_path,
        "sire,dam,id,decision,litters,untill,until,reason\n"
        "A1,B1,,nevr,,,,\n"
        "A1,,,together,,,,\n"
        "A1,B1,C1,together,,,,\n"
        "A1,B1,C1,must-breed,,,,\n"
        ",,,must-breed,,,,\n"
        "A1,B1,,never,,,next spring,\n"
        ",,C1,at-most,two,,,\n"
        ",,C1,at-most,,,,\n"
        ",,C1,,,,,\n"
        ",,C1,rest,,,,,,lame\n"
        ",,C1,use-row,3,,2028,\n",
        "seasons.csv",
    )
    records = table_of(
        tmp_path,
        "id;decision;row;also;parent;field;value;kind;who;when;why;Reason\n"
        "A1;use-row;0;;;;;;;;;\n"
        ";use-row;2.0;;;;;;;;;\n"
        "A1;merge;; | ;;;;;;;;\n"
        "A1;drop-link;;;mother;;;;;soon;;\n"
        "A1;set;;;;bron;x;;;;;\n"
        "A1;set;4;;;;x;;;;;\n"
        "A1;accept;;;;;;Own Parent;;;;\n"
        "A1;accept;;;;;;parent-yonger;;;a;b\n",
        "records.csv",
    )
    assert faults_of([seasons, records]) == [
        'seasons.csv, line 1, column "untill": not known. Did you mean "until"? If it holds '
        "notes of your own, give it another name.",
        'seasons.csv, line 2, column "decision": found "nevr", expected one of: '
        f'{ALL_WORDS} (did you mean "never"?).',
        'seasons.csv, line 3, column "dam": found nothing, expected id of the female; together '
        "needs it.",
        'seasons.csv, line 4, column "id": found "C1", expected a blank cell; together does not '
        'take "id".',
        'seasons.csv, line 5: found id "C1", sire "A1" and dam "B1", expected either "sire" and '
        '"dam" or "id" filled; must-breed is about a pair or about one animal.',
        'seasons.csv, line 6: found none of them, expected either "sire" and "dam" or "id" '
        "filled; must-breed is about a pair or about one animal.",
        'seasons.csv, line 7, column "until": found "next spring", expected a date such as '
        "2027-03-01.",
        'seasons.csv, line 8, column "litters": found "two", expected a whole number from 0 to '
        "1000000.",
        'seasons.csv, line 9, column "litters": found nothing, expected with at-most: how many '
        "litters; at-most needs it.",
        f'seasons.csv, line 10, column "decision": found nothing, expected one of: {ALL_WORDS}.',
        "seasons.csv, line 11: found more cells than the 8 columns of the header, expected none "
        "beyond them.",
        'seasons.csv, line 12, column "litters": found "3", expected a blank cell; use-row does '
        'not take "litters".',
        'seasons.csv, line 12, column "until": found "2028", expected a blank cell; use-row does '
        'not take "until".',
        'seasons.csv, line 12, column "row": found nothing, expected line of the row that is '
        "believed; use-row needs it.",
        'records.csv, line 2, column "row": found "0", expected a whole number from 1 to '
        "1000000000.",
        'records.csv, line 3, column "row": found "2.0", expected a whole number from 1 to '
        "1000000000.",
        'records.csv, line 3, column "id": found nothing, expected id of the animal; use-row '
        "needs it.",
        'records.csv, line 4, column "also": found "|", expected an id such as "A12" or a list '
        'of them, ["A12", "A13"].',
        'records.csv, line 5, column "parent": found "mother", expected one of: sire, dam.',
        'records.csv, line 5, column "when": found "soon", expected a date such as 2027-03-01.',
        f'records.csv, line 6, column "field": found "bron", expected one of: {fields} (did you '
        'mean "born"?).',
        'records.csv, line 7, column "row": found "4", expected a blank cell; set does not take '
        '"row".',
        'records.csv, line 7, column "field": found nothing, expected the field that is set; set '
        "needs it.",
        'records.csv, line 8, column "kind": found "Own Parent", expected a finding that leaves '
        'kinship defined; "own-parent" cannot be accepted, only mended by drop-link, set or '
        "use-row.",
        'records.csv, line 9, column "Reason": found "b", expected blank or the same as in '
        'column "why".',
        f'records.csv, line 9, column "kind": found "parent-yonger", expected one of: {kinds} '
        '(did you mean "parent-younger"?).',
    ]


def test_error_names_every_table(tmp_path):
    """The headline names the tables of the call, without the folders above them."""
    bad = table_of(tmp_path, "id,decision,reason\nA,rset,\n", "bad.csv")
    good = table_of(tmp_path, "id,decision,reason\nA,rest,\n", "good.csv")
    with pytest.raises(
        PolicyError, match=r"^bad\.csv and good\.csv: the decisions cannot be used as they are\.\n"
    ):
        read_decision_tables([bad, good], Policy())


def test_table_without_decisions_is_told(tmp_path):
    """A table in which no column says what is decided is told once, not for every row."""
    path = table_of(tmp_path, "id,sex,born\nA,m,2019\nB,f,2018\n")
    assert faults_of([path]) == [
        'keepers.csv, line 1: found no column "decision", expected one that says in each row '
        f"what is decided: {ALL_WORDS}."
    ]


def test_misspelled_column_of_decisions_is_told_with_the_right_one(tmp_path):
    """A heading that looks like one of ours is never taken for a note."""
    path = table_of(tmp_path, "id,decisions,reason\nA,rest,\n")
    assert faults_of([path])[0] == (
        'keepers.csv, line 1, column "decisions": not known. Did you mean "decision"? If it '
        "holds notes of your own, give it another name."
    )


def test_set_without_a_column_for_the_value_is_told(tmp_path):
    """Only a column of values that is there can clear a field by a blank cell."""
    path = table_of(tmp_path, "id,decision,field\nA,set,born\n")
    assert faults_of([path]) == [
        'keepers.csv, line 2, column "value": found nothing, expected what is read in the field; '
        "blank clears it; set needs it."
    ]
    path = table_of(tmp_path, "id,decision,field,value\nA,set,born,\n")
    assert read_decision_tables([path], Policy()).records.decisions == (
        Decision("set", "A", field="born"),
    )


def test_tables_that_cannot_be_read_are_told_together(tmp_path):
    """Tables that are missing, empty or no table are told at once with the faults of others."""
    missing = tmp_path / "lost.csv"
    empty = table_of(tmp_path, "", "empty.csv")
    unread = table_of(tmp_path, b"PK\x03\x04 not a workbook", "broken.xlsx")
    bad = table_of(tmp_path, "id,decision,reason\nA,rset,\n", "bad.csv")
    told = faults_of([missing, empty, unread, bad])
    assert len(told) == 4
    assert "lost.csv: there is no such file." in told[0]
    assert told[1].startswith("empty.csv: the file is empty.")
    assert told[2].startswith("broken.xlsx: the workbook cannot be read")
    assert told[3].startswith('bad.csv, line 2, column "decision": found "rset", expected one of')


def test_tables_may_not_contradict_the_policy_or_each_other(tmp_path):
    """Contradictions are told with the places of both entries, whichever file they stand in."""
    policy = policy_from_tables(
        {
            "pairs": [{"sire": "A1", "dam": "B1", "decision": "never"}],
            "records": {
                "decisions": [
                    {"decision": "use-row", "id": "C1", "row": 4},
                    {"decision": "merge", "id": "C2", "also": ["C3"]},
                ]
            },
        }
    )
    first = table_of(
        tmp_path,
        "sire,dam,id,decision,row,also,parent\n"
        "A1,B1,,must-breed,,,\n"
        ",,C1,use-row,7,,\n"
        ",,C3,merge,,C2,\n"
        ",,C5,drop-link,,,dam\n",
        "first.csv",
    )
    second = table_of(tmp_path, "id,decision,parent\nC5,drop-link,dam\n", "second.csv")
    assert faults_of([first, second], policy) == [
        "first.csv, line 2: A1 x B1 is must-breed, but the policy's [[pairs]] number 1 says never.",
        "first.csv, line 3: C1 is read from line 7, but the policy's [[records.decisions]] "
        "number 1 says C1 is read from line 4.",
        "second.csv, line 2: the dam of C5 is dropped, which first.csv, line 5 says already.",
        "first.csv, line 4: merging goes round in a circle: C2 into C3 (first.csv, "
        "line 4), C3 into C2 (the policy's [[records.decisions]] number 2).",
    ]


SAFE = st.text("ABCÄé東0123 -", min_size=1, max_size=8).map(str.strip).filter(bool)
WESTERN = st.text("ABCÄé0123 -", min_size=1, max_size=8).map(str.strip).filter(bool)
VALUES = {
    "until": st.sampled_from(["2028", "2028-05", "2028-05-01", "~2028", "[2027..2028]"]),
    "when": st.sampled_from(["2026", "2026-05-01"]),
    "litters": st.integers(0, 9),
    "row": st.integers(1, 10**7),
    "parent": st.sampled_from(["sire", "dam"]),
    "field": st.sampled_from([name for name in FIELDS if name != "id"]),
    "kind": st.sampled_from([name for name, kind in KINDS.items() if not kind.stops]),
}
REQUIRED = ("sire", "dam", "id")
HEADINGS = list(
    dict.fromkeys(
        "why" if key == "reason" else key for table in DECISION_WORDS for key in KEYS[table]
    )
)


@st.composite
def entries(draw, words):
    """One decision as the policy file has it, with the list it belongs to."""
    table = draw(st.sampled_from(list(DECISION_WORDS)))
    decision = draw(st.sampled_from(DECISION_WORDS[table]))
    needs = NEEDS.get(table, {}).get(decision, ())
    others = {key for keys in NEEDS.get(table, {}).values() for key in keys} - set(needs)
    entry = {"decision": decision}
    for key in KEYS[table]:
        wanted = key in (*needs, *REQUIRED) or draw(st.booleans())
        if key != "decision" and key not in others and wanted:
            if key == "also":
                entry[key] = draw(st.lists(words, min_size=1, max_size=2, unique=True))
            else:
                entry[key] = draw(VALUES.get(key, words))
    return table, entry


def as_policy(decisions):
    """The policy of entries as written in TOML; None if they contradict each other."""
    tables = {"records": {"decisions": []}, "pairs": [], "animals": []}
    for table, entry in decisions:
        (tables["records"]["decisions"] if "." in table else tables[table]).append(entry)
    try:
        return policy_from_tables(tables)
    except PolicyError:
        return None


def as_row(table, entry, headings):
    """One row of a table for an entry."""
    cells = {
        ("why" if key == "reason" else key): "|".join(value)
        if isinstance(value, list)
        else str(value)
        for key, value in entry.items()
    }
    return [cells.get(heading, "") for heading in headings]


@careful(150)
@given(st.data())
def test_any_table_says_what_the_policy_file_says(tmp_path_factory, data):
    """Delimiter, encoding, line ends, order and spelling of columns change nothing."""
    encoding = data.draw(st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "cp1252"]), "encoding")
    words = WESTERN if encoding == "cp1252" else SAFE
    decisions = data.draw(st.lists(entries(words), min_size=1, max_size=5), "decisions")
    headings = data.draw(st.permutations(HEADINGS), "headings")
    spell = data.draw(st.sampled_from([str, str.upper, str.title, " {}. ".format]), "spelling")
    delimiter = data.draw(st.sampled_from(",;\t"), "delimiter")
    line_end = data.draw(st.sampled_from(["\n", "\r\n", "\r"]), "line end")
    text = io.StringIO()
    writer = csv.writer(text, delimiter=delimiter, lineterminator=line_end)
    writer.writerow([spell(heading) for heading in headings])
    writer.writerows(as_row(table, entry, headings) for table, entry in decisions)
    path = tmp_path_factory.mktemp("tables") / "keepers.csv"
    path.write_bytes(text.getvalue().encode(encoding))
    expected = as_policy(decisions)
    if expected is None:
        assert all("line " in fault for fault in faults_of([path]))
    else:
        assert decided(read_decision_tables([path], Policy())) == decided(expected)


@careful(150)
@given(
    st.lists(
        st.lists(
            st.sampled_from(
                ["", "A", "B|C", "rest", "merge", "must-breed", "set", "sire", "2028", "-1", "loop"]
            ),
            min_size=4,
            max_size=9,
        ),
        min_size=1,
        max_size=4,
    ),
    st.permutations(["id", "decision", "sire", "dam", "also", "until", "value", "field"]),
)
def test_no_table_fails_without_an_explanation(tmp_path_factory, rows, headings):
    """Whatever the cells hold, a table is read or refused with the line of each fault."""
    text = io.StringIO()
    writer = csv.writer(text)
    writer.writerow(headings)
    writer.writerows(rows)
    path = tmp_path_factory.mktemp("tables") / "keepers.csv"
    path.write_text(text.getvalue())
    try:
        read_decision_tables([path], Policy())
        return
    except PolicyError as error:
        faults = error.details
    assert faults
    assert all(fault.startswith("keepers.csv") for fault in faults)
