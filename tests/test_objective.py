"""The objective against its definition, with the young put into the records as real animals."""

from fractions import Fraction
from itertools import product

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from pairing.plan.candidates import find_candidates
from pairing.plan.compare import random_mating
from pairing.plan.matings import gene_diversity_gain, possible_matings
from pairing.plan.objective import Litter, plan_objective
from pairing.plan.problem import Season
from pairing.policy.reading import policy_from_tables
from tests.programmes import (
    POSITIONS,
    EveryPlan,
    animal,
    careful,
    kilometres,
    policies,
    population_of,
    programmes,
    young_rows,
)

P0 = [
    animal("f1", "m", status="dead"),
    animal("f2", "f", status="dead"),
    animal("f3", "f", status="dead"),
    animal("f4", "m", status="dead"),
    animal("a", "m", "f1", "f2", status="dead"),
    animal("b", "f", "f1", "f3", status="dead"),
    animal("c", "f", "f1", "f2"),
    animal("d", "m", "a", "b"),
    animal("e", "f", "a", "c"),
    animal("g", "f", "f4", "b"),
    animal("h", "f", "d", "e"),
]
P0_POLICY = {
    "mating": {"system": "one-male-several-females", "allow_closest": True},
    "gametes": [{"id": "f4", "doses": 4}],
}


def mean_kinship_after(rows, litters):
    """Population mean kinship when every young is an animal of its own."""
    return population_of([*rows, *young_rows(litters)]).population_mean_kinship


def setting(rows, tables, litters):
    """Population, candidates' matings and objective for litters of (sire, dam, young)."""
    population = population_of(rows, tables)
    policy = policy_from_tables(tables)
    matings = possible_matings(population, find_candidates(population, policy), policy)
    young = sum(each for _sire, _dam, each in litters)
    objective = plan_objective(population, matings, policy, young=young, litters=len(litters))
    return population, matings, objective


def as_plan(population, matings, litters):
    """Litters by row and column."""
    ids = population.pedigree.ids
    row = {ids[place]: number for number, place in enumerate(matings.males.tolist())}
    column = {ids[place]: number for number, place in enumerate(matings.females.tolist())}
    return [Litter(row[sire], column[dam], young) for sire, dam, young in litters]


def objective_by_definition(rows, tables, litters):
    """J in the words of interface.md, every young being a row of the records.

    Each litter counts as a pair in the mean distance.
    """
    weights = {
        "inbreeding": 1.0,
        "diversity": 1.0,
        "travel": 0.0,
        "merit": 0.0,
        **tables.get("weights", {}),
    }
    before = population_of(rows)
    after = population_of([*rows, *young_rows(litters)])
    size, total = before.size, sum(young for _sire, _dam, young in litters)
    assert after.size == size + total
    born = after.pedigree.place(*(row["id"] for row in young_rows(litters)))
    by_id = {row["id"]: row for row in rows}
    where = {
        each["name"]: (each["latitude"], each["longitude"]) for each in tables.get("holders", [])
    }
    km = []
    for sire, dam, _young in litters:
        here, there = by_id[sire]["holder"], by_id[dam]["holder"]
        km.append(
            kilometres(where[here], where[there])
            if here != there and here in where and there in where
            else 0.0
        )
    every = EveryPlan(rows, tables, total)
    merit = dict(zip(every.candidates, every.merit(), strict=True))
    parents = [
        (merit[sire] + merit[dam]) / 2 for sire, dam, young in litters for _each in range(young)
    ]
    change = after.population_mean_kinship - before.population_mean_kinship
    return (
        weights["inbreeding"] * after.kinship.inbreeding[born].mean()
        + weights["diversity"] * (size + total) / total * change
        + weights["travel"] * np.mean(km) / 1000
        - weights["merit"] * np.mean(parents)
    )


@st.composite
def seasons(draw, most=6):
    """Rows, a policy, and any litters of one size with perhaps a smaller one, limits aside."""
    rows = draw(programmes())
    tables = draw(policies(rows))
    every = EveryPlan(rows, tables)
    assume(every.pairs)
    size = draw(st.integers(1, 4))
    sizes = [size] * draw(st.integers(1, most)) + [draw(st.integers(1, size))]
    return rows, tables, [(*draw(st.sampled_from(every.pairs)), young) for young in sizes]


@careful(150)
@given(seasons())
def test_objective_equals_its_definition_with_young_as_real_animals(season):
    """J equals inbreeding, diversity, travel and merit of the young appended to the records."""
    rows, tables, litters = season
    population, matings, objective = setting(rows, tables, litters)
    plan = as_plan(population, matings, litters)
    assert objective.value(plan) == pytest.approx(
        objective_by_definition(rows, tables, litters), abs=1e-10
    )
    assert objective.gene_diversity_after(plan) == pytest.approx(
        1 - mean_kinship_after(rows, litters), abs=1e-12
    )


@pytest.mark.parametrize("term", ["inbreeding", "diversity", "travel", "merit"])
@careful(40)
@given(seasons(most=3))
def test_each_term_of_the_objective_is_weighted_alone(term, season):
    """With one weight of 2 and the others 0, J is twice that term of the definition."""
    rows, tables, litters = season
    weights = {"inbreeding": 0.0, "diversity": 0.0, "travel": 0.0, "merit": 0.0, term: 2.0}
    tables = {
        **tables,
        "weights": weights,
        "holders": [
            {"name": name, "latitude": latitude, "longitude": longitude}
            for name, (latitude, longitude) in POSITIONS.items()
        ],
    }
    population, matings, objective = setting(rows, tables, litters)
    plan = as_plan(population, matings, litters)
    assert objective.value(plan) == pytest.approx(
        objective_by_definition(rows, tables, litters), abs=1e-10
    )


@careful(100)
@given(seasons(), st.integers(1, 6))
def test_gene_diversity_gain_equals_that_of_real_animals(season, young):
    """The gain of n young of a pair is the change of gene diversity when they have rows."""
    rows, _tables, litters = season
    sire, dam, _young = litters[0]
    population = population_of(rows)
    places = [np.array([each]) for each in population.pedigree.place(sire, dam)]
    gain = gene_diversity_gain(population, *places, young=young)[0, 0]
    after = mean_kinship_after(rows, [(sire, dam, young)])
    assert gain == pytest.approx(population.population_mean_kinship - after, abs=1e-12)


@careful(100)
@given(seasons(), st.data())
def test_who_mates_with_whom_leaves_gene_diversity_unchanged(season, data):
    """Swapping the dams of litters of one size changes neither m' nor the contributions."""
    rows, tables, litters = season
    size = litters[0][2]
    equal = [each for each in litters if each[2] == size]
    dams = data.draw(st.permutations([dam for _sire, dam, _young in equal]))
    swapped = [(sire, dam, young) for (sire, _dam, young), dam in zip(equal, dams, strict=True)]
    swapped += [each for each in litters if each[2] != size]
    population, matings, objective = setting(rows, tables, litters)
    first, second = (as_plan(population, matings, each) for each in (litters, swapped))
    assert objective.contributions(first).tolist() == objective.contributions(second).tolist()
    assert objective.gene_diversity_after(first) == objective.gene_diversity_after(second)
    assert mean_kinship_after(rows, litters) == pytest.approx(
        mean_kinship_after(rows, swapped), abs=1e-12
    )


@pytest.mark.parametrize(
    ("litters", "expected"),
    [
        ([("d", "g", 2)], Fraction(65, 224)),
        ([("d", "g", 1), ("f4", "e", 1)], Fraction(425, 1568)),
        ([("d", "e", 1), ("f4", "g", 1)], Fraction(425, 1568)),
        ([("d", "g", 2), ("f4", "e", 1)], Fraction(553, 2048)),
    ],
)
def test_worked_examples_of_mean_kinship_after_a_season(litters, expected):
    """On the worked pedigree of methods C.1 and C.2 m' is the fraction found by hand."""
    population, matings, objective = setting(P0, P0_POLICY, litters)
    assert population.population_mean_kinship == pytest.approx(239 / 800, abs=1e-15)
    after = 1 - objective.gene_diversity_after(as_plan(population, matings, litters))
    assert after == pytest.approx(float(expected), abs=1e-15)
    assert mean_kinship_after(P0, litters) == pytest.approx(float(expected), abs=1e-15)


def test_worked_example_of_one_pairs_gain():
    """Two young of d and g change gene diversity by 239/800 - 65/224."""
    population = population_of(P0)
    sire, dam = (np.array([each]) for each in population.pedigree.place("d", "g"))
    gain = gene_diversity_gain(population, sire, dam, young=2)[0, 0]
    assert gain == pytest.approx(float(Fraction(239, 800) - Fraction(65, 224)), abs=1e-15)


@pytest.mark.parametrize("sizes", [[1, 1], [2, 2], [2, 1], [3]])
@careful(25)
@given(programmes(most=3), st.data())
def test_random_mating_equals_the_mean_over_all_combinations(sizes, rows, data):
    """Expectations of random mating are the means over every choice of pairs, all alike."""
    tables = data.draw(policies(rows))
    tables = {key: each for key, each in tables.items() if key not in ("pairs", "animals")}
    every = EveryPlan(rows, tables)
    _population, matings, objective = setting(
        rows, tables, [(*every.pairs[0], young) for young in sizes]
    )
    expected = {"value": [], "diversity": [], "mean": [], "highest": []}
    for choice in product(np.ndindex(*matings.inbreeding.shape), repeat=len(sizes)):
        plan = [Litter(i, j, young) for (i, j), young in zip(choice, sizes, strict=True)]
        f = [matings.inbreeding[i, j] for i, j in choice]
        expected["value"].append(objective.value(plan))
        expected["diversity"].append(objective.gene_diversity_after(plan))
        expected["mean"].append(np.average(f, weights=sizes))
        expected["highest"].append(max(f))
    found = random_mating(matings, Season(sum(sizes), max(sizes)), objective)
    assert found.young == sum(sizes)
    assert found.objective == pytest.approx(np.mean(expected["value"]), abs=1e-12)
    assert found.gene_diversity_after == pytest.approx(np.mean(expected["diversity"]), abs=1e-12)
    assert found.mean_offspring_inbreeding == pytest.approx(np.mean(expected["mean"]), abs=1e-12)
    assert found.highest_offspring_inbreeding == pytest.approx(
        np.mean(expected["highest"]), abs=1e-12
    )


def test_merit_is_measured_in_standard_deviations_of_the_candidates():
    """A merit weight rewards parents by their mean distance from the candidates' mean."""
    rows = [
        animal("S1", "m", merit="10"),
        animal("S2", "m", merit="20"),
        animal("D1", "f", merit="30"),
        animal("D2", "f", merit=""),
    ]
    tables = {"weights": {"inbreeding": 0.0, "diversity": 0.0, "merit": 1.0}}
    spread = np.std([10, 20, 30])
    for litters, merit in (
        ([("S1", "D1", 1)], (-10 + 10) / 2),
        ([("S2", "D1", 1)], (0 + 10) / 2),
        ([("S1", "D2", 1)], (-10 + 0) / 2),
        ([("S2", "D1", 3), ("S1", "D2", 1)], 10 / 4),
    ):
        population, matings, objective = setting(rows, tables, litters)
        value = objective.value(as_plan(population, matings, litters))
        assert value == pytest.approx(-merit / spread, abs=1e-12)
