"""What every living animal is to do next season, said once each; and who moves where."""

from __future__ import annotations

import math
from collections import Counter
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Sequence

    from pairing.plan.alternatives import Exchanges
    from pairing.plan.candidates import Candidates
    from pairing.plan.matings import Matings
    from pairing.plan.pairs import PlannedPair
    from pairing.population.diversity import Population


@dataclass(frozen=True, slots=True)
class Move:
    """One transfer: place of the animal, from and to which holder, how far, why.

    `pair` is the pair it brings together, as places of sire and dam.
    """

    animal: int
    pair: tuple[int, int]
    origin: str
    destination: str
    km: float | None
    reason: str


@dataclass(frozen=True, slots=True)
class Task:
    """What one living animal is to do; `partners` are places, empty when it is not paired."""

    animal: int
    what_to_do: str
    partners: tuple[int, ...]
    moves: tuple[Move, ...]
    reason: str


def transfers(
    population: Population,
    pairs: Sequence[PlannedPair],
    candidates: Candidates,
    matings: Matings,
) -> tuple[Move, ...]:
    """Who moves so that each pair can meet: the partner with fewer mates goes to the other.

    With as many, the male goes, and also where all his mates are at one holder. One that
    has moved already goes on from where it then is. A sire whose semen is stored goes
    nowhere.
    """
    pedigree = population.pedigree
    mates = Counter[int]()
    for pair in pairs:
        mates[pair.sire] += 1
        mates[pair.dam] += 1
    row = {place: number for number, place in enumerate(matings.males.tolist())}
    column = {place: number for number, place in enumerate(matings.females.tolist())}
    at = {place: pedigree.fact(place, "holder") for place in mates}
    homes: dict[int, set[str]] = {}
    for pair in pairs:
        homes.setdefault(pair.sire, set()).add(at[pair.dam])
    moves = []
    for pair in pairs:
        if pair.same_holder is not False or pair.sire in candidates.by_semen:
            continue
        if at[pair.sire] == at[pair.dam]:
            continue
        mover, host = (pair.sire, pair.dam)
        if mates[pair.sire] > mates[pair.dam] and len(homes[pair.sire]) > 1:
            mover, host = host, mover
        from_home = at[mover] == pedigree.fact(mover, "holder")
        km = float(matings.criteria["move_km"][row[pair.sire], column[pair.dam]])
        moves.append(
            Move(
                animal=mover,
                pair=(pair.sire, pair.dam),
                origin=at[mover],
                destination=at[host],
                km=km if from_home and not math.isnan(km) else None,
                reason=f"to breed with {pedigree.label(host)}",
            )
        )
        at[mover] = at[host]
    return tuple(moves)


def animal_tasks(
    population: Population,
    candidates: Candidates,
    matings: Matings,
    *,
    pairs: Sequence[PlannedPair],
    moves: Sequence[Move],
    exchanges: Exchanges | None,
) -> tuple[Task, ...]:
    """One task for every living animal, in file order."""
    pedigree = population.pedigree
    partners: dict[int, list[int]] = {}
    for pair in pairs:
        partners.setdefault(pair.sire, []).append(pair.dam)
        partners.setdefault(pair.dam, []).append(pair.sire)
    moving: dict[int, list[Move]] = {}
    for move in moves:
        moving.setdefault(move.animal, []).append(move)
    kept = _kept_partners(population, candidates)
    row = {place: number for number, place in enumerate(matings.males.tolist())}
    column = {place: number for number, place in enumerate(matings.females.tolist())}
    tasks = []
    for place in population.living.tolist():
        mates = partners.get(place, [])
        if mates:
            names = listed((pedigree.label(each) for each in mates), most=4)
            tasks.append(
                Task(
                    place,
                    f"breed with {names}",
                    tuple(mates),
                    tuple(moving.get(place, ())),
                    "in the plan",
                )
            )
        elif place in candidates.refused:
            what = "no young this season"
            if place in kept:
                what = f"stay with {pedigree.label(kept[place])}, no young"
            elif place in candidates.resting:
                what = "rest"
            tasks.append(Task(place, what, (), (), candidates.refused[place]))
        else:
            reason = _why_left_out(
                population, matings, exchanges, row.get(place), column.get(place)
            )
            what = "no young this season"
            if place in kept:
                what = f"stay with {pedigree.label(kept[place])}, no young this season"
            tasks.append(Task(place, what, (), (), reason))
    return tuple(tasks)


def _kept_partners(population: Population, candidates: Candidates) -> dict[int, int]:
    kept = {}
    for each in candidates.pairs:
        if each.decision in ("together", "together-no-young"):
            sire, dam = population.pedigree.place(each.sire, each.dam)
            kept[sire], kept[dam] = dam, sire
    return kept


def _why_left_out(
    population: Population,
    matings: Matings,
    exchanges: Exchanges | None,
    row: int | None,
    column: int | None,
) -> str:
    """Why a candidate has no mate in the plan, and what would let it in."""
    pedigree = population.pedigree
    if exchanges is None:
        return "no young are wanted"
    mine = matings.allowed[row] if row is not None else matings.allowed[:, column]
    if not mine.any():
        return _why_no_partner(population, matings, row, column)
    entry = exchanges.cost_of_including(row, column)
    if entry is None or entry.swaps_with is None:
        return "not needed for the wanted young"
    partner = matings.females[entry.female] if row is not None else matings.males[entry.male]
    instead = (
        matings.males[entry.swaps_with[0]]
        if row is not None
        else matings.females[entry.swaps_with[1]]
    )
    return (
        f"not needed for the wanted young; taking {pedigree.label(int(instead))}'s place with "
        f"{pedigree.label(int(partner))} would cost {max(entry.cost, 0.0):.4f}"
    )


def _why_no_partner(
    population: Population, matings: Matings, row: int | None, column: int | None
) -> str:
    """What bars a candidate from everybody, naming the least related where that is why."""
    others = matings.females if row is not None else matings.males
    if not len(others):
        return "no permitted partner: there is no candidate of the other sex"
    line: tuple[int | slice, int | slice | None] = (
        (row, slice(None)) if row is not None else (slice(None), column)
    )
    rest = np.ones(len(others), dtype=bool)
    for name, barred in matings.bars.items():
        if name != "offspring_inbreeding":
            rest &= ~barred[line]
    if not rest.any():
        names = [name for name, barred in matings.bars.items() if barred[line].all()]
        words = {
            "lines": "its line is kept apart from the others'",
            "together": "it stays with its own partner",
            "closest": "all others are parents, offspring or full sibs",
        }
        said = [words[name] for name in names if name in words]
        return f"no permitted partner: {said[0]}" if said else "no permitted partner"
    values = np.where(rest, matings.inbreeding[line], np.inf)
    nearest = int(values.argmin())
    if matings.bars["together"][line].any():
        return (
            f"no permitted partner: it stays with "
            f"{population.pedigree.label(int(others[nearest]))}, with whom young would be inbred "
            f"to {values[nearest]:.4f}"
        )
    return (
        "no permitted partner: even the least related, "
        f"{population.pedigree.label(int(others[nearest]))}, would give young inbred to "
        f"{values[nearest]:.4f}"
    )
