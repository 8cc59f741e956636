"""Every possible mating of the season, judged: what it would give, and whether it is allowed."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.pedigree.genotypes import genotypes_of

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    import numpy.typing as npt

    from pairing.pedigree.descent import Pedigree
    from pairing.plan.candidates import Candidates
    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population

    FloatArray = npt.NDArray[np.float64]
    BoolArray = npt.NDArray[np.bool_]
    PlaceArray = npt.NDArray[np.int64]

TOLERANCE = 1e-12
"""Meeting a limit is allowed; this absorbs the rounding of a sum."""
_EARTH_KM = 6371.0


@dataclass(frozen=True, slots=True)
class Matings:
    """All matings of m males with f females; every array has shape (m, f).

    Attributes
    ----------
    males, females
        Places in the pedigree, by id.
    criteria
        A key of `CRITERIA` to its values.
    bars
        Why a mating may be barred, to the matings barred for it; a mating may be barred
        for several reasons.
    inbreeding_limit
        The highest offspring inbreeding allowed, or None.
    """

    males: PlaceArray
    females: PlaceArray
    criteria: Mapping[str, FloatArray]
    bars: Mapping[str, BoolArray]
    inbreeding_limit: float | None

    @property
    def inbreeding(self) -> FloatArray:
        """Offspring inbreeding of every mating: the kinship of the parents."""
        return self.criteria["offspring_inbreeding"]

    @property
    def allowed(self) -> BoolArray:
        """Whether no bar stands against a mating."""
        return self.allowed_without(frozenset())

    def allowed_without(self, lifted: frozenset[str]) -> BoolArray:
        """What would be allowed if the bars named in `lifted` did not hold."""
        allowed = np.ones((len(self.males), len(self.females)), dtype=bool)
        for name, barred in self.bars.items():
            if name not in lifted:
                allowed &= ~barred
        return allowed

    def breaks(self, male: int, female: int) -> list[str]:
        """Names of the bars against one mating, by its row and column."""
        return [name for name, barred in self.bars.items() if barred[male, female]]


def offspring_inbreeding(population: Population, sires: PlaceArray, dams: PlaceArray) -> FloatArray:
    """Inbreeding coefficient of young of each mating, in [0, 1]: the parents' kinship."""
    return population.kinship.block(sires, dams)


def gene_diversity_gain(
    population: Population, sires: PlaceArray, dams: PlaceArray, *, young: int = 1
) -> FloatArray:
    """Change of the population's gene diversity by `young` offspring of each mating alone.

    With N living of mean kinship m: S' = N^2 m + n N (m_s + m_d) + n (1 + K_sd) / 2
    + n (n - 1) k, k = (2 + F_s + F_d) / 8 + K_sd / 2 being the kinship of two full sibs;
    the gain is m - S' / (N + n)^2. Positive is better. Source: derived in docs/methods.md
    from the tabular method; the effect of contributions is that of CABALLERO_TORO_2000.
    """
    kin = population.kinship.block(sires, dams)
    size, mean = population.size, population.population_mean_kinship or 0.0
    own, f = population.mean_kinship, population.kinship.inbreeding
    sib = (2 + f[sires][:, None] + f[dams][None, :]) / 8 + kin / 2
    total = (
        size**2 * mean
        + young * size * (own[sires][:, None] + own[dams][None, :])
        + young * (1 + kin) / 2
        + young * (young - 1) * sib
    )
    return np.asarray(mean - total / (size + young) ** 2)


CRITERIA: dict[str, Callable[[Population, PlaceArray, PlaceArray], FloatArray]] = {
    "offspring_inbreeding": offspring_inbreeding,
    "gene_diversity_gain": gene_diversity_gain,
}
"""What each mating is judged by: ``f(population, sires, dams)`` of shape (sires, dams)."""


def possible_matings(population: Population, candidates: Candidates, policy: Policy) -> Matings:
    """Every mating of the candidates, scored, with every reason that bars it."""
    males, females = candidates.males, candidates.females
    criteria = {name: score(population, males, females) for name, score in CRITERIA.items()}
    criteria["move_km"] = _distances(population.pedigree, males, females, policy)
    criteria["move_km"][np.isin(males, list(candidates.by_semen))] = 0.0
    limit = inbreeding_limit(population, policy)
    bars = {
        "never": _barred_pairs(population.pedigree, candidates),
        "together": _kept_together(population.pedigree, candidates),
        "lines": lines_apart(population.pedigree, males, females, policy),
        "closest": (
            np.zeros((len(males), len(females)), dtype=bool)
            if policy.allow_closest
            else closest_matings(population.pedigree, males, females)
        ),
        "offspring_inbreeding": (
            np.zeros((len(males), len(females)), dtype=bool)
            if limit is None
            else criteria["offspring_inbreeding"] > limit + TOLERANCE
        ),
    }
    return Matings(males, females, criteria, bars, limit)


def inbreeding_limit(population: Population, policy: Policy) -> float | None:
    """The highest offspring inbreeding the policy allows: the stricter of its two forms."""
    limits = [policy.limits.offspring_inbreeding]
    if policy.limits.above_breed_mean is not None and population.mean_inbreeding is not None:
        limits.append(population.mean_inbreeding + policy.limits.above_breed_mean)
    given = [each for each in limits if each is not None]
    return min(given) if given else None


def closest_matings(pedigree: Pedigree, males: PlaceArray, females: PlaceArray) -> BoolArray:
    """Whether a pair is parent and offspring (surely or possibly) or surely full sibs."""
    genotypes = genotypes_of(pedigree)
    males, females = _models(pedigree, males), _models(pedigree, females)
    m, f = genotypes.of_animal[males], genotypes.of_animal[females]
    sires = genotypes.sire[m][:, None], genotypes.sire[f][None, :]
    dams = genotypes.dam[m][:, None], genotypes.dam[f][None, :]
    same_sire, same_dam = ((mine == theirs) & (mine >= 0) for mine, theirs in (sires, dams))
    crossed = (sires[0] == dams[1]) & (sires[0] >= 0) & (dams[0] == sires[1]) & (dams[0] >= 0)
    itself = males[:, None] == females[None, :]
    barred: BoolArray = (same_sire & same_dam) | crossed | itself
    for number, place in enumerate(males.tolist()):
        barred[number] |= np.isin(females, _parents(pedigree, place))
    for number, place in enumerate(females.tolist()):
        barred[:, number] |= np.isin(males, _parents(pedigree, place))
    return barred


def _models(pedigree: Pedigree, places: PlaceArray) -> PlaceArray:
    """For each animal itself, or for a clone the animal whose genotype it has."""
    models = []
    for each in places.tolist():
        place = each
        while place in pedigree.same_genotype_as:
            place = pedigree.same_genotype_as[place]
        models.append(place)
    return np.array(models, dtype=np.int64)


def _parents(pedigree: Pedigree, place: int) -> PlaceArray:
    parents = sorted(pedigree.parents_of(place))
    return _models(pedigree, np.array(parents, dtype=np.int64))


def lines_apart(
    pedigree: Pedigree, males: PlaceArray, females: PlaceArray, policy: Policy
) -> BoolArray:
    """Whether a pair belongs to lines that are kept apart.

    Animals of one line may mate, and lines that the policy lets cross. An animal without a
    recorded line may mate only with another without one.
    """
    male_lines = [pedigree.fact(place, "line") for place in males.tolist()]
    female_lines = [pedigree.fact(place, "line") for place in females.tolist()]
    names = sorted({*male_lines, *female_lines})
    number = {name: each for each, name in enumerate(names)}
    apart = np.array(
        [[a != b and b not in policy.may_cross.get(a, ()) for b in names] for a in names],
        dtype=bool,
    ).reshape(len(names), len(names))
    rows = np.array([number[name] for name in male_lines], dtype=np.int64)
    columns = np.array([number[name] for name in female_lines], dtype=np.int64)
    return apart[np.ix_(rows, columns)]


def _barred_pairs(pedigree: Pedigree, candidates: Candidates) -> BoolArray:
    barred = np.zeros((len(candidates.males), len(candidates.females)), dtype=bool)
    row = {place: number for number, place in enumerate(candidates.males.tolist())}
    column = {place: number for number, place in enumerate(candidates.females.tolist())}
    for each in candidates.pairs:
        sire, dam = pedigree.place(each.sire, each.dam)
        if each.decision == "never" and sire in row and dam in column:
            barred[row[sire], column[dam]] = True
    return barred


def _kept_together(pedigree: Pedigree, candidates: Candidates) -> BoolArray:
    """Animals that stay together breed with nobody else."""
    row = {place: number for number, place in enumerate(candidates.males.tolist())}
    column = {place: number for number, place in enumerate(candidates.females.tolist())}
    barred = np.zeros((len(row), len(column)), dtype=bool)
    own = np.zeros_like(barred)
    for each in candidates.pairs:
        if each.decision != "together":
            continue
        sire, dam = pedigree.place(each.sire, each.dam)
        if sire in row:
            barred[row[sire], :] = True
        if dam in column:
            barred[:, column[dam]] = True
        if sire in row and dam in column:
            own[row[sire], column[dam]] = True
    return barred & ~own


def _distances(
    pedigree: Pedigree, males: PlaceArray, females: PlaceArray, policy: Policy
) -> FloatArray:
    """Great-circle km between the holders of each pair; 0 at one holder, nan when not known."""
    where = {
        each.name: (math.radians(each.latitude), math.radians(each.longitude))
        for each in policy.holders
        if each.latitude is not None and each.longitude is not None
    }
    male_holders = [pedigree.fact(place, "holder") for place in males.tolist()]
    female_holders = [pedigree.fact(place, "holder") for place in females.tolist()]
    names = sorted({*male_holders, *female_holders})
    number = {name: each for each, name in enumerate(names)}
    km = np.full((len(names), len(names)), np.nan)
    for a in names:
        for b in names:
            if a == b != "":
                km[number[a], number[b]] = 0.0
            elif a in where and b in where:
                km[number[a], number[b]] = _great_circle(*where[a], *where[b])
    rows = np.array([number[name] for name in male_holders], dtype=np.int64)
    columns = np.array([number[name] for name in female_holders], dtype=np.int64)
    return km[np.ix_(rows, columns)]


def _great_circle(lat1: float, lon1: float, lat2: float, lon2: float) -> float:
    """Great-circle distance in km by the haversine formula, angles in radians."""
    h = (
        math.sin((lat2 - lat1) / 2) ** 2
        + math.cos(lat1) * math.cos(lat2) * math.sin((lon2 - lon1) / 2) ** 2
    )
    return 2 * _EARTH_KM * math.asin(math.sqrt(min(1.0, h)))
