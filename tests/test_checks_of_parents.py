"""Unlikely and impossible parents, clones that differ, broken lines, words of tests."""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.dates import Age, AgeWindow
from pairing.records.animals import SEVERAL, UNKNOWN
from pairing.records.checks.breeding_lines import lines_broken, lines_differ
from pairing.records.checks.possible_parents import KIND, set_aside_impossible, without
from pairing.records.checks.unlikely_parents import (
    castrates_as_parents,
    clones_differ,
    origins_with_one_parent,
    recipient_dams,
    unreadable_tests,
)
from pairing.records.conditions import (
    CONDITION_SEEN_WORDS,
    CONDITION_TEST_WORDS,
    ConditionColumn,
    condition_columns,
    condition_word,
)
from pairing.records.findings import Finding
from pairing.records.readers import read_records
from pairing.records.rules import Decision, RecordRules
from pairing.records.view import read_animals
from tests.pedigrees import as_text, small_pedigrees

if TYPE_CHECKING:
    from collections.abc import Callable

    from pairing.records.animals import Animals

DATA = Path(__file__).parents[2] / "shared" / "data"
CHECKS = (
    castrates_as_parents,
    recipient_dams,
    clones_differ,
    origins_with_one_parent,
    unreadable_tests,
    lines_differ,
    lines_broken,
)


def animals_of(text: str, rules: RecordRules | None = None) -> Animals:
    """The view of records given as CSV text."""
    return read_animals(read_records("-", stdin=text.encode()), rules)[0]


def found(check: Callable[[Animals, RecordRules], list[Finding]], text: str) -> list[Finding]:
    """What a check finds in records given as CSV text."""
    return check(animals_of(text), RecordRules())


def messages(check, text: str) -> list[str]:
    """The sentences of a check."""
    return [each.message for each in found(check, text)]


# Castrates


def test_a_castrate_as_parent_is_found():
    """A castrated parent is named with the word of its sex, once for all its young."""
    text = "id,sire,dam,sex\nA1,,,wether\nB1,A1,,ewe\nB2,A1,,ewe\nB3,A1|X,,ewe"
    assert found(castrates_as_parents, text) == [
        Finding(
            "castrate-as-parent",
            'sire "A1" of B1 and 2 more is recorded as "wether" (line 2).',
            "Correct the sire or the sex; if A1 was castrated later, accept it by a decision. "
            "The link is used.",
            id="A1",
            row=3,
            column="sire",
            found="wether",
        )
    ]


def test_a_spayed_dam_is_found():
    """Females can be castrated too."""
    text = "id,sire,mother,sex\nA1,,,spayed\nB1,,A1,f"
    (finding,) = found(castrates_as_parents, text)
    assert (finding.message, finding.column) == (
        'dam "A1" of B1 is recorded as "spayed" (line 2).',
        "mother",
    )


def test_castrates_without_young_are_right():
    """Nothing is said of a gelding that has no foals, or of an entire sire."""
    text = "id,sire,dam,sex\nA1,,,gelding\nA2,,,stallion\nB1,A2,,f"
    assert found(castrates_as_parents, text) == []


# Embryo transfer


@pytest.mark.parametrize("heading", ["Recipient", "embryo transfer", "Embryo_Transfer", "ET"])
@pytest.mark.parametrize("word", ["yes", "Y", "1", "ET"])
def test_a_dam_that_may_be_the_recipient_is_found(heading, word):
    """A transferred embryo without a donor has a dam that may be no kin."""
    assert found(recipient_dams, f"id,sire,dam,{heading}\nD1,,,\nB1,,D1,{word}") == [
        Finding(
            "recipient-dam",
            f'B1 has {heading} "{word}" and no genetic dam; its dam D1 may only have borne it.',
            "Record the donor as genetic_dam, or unknown there if she is not known.",
            id="B1",
            row=3,
            column=heading,
            found=word,
        )
    ]


def test_a_recipient_that_stands_as_the_dam_is_found():
    """Where the column names the recipient, only the dam herself is a doubt."""
    text = "id,sire,dam,recipient\nD1,,,\nD2,,,\nB1,,D1,D1\nB2,,D1,D2\nB3,,D1,no"
    assert [each.id for each in found(recipient_dams, text)] == ["B1"]


@pytest.mark.parametrize("row", ["B1,,D1,yes,D2", "B1,,D1,yes,unknown", "B1,,,yes,", "B1,,D1,no,"])
def test_a_donor_or_no_transfer_settles_the_dam(row):
    """With a donor, even one that is not known, with no dam or no transfer, nothing is said."""
    text = f"id,sire,dam,et,genetic_dam\nD1,,,,\nD2,,,,\n{row}"
    assert found(recipient_dams, text) == []


@pytest.mark.parametrize(
    ("row", "said"),
    [
        ("B1,,D1,f,2015,D1", "B1 has D1 as its dam and as its genetic dam."),
        ("B1,,D1,f,2015,M", "genetic dam M of B1 is recorded as male."),
        ("B1,,D1,f,2015,Y", "genetic dam Y of B1 was born 2018, after it (2015)."),
    ],
)
def test_a_donor_that_cannot_be_one_is_found(row, said):
    """The dam herself, a male and one born later are no donors."""
    text = f"id,sire,dam,sex,born,genetic_dam\nD1,,,f,2010,\nM,,,m,2010,\nY,,,f,2018,\n{row}"
    (finding,) = found(recipient_dams, text)
    assert finding.message == said
    assert (finding.kind, finding.id, finding.row) == ("recipient-dam", "B1", 5)
    assert finding.column == "genetic_dam"


# Clones


@pytest.mark.parametrize(
    ("model", "clone", "said"),
    [
        ("S1,,m,2001", "S2,,m,2001", 'its sire is "S2" and not "S1"'),
        (",S1,m,2001", ",S2,m,2001", 'its dam is "S2" and not "S1"'),
        (",,m,2001", ",,f,2001", "it is female and not male"),
        (",,m,2003", ",,m,2001-05", "it was born 2001-05 and the other later, 2003"),
        (
            "S1,,m,2001",
            "S2,,f,2001",
            'it is female and not male and its sire is "S2" and not "S1"',
        ),
    ],
)
def test_a_clone_that_contradicts_its_model_is_found(model, clone, said):
    """Sex, parents and birth of a clone are compared with those of the animal it copies."""
    text = f"id,sire,dam,sex,born,clone of\nS1,,,,,\nS2,,,,,\nA,{model},\nB,{clone},A"
    assert found(clones_differ, text) == [
        Finding(
            "clone-differs",
            f"B is a clone of A, but {said}.",
            "Correct the row that is wrong, or clear clone_of if they are litter-mates. Until "
            "then the parents of A count.",
            id="B",
            row=5,
            column="clone of",
            found="A",
        )
    ]


@pytest.mark.parametrize(
    ("model", "clone"),
    [
        ("S1,,m,2001", ",,,"),
        ("S1,,m,2001", "S1,,m,2001"),
        (",,m,2001", "S1,S2,,2009"),
        (",,m,2003", ",,m,[2001..2003]"),
    ],
)
def test_a_clone_that_may_be_one_is_right(model, clone):
    """Blank cells, a later birth and a vague one contradict nothing."""
    text = f"id,sire,dam,sex,born,clone_of\nS1,,,,,\nS2,,,,,\nA,{model},\nB,{clone},A"
    assert found(clones_differ, text) == []


# Origins


@pytest.mark.parametrize("origin", ["wild", "foundation", "imported"])
@pytest.mark.parametrize(("parents", "named"), [("A1,", "A1"), (",A1", "A1"), ("A1|X,", "A1 or X")])
def test_a_founder_with_one_parent_is_found(origin, parents, named):
    """An origin from outside beside a single parent leaves open which is meant."""
    (finding,) = found(
        origins_with_one_parent, f"id,sire,dam,Source\nA1,,,wild\nB1,{parents},{origin}"
    )
    assert finding == Finding(
        "origin-with-one-parent",
        f"B1 has origin {origin} and one recorded parent, {named}.",
        "Correct the origin if it was bred here; clear the parent if it came from outside. "
        "Until then the parent is used.",
        id="B1",
        row=3,
        column="Source",
        found=origin,
    )


@pytest.mark.parametrize("row", ["B1,A1,A2,wild", "B1,,,wild", "B1,A1,,captive", "B1,A1,,"])
def test_other_origins_are_no_doubt_about_one_parent(row):
    """Two parents, none, and animals bred here are another matter."""
    assert found(origins_with_one_parent, f"id,sire,dam,origin\nA1,,,\nA2,,,\n{row}") == []


# Tests for conditions


def test_unreadable_words_of_tests_are_found_once_each():
    """Each word that is not understood is one finding, with the animals it stands for."""
    text = (
        "id,sire,dam,greycoat_test,greycoat_seen\nA1,,,positive-ish,yes\nA2,,,N/N,carrier\n"
        "A3,,,odd,no\nA4,,,odd,\nA5,,, Odd ,\nA6,,,odd,"
    )
    assert [
        (each.message, each.remedy, each.id, each.row, each.column, each.found)
        for each in found(unreadable_tests, text)
    ] == [
        (
            'A1: greycoat_test "positive-ish" is not understood; A1 counts as not tested.',
            "Write free, carrier or affected.",
            "A1",
            2,
            "greycoat_test",
            "positive-ish",
        ),
        (
            'greycoat_test "odd" is not understood; 4 animals count as not tested: A3 (line 4), '
            "A4 (line 5), A5 (line 6) and 1 more.",
            "Write free, carrier or affected.",
            "A3",
            4,
            "greycoat_test",
            "odd",
        ),
        (
            'A2: greycoat_seen "carrier" is not understood; A2 counts as not examined.',
            "Write affected or unaffected.",
            "A2",
            3,
            "greycoat_seen",
            "carrier",
        ),
    ]


def test_a_column_that_is_not_about_a_condition_is_said_once():
    """Many words that are not understood are one finding for the column."""
    rows = "\n".join(f"A{day},,,2019-05-{day:02d}" for day in range(1, 25))
    (finding,) = found(unreadable_tests, f"id,sire,dam,first_seen\n{rows}")
    assert finding.message == (
        "24 different words in first_seen, on 24 animals, are not understood, for instance "
        '"2019-05-01", "2019-05-02" and "2019-05-03".'
    )
    assert finding.remedy == (
        "Write affected or unaffected; if the column is not about a condition, give it another "
        "heading."
    )


def test_columns_of_conditions_are_told_by_their_headings():
    """NAME_test, NAME_seen and NAME_test_on are found in any case, and nothing else is."""
    headings = [
        "hip_test",
        "White Coat_SEEN",
        "hip_test_on",
        "test",
        "_test",
        "Test_Date",
        "tested",
    ]
    assert condition_columns(headings) == [
        ConditionColumn("hip_test", "hip", "test"),
        ConditionColumn("White Coat_SEEN", "White Coat", "seen"),
        ConditionColumn("hip_test_on", "hip", "test_on"),
    ]


def test_words_of_conditions_mean_what_the_documentation_says():
    """Words are folded, and every one of them has one of the documented meanings."""
    assert set(CONDITION_TEST_WORDS.values()) == {None, "free", "carrier", "affected"}
    assert set(CONDITION_SEEN_WORDS.values()) == {None, "affected", "unaffected"}
    for words in (CONDITION_TEST_WORDS, CONDITION_SEEN_WORDS):
        assert all(word == word.casefold().strip() for word in words)
    expected = {"free": "free", "Clear": "free", "N/N": "free", "carrier": "carrier"}
    expected |= {" Heterozygous ": "carrier", "AFFECTED": "affected", "": None, "?": None}
    assert {word: condition_word("test", word) for word in expected} == expected
    assert condition_word("seen", "unaffected") == "unaffected"
    with pytest.raises(KeyError, match="positive"):
        condition_word("test", "positive")


# Lines


def test_a_cross_between_lines_is_found():
    """An animal whose parent is of another line is named with both lines."""
    text = "id,sire,dam,strain\nA1,,,hill\nA2,,,dale\nB1,A1,A2,Hill\nB2,A2,A2,hill\nB3,A2,,"
    assert found(lines_differ, text)[0] == Finding(
        "line-differs",
        "B1 is of line hill, its dam A2 of line dale.",
        "Correct the line or the parent; accept it by a decision if the cross was meant.",
        id="B1",
        row=4,
        column="strain",
        found="Hill",
    )
    assert messages(lines_differ, text)[1:] == [
        "B2 is of line hill, its sire A2 of line dale and its dam A2 of line dale."
    ]


def test_many_crosses_of_two_lines_are_said_once():
    """More than ten animals of one combination of lines are one finding."""
    rows = [f"B{number},A1,A2,hill" for number in range(11)]
    text = "\n".join(["id,sire,dam,line", "A1,,,dale", "A2,,,fen", *rows])
    (finding,) = found(lines_differ, text)
    assert finding.message == (
        "11 animals of line hill have parents of lines dale and fen: B0 (line 4), B1 (line 5), "
        "B2 (line 6) and 8 more."
    )
    assert len(found(lines_differ, "\n".join(text.splitlines()[:-1]))) == 10


def test_lines_that_are_no_lines_are_said_once():
    """A column in which everybody is crossed with everybody is one finding."""
    rows = [f"B{number},A{number},,l{number + 1}" for number in range(40)]
    founders = [f"A{number},,,l{number}" for number in range(40)]
    (finding,) = found(lines_differ, "\n".join(["id,sire,dam,variety", *founders, *rows]))
    assert finding.message == (
        "40 animals, in 40 combinations of lines, are not of the line of both their parents: "
        "B0 (line 42), B1 (line 43), B2 (line 44) and 37 more."
    )
    assert "--map 'variety='" in finding.remedy


@pytest.mark.parametrize(
    "text",
    [
        "id,sire,dam,line\nA1,,,hill\nA2,,,HILL\nB1,A1,A2,hill",
        "id,sire,dam,line\nA1,,,\nA2,,,unknown\nB1,A1,A2,hill",
        "id,sire,dam,line\nA1,,,hill\nB1,A1,X,",
    ],
)
def test_blank_lines_are_no_crosses(text):
    """An animal without a line, or a parent without one, contradicts nothing."""
    assert found(lines_differ, text) == []


def inbred_line(generations: int, *extra: str, line: str = "k") -> str:
    """A line from two founders, each pair full sibs: a0 and b0, a1 and b1, …"""
    rows = ["id,sire,dam,line", f"a0,,,{line}", f"b0,,,{line}"]
    for number in range(1, generations + 1):
        parents = f"a{number - 1},b{number - 1}"
        rows += [f"a{number},{parents},{line}", f"b{number},{parents},{line}"]
    return "\n".join([*rows, *extra])


@pytest.mark.parametrize(
    ("mating", "said"),
    [
        (
            "a6,b5",
            "parents a6 and b5 of Z and 1 more are not full sibs, as line k has them before: "
            "b5 is the dam of a6.",
        ),
        (
            "a6,New",
            "parents a6 and New of Z and 1 more are not full sibs, as line k has them "
            "before: the sire and the dam of New are not known.",
        ),
        (
            "a6,H",
            "parents a6 and H of Z and 1 more are not full sibs, as line k has them before: "
            "they share only a5.",
        ),
        (
            "a6,b4",
            "parents a6 and b4 of Z and 1 more are not full sibs, as line k has them before: "
            "a6 is of a5 and b5, b4 of a3 and b3.",
        ),
    ],
)
def test_a_break_in_a_brother_sister_line_is_found(mating, said):
    """A mating of others than full sibs is named with what was mated instead."""
    extra = ("New,,,k", "H,a5,Other,", f"Z,{mating},k", f"Y,{mating},k")
    (finding,) = found(lines_broken, inbred_line(6, *extra))
    assert finding.message == said
    assert (finding.kind, finding.id, finding.row) == ("line-broken", "Z", 18)


@pytest.mark.parametrize(
    "text",
    [
        inbred_line(6),
        inbred_line(3, "Z,a3,b2,k"),
        inbred_line(5, "Z,a5,b4,k", "Y,a4,b3,k", "X,a5,b3,k"),
        inbred_line(6, "Z,a6,b5,k", line=""),
        inbred_line(6, "Z,a6,b5,other"),
        "id,sire,dam,line\nA,,,k\nB,,,k\nC,A,B,k\nD,A,C,k\nE,A,D,k\nF,A,E,k",
    ],
)
def test_other_lines_have_no_breaks(text):
    """A whole line, a short one, one mated otherwise often, and no line at all are right."""
    assert found(lines_broken, text) == []


# Possible parents

HEADER = "id,sire,dam,sex,born,died,genetic_dam,count,line\n"


def set_aside(text: str, rules: RecordRules | None = None) -> tuple[Animals, list[Finding]]:
    """The view with impossible candidates set aside, and what is said of them."""
    rules = rules or RecordRules()
    animals, on_the_way = read_animals(read_records("-", stdin=text.encode()), rules)
    after, findings = set_aside_impossible(animals, rules)
    said = [*(each for each in on_the_way if each.kind == KIND), *findings]
    return after, list(dict.fromkeys(said))


def parents_of(animals: Animals, role: str, name: str) -> dict[str, Fraction]:
    """Possible parents of one side of an animal, with chances that are near fractions."""
    parts = animals.parents(role, animals.names.find(name))
    return {parent: Fraction(chance).limit_denominator(1000) for parent, chance in parts}


@pytest.mark.parametrize(
    ("candidate", "why"),
    [
        ("C,,,m,2010,2014,,,", "died 2014, before B could be conceived"),
        ("C,,,f,2010,,,,", "is recorded as female"),
        ("C,,,m,2021,,,,", "was born 2021, after B"),
        ("C,,,m,2020-06-01,,,,", "was born 2020-06-01, as B"),
        ("C,B,,m,,,,,", "is a descendant of B"),
        ("X,B,,,,,,,\nC,,X,m,,,,,", "is a descendant of B"),
    ],
)
def test_an_impossible_sire_is_set_aside(candidate, why):
    """Why a candidate cannot be the sire is said, and the other one is the sire."""
    text = f"{HEADER}S,,,m,2010,,,,\n{candidate}\nB,S|C,,f,2020-06-01,,,,"
    animals, (finding,) = set_aside(text)
    assert finding == Finding(
        KIND,
        f'possible sire "C" of B {why}; it is set aside. S remains and counts as the sire.',
        "Take it from the list, or correct what rules it out.",
        id="B",
        row=len(text.splitlines()),
        column="sire",
        found="C",
    )
    assert animals.sire[animals.names.find("B")] == animals.names.find("S")
    assert animals.possible == {}
    assert parents_of(animals, "sire", "B") == {"S": 1}


@pytest.mark.parametrize(
    ("candidate", "why"),
    [
        ("C,,,f,2010,2019,,,", "died 2019, before B was born"),
        ("C,,,m,2010,,,,", "is recorded as male"),
        ("B", "is B itself"),
    ],
)
def test_an_impossible_dam_is_set_aside(candidate, why):
    """A dam must have lived when her young was born."""
    name = candidate.split(",")[0]
    rows = "" if name == "B" else f"{candidate}\n"
    animals, (finding,) = set_aside(f"{HEADER}S,,,f,2010,,,,\n{rows}B,,{name}|S,f,2020,,,,")
    assert finding.message == (
        f'possible dam "{name}" of B {why}; it is set aside. S remains and counts as the dam.'
    )
    assert parents_of(animals, "dam", "B") == {"S": 1}


@pytest.mark.parametrize(
    "candidate",
    [
        "C,,,m,2010,2019,,,",
        "C,,,m,2010,2014..,,,",
        "C,,,,2020?,,,,",
        "C,,,h,2010,,,,",
        "C,,,,,,,,",
        "C,,,f,2024,2011,,30,",
        "D,,,,,,,,",
        "C,,,wether,2010,,,,",
    ],
)
def test_a_candidate_that_may_be_the_sire_stays(candidate):
    """Vague dates, unknown sexes, shoals and candidates without a row rule nothing out."""
    text = f"{HEADER}S,,,m,2010,,,,\n{candidate}\nB,S|C,,f,2020,,,,"
    animals, findings = set_aside(text)
    assert findings == []
    assert parents_of(animals, "sire", "B") == {"S": Fraction(1, 2), "C": Fraction(1, 2)}


def test_gestation_and_stored_sperm_lengthen_the_time_of_a_dead_sire():
    """A sire may have died a gestation, and the time that sperm keeps, before the birth."""
    text = f"{HEADER}S,,,m,,,,,\nC,,,m,,2019-01-31,,,\nB,S|C,,,2019-12-31,,,,"
    for gestation, storage, stays in (
        (None, None, True),
        (Age(5, "months"), None, False),
        (Age(11, "months"), None, True),
        (Age(5, "months"), Age(6, "months"), True),
        (Age(5, "months"), Age(3, "months"), False),
    ):
        rules = RecordRules(gestation=gestation, sperm_storage=storage)
        assert (set_aside(text, rules)[1] == []) is stays


def test_the_ages_at_which_births_are_believed_set_candidates_aside():
    """Too young and too old parents go, by the ages of their own line."""
    rules = RecordRules(
        parent_age={
            ("", "male"): AgeWindow(Age(2), Age(8)),
            ("slow", "male"): AgeWindow(Age(6), Age(20)),
        }
    )
    text = (
        f"{HEADER}S,,,m,2015,,,,\nO,,,m,2009,,,,\nY,,,m,2019-06,,,,\nL,,,m,2009,,,,slow\n"
        "K,,,m,2016,,,,slow\nB,S|O|Y|L|K,,,2020,,,,"
    )
    animals, findings = set_aside(text, rules)
    assert parents_of(animals, "sire", "B") == {"S": Fraction(1, 2), "L": Fraction(1, 2)}
    assert [each.message for each in findings] == [
        'possible sire "O" of B was too old when B was born (births are believed up to 8 years); '
        "it is set aside. S and L remain.",
        'possible sire "Y" of B was too young when B was born (births are believed from 2 years); '
        "it is set aside. S and L remain.",
        'possible sire "K" of B was too young when B was born (births are believed from 6 years); '
        "it is set aside. S and L remain.",
    ]
    assert set_aside(text)[1] == []


def test_a_dead_donor_stays():
    """Embryos can be stored: a genetic dam may have died before the birth."""
    text = f"{HEADER}D,,,f,,,,,\nE,,,f,,2001,,,\nR,,,f,,,,,\nB,,R,,2020,,D|E,,"
    animals, findings = set_aside(text)
    assert findings == []
    assert set(parents_of(animals, "dam", "B")) == {"D", "E"}


def test_when_nobody_remains_the_side_is_unknown():
    """With every candidate impossible the parent is unknown, and that is said."""
    text = f"{HEADER}C,,,f,,,,,\nE,,,f,,,,,\nB,C|E,,,,,,,"
    animals, findings = set_aside(text)
    assert [each.message for each in findings] == [
        f'possible sire "{name}" of B is recorded as female; it is set aside. Nobody remains, '
        "and the sire counts as unknown."
        for name in "CE"
    ]
    assert animals.sire[animals.names.find("B")] == UNKNOWN
    assert parents_of(animals, "sire", "B") == {}


def test_given_chances_keep_their_proportions_and_total():
    """The chances of the rest are scaled so that their total is that of the whole list."""
    text = f"{HEADER}C,,,f,,,,,\nE,,,m,,,,,\nG,,,m,,,,,\nB,C:0.5|E:0.1|G:0.3,,,,,,,"
    animals, (finding,) = set_aside(text)
    assert parents_of(animals, "sire", "B") == {"E": Fraction(9, 40), "G": Fraction(27, 40)}
    assert finding.message.endswith("it is set aside. E and G remain.")
    assert animals.sire[animals.names.find("B")] == SEVERAL


def test_a_single_one_that_is_not_certain_stays_uncertain():
    """Where the list left room for an unknown parent, so does what remains of it."""
    text = f"{HEADER}C,,,f,,,,,\nE,,,m,,,,,\nB,C:0.5|E:0.25,,,,,,,"
    animals, (finding,) = set_aside(text)
    assert parents_of(animals, "sire", "B") == {"E": Fraction(3, 4)}
    assert finding.message.endswith("it is set aside. E remains.")


def test_a_sure_parent_shows_others_to_be_descendants():
    """B's sire turns out to be A, so B and its young cannot be A's."""
    text = f"{HEADER}S,,,m,,,,,\nF,,,f,,,,,\nA,S|B,,,,,,,\nB,A|F,,,,,,,"
    animals, findings = set_aside(text)
    assert [(each.id, each.found) for each in findings] == [("B", "F"), ("A", "B")]
    assert parents_of(animals, "sire", "A") == {"S": 1}
    assert parents_of(animals, "sire", "B") == {"A": 1}


def test_clones_of_an_animal_and_of_its_young_are_not_its_sire():
    """A clone has the genes of its model, so it can no more be the parent than that can."""
    text = "id,sire,dam,clone_of\nS,,,\nB,S|C|E,,\nC,,,B\nY,B,,\nE,,,Y\nG,S|C,,\n"
    animals, findings = set_aside(text)
    assert [each.message.split(";")[0] for each in findings] == [
        'possible sire "C" of B is a clone of B',
        'possible sire "E" of B is a descendant of B',
    ]
    assert parents_of(animals, "sire", "B") == {"S": 1}
    assert set(parents_of(animals, "sire", "G")) == {"S", "C"}


def test_an_accepted_candidate_stays_unless_kinship_is_undefined():
    """A decision keeps a candidate that dates rule out, but never the animal itself."""
    rules = RecordRules(decisions=(Decision("accept", "B", kind=KIND),))
    text = f"{HEADER}S,,,m,,,,,\nC,,,m,,2001,,,\nB,S|C|B,,,2020,,,,"
    animals, findings = set_aside(text, rules)
    assert parents_of(animals, "sire", "B") == {"S": Fraction(1, 2), "C": Fraction(1, 2)}
    assert [each.message for each in findings] == [
        'possible sire "C" of B died 2001, before B could be conceived; a decision keeps it.',
        'possible sire "B" of B is B itself; it is set aside. S and C remain.',
    ]


def test_the_rows_stay_as_they_are():
    """What is set aside stays in the record, and the view it came from is not changed."""
    text = f"{HEADER}S,,,m,,,,,\nC,,,f,,,,,\nB,S|C,,,,,,,"
    records = read_records("-", stdin=text.encode())
    animals = read_animals(records)[0]
    sire, possible = animals.sire.copy(), dict(animals.possible)
    after, _findings = set_aside_impossible(animals, RecordRules())
    assert records.fields["sire"] == ("", "", "S|C")
    assert (animals.sire == sire).all()
    assert dict(animals.possible) == possible
    assert after.parents("sire", 2) == (("S", 1.0),)


def test_without_lists_the_view_is_returned_itself():
    """Records without possible parents cost nothing."""
    animals = animals_of(f"{HEADER}S,,,m,,,,,\nB,S,B,,,,,,")
    assert set_aside_impossible(animals, RecordRules()) == (animals, [])
    assert set_aside_impossible(animals, RecordRules())[0] is animals


CHANCES = st.lists(st.integers(1, 20), min_size=2, max_size=6)


@given(CHANCES, st.integers(20, 40), st.data())
def test_chances_keep_their_total_and_never_pass_one(weights, scale, data):
    """Whoever is left out, the total of the others is what the whole list had."""
    total = sum(weights)
    parents = tuple(
        (f"P{number}", weight / total * scale / 40) for number, weight in enumerate(weights)
    )
    out = data.draw(st.sets(st.sampled_from([name for name, _chance in parents])))
    left = without(parents, out)
    assert [name for name, _chance in left] == [name for name, _c in parents if name not in out]
    if left:
        assert sum(chance for _name, chance in left) == pytest.approx(scale / 40, abs=1e-12)
        assert all(0 < chance <= 1 for _name, chance in left)
        ratio = dict(parents)[left[0][0]] / left[0][1]
        for name, chance in left:
            assert dict(parents)[name] == pytest.approx(chance * ratio)


SEXES, BIRTHS, DEATHS = "mfhu", ["", "2001", "2010?", "2019-05"], ["", "2005", "2019", "2018.."]


@st.composite
def candidates(draw: st.DrawFn) -> list[str]:
    """Rows of animals that may be somebody's sire."""
    return [
        f"C{number},{draw(st.sampled_from(['', 'B']))},,{draw(st.sampled_from(SEXES))},"
        f"{draw(st.sampled_from(BIRTHS))},{draw(st.sampled_from(DEATHS))},,,"
        for number in range(draw(st.integers(2, 5)))
    ]


@given(candidates(), st.randoms(use_true_random=False))
def test_the_order_of_candidates_and_rows_is_of_no_consequence(rows, random):
    """The same are set aside for the same reasons, in whatever order they are named."""
    names = [row.split(",")[0] for row in rows]

    def outcome(listed: list[str], ordered: list[str]):
        text = "\n".join([HEADER.strip(), *ordered, f"B,{'|'.join(listed)},,,2012,,,,"])
        animals, findings = set_aside(text)
        return parents_of(animals, "sire", "B"), {
            (each.found, each.message.split(";")[0]) for each in findings
        }

    shuffled, mixed = names.copy(), rows.copy()
    random.shuffle(shuffled)
    random.shuffle(mixed)
    assert outcome(names, rows) == outcome(shuffled, mixed)


@given(candidates())
def test_without_dates_nobody_is_set_aside_for_his_age(rows):
    """Dropping every date leaves only sexes and descent as reasons."""
    bare = [",".join([*row.split(",")[:4], "", "", "", "", ""]) for row in rows]
    names = "|".join(row.split(",")[0] for row in rows)
    _animals, findings = set_aside("\n".join([HEADER.strip(), *bare, f"B,{names},,,,,,,"]))
    for finding in findings:
        assert "is recorded as female" in finding.message or "descendant" in finding.message


@given(small_pedigrees(possible=True, dates=True))
def test_whatever_is_set_aside_chances_stay_chances(rows):
    """In drawn pedigrees a second look finds nothing more, and chances add up to 1 at most."""
    animals, _findings = set_aside(as_text(rows))
    assert set_aside_impossible(animals, RecordRules())[1] == []
    for (role, place), parents in animals.possible.items():
        assert getattr(animals, role)[place] == SEVERAL
        assert 0 < sum(chance for _name, chance in parents) <= 1 + 1e-12
    for role in ("sire", "dam"):
        lists = np.flatnonzero(getattr(animals, role) == SEVERAL).tolist()
        assert lists == sorted(place for side, place in animals.possible if side == role)


# Real records

REAL = {
    "song-sparrow/Sparrows.csv": ("father=sire", "mother=dam"),
    "snow-vole/Pedigree.txt": ("ID_Individual=id",),
    "langhill-dairy/PedigreeRecoded.csv": (
        "animalRecoded=id",
        "sireRecoded=sire",
        "damRecoded=dam",
    ),
    "guppy-selection/pedigree.csv": (),
    "shark-bay-dolphin/life_history.csv": ("Dolphin.ID=id", "Mother.ID=dam", "Father.ID=sire"),
    "border-collie/OFA_Border_Collie.csv": (),
    "mouse-intercross-line/ped.csv": (),
    "wytham-great-tit/GTIT_pedigree_full.csv": (),
}


@pytest.mark.parametrize("name", REAL)
def test_real_records_give_no_false_alarm(name):
    """The open data have none of these faults and no lists of possible parents."""
    if not (DATA / name).exists():
        pytest.skip(f"open data {name} is absent")
    animals, _findings = read_animals(read_records(DATA / name, column_map=REAL[name]))
    assert [each for check in CHECKS for each in check(animals, RecordRules())] == []
    assert set_aside_impossible(animals, RecordRules())[0] is animals
