"""What the checks of time find in records, word for word, and what may be right."""

from __future__ import annotations

import csv
import datetime
import io
from collections import defaultdict
from itertools import combinations
from typing import TYPE_CHECKING, NamedTuple

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.dates import Age, AgeWindow, completed
from pairing.records.checks.breeding_ages import (
    longest_days,
    parents_dead,
    parents_left,
    parents_of_unlikely_age,
    shortest_days,
)
from pairing.records.checks.chronology import parents_younger
from pairing.records.checks.lifetimes import (
    dates_far_ahead,
    events_after_death,
    events_before_birth,
    statuses_against_dates,
)
from pairing.records.checks.litters import litters_in_doubt, litters_too_close
from pairing.records.fields import DATE_FIELDS
from pairing.records.readers import read_records
from pairing.records.rules import Decision, RecordRules
from pairing.records.view import read_animals

if TYPE_CHECKING:
    from collections.abc import Iterator

    from pairing.dates import DateRange
    from pairing.records.animals import Animal, Animals
    from pairing.records.findings import Finding

CHECKS = (
    events_before_birth,
    events_after_death,
    dates_far_ahead,
    statuses_against_dates,
    parents_dead,
    parents_left,
    parents_of_unlikely_age,
    litters_in_doubt,
    litters_too_close,
)
NO_RULES = RecordRules()
GESTATION = RecordRules(gestation=Age(63, "days"))
STORED = RecordRules(gestation=Age(63, "days"), sperm_storage=Age(2))
LARGEST = RecordRules(largest_litter=2)
AGES = RecordRules(
    parent_age={
        ("", "male"): AgeWindow(Age(1), Age(10)),
        ("", "female"): AgeWindow(Age(2), Age(12)),
        ("northern", "female"): AgeWindow(Age(4), Age(15)),
        ("dwarf", "female"): AgeWindow(Age(8, "weeks"), Age(18, "months")),
    }
)


def animals_of(text: str, rules: RecordRules = NO_RULES) -> Animals:
    """The view of records given as CSV text."""
    return read_animals(read_records("-", stdin=text.encode()), rules)[0]


def found_in(text: str, rules: RecordRules = NO_RULES) -> list[Finding]:
    """What all checks of time find in records given as CSV text."""
    animals = animals_of(text, rules)
    return [finding for check in CHECKS for finding in check(animals, rules)]


def kinds_in(text: str, rules: RecordRules = NO_RULES) -> list[tuple[str, str | None]]:
    """Kind and animal of each finding."""
    return [(finding.kind, finding.id) for finding in found_in(text, rules)]


class Case(NamedTuple):
    """Records with the one finding they must give."""

    kind: str
    text: str
    id: str
    row: int
    column: str
    found: str
    severity: str
    message: str
    remedy: str
    rules: RecordRules = NO_RULES


BOTH_DATES = "Correct one of the two dates."
AGE_REMEDY = (
    "Correct a date or the dam; if it is right, accept it, or change parent_age in the policy."
)
SIRE_REMEDY = (
    "Correct a date or the sire. Young from stored semen are right: then name him under "
    "[[gametes]] in the policy, say sperm_storage under [records], or accept it."
)
DAM_REMEDY = (
    "Correct a date or the dam. Where eggs hatch after her death, accept it; a donor of stored "
    "embryos belongs in the column genetic_dam."
)
LEFT_REMEDY = (
    "Correct a date or the {0}; if B1 was got elsewhere, or from stored semen or embryos, "
    "accept it."
)
LITTER_REMEDIES = {
    "dates": "Correct a date, or give one of them another litter. Where births spread over days, "
    "or litters are put together, accept it.",
    "dams": "Correct a dam or the litter. The dam is the one that bore the young; one that only "
    "fostered it belongs in reared_by.",
    "size": "Split it where it is two litters under one name. Where young were fostered in, or "
    "litters put together, accept it; else raise largest_litter in the policy.",
}
CASES = {
    "left before born": Case(
        "left-before-born",
        "id,sire,dam,born,Left\nA1,,,2019-05-02,2019-05-01\n",
        "A1",
        2,
        "Left",
        "2019-05-01",
        "warning",
        "A1 left 2019-05-01 but was born 2019-05-02.",
        BOTH_DATES,
    ),
    "entered before born": Case(
        "entered-before-born",
        "id,sire,dam,born,entered\nA1,,,2019-06,2019-05\n",
        "A1",
        2,
        "entered",
        "2019-05",
        "warning",
        "A1 entered 2019-05 but was born 2019-06.",
        f"{BOTH_DATES} If it came as an egg or in its dam, accept it.",
    ),
    "seen after death": Case(
        "event-after-death",
        "id,sire,dam,died,last_seen\nA1,,,2015-03-01,2015-03-02\n",
        "A1",
        2,
        "last_seen",
        "2015-03-02",
        "warning",
        "A1 died 2015-03-01 but was last seen 2015-03-02.",
        "Correct one of the two dates; until then it counts as dead.",
    ),
    "entered after death": Case(
        "event-after-death",
        "id,sire,dam,died,entered\nA1,,,2015,2016\n",
        "A1",
        2,
        "entered",
        "2016",
        "warning",
        "A1 died 2015 but entered 2016.",
        "Correct one of the two dates; until then it counts as dead.",
    ),
    "left after death": Case(
        "event-after-death",
        "id,sire,dam,died,left\nA1,,,2015-03-01,2015-04-02\n",
        "A1",
        2,
        "left",
        "2015-04-02",
        "warning",
        "A1 died 2015-03-01 but left 2015-04-02.",
        "Correct one of the two dates; until then it counts as dead.",
    ),
    "date far ahead": Case(
        "date-far-ahead",
        "id,sire,dam,born\nA1,,,2018\nA2,,,2019\nA3,,,2109\n",
        "A3",
        4,
        "born",
        "2109",
        "warning",
        "A3: born 2109 lies 90 years after every other date.",
        "Correct the date. Until then give the day with --as-of or as_of in the policy.",
    ),
    "living and dead": Case(
        "status-against-dates",
        "id,sire,dam,died,status\nA1,,,2015,alive\n",
        "A1",
        2,
        "status",
        "alive",
        "warning",
        "A1 has status living and died 2015.",
        "Correct the status or the date; until then it does not count as living.",
    ),
    "living and left": Case(
        "status-against-dates",
        "id,sire,dam,left,status\nA1,,,2015,living\n",
        "A1",
        2,
        "status",
        "living",
        "note",
        "A1 has status living and left 2015.",
        "Correct the status or the date; until then it does not count as living.",
    ),
    "dam dead": Case(
        "parent-dead",
        "id,sire,dam,born,died\nA1,,,2010,2015-02-01\nB1,,A1,2015-02-02,\n",
        "B1",
        3,
        "dam",
        "A1",
        "warning",
        "dam A1 of B1 died 2015-02-01, before B1 was born on 2015-02-02; A1 is on line 2.",
        DAM_REMEDY,
    ),
    "donor dead": Case(
        "parent-dead",
        "id,sire,dam,genetic_dam,born,died\nA1,,,,2010,2015\nA2,,,,2010,\nB1,,A2,A1,2016,\n",
        "B1",
        4,
        "genetic_dam",
        "A1",
        "note",
        "dam A1 of B1 died 2015, before B1 was born in 2016; A1 is on line 2.",
        "Right where embryos were stored; else correct a date or the donor.",
    ),
    "sire long dead": Case(
        "parent-dead",
        "id,sire,dam,born,died\nA1,,,2010,2015-01-01\nB1,A1,,2016-02-06,\n",
        "B1",
        3,
        "sire",
        "A1",
        "warning",
        "sire A1 of B1 died 2015-01-01, more than 400 days before B1 was born on 2016-02-06; A1 is "
        "on line 2.",
        SIRE_REMEDY,
    ),
    "sire dead": Case(
        "parent-dead",
        "id,sire,dam,born,died\nA1,,,2010,2015-01-01\nB1,A1,,2016-02-05,\n",
        "B1",
        3,
        "sire",
        "A1",
        "note",
        "sire A1 of B1 died 2015-01-01, before B1 was born on 2016-02-05; A1 is on line 2.",
        "Right where he died while she carried, or his semen was stored. Say gestation under "
        "[records] in the policy to have it judged.",
    ),
    "sire dead before a gestation": Case(
        "parent-dead",
        "id,sire,dam,born,died\nA1,,,2010,2015-01-01\nB1,A1,,2015-03-06,\n",
        "B1",
        3,
        "sire",
        "A1",
        "warning",
        "sire A1 of B1 died 2015-01-01, more than 63 days before B1 was born on 2015-03-06; A1 is "
        "on line 2.",
        SIRE_REMEDY,
        GESTATION,
    ),
    "sire dead before storage": Case(
        "parent-dead",
        "id,sire,dam,born,died\nA1,,,2010,2015-01-01\nB1,A1,,2017-04-06,\n",
        "B1",
        3,
        "sire",
        "A1",
        "warning",
        "sire A1 of B1 died 2015-01-01, more than 63 days and 2 years of stored sperm before B1 "
        "was born on 2017-04-06; A1 is on line 2.",
        SIRE_REMEDY,
        STORED,
    ),
    "sire left": Case(
        "parent-left",
        "id,sire,dam,born,left\nA1,,,2010,2014-05-01\nB1,A1,,2018-04-01,\n",
        "B1",
        3,
        "sire",
        "A1",
        "note",
        "sire A1 of B1 left 2014-05-01, long before B1 was born on 2018-04-01; A1 is on line 2.",
        LEFT_REMEDY.format("sire"),
    ),
    "dam left": Case(
        "parent-left",
        "id,sire,dam,born,left\nA1,,,2010,2014-05-01\nB1,,A1,2014-07-04,\n",
        "B1",
        3,
        "dam",
        "A1",
        "note",
        "dam A1 of B1 left 2014-05-01, more than 63 days before B1 was born on 2014-07-04; A1 is "
        "on line 2.",
        LEFT_REMEDY.format("dam"),
        STORED,
    ),
    "sire seen last when it left": Case(
        "parent-left",
        "id,sire,dam,born,left,last_seen\nA1,,,2010,2014,2013-12-01\nB1,A1,,2018,,\n",
        "B1",
        3,
        "sire",
        "A1",
        "note",
        "sire A1 of B1 left 2014, long before B1 was born in 2018; A1 is on line 2.",
        LEFT_REMEDY.format("sire"),
    ),
    "too young": Case(
        "parent-too-young",
        "id,sire,dam,born\nA1,,,2019-03\nB1,,A1,2019-09\n",
        "B1",
        3,
        "dam",
        "A1",
        "warning",
        "dam A1 of B1 was at most 6 months old at its birth; births are believed from 2 years; A1 "
        "is on line 2.",
        AGE_REMEDY,
        AGES,
    ),
    "too young by a day": Case(
        "parent-too-young",
        "id,sire,dam,line,born\nA1,,,northern,2015-03-02\nB1,,A1,,2019-03-01\n",
        "B1",
        3,
        "dam",
        "A1",
        "warning",
        "dam A1 of B1 was 3 years old at its birth; births are believed from 4 years; A1 is on "
        "line 2.",
        AGE_REMEDY,
        AGES,
    ),
    "too young in a line without ages": Case(
        "parent-too-young",
        "id,sire,dam,line,born\nA1,,,southern,2018\nB1,,A1,,2018-12-01\n",
        "B1",
        3,
        "dam",
        "A1",
        "warning",
        "dam A1 of B1 was at most 11 months old at its birth; births are believed from 2 years; A1 "
        "is on line 2.",
        AGE_REMEDY,
        AGES,
    ),
    "too young by weeks": Case(
        "parent-too-young",
        "id,sire,dam,line,born\nA1,,,dwarf,2019-03-01\nB1,,A1,,2019-04-25\n",
        "B1",
        3,
        "dam",
        "A1",
        "warning",
        "dam A1 of B1 was 7 weeks old at its birth; births are believed from 8 weeks; A1 is on "
        "line 2.",
        AGE_REMEDY,
        AGES,
    ),
    "too old": Case(
        "parent-too-old",
        "id,sire,dam,born\nA1,,,1980\nB1,,A1,2019\n",
        "B1",
        3,
        "dam",
        "A1",
        "warning",
        "dam A1 of B1 was at least 38 years old at its birth; births are believed up to 12 years; "
        "A1 is on line 2.",
        AGE_REMEDY,
        AGES,
    ),
    "too old by a day": Case(
        "parent-too-old",
        "id,sire,dam,born\nA1,,,2006-05-01\nB1,,A1,2019-05-01\n",
        "B1",
        3,
        "dam",
        "A1",
        "warning",
        "dam A1 of B1 was 13 years old at its birth; births are believed up to 12 years; A1 is on "
        "line 2.",
        AGE_REMEDY,
        AGES,
    ),
    "too old when it died": Case(
        "parent-too-old",
        "id,sire,dam,born,died\nA1,,,1980,2000\nB1,,A1,2000-05,\n",
        "B1",
        3,
        "dam",
        "A1",
        "warning",
        "dam A1 of B1 was at least 19 years old when it died; births are believed up to 12 years; "
        "A1 is on line 2.",
        AGE_REMEDY,
        AGES,
    ),
    "litter born apart": Case(
        "litter-dates-differ",
        "id,sire,dam,litter,born\nB1,,D,L1,2019-05-01\nB2,,D,L1,2019-05-05\n",
        "B2",
        3,
        "litter",
        "L1",
        "warning",
        'litter L1 was born on days from 2019-05-01 to 2019-05-05: dam "D", B1 (line 2) and B2 '
        "(line 3).",
        LITTER_REMEDIES["dates"],
    ),
    "litter of no known dam born apart": Case(
        "litter-dates-differ",
        "id,sire,dam,litter,born\nB1,,,L1,2019-06\nB2,,,L1,2019-04\n",
        "B1",
        2,
        "litter",
        "L1",
        "warning",
        "litter L1 was born on days from 2019-04 to 2019-06: B1 (line 2) and B2 (line 3).",
        LITTER_REMEDIES["dates"],
    ),
    "litter of two dams": Case(
        "litter-dams-differ",
        "id,sire,dam,litter\nD1,,,\nD2,,,\nB1,,D1,L1\nB2,,D2,L1\n",
        "B2",
        5,
        "litter",
        "L1",
        "warning",
        'litter L1 has young of the dams "D1" and "D2": B1 (line 4) and B2 (line 5).',
        LITTER_REMEDIES["dams"],
    ),
    "litter with one young of another dam": Case(
        "litter-dams-differ",
        "id,sire,dam,litter\nB1,,D1,L1\nB2,,D2,L1\nB3,,D2,L1\n",
        "B1",
        2,
        "litter",
        "L1",
        "warning",
        'litter L1 has young of the dams "D1" and "D2": B1 (line 2) and B2 (line 3).',
        LITTER_REMEDIES["dams"],
    ),
    "litter too large": Case(
        "litter-too-large",
        "id,sire,dam,litter\nB1,,D,L1\nB2,,D,L1\nB3,,D,L1\n",
        "B1",
        2,
        "litter",
        "L1",
        "warning",
        'litter L1 has 3 young; at most 2 are believed: dam "D", B1 (line 2), B2 (line 3) and B3 '
        "(line 4).",
        LITTER_REMEDIES["size"],
        LARGEST,
    ),
    "litter too large by count": Case(
        "litter-too-large",
        "id,sire,dam,litter,count\nB1,,D,L1,3\n",
        "B1",
        2,
        "litter",
        "L1",
        "warning",
        'litter L1 has 3 young; at most 2 are believed: dam "D", B1 (line 2).',
        LITTER_REMEDIES["size"],
        LARGEST,
    ),
    "litters too close": Case(
        "litters-too-close",
        "id,sire,dam,litter,born\nB1,,D,L1,2019-05-01\nB2,,D,L2,2019-05-20\n",
        "B2",
        3,
        "dam",
        "D",
        "warning",
        "dam D bore B1 on 2019-05-01 and B2 on 2019-05-20, less than a gestation apart (63 days); "
        "B1 is on line 2.",
        "Correct a date or the dam of B2. Where a dam may carry two litters at once, or lays anew "
        "before the first clutch hatches, accept it.",
        GESTATION,
    ),
}


@pytest.mark.parametrize("case", CASES.values(), ids=list(CASES))
def test_each_doubt_is_said_word_for_word(case: Case):
    """The rows give exactly the finding told, with its place and what to do."""
    (finding,) = found_in(case.text, case.rules)
    assert (finding.kind, finding.id, finding.row) == (case.kind, case.id, case.row)
    assert (finding.column, finding.found) == (case.column, case.found)
    assert finding.severity == case.severity
    assert finding.message == case.message
    assert finding.remedy == case.remedy


MAY_BE_RIGHT = {
    "left in the year of birth": ("id,sire,dam,born,left\nA1,,,2019-12-31,2019\n", NO_RULES),
    "entered on the day of birth": (
        "id,sire,dam,born,entered\nA1,,,2019-05-01,2019-05-01\n",
        NO_RULES,
    ),
    "seen in the year of death": ("id,sire,dam,died,last_seen\nA1,,,2015,2015-12-31\n", NO_RULES),
    "struck off within a month": ("id,sire,dam,died,left\nA1,,,2015-03-01,2015-04-01\n", NO_RULES),
    "left in the year of death": ("id,sire,dam,died,left\nA1,,,2015-03-01,2015\n", NO_RULES),
    "living till an open end": ("id,sire,dam,died,status\nA1,,,2015/..,living\n", NO_RULES),
    "living and back again": (
        "id,sire,dam,entered,left,status\nA1,,,2016,2015-05,living\n",
        NO_RULES,
    ),
    "dead without a date": ("id,sire,dam,left,status\nA1,,,2015,dead\nA2,,,,dead\n", NO_RULES),
    "dead in the year of the birth": (
        "id,sire,dam,born,died\nA1,,,2010,2015\nB1,,A1,2015-12-31,\n",
        NO_RULES,
    ),
    "dead on the day of the birth": (
        "id,sire,dam,born,died\nA1,,,2010,2015-05-01\nB1,A1,A1,2015-05-01,\n",
        NO_RULES,
    ),
    "sire dead for a gestation": (
        "id,sire,dam,born,died\nA1,,,2010,2015-01-01\nB1,A1,,2015-03-05,\n",
        GESTATION,
    ),
    "sire dead for a storage": (
        "id,sire,dam,born,died\nA1,,,2010,2015-01-01\nB1,A1,,2017-03-05,\n",
        STORED,
    ),
    "left within a pregnancy": (
        "id,sire,dam,born,left\nA1,,,2010,2014-05-01\nB1,A1,A1,2014-07-03,\n",
        GESTATION,
    ),
    "left for 400 days": (
        "id,sire,dam,born,left\nA1,,,2010,2014\nB1,A1,A1,2016-02-04,\n",
        NO_RULES,
    ),
    "left and came back": (
        "id,sire,dam,born,entered,left\nA1,,,2010,2015-01-01,2014\nB1,A1,,2018,,\n",
        NO_RULES,
    ),
    "left and seen since": (
        "id,sire,dam,born,left,last_seen\nA1,,,2010,2014,2018\nB1,A1,,2018,,\n",
        NO_RULES,
    ),
    "young from outside": (
        "id,sire,dam,born,left,entered\nA1,,,2010,2014,\nB1,A1,,2018,,2019\n",
        NO_RULES,
    ),
    "dam from two years on the day": (
        "id,sire,dam,born\nA1,,,2017-05-01\nB1,,A1,2019-05-01\n",
        AGES,
    ),
    "dam perhaps two years old": ("id,sire,dam,born\nA1,,,2017\nB1,,A1,2019-01-01\n", AGES),
    "dam till her thirteenth birthday": (
        "id,sire,dam,born\nA1,,,2006-05-02\nB1,,A1,2019-05-01\n",
        AGES,
    ),
    "dam perhaps not yet thirteen": ("id,sire,dam,born\nA1,,,2006\nB1,,A1,2019-12-30\n", AGES),
    "line with ages of its own": (
        "id,sire,dam,line,born\nA1,,,northern,2005\nB1,,A1,,2019\n"
        "A2,,,dwarf,2018-06-01\nB2,,A2,,2018-09\n",
        AGES,
    ),
    "word for no line": ("id,sire,dam,line,born\nA1,,,unknown,2015\nB1,,A1,,2019\n", AGES),
    "too old, had it lived": (
        "id,sire,dam,born,died\nA1,,,2000,2009\nB1,A1,,2015,\n",
        RecordRules(parent_age=AGES.parent_age, sperm_storage=Age(9), gestation=Age(63, "days")),
    ),
    "any age without a rule": (
        "id,sire,dam,born\nA1,,,1980\nB1,A1,,2019\nC1,,A1,1980-06\n",
        NO_RULES,
    ),
    "litter born over days": (
        "id,sire,dam,litter,born\nB1,,D,L1,2019-05-01\nB2,,D,L1,2019-05-04\n",
        NO_RULES,
    ),
    "litter of a year": (
        "id,sire,dam,litter,born\nB1,,D,L1,2019-05-01\nB2,,D,L1,2019\nB3,,D,L1,\n",
        NO_RULES,
    ),
    "no litter": (
        "id,sire,dam,litter,born\nB1,,D,0,2019\nB2,,D,0,2021\nB3,,E,unknown,2019\nB4,,F,unknown,2021\n",
        LARGEST,
    ),
    "litters counted for each dam": (
        "id,sire,dam,litter,born\nB1,,D,1,2019\nB2,,E,1,2021\nB3,,D,2,2020\nB4,,E,2,2022\n"
        "B5,,,1,2024\nB6,,F,3,2020\nB7,,,3,2024\n",
        LARGEST,
    ),
    "two first litters": ("id,sire,dam,litter\nB1,,D,1\nB2,,E,1\n", NO_RULES),
    "two litters of the letter A": ("id,sire,dam,litter\nB1,,D,A\nB2,,E,A\n", NO_RULES),
    "litter as large as believed": ("id,sire,dam,litter\nB1,,D,L1\nB2,,D,L1\n", LARGEST),
    "young of a group": (
        "id,sire,dam,litter,count\nD,,,,20\nE,,,,20\nB1,,D,L1,9\nB2,,E,L1,9\n",
        LARGEST,
    ),
    "embryos of two donors": (
        "id,sire,dam,genetic_dam,litter\nB1,,D,E,L1\nB2,,D,F,L1\n",
        NO_RULES,
    ),
    "a donor's many young": (
        "id,sire,dam,genetic_dam,born\nB1,,D,E,2019-05-01\nB2,,F,E,2019-05-20\n",
        GESTATION,
    ),
    "litters of a group": (
        "id,sire,dam,count,born\nD,,,20,\nB1,,D,1,2019-05-01\nB2,,D,1,2019-05-20\n",
        GESTATION,
    ),
    "a gestation between": (
        "id,sire,dam,born\nB1,,D,2019-05-01\nB2,,D,2019-07-03\n",
        GESTATION,
    ),
    "a short gestation between": (
        "id,sire,dam,born\nB1,,D,2019-05-01\nB2,,D,2019-06-30\n",
        GESTATION,
    ),
    "perhaps one litter": (
        "id,sire,dam,born\nB1,,D,2019-05-01\nB2,,D,2019-05\nB3,,D,2019\nB4,,D,\n",
        GESTATION,
    ),
    "births close together without a gestation": (
        "id,sire,dam,born\nB1,,D,2019-05-01\nB2,,D,2019-05-20\n",
        NO_RULES,
    ),
    "ages of a group": (
        "id,sire,dam,born,died,left,count\nA1,,,1980,1990,1990,40\nB1,A1,A1,2019,,,1\n",
        AGES,
    ),
    "a parent without a row": ("id,sire,dam,born,died,left\nB1,X,Y,2019,,\n", AGES),
    "one of several sires": (
        "id,sire,dam,born,died\nA1,,,1950,1951\nA2,,,2010,\nB1,A1|A2,,2019,\n",
        AGES,
    ),
    "its own parent": (
        "id,sire,dam,born,died\nA1,A1,A1,2019,2010\n",
        NO_RULES,
    ),
    "living and back the same day": (
        "id,sire,dam,entered,left,status\nA1,,,2015-05-03,2015-05-03,living\n",
        NO_RULES,
    ),
    "left and perhaps dead": (
        "id,sire,dam,born,left,died\nA1,,,2010,2014,2018-06-20\nB1,A1,,2018,,\n",
        NO_RULES,
    ),
    "its own dam": (
        "id,sire,dam,born\nD,,D,2019-05-01\nB1,,D,2019-05-20\n",
        GESTATION,
    ),
    "no dates at all": ("id,sire,dam,litter,status\nA1,,,,living\nB1,A1,,L1,living\n", AGES),
}


@pytest.mark.parametrize(("text", "rules"), MAY_BE_RIGHT.values(), ids=list(MAY_BE_RIGHT))
def test_what_may_be_right_is_not_doubted(text: str, rules: RecordRules):
    """No check fires where some days that the dates allow are in order, or practice allows it."""
    kinds = [kind for kind, _animal in kinds_in(text, rules)]
    assert kinds == []


# Dates far ahead


def births(*dates: str) -> str:
    """Records of animals born on these dates."""
    return "id,sire,dam,born\n" + "".join(f"A{n},,,{date}\n" for n, date in enumerate(dates))


def test_few_dates_are_ahead_only_by_fifty_years():
    """A small file may rest for decades; only half a century is too long."""
    assert kinds_in(births("1980", "1981", "2029")) == []
    assert kinds_in(births("1980", "1981", "2033")) == [("date-far-ahead", "A2")]
    assert kinds_in(births("1919", "2019")) == []


def test_many_dates_are_ahead_by_five_years():
    """From a hundred dates on five years are enough, counted over both intervals."""
    usual = [f"{1990 + n % 30}-07-01" for n in range(99)]
    assert kinds_in(births(*usual, "2024-07-04")) == []
    assert kinds_in(births(*usual, "2024-07-05")) == [("date-far-ahead", "A99")]
    assert kinds_in(births(*usual, "2024")) == []
    assert kinds_in(births(*usual[1:], "2024-07-05")) == []


def test_a_handful_of_dates_may_be_ahead_together():
    """A litter typed with a wrong year is found whole, a sixth such date makes it the present."""
    usual = [f"{1990 + n % 30}" for n in range(200)]
    found = found_in(births(*usual, *["2091"] * 5))
    assert [each.id for each in found] == ["A200", "A201", "A202", "A203", "A204"]
    assert found[0].message == "A200: born 2091 lies 72 years after all but 5 of the dates."
    assert found_in(births(*usual, *["2091"] * 6)) == []


def test_an_open_end_leaves_nothing_ahead():
    """A date that may be any day from a year on may be as late as the latest."""
    usual = [f"{1990 + n % 30}" for n in range(200)]
    assert kinds_in(births(*usual, "2091")) == [("date-far-ahead", "A200")]
    assert kinds_in(births(*usual, "after 2000", "2091")) == []


AHEAD = st.lists(
    st.tuples(st.sampled_from([2010, 2019, 2021, 2026, 2031, 2037]), st.integers(0, 2)),
    min_size=1,
    max_size=8,
)


def spans(years: list[tuple[int, int]]) -> list[str]:
    """Years and widths as intervals, above a hundred sure dates."""
    return [f"{1990 + n % 30}" for n in range(100)] + [
        f"[{year}..{year + width}]" for year, width in years
    ]


@given(AHEAD, st.data())
def test_a_wider_date_never_puts_another_ahead(years: list[tuple[int, int]], data: st.DataObject):
    """To know a date less exactly leaves no more dates far ahead than before."""
    before = kinds_in(births(*spans(years)))
    at = data.draw(st.integers(0, len(years) - 1))
    year, width = years[at]
    earlier, later = (data.draw(st.integers(0, 9)) for _end in range(2))
    wider = [*years[:at], (year - earlier, width + earlier + later), *years[at + 1 :]]
    assert set(kinds_in(births(*spans(wider)))) <= set(before)


@given(AHEAD)
def test_dates_ahead_are_those_beyond_a_gap(years: list[tuple[int, int]]):
    """Ahead are at most five dates, each surely more than five years after all the rest."""
    ends = [(1990 + n % 30, 1990 + n % 30) for n in range(100)]
    ends += [(year, year + width) for year, width in years]
    order = sorted(range(len(ends)), key=lambda n: ends[n][1])
    ahead: list[int] = []
    for most in range(1, 6):
        rest, beyond = order[:-most], order[-most:]
        gap = min(ends[n][0] for n in beyond) - max(ends[n][1] for n in rest)
        # Six years lie as little as a day more than five apart; that is not yet surely more.
        if gap > 6:
            ahead = beyond
    expected = {("date-far-ahead", f"A{n}") for n in ahead}
    assert set(kinds_in(births(*spans(years)))) == expected


def test_dates_of_all_columns_are_held_against_each_other():
    """A death is ahead of the births too, and is named with its own column."""
    rows = [f"A{n},,,{1990 + n % 30},," for n in range(120)]
    text = "\n".join(["id,sire,dam,born,died,last_seen", *rows, "B,,,2018,2199,", "C,,,2018,,2018"])
    (finding,) = found_in(text)
    assert (finding.id, finding.column, finding.found) == ("B", "died", "2199")


# Litters


def litter_rows(*rows: str) -> str:
    """Records of young with their litters: forty sound litters and `rows`."""
    sound = [f"S{n},,M{n},{100 + n},2019" for n in range(40)]
    return "\n".join(["id,sire,dam,litter,born", *sound, *rows])


def test_a_shared_number_is_a_doubt_where_numbers_are_not_shared():
    """In a column with one number a litter a second dam is a slip, even if it is a number."""
    assert kinds_in(litter_rows("B1,,D,7,", "B2,,E,7,")) == [("litter-dams-differ", "B2")]


def test_numbers_shared_by_more_than_one_in_ten_are_a_habit():
    """Four shared words in forty-four are doubted, five in forty-five are a way of counting."""
    shared = [f"{dam}{word},,{dam},{word}," for word in ("w1", "w2", "w3", "w4") for dam in "DE"]
    assert len(kinds_in(litter_rows(*shared))) == 4
    assert kinds_in(litter_rows(*shared, "D5,,D,w5,", "E5,,E,w5,")) == []


def test_young_of_an_unknown_dam_belong_to_a_litter_of_one_dam():
    """A blank dam does not hide that a litter is too large or born apart."""
    text = litter_rows("B1,,D,7,2018", "B2,,,7,2018", "B3,,,7,2020")
    assert kinds_in(text, LARGEST) == [
        ("litter-dates-differ", "B3"),
        ("litter-too-large", "B1"),
    ]


def test_a_litter_is_too_large_for_each_dam_where_dams_count_anew():
    """Litter 1 of one dam and litter 1 of another are two litters."""
    rows = [f"{dam}{word}{n},,{dam},{word}" for dam in "DE" for word in "12" for n in range(2)]
    text = "\n".join(["id,sire,dam,litter", *rows])
    assert kinds_in(text, LARGEST) == []
    (finding,) = found_in(f"{text}\nD13,,D,1", LARGEST)
    assert finding.message == (
        'litter 1 has 3 young; at most 2 are believed: dam "D", D10 (line 2), D11 (line 3) and D13 '
        "(line 10)."
    )


def test_births_of_one_litter_are_not_also_litters_too_close():
    """Litter-mates born weeks apart are one doubt, not two."""
    text = "id,sire,dam,litter,born\nB1,,D,L1,2019-05-01\nB2,,D,L1,2019-05-20\n"
    assert kinds_in(text, GESTATION) == [("litter-dates-differ", "B2")]
    assert kinds_in(text + "B3,,D,L2,2019-05-20\n", GESTATION) == [
        ("litter-dates-differ", "B2"),
        ("litters-too-close", "B3"),
    ]


def test_births_too_close_are_found_past_doubtful_ones_between():
    """A birth of unsure date between two others does not hide that they are too close."""
    text = (
        "id,sire,dam,born\nB1,,D,2019-05-01\nB2,,D,[2019-05-02..2019-06-30]\n"
        "B3,,D,2019-05-20\nB4,,D,2019-05-20\n"
    )
    assert kinds_in(text, GESTATION) == [("litters-too-close", "B3")]


def test_decisions_are_heeded():
    """What a decision sets is what the checks read."""
    text = "id,sire,dam,litter,line,born\nB1,,D,L1,,2019\nB2,,D,L1,,2021\nD,,,,,2016\n"
    clear = RecordRules(decisions=(Decision("set", "B2", field="litter", value=""),))
    assert kinds_in(text) == [("litter-dates-differ", "B2")]
    assert kinds_in(text, clear) == []
    northern = RecordRules(
        parent_age=AGES.parent_age,
        decisions=(Decision("set", "D", field="line", value="northern"), *clear.decisions),
    )
    assert kinds_in(text, northern) == [("parent-too-young", "B1")]


# Lengths of time in days


@given(
    st.integers(datetime.date(1895, 1, 1).toordinal(), datetime.date(2110, 1, 1).toordinal()),
    st.integers(0, 600),
    st.sampled_from(["days", "weeks", "months", "years"]),
)
def test_days_of_an_age_bound_the_calendar(born: int, count: int, unit: str):
    """An age is surely complete after its longest days, and surely not before its shortest."""
    count = count % 60 if unit == "years" else count
    age = Age(count, unit)
    assert completed(born, born + longest_days(age), unit) >= count
    assert shortest_days(age) == 0 or completed(born, born + shortest_days(age) - 1, unit) < count
    assert longest_days(age) - shortest_days(age) <= (9 if unit in ("months", "years") else 0)


# Random records

FIRST = datetime.date(2000, 1, 1).toordinal()
RULES = RecordRules(
    parent_age={
        ("", "male"): AgeWindow(Age(1), Age(6)),
        ("", "female"): AgeWindow(Age(18, "months"), Age(4)),
    },
    gestation=Age(5, "months"),
    largest_litter=2,
)
NEVER_DATED = {"litter-dams-differ", "litter-too-large"}
Row = dict[str, str]
Days = dict[str, tuple[int, int]]


def day(ordinal: int) -> str:
    """An ordinal as ISO 8601."""
    return datetime.date.fromordinal(ordinal).isoformat()


@st.composite
def records(draw: st.DrawFn) -> list[tuple[Row, Days]]:
    """Rows with dates as intervals; parents stand above their young."""
    drawn = []
    interval = st.tuples(st.integers(0, 3500), st.sampled_from([0, 0, 0, 5, 40, 365]))
    for number in range(draw(st.integers(2, 9))):
        others = st.sampled_from(["", *(f"A{each}" for each in range(number)), "X"])
        row = {
            "id": f"A{number}",
            "sire": draw(others),
            "dam": draw(others),
            "litter": draw(st.sampled_from(["", "", "L1", "L2"])),
            "status": draw(st.sampled_from(["", "living", "dead"])),
            "count": draw(st.sampled_from(["1", "1", "1", "1", "3"])),
        }
        dates = {}
        for field in DATE_FIELDS:
            if draw(st.integers(0, 2)) or field == "born":
                start, width = draw(interval)
                dates[field] = (FIRST + start, FIRST + start + width)
        drawn.append((row, dates))
    return drawn


def written(rows: list[tuple[Row, Days]]) -> str:
    """Rows as CSV text."""
    out = io.StringIO()
    writer = csv.DictWriter(out, [*rows[0][0], *DATE_FIELDS], restval="", lineterminator="\n")
    writer.writeheader()
    for row, dates in rows:
        writer.writerow(
            row | {field: f"[{day(first)}..{day(last)}]" for field, (first, last) in dates.items()}
        )
    return out.getvalue()


def doubts(text: str) -> set[tuple[str, ...]]:
    """What is doubted, apart from how it is said.

    A parent that is surely younger than its young may, with a wider date, be one that is
    surely too young: one link in doubt both times. In a litter or of a dam another young may
    be named when dates change.
    """
    animals = animals_of(text)
    found = [each for check in CHECKS for each in check(animals, RULES)]
    found += parents_younger(animals, RULES)
    return {
        (each.kind, str(each.found))
        if each.kind.startswith("litter")
        else (
            "age" if each.kind in ("parent-younger", "parent-too-young") else each.kind,
            str(each.id),
            str(each.column),
        )
        for each in found
    }


@given(records(), st.data())
def test_a_wider_date_never_adds_a_doubt(rows: list[tuple[Row, Days]], data: st.DataObject):
    """To know a date less exactly can only take doubts away."""
    places = [(at, field) for at, (_row, dates) in enumerate(rows) for field in dates]
    before = doubts(written(rows))
    for at, field in data.draw(st.lists(st.sampled_from(places), min_size=1, max_size=4)):
        first, last = rows[at][1][field]
        rows[at][1][field] = (
            first - data.draw(st.sampled_from([0, 1, 30, 400, 4000])),
            last + data.draw(st.sampled_from([0, 1, 30, 400, 4000])),
        )
    assert doubts(written(rows)) <= before


@given(records())
def test_without_dates_nothing_in_time_is_doubted(rows: list[tuple[Row, Days]]):
    """Dams and sizes of litters alone are judged without any date."""
    undated: list[tuple[Row, Days]] = [(row, {}) for row, _dates in rows]
    assert {kind for kind, *_rest in doubts(written(undated))} <= NEVER_DATED


def plainly(animals: Animals) -> Iterator[tuple[str, str]]:
    """Kind and animal (or dam, or litter) of each doubt, by the definitions, one by one."""
    by_id = {animal.id: animal for animal in animals}
    bred = defaultdict(list)
    for animal in animals:
        yield from plainly_alone(animal)
        for role, parents in (("sire", animal.sire), ("dam", animal.dam)):
            parent = by_id.get(parents[0][0]) if parents else None
            if parent is not None and parent.count == 1:
                yield from plainly_of_parent(animal, parent, role)
        if animal.dam and animal.born:
            dam = animal.dam[0][0]
            if dam not in by_id or by_id[dam].count == 1:
                bred[dam].append(animal)
    for dam, young in bred.items():
        for one, other in combinations(young, 2):
            same = one.text.get("litter") == other.text.get("litter") != None  # noqa: E711
            if not same and one.born and other.born:
                least, most = apart(one.born, other.born)
                if least > 3 and most < shortest_days(Age(5, "months")) - 3:
                    yield "litters-too-close", dam


def apart(one: DateRange, other: DateRange) -> tuple[int, int]:
    """Fewest and most days between two dates."""
    least = max(one.earliest - other.latest, other.earliest - one.latest, 0)
    return least, max(one.latest - other.earliest, other.latest - one.earliest)


def plainly_alone(animal: Animal) -> Iterator[tuple[str, str]]:
    """Doubts about one animal's own dates."""
    dates = animal.dates
    for field in ("left", "entered"):
        if field in dates and dates[field].latest < dates["born"].earliest:
            yield f"{field}-before-born", animal.id
    if "died" in dates:
        for field, allowed in (("last_seen", 0), ("entered", 0), ("left", 31)):
            if field in dates and dates[field].earliest - dates["died"].latest > allowed:
                yield "event-after-death", animal.id
    returned = (
        "entered" in dates
        and "left" in dates
        and not (dates["entered"].latest < dates["left"].earliest)
    )
    if animal.status == "living" and ("died" in dates or ("left" in dates and not returned)):
        yield "status-against-dates", animal.id


def plainly_of_parent(child: Animal, parent: Animal, role: str) -> Iterator[tuple[str, str]]:
    """Doubts about one parent."""
    born, died, left = child.dates["born"], parent.dates.get("died"), parent.dates.get("left")
    carried = longest_days(Age(5, "months"))
    if died and born.earliest - died.latest > (carried if role == "sire" else 0):
        yield "parent-dead", child.id
    excused = left and (
        ("entered" in child.dates and child.dates["entered"].latest > born.earliest)
        or ("last_seen" in parent.dates and parent.dates["last_seen"].latest > left.earliest)
        or ("entered" in parent.dates and parent.dates["entered"].latest >= left.earliest)
        or (died and died.earliest < born.latest)
    )
    if left and born.earliest - left.latest > carried and not excused:
        yield "parent-left", child.id
    window = RULES.parent_age["", "male" if role == "sire" else "female"]
    theirs = parent.dates["born"]
    oldest_possible = completed(theirs.earliest, born.latest, window.youngest.unit)
    not_younger = theirs.earliest < born.latest or (
        theirs.earliest == born.latest and not (theirs.exact and born.exact)
    )
    if not_younger and oldest_possible < window.youngest.count:
        yield "parent-too-young", child.id
    last = min(born.earliest, died.earliest) if died else born.earliest
    if last > theirs.latest:
        least_age = completed(theirs.latest, last, window.oldest.unit)
        if int(least_age) > window.oldest.count:
            yield "parent-too-old", child.id


@given(records())
def test_all_at_once_finds_what_one_by_one_finds(rows: list[tuple[Row, Days]]):
    """The checks over columns agree with the definitions read off animal by animal."""
    animals = animals_of(written(rows))
    found = [each for check in CHECKS for each in check(animals, RULES)]
    said = {
        (each.kind, str(each.found if each.kind == "litters-too-close" else each.id))
        for each in found
        if each.kind != "date-far-ahead" and not each.kind.startswith("litter-")
    }
    assert said == set(plainly(animals))


@given(records())
def test_litters_are_those_of_one_word_and_dam(rows: list[tuple[Row, Days]]):
    """Births and sizes of litters agree with litters put together one by one."""
    animals = animals_of(written(rows))
    by_id = {animal.id: animal for animal in animals}
    by_word = defaultdict(list)
    for animal in animals:
        dam = animal.dam[0][0] if animal.dam else ""
        if "litter" in animal.text and (dam not in by_id or by_id[dam].count == 1):
            by_word[animal.text["litter"]].append((dam, animal))
    shared = [word for word, young in by_word.items() if len({dam for dam, _ in young if dam}) > 1]
    with_dam = [word for word, young in by_word.items() if any(dam for dam, _each in young)]
    # L1 and L2 are words with a letter: one shared of them is a slip, both are a habit.
    anew = len(shared) > 1
    expected = {("litter-dams-differ", word) for word in shared if not anew}
    for word, young in by_word.items():
        apart_by_dam = word in shared or (anew and word in with_dam)
        litters = defaultdict(list)
        for dam, animal in young:
            if dam or not apart_by_dam:
                litters[dam if apart_by_dam else ""].append(animal)
        for litter in litters.values():
            if sum(each.count for each in litter) > 2:
                expected.add(("litter-too-large", word))
            pairs = combinations([each.born for each in litter if each.born], 2)
            if any(apart(one, other)[0] > 3 for one, other in pairs):
                expected.add(("litter-dates-differ", word))
    found = litters_in_doubt(animals, RULES)
    assert {(each.kind, str(each.found)) for each in found} == expected
