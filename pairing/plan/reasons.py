"""Why each pair was chosen, what else it could have been, and what that would cost."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from pairing.kinship.named import same_as
from pairing.spelling import listed

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.pedigree.descent import Pedigree
    from pairing.plan.candidates import Candidates
    from pairing.plan.matings import Matings
    from pairing.plan.objective import Litter, Objective
    from pairing.plan.problem import LitterLimits
    from pairing.policy.rules import PairDecision
    from pairing.population.diversity import Population

    FloatArray = npt.NDArray[np.float64]
    IndexArray = npt.NDArray[np.int64]

MOST_ALTERNATIVES = 3
_WELL_KNOWN = 0.995
_HALF = 0.5
_DUST = 1e-12


@dataclass(frozen=True, slots=True)
class Alternative:
    """Another mating in a pair's place, by row and column, and what it would add to J.

    `swaps_with` is the pair that would take the partner in exchange, or None.
    """

    male: int
    female: int
    cost: float
    swaps_with: tuple[int, int] | None = None


class Exchanges:
    """Costs of changing one pair of a plan, all else kept."""

    def __init__(self, plan: list[Litter], limits: LitterLimits, objective: Objective) -> None:
        self._objective = objective
        males, females = objective.per_young.shape
        self._males = males
        self._allowed = np.zeros((males, females), dtype=bool)
        self._allowed[limits.male, limits.female] = True
        self._young = Counter[tuple[int, int]]()
        self._litters = Counter[tuple[int, int]]()
        for each in plan:
            self._young[each.male, each.female] += each.young
            self._litters[each.male, each.female] += 1
        used_m = np.bincount([each.male for each in plan], minlength=males)
        used_f = np.bincount([each.female for each in plan], minlength=females)
        self._spare_m = limits.most_of_males - used_m
        self._spare_f = limits.most_of_females - used_f
        self._gradient = objective.kinship @ objective.contributions(plan)
        self._limits = limits
        born = np.bincount(
            [each.male for each in plan], weights=[each.young for each in plan], minlength=males
        )
        most = limits.most_young_of_males
        self._spare_young = np.full(males, np.inf) if most is None else most - born

    def alternatives(self, male: int, female: int) -> list[Alternative]:
        """The cheapest other matings in the place of a chosen pair, cheapest first.

        A partner that is free replaces directly; one that is taken comes in exchange for
        the pair's own partner.
        """
        found = [
            *self._for_sire(male, female),
            *self._for_dam(male, female),
        ]
        found.sort(key=lambda each: (round(each.cost, 12), each.male, each.female))
        return found[:MOST_ALTERNATIVES]

    def _for_sire(self, i: int, j: int) -> list[Alternative]:
        """The same male with other females."""
        free = self._allowed[i] & (self._spare_f >= self._litters[i, j])
        free[j] = False
        costs = self._replacing(i, j, np.full(len(free), i), np.arange(len(free)))
        return [
            *(Alternative(i, k, _tidy(costs[k])) for k in _cheapest(np.where(free, costs, np.inf))),
            *self._swaps(i, j, same_male=True),
        ]

    def _for_dam(self, i: int, j: int) -> list[Alternative]:
        """The same female with other males."""
        free = self._allowed[:, j] & (self._spare_m >= self._litters[i, j])
        free &= self._spare_young >= self._young[i, j]
        free[i] = False
        costs = self._replacing(i, j, np.arange(len(free)), np.full(len(free), j))
        return [
            *(Alternative(k, j, _tidy(costs[k])) for k in _cheapest(np.where(free, costs, np.inf))),
            *self._swaps(i, j, same_male=False),
        ]

    def _swaps(self, i: int, j: int, *, same_male: bool) -> list[Alternative]:
        own = self._young[i, j], self._litters[i, j]
        found = []
        for (k, m), young in self._young.items():
            if k == i or m == j or (young, self._litters[k, m]) != own:
                continue
            if not (self._allowed[i, m] and self._allowed[k, j]):
                continue
            if self._spare_f[m] == 0 if same_male else self._spare_m[k] == 0:
                pair = (i, m) if same_male else (k, j)
                cost = self._swap_cost(i, j, k, m, *own)
                found.append(Alternative(*pair, cost, swaps_with=(k, m)))
        return sorted(found, key=lambda each: each.cost)[:MOST_ALTERNATIVES]

    def _swap_cost(self, i: int, j: int, k: int, m: int, young: int, litters: int) -> float:
        per_young, per_litter = self._objective.per_young, self._objective.per_litter
        change = per_young[i, m] + per_young[k, j] - per_young[i, j] - per_young[k, m]
        travel = per_litter[i, m] + per_litter[k, j] - per_litter[i, j] - per_litter[k, m]
        return _tidy(young * change + litters * travel)

    def _replacing(self, i: int, j: int, males: IndexArray, females: IndexArray) -> FloatArray:
        """Change of J when the young of (i, j) come from each other pair instead."""
        young, litters = np.array(self._young[i, j]), np.array(self._litters[i, j])
        return self._change(np.array(i), np.array(j), males, females, young, litters)

    def _change(
        self,
        i: IndexArray,
        j: IndexArray,
        males: IndexArray,
        females: IndexArray,
        young: IndexArray,
        litters: IndexArray,
    ) -> FloatArray:
        """Change of J when young of pairs (i, j) come from pairs (males, females) instead."""
        objective = self._objective
        kin, g, first = objective.kinship, self._gradient, self._males
        d, f = first + j, first + females
        step = g[males] + g[f] - g[i] - g[d]
        inner = (
            (kin[males, males] + kin[f, f] + 2 * kin[males, f])
            + (kin[i, i] + kin[d, d] + 2 * kin[i, d])
            - 2 * (kin[males, i] + kin[males, d] + kin[f, i] + kin[f, d])
        )
        return np.asarray(
            young * (objective.per_young[males, females] - objective.per_young[i, j])
            + litters * (objective.per_litter[males, females] - objective.per_litter[i, j])
            + objective.quadratic * (2 * young * step + young**2 * inner)
        )

    def cost_of_including(self, row: int | None, column: int | None) -> Alternative | None:
        """The cheapest exchange that would bring an unpaired animal into the plan.

        It takes one partner's place in one pair; None when no pair permits it.
        """
        i, j, young, litters = self._pair_arrays
        males = i if row is None else np.full(len(i), row)
        females = j if column is None else np.full(len(j), column)
        spare = self._spare_m[males] if row is not None else self._spare_f[females]
        fits = self._allowed[males, females] & (spare >= litters)
        if row is not None:
            fits &= self._spare_young[males] >= young
        if not fits.any():
            return None
        costs = np.where(fits, self._change(i, j, males, females, young, litters), np.inf)
        best = int(np.argmin(costs))
        return Alternative(
            int(males[best]),
            int(females[best]),
            _tidy(costs[best]),
            swaps_with=(int(i[best]), int(j[best])),
        )

    @cached_property
    def _pair_arrays(self) -> tuple[IndexArray, IndexArray, IndexArray, IndexArray]:
        """Row, column, young and litters of every pair of the plan."""
        pairs = list(self._young)
        return (
            np.array([i for i, _j in pairs], dtype=np.int64),
            np.array([j for _i, j in pairs], dtype=np.int64),
            np.array([self._young[pair] for pair in pairs], dtype=np.int64),
            np.array([self._litters[pair] for pair in pairs], dtype=np.int64),
        )


def _tidy(cost: float) -> float:
    """A cost without the dust of rounding: what no sum could tell from nothing is nothing."""
    return 0.0 if abs(cost) < _DUST else float(cost)


def _cheapest(costs: FloatArray) -> list[int]:
    order = np.argsort(costs, kind="stable")[:MOST_ALTERNATIVES]
    return [int(each) for each in order if np.isfinite(costs[each])]


class Wording:
    """Sentences about the pairs of one plan."""

    def __init__(self, population: Population, candidates: Candidates, matings: Matings) -> None:
        self._population, self._matings = population, matings
        self._pedigree = population.pedigree
        self._above: dict[int, dict[int, int]] = {}
        self._decisions: dict[tuple[str, str], PairDecision] = {
            (each.sire, each.dam): each for each in candidates.pairs
        }
        self._rank = {}
        for sex, places in (("male", matings.males), ("female", matings.females)):
            order = np.argsort(population.mean_kinship[places], kind="stable")
            for rank, number in enumerate(order.tolist(), start=1):
                self._rank[int(places[number])] = (rank, len(places), sex)

    def reasons(self, male: int, female: int) -> list[str]:
        """Why a chosen pair is in the plan, in plain words."""
        sire, dam = int(self._matings.males[male]), int(self._matings.females[female])
        return [
            *self._decision(sire, dam),
            self._inbreeding(float(self._matings.inbreeding[male, female]), sire, dam),
            self._rarity(sire),
            self._rarity(dam),
            *self._place(sire, dam),
            *self._unknown(sire, dam),
        ]

    def _decision(self, sire: int, dam: int) -> list[str]:
        ids = self._pedigree.ids
        decision = self._decisions.get((ids[sire], ids[dam]))
        if decision is None:
            return []
        said = "A standing pair" if decision.decision == "together" else "They must breed"
        return [f"{said}: {decision.reason}." if decision.reason else f"{said} by the policy."]

    def _inbreeding(self, f: float, sire: int, dam: int) -> str:
        if f < 5e-5:
            shared = self.nearest_shared(sire, dam)
            if not shared:
                return "They share no ancestor in these records, so their young are not inbred."
        shared = self.nearest_shared(sire, dam)
        names = listed((self._pedigree.label(each) for each in shared), most=3)
        word = "ancestor is" if len(shared) == 1 else "ancestors are"
        return (
            f"Young would be inbred to {f:.4f}, {_related(f)}; the nearest shared {word} {names}."
        )

    def _rarity(self, place: int) -> str:
        rank, number, sex = self._rank[place]
        value = self._population.mean_kinship[place]
        unknown = 1 - self._population.known_ancestry[place]
        if unknown > _HALF:
            return (
                f"{self._pedigree.label(place)} may carry rare genes (mean kinship {value:.4f}), "
                f"but {unknown:.0%} of its ancestry is unknown: it may be related to others."
            )
        third = "rare" if rank <= number / 3 else "common" if rank > 2 * number / 3 else "middling"
        where = "lowest" if rank == 1 else f"number {rank} from the lowest"
        return (
            f"{self._pedigree.label(place)}'s genes are {third} in the population: mean kinship "
            f"{value:.4f}, {where} of {number} {sex}s."
        )

    def _place(self, sire: int, dam: int) -> list[str]:
        here = self._pedigree.fact(sire, "holder"), self._pedigree.fact(dam, "holder")
        return [f"Both are at {here[0]}: no transfer."] if here[0] and here[0] == here[1] else []

    def _unknown(self, sire: int, dam: int) -> list[str]:
        known = self._population.known_ancestry
        poor = [each for each in (sire, dam) if 1 - _HALF <= known[each] < _WELL_KNOWN]
        if not poor:
            return []
        parts = listed(
            f"{1 - known[each]:.0%} of {self._pedigree.label(each)}'s ancestry" for each in poor
        )
        return [f"{parts} is unknown, so the inbreeding shown is a lower bound."]

    def nearest_shared(self, first: int, second: int) -> list[int]:
        """Shared ancestors with the fewest steps to both, themselves included; by steps, id."""
        a, b = self._ancestors(first), self._ancestors(second)
        shared = sorted((a[each] + b[each], each) for each in a.keys() & b.keys())
        return [each for steps, each in shared if steps == shared[0][0]][:3]

    def _ancestors(self, place: int) -> dict[int, int]:
        """Every ancestor with its fewest steps, the animal itself at 0."""
        if place not in self._above:
            self._above[place] = fewest_steps(self._pedigree, place)
        return self._above[place]


def _related(f: float) -> str:
    words = same_as(f)
    return words if words.startswith(("as", "unrelated")) else f"{words} would give"


def fewest_steps(pedigree: Pedigree, place: int) -> dict[int, int]:
    """Ancestors of an animal with the fewest parent steps up to each; itself at 0."""
    steps = {place: 0}
    row = [place]
    while row:
        above = []
        for each in row:
            for parent in pedigree.parents_of(each):
                if parent not in steps:
                    steps[parent] = steps[each] + 1
                    above.append(parent)
        row = above
    return steps
