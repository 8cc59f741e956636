"""`kinship`: chooses a method by size, says which, and answers questions about kinship."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from importlib.util import find_spec
from typing import TYPE_CHECKING

import numpy as np

from pairing.errors import KinshipError
from pairing.kinship.indirect import kinship_block, kinship_product, self_kinship
from pairing.kinship.tabular import tabular_kinship
from pairing.pedigree.gene_flow import ancestors_of, gene_flow
from pairing.pedigree.genotypes import genotypes_of
from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Callable

    import numpy.typing as npt

    from pairing.pedigree.descent import Pedigree
    from pairing.pedigree.gene_flow import GeneFlow
    from pairing.pedigree.genotypes import Genotypes

    FloatArray = npt.NDArray[np.float64]
    IndexArray = npt.NDArray[np.int32]
    IndexArray64 = npt.NDArray[np.int64]
    Places = npt.ArrayLike

LARGEST_TABLE = 5000
"""Animals up to which the whole table is kept (200 MB); larger pedigrees go the indirect way."""

LARGEST_UNCOMPILED = 50_000
"""Genotypes from which on the indirect way is compiled."""

UNRELATED = "unrelated"


@dataclass(frozen=True, slots=True)
class Ancestry:
    """A part of the pedigree that holds all its own ancestors; `part` ascends."""

    part: IndexArray64
    flow: GeneFlow
    variance: FloatArray

    def place(self, genotype: int) -> int:
        """Where a genotype stands within the part."""
        return int(np.searchsorted(self.part, genotype))

    def column(self, genotype: int) -> FloatArray:
        """Kinship of every genotype of the part with one of them."""
        unit = np.zeros(len(self.part))
        unit[self.place(genotype)] = 1.0
        return kinship_product(self.flow, self.variance, unit)


@dataclass(frozen=True)
class Kinship:
    """Kinship of the animals of a pedigree.

    Kinship is the chance that a random gene of one animal and a random gene of the other
    are copies of one ancestral gene: in [0, 1], half of the relationship. Places are places
    in the pedigree.

    Attributes
    ----------
    pedigree
        Whose kinship it is.
    method
        A key of `METHODS`.
    unknown_parents
        How unknown parents count.
    inbreeding
        Inbreeding coefficient of each animal, shape (n,), in [0, 1].
    """

    pedigree: Pedigree
    method: str
    unknown_parents: str
    inbreeding: FloatArray
    _genotypes: Genotypes
    _variance: FloatArray
    _table: FloatArray | None

    def between(self, first: str, second: str) -> float:
        """Kinship of two animals by id; an animal with itself gives (1 + F) / 2.

        Raises
        ------
        UnknownAnimalError
            If either is not in the pedigree; the message names both when both are missing.
        """
        a, b = self.pedigree.place(first, second)
        return float(self.block([a], [b])[0, 0])

    def block(self, rows: Places, columns: Places) -> FloatArray:
        """Kinship of each of `rows` with each of `columns`, shape (rows, columns)."""
        a = self._genotypes.of_animal[np.asarray(rows, dtype=np.int64)]
        b = self._genotypes.of_animal[np.asarray(columns, dtype=np.int64)]
        return self.genotype_block(a, b)

    def genotype_block(self, rows: Places, columns: Places) -> FloatArray:
        """Kinship among genotypes, stand-ins for uncertain parents included."""
        a, b = np.asarray(rows, dtype=np.int64), np.asarray(columns, dtype=np.int64)
        if self._table is not None:
            return self._table[np.ix_(a, b)]
        unique_a, back_a = np.unique(a, return_inverse=True)
        unique_b, back_b = np.unique(b, return_inverse=True)
        if _goes_compiled(self._genotypes):
            from pairing.kinship import large

            block = large.kinship_block(self._genotypes, self._variance, unique_a, unique_b)
        else:
            block = kinship_block(self._genotypes, self._variance, unique_a, unique_b)
        return block[np.ix_(back_a, back_b)]

    @property
    def has_table(self) -> bool:
        """Whether the whole table is at hand."""
        return self._table is not None

    def genotype_value(self, a: int, b: int) -> float:
        """Kinship of two genotypes from the table."""
        if self._table is None:
            return float(self.genotype_block([a], [b])[0, 0])
        return float(self._table[a, b])

    def ancestry(self, genotypes: IndexArray64) -> Ancestry:
        """Some genotypes with all they descend from, for kinships among these alone."""
        part = ancestors_of(self._genotypes, genotypes)
        return Ancestry(part, gene_flow(self._genotypes, part), self._variance[part])

    def mean_with(self, weights: FloatArray) -> FloatArray:
        """Weighted kinship of every animal with the others, shape (n,): K w.

        Parameters
        ----------
        weights
            One an animal, shape (n,); with 1/N for each of N animals this is mean kinship.
        """
        of_animal = self._genotypes.of_animal
        spread = np.zeros(len(self._genotypes))
        spread[of_animal] = weights
        if self._table is not None:
            used = np.flatnonzero(spread)
            return (self._table[:, used] @ spread[used])[of_animal]
        if _goes_compiled(self._genotypes):
            from pairing.kinship import large

            return large.kinship_product(self._genotypes, self._variance, spread)[of_animal]
        return kinship_product(self._flow, self._variance, spread)[of_animal]

    def inbreeding_of_members(self, group: int) -> float:
        """Inbreeding of each member of a group, by genotype."""
        sire, dam = int(self._genotypes.sire[group]), int(self._genotypes.dam[group])
        if sire < 0 or dam < 0:
            return 0.0
        if sire == dam and sire in self._genotypes.members:
            return self.within_group(sire)
        return self.genotype_value(sire, dam)

    def within_group(self, group: int) -> float:
        """Kinship of two different members of a group, by genotype."""
        return max(0.0, self.genotype_value(group, group) - float(self._variance[group]) / 2)

    def gene_flow(self) -> tuple[GeneFlow, FloatArray, IndexArray]:
        """The factors of K = T D T' / 2: passes for T, D, and the genotype of each animal."""
        return self._flow, self._variance, self._genotypes.of_animal

    @cached_property
    def _flow(self) -> GeneFlow:
        return gene_flow(self._genotypes)


def kinship(
    pedigree: Pedigree, *, method: str | None = None, unknown_parents: str = UNRELATED
) -> Kinship:
    """Kinship of a pedigree, founders and unknown parents being unrelated and non-inbred.

    Parameters
    ----------
    method
        ``tabular`` (the whole table) or ``indirect`` (products and blocks); by default the
        table up to 5,000 animals. Both are exact and agree.
    unknown_parents
        ``unrelated``: an unknown parent shares no genes with anybody.

    Raises
    ------
    KinshipError
        If `method` or `unknown_parents` is not one of these.
    """
    if unknown_parents != UNRELATED:
        raise KinshipError(
            f'Unknown parents cannot be counted as "{unknown_parents}" in this version.',
            remedy=f'Use "{UNRELATED}": it may understate inbreeding where parents are missing.',
        )
    genotypes = genotypes_of(pedigree)
    chosen = method or ("tabular" if len(genotypes) <= LARGEST_TABLE else "indirect")
    if chosen not in METHODS:
        raise KinshipError(
            f'There is no kinship method "{chosen}".', remedy=f"Known: {listed(METHODS)}."
        )
    own, variance, table = METHODS[chosen](genotypes)
    inbreeding = 2 * own[genotypes.of_animal] - 1
    answer = Kinship(pedigree, chosen, unknown_parents, inbreeding, genotypes, variance, table)
    for place in pedigree.counts:
        genotype = int(genotypes.of_animal[place])
        if genotype in genotypes.members:
            # A group's own self-kinship is that of two draws; its members are each inbred so:
            inbreeding[place] = answer.inbreeding_of_members(genotype)
    inbreeding.setflags(write=False)
    return answer


Answer = tuple["FloatArray", "FloatArray", "FloatArray | None"]


def _by_table(genotypes: Genotypes) -> Answer:
    table = tabular_kinship(genotypes)
    table.setflags(write=False)
    own = np.diagonal(table).copy()
    padded = np.append(own, 0.0)
    variance = 1.0 - (padded[genotypes.sire] + padded[genotypes.dam]) / 2
    for each, parts in genotypes.copies.items():
        places = [source for source, _chance in parts]
        chances = np.array([chance for _source, chance in parts])
        between = chances @ table[np.ix_(places, places)] @ chances
        variance[each] = 2.0 * (own[each] - between)
    for each in {*genotypes.members, *genotypes.selfed_groups()}:
        known = [parent for parent in (genotypes.sire[each], genotypes.dam[each]) if parent >= 0]
        variance[each] = 2.0 * (own[each] - table[np.ix_(known, known)].sum() / 4)
    return own, np.maximum(variance, 0.0), table


def _by_products(genotypes: Genotypes) -> Answer:
    if _goes_compiled(genotypes):
        from pairing.kinship import large

        return (*large.self_kinship(genotypes), None)
    return (*self_kinship(genotypes), None)


def _goes_compiled(genotypes: Genotypes) -> bool:
    """Whether a pedigree is worth loading compiled code, and simple enough for it.

    Below that size plain numpy is done before a compiler's library is loaded.
    """
    from pairing.kinship.large import is_plain

    return (
        len(genotypes) >= LARGEST_UNCOMPILED
        and is_plain(genotypes)
        and find_spec("numba") is not None
    )


METHODS: dict[str, Callable[[Genotypes], Answer]] = {
    "tabular": _by_table,
    "indirect": _by_products,
}
"""Ways to compute kinship: each gives self-kinships, sampling variances and, if it makes one,
the table."""
