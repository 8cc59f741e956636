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

    Mean kinships are ranked once (BALLOU_LACY_1995). Pairs and animals that must breed come
    first, and every limit is kept. Fewer young than wanted come of it where a choice leaves
    later ones without a mate, and none at all where one that must breed is left out.
    """
    ranked = _Ranked(limits, season, objective)
    for pair in np.flatnonzero(limits.least_of_pairs).tolist():
        ranked.place([int(limits.male[pair])], [int(limits.female[pair])])
    for j in ranked.females[limits.least_of_females[ranked.females] > 0].tolist():
        if not ranked.litters_of_female[j]:
            ranked.place(ranked.males.tolist(), [j])
    for i in ranked.males[limits.least_of_males[ranked.males] > 0].tolist():
        if not ranked.litters_of_male[i]:
            ranked.place([i], ranked.females.tolist())
    for turn in range(int(limits.most_of_females.max(initial=0))):
        for j in ranked.females.tolist():
            if ranked.litters_of_female[j] == turn:
                ranked.place(ranked.males.tolist(), [j])
            if ranked.complete:
                break
    met = (ranked.litters_of_male >= limits.least_of_males).all() and (
        ranked.litters_of_female >= limits.least_of_females
    ).all()
    return ranked.plan if met else []


class _Ranked:
    """A plan being filled litter by litter in the order of mean kinship."""

    def __init__(self, limits: LitterLimits, season: Season, objective: Objective) -> None:
        males, females = objective.per_young.shape
        self._limits = limits
        self._sizes = [season.litter_size] * season.full_litters
        self._sizes += [season.remainder] * bool(season.remainder)
        self._allowed = np.zeros((males, females), dtype=bool)
        self._allowed[limits.male, limits.female] = True
        self._apart = np.zeros_like(self._allowed)
        self._apart[limits.male, limits.female] = limits.moves_needed
        self._used = np.zeros((males, females), dtype=np.int64)
        self._born = np.zeros(males)
        self.males = np.argsort(objective.mean_kinship[:males], kind="stable")
        self.females = np.argsort(objective.mean_kinship[males:], kind="stable")
        self.plan: list[Litter] = []

    @property
    def complete(self) -> bool:
        return len(self.plan) == len(self._sizes)

    @property
    def litters_of_male(self) -> npt.NDArray[np.int64]:
        return np.asarray(self._used.sum(axis=1))

    @property
    def litters_of_female(self) -> npt.NDArray[np.int64]:
        return np.asarray(self._used.sum(axis=0))

    def place(self, males: list[int], females: list[int]) -> None:
        """Give the next litter to the first pair, in the order given, that may have it."""
        if self.complete:
            return
        young = self._sizes[len(self.plan)]
        pair = next(((i, j) for j in females for i in males if self._fits(i, j, young)), None)
        if pair is not None:
            self.plan.append(Litter(*pair, young))
            self._used[pair] += 1
            self._born[pair[0]] += young

    def _fits(self, i: int, j: int, young: int) -> bool:
        limits = self._limits
        if not self._allowed[i, j]:
            return False
        if self._used[i].sum() >= limits.most_of_males[i]:
            return False
        if self._used[:, j].sum() >= limits.most_of_females[j]:
            return False
        most = limits.most_young_of_males
        if most is not None and self._born[i] + young > most:
            return False
        moving = int((self._apart & (self._used > 0)).sum())
        new_move = self._apart[i, j] and not self._used[i, j]
        return limits.most_moves is None or not new_move or moving < limits.most_moves


def least_inbreeding(limits: LitterLimits, season: Season, matings: Matings) -> list[Litter]:
    """The permitted litters of least mean inbreeding, whatever becomes of diversity."""
    found = best_litters(limits, season, matings.inbreeding)
    return [] if found is None else found.litters


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
