"""The plan as numbers: allowed pairs, limits on them, costs. What the solver sees."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.plan.candidates import NO_LIMIT

if TYPE_CHECKING:
    from collections.abc import Mapping

    import numpy.typing as npt

    from pairing.plan.candidates import Candidates
    from pairing.plan.matings import Matings
    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population

    FloatArray = npt.NDArray[np.float64]
    BoolArray = npt.NDArray[np.bool_]
    CountArray = npt.NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Season:
    """How the wanted young come in litters: all of one size, and one smaller for a remainder."""

    young: int
    litter_size: int

    @property
    def full_litters(self) -> int:
        """Litters of the full size."""
        return self.young // self.litter_size

    @property
    def remainder(self) -> int:
        """Young of the one smaller litter, 0 when there is none."""
        return self.young % self.litter_size

    @property
    def litters(self) -> int:
        """All litters."""
        return self.full_litters + (1 if self.remainder else 0)


@dataclass(frozen=True, slots=True)
class LitterLimits:
    """Limits a set of litters must keep to, over m males, f females and the P allowed pairs.

    Attributes
    ----------
    male, female
        Row and column of each allowed pair, shape (P,), sorted.
    most_of_males, most_of_females
        Litters each may have, shapes (m,) and (f,).
    least_of_males, least_of_females
        Litters each must have at least.
    least_of_pairs
        Litters a pair must have at least, shape (P,).
    most_young_of_males
        Young of one male at most, or None.
    moves_needed
        Whether a pair needs a transfer, shape (P,).
    most_moves
        Transfers at most, or None.
    impossible
        Whether a pair that must breed is barred, so that no plan meets the limits.
    """

    male: CountArray
    female: CountArray
    most_of_males: CountArray
    most_of_females: CountArray
    least_of_males: CountArray
    least_of_females: CountArray
    least_of_pairs: CountArray
    most_young_of_males: int | None
    moves_needed: BoolArray
    most_moves: int | None
    impossible: bool = False

    @property
    def pairs(self) -> int:
        """Number of allowed pairs."""
        return len(self.male)

    def most_of_pairs(self, litters: int) -> CountArray:
        """Litters each pair could have if the season had `litters`."""
        most = np.minimum(self.most_of_males[self.male], self.most_of_females[self.female])
        return np.minimum(most, litters)


def litter_limits(
    population: Population,
    candidates: Candidates,
    matings: Matings,
    policy: Policy,
    *,
    young: int,
    lifted: frozenset[str] = frozenset(),
) -> LitterLimits:
    """The limits of a season, without those named in `lifted` (names of `plan.clash.LIMITS`)."""
    male, female = (each.astype(np.int64) for each in np.nonzero(matings.allowed_without(lifted)))
    pedigree = population.pedigree
    rows = {place: number for number, place in enumerate(matings.males.tolist())}
    columns = {place: number for number, place in enumerate(matings.females.tolist())}
    least_m = np.zeros(len(rows), dtype=np.int64)
    least_f = np.zeros(len(columns), dtype=np.int64)
    least_p = np.zeros(len(male), dtype=np.int64)
    impossible = False
    if "must_breed" not in lifted:
        for place in candidates.must_breed:
            if place in rows:
                least_m[rows[place]] = 1
            elif place in columns:
                least_f[columns[place]] = 1
            else:
                impossible = True
        for each in candidates.pairs:
            if each.decision == "must-breed":
                sire, dam = pedigree.place(each.sire, each.dam)
                here = (male == rows.get(sire, -1)) & (female == columns.get(dam, -1))
                least_p[here] = 1
                impossible = impossible or not here.any()
    share = None if "share_per_male" in lifted else policy.limits.share_per_male
    moves = None if "moves" in lifted else policy.limits.moves
    by_male = None if "litters_per_male" in lifted else policy.litters_per_male
    by_female = None if "litters_per_female" in lifted else policy.limits.litters_per_female
    decided = {} if "at_most" in lifted else candidates.decided_most
    return LitterLimits(
        male=male,
        female=female,
        most_of_males=_most(matings.males, by_male, decided),
        most_of_females=_most(matings.females, by_female, decided),
        least_of_males=least_m,
        least_of_females=least_f,
        least_of_pairs=least_p,
        most_young_of_males=None if share is None else int(share * young + 1e-9),
        moves_needed=needs_move(population, candidates, matings)[male, female],
        most_moves=moves,
        impossible=impossible,
    )


def _most(places: CountArray, usual: int | None, decided: Mapping[int, int]) -> CountArray:
    """Litters of each animal at most: the usual number or its own, whichever is less."""
    limit = NO_LIMIT if usual is None else usual
    return np.array(
        [min(limit, decided.get(place, NO_LIMIT)) for place in places.tolist()], dtype=np.int64
    )


def needs_move(population: Population, candidates: Candidates, matings: Matings) -> BoolArray:
    """Whether a pair lives at two recorded holders, so that one of the two must move.

    Stored semen needs no animal to move.
    """
    pedigree = population.pedigree
    holders = [
        np.array([pedigree.fact(place, "holder") for place in places.tolist()], dtype=object)
        for places in (matings.males, matings.females)
    ]
    male, female = holders[0][:, None], holders[1][None, :]
    apart: BoolArray = np.asarray((male != female) & (male != "") & (female != ""), dtype=bool)
    apart[np.isin(matings.males, list(candidates.by_semen))] = False
    return apart
