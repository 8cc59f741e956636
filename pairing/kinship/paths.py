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
from collections import OrderedDict
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.pedigree.genotypes import genotypes_of

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    import numpy.typing as npt

    from pairing.kinship.engine import Kinship
    from pairing.pedigree.descent import Pedigree
    from pairing.pedigree.genotypes import Genotypes

    FloatArray = npt.NDArray[np.float64]

MOST_LISTED = 12
_MOST_STEPS = 100_000
_MOST_COLUMNS = 2_000

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
    between = _KinshipWithin(kinship, first, second)
    total = between(first, second)
    if first == second and first in genotypes.members:
        total = kinship.within_group(first)
    if most < 1:
        return PathSum(total, (), total)
    found: list[Path] = []
    rest = [total]
    for path, open_parts in _walk(genotypes, first, second, between):
        rest = open_parts
        if path is not None and len(found) < most:
            found.append(_named(pedigree, genotypes, between, kinship.inbreeding, path))
        if len(found) >= most:
            break
    return PathSum(total, tuple(found), float(sum(rest)))


Open = tuple[float, int, int, int, Chain, Chain, float]
Found = tuple[int, Chain, Chain, float]


def _walk(
    genotypes: Genotypes, first: int, second: int, between: Callable[[int, int], float]
) -> Iterator[tuple[Found | None, list[float]]]:
    """Loops, largest first, each with what stays open after it."""
    total = between(first, second)
    heap: list[Open] = []
    if first == second and first in genotypes.members:
        # Two different members of one group: no loop ends at the group itself.
        for parent, share in _arrows(genotypes, first):
            for other, part in _arrows(genotypes, first):
                kin = between(parent, other)
                up_sire: Chain = (parent, (first, None))
                up_dam: Chain = (other, (first, None))
                passed = share * part
                if kin > 0:
                    heap.append((-passed * kin, len(heap), parent, other, up_sire, up_dam, passed))
        heapq.heapify(heap)
    elif total > 0:
        heap.append((-total, 0, first, second, (first, None), (second, None), 1.0))
    serial = len(heap) + 1
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


class _KinshipWithin:
    """Kinship of any two genotypes of a mating's ancestry, a column at a time when it is large."""

    def __init__(self, kinship: Kinship, first: int, second: int) -> None:
        self._kinship = kinship
        self._columns: OrderedDict[int, FloatArray] = OrderedDict()
        self._part = kinship.ancestry(np.array([first, second]))

    def __call__(self, a: int, b: int) -> float:
        if self._kinship.has_table:
            return self._kinship.genotype_value(a, b)
        younger, older = (a, b) if a > b else (b, a)
        for column, row in ((older, younger), (younger, older)):
            if column in self._columns:
                self._columns.move_to_end(column)
                return float(self._columns[column][self._part.place(row)])
        self._columns[older] = self._part.column(older)
        if len(self._columns) > _MOST_COLUMNS:
            self._columns.popitem(last=False)
        return float(self._columns[older][self._part.place(younger)])


def _named(
    pedigree: Pedigree,
    genotypes: Genotypes,
    between: Callable[[int, int], float],
    inbreeding: FloatArray,
    found: Found,
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
        ancestor_inbreeding=float(inbreeding[animal])
        if (animal := int(genotypes.animal_of[meeting])) >= 0
        else 2 * between(meeting, meeting) - 1,
        through_sire=names(up_sire),
        through_dam=names(up_dam),
        contribution=contribution,
    )
