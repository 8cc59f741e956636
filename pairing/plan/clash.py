"""When no plan meets the limits: the smallest set of limits that cannot hold together."""

from __future__ import annotations

from collections import Counter
from itertools import combinations
from typing import TYPE_CHECKING

import numpy as np

from pairing.plan.litter_model import best_litters
from pairing.plan.problem import litter_limits
from pairing.spelling import listed

if TYPE_CHECKING:
    from pairing.plan.candidates import Candidates
    from pairing.plan.matings import Matings
    from pairing.plan.problem import Season
    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population


def limits_in_words(
    population: Population, candidates: Candidates, matings: Matings, policy: Policy
) -> dict[str, str]:
    """Every limit that is in force, by name, as a keeper would say it."""
    limits = policy.limits
    words: dict[str, str] = {}
    if matings.inbreeding_limit is not None:
        words["offspring_inbreeding"] = (
            f"young may be inbred to {matings.inbreeding_limit:g} at most"
        )
    if not policy.allow_closest:
        words["closest"] = "parents with offspring and full sibs do not mate"
    if matings.bars["lines"].any():
        words["lines"] = "lines are kept apart"
    never = [each for each in candidates.pairs if each.decision == "never"]
    if never:
        words["never"] = "never together: " + listed(f"{p.sire} x {p.dam}" for p in never)
    bonded = [each for each in candidates.pairs if each.decision == "together"]
    if bonded:
        words["together"] = "kept together: " + listed(f"{p.sire} x {p.dam}" for p in bonded)
    if policy.litters_per_male is not None:
        words["litters_per_male"] = _litters("male", policy.litters_per_male)
    words["litters_per_female"] = _litters("female", limits.litters_per_female)
    if candidates.decided_most:
        words["at_most"] = "litters decided on: " + listed(
            f"{population.pedigree.label(place)} {most} at most"
            for place, most in sorted(candidates.decided_most.items())
        )
    if limits.share_per_male is not None:
        words["share_per_male"] = f"one male has {limits.share_per_male:.0%} of the young at most"
    if limits.moves is not None:
        words["moves"] = f"{limits.moves} transfers at most"
    must = [
        *(population.pedigree.ids[place] for place in sorted(candidates.must_breed)),
        *(f"{p.sire} x {p.dam}" for p in candidates.pairs if p.decision == "must-breed"),
    ]
    if must:
        words["must_breed"] = "must breed: " + listed(must)
    return words


def _litters(sex: str, most: int) -> str:
    return f"a {sex} has {most} litter{'' if most == 1 else 's'} at most"


def smallest_clash(
    population: Population,
    candidates: Candidates,
    matings: Matings,
    policy: Policy,
    season: Season,
) -> list[str]:
    """The fewest limits, in words, that cannot be met together with the wanted young.

    Sets of limits are tried from the smallest up, all others lifted, so that the first that
    cannot be met is a smallest one. The wanted number of young heads the answer.
    """
    words = limits_in_words(population, candidates, matings, policy)
    size = f" in litters of {season.litter_size}" if season.litter_size > 1 else ""
    males, females = len(candidates.males), len(candidates.females)
    wanted = (
        f"{season.young} young {'is' if season.young == 1 else 'are'} wanted{size}, with "
        f"{males} male{'' if males == 1 else 's'} and {females} "
        f"female{'' if females == 1 else 's'} that may breed"
    )
    cost = np.zeros(matings.inbreeding.shape)
    for number in range(len(words) + 1):
        for kept in combinations(words, number):
            lifted = frozenset(words) - frozenset(kept)
            limits = litter_limits(
                population, candidates, matings, policy, young=season.young, lifted=lifted
            )
            if best_litters(limits, season, cost) is None:
                return [
                    wanted if kept else wanted + _who_may_not(candidates),
                    *(words[name] for name in kept),
                    *_refused_must(population, candidates, kept),
                ]
    return [wanted, *words.values()]


def _who_may_not(candidates: Candidates) -> str:
    """The most common reasons that living animals are no candidates, with their numbers."""
    reasons = Counter(candidates.refused.values()).most_common(4)
    said = "; ".join(f"{number:,} {reason}" for reason, number in reasons)
    return f" (of the other living animals: {said})" if said else ""


def _refused_must(
    population: Population, candidates: Candidates, kept: tuple[str, ...]
) -> list[str]:
    """Why animals that must breed are no candidates."""
    if "must_breed" not in kept:
        return []
    places = set(candidates.must_breed)
    for each in candidates.pairs:
        if each.decision == "must-breed":
            places |= set(population.pedigree.place(each.sire, each.dam))
    return [
        f"{population.pedigree.label(place)} may not breed: {candidates.refused[place]}"
        for place in sorted(places)
        if place in candidates.refused
    ]
