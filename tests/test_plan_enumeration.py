"""The plan against every plan there is, on small random programmes."""

from itertools import combinations

import numpy as np
import pytest
from hypothesis import event, given
from hypothesis import strategies as st

from pairing.errors import NoPlanError
from tests.programmes import (
    EveryPlan,
    animal,
    careful,
    chosen,
    named_limits,
    plan_of,
    policies,
    programmes,
)


def assert_best(rows, tables):
    """The plan is the best of all plans, or the clash is right when there are none; which it is."""
    every = EveryPlan(rows, tables)
    least = every.best()
    if least is None:
        assert_clash(every, rows, tables)
        return "no plan"
    plan = plan_of(rows, tables)
    assert plan.best_possible <= least + 1e-9
    assert least <= plan.outcome.objective + 1e-9
    assert plan.outcome.objective <= least + 1e-9
    assert plan.proved_best
    assert plan.gap == pytest.approx(0, abs=1e-9)
    litters, young = every.as_arrays(chosen(plan))
    broken = [name for name, kept in every.keeps(litters, young).items() if not kept[0]]
    assert broken == []
    assert every.objective(litters, young)[0] == pytest.approx(least, abs=1e-9)
    assert young.sum() == every.young
    assert litters.sum() == -(-every.young // every.size)
    return "plan"


def assert_clash(every, rows, tables):
    """The clash names limits that no plan keeps together, and no smaller set is like that."""
    with pytest.raises(NoPlanError, match="No plan meets the limits") as caught:
        plan_of(rows, tables)
    assert caught.value.exit_status == 1
    named = named_limits(caught.value.clash)
    keeps = every.keeps(*every.plans())
    assert not kept_by_some_plan(keeps, named), caught.value.clash
    for each in named:
        others = [name for name in named if name != each]
        assert kept_by_some_plan(keeps, others), (each, caught.value.clash)
    for fewer in combinations(keeps, max(len(named) - 1, 0)):
        assert not named or kept_by_some_plan(keeps, fewer), (fewer, caught.value.clash)


def kept_by_some_plan(keeps, names):
    """Whether some plan keeps all the named limits, whatever else it breaks."""
    number = len(next(iter(keeps.values())))
    together = np.ones(number, dtype=bool)
    for name in names:
        together &= keeps[name]
    return bool(together.any())


@careful(300)
@given(st.data())
def test_plan_is_the_best_of_all_plans_within_the_limits(data):
    """Objective, bound and proof agree with full enumeration, or the clash is a smallest one."""
    rows = data.draw(programmes())
    event(assert_best(rows, data.draw(policies(rows))))


@careful(150)
@given(st.data())
def test_plan_with_lines_kept_apart_is_the_best_of_all_plans(data):
    """Lines that may not cross, and those that may, narrow the plan as enumeration says."""
    rows = data.draw(programmes(lines=True, merits=False))
    event(assert_best(rows, data.draw(policies(rows))))


@careful(150)
@given(st.data())
def test_several_litters_an_animal_are_planned_as_well_as_they_can_be(data):
    """With many litters an animal and a remainder the plan still equals the enumerated best."""
    rows = data.draw(programmes(most=4))
    tables = data.draw(policies(rows))
    tables["limits"] |= {"litters_per_male": 4, "litters_per_female": 4}
    tables["mating"]["allow_closest"] = True
    tables.pop("pairs", None)
    event(assert_best(rows, tables))


@careful(200)
@given(st.data())
def test_few_transfers_are_kept_to_when_pairs_have_several_litters(data):
    """With several litters a pair and few transfers the plan is the best and needs no more."""
    rows = data.draw(programmes(most=4, merits=False))
    tables = {
        "mating": {"system": "one-male-several-females", "allow_closest": True},
        "limits": {
            "young": data.draw(st.integers(3, 5)),
            "litters_per_female": data.draw(st.integers(2, 4)),
            "moves": data.draw(st.integers(0, 2)),
        },
    }
    event(assert_best(rows, tables))


@careful(100)
@given(st.data())
def test_plan_with_stored_semen_is_the_best_of_all_plans(data):
    """A dead male whose semen is stored serves as many litters as there are doses."""
    rows = data.draw(programmes(most=4))
    dead = [row["id"] for row in rows if row["status"] == "dead" and row["sex"] == "m"]
    tables = data.draw(policies(rows, most_plans=5_000))
    tables["limits"].pop("moves", None)
    tables["weights"].pop("travel", None)
    tables["gametes"] = [{"id": each, "doses": data.draw(st.integers(0, 3))} for each in dead[:2]]
    event(assert_best(rows, tables))


GREEDY_FAILURE = [
    animal("F0", "m", status="dead"),
    animal("F1", "f", status="dead"),
    animal("F2", "m", status="dead"),
    animal("F3", "f", status="dead"),
    animal("X0", "m", "F0", "F3", status="dead"),
    animal("X1", "f", "F0", "F3"),
    animal("X2", "m", "F2", "F1"),
    animal("X3", "m", "F0", "X1"),
    animal("X4", "f", "F2", "F1"),
    animal("X5", "m", "X2", "X1"),
    animal("X6", "f", "X2", "X4"),
    animal("X7", "m", "F0", "F1"),
]
ONLY_DIVERSITY = {
    "mating": {"allow_closest": True},
    "limits": {"young": 3, "litters_per_male": 3, "litters_per_female": 3},
    "weights": {"inbreeding": 0.0},
}


def test_plan_is_best_where_choosing_one_young_after_the_other_is_not():
    """On the twelve animals of methods C.4 the plan reaches m' = 83/400, below greedy choice."""
    plan = plan_of(GREEDY_FAILURE, ONLY_DIVERSITY)
    assert plan.population.size == 7
    assert plan.proved_best
    assert 1 - plan.outcome.gene_diversity_after == pytest.approx(83 / 400, abs=1e-12)
    assert_best(GREEDY_FAILURE, ONLY_DIVERSITY)


def test_greedy_choice_on_the_twelve_animals_is_worse():
    """Taking the best next young three times on the same animals ends at m' = 133/640."""
    every = EveryPlan(GREEDY_FAILURE, ONLY_DIVERSITY)
    plan = np.zeros((1, len(every.pairs)), dtype=int)
    for _step in range(3):
        steps = plan + np.eye(len(every.pairs), dtype=int)
        plan = steps[[np.argmin(every.objective(steps, steps))]]
    living = [every.place[each] for each in every.living]
    before = every.kinship[np.ix_(living, living)].mean()
    assert every.objective(plan, plan)[0] * 3 / 10 + before == pytest.approx(133 / 640, abs=1e-12)


def test_only_males_with_too_few_litters_are_named_in_the_clash():
    """A limit on all males by decision alone is named when it is what cannot be met."""
    rows = [animal("S1", "m"), animal("D1", "f"), animal("D2", "f")]
    tables = {
        "mating": {"system": "one-male-several-females"},
        "limits": {"young": 2},
        "animals": [{"id": "S1", "decision": "at-most", "litters": 1}],
    }
    with pytest.raises(NoPlanError, match="litters decided on"):
        plan_of(rows, tables)


def test_few_doses_of_the_only_male_are_named_in_the_clash():
    """Stored doses that do not reach are named as the limit that cannot be met."""
    rows = [animal("S1", "m", status="dead"), animal("D1", "f"), animal("D2", "f")]
    tables = {
        "mating": {"system": "one-male-several-females"},
        "limits": {"young": 2},
        "gametes": [{"id": "S1", "doses": 1}],
    }
    with pytest.raises(NoPlanError, match="litters decided on"):
        plan_of(rows, tables)
