"""What other rules of pairing would give with the same young, beside the plan."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.plan.litter_model import best_litters
from pairing.plan.objective import Litter

if TYPE_CHECKING:
    from collections.abc import Callable

    import numpy.typing as npt

    from pairing.plan.matings import Matings
    from pairing.plan.objective import Objective
    from pairing.plan.problem import LitterLimits, Season

    FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Outcome:
    """What a set of litters gives; fields as in the summary of a plan.

    `young` is less than wanted where the rule runs into the limits before it gets there.
    """

    young: int
    gene_diversity_after: float
    mean_offspring_inbreeding: float
    highest_offspring_inbreeding: float
    objective: float


def outcome_of(plan: list[Litter], matings: Matings, objective: Objective) -> Outcome | None:
    """Diversity, inbreeding and objective of a set of litters; None of an empty one."""
    if not plan:
        return None
    young = np.array([each.young for each in plan])
    f = np.array([matings.inbreeding[each.male, each.female] for each in plan])
    return Outcome(
        young=int(young.sum()),
        gene_diversity_after=objective.gene_diversity_after(plan),
        mean_offspring_inbreeding=float(young @ f / young.sum()),
        highest_offspring_inbreeding=float(f.max()),
        objective=objective.value(plan),
    )


def random_mating(matings: Matings, season: Season, objective: Objective) -> Outcome:
    """Exact expectations when every litter has a random candidate male and female.

    The two are drawn independently for every litter, each candidate alike, and no limit is
    kept. The highest inbreeding is the expected highest over the litters.
    """
    males, females = matings.inbreeding.shape
    chance = np.concatenate([np.full(males, 1 / males), np.full(females, 1 / females)])
    sizes = np.array(
        [season.litter_size] * season.full_litters + [season.remainder] * bool(season.remainder)
    )
    own = np.diagonal(objective.kinship)
    between = chance @ objective.kinship @ chance
    within = own[:males].mean() + own[males:].mean() + 2 * matings.inbreeding.mean()
    squares = float(np.square(sizes).sum())
    product = (season.young**2 - squares) * between + squares * within
    count = season.young * chance
    size = objective.population_size
    total = objective.total_kinship + size * (count @ objective.mean_kinship) + product / 4
    total += (count @ (1 - objective.candidate_inbreeding)) / 8
    linear = season.young * objective.per_young.mean()
    linear += season.litters * objective.per_litter.mean()
    return Outcome(
        young=season.young,
        gene_diversity_after=float(1 - total / (size + season.young) ** 2),
        mean_offspring_inbreeding=float(matings.inbreeding.mean()),
        highest_offspring_inbreeding=_expected_highest(matings.inbreeding, season.litters),
        objective=float(objective.constant + linear + objective.quadratic * product),
    )


def _expected_highest(values: FloatArray, draws: int) -> float:
    ordered = np.sort(values, axis=None)
    below = (np.arange(1, len(ordered) + 1) / len(ordered)) ** draws
    return float(ordered @ np.diff(below, prepend=0.0))


def lowest_mean_kinship_first(
    limits: LitterLimits, season: Season, objective: Objective
) -> list[Litter]:
    """Females from the lowest mean kinship up, each with the lowest permitted male.

    Mean kinships are ranked once (BALLOU_LACY_1995), and every limit on pairs and litters is
    kept. Fewer young than wanted come of it where a choice leaves later ones without a mate.
    """
    males = len(limits.most_of_males)
    allowed = np.zeros((males, len(limits.most_of_females)), dtype=bool)
    allowed[limits.male, limits.female] = True
    apart = np.zeros_like(allowed)
    apart[limits.male, limits.female] = limits.moves_needed
    male_order = np.argsort(objective.mean_kinship[:males], kind="stable")
    female_order = np.argsort(objective.mean_kinship[males:], kind="stable")
    sizes = [season.litter_size] * season.full_litters
    sizes += [season.remainder] * bool(season.remainder)
    left = limits.most_of_males.copy()
    born = np.zeros(males)
    moves = 0
    plan: list[Litter] = []
    for turn in range(int(limits.most_of_females.max(initial=0))):
        for j in female_order.tolist():
            if len(plan) == len(sizes):
                return plan
            young = sizes[len(plan)]
            fits = allowed[:, j] & (left > 0) & (limits.most_of_females[j] > turn)
            if limits.most_young_of_males is not None:
                fits &= born + young <= limits.most_young_of_males
            if limits.most_moves is not None and moves >= limits.most_moves:
                fits &= ~apart[:, j]
            choices = male_order[fits[male_order]]
            if len(choices):
                i = int(choices[0])
                plan.append(Litter(i, j, young))
                left[i] -= 1
                born[i] += young
                moves += int(apart[i, j])
    return plan


def least_inbreeding(limits: LitterLimits, season: Season, matings: Matings) -> list[Litter]:
    """The permitted litters of least mean inbreeding, whatever becomes of diversity."""
    return best_litters(limits, season, matings.inbreeding) or []


def comparisons(
    limits: LitterLimits, season: Season, matings: Matings, objective: Objective
) -> dict[str, Outcome | None]:
    """Every other rule's outcome, by its name in the plan's summary."""
    others: dict[str, Callable[[], list[Litter]]] = {
        "lowest_mean_kinship_first": lambda: lowest_mean_kinship_first(limits, season, objective),
        "least_inbreeding": lambda: least_inbreeding(limits, season, matings),
    }
    found: dict[str, Outcome | None] = {"random_mating": random_mating(matings, season, objective)}
    for name, plan in others.items():
        found[name] = outcome_of(plan(), matings, objective)
    return found
