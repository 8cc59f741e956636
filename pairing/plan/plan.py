"""`propose_plan`: the main job, from a population and its rules to next season's pairs."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.errors import NoPlanError, OptionError
from pairing.plan.alternatives import Exchanges
from pairing.plan.candidates import ages_at_breeding, find_candidates, season_start
from pairing.plan.clash import smallest_clash
from pairing.plan.compare import Outcome, comparisons, outcome_of
from pairing.plan.exact import Solution, solve
from pairing.plan.litter_model import best_litters, most_litters
from pairing.plan.matings import possible_matings
from pairing.plan.objective import plan_objective
from pairing.plan.pairs import PlannedPair, planned_pairs
from pairing.plan.problem import Season, litter_limits
from pairing.plan.squares import squares_of
from pairing.plan.todo import Move, Task, animal_tasks, transfers
from pairing.policy.rules import Policy
from pairing.population.living import yearly_losses

if TYPE_CHECKING:
    from collections.abc import Callable

    from pairing.plan.candidates import Candidates
    from pairing.plan.matings import Matings
    from pairing.plan.objective import Litter, Objective
    from pairing.plan.problem import LitterLimits
    from pairing.population.diversity import Population


MOST_MATINGS = 1_000_000
"""Matings of all candidate males with all candidate females that a plan is sought among."""


@dataclass(frozen=True, slots=True)
class Plan:
    """Next season's pairs with what is proved about them.

    Attributes
    ----------
    pairs
        The chosen pairs; the one that adds most gene diversity first.
    tasks
        What every living animal is to do, once each, in file order.
    moves
        Transfers between holders.
    outcome
        What the plan gives; None when no young are wanted.
    best_possible
        A proven lower bound of the objective.
    proved_best
        Whether objective and bound meet.
    compared_with
        Other rules' outcomes, by name.
    diversity_weight
        The weight of gene diversity in the objective.
    notes
        What a reader must know besides.
    """

    population: Population
    candidates: Candidates
    matings: Matings
    season: Season
    pairs: tuple[PlannedPair, ...]
    tasks: tuple[Task, ...]
    moves: tuple[Move, ...]
    outcome: Outcome | None
    best_possible: float | None
    proved_best: bool
    compared_with: dict[str, Outcome | None]
    notes: tuple[str, ...]
    diversity_weight: float = 1.0

    @property
    def gap(self) -> float | None:
        """Objective less best possible, at least 0."""
        if self.outcome is None or self.best_possible is None:
            return None
        return max(self.outcome.objective - self.best_possible, 0.0)


def propose_plan(
    population: Population,
    policy: Policy | None = None,
    *,
    within: float | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> Plan:
    """The best set of pairs for next season under the programme's limits.

    Parameters
    ----------
    policy
        The programme's rules; without any, the defaults of `Policy`.
    within
        Seconds for the exact search; the plan is then not reproducible.
    progress
        Called with steps done and steps at most.

    Raises
    ------
    NoPlanError
        If no set of pairs meets the limits; it names the smallest set of limits that clash.
    PolicyError
        If the policy names animals that are not in the records.
    """
    policy = policy or Policy()
    candidates = find_candidates(population, policy)
    _require_manageable(candidates)
    matings = possible_matings(population, candidates, policy)
    season, notes = _season(population, candidates, matings, policy)
    if season.young == 0:
        return _empty(population, candidates, matings, season, notes)
    if not len(candidates.males) or not len(candidates.females):
        raise _no_plan(population, candidates, matings, policy, season)
    limits = litter_limits(population, candidates, matings, policy, young=season.young)
    objective = plan_objective(
        population, matings, policy, young=season.young, litters=season.litters
    )
    places = np.concatenate([matings.males, matings.females])
    unit = (
        math.gcd(season.litter_size, season.remainder)
        if season.full_litters
        else (season.remainder)
    )
    squares = squares_of(population, places, unit=unit)
    solution = solve(limits, season, objective, squares, within=within, progress=progress)
    if solution.litters is None:
        raise _no_plan(population, candidates, matings, policy, season)
    notes += _notes(population, candidates, matings, policy, solution)
    return _assembled(
        population, candidates, matings, season, limits, objective, solution, policy, notes
    )


def _require_manageable(candidates: Candidates) -> None:
    """Refuse more matings than fit in memory and patience, and say how to narrow them."""
    males, females = len(candidates.males), len(candidates.females)
    if males * females > MOST_MATINGS:
        raise OptionError(
            f"{males:,} males and {females:,} females make {males * females:,} possible matings: "
            "more than this version can plan.",
            remedy="Narrow the candidates in the policy: [breeding_age], [living] members or "
            "presumed_dead_after; or may_breed in the records.",
        )


def _season(
    population: Population, candidates: Candidates, matings: Matings, policy: Policy
) -> tuple[Season, list[str]]:
    """The wanted young: the policy's number exactly, else what replaces a year's losses."""
    size = policy.limits.young_per_litter
    if policy.limits.young is not None:
        return Season(policy.limits.young, size), []
    losses = yearly_losses(population.pedigree, population.as_of)
    if losses is not None and losses > 0:
        wanted = max(1, math.floor(losses + 0.5))
        note = (
            f"No number of young was given: {wanted} would replace a year's deaths and "
            f"departures ({losses:.1f} a year over the last five years with records)."
        )
    else:
        wanted = len(candidates.females)
        each = "the only female" if wanted == 1 else f"each of the {wanted} females"
        note = f"No number of young was given: one for {each} that may breed."
    reached = 0
    if len(candidates.males) and len(candidates.females):
        reached = _nearest_feasible(population, candidates, matings, policy, wanted)
    if not reached:
        raise _no_plan(population, candidates, matings, policy, Season(max(wanted, 1), size))
    if reached > wanted:
        note += f" Decisions that animals must breed need {reached}, so {reached} are planned."
    if reached < wanted:
        note += f" The limits allow {reached} at most, so {reached} are planned."
    return Season(reached, size), [note]


def _nearest_feasible(
    population: Population, candidates: Candidates, matings: Matings, policy: Policy, wanted: int
) -> int:
    """The most young up to `wanted` that the limits allow, else the fewest above it, else 0."""
    size = policy.limits.young_per_litter
    young = wanted
    while young > 0:
        if _feasible(population, candidates, matings, policy, young):
            return young
        limits = litter_limits(population, candidates, matings, policy, young=young)
        fill = most_litters(limits, Season(young, size)) * size + size - 1
        young = min(young - 1, fill)
    pairs = sum(each.decision == "must-breed" for each in candidates.pairs)
    most = wanted + size * (len(candidates.must_breed) + pairs)
    return next(
        (
            each
            for each in range(wanted + 1, most + 1)
            if _feasible(population, candidates, matings, policy, each)
        ),
        0,
    )


def _feasible(
    population: Population, candidates: Candidates, matings: Matings, policy: Policy, young: int
) -> bool:
    limits = litter_limits(population, candidates, matings, policy, young=young)
    season = Season(young, policy.limits.young_per_litter)
    return best_litters(limits, season, np.zeros(matings.inbreeding.shape)) is not None


def _no_plan(
    population: Population,
    candidates: Candidates,
    matings: Matings,
    policy: Policy,
    season: Season,
) -> NoPlanError:
    clash = smallest_clash(population, candidates, matings, policy, season)
    return NoPlanError(
        "No plan meets the limits.",
        clash=clash,
        details=["These cannot all hold:", *(f"  - {each}" for each in clash)],
        remedy="Change one of them in the policy or on the command line and try again.",
    )


def _notes(
    population: Population,
    candidates: Candidates,
    matings: Matings,
    policy: Policy,
    solution: Solution,
) -> list[str]:
    notes = list(candidates.notes)
    if solution.out_of_time:
        notes.append(
            "The search for the best plan was stopped by the clock: another run may end with "
            "another plan as good as this one within the bound."
        )
    if all(population.pedigree.born(place) is None for place in population.living.tolist()):
        notes.append("No births are recorded, so ages were not judged.")
    litters = solution.litters or ()
    if not policy.breeding_age:
        notes += _unusual_ages(population, matings, policy, list(litters))
    if policy.weights.merit:
        missing = sum(
            (animal := population.pedigree.animals[place]) is None or animal.merit is None
            for place in [*matings.males.tolist(), *matings.females.tolist()]
        )
        if missing:
            notes.append(f"{missing} candidates have no merit recorded; they count as average.")
    if policy.weights.travel and any(
        np.isnan(matings.criteria["move_km"][each.male, each.female]) for each in litters
    ):
        notes.append("Some holders' positions are not in the policy: their moves count 0 km.")
    return notes


def _unusual_ages(
    population: Population, matings: Matings, policy: Policy, litters: list[Litter]
) -> list[str]:
    """Chosen animals younger or older than any that bred in these records; not barred."""
    season = season_start(population, policy)
    ages = ages_at_breeding(population.pedigree)
    notes = []
    chosen = {
        "male": {int(matings.males[each.male]) for each in litters},
        "female": {int(matings.females[each.female]) for each in litters},
    }
    for sex, places in chosen.items():
        if sex not in ages or season is None:
            continue
        for place in sorted(places):
            born = population.pedigree.born(place)
            if born is None:
                continue
            age = (season - born.midpoint) / 365.25
            low, high = ages[sex]
            if not low <= age <= high:
                notes.append(
                    f"{population.pedigree.label(place)} is {age:.1f} years old; {sex}s of these "
                    f"records had young from {low:.1f} to {high:.1f} years of age."
                )
    return notes


def _empty(
    population: Population,
    candidates: Candidates,
    matings: Matings,
    season: Season,
    notes: list[str],
) -> Plan:
    tasks = animal_tasks(population, candidates, matings, pairs=(), moves=(), exchanges=None)
    return Plan(
        population,
        candidates,
        matings,
        season,
        (),
        tasks,
        (),
        None,
        None,
        True,
        {},
        (*notes, "No young are wanted this season."),
    )


def _assembled(
    population: Population,
    candidates: Candidates,
    matings: Matings,
    season: Season,
    limits: LitterLimits,
    objective: Objective,
    solution: Solution,
    policy: Policy,
    notes: list[str],
) -> Plan:
    litters = list(solution.litters or ())
    exchanges = Exchanges(litters, limits, objective)
    pairs = planned_pairs(population, candidates, matings, litters, exchanges)
    moves = transfers(population, pairs, candidates, matings)
    return Plan(
        population=population,
        candidates=candidates,
        matings=matings,
        season=season,
        pairs=pairs,
        tasks=animal_tasks(
            population, candidates, matings, pairs=pairs, moves=moves, exchanges=exchanges
        ),
        moves=moves,
        outcome=outcome_of(litters, matings, objective),
        best_possible=solution.bound,
        proved_best=solution.proved_best,
        compared_with=comparisons(limits, season, matings, objective),
        notes=tuple(notes),
        diversity_weight=policy.weights.diversity,
    )
