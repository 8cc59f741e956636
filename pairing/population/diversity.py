"""`Population`: the living animals with the diversity they hold."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from pairing.founders import FounderStatistics, founder_statistics
from pairing.population.completeness import equivalent_generations, known_ancestry
from pairing.population.living import living_on

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.dates import DateRange
    from pairing.kinship.engine import Kinship
    from pairing.pedigree.descent import Pedigree
    from pairing.policy.rules import LivingRule

    FloatArray = npt.NDArray[np.float64]
    PlaceArray = npt.NDArray[np.int64]


@dataclass(frozen=True)
class Population:
    """The living set on a date and what it holds. Self-kinship is included throughout.

    Attributes
    ----------
    living
        Places of the living animals in the pedigree, in file order.
    as_of
        The date as an ordinal; None when the records hold no dates.
    rule
        Who belongs to the set, in words; it heads every output.
    warnings
        What makes the set doubtful.
    mean_kinship
        Of every animal, dead ones too, with the living set, shape (n,).
    """

    kinship: Kinship
    living: PlaceArray
    as_of: int | None
    rule: str
    warnings: tuple[str, ...]
    mean_kinship: FloatArray

    @property
    def pedigree(self) -> Pedigree:
        """The pedigree the population belongs to."""
        return self.kinship.pedigree

    @cached_property
    def numbers(self) -> PlaceArray:
        """How many animals each living entry stands for, shape (living,)."""
        return self.pedigree.numbers(self.living)

    @property
    def size(self) -> int:
        """Number of living animals, members of groups counted each."""
        return int(self.numbers.sum())

    def mean_of(self, values: FloatArray) -> float:
        """Mean over the living animals of a value for each of the pedigree's.

        A row that stands for several animals counts as many times.
        """
        return float(values[self.living] @ self.numbers / self.size)

    @cached_property
    def population_mean_kinship(self) -> float | None:
        """Mean of all kinships among the living, self-kinships included; None when empty.

        It is the inbreeding that young would have on average under random union of all
        genes of the population.
        """
        return self.mean_of(self.mean_kinship) if self.size else None

    @cached_property
    def gene_diversity(self) -> float | None:
        """Share of the source population's diversity retained, 1 - mean kinship (LACY_1995)."""
        mean = self.population_mean_kinship
        return None if mean is None else 1.0 - mean

    @cached_property
    def founder_genome_equivalents(self) -> float | None:
        """Founders that, equally used and without loss, would hold this diversity (LACY_1995).

        1 / (2 mean kinship), so that gene diversity is 1 - 1 / (2 of these).
        """
        mean = self.population_mean_kinship
        return 1.0 / (2.0 * mean) if mean else None

    @cached_property
    def mean_inbreeding(self) -> float | None:
        """Mean inbreeding coefficient of the living; None when there are none."""
        return self.mean_of(self.kinship.inbreeding) if self.size else None

    @cached_property
    def known_ancestry(self) -> FloatArray:
        """Share of each animal's genes that trace to founders, shape (n,)."""
        return known_ancestry(self.pedigree)

    @cached_property
    def equivalent_generations(self) -> FloatArray:
        """Equivalent complete generations known above each animal, shape (n,)."""
        return equivalent_generations(self.pedigree)

    @cached_property
    def founders(self) -> FounderStatistics:
        """What the founders contribute to the living."""
        return founder_statistics(self.pedigree, self.living, numbers=self.numbers)

    def count_of_sex(self, sex: str) -> int:
        """Living animals recorded as ``male``, ``female``, ``unknown`` or ``hermaphrodite``."""
        view = self.pedigree.view
        rows = self.pedigree.order[self.living]
        recorded = view.values.get("sex")
        if recorded is None:
            of_sex = np.full(len(rows), sex == "unknown")
        else:
            of_sex = recorded.where(lambda value: value == sex)[rows]
        counted = int(self.numbers[of_sex].sum())
        for place in set(self.pedigree.counts).intersection(self.living.tolist()):
            animal = self.pedigree.animals[place]
            if animal is not None and animal.by_sex:
                own = animal.count if animal.sex == sex else 0
                counted += animal.by_sex.get(sex, 0) - own
        return counted


def living_population(
    kinship: Kinship, *, as_of: DateRange | None = None, rule: LivingRule | None = None
) -> Population:
    """The living animals on a date with their mean kinships.

    Parameters
    ----------
    as_of
        The day; by default the last day of the latest year in the records, never today.
    rule
        Who makes up the population, from the policy.
    """
    living = living_on(kinship.pedigree, as_of=as_of, rule=rule)
    weights = np.zeros(len(kinship.pedigree))
    numbers = kinship.pedigree.numbers(living.places)
    if numbers.sum():
        weights[living.places] = numbers / numbers.sum()
    return Population(
        kinship=kinship,
        living=living.places,
        as_of=living.as_of,
        rule=living.rule,
        warnings=living.warnings,
        mean_kinship=kinship.mean_with(weights),
    )
