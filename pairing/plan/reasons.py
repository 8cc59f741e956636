"""Why each pair was chosen, in sentences."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.kinship.named import same_as
from pairing.spelling import listed

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.pedigree.descent import Pedigree
    from pairing.plan.candidates import Candidates
    from pairing.plan.matings import Matings
    from pairing.policy.rules import PairDecision
    from pairing.population.diversity import Population

    FloatArray = npt.NDArray[np.float64]
    IndexArray = npt.NDArray[np.int64]

_WELL_KNOWN = 0.995
_HALF = 0.5
_FEW = 6
"""With fewer candidates of a sex, ranks say little."""


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
        if number < _FEW:
            return f"{self._pedigree.label(place)} has a mean kinship of {value:.4f}."
        shown = f"mean kinship {value:.4f}"
        whose = f"{self._pedigree.label(place)}'s genes are"
        if rank == 1:
            return f"{whose} the rarest of all {number} {sex}s that may breed ({shown})."
        if rank == number:
            return f"{whose} the most common of all {number} {sex}s that may breed ({shown})."
        return (
            f"{whose} rarer than those of {number - rank} of the other {number - 1} {sex}s that "
            f"may breed ({shown})."
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
