"""How far back the records reach: the known share of ancestry and its depth."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.pedigree.gene_flow import gene_flow
from pairing.pedigree.genotypes import genotypes_of

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.pedigree.descent import Pedigree
    from pairing.pedigree.genotypes import Genotypes

    FloatArray = npt.NDArray[np.float64]


def known_ancestry(pedigree: Pedigree) -> FloatArray:
    """Share of each animal's genes that trace to founders, shape (n,), in [0, 1].

    A founder counts 1, an unknown parent 0, any other animal the mean of its parents. With
    it, an inbreeding coefficient can be read for what it is: at least that much.
    """
    genotypes = genotypes_of(pedigree)
    source = np.zeros(len(genotypes))
    source[genotypes.of_animal[pedigree.founder]] = 1.0
    return gene_flow(genotypes).down(source)[genotypes.of_animal]


def equivalent_generations(pedigree: Pedigree) -> FloatArray:
    """Equivalent complete generations known above each animal, shape (n,), 0 for founders.

    The sum of (1/2)^k over all known ancestors, k generations back. Source: MACCLUER_1983
    for the idea of completeness.
    """
    genotypes = genotypes_of(pedigree)
    return gene_flow(genotypes).down(_known_parents(genotypes) / 2)[genotypes.of_animal]


def _known_parents(genotypes: Genotypes) -> FloatArray:
    """Recorded parents of each genotype; one that is one of several counts its chances."""
    known = np.append(np.ones(len(genotypes)), 0.0)
    for each, parts in genotypes.copies.items():
        known[each] = sum(chance for _source, chance in parts)
    parents: FloatArray = known[genotypes.sire] + known[genotypes.dam]
    for each in genotypes.copies:
        parents[each] = 0.0
    return parents
