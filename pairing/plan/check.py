"""May this mating go ahead? Judged against every limit, its inbreeding explained."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from pairing.kinship.named import same_as
from pairing.kinship.paths import PathSum, inbreeding_paths
from pairing.plan.candidates import Candidates, find_candidates
from pairing.plan.matings import (
    TOLERANCE,
    closest_matings,
    gene_diversity_gain,
    inbreeding_limit,
    lines_apart,
    possible_matings,
)
from pairing.policy.rules import Policy

if TYPE_CHECKING:
    from pairing.population.diversity import Population

WITHIN_LIMITS = "within_limits"
BREAKS_LIMIT = "breaks_limit"
CANNOT_BE_JUDGED = "cannot_be_judged"
NO_LIMITS_SET = "no_limits_set"

RULES = {
    "closest_matings": 1,
    "offspring_inbreeding": 2,
    "lines": 3,
    "standing_decision": 4,
    "breeding_animals": 5,
}
"""The limits a mating can break, with the number each is called by in answers and docs."""

_MOST_BETTER = 3
_WELL_KNOWN = 0.995


@dataclass(frozen=True, slots=True)
class Break:
    """One limit that a mating breaks: what is allowed and what was found."""

    limit: str
    allowed: str | float
    found: str | float

    @property
    def rule(self) -> int:
        """The number of the rule."""
        return RULES[self.limit]


@dataclass(frozen=True, slots=True)
class Partner:
    """A possible partner: its place, and what young with it would be."""

    place: int
    offspring_inbreeding: float
    gene_diversity_gain: float


@dataclass(frozen=True, slots=True)
class MatingCheck:
    """The answer about one mating; `sire` and `dam` are places in the pedigree.

    Attributes
    ----------
    verdict
        ``within_limits``, ``breaks_limit``, ``cannot_be_judged`` or ``no_limits_set``.
    paths
        The loops its inbreeding comes from.
    better_for_dam, better_for_sire
        Permitted partners with which the season's objective would be lower, best first.
    doubt
        Why it cannot be judged, or "".
    notes
        What a reader must know besides.
    """

    sire: int
    dam: int
    offspring_inbreeding: float
    same_as: str
    verdict: str
    breaks: tuple[Break, ...]
    paths: PathSum
    gene_diversity_gain: float | None
    better_for_dam: tuple[Partner, ...]
    better_for_sire: tuple[Partner, ...]
    doubt: str
    notes: tuple[str, ...]


def check_mating(
    population: Population, *, sire: str, dam: str, policy: Policy | None = None
) -> MatingCheck:
    """Judge one mating by the policy's limits.

    Raises
    ------
    UnknownAnimalError
        If either animal is not in the records.
    """
    return check_matings(population, [(sire, dam)], policy=policy)[0]


def check_matings(
    population: Population, pairs: list[tuple[str, str]], *, policy: Policy | None = None
) -> list[MatingCheck]:
    """Judge several matings by the policy's limits, in the order given.

    Raises
    ------
    UnknownAnimalError
        If any animal is not in the records; the message names all of them.
    """
    policy = policy or Policy()
    population.pedigree.place(*dict.fromkeys(each for pair in pairs for each in pair))
    candidates = find_candidates(population, policy)
    return [_check(population, sire, dam, policy, candidates) for sire, dam in pairs]


def _check(
    population: Population,
    sire: str,
    dam: str,
    policy: Policy,
    candidates: Candidates,
) -> MatingCheck:
    s, d = population.pedigree.place(sire, dam)
    paths = inbreeding_paths(population.kinship, sire=sire, dam=dam)
    breaks = _breaks(population, s, d, paths.inbreeding, policy, candidates)
    doubt, notes = _doubts(population, s, d)
    limit = inbreeding_limit(population, policy)
    if breaks:
        verdict = BREAKS_LIMIT
    elif doubt:
        verdict = CANNOT_BE_JUDGED
    else:
        verdict = NO_LIMITS_SET if limit is None else WITHIN_LIMITS
    gain = None
    if population.size:
        gain = float(gene_diversity_gain(population, np.array([s]), np.array([d]))[0, 0])
    return MatingCheck(
        sire=s,
        dam=d,
        offspring_inbreeding=paths.inbreeding,
        same_as=same_as(paths.inbreeding),
        verdict=verdict,
        breaks=tuple(breaks),
        paths=paths,
        gene_diversity_gain=gain,
        better_for_dam=_better(population, candidates, policy, (s, d), for_dam=True),
        better_for_sire=_better(population, candidates, policy, (s, d), for_dam=False),
        doubt=doubt,
        notes=tuple(notes),
    )


def _breaks(
    population: Population, s: int, d: int, f: float, policy: Policy, candidates: Candidates
) -> list[Break]:
    pedigree = population.pedigree
    one, other = np.array([s]), np.array([d])
    breaks = []
    if not policy.allow_closest and closest_matings(pedigree, one, other)[0, 0]:
        found = "full sibs"
        if s in pedigree.parents_of(d) or d in pedigree.parents_of(s):
            found = "parent and offspring"
        elif s == d:
            group = s in pedigree.counts
            found = "two of one group" if group else "one animal with itself"
        breaks.append(Break("closest_matings", "no parent with offspring, no full sibs", found))
    limit = inbreeding_limit(population, policy)
    if limit is not None and f > limit + TOLERANCE:
        breaks.append(Break("offspring_inbreeding", limit, f))
    if lines_apart(pedigree, one, other, policy)[0, 0]:
        lines = [pedigree.fact(place, "line") or "not recorded" for place in (s, d)]
        breaks.append(Break("lines", "one line, or lines that may cross", " with ".join(lines)))
    breaks += _decisions(population, s, d, candidates)
    breaks += [
        Break(
            "breeding_animals",
            "animals that may breed this season",
            f"{pedigree.label(place)}: {candidates.refused[place]}",
        )
        for place in (s, d)
        if place in candidates.refused and place not in candidates.of_doubtful_sex
    ]
    return breaks


def _decisions(population: Population, s: int, d: int, candidates: Candidates) -> list[Break]:
    breaks = []
    for each in candidates.pairs:
        sire, dam = population.pedigree.place(each.sire, each.dam)
        why = f" ({each.reason})" if each.reason else ""
        if each.decision == "never" and (sire, dam) == (s, d):
            breaks.append(
                Break("standing_decision", "never together", f"{each.sire} x {each.dam}{why}")
            )
        elif each.decision == "together" and (sire == s) != (dam == d):
            breaks.append(
                Break(
                    "standing_decision",
                    f"{each.sire} x {each.dam} stay together{why}",
                    "another partner",
                )
            )
    return breaks


def _doubts(population: Population, s: int, d: int) -> tuple[str, list[str]]:
    """Why the mating cannot be judged, or "", and what a reader must know.

    It cannot where the roles contradict the recorded sexes, or where nothing at all is
    known of a parent's ancestry: an inbreeding of 0 would then say nothing.
    """
    pedigree, known = population.pedigree, population.known_ancestry
    doubts, notes = [], []
    for place, wanted, role in ((s, "male", "sire"), (d, "female", "dam")):
        sex = pedigree.sexes[place]
        if sex == "unknown":
            notes.append(f"The {role} {pedigree.label(place)}'s sex is not recorded.")
        elif sex not in (wanted, "hermaphrodite"):
            doubts.append(f"the {role} {pedigree.label(place)} is recorded as {sex}")
        if known[place] == 0:
            doubts.append(f"nothing is known of {pedigree.label(place)}'s ancestry")
    living = set(population.living.tolist())
    notes += [
        f"{pedigree.label(place)} does not count as living on the date of the population."
        for place in dict.fromkeys((s, d))
        if place not in living
    ]
    notes += [
        f"{1 - known[place]:.0%} of {pedigree.label(place)}'s ancestry is unknown: the inbreeding "
        "shown is a lower bound."
        for place in dict.fromkeys((s, d))
        if known[place] < _WELL_KNOWN
    ]
    return " and ".join(dict.fromkeys(doubts)), notes


def _better(
    population: Population,
    candidates: Candidates,
    policy: Policy,
    mating: tuple[int, int],
    *,
    for_dam: bool,
) -> tuple[Partner, ...]:
    """Permitted partners with a better sum of inbreeding and diversity, weighted as in a plan."""
    s, d = mating
    kept, other = (d, s) if for_dam else (s, d)
    if kept not in (candidates.females if for_dam else candidates.males):
        return ()
    # Only the matings of this one animal: a herd's males times its females would not fit.
    alone = np.array([kept], dtype=np.int64)
    one = replace(candidates, females=alone) if for_dam else replace(candidates, males=alone)
    matings = possible_matings(population, one, policy)
    line = (slice(None), 0) if for_dam else (0, slice(None))
    partners = matings.males if for_dam else matings.females
    f = matings.inbreeding[line]
    gain = matings.criteria["gene_diversity_gain"][line]
    weights = policy.weights
    share = weights.diversity * (population.size + 1)
    cost = weights.inbreeding * f - share * gain
    pair = np.array([s]), np.array([d])
    own = weights.inbreeding * float(population.kinship.block(*pair)[0, 0])
    own -= share * float(gene_diversity_gain(population, *pair)[0, 0])
    fits = matings.allowed[line] & (cost < own - TOLERANCE) & (partners != other)
    order = [each for each in np.argsort(cost, kind="stable").tolist() if fits[each]]
    return tuple(
        Partner(int(partners[each]), float(f[each]), float(gain[each]))
        for each in order[:_MOST_BETTER]
    )
