"""The chosen pairs of a plan, each with its figures, reasons and second choices."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.plan.matings import gene_diversity_gain
from pairing.plan.reasons import Wording

if TYPE_CHECKING:
    from pairing.plan.alternatives import Exchanges
    from pairing.plan.candidates import Candidates
    from pairing.plan.matings import Matings
    from pairing.plan.objective import Litter
    from pairing.population.diversity import Population

SHOWN_DECIMALS = 4
"""Differences below what is shown do not decide an order."""


@dataclass(frozen=True, slots=True)
class PartnerChoice:
    """Another mating in a pair's place, by places in the pedigree; `cost` is added to J."""

    sire: int
    dam: int
    offspring_inbreeding: float
    cost: float
    swaps_with: tuple[int, int] | None


@dataclass(frozen=True, slots=True)
class PlannedPair:
    """One pair of the plan; `sire` and `dam` are places in the pedigree."""

    rank: int
    sire: int
    dam: int
    young: int
    litters: int
    offspring_inbreeding: float
    gene_diversity_gain: float
    same_holder: bool | None
    move_km: float | None
    reasons: tuple[str, ...]
    alternatives: tuple[PartnerChoice, ...]


def planned_pairs(
    population: Population,
    candidates: Candidates,
    matings: Matings,
    litters: list[Litter],
    exchanges: Exchanges,
) -> tuple[PlannedPair, ...]:
    """The pairs of a plan, explained, the one that adds most gene diversity first."""
    wording = Wording(population, candidates, matings)
    young: dict[tuple[int, int], list[int]] = {}
    for each in litters:
        young.setdefault((each.male, each.female), []).append(each.young)
    found = []
    for (i, j), sizes in young.items():
        sire, dam = int(matings.males[i]), int(matings.females[j])
        gain = gene_diversity_gain(population, np.array([sire]), np.array([dam]), young=sum(sizes))[
            0, 0
        ]
        found.append((float(gain), i, j, sire, dam, sizes))
    found.sort(
        key=lambda each: (
            -round(each[0], SHOWN_DECIMALS),
            round(float(matings.inbreeding[each[1], each[2]]), SHOWN_DECIMALS),
            each[1],
            each[2],
        )
    )
    pairs = []
    for rank, (gain, i, j, sire, dam, sizes) in enumerate(found, start=1):
        km = float(matings.criteria["move_km"][i, j])
        pairs.append(
            PlannedPair(
                rank=rank,
                sire=sire,
                dam=dam,
                young=sum(sizes),
                litters=len(sizes),
                offspring_inbreeding=float(matings.inbreeding[i, j]),
                gene_diversity_gain=gain,
                same_holder=_same_holder(population, sire, dam),
                move_km=None if math.isnan(km) else km,
                reasons=tuple(wording.reasons(i, j)),
                alternatives=tuple(
                    PartnerChoice(
                        int(matings.males[each.male]),
                        int(matings.females[each.female]),
                        float(matings.inbreeding[each.male, each.female]),
                        each.cost,
                        None
                        if each.swaps_with is None
                        else (
                            int(matings.males[each.swaps_with[0]]),
                            int(matings.females[each.swaps_with[1]]),
                        ),
                    )
                    for each in exchanges.alternatives(i, j)
                ),
            )
        )
    return tuple(pairs)


def _same_holder(population: Population, sire: int, dam: int) -> bool | None:
    """Whether both live at one holder; None where one has none recorded."""
    holders = [population.pedigree.fact(place, "holder") for place in (sire, dam)]
    return holders[0] == holders[1] if all(holders) else None
