"""The policy file: every key is read, every fault is told at once with what was expected."""

import datetime
import re
import tomllib

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.dates import Age, AgeWindow, parse_date
from pairing.errors import PolicyError
from pairing.plan.candidates import find_candidates
from pairing.policy.keys import AGE_TABLES, KEYS, LISTS, NEEDS
from pairing.policy.reading import policy_from_tables, read_policy, unused_keys_note
from pairing.policy.rules import LivingRule, Policy
from pairing.records.fields import FIELDS
from pairing.records.findings import KINDS
from pairing.records.readers import read_records
from pairing.records.rules import DECISIONS, Decision, RecordRules
from pairing.report.starter import starter_policy
from tests.programmes import animal, careful, chosen, plan_of, population_of, records_text

EXAMPLE = """
[programme]
name = "Lantern Bay pipefish"
season_start = 2027-03-01      # ages are judged on this day
season_end = 2027-10-31
as_of = 2026-11-30
[records]
unknown_parents = "unrelated"  # or "like-contemporaries"
litter_shares_sire = true
[living]
presumed_dead_after = 15       # years; off unless given
members = "living"             # or "bred_within_years = 3", "born_since = 2015"
[breeding_age]                 # years, or "8 weeks", "18 months", also per line
male = [2, 15]
female = [2, 12]
[breeding_age."northern"]
male = ["18 months", 15]
[mating]
system = "pairs"               # or one-male-several-females
allow_closest = false          # parent x offspring and full sibs stay out unless true
[limits]
offspring_inbreeding = 0.0625  # also "6.25%"; meeting it is allowed
above_breed_mean = 0.03        # alternative form; generations = 5 restricts both
young = 6                      # wanted this season
young_per_litter = 2
litters_per_male = 3
litters_per_female = 1
share_per_male = 0.7
moves = 6                      # transfers between holders at most
[weights]                      # see "the objective"
inbreeding = 1.0
diversity = 1.0
travel = 0.0
merit = 0.0
[[pairs]]                      # a standing decision
sire = "A12"
dam = "B07"
decision = "together"          # together | together-no-young | must-breed | never
until = 2028-01-01
reason = "bonded pair"
[[animals]]
id = "C33"
decision = "rest"              # rest | must-breed | at-most (with litters = 1)
reason = "hip injury"
[[animals]]
id = "B08"
decision = "at-most"
litters = 1
[[holders]]
name = "North Quay"
latitude = 54.1
longitude = -3.2
places = 12                    # animals at most
[[lines]]
name = "northern"
may_cross = ["southern"]
[[gametes]]                    # stored semen: the sire may be dead
id = "A03"
doses = 4
[[conditions]]                 # heritable conditions known in the population
name = "white-blindness"
inheritance = "recessive"      # recessive (default) | x-linked | dominant
allele_frequency = 0.05        # optional; else estimated
limit = 0.01                   # highest tolerated chance of affected young
one_parent_tested_free = false
[depression]                   # what inbreeding costs, for expected survival
outcome = "survived"           # a 0/1 column; or survived_to_days = 30
haploid_lethal_equivalents = 1.57   # or diploid_...; optional, with source = "..."
[[futures]]                    # for forecast
name = "as now"
places = 60
"""

ANIMALS = [
    animal("A03", "m", born="2001-05-01", died="2019-01-01", status="dead", line="northern"),
    animal("A12", "m", born="2018-05-01", line="northern", holder="North Quay"),
    animal("A13", "m", born="2019-05-01", line="southern", holder="North Quay"),
    animal("B07", "f", born="2018-05-01", line="northern", holder="North Quay"),
    animal("B08", "f", born="2019-05-01", line="southern", holder="South Mole"),
    animal("B09", "f", born="2020-05-01", line="southern", holder="South Mole"),
    animal("C33", "f", born="2020-05-01", line="southern", holder="South Mole"),
]


def problems_of(tables):
    """The problems told of a policy."""
    with pytest.raises(PolicyError, match="the policy cannot be used as it is") as told:
        policy_from_tables(tables, name="rules.toml")
    assert told.value.exit_status == 2
    assert told.value.headline.startswith("rules.toml: ")
    return list(told.value.details)


def written(tmp_path, text):
    """A policy file with this text."""
    path = tmp_path / "rules.toml"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return path


def test_every_key_of_the_example_is_read(tmp_path):
    """The example of the public surface parses into the rules it states."""
    policy = read_policy(written(tmp_path, EXAMPLE))
    assert policy.name == "Lantern Bay pipefish"
    start = datetime.date(2027, 3, 1).toordinal()
    assert (policy.season_start.earliest, policy.season_start.latest) == (start, start)
    assert policy.season_end.latest == datetime.date(2027, 10, 31).toordinal()
    assert policy.as_of.latest == datetime.date(2026, 11, 30).toordinal()
    assert (policy.unknown_parents, policy.litter_shares_sire) == ("unrelated", True)
    assert policy.records == RecordRules(stored_semen=frozenset({"A03"}))
    assert policy.living == LivingRule(presumed_dead_after=15.0)
    assert policy.breeding_age == {
        ("", "male"): AgeWindow(Age(2), Age(15)),
        ("", "female"): AgeWindow(Age(2), Age(12)),
        ("northern", "male"): AgeWindow(Age(18, "months"), Age(15)),
    }
    assert (policy.system, policy.allow_closest) == ("pairs", False)
    limits = policy.limits
    assert (limits.offspring_inbreeding, limits.above_breed_mean) == (0.0625, 0.03)
    assert (limits.young, limits.young_per_litter) == (6, 2)
    assert (limits.litters_per_male, limits.litters_per_female) == (3, 1)
    assert (limits.share_per_male, limits.moves) == (0.7, 6)
    weights = policy.weights
    assert (weights.inbreeding, weights.diversity) == (1.0, 1.0)
    assert (weights.travel, weights.merit) == (0.0, 0.0)
    (pair,) = policy.pairs
    assert (pair.sire, pair.dam, pair.decision, pair.reason) == (
        "A12",
        "B07",
        "together",
        "bonded pair",
    )
    assert pair.until.latest == datetime.date(2028, 1, 1).toordinal()
    rest, few = policy.animals
    assert (rest.id, rest.decision, rest.reason, rest.until) == ("C33", "rest", "hip injury", None)
    assert (few.id, few.decision, few.litters) == ("B08", "at-most", 1)
    (holder,) = policy.holders
    assert (holder.name, holder.latitude, holder.longitude, holder.places) == (
        "North Quay",
        54.1,
        -3.2,
        12,
    )
    assert policy.may_cross == {
        "northern": frozenset({"southern"}),
        "southern": frozenset({"northern"}),
    }
    (semen,) = policy.stored_semen
    assert (semen.id, semen.doses) == ("A03", 4)
    assert len(policy.sha256) == 64


def test_example_plans_a_season(tmp_path):
    """The example's rules lead to a plan that keeps its decisions."""
    plan = plan_of(ANIMALS, tomllib.loads(EXAMPLE))
    pairs = chosen(plan)
    assert sum(young for _sire, _dam, young, _litters in pairs) == 6
    assert ("A12", "B07", 2, 1) in pairs
    assert {dam for _sire, dam, _young, _litters in pairs} == {"B07", "B08", "B09"}


def test_policy_without_keys_has_the_defaults():
    """No table at all gives the rules that hold without a policy."""
    policy = policy_from_tables({})
    assert policy == Policy()
    assert policy.litters_per_male == 1
    assert (policy.limits.litters_per_female, policy.limits.young_per_litter) == (1, 1)
    assert policy.limits.young is None
    assert (policy.weights.inbreeding, policy.weights.diversity) == (1.0, 1.0)
    assert (policy.weights.travel, policy.weights.merit) == (0.0, 0.0)
    assert not policy.allow_closest
    assert unused_keys_note(policy) == ""


def test_litters_of_a_male_are_unlimited_outside_pairs():
    """One litter a male is the default of pairs only, and a given number holds in any system."""
    harem = {"system": "one-male-several-females"}
    assert policy_from_tables({"mating": harem}).litters_per_male is None
    assert (
        policy_from_tables({"mating": harem, "limits": {"litters_per_male": 4}}).litters_per_male
        == 4
    )
    assert policy_from_tables({"limits": {"litters_per_male": 2}}).litters_per_male == 2


def test_all_problems_are_told_at_once():
    """Unknown tables and keys, wrong values and missing keys are all named in one error."""
    assert problems_of(
        {
            "limts": {"young": 4},
            "limits": {
                "offspring_inbreding": 0.1,
                "young": -1,
                "young_per_litter": 1.5,
                "share_per_male": 5,
                "moves": True,
            },
            "weights": {"diversity": -1, "merit": "much"},
            "mating": {"system": "harem", "allow_closest": "no"},
            "breeding_age": {"mail": [1, 2], "female": [2]},
            "programme": {"season_start": "next spring", "name": ""},
            "pairs": [{"sire": "A", "decision": "maybe"}],
            "animals": {"id": "A"},
            "lines": [{"name": "hill", "may_cross": "dale"}],
            "records": "unrelated",
        }
    ) == [
        '[limts]: "limts" is not known. Did you mean "limits"?',
        '[limits]: "offspring_inbreding" is not known. Did you mean "offspring_inbreeding"?',
        "[limits] young: found -1, expected a whole number from 0 to 1000000.",
        "[limits] young_per_litter: found 1.5, expected a whole number from 1 to 1000000.",
        "[limits] share_per_male: found 5, expected a share from 0 to 1 such as 0.0625, or "
        '"6.25%".',
        "[limits] moves: found True, expected a whole number from 0 to 1000000.",
        "[weights] diversity: found -1, expected a number from 0.",
        '[weights] merit: found "much", expected a number from 0.',
        '[mating] system: found "harem", expected one of: pairs, one-male-several-females.',
        '[mating] allow_closest: found "no", expected true or false.',
        '[breeding_age]: "mail" is not known. Did you mean "male"?',
        "[breeding_age] female: found [2], expected two ages, from and to: [2, 15] or "
        '["8 weeks", "18 months"].',
        '[programme] season_start: found "next spring", expected a date such as 2027-03-01.',
        '[programme] name: found "", expected a text in quotation marks, such as "A12".',
        '[[pairs]] number 1 decision: found "maybe", expected one of: together, '
        "together-no-young, must-breed, never.",
        '[[pairs]] number 1: "dam" is missing (id of the female).',
        "animals: expected entries written as [[animals]].",
        '[[lines]] number 1 may_cross: found "dale", expected a list of texts such as '
        '["southern"].',
        "records: expected a table written as [records].",
    ]


@pytest.mark.parametrize(
    ("table", "key"),
    [(table, key) for table, keys in KEYS.items() for key in keys] + [("records", "decisions")],
)
def test_misspelled_key_names_the_nearest_known_one(table, key):
    """Each key with its last letter left out or doubled is offered as it should be."""
    for wrong in (key[:-1], key + key[-1]):
        if wrong == "wh":  # as near to why as to who
            continue
        entry = {wrong: "?"}
        outer, _, inner = table.partition(".")
        if inner:
            told = problems_of({outer: {inner: [entry]}})
        else:
            told = problems_of({table: [entry] if table in LISTS else entry})
        assert any(f'"{wrong}" is not known. Did you mean "{key}"?' in line for line in told), told


def test_key_that_looks_like_none_lists_the_known_ones():
    """A key that is like no other is told with all that the table knows."""
    assert problems_of({"mating": {"xyzzy": 1}}) == [
        '[mating]: "xyzzy" is not known. Known here: system, allow_closest.'
    ]


@pytest.mark.parametrize(
    ("value", "share"),
    [
        ("6.25%", 0.0625),
        ("6.25 %", 0.0625),
        (" 25% ", 0.25),
        ("0%", 0.0),
        ("100%", 1.0),
        (0.0625, 0.0625),
        (0, 0.0),
        (1, 1.0),
    ],
)
def test_share_may_be_written_as_a_percentage(value, share):
    """A share is a number from 0 to 1 or a percentage in quotation marks."""
    limits = policy_from_tables({"limits": {"offspring_inbreeding": value}}).limits
    assert limits.offspring_inbreeding == pytest.approx(share, abs=1e-15)


@pytest.mark.parametrize(
    "value",
    [
        "6,25%",
        "101%",
        "-1%",
        "0.0625",
        6.25,
        -0.1,
        True,
        "%",
        float("nan"),
        float("inf"),
        [0.1],
        "nan%",
        "inf%",
    ],
)
def test_share_that_cannot_be_meant_is_refused(value):
    """A share outside 0 to 1, or no number at all, is told with both ways to write it."""
    (problem,) = problems_of({"limits": {"offspring_inbreeding": value}})
    assert problem.endswith('expected a share from 0 to 1 such as 0.0625, or "6.25%".')


@careful(100)
@given(st.floats(0, 100))
def test_percentage_is_a_hundredth(percent):
    """Any percentage means a hundredth of its number."""
    policy = policy_from_tables({"limits": {"share_per_male": f"{percent!r}%"}})
    assert policy.limits.share_per_male == percent / 100


@pytest.mark.parametrize(
    ("ages", "window"),
    [
        ([2, 15], AgeWindow(Age(2), Age(15))),
        ([1.5, 3], AgeWindow(Age(1.5), Age(3))),
        (["8 weeks", "18 months"], AgeWindow(Age(8, "weeks"), Age(18, "months"))),
        (["56 days", "1 year"], AgeWindow(Age(56, "days"), Age(1))),
        (["6 Months", 2], AgeWindow(Age(6, "months"), Age(2))),
    ],
)
def test_ages_are_years_or_phrases(ages, window):
    """Breeding ages are numbers of years or phrases with a unit, also mixed."""
    assert policy_from_tables({"breeding_age": {"male": ages}}).breeding_age == {
        ("", "male"): window
    }


@pytest.mark.parametrize(
    "ages", [[2], [1, 2, 3], 2, "8 weeks", ["8 moons", 3], [-1, 3], [True, 3], [None, 3]]
)
def test_ages_that_cannot_be_read_are_told(ages):
    """Anything but two ages is refused with examples."""
    (problem,) = problems_of({"breeding_age": {"male": ages}})
    assert problem.endswith('expected two ages, from and to: [2, 15] or ["8 weeks", "18 months"].')


def test_ages_in_weeks_decide_who_may_breed():
    """Eight weeks are fifty-six days: an animal born a day later is too young."""
    season = datetime.date(2027, 3, 1)
    rows = [
        animal(f"V{days}", "m", born=(season - datetime.timedelta(days)).isoformat())
        for days in (55, 56, 57)
    ]
    tables = {
        "programme": {"season_start": season, "as_of": "2027-02-28"},
        "breeding_age": {"male": ["8 weeks", "18 months"]},
    }
    population = population_of(rows, tables)
    found = find_candidates(population, policy_from_tables(tables))
    ids = population.pedigree.ids
    assert [ids[place] for place in found.males] == ["V56", "V57"]
    assert {ids[place]: why for place, why in found.refused.items()} == {
        "V55": "too young to breed (from 8 weeks)"
    }


def test_contradictions_are_explained():
    """Rules that cannot both hold are named with what clashes."""
    assert problems_of(
        {
            "programme": {"season_start": "2027-03-01", "season_end": "2027-02-01"},
            "breeding_age": {"male": [15, 2], "northern": {"female": ["18 months", 1]}},
            "parent_age": {"northern": {"male": [3, "8 weeks"]}},
            "pairs": [
                {"sire": "A1", "dam": "B1", "decision": "never"},
                {"sire": "A1", "dam": "B2", "decision": "together"},
                {"sire": "A1", "dam": "B1", "decision": "must-breed"},
                {"sire": "A1", "dam": "B2", "decision": "never"},
                {"sire": "A1", "dam": "B2", "decision": "must-breed", "until": "2028"},
            ],
            "animals": [{"id": "A1", "decision": "at-most"}],
        }
    ) == [
        '[[animals]] number 1: "litters" is missing; at-most needs it (with at-most: how many '
        "litters).",
        "[programme]: the season ends (2027-02-01) before it starts (2027-03-01).",
        "[breeding_age] male: from 15 years to 2 years leaves no age.",
        '[breeding_age."northern"] female: from 18 months to 1 year leaves no age.',
        '[parent_age."northern"] male: from 3 years to 8 weeks leaves no age.',
        "[[pairs]] number 3: A1 x B1 is must-breed, but [[pairs]] number 1 says never.",
        "[[pairs]] number 4: A1 x B2 is never, but [[pairs]] number 2 says together.",
    ]


def test_systems_of_later_versions_are_told_as_such():
    """A system of mating that is documented but not there yet is refused in these words."""
    for system in ("group", "rotation", "brother-sister"):
        (problem,) = problems_of({"mating": {"system": system}})
        assert problem == (
            f'[mating] system: found "{system}", expected pairs or one-male-several-females; '
            f'"{system}" is not available yet.'
        )


@pytest.mark.parametrize(
    ("members", "rule"),
    [
        ("living", LivingRule()),
        ("bred_within_years = 3", LivingRule(members="bred_within_years", value=3)),
        ("born_since=2015", LivingRule(members="born_since", value=2015)),
    ],
)
def test_members_of_the_population_may_be_narrowed(members, rule):
    """Each way of saying who makes up the population is read."""
    assert policy_from_tables({"living": {"members": members}}).living == rule


def test_members_that_cannot_be_read_are_told():
    """Anything else is refused with the three ways of saying it."""
    assert problems_of({"living": {"members": "born_since = spring"}}) == [
        '[living] members: found "born_since = spring", expected "living", '
        '"bred_within_years = 3" or "born_since = 2015".'
    ]


def test_dates_are_read_as_toml_dates_and_as_texts():
    """A day may be written bare or in quotation marks, and a year stands for all its days."""
    for written_as in (datetime.date(2027, 3, 1), "2027-03-01", datetime.datetime(2027, 3, 1)):
        policy = policy_from_tables({"programme": {"season_start": written_as}})
        assert policy.season_start.earliest == datetime.date(2027, 3, 1).toordinal()
    until = (
        policy_from_tables({"animals": [{"id": "A", "decision": "rest", "until": 2027}]})
        .animals[0]
        .until
    )
    assert until.latest == datetime.date(2027, 12, 31).toordinal()


def test_keys_not_yet_used_are_noted(tmp_path):
    """Every key that is read but not acted upon is named in one note, and no other."""
    policy = read_policy(written(tmp_path, EXAMPLE))
    note = unused_keys_note(policy)
    for table, keys in KEYS.items():
        idle = [key for key, described in keys.items() if not described.used]
        named = any(entry.startswith(f"[{table}]") for entry in policy.not_yet_used)
        assert named == bool(idle), table
        for key in keys:
            assert (f"[{table}] {key}" in note) <= (key in idle)
    assert policy.not_yet_used == tuple(dict.fromkeys(policy.not_yet_used))
    assert bool(note) == bool(policy.not_yet_used)


def test_note_of_keys_not_yet_used_counts_them():
    """One key is told in the singular, two in the plural."""
    one = Policy(not_yet_used=("[holders] places",))
    two = Policy(not_yet_used=("[holders] places", "[futures]"))
    assert unused_keys_note(one).startswith("The policy's [holders] places is ")
    assert unused_keys_note(two).startswith("The policy's [holders] places and [futures] are ")


def test_permission_to_cross_goes_both_ways():
    """Lines may cross when either of the two names the other."""
    policy = policy_from_tables(
        {
            "lines": [
                {"name": "hill", "may_cross": ["dale", "moor"]},
                {"name": "dale"},
            ]
        }
    )
    assert policy.may_cross == {
        "hill": frozenset({"dale", "moor"}),
        "dale": frozenset({"hill"}),
        "moor": frozenset({"hill"}),
    }


def test_file_with_a_byte_order_mark_is_read(tmp_path):
    """A mark that some editors put first does not hinder."""
    policy = read_policy(written(tmp_path, b'\xef\xbb\xbf[programme]\nname = "Dale"\n'))
    assert policy.name == "Dale"


@pytest.mark.parametrize("text", ["[limits\nyoung = 3", "young = 2027-03", b"name = '\xe4'"])
def test_file_that_is_no_policy_is_told(tmp_path, text):
    """Text that TOML does not know is refused with the file's name and how values are written."""
    with pytest.raises(PolicyError, match="this is not a readable policy file") as told:
        read_policy(written(tmp_path, text))
    assert "rules.toml" in told.value.headline
    assert told.value.remedy == "Texts stand in quotation marks, dates as 2027-03-01 without."


def test_file_that_is_not_there_is_told(tmp_path):
    """A wrong path is told together with the command that writes a policy."""
    with pytest.raises(PolicyError, match="the policy cannot be read") as told:
        read_policy(tmp_path / "none.toml")
    assert "pairing start" in told.value.remedy


def test_faults_of_a_file_carry_its_name(tmp_path):
    """The problems of a file are told under its name without the folders above it."""
    with pytest.raises(PolicyError, match=r"^rules\.toml: the policy cannot be used") as told:
        read_policy(written(tmp_path, "[limits]\nyuong = 3\n"))
    assert told.value.details == ('[limits]: "yuong" is not known. Did you mean "young"?',)


RECORDS_EXAMPLE = """
[records]
unknown_parents = "unrelated"
map = ["Cage+Tag=id", "Comment="]
date_order = "day-first"
selfing = true
gestation = "63 days"
sperm_storage = "2 years"
largest_litter = 9

[[records.decisions]]
decision = "use-row"
id = " A  12"
row = 7
who = "studbook keeper"
when = 2026-11-02
why = "the later entry is complete"
[[records.decisions]]
decision = "merge"
id = "B07"
also = "B7"
[[records.decisions]]
decision = "merge"
id = "A12"
also = ["A13", "A14"]
[[records.decisions]]
decision = "drop-link"
id = "C33"
parent = "sire"
[[records.decisions]]
decision = "set"
id = "C34"
field = "born"
value = 2019-05-01
[[records.decisions]]
decision = "set"
id = "C34"
field = "sire"
value = ""
[[records.decisions]]
decision = "accept"
id = "C35"
kind = "parent-younger"

[parent_age]
male = [1, 20]
[parent_age."northern"]
female = ["18 months", 15]
"""


def test_rules_for_the_records_are_read(tmp_path):
    """Each key about records reaches the rule that it states."""
    policy = read_policy(written(tmp_path, RECORDS_EXAMPLE))
    assert policy.unknown_parents == "unrelated"
    assert policy.breeding_age == {}
    assert policy.not_yet_used == ()
    assert policy.records == RecordRules(
        column_map=("Cage+Tag=id", "Comment="),
        date_order="day-first",
        selfing=True,
        parent_age={
            ("", "male"): AgeWindow(Age(1), Age(20)),
            ("northern", "female"): AgeWindow(Age(18, "months"), Age(15)),
        },
        gestation=Age(63, "days"),
        sperm_storage=Age(2),
        largest_litter=9,
        decisions=(
            Decision(
                "use-row",
                "A 12",
                row=7,
                who="studbook keeper",
                when=parse_date("2026-11-02"),
                why="the later entry is complete",
            ),
            Decision("merge", "B07", also=("B7",)),
            Decision("merge", "A12", also=("A13", "A14")),
            Decision("drop-link", "C33", parent="sire"),
            Decision("set", "C34", field="born", value="2019-05-01"),
            Decision("set", "C34", field="sire"),
            Decision("accept", "C35", kind="parent-younger"),
        ),
    )


@pytest.mark.parametrize(
    ("key", "value", "shown", "expected"),
    [
        ("map", "Ring=id", '"Ring=id"', 'a list of texts such as ["Their Column=id"]'),
        ("map", [3], "[3]", 'a list of texts such as ["Their Column=id"]'),
        (
            "map",
            ["Ring id", "Father=sier", "=dam", "Ring=id", "Tag=id"],
            "['Ring id', 'Father=sier', '=dam', 'Ring=id', 'Tag=id']",
            'Their Column=field in place of "Ring id"; a field after the = of "Father=sier" '
            '(did you mean "sire"?); Their Column=field in place of "=dam"; "id" only once',
        ),
        ("date_order", "ymd", '"ymd"', "one of: day-first, month-first"),
        (
            "date_order",
            "days-first",
            '"days-first"',
            'one of: day-first, month-first (did you mean "day-first"?)',
        ),
        ("selfing", "yes", '"yes"', "true or false"),
        ("gestation", 63, "63", 'a time with its unit, such as "63 days" or "11 months"'),
        ("gestation", True, "True", 'a time with its unit, such as "63 days" or "11 months"'),
        (
            "sperm_storage",
            "long",
            '"long"',
            'a time with its unit, such as "63 days" or "11 months"',
        ),
        ("largest_litter", 0, "0", "a whole number from 1 to 1000000"),
    ],
)
def test_rule_for_the_records_that_cannot_be_meant_is_told(key, value, shown, expected):
    """A value that a key about records cannot take is shown with what it takes."""
    assert problems_of({"records": {key: value}}) == [
        f"[records] {key}: found {shown}, expected {expected}."
    ]


def test_several_columns_may_be_left_alone():
    """A map entry without a field may come more than once, for it settles none."""
    policy = policy_from_tables({"records": {"map": ["Father=", "Mother= "]}})
    assert policy.records.column_map == ("Father=", "Mother=")


def test_ages_of_parents_are_told_with_their_table():
    """A fault in ages of parents names their table and line."""
    assert problems_of(
        {"parent_age": {"mal": [1, 2], "male": 3, "hill": {"female": "old"}, "born": 1}}
    ) == [
        '[parent_age]: "mal" is not known. Did you mean "male"?',
        '[parent_age] male: found 3, expected two ages, from and to: [2, 15] or ["8 weeks", '
        '"18 months"].',
        '[parent_age]: "born" is not known. Known here: male, female.',
        '[parent_age."hill"] female: found "old", expected two ages, from and to: [2, 15] or '
        '["8 weeks", "18 months"].',
    ]
    assert problems_of({"parent_age": [1, 2]}) == [
        "parent_age: expected a table written as [parent_age]."
    ]


def test_every_table_of_ages_is_among_the_keys():
    """The tables of ages are tables of the policy."""
    assert {table: KEYS[table] for table in AGE_TABLES} == AGE_TABLES


def test_decisions_stand_inside_the_table_of_records():
    """The list of decisions elsewhere, or not as a list, is told with how it is written."""
    (told,) = problems_of({"records.decisions": []})
    assert told.startswith('[records.decisions]: "records.decisions" is not known.')
    assert problems_of({"decisions": []}) == [
        '[decisions]: "decisions" is not known. Did you mean "records.decisions"?'
    ]
    for wrong in ({"decision": "merge"}, "none", [3]):
        assert problems_of({"records": {"decisions": wrong}}) == [
            "records.decisions: expected entries written as [[records.decisions]]."
        ]


def decisions_of(*entries):
    """The tables of a policy with these decisions about records."""
    return {"records": {"decisions": list(entries)}}


GIVEN = {
    "row": 4,
    "also": ["B7"],
    "parent": "dam",
    "field": "sex",
    "value": "male",
    "kind": "both-sexes",
}
"""A value for each key that some decision needs."""


def test_every_decision_says_what_it_needs():
    """There is an entry for every decision, and only keys of the list are needed."""
    assert NEEDS["records.decisions"].keys() == DECISIONS.keys()
    needed = {key for keys in NEEDS["records.decisions"].values() for key in keys}
    assert needed == GIVEN.keys() <= KEYS["records.decisions"].keys()


@pytest.mark.parametrize("decision", DECISIONS)
def test_decision_needs_exactly_its_own_keys(decision):
    """Each key that a decision needs is missed, and each of another decision refused."""
    needed = NEEDS["records.decisions"][decision]
    fitting = {"decision": decision, "id": "B07", **{key: GIVEN[key] for key in needed}}
    (read,) = policy_from_tables(decisions_of(fitting)).records.decisions
    assert (read.decision, read.id) == (decision, "B07")
    for key in needed:
        meaning = KEYS["records.decisions"][key].meaning
        without = {other: value for other, value in fitting.items() if other != key}
        assert problems_of(decisions_of(without)) == [
            f'[[records.decisions]] number 1: "{key}" is missing; {decision} needs it ({meaning}).'
        ]
    for key in GIVEN.keys() - set(needed):
        assert problems_of(decisions_of({**fitting, key: GIVEN[key]})) == [
            f'[[records.decisions]] number 1: {decision} does not take "{key}"; leave it out.'
        ]


def test_faults_of_decisions_are_told_at_once():
    """Wrong and missing values of several decisions are all named by the number of the entry."""
    place = "[[records.decisions]] number"
    fields = ", ".join(name for name in FIELDS if name != "id")
    kinds = ", ".join(name for name, kind in KINDS.items() if not kind.stops)
    assert problems_of(
        decisions_of(
            {"decision": "forget", "id": "A1"},
            {"decision": "use-rows", "id": "A1", "row": 4},
            {"decision": "use-row", "row": 0},
            {"decision": "merge", "id": "A1", "also": []},
            {"decision": "merge", "id": "A1", "also": ["B", " "]},
            {"decision": "drop-link", "id": "A1", "parent": "mother"},
            {"decision": "set", "id": "A1", "field": "id", "value": "A2"},
            {"decision": "set", "id": "A1", "field": "bron", "value": ["x"]},
            {"decision": "accept", "id": "A1", "kind": "loop"},
            {"decision": "accept", "id": "A1", "kind": "own-parent"},
            {"decision": "accept", "id": "A1", "kind": "parent-yonger"},
            {"decision": "accept", "id": "A1", "kind": "both-sexes", "when": "later", "who": 3},
        )
    ) == [
        f'{place} 1 decision: found "forget", expected one of: use-row, merge, drop-link, set, '
        "accept.",
        f'{place} 2 decision: found "use-rows", expected one of: use-row, merge, drop-link, set, '
        'accept (did you mean "use-row"?).',
        f"{place} 3 row: found 0, expected a whole number from 1 to 1000000000.",
        f'{place} 3: "id" is missing (id of the animal).',
        f'{place} 4 also: found [], expected an id such as "A12" or a list of them, '
        '["A12", "A13"].',
        f"{place} 5 also: found ['B', ' '], expected an id such as \"A12\" or a list of them, "
        '["A12", "A13"].',
        f'{place} 6 parent: found "mother", expected one of: sire, dam.',
        f'{place} 7 field: found "id", expected one of: {fields}.',
        f'{place} 8 field: found "bron", expected one of: {fields} (did you mean "born"?).',
        f"{place} 8 value: found ['x'], expected what to read in the field, such as \"A12\"; "
        '"" clears it.',
        f'{place} 9 kind: found "loop", expected a finding that leaves kinship defined; "loop" '
        "cannot be accepted, only mended by drop-link, set or use-row.",
        f'{place} 10 kind: found "own-parent", expected a finding that leaves kinship defined; '
        '"own-parent" cannot be accepted, only mended by drop-link, set or use-row.',
        f'{place} 11 kind: found "parent-yonger", expected one of: {kinds} (did you mean '
        '"parent-younger"?).',
        f'{place} 12 when: found "later", expected a date such as 2027-03-01.',
        f'{place} 12 who: found 3, expected a text in quotation marks, such as "A12".',
    ]


@pytest.mark.parametrize(
    ("value", "read"),
    [
        (" x  y ", "x y"),
        ("", ""),
        (12, "12"),
        (1.5, "1.5"),
        (True, "yes"),
        (False, "no"),
        (datetime.date(2019, 5, 1), "2019-05-01"),
        (datetime.datetime(2019, 5, 1, 0, 0), "2019-05-01"),
    ],
)
def test_value_to_read_may_be_written_bare(value, read):
    """What is to be read in a field is the text that a cell would hold."""
    entry = {"decision": "set", "id": "A1", "field": "name", "value": value}
    assert policy_from_tables(decisions_of(entry)).records.decisions[0].value == read


@pytest.mark.parametrize("kind", KINDS)
def test_only_findings_that_do_not_stop_can_be_accepted(kind):
    """Every kind of finding that leaves kinship defined can be accepted, and no other."""
    tables = decisions_of({"decision": "accept", "id": "A1", "kind": kind})
    if KINDS[kind].stops:
        (told,) = problems_of(tables)
        assert f'"{kind}" cannot be accepted, only mended by ' in told
    else:
        assert policy_from_tables(tables).records.decisions[0].kind == kind


def use_row(animal_id, row):
    return {"decision": "use-row", "id": animal_id, "row": row}


def merge(animal_id, *also):
    return {"decision": "merge", "id": animal_id, "also": list(also)}


def drop_link(animal_id, parent):
    return {"decision": "drop-link", "id": animal_id, "parent": parent}


def set_field(animal_id, field, value):
    return {"decision": "set", "id": animal_id, "field": field, "value": value}


FIRST, SECOND, THIRD = (f"[[records.decisions]] number {number}" for number in (1, 2, 3))


@pytest.mark.parametrize(
    ("entries", "told"),
    [
        (
            [use_row("A", 4), use_row("A", 7)],
            [f"{SECOND}: A is read from line 7, but {FIRST} says A is read from line 4."],
        ),
        (
            [merge("A", "B"), merge("C", "B")],
            [f"{SECOND}: B is merged into C, but {FIRST} says B is merged into A."],
        ),
        (
            [merge("A", "B"), merge("A", "C", "B")],
            [f"{SECOND}: B is merged into A, which {FIRST} says already."],
        ),
        (
            [merge("A", "B", "B")],
            [f"{FIRST}: B is merged into A, which {FIRST} says already."],
        ),
        (
            [merge("A", "B"), merge("B", "A")],
            [f"{SECOND}: merging goes round in a circle: A into B ({SECOND}), B into A ({FIRST})."],
        ),
        (
            [merge("A", "B"), merge("B", "C"), merge("C", "A", "D")],
            [
                f"{THIRD}: merging goes round in a circle: A into C ({THIRD}), "
                f"C into B ({SECOND}), B into A ({FIRST})."
            ],
        ),
        (
            [merge("A", "A")],
            [f"{FIRST}: merging goes round in a circle: A into A ({FIRST})."],
        ),
        (
            [drop_link("A", "sire"), drop_link("A", "dam"), drop_link("A", "sire")],
            [f"{THIRD}: the sire of A is dropped, which {FIRST} says already."],
        ),
        (
            [drop_link("A", "sire"), set_field("A", "sire", "B")],
            [f'{SECOND}: the sire of A is set to "B", but {FIRST} says the sire of A is dropped.'],
        ),
        (
            [set_field("A", "born", "2019"), set_field("A", "born", "")],
            [f'{SECOND}: born of A is cleared, but {FIRST} says born of A is set to "2019".'],
        ),
    ],
)
def test_decisions_that_cannot_hold_together_are_told(entries, told):
    """Contradicting decisions are told with the places of both."""
    assert problems_of(decisions_of(*entries)) == told


@pytest.mark.parametrize(
    "entries",
    [
        [use_row("A", 4), use_row("A", 4), use_row("B", 5)],
        [merge("A", "B"), merge("C", "A"), merge("C", "D")],
        [drop_link("A", "sire"), drop_link("A", "dam"), drop_link("B", "sire")],
        [set_field("A", "born", "2019"), set_field("A", "born", "2019")],
        [set_field("A", "born", "2019"), set_field("A", "died", "2020")],
        [drop_link("A", "sire"), set_field("A", "dam", "B"), set_field("B", "sire", "C")],
    ],
)
def test_decisions_that_agree_are_kept(entries):
    """Decisions that only repeat or add to each other stand, in their order."""
    read = policy_from_tables(decisions_of(*entries)).records.decisions
    assert [(each.decision, each.id) for each in read] == [
        (each["decision"], each["id"]) for each in entries
    ]


@careful(200)
@given(st.lists(st.tuples(st.sampled_from("ABCDE"), st.sampled_from("ABCDE")), max_size=6))
def test_merges_are_refused_exactly_when_an_id_would_not_end(links):
    """Merges stand if each id is merged once at most and following them comes to an end."""
    into = {}
    sound = len({other for _kept, other in links}) == len(links)
    for kept, other in links:
        into.setdefault(other, kept)
    for start in into:
        here, steps = start, 0
        while here in into and steps <= len(into):
            here, steps = into[here], steps + 1
        sound = sound and here not in into
    tables = decisions_of(*(merge(kept, other) for kept, other in links))
    if sound:
        assert len(policy_from_tables(tables).records.decisions) == len(links)
    else:
        assert all("merged" in line or "circle" in line for line in problems_of(tables))


def test_ids_are_compared_as_the_records_are():
    """Blanks around and within an id are folded wherever the policy names an animal."""
    policy = policy_from_tables(
        {
            "pairs": [{"sire": " A  1", "dam": "B\u00a02", "decision": "never"}],
            "animals": [{"id": "C 3 ", "decision": "rest"}],
            "gametes": [{"id": "D\t4", "doses": 1}],
        }
    )
    assert (policy.pairs[0].sire, policy.pairs[0].dam) == ("A 1", "B 2")
    assert (policy.animals[0].id, policy.stored_semen[0].id) == ("C 3", "D 4")


def test_starter_can_be_filled_in_by_taking_the_hash_away():
    """Every rule that the starter offers behind a # is a rule that can be read."""
    population = population_of(ANIMALS)
    text = starter_policy(population, read_records("-", stdin=records_text(ANIMALS).encode()))
    assert policy_from_tables(tomllib.loads(text)).records == RecordRules()
    opened = re.sub(r"^# (?=\[|\w+ = )", "", text, flags=re.MULTILINE)
    rules = policy_from_tables(tomllib.loads(opened)).records
    told = re.findall(r"^(\w+) =", opened, re.MULTILINE)
    left_out = {"litter_shares_sire", "map"}
    assert set(KEYS["records"]) - left_out <= set(told)
    assert rules.gestation == Age(63, "days")
    assert set(rules.parent_age) == {("", "male"), ("", "female")}
    assert [each.decision for each in rules.decisions] == ["set"]
