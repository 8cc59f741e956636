"""What a plan does for animals and pairs: who may breed, ties, alternatives, tasks, moves."""

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from pairing.errors import NoPlanError, PolicyError
from pairing.plan.candidates import find_candidates
from pairing.policy.reading import policy_from_tables
from tests.programmes import (
    EveryPlan,
    animal,
    careful,
    chosen,
    plan_of,
    policies,
    population_of,
    programmes,
)

PROGRAMME = {"as_of": "2026-11-30", "season_start": "2027-03-01"}
AGES = {"male": [2, 15], "female": [2, 12]}
HAREM = {"system": "one-male-several-females"}


def founders(males, females, **facts):
    """Unrelated males S1, S2 … and females D1, D2 …."""
    return [
        *(animal(f"S{number}", "m", **facts) for number in range(1, males + 1)),
        *(animal(f"D{number}", "f", **facts) for number in range(1, females + 1)),
    ]


def candidates_of(rows, tables):
    """Ids of the males and females that may breed, the reasons of the others, the notes."""
    population = population_of(rows, tables)
    found = find_candidates(population, policy_from_tables(tables))
    ids = population.pedigree.ids
    return (
        [ids[place] for place in found.males],
        [ids[place] for place in found.females],
        {ids[place]: reason for place, reason in found.refused.items()},
        found.notes,
    )


def task_of(plan, animal_id):
    """The one task of an animal."""
    place = plan.population.pedigree.index[animal_id]
    (task,) = [each for each in plan.tasks if each.animal == place]
    return task


def moves_of(plan):
    """(animal, from, to) of each transfer, by id."""
    ids = plan.population.pedigree.ids
    return [(ids[each.animal], each.origin, each.destination) for each in plan.moves]


@pytest.mark.parametrize(
    ("subject", "others", "tables", "reason"),
    [
        (animal("X"), [], {}, "sex not recorded"),
        (animal("X", "h"), [], {}, "hermaphrodite: not paired"),
        (
            animal("X", "m"),
            [animal("Y", "", "S1", "X")],
            {},
            "recorded as male but named as a dam: settle its sex first",
        ),
        (
            animal("X", "f"),
            [animal("Y", "", "X", "D1")],
            {},
            "recorded as female but named as a sire: settle its sex first",
        ),
        (animal("X", "f", may_breed="no"), [], {}, "may not breed by the records"),
        (
            animal("X", "f", may_breed="no", may_breed_note="one eye"),
            [],
            {},
            "may not breed: one eye",
        ),
        (animal("X", "wether"), [], {}, 'may not breed: recorded as "wether"'),
        (animal("X", "f"), [], {"animals": [{"id": "X", "decision": "rest"}]}, "rests this season"),
        (
            animal("X", "f"),
            [],
            {"animals": [{"id": "X", "decision": "rest", "reason": "hip injury"}]},
            "rests: hip injury",
        ),
        (
            animal("X", "f"),
            [],
            {"pairs": [{"sire": "S1", "dam": "X", "decision": "together-no-young"}]},
            "stays with S1 without young",
        ),
        (
            animal("X", "f"),
            [],
            {
                "pairs": [
                    {"sire": "S1", "dam": "X", "decision": "together-no-young", "reason": "too old"}
                ]
            },
            "stays with S1 without young: too old",
        ),
        (
            animal("X", "m", born="2025-03-02"),
            [],
            {"breeding_age": AGES},
            "too young to breed (from 2 years)",
        ),
        (
            animal("X", "f", born="2014-03-01"),
            [],
            {"breeding_age": AGES},
            "past breeding age (up to 12 years)",
        ),
        (
            animal("X", "f", born="2014"),
            [],
            {"breeding_age": {"female": ["1 month", "11 years"]}},
            "past breeding age (up to 11 years)",
        ),
        (
            animal("X", "m", born="2027-01-05"),
            [],
            {
                "breeding_age": {"male": ["8 weeks", "18 months"]},
                "programme": {"season_start": "2027-03-01", "as_of": "2027-02-28"},
            },
            "too young to breed (from 8 weeks)",
        ),
        (
            animal("X", "m", born="2025-08-01"),
            [],
            {"breeding_age": {"male": ["8 weeks", "18 months"]}},
            "past breeding age (up to 18 months)",
        ),
        (
            animal("X", "f"),
            [],
            {"breeding_age": AGES},
            "birth date not recorded, so its age cannot be judged (an estimate as ~1999 helps)",
        ),
        (
            animal("X", "f", born="2027-04-01"),
            [],
            {"programme": {"as_of": "2027-06-30", "season_start": "2027-03-01"}},
            "born after the season starts",
        ),
        (
            animal("X", "f", born="2024-06-01", line="hill"),
            [],
            {"breeding_age": {"female": [2, 12], "hill": {"female": [3, 12]}}},
            "too young to breed (from 3 years)",
        ),
    ],
)
def test_animal_that_may_not_breed_is_refused_with_the_reason(subject, others, tables, reason):
    """Each way of being no candidate gives its own reason, and the animal's task repeats it."""
    born = "2025-10-01" if "18 months" in str(tables) else "2020-01-01"
    rows = [*founders(2, 2, born=born), subject, *others]
    tables = {"programme": PROGRAMME, "limits": {"young": 1}, **tables}
    males, females, refused, _notes = candidates_of(rows, tables)
    assert "X" not in males + females
    assert refused["X"] == reason
    assert task_of(plan_of(rows, tables), "X").reason == reason


@pytest.mark.parametrize(
    ("subject", "tables"),
    [
        (animal("X", "m", born="2025-03-01"), {"breeding_age": AGES}),
        (animal("X", "f", born="2014-03-02"), {"breeding_age": AGES}),
        (animal("X", "m", born="2025"), {"breeding_age": AGES}),
        (animal("X", "f", born="~2014"), {"breeding_age": AGES}),
        (animal("X", "m"), {}),
        (animal("X", "m", born="2026-11-30"), {}),
        (
            animal("X", "f", born="2024-06-01", line="dale"),
            {"breeding_age": {"female": [2, 12], "hill": {"female": [3, 12]}}},
        ),
        (
            animal("X", "m", born="2027-01-04"),
            {
                "breeding_age": {"male": ["8 weeks", "18 months"]},
                "programme": {"season_start": "2027-03-01", "as_of": "2027-02-28"},
            },
        ),
        (animal("X", "m", born="2025-08-02"), {"breeding_age": {"male": ["8 weeks", "18 months"]}}),
    ],
)
def test_animal_whose_age_may_fit_on_the_first_day_of_the_season_may_breed(subject, tables):
    """Ages are completed units on the first day of the season, over all possible birth dates."""
    males, females, refused, _notes = candidates_of(
        [*founders(1, 1, born="2020-01-01"), subject], {"programme": PROGRAMME, **tables}
    )
    assert "X" in males + females
    assert "X" not in refused


def test_decision_lapses_after_its_last_day():
    """A decision holds through its last day, and is left out with a note from the day after."""
    rows = founders(1, 2, born="2020-01-01")

    def tables(until):
        return {
            "programme": PROGRAMME,
            "limits": {"young": 1},
            "animals": [{"id": "D1", "decision": "rest", "until": until}],
            "pairs": [{"sire": "S1", "dam": "D2", "decision": "never", "until": until}],
        }

    _males, females, refused, notes = candidates_of(rows, tables("2027-02-28"))
    assert (females, refused) == (["D1", "D2"], {})
    assert notes == (
        'The decision "never" on S1 x D2 lapsed on 2027-02-28.',
        'The decision "rest" on D1 lapsed on 2027-02-28.',
    )
    assert chosen(plan_of(rows, tables("2027-02-28"))) == [("S1", "D1", 1, 1)]
    assert set(notes) <= set(plan_of(rows, tables("2027-02-28")).notes)
    _males, females, refused, notes = candidates_of(rows, tables("2027-03-01"))
    assert (females, refused, notes) == (["D2"], {"D1": "rests this season"}, ())
    with pytest.raises(NoPlanError, match="never together: S1 x D2"):
        plan_of(rows, tables("2027-03-01"))


def test_decisions_on_animals_not_in_the_records_are_all_named():
    """Every unknown id of the decisions is named at once, with the nearest known one."""
    tables = {
        "pairs": [{"sire": "Sirius1", "dam": "D9", "decision": "never"}],
        "animals": [{"id": "Dione", "decision": "rest"}],
        "gametes": [{"id": "Sirus", "doses": 1}],
    }
    rows = [animal("Sirius", "m"), animal("Dione1", "f")]
    with pytest.raises(PolicyError, match="decides on animals that are not in the records") as told:
        plan_of(rows, tables)
    assert told.value.details == (
        '[[pairs]] number 1: "Sirius1" is not in the records. Did you mean "Sirius"?',
        '[[pairs]] number 1: "D9" is not in the records.',
        '[[animals]] number 1: "Dione" is not in the records. Did you mean "Dione1"?',
        '[[gametes]] number 1: "Sirus" is not in the records. Did you mean "Sirius"?',
    )
    assert told.value.exit_status == 2


def test_young_not_given_replace_a_years_losses():
    """Without a number the young replace a year's mean losses, planned ends apart."""
    lost = [
        animal(
            f"Z{number}",
            "f",
            born="2015-01-01",
            status="dead",
            **{field: f"{year}-06-01"},
            end_cause=cause,
        )
        for number, (year, field, cause) in enumerate(
            [
                (2016, "died", "natural"),
                (2017, "died", "natural"),
                (2022, "died", "natural"),
                (2022, "left", ""),
                (2023, "died", ""),
                (2024, "died", "natural"),
                (2025, "died", "euthanised-ill"),
                (2025, "died", "natural"),
                (2025, "died", "natural"),
                (2026, "died", "natural"),
                (2026, "died", "culled"),
                (2026, "died", "used"),
                (2026, "died", "slaughtered"),
            ]
        )
    ]
    rows = [*founders(5, 5, born="2021-01-01"), *lost]
    plan = plan_of(rows, {"programme": {"as_of": "2026-12-31"}})
    assert plan.season.young == 2
    assert plan.notes[0] == (
        "No number of young was given: 2 would replace a year's deaths and departures "
        "(1.6 a year over the last five years with records)."
    )


def test_young_not_given_are_one_a_female_without_losses():
    """Without recorded losses one young a candidate female is planned, and said."""
    rows = [*founders(3, 4), animal("D9", "f", may_breed="no")]
    plan = plan_of(rows, {"limits": {"litters_per_male": 2}})
    assert sum(young for _sire, _dam, young, _litters in chosen(plan)) == 4
    assert plan.notes[0] == (
        "No number of young was given: one for each of the 4 females that may breed."
    )


def test_young_not_given_are_lowered_to_what_the_limits_allow():
    """The default number is lowered to the most the limits allow, and said."""
    plan = plan_of(founders(3, 5))
    assert plan.season.young == 3
    assert plan.notes[0] == (
        "No number of young was given: one for each of the 5 females that may breed. "
        "The limits allow 3 at most, so 3 are planned."
    )


@careful(150)
@given(st.data())
def test_default_young_are_the_most_the_limits_allow(data):
    """Without a number as many young as females are planned, or the most that enumeration finds."""
    rows = data.draw(programmes(most=4))
    tables = data.draw(policies(rows))
    tables["limits"].pop("young")
    wanted = len(EveryPlan(rows, tables, 1).females)
    assume(wanted)
    possible = [
        young for young in range(1, wanted + 1) if EveryPlan(rows, tables, young).best() is not None
    ]
    if not possible and any(
        EveryPlan(rows, tables, young).best() is not None
        for young in range(wanted + 1, wanted + 1 + 2 * 3)
    ):
        return  # decisions that animals must breed may call for more; tested on its own
    if not possible:
        with pytest.raises(NoPlanError, match="No plan meets the limits"):
            plan_of(rows, tables)
    else:
        assert plan_of(rows, tables).season.young == max(possible)


def test_default_young_fill_the_share_of_a_male_with_a_smaller_litter():
    """Three young of one male in litters of two and one are planned when three are wanted."""
    tables = {"mating": HAREM, "limits": {"young_per_litter": 2, "share_per_male": 1.0}}
    plan = plan_of(founders(1, 3), tables)
    assert plan.season.young == 3


def test_exact_young_out_of_reach_have_no_plan():
    """A given number of young is exact: one more than the limits allow ends with exit status 1."""
    assert plan_of(founders(3, 5), {"limits": {"young": 3}}).season.young == 3
    with pytest.raises(NoPlanError, match="No plan meets the limits") as told:
        plan_of(founders(3, 5), {"limits": {"young": 4}})
    assert told.value.exit_status == 1
    assert told.value.clash == (
        "4 young are wanted, with 3 males and 5 females that may breed",
        "a male has 1 litter at most",
    )


def test_no_young_wanted_is_an_empty_plan():
    """Nought young is a plan without pairs in which every animal still has its task."""
    plan = plan_of(founders(1, 2), {"limits": {"young": 0}})
    assert (plan.pairs, plan.outcome, plan.proved_best) == ((), None, True)
    assert len(plan.tasks) == 3


@pytest.mark.parametrize("rows", [founders(0, 2), founders(2, 0)])
def test_population_of_one_sex_has_no_plan(rows):
    """Without a male or without a female there is no plan, and the numbers are told."""
    with pytest.raises(NoPlanError, match=r"\d males and \d females that may breed"):
        plan_of(rows)


def test_decision_on_litters_is_named_for_what_it_is():
    """A female that may have no litter by decision is not told as the usual limit of three."""
    tables = {
        "limits": {"young": 1, "litters_per_female": 3},
        "animals": [{"id": "D1", "decision": "at-most", "litters": 0}],
    }
    with pytest.raises(NoPlanError, match="No plan meets the limits") as told:
        plan_of(founders(1, 1), tables)
    assert "a female has 3 litters at most" not in told.value.clash


def test_strictest_of_two_decisions_on_an_animal_holds():
    """Two decisions that limit one animal's litters both hold, whichever comes last."""
    for order in ([1, 3], [3, 1]):
        tables = {
            "mating": HAREM,
            "limits": {"young": 2},
            "animals": [
                {"id": "S1", "decision": "at-most", "litters": litters} for litters in order
            ],
        }
        with pytest.raises(NoPlanError, match="No plan meets the limits"):
            plan_of(founders(1, 2), tables)


@careful(150)
@given(st.data())
def test_every_living_animal_has_exactly_one_task(data):
    """Tasks cover the living once each, with partners on both sides and a reason for the rest."""
    rows = data.draw(programmes())
    tables = data.draw(policies(rows))
    assume(EveryPlan(rows, tables).best() is not None)
    plan = plan_of(rows, tables)
    assert [each.animal for each in plan.tasks] == plan.population.living.tolist()
    partners = {each.animal: set(each.partners) for each in plan.tasks}
    for place, mates in partners.items():
        in_plan = {each.dam for each in plan.pairs if each.sire == place}
        in_plan |= {each.sire for each in plan.pairs if each.dam == place}
        assert mates == in_plan
    for each in plan.tasks:
        assert each.what_to_do
        assert each.reason
        assert bool(each.partners) == each.what_to_do.startswith("breed with ")
        assert set(each.moves) <= set(plan.moves)


@careful(150)
@given(st.data())
def test_figures_of_the_plan_are_those_of_its_pairs(data):
    """Young, inbreeding, rank and other rules' figures follow from the chosen litters."""
    rows = data.draw(programmes())
    tables = data.draw(policies(rows))
    every = EveryPlan(rows, tables)
    assume(every.best() is not None)
    plan = plan_of(rows, tables)
    litters, young = every.as_arrays(chosen(plan))
    f = every.offspring_inbreeding()
    place = {pair: number for number, pair in enumerate(every.pairs)}
    ids = plan.population.pedigree.ids
    for each in plan.pairs:
        number = place[ids[each.sire], ids[each.dam]]
        assert each.offspring_inbreeding == pytest.approx(f[number], abs=1e-12)
    assert [each.rank for each in plan.pairs] == list(range(1, len(plan.pairs) + 1))
    gains = [each.gene_diversity_gain for each in plan.pairs]
    assert gains == pytest.approx(sorted(gains, reverse=True), abs=1e-11)
    assert plan.outcome.young == every.young
    assert plan.outcome.mean_offspring_inbreeding == pytest.approx(young[0] @ f / every.young)
    assert plan.outcome.highest_offspring_inbreeding == pytest.approx(f[litters[0] > 0].max())
    _litters, every_young = every.within_limits()
    least = plan.compared_with["least_inbreeding"]
    assert least.mean_offspring_inbreeding == pytest.approx(
        (every_young @ f).min() / every.young, abs=1e-9
    )
    must = "must-breed" in str(tables)
    for rule in ("least_inbreeding", *(["lowest_mean_kinship_first"] if not must else [])):
        other = plan.compared_with[rule]
        if other is not None and other.young == every.young:
            assert other.objective >= plan.outcome.objective - 1e-9


def test_no_other_rule_beats_the_plan_by_leaving_out_a_pair_that_must_breed():
    """A rule that is compared under the same limits also keeps what must breed."""
    rows = [*founders(3, 2), animal("D9", "f", "S1", "")]
    tables = {
        "limits": {"young": 1},
        "weights": {"inbreeding": 0.0},
        "pairs": [{"sire": "S1", "dam": "D9", "decision": "must-breed"}],
        "mating": {"allow_closest": True},
    }
    plan = plan_of(rows, tables)
    assert chosen(plan) == [("S1", "D9", 1, 1)]
    other = plan.compared_with["lowest_mean_kinship_first"]
    assert other is None or other.young < 1 or other.objective >= plan.outcome.objective - 1e-9


def exchanged(plan, pair, choice):
    """The plan's (sire, dam, young, litters) after one of a pair's alternatives is taken."""
    ids = plan.population.pedigree.ids
    old = (pair.sire, pair.dam)
    new = (choice.sire, choice.dam)
    replaced = {old: new}
    if choice.swaps_with is not None:
        k, m = choice.swaps_with
        replaced[k, m] = (k, old[1]) if new[0] == old[0] else (old[0], m)
    return [
        (
            *(ids[place] for place in replaced.get((each.sire, each.dam), (each.sire, each.dam))),
            each.young,
            each.litters,
        )
        for each in plan.pairs
    ]


def planned_with_alternatives(data, **options):
    """A drawn programme that has a plan, with every alternative as a plan of its own."""
    rows = data.draw(programmes(**options))
    tables = data.draw(policies(rows))
    every = EveryPlan(rows, tables)
    assume(every.best() is not None)
    plan = plan_of(rows, tables)
    return (
        every,
        plan,
        [
            (choice, every.as_arrays(exchanged(plan, pair, choice)))
            for pair in plan.pairs
            for choice in pair.alternatives
        ],
    )


@careful(200)
@given(st.data())
def test_cost_of_an_alternative_is_the_objective_after_the_exchange_less_that_before(data):
    """Replacements and swaps cost exactly what J gains when they are made in the plan."""
    every, plan, alternatives = planned_with_alternatives(data)
    now = every.objective(*every.as_arrays(chosen(plan)))[0]
    f = every.offspring_inbreeding()
    ids = plan.population.pedigree.ids
    for choice, arrays in alternatives:
        assert choice.cost == pytest.approx(every.objective(*arrays)[0] - now, abs=1e-10)
        number = every.pairs.index((ids[choice.sire], ids[choice.dam]))
        assert choice.offspring_inbreeding == pytest.approx(f[number], abs=1e-12)


@careful(200)
@given(st.data())
def test_alternatives_keep_every_limit(data):
    """An exchange that is offered breaks no limit of the season."""
    every, _plan, alternatives = planned_with_alternatives(data)
    for choice, arrays in alternatives:
        broken = [name for name, kept in every.keeps(*arrays).items() if not kept[0]]
        assert broken == [], choice


@careful(200)
@given(st.data())
def test_no_alternative_is_cheaper_than_a_plan_proved_best(data):
    """Beside a plan that is proved best nothing that is offered costs less than nothing."""
    _every, plan, alternatives = planned_with_alternatives(data)
    assert plan.proved_best
    assert all(choice.cost >= -1e-9 for choice, _arrays in alternatives)


def test_alternative_that_needs_a_transfer_is_not_offered_when_none_is_allowed():
    """With no transfers left, a better female at another holder is no alternative."""
    rows = [
        animal("P", "m", status="dead", holder="North"),
        animal("S1", "m", holder="North"),
        animal("D1", "f", holder="North"),
        animal("D2", "f", holder="South"),
        animal("D3", "f", "P", "D1", holder="North"),
        animal("S3", "m", "P", "D1", holder="North"),
    ]
    plan = plan_of(rows, {"limits": {"young": 1, "moves": 0}})
    assert chosen(plan) == [("S1", "D1", 1, 1)]
    offered = [plan.population.pedigree.ids[each.dam] for each in plan.pairs[0].alternatives]
    assert "D2" not in offered


def test_animal_that_must_breed_is_not_offered_away():
    """The only pair of an animal that must breed has no alternative without that animal."""
    rows = [
        animal("P", "m", status="dead"),
        animal("S1", "m"),
        animal("D1", "f"),
        animal("D2", "f"),
        animal("D3", "f", "P", "D1"),
        animal("S3", "m", "P", "D1"),
    ]
    tables = {"limits": {"young": 1}, "animals": [{"id": "D3", "decision": "must-breed"}]}
    plan = plan_of(rows, tables)
    ids = plan.population.pedigree.ids
    assert ids[plan.pairs[0].dam] == "D3"
    assert all(ids[each.dam] == "D3" for each in plan.pairs[0].alternatives)


def test_equal_pairs_come_at_one_holder_first():
    """Among pairs of equal J the one at one holder is chosen, though its ids come later."""
    rows = [
        animal("S1", "m", holder="North"),
        animal("S2", "m", holder="South"),
        animal("D1", "f", holder="West"),
        animal("D2", "f", holder="South"),
    ]
    assert chosen(plan_of(rows, {"limits": {"young": 1}})) == [("S2", "D2", 1, 1)]


def test_equal_pairs_come_by_id():
    """Among pairs of equal J and holder the lower ids are chosen, A2 before A10."""
    rows = [animal(each, "m") for each in ("A10", "A2", "A30")]
    rows += [animal(each, "f") for each in ("B11", "B3", "B20")]
    assert chosen(plan_of(rows, {"limits": {"young": 1}})) == [("A2", "B3", 1, 1)]
    assert chosen(plan_of(rows, {"limits": {"young": 2}})) == [
        ("A2", "B3", 1, 1),
        ("A10", "B11", 1, 1),
    ]


def test_settling_ties_needs_no_more_transfers():
    """Ties among litters of several a pair are not settled by a transfer beyond the limit."""
    rows = [
        animal("S1", "m", holder="North"),
        animal("S2", "m", holder="South"),
        animal("D1", "f", holder="South"),
        animal("D2", "f", holder="South"),
    ]
    tables = {"mating": HAREM, "limits": {"young": 4, "litters_per_female": 3, "moves": 1}}
    plan = plan_of(rows, tables)
    apart = [(sire, dam) for sire, dam, _young, _litters in chosen(plan) if sire == "S1"]
    assert len(apart) <= 1
    assert len(plan.moves) <= 1


@careful(200)
@given(st.data())
def test_no_plan_of_equal_objective_has_fewer_pairs_apart(data):
    """Of all plans with the least J the one proposed has as few pairs at two holders as any."""
    rows = data.draw(programmes())
    tables = data.draw(policies(rows))
    tables["limits"]["young_per_litter"] = 1
    tables["limits"]["young"] = min(tables["limits"]["young"], 4)
    tables["limits"] |= {"litters_per_female": 1, "litters_per_male": 1}
    every = EveryPlan(rows, tables)
    litters, young = every.within_limits()
    assume(len(litters))
    value = every.objective(litters, young)
    equal = value <= value.min() + 1e-13
    apart = (litters[equal] @ every.apart().astype(int)).min()
    planned, _young = every.as_arrays(chosen(plan_of(rows, tables)))
    assert planned[0] @ every.apart().astype(int) == apart


def described(plan):
    """Everything a plan says, by id, with its numbers apart."""
    ids = plan.population.pedigree.ids
    choices = [
        [
            (
                ids[each.sire],
                ids[each.dam],
                None if each.swaps_with is None else [ids[place] for place in each.swaps_with],
            )
            for each in pair.alternatives
        ]
        for pair in plan.pairs
    ]
    said = (
        chosen(plan),
        choices,
        moves_of(plan),
        plan.notes,
        [each.reasons for each in plan.pairs],
        {ids[each.animal]: (each.what_to_do, each.reason) for each in plan.tasks},
    )
    numbers = [plan.outcome.objective, plan.best_possible, plan.outcome.gene_diversity_after]
    numbers += [each.gene_diversity_gain for each in plan.pairs]
    numbers += [each.cost for pair in plan.pairs for each in pair.alternatives]
    return said, numbers


@careful(150)
@given(st.data())
def test_order_of_the_rows_does_not_change_the_plan(data):
    """A shuffled file gives the same pairs, alternatives, moves, tasks and figures."""
    rows = data.draw(programmes())
    tables = data.draw(policies(rows))
    assume(EveryPlan(rows, tables).best() is not None)
    first, numbers = described(plan_of(rows, tables))
    second, others = described(plan_of(data.draw(st.permutations(rows)), tables))
    assert first == second
    assert numbers == pytest.approx(others, abs=1e-12)


@careful(75)
@given(st.data())
def test_same_input_twice_gives_the_same_plan(data):
    """Two calls with one file and one policy agree in every word and every bit."""
    rows = data.draw(programmes())
    tables = data.draw(policies(rows))
    assume(EveryPlan(rows, tables).best() is not None)
    assert described(plan_of(rows, tables)) == described(plan_of(rows, tables))


def stored(doses, **tables):
    """A policy with semen of S9 in store."""
    return {"gametes": [{"id": "S9", "doses": doses}], **tables}


def test_stored_semen_of_a_dead_male_serves_as_many_litters_as_doses():
    """A dead male with two doses sires two litters at most, and has no task of its own."""
    rows = [*founders(0, 3), animal("S9", "m", status="dead")]
    tables = stored(2, mating=HAREM, limits={"young": 2})
    plan = plan_of(rows, tables)
    assert chosen(plan) == [("S9", "D1", 1, 1), ("S9", "D2", 1, 1)]
    assert len(plan.tasks) == 3
    tables["limits"]["young"] = 3
    with pytest.raises(NoPlanError, match="No plan meets the limits"):
        plan_of(rows, tables)


def test_dead_male_without_stored_semen_does_not_breed():
    """A dead male is a candidate only through the policy's gametes."""
    rows = [*founders(1, 2), animal("S9", "m", status="dead")]
    assert candidates_of(rows, {})[0] == ["S1"]
    assert candidates_of(rows, stored(1))[0] == ["S1", "S9"]
    assert candidates_of(rows, stored(1))[2] == {}


def test_stored_semen_needs_no_transfer():
    """Semen in store at another holder uses none of the season's transfers."""
    rows = [animal("D1", "f", holder="South"), animal("S9", "m", status="dead", holder="North")]
    assert moves_of(plan_of(rows, stored(1, limits={"young": 1}))) == []
    plan = plan_of(rows, stored(1, limits={"young": 1, "moves": 0}))
    assert chosen(plan) == [("S9", "D1", 1, 1)]


def test_stored_semen_of_a_female_is_refused():
    """Gametes of a dead female do not make her a dam of the season."""
    rows = [*founders(1, 1), animal("S9", "f", status="dead")]
    try:
        females = candidates_of(rows, stored(1))[1]
    except PolicyError:
        females = ["D1"]
    assert females == ["D1"]


def test_male_has_one_litter_in_pairs_and_any_number_with_several_females():
    """Without a number of litters a male has one in pairs and no limit in the other system."""
    rows = founders(1, 4)
    assert plan_of(rows, {"limits": {"young": 1}}).season.young == 1
    with pytest.raises(NoPlanError, match="a male has 1 litter at most"):
        plan_of(rows, {"limits": {"young": 2}})
    plan = plan_of(rows, {"mating": HAREM, "limits": {"young": 4}})
    assert sorted(dam for _sire, dam, _young, _litters in chosen(plan)) == ["D1", "D2", "D3", "D4"]


def test_male_with_one_mate_goes_to_her_and_females_go_to_a_male_with_several():
    """Transfers name who goes where and why, and the animal's task repeats its transfer."""
    holders = [
        {"name": "North", "latitude": 0.0, "longitude": 0.0},
        {"name": "South", "latitude": 1.0, "longitude": 0.0},
    ]
    rows = [animal("S1", "m", holder="North"), animal("D1", "f", holder="South")]
    plan = plan_of(rows, {"limits": {"young": 1}, "holders": holders})
    assert moves_of(plan) == [("S1", "North", "South")]
    (move,) = plan.moves
    assert move.km == pytest.approx(6371.0 * np.pi / 180, abs=1e-6)
    assert move.reason == "to breed with D1"
    assert task_of(plan, "S1").moves == (move,)
    assert task_of(plan, "D1").moves == ()
    assert (plan.pairs[0].same_holder, plan.pairs[0].move_km) == (False, move.km)
    plan = plan_of(
        [*rows, animal("D2", "f", holder="North")], {"mating": HAREM, "limits": {"young": 2}}
    )
    assert moves_of(plan) == [("D1", "South", "North")]
    assert plan.moves[0].km is None


@careful(150)
@given(st.data())
def test_transfers_let_every_pair_meet_within_the_limit(data):
    """Following the transfers in order every pair meets, nobody moves needlessly or too often."""
    rows = data.draw(programmes())
    tables = data.draw(policies(rows))
    every = EveryPlan(rows, tables)
    assume(every.best() is not None)
    plan = plan_of(rows, tables)
    apart = dict(zip(every.pairs, every.apart(), strict=True))
    at = {row["id"]: row["holder"] for row in rows}
    waiting = moves_of(plan)
    for sire, dam, _young, _litters in chosen(plan):
        if apart[sire, dam] and at[sire] != at[dam]:
            mover, origin, destination = waiting.pop(0)
            assert mover in (sire, dam)
            assert at[mover] == origin
            at[mover] = destination
            assert at[sire] == at[dam]
    assert waiting == []
    assert len(plan.moves) <= tables["limits"].get("moves", len(plan.moves))


def test_pair_kept_together_without_young_stays_together():
    """Both of such a pair are told to stay with the other, without young."""
    tables = {
        "limits": {"young": 1},
        "pairs": [{"sire": "S1", "dam": "D1", "decision": "together-no-young"}],
    }
    plan = plan_of(founders(2, 2), tables)
    assert chosen(plan) == [("S2", "D2", 1, 1)]
    assert task_of(plan, "S1").what_to_do == "stay with D1, no young"
    assert task_of(plan, "D1").what_to_do == "stay with S1, no young"
    assert task_of(plan, "D1").reason == "stays with S1 without young"


def test_pair_kept_together_breeds_with_nobody_else():
    """A standing pair is chosen whole or left out, and stays together in either case."""
    bond = [{"sire": "S1", "dam": "D1", "decision": "together", "reason": "bonded since 2011"}]
    plan = plan_of(founders(2, 2), {"limits": {"young": 2}, "pairs": bond})
    assert sorted(chosen(plan)) == [("S1", "D1", 1, 1), ("S2", "D2", 1, 1)]
    assert plan.pairs[0].reasons[0] == "A standing pair: bonded since 2011."
    limits = {"young": 1, "offspring_inbreeding": 0.0}
    rows = [*founders(2, 2), animal("F1", "m", status="dead"), animal("F2", "f", status="dead")]
    rows = [
        {**row, "sire": "F1", "dam": "F2"} if row["id"] in ("S1", "D1") else row for row in rows
    ]
    plan = plan_of(rows, {"limits": limits, "pairs": bond})
    assert chosen(plan) == [("S2", "D2", 1, 1)]
    assert task_of(plan, "S1").what_to_do.startswith("stay with D1, no young")


def test_pair_that_must_breed_is_in_the_plan():
    """A pair that must breed has a litter though better ones are left out for it."""
    rows = [*founders(2, 2), animal("D9", "f", "S1", "D1"), animal("S9", "m", "S2", "D1")]
    tables = {
        "limits": {"young": 1},
        "pairs": [{"sire": "S9", "dam": "D9", "decision": "must-breed"}],
    }
    assert chosen(plan_of(rows, tables)) == [("S9", "D9", 1, 1)]
    tables["animals"] = [{"id": "D9", "decision": "rest", "reason": "moult"}]
    with pytest.raises(NoPlanError, match="D9 may not breed: rests: moult"):
        plan_of(rows, tables)
