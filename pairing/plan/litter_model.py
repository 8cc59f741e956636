"""The limits of a season as a linear programme over litters, solved by HiGHS."""

from __future__ import annotations

import threading
from dataclasses import dataclass
from typing import TYPE_CHECKING

import highspy
import numpy as np

from pairing.plan.objective import Litter
from pairing.plan.problem import Season

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.plan.problem import LitterLimits

    FloatArray = npt.NDArray[np.float64]
    Places = npt.NDArray[np.intp]

Options = dict[str, bool | int | float | str]

INFINITY = highspy.kHighsInf
HAS_SOLUTION = 2
"""The solver's code for "there is an answer within the limits"."""
PROVED = 1e-9
"""Objective and bound closer than this are equal: the plan is proved best."""
_SCALED_COST = 100.0
_LISTEN_SECONDS = 0.1


class Rows:
    """Rows of a programme being gathered: bounds, columns, coefficients."""

    def __init__(self) -> None:
        self.lower: list[float] = []
        self.upper: list[float] = []
        self.columns: list[npt.NDArray[np.int32]] = []
        self.values: list[FloatArray] = []

    def add(
        self, lower: float, upper: float, columns: Places, values: FloatArray | None = None
    ) -> None:
        """One row: lower <= sum of values * columns <= upper; values are 1 by default."""
        self.lower.append(float(lower))
        self.upper.append(float(upper))
        self.columns.append(columns.astype(np.int32))
        self.values.append(np.ones(len(columns)) if values is None else values)


class LitterModel:
    """Which sets of litters the limits allow.

    Columns: litters of the full size a pair; then, with a remainder, whether the pair has the
    smaller litter; then whether a pair that may have several litters moves; then the young of
    each candidate, males first.

    Parameters
    ----------
    exactly
        Whether the season's number of litters must be reached; otherwise it is the most.
    """

    def __init__(self, limits: LitterLimits, season: Season, *, exactly: bool = True) -> None:
        self.limits, self.season, self._exactly = limits, season, exactly
        self.pairs = limits.pairs
        self.most = limits.most_of_pairs(season.litters)
        several = limits.moves_needed & (self.most > 1)
        self._movers = np.flatnonzero(several) if limits.most_moves is not None else several[:0]
        self.males = len(limits.most_of_males)
        self.candidates = self.males + len(limits.most_of_females)
        self.first_small = self.pairs
        self.first_mover = self.first_small + (self.pairs if season.remainder else 0)
        self.first_count = self.first_mover + len(self._movers)
        self.litter_columns = self.first_count + self.candidates
        by_male, by_female = (
            [np.flatnonzero(member == each) for each in range(number)]
            for member, number in (
                (limits.male, self.males),
                (limits.female, self.candidates - self.males),
            )
        )
        self._pairs_of = [*by_male, *by_female]

    def litters_of(self, pairs: Places) -> Places:
        """The columns that count litters of some pairs."""
        return np.concatenate([pairs, pairs + self.first_small]) if self.season.remainder else pairs

    def costs(self, per_young: FloatArray, per_litter: FloatArray | None = None) -> FloatArray:
        """Costs of the litter columns from costs of shape (m, f)."""
        young = per_young[self.limits.male, self.limits.female]
        litter = 0.0 if per_litter is None else per_litter[self.limits.male, self.limits.female]
        costs = np.zeros(self.litter_columns)
        costs[: self.pairs] = self.season.litter_size * young + litter
        if self.season.remainder:
            costs[self.first_small : self.first_mover] = self.season.remainder * young + litter
        return costs

    def bounds(self) -> tuple[FloatArray, FloatArray]:
        """Least and most of each litter column."""
        upper = np.full(self.litter_columns, INFINITY)
        upper[: self.pairs] = self.most
        upper[self.first_small : self.first_count] = 1.0
        if self.limits.most_young_of_males is not None:
            upper[self.first_count : self.first_count + self.males] = (
                self.limits.most_young_of_males
            )
        return np.zeros(self.litter_columns), upper

    def rows(self) -> Rows:
        """The limits as rows over the litter columns."""
        rows = Rows()
        limits, season = self.limits, self.season
        every = np.arange(self.pairs)
        rows.add(season.full_litters if self._exactly else 0, season.full_litters, every)
        if season.remainder:
            rows.add(1 if self._exactly else 0, 1, every + self.first_small)
        least = np.concatenate([limits.least_of_males, limits.least_of_females])
        most = np.concatenate([limits.most_of_males, limits.most_of_females])
        for each, mine in enumerate(self._pairs_of):
            if least[each] or most[each] < season.litters:
                rows.add(least[each], most[each], self.litters_of(mine))
        for pair in every if season.remainder else np.flatnonzero(limits.least_of_pairs):
            rows.add(
                limits.least_of_pairs[pair], self.most[pair], self.litters_of(np.array([pair]))
            )
        self._move_rows(rows)
        for each, mine in enumerate(self._pairs_of):
            young = [np.full(len(mine), float(season.litter_size))]
            if season.remainder:
                young.append(np.full(len(mine), float(season.remainder)))
            rows.add(
                0,
                0,
                np.append(self.litters_of(mine), self.first_count + each),
                np.append(np.concatenate(young), -1.0),
            )
        return rows

    def _move_rows(self, rows: Rows) -> None:
        most_moves = self.limits.most_moves
        if most_moves is None:
            return
        single = np.flatnonzero(self.limits.moves_needed & (self.most <= 1))
        flags = np.arange(len(self._movers)) + self.first_mover
        rows.add(0, most_moves, np.concatenate([self.litters_of(single), flags]))
        for pair, flag in zip(self._movers.tolist(), flags.tolist(), strict=True):
            own = self.litters_of(np.array([pair]))
            rows.add(
                -INFINITY,
                0,
                np.append(own, flag),
                np.append(np.ones(len(own)), -float(self.most[pair])),
            )

    def litters(self, values: FloatArray) -> list[Litter]:
        """The litters of an answer, sorted, in whole numbers."""
        sizes = [(0, self.season.litter_size)]
        if self.season.remainder:
            sizes.append((self.first_small, self.season.remainder))
        plan = []
        for first, young in sizes:
            number = np.rint(values[first : first + self.pairs]).astype(int)
            for pair in np.flatnonzero(number).tolist():
                litter = Litter(int(self.limits.male[pair]), int(self.limits.female[pair]), young)
                plan += [litter] * int(number[pair])
        return sorted(plan, key=lambda each: (each.male, each.female, -each.young))

    def whole_columns(self) -> npt.NDArray[np.int32]:
        """The columns that take whole numbers."""
        return np.arange(self.first_count, dtype=np.int32)


class _QuietSolver(highspy.Highs):
    """HiGHS without its banner, which would stand in the middle of a machine-readable answer.

    Its constructor turns callbacks on, which prints before any option can be set; we use
    none, so only the parent's constructor runs.
    """

    def __init__(self) -> None:
        super(highspy.Highs, self).__init__()


def load(
    costs: FloatArray,
    bounds: tuple[FloatArray, FloatArray],
    rows: Rows,
    options: Options | None = None,
) -> highspy.Highs:
    """A quiet, single-threaded, seeded solver holding a programme."""
    solver = _QuietSolver()
    quiet: dict[str, bool | int | float | str] = {
        "output_flag": False,
        "threads": 1,
        "random_seed": 0,
    }
    for option, value in {**quiet, **(options or {})}.items():
        solver.setOptionValue(option, value)
    lp = highspy.HighsLp()
    lp.num_col_, lp.num_row_ = len(costs), len(rows.lower)
    lp.col_cost_ = costs
    lp.col_lower_, lp.col_upper_ = bounds
    lp.row_lower_, lp.row_upper_ = np.array(rows.lower), np.array(rows.upper)
    lp.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
    lp.a_matrix_.start_ = np.cumsum([0, *(len(each) for each in rows.columns)])
    lp.a_matrix_.index_ = np.concatenate(rows.columns)
    lp.a_matrix_.value_ = np.concatenate(rows.values)
    solver.passModel(lp)
    return solver


def make_whole(solver: highspy.Highs, columns: npt.NDArray[np.int32]) -> None:
    """Let columns take whole numbers only, from now on."""
    kinds = np.full(len(columns), highspy.HighsVarType.kInteger)
    solver.changeColsIntegrality(len(columns), columns, kinds)


def infeasible(solver: highspy.Highs) -> bool:
    """Whether the last run proved that nothing meets the limits."""
    return solver.getModelStatus() in (
        highspy.HighsModelStatus.kInfeasible,
        highspy.HighsModelStatus.kUnboundedOrInfeasible,
    )


def run(solver: highspy.Highs) -> None:
    """Solve, leaving the main thread free to hear Ctrl-C."""
    worker = threading.Thread(target=solver.run, daemon=True)
    worker.start()
    while worker.is_alive():
        worker.join(_LISTEN_SECONDS)


@dataclass(frozen=True, slots=True)
class LinearPlan:
    """Litters of least summed cost; `bound` is a proven lower bound of that cost."""

    litters: list[Litter]
    bound: float


def best_litters(
    limits: LitterLimits,
    season: Season,
    per_young: FloatArray,
    per_litter: FloatArray | None = None,
    *,
    exactly: bool = True,
) -> LinearPlan | None:
    """Litters within the limits that cost least when costs simply add up; None when none do.

    Parameters
    ----------
    per_young, per_litter
        Cost of a young and of a litter of each mating, shape (m, f).
    exactly
        Whether the season's number of litters must be reached.
    """
    if limits.impossible:
        return None
    if limits.pairs == 0 or season.litters == 0:
        return LinearPlan([], 0.0) if season.litters == 0 or not exactly else None
    model = LitterModel(limits, season, exactly=exactly)
    costs = model.costs(per_young, per_litter)
    # Every plan has the same number of litters of each size, so a common part of their costs
    # changes nothing; without it the solver's tolerances meet the differences that count.
    common = _common_part(costs, model) if exactly else np.zeros_like(costs)
    spread = float(np.abs(costs - common).max())
    scale = _SCALED_COST / spread if spread > 0 else 1.0
    solver = load((costs - common) * scale, model.bounds(), model.rows(), exact_options(scale))
    make_whole(solver, model.whole_columns())
    run(solver)
    info = solver.getInfo()
    if infeasible(solver) or info.primal_solution_status != HAS_SOLUTION:
        return None
    litters = model.litters(np.asarray(solver.getSolution().col_value))
    shared = season.full_litters * common[0]
    if season.remainder:
        shared += common[model.first_small]
    return LinearPlan(litters, float(info.mip_dual_bound / scale + shared))


def _common_part(costs: FloatArray, model: LitterModel) -> FloatArray:
    """The least cost of a full litter, and of the smaller one, in their columns."""
    common = np.zeros_like(costs)
    common[: model.pairs] = costs[: model.pairs].min()
    if model.season.remainder:
        small = slice(model.first_small, model.first_mover)
        common[small] = costs[small].min()
    return common


def exact_options(scale: float) -> Options:
    """Tolerances under which a bound can be claimed, for costs multiplied by `scale`."""
    return {
        "mip_rel_gap": 0.0,
        "mip_abs_gap": PROVED * scale / 10,
        "primal_feasibility_tolerance": 1e-9,
        "dual_feasibility_tolerance": 1e-9,
        "mip_feasibility_tolerance": 1e-9,
    }


def most_litters(limits: LitterLimits, season: Season) -> int:
    """The most litters the limits allow, up to the season's number."""
    gain = np.full((len(limits.most_of_males), len(limits.most_of_females)), -1.0)
    full = Season(young=season.litters * season.litter_size, litter_size=season.litter_size)
    found = best_litters(limits, full, gain, exactly=False)
    return 0 if found is None else len(found.litters)
