"""The policy file: every key is read, every fault is told at once with what was expected."""

import datetime

import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.dates import Age, AgeWindow
from pairing.errors import PolicyError
from pairing.plan.candidates import find_candidates
from pairing.policy.keys import AGE_KEYS, KEYS, LISTS
from pairing.policy.reading import policy_from_tables, read_policy, unused_keys_note
from pairing.policy.rules import LivingRule, Policy
from tests.programmes import animal, careful, chosen, plan_of, population_of

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
    import tomllib

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
    [(table, key) for table, keys in KEYS.items() for key in keys if table != "breeding_age"]
    + [("breeding_age", key) for key in AGE_KEYS],
)
def test_misspelled_key_names_the_nearest_known_one(table, key):
    """Each key with its last letter left out or doubled is offered as it should be."""
    for wrong in (key[:-1], key + key[-1]):
        entry = {wrong: "?"}
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
            "pairs": [
                {"sire": "A1", "dam": "B1", "decision": "never"},
                {"sire": "A1", "dam": "B2", "decision": "together"},
                {"sire": "A1", "dam": "B1", "decision": "must-breed"},
            ],
            "animals": [{"id": "A1", "decision": "at-most"}],
        }
    ) == [
        "[programme]: the season ends (2027-02-01) before it starts (2027-03-01).",
        "[breeding_age] male: from 15 years to 2 years leaves no age.",
        '[breeding_age."northern"] female: from 18 months to 1 year leaves no age.',
        "[[pairs]]: A1 x B1 is both never and must-breed.",
        "[[animals]]: A1 at-most needs litters = a number.",
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
