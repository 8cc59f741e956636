"""Wright's path method for one mating: where its inbreeding would come from.

F = sum over pairs of chains, one up from the sire and one up from the dam, that meet in one
common ancestor A and share no other animal: (1/2)^(n1 + n2 + 1) (1 + F_A), n1 and n2 being
the steps of the chains. Source: WRIGHT_1922.

The chains are walked together, always from the younger of the two ends, which yields every
valid pair of chains once and no invalid one. At any moment the chains found and the kinship
still open between unfinished ends add up to F exactly, so the search can stop after the
largest loops and still account for the rest.
"""

from __future__ import annotations

import heapq
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.pedigree.gene_flow import ancestors_of
from pairing.pedigree.genotypes import genotypes_of

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from pairing.kinship.engine import Kinship
    from pairing.pedigree.descent import Pedigree
    from pairing.pedigree.genotypes import Genotypes

MOST_LISTED = 12
_MOST_STEPS = 100_000

Chain = tuple[int, "Chain | None"]


@dataclass(frozen=True, slots=True)
class Path:
    """One loop: a common ancestor and the chains down from it.

    Attributes
    ----------
    ancestor
        Its id; ``S12|S15`` where it is one of several.
    ancestor_inbreeding
        F of the ancestor.
    through_sire, through_dam
        Ids from the parent up to the ancestor, both ends included.
    contribution
        The loop's part of the offspring's inbreeding, in (0, 1].
    """

    ancestor: str
    ancestor_inbreeding: float
    through_sire: tuple[str, ...]
    through_dam: tuple[str, ...]
    contribution: float


@dataclass(frozen=True, slots=True)
class PathSum:
    """The largest loops of a mating, largest first, and the sum of all others."""

    inbreeding: float
    paths: tuple[Path, ...]
    other_paths: float


def inbreeding_paths(kinship: Kinship, *, sire: str, dam: str, most: int = MOST_LISTED) -> PathSum:
    """Loops through which young of a mating would be inbred.

    Parameters
    ----------
    most
        Loops listed at most; the rest is summed in `other_paths`, so that contributions
        and `other_paths` add up to the offspring's inbreeding exactly.

    Raises
    ------
    UnknownAnimalError
        If either parent is not in the pedigree.
    """
    pedigree = kinship.pedigree
    genotypes = genotypes_of(pedigree)
    first, second = genotypes.of_animal[pedigree.place(sire, dam)].tolist()
    part = ancestors_of(genotypes, np.array([first, second]))
    between = _kinship_within(kinship, part)
    if most < 1:
        return PathSum(between(first, second), (), between(first, second))
    found: list[Path] = []
    rest = [between(first, second)]
    for path, open_parts in _walk(genotypes, first, second, between):
        rest = open_parts
        if path is not None and len(found) < most:
            found.append(_named(pedigree, genotypes, between, path))
        if len(found) >= most:
            break
    return PathSum(between(first, second), tuple(found), float(sum(rest)))


Open = tuple[float, int, int, int, Chain, Chain, float]
Found = tuple[int, Chain, Chain, float]


def _walk(
    genotypes: Genotypes, first: int, second: int, between: Callable[[int, int], float]
) -> Iterator[tuple[Found | None, list[float]]]:
    """Loops, largest first, each with what stays open after it."""
    total = between(first, second)
    heap: list[Open] = []
    if total > 0:
        heap.append((-total, 0, first, second, (first, None), (second, None), 1.0))
    serial = 1
    for _step in range(_MOST_STEPS):
        if not heap:
            return
        open_kinship, _serial, u, v, up_sire, up_dam, chance = heapq.heappop(heap)
        if u == v:
            yield (u, up_sire, up_dam, -open_kinship), [-entry[0] for entry in heap]
            continue
        younger, other = (u, v) if u > v else (v, u)
        for parent, share in _arrows(genotypes, younger):
            kin = between(parent, other)
            if kin <= 0:
                continue
            passed = chance * share
            longer = (parent, up_sire if younger == u else up_dam)
            heapq.heappush(
                heap,
                (-passed * kin, serial, parent, other, longer, up_dam, passed)
                if younger == u
                else (-passed * kin, serial, other, parent, up_sire, longer, passed),
            )
            serial += 1
    yield None, [-entry[0] for entry in heap]


def _arrows(genotypes: Genotypes, place: int) -> list[tuple[int, float]]:
    if place in genotypes.copies:
        return list(genotypes.copies[place])
    parents = (int(genotypes.sire[place]), int(genotypes.dam[place]))
    return [(parent, 0.5) for parent in parents if parent >= 0]


def _kinship_within(
    kinship: Kinship, part: np.ndarray[tuple[int], np.dtype[np.int64]]
) -> Callable[[int, int], float]:
    table = kinship.genotype_block(part, part)
    number = {place: position for position, place in enumerate(part.tolist())}
    return lambda a, b: float(table[number[a], number[b]])


def _named(
    pedigree: Pedigree, genotypes: Genotypes, between: Callable[[int, int], float], found: Found
) -> Path:
    meeting, up_sire, up_dam, contribution = found

    def name(place: int) -> str:
        animal = int(genotypes.animal_of[place])
        if animal >= 0:
            return pedigree.ids[animal]
        sources = [int(genotypes.animal_of[each]) for each, _chance in genotypes.copies[place]]
        return "|".join(pedigree.ids[each] for each in sources)

    def names(chain: Chain) -> tuple[str, ...]:
        places: list[int] = []
        link: Chain | None = chain
        while link is not None:
            places.append(link[0])
            link = link[1]
        shown = [
            each for each in reversed(places) if genotypes.animal_of[each] >= 0 or each == meeting
        ]
        return tuple(name(each) for each in shown)

    return Path(
        ancestor=name(meeting),
        ancestor_inbreeding=2 * between(meeting, meeting) - 1,
        through_sire=names(up_sire),
        through_dam=names(up_dam),
        contribution=contribution,
    )
