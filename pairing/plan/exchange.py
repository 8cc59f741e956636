"""Mending a plan litter by litter, and settling ties: small exchanges that keep every limit."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.plan.objective import Litter

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.plan.objective import Objective
    from pairing.plan.problem import LitterLimits

    FloatArray = npt.NDArray[np.float64]
    BoolArray = npt.NDArray[np.bool_]

SAME = 1e-13
"""Changes of J up to this are ties."""
_MOST_PASSES = 50


def improved(plan: list[Litter], limits: LitterLimits, objective: Objective) -> list[Litter]:
    """A plan that no single exchange makes better, ties settled.

    An exchange moves one litter to another permitted pair, or lets two litters of one size
    swap partners. Among plans of equal J, pairs at one holder come first, then lower ids.
    The result is never worse than `plan` and keeps the same limits.
    """
    state = _State(plan, limits, objective)
    for _pass in range(_MOST_PASSES):
        moved = [state.move(number) for number in range(len(plan))]
        if not any(moved) and not state.swap():
            break
    return sorted(state.plan(), key=lambda each: (each.male, each.female, -each.young))


class _State:
    """A plan under exchange, with the sums that make each exchange cheap to judge."""

    def __init__(self, plan: list[Litter], limits: LitterLimits, objective: Objective) -> None:
        self._limits, self._objective = limits, objective
        males, females = objective.per_young.shape
        self._males = males
        self._male = np.array([each.male for each in plan], dtype=np.int64)
        self._female = np.array([each.female for each in plan], dtype=np.int64)
        self._young = np.array([each.young for each in plan], dtype=np.int64)
        self._allowed = np.zeros((males, females), dtype=bool)
        self._allowed[limits.male, limits.female] = True
        self._least = np.zeros((males, females), dtype=np.int64)
        self._least[limits.male, limits.female] = limits.least_of_pairs
        self._apart = np.zeros((males, females), dtype=bool)
        self._apart[limits.male, limits.female] = limits.moves_needed
        self._used = np.zeros((males, females), dtype=np.int64)
        np.add.at(self._used, (self._male, self._female), 1)
        self._gradient = objective.kinship @ objective.contributions(plan)
        own = np.diagonal(objective.kinship)
        self._pair_square = (
            own[:males, None] + own[None, males:] + 2 * objective.kinship[:males, males:]
        )
        rank = np.arange(males)[:, None] + np.arange(females)[None, :]
        product = np.arange(males)[:, None] * np.arange(females)[None, :]
        self._tie = 1e6 * self._apart + rank - product / (males * females + 1)

    def plan(self) -> list[Litter]:
        return [
            Litter(int(male), int(female), int(young))
            for male, female, young in zip(self._male, self._female, self._young, strict=True)
        ]

    def _put(self, number: int, sign: int) -> None:
        """Take a litter out of the sums (-1) or put it back (+1)."""
        i, j, young = self._male[number], self._female[number], self._young[number]
        self._used[i, j] += sign
        kinship = self._objective.kinship
        self._gradient += sign * young * (kinship[i] + kinship[self._males + j])

    def move(self, number: int) -> bool:
        """Give one litter to the best permitted pair; whether anything changed."""
        i, j = int(self._male[number]), int(self._female[number])
        if self._used[i, j] <= self._least[i, j]:
            return False
        self._put(number, -1)
        young = int(self._young[number])
        open_pairs = self._open(i, j, young)
        cost = self._cost_of_adding(young)
        change = np.where(open_pairs, cost - cost[i, j], np.inf)
        choice = self._choose(change, self._tie - self._tie[i, j])
        if choice is not None:
            self._male[number], self._female[number] = choice
        self._put(number, 1)
        return choice is not None

    def _cost_of_adding(self, young: int) -> FloatArray:
        objective, g = self._objective, self._gradient
        linear = g[: self._males, None] + g[None, self._males :]
        square = 2 * young * linear + young**2 * self._pair_square
        return np.asarray(
            young * objective.per_young + objective.per_litter + objective.quadratic * square
        )

    def _open(self, i: int, j: int, young: int) -> BoolArray:
        """Pairs that may take a litter just taken from (i, j)."""
        limits = self._limits
        litters_m, litters_f = self._used.sum(axis=1), self._used.sum(axis=0)
        may_m = litters_m < limits.most_of_males
        may_f = litters_f < limits.most_of_females
        if limits.most_young_of_males is not None:
            born = np.zeros(self._males)
            np.add.at(born, self._male, self._young)
            born[i] -= young
            may_m &= born + young <= limits.most_young_of_males
        if litters_m[i] < limits.least_of_males[i]:
            may_m &= np.arange(len(may_m)) == i
        if litters_f[j] < limits.least_of_females[j]:
            may_f &= np.arange(len(may_f)) == j
        open_pairs: BoolArray = self._allowed & may_m[:, None] & may_f[None, :]
        if limits.most_moves is not None:
            moving = self._apart & (self._used > 0)
            if int(moving.sum()) >= limits.most_moves:
                open_pairs &= ~self._apart | moving
        return open_pairs

    def _choose(self, change: FloatArray, tie: FloatArray) -> tuple[int, ...] | None:
        """Place of the best exchange: lower J, else equal J and a better tie."""
        if change.size == 0:
            return None
        best = int(np.argmin(change))
        if change.flat[best] >= -SAME:
            equal = np.where(change <= SAME, tie, np.inf)
            best = int(np.argmin(equal))
            if equal.flat[best] >= -1e-9:
                return None
        return tuple(int(each) for each in np.unravel_index(best, change.shape))

    def swap(self) -> bool:
        """Swap partners of two litters while that helps; whether anything changed."""
        changed = False
        for _number in range(20 * len(self._male)):
            choice = self._best_swap()
            if choice is None:
                return changed
            a, b = choice
            self._used[self._male[a], self._female[a]] -= 1
            self._used[self._male[b], self._female[b]] -= 1
            self._female[a], self._female[b] = self._female[b], self._female[a]
            self._used[self._male[a], self._female[a]] += 1
            self._used[self._male[b], self._female[b]] += 1
            changed = True
        return changed

    def _best_swap(self) -> tuple[int, ...] | None:
        i, j, young = self._male, self._female, self._young
        if len(i) < 2:
            return None
        cost = young[:, None] * self._objective.per_young[i][:, j]
        cost = cost + self._objective.per_litter[i][:, j]
        own = np.diagonal(cost)
        change = cost + cost.T - own[:, None] - own[None, :]
        tie_of = self._tie[i][:, j]
        tie = tie_of + tie_of.T - np.diagonal(tie_of)[:, None] - np.diagonal(tie_of)[None, :]
        fits = self._allowed[i][:, j]
        removable = self._used[i, j] > self._least[i, j]
        fits = fits & fits.T & (young[:, None] == young[None, :])
        fits &= removable[:, None] & removable[None, :]
        fits &= (i[:, None] != i[None, :]) & (j[:, None] != j[None, :])
        if self._limits.most_moves is not None:
            apart = self._apart[i][:, j].astype(int)
            used = self._used[i][:, j]
            gains = apart * (used == 0)
            loses = np.diagonal(apart * (used == 1))
            more = gains + gains.T - loses[:, None] - loses[None, :]
            moving = int((self._apart & (self._used > 0)).sum())
            fits &= moving + more <= self._limits.most_moves
        return self._choose(np.where(fits, change, np.inf), tie)
