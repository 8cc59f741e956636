"""What a chosen pair could have been instead, and what that would cost."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.plan.objective import Litter, Objective
    from pairing.plan.problem import LitterLimits

    FloatArray = npt.NDArray[np.float64]
    BoolArray = npt.NDArray[np.bool_]
    IndexArray = npt.NDArray[np.int64]

MOST_ALTERNATIVES = 3
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
    """Costs of changing one pair of a plan, all else kept; every exchange keeps the limits."""

    def __init__(self, plan: list[Litter], limits: LitterLimits, objective: Objective) -> None:
        self._objective, self._limits = objective, limits
        males, females = objective.per_young.shape
        self._males = males
        self._allowed, self._apart, self._must = (
            np.zeros((males, females), dtype=bool) for _each in range(3)
        )
        self._allowed[limits.male, limits.female] = True
        self._apart[limits.male, limits.female] = limits.moves_needed
        self._must[limits.male, limits.female] = limits.least_of_pairs > 0
        self._young = Counter[tuple[int, int]]()
        self._litters = Counter[tuple[int, int]]()
        self._used = np.zeros((males, females), dtype=np.int64)
        born = np.zeros(males)
        for each in plan:
            self._young[each.male, each.female] += each.young
            self._litters[each.male, each.female] += 1
            self._used[each.male, each.female] += 1
            born[each.male] += each.young
        used_m, used_f = self._used.sum(axis=1), self._used.sum(axis=0)
        self._spare_m, self._over_m = limits.most_of_males - used_m, used_m - limits.least_of_males
        self._spare_f = limits.most_of_females - used_f
        self._over_f = used_f - limits.least_of_females
        self._moving = int((self._apart & (self._used > 0)).sum())
        self._gradient = objective.kinship @ objective.contributions(plan)
        most = limits.most_young_of_males
        self._spare_young = np.full(males, np.inf) if most is None else most - born

    def alternatives(self, male: int, female: int) -> list[Alternative]:
        """The cheapest other matings in the place of a chosen pair, cheapest first.

        A partner that is free replaces directly; one that is taken comes in exchange for
        the pair's own partner.
        """
        males, females = self._allowed.shape
        others = np.arange(females), np.arange(males)
        found = [
            *self._replacements(male, female, np.full(females, male), others[0]),
            *self._replacements(male, female, others[1], np.full(males, female)),
            *self._swaps(male, female),
        ]
        found.sort(key=lambda each: (round(each.cost, 12), each.male, each.female))
        first = {(each.male, each.female): each for each in reversed(found)}
        return [each for each in found if first[each.male, each.female] is each][:MOST_ALTERNATIVES]

    def _replacements(
        self, i: int, j: int, males: IndexArray, females: IndexArray
    ) -> list[Alternative]:
        pair = np.array(i), np.array(j)
        amount = np.array(self._young[i, j]), np.array(self._litters[i, j])
        fits = self._fits(*pair, males, females, *amount)
        costs = np.where(fits, self._change(*pair, males, females, *amount), np.inf)
        order = np.argsort(costs, kind="stable")[:MOST_ALTERNATIVES]
        return [
            Alternative(int(males[each]), int(females[each]), _tidy(costs[each]))
            for each in order.tolist()
            if np.isfinite(costs[each])
        ]

    def _fits(
        self,
        i: IndexArray,
        j: IndexArray,
        males: IndexArray,
        females: IndexArray,
        young: IndexArray,
        litters: IndexArray,
    ) -> BoolArray:
        """Whether all young of pairs (i, j) may come from pairs (males, females) instead."""
        new_male, new_female = males != i, females != j
        fits = self._allowed[males, females] & (new_male | new_female) & ~self._must[i, j]
        room = (self._spare_m[males] >= litters) & (self._spare_young[males] >= young)
        fits &= ~new_male | (room & (self._over_m[i] >= litters))
        room = (self._spare_f[females] >= litters) & (self._over_f[j] >= litters)
        fits &= ~new_female | room
        if self._limits.most_moves is not None:
            more = self._apart[males, females] & (self._used[males, females] == 0)
            fits &= self._moving - self._apart[i, j] + more <= self._limits.most_moves
        return np.asarray(fits)

    def _swaps(self, i: int, j: int) -> list[Alternative]:
        """Exchanges of partners with another pair of as many young."""
        own = self._young[i, j], self._litters[i, j]
        found = []
        for (k, m), young in self._young.items():
            if k == i or m == j or (young, self._litters[k, m]) != own:
                continue
            if not self._may_swap(i, j, k, m):
                continue
            cost = self._swap_cost(i, j, k, m, *own)
            found += [Alternative(*pair, cost, swaps_with=(k, m)) for pair in ((i, m), (k, j))]
        found.sort(key=lambda each: each.cost)
        return found[: 2 * MOST_ALTERNATIVES]

    def _may_swap(self, i: int, j: int, k: int, m: int) -> bool:
        if not (self._allowed[i, m] and self._allowed[k, j]):
            return False
        if self._must[i, j] or self._must[k, m]:
            return False
        if self._limits.most_moves is None:
            return True
        new = [(i, m), (k, j)]
        more = sum(bool(self._apart[pair]) and self._used[pair] == 0 for pair in new)
        less = int(self._apart[i, j]) + int(self._apart[k, m])
        return bool(self._moving - less + more <= self._limits.most_moves)

    def _swap_cost(self, i: int, j: int, k: int, m: int, young: int, litters: int) -> float:
        per_young, per_litter = self._objective.per_young, self._objective.per_litter
        change = per_young[i, m] + per_young[k, j] - per_young[i, j] - per_young[k, m]
        travel = per_litter[i, m] + per_litter[k, j] - per_litter[i, j] - per_litter[k, m]
        return _tidy(young * change + litters * travel)

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
        fits = self._fits(i, j, males, females, young, litters)
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
