"""What `audit` finds in records, word for word, and what it leaves as it is."""

from __future__ import annotations

import csv
import io
from pathlib import Path
from typing import TYPE_CHECKING, NamedTuple

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairing.dates import EXPECTED
from pairing.errors import RecordsError
from pairing.pedigree.descent import build_pedigree
from pairing.records.audit import Audit, audit_records
from pairing.records.fields import CASTRATE_WORDS
from pairing.records.findings import KINDS, SEVERITIES, Finding
from pairing.records.readers import read_records
from tests.pedigrees import audit_of, pedigree_of

if TYPE_CHECKING:
    from pairing.records.animals import Animal


def animal_of(audit: Audit, animal_id: str) -> Animal:
    """The entry of one animal."""
    return next(each for each in audit.animals if each.id == animal_id)


def findings_of(audit: Audit, kind: str) -> list[Finding]:
    """All findings of one kind."""
    return [finding for finding in audit.findings if finding.kind == kind]


class Case(NamedTuple):
    """Records with the one finding of a kind that they must give."""

    kind: str
    text: str
    id: str | None
    row: int | None
    column: str | None
    found: str | None
    message: str
    remedy: str
    severity: str | None = None


PARENT_LIST = (
    "Write S12|S15 for equal chances or S12:0.7|S15:0.3 for chances that add up to at most 1."
)
CASES = (
    Case(
        "id-means-unknown",
        "id,sire,dam\nNA,,\nA,,\nC,NA,A\n",
        "NA",
        2,
        "id",
        "NA",
        '"NA" is an animal\'s id and also a word for an unknown parent; as a parent it is read as '
        "unknown.",
        "Give the animal another id.",
    ),
    Case(
        "clone-without-row",
        "id,sire,dam,clone_of\nA,,,X\n",
        "A",
        2,
        "clone_of",
        "X",
        'A is a clone of "X", which is not in the records.',
        "Add a row for it, or correct the id; until then its own parents count.",
    ),
    Case(
        "duplicate-id",
        "id,sire,dam\nA,S,\nS,,\nT,,\nA,T,\n",
        "A",
        5,
        "id",
        "A",
        'A has rows on lines 2, 5 that differ: sire "S" or "T".',
        "Keep the right row, or give the second animal an id of its own.",
    ),
    Case(
        "duplicate-id",
        "id,sire,dam,sex,born\nA,,,m,2019\nA,,,f,2020\n",
        "A",
        3,
        "id",
        "A",
        'A has rows on lines 2, 3 that differ: sex "m" or "f"; born "2019" or "2020".',
        "Keep the right row; until then the fields in doubt count as unknown.",
        "warning",
    ),
    Case(
        "duplicate-id",
        "id,sire,dam\nS,,\nA,S,\nA,,\n",
        "A",
        4,
        "id",
        "A",
        'A has rows on lines 3, 4 that differ: sire "S" or blank.',
        "Keep the right row; until then the parent that is recorded is used.",
        "warning",
    ),
    Case(
        "duplicate-id",
        "id,sire,dam,sex\nA,,,m\nA,,,m\nA,,,\n",
        "A",
        4,
        "id",
        "A",
        "A has rows on lines 2, 3, 4 that say the same.",
        "They count as one animal; delete all but one.",
        "note",
    ),
    Case(
        "own-parent",
        "id,father,dam\nA,A,\n",
        "A",
        2,
        "father",
        "A",
        "A is recorded as its own sire.",
        "Correct the sire of A, or leave it blank if it is not known.",
    ),
    Case(
        "loop",
        "id,sire,dam\nX,,\nA,C,\nB,A,\nC,B,\nD,C,\n",
        "A",
        3,
        None,
        "A, B, C, A",
        "A is a parent of B is a parent of C is a parent of A: "
        "an animal cannot be its own ancestor.",
        "One of these parents is wrong; correct it or leave it blank.",
    ),
    Case(
        "extra-cells",
        "id,sire,dam\nA,,\nB,A,,Tarn, north\n",
        None,
        3,
        None,
        "Tarn",
        "the row has 5 cells, the header 3.",
        "Mend the row: a comma inside a cell needs quotes around the cell.",
    ),
    Case(
        "missing-id",
        "Ear Tag,sire,dam\nA,,\n,A,B\nB,,\n",
        None,
        3,
        "Ear Tag",
        "",
        'the row has no id (sire "A", dam "B").',
        "Give the animal an id, or delete the row.",
    ),
    Case(
        "both-sexes",
        "id,sire,dam,sex\nA,,,\nB,A,,\nC,,A,\n",
        "A",
        2,
        "sex",
        "unknown",
        "A is the sire of B (line 3) and the dam of C (line 4).",
        "Correct one of the two; if both are right, record its sex as hermaphrodite.",
    ),
    Case(
        "sex-against-role",
        "id,sire,dam,sex\nA,,,ewe\nB,A,,ram\n",
        "A",
        3,
        "sire",
        "female",
        'sire "A" of B is recorded as female (line 2).',
        "A sire must be male. Correct the sex of A or the sire of B.",
    ),
    Case(
        "sex-against-role",
        "id,sire,dam,sex\nA,,,ram\nB,,A,ram\n",
        "A",
        3,
        "dam",
        "male",
        'dam "A" of B is recorded as male (line 2).',
        "A dam must be female. Correct the sex of A or the dam of B.",
    ),
    Case(
        "sire-is-dam",
        "id,sire,dam,sex\nA,,,h\nB,A,A,m\n",
        "B",
        3,
        "sire",
        "A",
        "B has A as its sire and as its dam.",
        "Right only where animals fertilise themselves; otherwise correct one of the two.",
    ),
    Case(
        "parent-younger",
        "id,sire,dam,sex,born\nA,,,f,2020\nB,,A,f,2019-05\n",
        "B",
        3,
        "dam",
        "A",
        "dam A of B was born 2020 (line 2), B itself 2019-05.",
        "A parent is older than its young. Correct a date or the dam.",
    ),
    Case(
        "parent-without-row",
        "id,sire,dam\nB,A,\nC,A,\nD,A,\n",
        "A",
        2,
        "sire",
        "A",
        'sire "A" of B, C and D has no row of its own.',
        "It counts as an animal of unknown ancestry; add a row if more is known.",
    ),
    Case(
        "parent-perhaps-another",
        "id,sire,dam\n0012,,\nB,12,\n",
        "12",
        3,
        "sire",
        "12",
        'sire "12" of B has no row of its own. "0012" is spelled almost alike.',
        "If 0012 is meant, write it so, or merge 12 into it by a decision; until then it counts "
        "as an animal of unknown ancestry.",
    ),
    Case(
        "parent-perhaps-another",
        "id,sire,dam\nA,,\nA2,,\nB,A or A2,\n",
        "A or A2",
        4,
        "sire",
        "A or A2",
        'sire "A or A2" of B has no row of its own. It reads as one of A or A2.',
        "Then write A|A2; until then it counts as an animal of unknown ancestry.",
    ),
    Case(
        "nothing-but-an-id",
        "id,sire,dam,born\nA,,,2015\nTotal 1,,,\n",
        "Total 1",
        3,
        "id",
        "Total 1",
        "Total 1 has an id and nothing else in its row, and is nobody's parent.",
        "If it is no animal (a heading, a total), delete the row; until then it counts as one.",
    ),
    Case(
        "death-before-birth",
        "id,sire,dam,dob,dod\nA,,,2020-05,2020-04-30\n",
        "A",
        2,
        "dod",
        "2020-04-30",
        "A died 2020-04-30 but was born 2020-05.",
        "Correct one of the two dates.",
    ),
    Case(
        "unreadable-date",
        "id,sire,dam,birth date\nA,,,soon\n",
        "A",
        2,
        "birth date",
        "soon",
        'A: born "soon" is not understood and counts as unknown.',
        f"Expected {EXPECTED}.",
    ),
    Case(
        "unreadable-sex",
        "id,sire,dam,Sex\nA,,,boy\n",
        "A",
        2,
        "Sex",
        "boy",
        'A: sex "boy" is not understood and counts as unknown.',
        "Expected one of: male, female, unknown, hermaphrodite.",
    ),
    Case(
        "unreadable-parent",
        "id,sire,dam\nA,S12:0.9|S15:0.3,\n",
        "A",
        2,
        "sire",
        "S12:0.9|S15:0.3",
        '"S12:0.9|S15:0.3" cannot be read as a list of possible parents of A.',
        PARENT_LIST,
    ),
    Case(
        "unreadable-value",
        "id,sire,dam,status\nA,,,livin\n",
        "A",
        2,
        "status",
        "livin",
        'A: status "livin" is not understood and counts as unknown.',
        'Expected one of: living, dead, gone, lost. Did you mean "living"?',
    ),
    Case(
        "unreadable-value",
        "id,sire,dam,ebv\nA,,,high\n",
        "A",
        2,
        "ebv",
        "high",
        'A: merit "high" is not understood and counts as unknown.',
        "Expected a number.",
    ),
    Case(
        "sex-not-recorded",
        "id,sire,dam,sex\nA,,,\nB,,A,m\n",
        "A",
        2,
        "sex",
        "unknown",
        "A is the dam of B (line 3), but its sex is not recorded.",
        "Record it as female if that is right; until then it is not paired.",
    ),
    Case(
        "doubtful-founder",
        "id,sire,dam,born\nA,,,2001\nB,A,,2002\nC,,,2003\n",
        "C",
        4,
        None,
        None,
        "C (born 2003) counts as a founder only because both parents are blank.",
        "Add a column origin (wild, foundation, imported, captive, unknown) to settle it.",
    ),
    Case(
        "founder-with-parents",
        "id,sire,dam,sex,origin\nA,,,m,wild\nC,,,f,wild\nB,A,C,m,imported\n",
        "B",
        4,
        None,
        "imported",
        "B has origin imported and recorded parents; the parents are used.",
        "Nothing to do if the parents are right.",
    ),
    Case(
        "count-unreadable",
        "id,sire,dam,count\nA,,,a few\n",
        "A",
        2,
        "count",
        "a few",
        'A: count "a few" is not understood and counts as 1.',
        "Expected a whole number such as 30, or males.females.unknown as 12.15.3.",
    ),
    Case(
        "litter-numbers-disagree",
        "id,sire,dam,young born,young dead,young weaned\nA,,,4,3,2\n",
        "A",
        2,
        "young born",
        "4",
        "A: of 4 born, 3 died and 2 were weaned.",
        "Correct the numbers; until then those weaned count, or those born less those that died.",
    ),
    Case(
        "test-unreadable",
        "id,sire,dam,greycoat_test\nA,,,maybe\n",
        "A",
        2,
        "greycoat_test",
        "maybe",
        'A: greycoat_test "maybe" is not understood; A counts as not tested.',
        "Write free, carrier or affected.",
    ),
    Case(
        "group-row",
        "id,sire,dam,number\nA,,,12\nB,,,1\n",
        "A",
        2,
        "number",
        "12",
        "A stands for 12 animals that are not told apart.",
        "Its figures are those of one animal drawn from them at random; give each animal a row of "
        "its own where you can.",
    ),
    Case(
        "asked-about",
        "id,sire,dam,Breed\nA,,,x\n",
        None,
        None,
        "Breed",
        None,
        '"Breed" might be line (variety, subspecies or strain kept apart); it is carried along '
        "and not used.",
        "If it is, say --map 'Breed=line'.",
    ),
    Case(
        "column-passed-over",
        "id,sire,dam,farm,location\nA,,,x,y\n",
        None,
        None,
        "farm",
        None,
        '"farm" could also be holder; "location" is used.',
        "If \"farm\" is the right one, say --map 'farm=holder'.",
    ),
)


@pytest.mark.parametrize(
    "case", CASES, ids=[f"{number}-{case.kind}" for number, case in enumerate(CASES)]
)
def test_every_kind_of_finding_is_told_word_for_word(case):
    """A fault gives one finding of its kind with its place, message, remedy and severity."""
    [finding] = findings_of(audit_of(case.text), case.kind)
    assert finding.message == case.message
    assert finding.remedy == case.remedy
    assert (finding.id, finding.row, finding.column, finding.found) == (
        case.id,
        case.row,
        case.column,
        case.found,
    )
    assert finding.severity == (case.severity or KINDS[case.kind].severity)


def test_what_is_not_understood_counts_as_unknown():
    """Unreadable cells are unknown in the cleaned view and unchanged in the records."""
    audit = audit_of("id,sire,dam,sex,born,status,merit\nA,,,boy,soon,livin,high\n")
    animal = animal_of(audit, "A")
    assert (animal.sex, animal.born, animal.status, animal.merit) == ("unknown", None, "", None)
    assert audit.records.fields["sex"] == ("boy",)
    assert audit.records.fields["born"] == ("soon",)


def test_every_kind_has_a_case():
    """No kind of finding is without a test of its message, here or where its check is tested."""
    elsewhere = "".join(
        path.read_text(encoding="utf-8")
        for path in Path(__file__).parent.glob("test_*.py")
        if path.name not in ("test_audit.py", "test_docs.py", "test_audit_report.py")
    )
    told = {case.kind for case in CASES}
    assert told <= set(KINDS)
    assert [kind for kind in KINDS if kind not in told and f'"{kind}"' not in elsewhere] == []


def test_severities_are_three_and_only_errors_stop():
    """Kinds are errors, warnings or notes, and what leaves kinship undefined is an error."""
    assert SEVERITIES == ("error", "warning", "note")
    assert {kind.severity for kind in KINDS.values()} == set(SEVERITIES)
    assert {name for name, kind in KINDS.items() if kind.stops} == {
        "duplicate-id",
        "own-parent",
        "loop",
        "extra-cells",
        "unreadable-parent",
    }
    assert all(kind.severity == "error" for kind in KINDS.values() if kind.stops)


def test_gravest_findings_come_first_and_then_by_row():
    """Findings are ordered by severity, kind and row."""
    text = """
        id,sire,dam,sex,born,breed
        B,A,,f,nonsense,x
        C,,,boy,,x
        D,,,girl,,x
        E,E,,m,,x
        """
    audit = audit_of(text)
    order = [(finding.severity, finding.kind, finding.row) for finding in audit.findings]
    assert order == [
        ("error", "own-parent", 5),
        ("warning", "unreadable-date", 2),
        ("warning", "unreadable-sex", 3),
        ("warning", "unreadable-sex", 4),
        ("note", "asked-about", None),
        ("note", "parent-without-row", 2),
    ]
    assert [audit.count(severity) for severity in SEVERITIES] == [1, 3, 2]


# Loops and what leaves kinship undefined


def test_loop_names_every_animal_in_order():
    """A loop in the pedigree is reported with every animal in it, in order."""
    [finding] = findings_of(audit_of("id,sire,dam\nC,B,\nA,C,\nB,A,\n"), "loop")
    assert finding.found == "C, A, B, C"
    assert finding.message.startswith("C is a parent of A is a parent of B is a parent of C:")


def test_two_loops_are_two_findings():
    """Loops that share no animal are told one by one, in the order of the file."""
    audit = audit_of("id,sire,dam\nX,Y,\nA,B,\nB,A,\nY,X,\n")
    assert [finding.found for finding in findings_of(audit, "loop")] == ["X, Y, X", "A, B, A"]


def test_animals_caught_in_a_loop_besides_are_named():
    """Where loops share animals, a shortest one is told and the others are named with it."""
    [finding] = findings_of(audit_of("id,sire,dam\nA,B,\nB,A,C\nC,B,\n"), "loop")
    assert finding.message == (
        "A is a parent of B is a parent of A: an animal cannot be its own ancestor. "
        "C is caught in it too."
    )


def test_possible_parent_that_descends_from_its_child_is_set_aside():
    """A list that would close a loop loses that candidate; two lists that would are a loop."""
    audit = audit_of("id,sire,dam\nA,B|C,\nB,A,\nC,,\n")
    assert not audit.stopping
    assert audit.animals[0].sire == (("C", 1.0),)
    [finding] = findings_of(audit_of("id,sire,dam\nA,B|C,\nB,A|D,\nC,,\nD,,\n"), "loop")
    assert finding.found == "A, B, A"


def test_a_loop_of_ten_thousand_animals_is_found():
    """A very long loop is told without running out of depth."""
    many = 10_000
    rows = "".join(f"A{number},A{(number - 1) % many},\n" for number in range(many))
    [finding] = findings_of(audit_of("id,sire,dam\n" + rows), "loop")
    assert finding.found is not None
    assert finding.found.count(",") == many


def test_forty_faults_are_told_at_once():
    """Every fault that leaves kinship undefined is in the one error, each with its line."""
    loops = "".join(f"L{n},M{n},\nM{n},L{n},\n" for n in range(20))
    own = "".join(f"O{n},O{n},\n" for n in range(20))
    audit = audit_of(f"id,sire,dam\n{loops}{own}")
    with pytest.raises(RecordsError, match="40 faults leave kinship undefined") as caught:
        build_pedigree(audit)
    error = caught.value
    assert error.headline == "standard input: 40 faults leave kinship undefined."
    assert len(error.details) == 40
    assert error.details[0] == (
        "standard input, line 2: L0 is a parent of M0 is a parent of L0: an animal cannot be its "
        "own ancestor. One of these parents is wrong; correct it or leave it blank."
    )
    assert error.details[-1] == (
        'standard input, line 61, column "sire": O19 is recorded as its own sire. '
        "Correct the sire of O19, or leave it blank if it is not known."
    )
    assert error.remedy == "Mend the rows named above; `pairing audit` lists every doubt."
    assert error.exit_status == 2


def test_one_fault_is_told_in_the_singular():
    """A single fault that leaves kinship undefined is told as one."""
    with pytest.raises(RecordsError, match=r"^standard input: 1 fault leaves kinship undefined\."):
        pedigree_of("id,sire,dam\nA,A,\n")


def test_other_faults_do_not_stop():
    """Missing ids, unreadable values and parents of the wrong sex leave kinship defined."""
    text = "id,sire,dam,sex,born\nA,,,f,soon\nB,A,,boy,\n,A,,,\nC,,A,,\n"
    assert len(pedigree_of(text)) == 3


# Duplicates


def test_rows_that_name_different_parents_have_none_of_them():
    """Of an animal whose rows name different sires, the sire is not guessed."""
    audit = audit_of("id,sire,dam\nA,S,D\nA,T,D\nS,,\nT,,\nD,,\n")
    assert animal_of(audit, "A").sire == ()
    assert animal_of(audit, "A").dam == (("D", 1.0),)
    assert [finding.kind for finding in audit.stopping] == ["duplicate-id"]


def test_fields_that_differ_between_rows_count_as_unknown():
    """What the rows of one animal agree on is used, what they contradict is not."""
    audit = audit_of("id,sire,dam,sex,name\nA,,,m,Ulda\nA,,,f,Ulda\n")
    assert audit.stopping == ()
    assert animal_of(audit, "A").sex == "unknown"
    assert animal_of(audit, "A").text["name"] == "Ulda"


@pytest.mark.parametrize(
    ("first", "second"),
    [("S,,m", "S,,male"), ("S,,m", "S,?,m"), ("S,unknown,1", "S,,m"), ("S,0,m", "S,?,m")],
)
def test_rows_that_say_the_same_in_other_words_agree(first, second):
    """Two words for one sex, or two signs for no parent, do not contradict each other."""
    audit = audit_of(f"id,sire,dam,sex\nS,,,m\nA,{first}\nA,{second}\n")
    assert [finding.severity for finding in findings_of(audit, "duplicate-id")] == ["note"]
    assert animal_of(audit, "A").sire == (("S", 1.0),)
    assert animal_of(audit, "A").sex == "male"


@pytest.mark.parametrize("unknown", ["0", "?", "unknown", "NA"])
def test_a_row_that_says_unknown_names_no_other_parent(unknown):
    """A sign for no parent in one row and a parent in the other is no contradiction that stops."""
    audit = audit_of(f"id,sire,dam\nS,,\nA,S,\nA,{unknown},\n")
    assert audit.stopping == ()
    assert animal_of(audit, "A").sire == (("S", 1.0),)


def test_a_parent_blank_in_one_row_is_used_and_said_so():
    """Where rows differ in sex and one leaves the sire blank, the sire is used and told as used."""
    audit = audit_of("id,sire,dam,sex\nS,,,m\nA,S,,m\nA,,,f\n")
    [finding] = findings_of(audit, "duplicate-id")
    assert animal_of(audit, "A").sire == (("S", 1.0),)
    assert "the parent that is recorded is used" in finding.remedy


# Parents


@pytest.mark.parametrize("role", ["sire", "dam"])
@pytest.mark.parametrize(
    "token", ["", "0", "?", ".", "NA", "na", "NULL", "null", "unknown", "Unknown", "UNK", "unk"]
)
def test_words_for_no_parent_are_read_as_none(token, role):
    """Every sign for no parent leaves the parent unknown and makes no animal of it."""
    other = "dam" if role == "sire" else "sire"
    audit = audit_of(f"id,{role},{other}\nA,{token},\n")
    assert getattr(animal_of(audit, "A"), role) == ()
    assert animal_of(audit, "A").origin == ""
    assert audit.findings == ()
    assert audit.records.fields[role] == (token,)


def test_zero_is_a_parent_when_an_animal_has_that_id():
    """A parent cell 0 means no parent, unless an animal is called 0."""
    audit = audit_of("id,sire,dam,sex\n0,,,m\nA,0,,\n")
    assert animal_of(audit, "A").sire == (("0", 1.0),)


@pytest.mark.parametrize("parents", ["wild,wild", "WILD,", ",Wild", "wild,?"])
def test_wild_parents_make_a_wild_founder(parents):
    """A parent cell wild means no parent and says that the animal's origin is wild."""
    text = f"id,sire,dam,origin\nA,{parents},\nB,,,\n"
    assert animal_of(audit_of(text), "A").origin == "wild"
    pedigree = pedigree_of(text)
    founders = dict(zip(pedigree.ids, pedigree.founder.tolist(), strict=True))
    assert founders == {"A": True, "B": False}


def test_wild_does_not_overrule_a_recorded_origin():
    """An origin that is written down stands beside a parent cell wild."""
    audit = audit_of("id,sire,dam,origin\nA,wild,wild,captive\n")
    assert animal_of(audit, "A").origin == "captive"


@pytest.mark.parametrize(
    ("cell", "parents"),
    [
        ("S12|S15", (("S12", 0.5), ("S15", 0.5))),
        (" S12 | S15 | S9 ", (("S12", 1 / 3), ("S15", 1 / 3), ("S9", 1 / 3))),
        ("S12:0.7|S15:0.3", (("S12", 0.7), ("S15", 0.3))),
        ("S12: 0.7 | S15 :0.2", (("S12", 0.7), ("S15", 0.2))),
        ("S12|?", (("S12", 0.5),)),
        ("S12|0", (("S12", 0.5),)),
        ("S12:0.6|unknown:0.4", (("S12", 0.6),)),
    ],
)
def test_possible_parents_are_read_with_their_chances(cell, parents):
    """A list of possible parents gives each its chance, equal ones where none is written."""
    audit = audit_of(f"id,sire,dam\nA,{cell},\nS9,,\nS12,,\nS15,,\n")
    assert animal_of(audit, "A").sire == parents
    assert findings_of(audit, "unreadable-parent") == []


@pytest.mark.parametrize(
    "cell",
    [
        "S12|",
        "|",
        "S12|S12",
        "S12:x|S15",
        "S12:0.7|S15",
        "S12:0|S15:1",
        "S12:-0.5|S15:0.5",
        "S12:0.7|S15:0.4",
        "S12:nan|S15:0.5",
        "S12:inf|S15:0.5",
    ],
)
def test_unreadable_lists_of_parents_are_told(cell):
    """A list of parents that makes no sense stops, and the parent counts as unknown."""
    audit = audit_of(f"id,dam,sire\nA,{cell},\nS12,,\nS15,,\n")
    [finding] = findings_of(audit, "unreadable-parent")
    assert finding.stops
    assert finding.message == f'"{cell}" cannot be read as a list of possible parents of A.'
    assert finding.remedy == PARENT_LIST
    assert (finding.column, finding.row) == ("dam", 2)
    assert animal_of(audit, "A").dam == ()


def test_a_whole_cell_that_equals_an_id_is_that_id():
    """Ids with | or : in them are parents by their whole name, and possible parents too."""
    text = "id,sire,dam\nS12|S15,,\nX:1,,\nA,S12|S15,\nB,X:1,\nC,X:1|A,\n"
    audit = audit_of(text)
    assert animal_of(audit, "A").sire == (("S12|S15", 1.0),)
    assert animal_of(audit, "B").sire == (("X:1", 1.0),)
    assert animal_of(audit, "C").sire == (("X:1", 0.5), ("A", 0.5))


def test_the_genetic_dam_is_the_parent():
    """Where the recorded dam was a recipient, the donor counts as the dam."""
    text = """
        id,sire,dam,genetic_dam,reared by,sex
        R,,,,,f
        D,,,,,f
        A,,R,D,R,f
        B,,R,,,f
        C,,R,?,,f
        """
    audit = audit_of(text)
    assert animal_of(audit, "A").dam == (("D", 1.0),)
    assert animal_of(audit, "A").text["reared_by"] == "R"
    assert animal_of(audit, "B").dam == (("R", 1.0),)
    assert animal_of(audit, "C").dam == ()
    assert audit.records.fields["dam"] == ("", "", "R", "R", "R")


# Sex, clones


@pytest.mark.parametrize(
    ("sex", "words"),
    [
        ("male", "m M male Male 1 ♂ bull ram stallion dog cock"),
        ("female", "f F female FEMALE 2 ♀ cow heifer ewe mare bitch hen"),
        ("unknown", "u U unknown 0"),
        ("hermaphrodite", "h hermaphrodite 9"),
    ],
)
def test_words_for_sex_are_read(sex, words):
    """Letters, words, ISO 5218 codes, signs and the species' words each give their sex."""
    for word in words.split():
        audit = audit_of(f"id,sire,dam,sex\nA,,,{word}\n")
        assert animal_of(audit, "A").sex == sex, word
        assert animal_of(audit, "A").may_breed is None
        assert audit.findings == ()


@pytest.mark.parametrize("word", sorted(CASTRATE_WORDS))
def test_castrates_may_not_breed(word):
    """A word for a castrate says that the animal may not breed, whatever else is written."""
    audit = audit_of(f"id,sire,dam,sex,may breed\nA,,,{word},\nB,,,{word.title()},yes\n")
    for animal in audit.animals:
        assert animal.may_breed is False
    assert animal_of(audit, "A").text["may_breed_note"] == f'recorded as "{word}"'
    expected = {"neutered": "unknown", "desexed": "unknown", "spayed": "female"}.get(word, "male")
    assert animal_of(audit, "A").sex == expected


def test_a_castrate_keeps_its_own_note():
    """The keeper's own reason stands before the word for a castrate."""
    audit = audit_of("id,sire,dam,sex,may_breed_note\nA,,,wether,for wool\n")
    assert animal_of(audit, "A").text["may_breed_note"] == "for wool"


def test_twins_that_name_each_other_are_both_kept():
    """Identical twins recorded as clones of each other stay two animals of one pedigree."""
    pedigree = pedigree_of(
        "id,sire,dam,sex,clone_of\nS,,,m,\nD,,,f,\nA,S,D,f,B\nB,S,D,f,A\nC,,A,f,\n"
    )
    assert set(pedigree.ids) == {"S", "D", "A", "B", "C"}


def test_a_clone_of_its_own_descendant_is_told():
    """A clone of an animal that descends from it is told as a loop, not left out in silence."""
    audit = audit_of("id,sire,dam,clone_of\nA,,,C\nB,A,,\nC,B,,\n")
    assert [finding.kind for finding in audit.stopping] == ["loop"]


# Founders


def test_founders_are_those_of_wild_foundation_or_imported_origin():
    """With an origin column, only wild, foundation and imported animals are founders."""
    origins = ("wild", "foundation", "imported", "captive", "unknown", "")
    rows = "".join(f"{origin or 'blank'},,,{origin}\n" for origin in origins)
    pedigree = pedigree_of("id,sire,dam,origin\n" + rows)
    founders = {
        each for each, founder in zip(pedigree.ids, pedigree.founder, strict=True) if founder
    }
    assert founders == {"wild", "foundation", "imported"}
    assert not pedigree.presumed.any()


def test_without_origin_animals_without_parents_are_presumed_founders():
    """Without an origin column, a row with both parents blank is a presumed founder, no other."""
    pedigree = pedigree_of("id,sire,dam\nA,,\nB,A,\nC,Z,?\nD,0,.\n")
    by_id = {
        each: (bool(founder), bool(presumed))
        for each, founder, presumed in zip(
            pedigree.ids, pedigree.founder, pedigree.presumed, strict=True
        )
    }
    assert by_id == {
        "A": (True, True),
        "B": (False, False),
        "C": (False, False),
        "D": (True, True),
        "Z": (False, False),
    }


def test_founders_born_after_the_first_birth_are_listed_as_doubtful():
    """Presumed founders born after the programme's first birth are noted, earlier ones not."""
    text = "id,sire,dam,born\nA,,,2001\nB,A,,2003\nC,,,2002\nD,,,2004\nE,,,\n"
    audit = audit_of(text)
    assert [finding.id for finding in findings_of(audit, "doubtful-founder")] == ["D"]
    with_origin = audit_of(text.replace("born", "born,origin"))
    assert findings_of(with_origin, "doubtful-founder") == []


def test_a_founder_with_parents_keeps_them():
    """Recorded parents count although the origin says founder, and this is noted."""
    pedigree = pedigree_of("id,sire,dam,sex,origin\nA,,,m,wild\nB,A,,m,wild\n")
    place = pedigree.index["B"]
    assert pedigree.sire[place] == pedigree.index["A"]
    assert not pedigree.founder[place]


# Nothing is changed or lost

CELLS = st.text(st.characters(exclude_categories=("Cs",), exclude_characters="\x00"), max_size=8)
IDS = st.sampled_from(("A", "B", "C", "007", " 7 ", "Ａ", "x|y", "", "0", "?", "wild"))
ROWS = st.lists(
    st.tuples(IDS, IDS, IDS, st.sampled_from(("m", "f", "", "ewe", "boy")), CELLS, CELLS),
    min_size=1,
    max_size=12,
)


@given(rows=ROWS)
@settings(max_examples=200)
def test_no_row_of_the_source_is_changed_or_lost(rows):
    """Whatever the rows say, all are kept in order with their other columns letter by letter."""
    out = io.StringIO()
    writer = csv.writer(out, quoting=csv.QUOTE_ALL)
    writer.writerow(("id", "sire", "dam", "sex", "note", "colour"))
    writer.writerows(rows)
    kept = [row for row in rows if any(cell.strip() for cell in row)]
    if not kept:
        return
    records = read_records("-", stdin=out.getvalue().encode())
    audit = audit_records(records)
    assert len(records) == len(kept)
    assert list(records.carried["note"]) == [row[4] for row in kept]
    assert list(records.carried["colour"]) == [row[5] for row in kept]
    assert audit.records is records
    assert list(records.lines) == sorted(set(records.lines))
    assert {animal.id for animal in audit.animals} == set(records.fields["id"]) - {""}
    if not audit.stopping:
        assert set(build_pedigree(audit).ids) >= {animal.id for animal in audit.animals}


@given(rows=ROWS)
@settings(max_examples=100)
def test_every_finding_has_a_place_and_a_remedy(rows):
    """Every finding is of a known kind, says what to do, and names a line that exists."""
    out = io.StringIO()
    writer = csv.writer(out, quoting=csv.QUOTE_ALL)
    writer.writerow(("id", "sire", "dam", "sex", "note", "colour"))
    writer.writerows([("A", "", "", "m", "x", "y"), *rows])
    audit = audit_records(read_records("-", stdin=out.getvalue().encode()))
    for finding in audit.findings:
        assert finding.kind in KINDS
        assert finding.message.endswith(".")
        assert finding.remedy
        assert finding.row is None or finding.row in audit.records.lines
