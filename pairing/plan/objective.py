"""What a plan is judged by: the objective J of the programme, lower is better.

J = w_inbreeding * mean F of the young
  + w_diversity * ((N + T) / T) * (m' - m)
  + w_travel * (mean km moved per litter) / 1000
  - w_merit * (mean parental merit of the young, in standard deviations of the candidates),

with N living, T young, m and m' the mean kinship before and after. With c_x young from
parent x, the sum S' = (N + T)^2 m' is
    S + N sum c_x m_x + c'Kc / 4 + sum c_x (1 - F_x) / 8:
it depends on how many young each parent leaves and not on who mates with whom
(CABALLERO_TORO_2000; derived in docs/methods.md). So J is a constant, plus a cost for each
young of each mating, plus a cost for each litter, plus a quadratic form in c.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.plan.matings import Matings
    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population

    FloatArray = npt.NDArray[np.float64]
    PlaceArray = npt.NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Litter:
    """One litter of a plan: row and column of the mating, and its young."""

    male: int
    female: int
    young: int


@dataclass(frozen=True, slots=True)
class Objective:
    """J of any set of litters among m males and f females.

    Attributes
    ----------
    population_size, young, litters
        N living, T young, and the litters they come in.
    constant
        The part of J that no choice of pairs changes.
    per_young
        Cost of one young of each mating, shape (m, f).
    per_litter
        Cost of one litter of each mating whatever its size, shape (m, f).
    quadratic
        Factor of c'Kc.
    kinship
        Of the candidates, males first, shape (m + f, m + f).
    total_kinship
        Sum of all kinships among the living, N^2 m.
    mean_kinship, candidate_inbreeding
        Of each candidate, males first, shape (m + f,).
    """

    population_size: int
    young: int
    litters: int
    total_kinship: float
    constant: float
    per_young: FloatArray
    per_litter: FloatArray
    quadratic: float
    kinship: FloatArray
    mean_kinship: FloatArray
    candidate_inbreeding: FloatArray

    def contributions(self, plan: list[Litter]) -> FloatArray:
        """Young of each candidate, males first, shape (m + f,)."""
        males, females = self.per_young.shape
        count = np.zeros(males + females)
        for litter in plan:
            count[litter.male] += litter.young
            count[males + litter.female] += litter.young
        return count

    def value(self, plan: list[Litter]) -> float:
        """J of a plan."""
        count = self.contributions(plan)
        return self.linear_value(plan) + float(self.quadratic * (count @ self.kinship @ count))

    def linear_value(self, plan: list[Litter]) -> float:
        """J without its quadratic part, which is never negative."""
        linear = sum(
            litter.young * self.per_young[litter.male, litter.female]
            + self.per_litter[litter.male, litter.female]
            for litter in plan
        )
        return float(self.constant + linear)

    def gene_diversity_after(self, plan: list[Litter]) -> float:
        """Gene diversity of the living and the plan's young together, 1 - m'."""
        return self.diversity_of(self.contributions(plan), sum(each.young for each in plan))

    def diversity_of(self, count: FloatArray, young: int) -> float:
        """Gene diversity after `young` are born with `count` from each parent."""
        size = self.population_size
        total = self.total_kinship + size * (count @ self.mean_kinship)
        total += (count @ self.kinship @ count) / 4
        total += (count @ (1.0 - self.candidate_inbreeding)) / 8
        return float(1.0 - total / (size + young) ** 2)


def plan_objective(
    population: Population, matings: Matings, policy: Policy, *, young: int, litters: int
) -> Objective:
    """The objective of a season with `young` young in `litters` litters (both at least 1)."""
    size = population.size
    mean = population.population_mean_kinship or 0.0
    weights = policy.weights
    places = np.concatenate([matings.males, matings.females])
    males = len(matings.males)
    own = population.mean_kinship[places]
    f = population.kinship.inbreeding[places]
    share = weights.diversity / (young * (size + young))
    per_parent = share * (size * own + (1.0 - f) / 8)
    per_young = weights.inbreeding * matings.inbreeding / young
    per_young = per_young + per_parent[:males, None] + per_parent[None, males:]
    if weights.merit:
        merit = standard_merit(population, places)
        per_young = per_young - weights.merit * (merit[:males, None] + merit[None, males:]) / (
            2 * young
        )
    km = np.nan_to_num(matings.criteria["move_km"])
    total = size**2 * mean
    return Objective(
        population_size=size,
        young=young,
        litters=litters,
        total_kinship=total,
        constant=weights.diversity
        * ((size + young) / young)
        * (total / (size + young) ** 2 - mean),
        per_young=per_young,
        per_litter=weights.travel * km / (1000 * litters),
        quadratic=share / 4,
        kinship=population.kinship.block(places, places),
        mean_kinship=own,
        candidate_inbreeding=f,
    )


def standard_merit(population: Population, places: PlaceArray) -> FloatArray:
    """Merit of candidates in standard deviations from their mean; not recorded counts as 0."""
    recorded = [
        animal.merit if (animal := population.pedigree.animals[place]) is not None else None
        for place in places.tolist()
    ]
    known = np.array([each for each in recorded if each is not None], dtype=np.float64)
    spread = float(known.std()) if len(known) else 0.0
    if spread == 0.0:
        return np.zeros(len(places))
    centre = float(known.mean())
    return np.array([0.0 if each is None else (each - centre) / spread for each in recorded])
