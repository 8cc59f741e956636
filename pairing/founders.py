"""What the founders left: contributions and founder equivalents."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.pedigree.gene_flow import gene_flow
from pairing.pedigree.genotypes import genotypes_of

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.pedigree.descent import Pedigree

    FloatArray = npt.NDArray[np.float64]
    PlaceArray = npt.NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class FounderStatistics:
    """Founders of a set of animals.

    Attributes
    ----------
    places
        The represented founders' places in the pedigree.
    contributions
        Expected share of the set's genes that come from each, shape (founders,). They sum
        to the known part of the ancestry, at most 1.
    founders
        How many animals of the pedigree are founders, represented or not.
    founder_equivalents
        The number of equally contributing founders that would give the same expected
        diversity, 1 / sum p^2, with p rescaled to the known part; None without founders.
        Source: LACY_1989.
    """

    places: PlaceArray
    contributions: FloatArray
    founders: int
    founder_equivalents: float | None


def founder_statistics(
    pedigree: Pedigree, members: PlaceArray, *, numbers: PlaceArray | None = None
) -> FounderStatistics:
    """Contributions of the founders to the animals at `members`.

    A founder row that stands for several animals counts as so many founders with equal parts.

    Parameters
    ----------
    numbers
        How many animals each of `members` stands for; by default one.
    """
    founders = np.flatnonzero(pedigree.founder)
    counted = np.ones(len(members)) if numbers is None else numbers.astype(np.float64)
    share = np.zeros(len(pedigree))
    if counted.sum() > 0:
        genotypes = genotypes_of(pedigree)
        weights = np.zeros(len(genotypes))
        np.add.at(weights, genotypes.of_animal[members], counted / counted.sum())
        share = gene_flow(genotypes).up(weights)[genotypes.of_animal]
    represented = founders[share[founders] > 0]
    contributions = share[represented]
    known = float(contributions.sum())
    squares = float((np.square(contributions) / pedigree.numbers(represented)).sum())
    return FounderStatistics(
        places=represented,
        contributions=contributions,
        founders=int(pedigree.numbers(founders).sum()),
        founder_equivalents=known**2 / squares if squares > 0 else None,
    )
