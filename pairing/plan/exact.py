"""The best plan with its proof: a mixed-integer programme whose convex part is cut as needed.

No free solver takes integers and a quadratic form together, so the form enters as squares
(`plan.squares`), each bounded from below by straight cuts that are added where the last
answer lay below the true value (KELLEY_1960). The relaxed problem is cut first, which is
cheap, then the problem in whole litters. Every answer is a plan within the limits, and every
solve gives a proven lower bound of the objective; when they meet, the plan is proved best.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import highspy
import numpy as np

from pairing.plan.exchange import improved
from pairing.plan.litter_model import (
    HAS_SOLUTION,
    INFINITY,
    PROVED,
    LitterModel,
    best_litters,
    exact_options,
    infeasible,
    load,
    make_whole,
    run,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    import numpy.typing as npt

    from pairing.plan.objective import Litter, Objective
    from pairing.plan.problem import LitterLimits, Season
    from pairing.plan.squares import Squares

    FloatArray = npt.NDArray[np.float64]

LARGEST_SEARCH = 10_000_000
"""Permitted pairs times squares up to which the search in whole litters ends in seconds.

Beyond, the plan comes from the relaxed answer by rounding and exchange; its distance from
the best is still proved.
"""
LONGEST_SEARCH = 120.0
"""Seconds after which the search in whole litters gives up, so that no call hangs."""
_MOST_RELAXED_ROUNDS = 60
_MOST_WHOLE_ROUNDS = 40
_NODES_TIMES_PAIRS = 10_000_000


@dataclass(frozen=True, slots=True)
class Solution:
    """The best plan found and what is proved about it.

    Attributes
    ----------
    litters
        The litters, by row and column of the mating; None when no plan meets the limits.
    objective
        J of the plan.
    bound
        A proven lower bound of J over all plans within the limits.
    out_of_time
        Whether a clock stopped the search, so that another run may end with another plan.
    """

    litters: tuple[Litter, ...] | None
    objective: float
    bound: float
    out_of_time: bool = False

    @property
    def proved_best(self) -> bool:
        """Whether no plan within the limits can be better."""
        return self.litters is not None and self.objective - self.bound <= PROVED


def solve(
    limits: LitterLimits,
    season: Season,
    objective: Objective,
    squares: Squares,
    *,
    within: float | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> Solution:
    """The best set of litters within the limits, and a proven bound.

    Parameters
    ----------
    within
        Seconds after which the search in whole litters stops with what it has; the answer
        is then not reproducible.
    progress
        Called with the round and the most rounds.
    """
    nothing = Solution(None, INFINITY, INFINITY)
    if limits.impossible or limits.pairs == 0:
        return nothing
    simplest = best_litters(limits, season, objective.per_young, objective.per_litter)
    if simplest is None:
        return nothing
    least = objective.constant + simplest.bound
    if objective.quadratic == 0:
        best = improved(simplest.litters, limits, objective)
        return Solution(tuple(best), objective.value(best), min(least, objective.value(best)))
    search = _Search(limits, season, objective, squares, progress)
    search.bound = least
    relaxed = search.relax()
    if relaxed is None:
        return nothing
    wish = np.zeros_like(objective.per_young)
    wish[limits.male, limits.female] = -relaxed[: limits.pairs]
    rounded = best_litters(limits, season, wish)
    if rounded is None:
        return nothing
    search.consider(improved(rounded.litters, limits, objective))
    size = limits.pairs * len(squares.weight)
    searched = size <= LARGEST_SEARCH or within is not None
    if searched and search.least - search.bound > PROVED:
        search.in_whole_litters(LONGEST_SEARCH if within is None else within)
    best = improved(search.best, limits, objective)
    value = objective.value(best)
    return Solution(tuple(best), value, min(search.bound, value), search.out_of_time)


class _Search:
    """One search: the programme in the solver, the best plan so far, and the bound.

    The columns of `LitterModel` are followed by q and then z of each square.
    """

    def __init__(
        self,
        limits: LitterLimits,
        season: Season,
        objective: Objective,
        squares: Squares,
        progress: Callable[[int, int], None] | None,
    ) -> None:
        self.litters = LitterModel(limits, season)
        self.objective, self.squares = objective, squares
        self.best: list[Litter] = []
        self.least = INFINITY
        self.bound = -INFINITY
        self.out_of_time = False
        self._progress, self._round = progress, 0
        self._weight = objective.quadratic * squares.weight
        number = len(squares.weight)
        self._first_q = self.litters.litter_columns
        self._first_z = self._first_q + number
        costs = np.concatenate(
            [
                self.litters.costs(objective.per_young, objective.per_litter),
                np.zeros(number),
                self._weight,
            ]
        )
        self._scale = 100.0 / max(float(np.abs(costs).max()), 1e-12)
        lower, upper = self.litters.bounds()
        lower = np.append(lower, np.zeros(2 * number))
        upper = np.append(upper, np.full(2 * number, INFINITY))
        rows = self.litters.rows()
        for each, share in enumerate(squares.share):
            mine = np.flatnonzero(share)
            rows.add(
                0,
                0,
                np.append(mine + self.litters.first_count, self._first_q + each),
                np.append(share[mine], -1.0),
            )
        self._solver = load(
            costs * self._scale,
            (lower, upper),
            rows,
            {
                **exact_options(self._scale),
                "mip_max_nodes": max(100, _NODES_TIMES_PAIRS // limits.pairs),
            },
        )

    def _tell(self) -> None:
        if self._progress is not None:
            self._progress(self._round, _MOST_RELAXED_ROUNDS + _MOST_WHOLE_ROUNDS)
        self._round += 1

    def _values(self) -> FloatArray:
        return np.asarray(self._solver.getSolution().col_value)

    def relax(self) -> FloatArray | None:
        """Cut the relaxed problem until it is tight; its answer, or None when none exists."""
        values = np.zeros(self._first_z + len(self._weight))
        for _number in range(_MOST_RELAXED_ROUNDS):
            self._tell()
            run(self._solver)
            if infeasible(self._solver):
                return None
            if self._solver.getModelStatus() != highspy.HighsModelStatus.kOptimal:
                break
            values = self._values()
            value = self._solver.getInfo().objective_function_value
            self.bound = max(self.bound, self.objective.constant + value / self._scale)
            if not self._cut(values, tolerance=PROVED / 10):
                break
        return values

    def consider(self, found: list[Litter]) -> None:
        """Keep a plan if it is the best so far."""
        value = self.objective.value(found)
        if value < self.least - 1e-15:
            self.best, self.least = found, value

    def in_whole_litters(self, within: float) -> None:
        """Search in whole litters until the bound meets the best plan or a limit stops it.

        `within` is a limit in seconds.
        """
        solver = self._solver
        make_whole(solver, self.litters.whole_columns())
        solver.setOptionValue("time_limit", solver.getRunTime() + within)
        for _number in range(_MOST_WHOLE_ROUNDS):
            self._tell()
            run(solver)
            info = solver.getInfo()
            if infeasible(solver) or not np.isfinite(info.mip_dual_bound):
                break
            proved = self.objective.constant + info.mip_dual_bound / self._scale
            self.bound = max(self.bound, proved)
            values = self._values()
            if info.primal_solution_status == HAS_SOLUTION:
                self.consider(self.litters.litters(values))
            status = solver.getModelStatus()
            self.out_of_time = status == highspy.HighsModelStatus.kTimeLimit
            stopped = status != highspy.HighsModelStatus.kOptimal
            if self.least - self.bound <= PROVED or stopped:
                break
            if not self._cut(values, tolerance=1e-13):
                break

    def _cut(self, values: FloatArray, *, tolerance: float) -> int:
        """Add a cut for every square whose z lies too low at `values`; how many there are."""
        q = values[self._first_q : self._first_z]
        z = values[self._first_z :]
        low = self._weight * (_least_square(q, self.squares.whole) - z) > tolerance
        for number in np.flatnonzero(low):
            slope, offset = _cut_at(q[number], whole=bool(self.squares.whole[number]))
            self._solver.addRow(
                -offset,
                INFINITY,
                2,
                np.array([self._first_q + number, self._first_z + number], dtype=np.int32),
                np.array([-slope, 1.0]),
            )
        return int(low.sum())


def _least_square(q: FloatArray, whole: npt.NDArray[np.bool_]) -> FloatArray:
    """The least that z may be at q: q squared, or the chord between whole neighbours."""
    k = np.floor(q + 1e-9)
    return np.where(whole, (2 * k + 1) * q - k * (k + 1), q * q)


def _cut_at(q: float, *, whole: bool) -> tuple[float, float]:
    """Slope a and offset b of a cut z >= a q - b that touches q squared at or around q."""
    if not whole:
        return 2 * q, q * q
    k = float(np.floor(q + 1e-9))
    return 2 * k + 1, k * (k + 1)
