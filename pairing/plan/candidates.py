"""Who may breed this season, and why the others may not."""

from __future__ import annotations

import datetime
from collections import Counter
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.dates import completed, iso
from pairing.errors import PolicyError
from pairing.pedigree.descent import natural_key
from pairing.spelling import did_you_mean

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    import numpy.typing as npt

    from pairing.dates import AgeWindow, DateRange
    from pairing.pedigree.descent import Pedigree
    from pairing.policy.rules import AnimalDecision, PairDecision, Policy
    from pairing.population.diversity import Population

    PlaceArray = npt.NDArray[np.int64]

NO_LIMIT = 10**6
"""More litters than any animal has: "no limit" as a number."""


@dataclass(frozen=True, slots=True)
class Candidates:
    """Animals that may breed this season.

    Attributes
    ----------
    males, females
        Places in the pedigree, by id.
    by_semen
        Those males that are dead and take part through stored semen: nobody has to move.
    decided_most
        Place to the litters it may have at most by its own decision or stored doses.
    must_breed
        Places of animals that are to have at least one litter.
    refused
        Place of every other living animal to the reason in words.
    resting, of_doubtful_sex
        Those of them that rest by decision, and those whose sex is not settled.
    pairs
        The standing decisions on pairs that are in force.
    notes
        Sentences on decisions that have lapsed, stored semen, and the like.
    """

    males: PlaceArray
    females: PlaceArray
    by_semen: frozenset[int]
    decided_most: Mapping[int, int]
    must_breed: frozenset[int]
    refused: Mapping[int, str]
    resting: frozenset[int]
    of_doubtful_sex: frozenset[int]
    pairs: tuple[PairDecision, ...]
    notes: tuple[str, ...]


def find_candidates(population: Population, policy: Policy) -> Candidates:
    """Living animals of known sex, of age on the first day of the season, and not held back.

    Raises
    ------
    PolicyError
        If the policy's decisions name animals that are not in the records.
    """
    pedigree = population.pedigree
    _require_known(pedigree, policy)
    season = season_start(population, policy)
    in_force, lapsed = _in_force(policy, season)
    pairs = tuple(each for each in policy.pairs if each in in_force)
    decisions = [each for each in policy.animals if each in in_force]
    pairs, set_aside = _with_both_living(population, pairs)
    living = set(population.living.tolist())
    doses = Counter[int]()
    for batch in policy.stored_semen:
        doses[pedigree.index[batch.id]] += batch.doses
    by_semen = frozenset(doses) - living
    resting = {pedigree.index[each.id]: each for each in decisions if each.decision == "rest"}
    dams, sires = _parents(pedigree)
    if policy.records.selfing:
        # Animals that fertilise themselves are rightly both sire and dam.
        both = dams & sires
        dams, sires = dams - both, sires - both
    kept_apart = _no_young(pedigree, pairs)
    refused: dict[int, str] = {}
    chosen: dict[str, list[int]] = {"male": [], "female": []}
    for place in [*population.living.tolist(), *sorted(by_semen)]:
        reason = (
            _by_decision(resting.get(place))
            or kept_apart.get(place, "")
            or _by_record(pedigree, place, sires=sires, dams=dams)
            or (_by_age(pedigree, place, policy, season) if place in living else "")
        )
        if reason and place in living:
            refused[place] = reason
        elif not reason:
            chosen[pedigree.sexes[place]].append(place)
    order = {
        sex: np.array(
            sorted(places, key=lambda place: natural_key(pedigree.ids[place])), dtype=np.int64
        )
        for sex, places in chosen.items()
    }
    return Candidates(
        males=order["male"],
        females=order["female"],
        by_semen=by_semen,
        decided_most=_decided_most(pedigree, decisions, {p: doses[p] for p in by_semen}),
        must_breed=frozenset(
            pedigree.index[each.id] for each in decisions if each.decision == "must-breed"
        ),
        refused=refused,
        resting=frozenset(resting),
        of_doubtful_sex=frozenset(
            place for place in refused if _sex_in_doubt(pedigree, place, sires=sires, dams=dams)
        ),
        pairs=pairs,
        notes=(*lapsed, *set_aside, *_doses_of_the_living(pedigree, doses, living)),
    )


def _with_both_living(
    population: Population, pairs: tuple[PairDecision, ...]
) -> tuple[tuple[PairDecision, ...], list[str]]:
    """Pairs kept together only while both live; a sentence for each that no longer do."""
    pedigree = population.pedigree
    living = set(population.living.tolist())
    kept, notes = [], []
    for each in pairs:
        gone = [place for place in pedigree.place(each.sire, each.dam) if place not in living]
        if gone and each.decision in ("together", "together-no-young"):
            notes.append(
                f'The decision "{each.decision}" on {each.sire} x {each.dam} is set aside: '
                f"{pedigree.label(gone[0])} does not count as living."
            )
        else:
            kept.append(each)
    return tuple(kept), notes


def _decided_most(
    pedigree: Pedigree, decisions: Iterable[AnimalDecision], doses: Mapping[int, int]
) -> dict[int, int]:
    most = dict(doses)
    for each in decisions:
        if each.decision == "at-most" and each.litters is not None:
            place = pedigree.index[each.id]
            most[place] = min(most.get(place, NO_LIMIT), each.litters)
    return most


def _doses_of_the_living(
    pedigree: Pedigree, doses: Mapping[int, int], living: set[int]
) -> list[str]:
    return [
        f"{pedigree.label(place)} is living, so his stored semen is not used in this plan."
        for place in sorted(doses)
        if place in living
    ]


def season_start(population: Population, policy: Policy) -> int | None:
    """The day on which ages are judged: the policy's, else the day after the population's date."""
    if policy.season_start is not None:
        return policy.season_start.earliest
    if population.as_of is None:
        return None
    return min(population.as_of + 1, datetime.date.max.toordinal())


def _require_known(pedigree: Pedigree, policy: Policy) -> None:
    named = [
        *((f"[[pairs]] number {n}", each.sire) for n, each in enumerate(policy.pairs, 1)),
        *((f"[[pairs]] number {n}", each.dam) for n, each in enumerate(policy.pairs, 1)),
        *((f"[[animals]] number {n}", each.id) for n, each in enumerate(policy.animals, 1)),
        *((f"[[gametes]] number {n}", each.id) for n, each in enumerate(policy.stored_semen, 1)),
    ]
    unknown = [
        f'{where}: "{animal}" is not in the records. '
        f"{did_you_mean(animal, pedigree.index)}".rstrip()
        for where, animal in named
        if animal not in pedigree.index
    ]
    if unknown:
        raise PolicyError(
            "The policy decides on animals that are not in the records.",
            details=unknown,
            remedy="Correct the ids, or leave the decisions out.",
        )
    swapped = [
        f'{where}: {role} "{animal}" is recorded as {found}.'
        for where, role, animal, wanted in _named_by_sex(policy)
        if (found := pedigree.sexes[pedigree.index[animal]]) in ("male", "female")
        and found != wanted
    ]
    if swapped:
        raise PolicyError(
            "The policy names animals in a role that their recorded sex does not fit.",
            details=swapped,
            remedy="Exchange sire and dam, or correct the sex in the records.",
        )


def _named_by_sex(policy: Policy) -> list[tuple[str, str, str, str]]:
    """Where the policy names an animal as a male or a female: place, role, id, sex."""
    named = []
    for number, each in enumerate(policy.pairs, 1):
        named.append((f"[[pairs]] number {number}", "sire", each.sire, "male"))
        named.append((f"[[pairs]] number {number}", "dam", each.dam, "female"))
    named += [
        (f"[[gametes]] number {number}", "donor of semen", each.id, "male")
        for number, each in enumerate(policy.stored_semen, 1)
    ]
    return named


def _in_force(
    policy: Policy, season: int | None
) -> tuple[set[PairDecision | AnimalDecision], list[str]]:
    """Decisions that hold on the first day of the season, and a sentence for each lapsed one."""
    in_force: set[PairDecision | AnimalDecision] = set()
    lapsed = []
    decisions: list[tuple[str, PairDecision | AnimalDecision]] = [
        *((f"{each.sire} x {each.dam}", each) for each in policy.pairs),
        *((each.id, each) for each in policy.animals),
    ]
    for who, each in decisions:
        if each.until is not None and season is not None and each.until.latest < season:
            lapsed.append(
                f'The decision "{each.decision}" on {who} lapsed on {iso(each.until.latest)}.'
            )
        else:
            in_force.add(each)
    return in_force, lapsed


def _parents(pedigree: Pedigree) -> tuple[set[int], set[int]]:
    """Places of all animals surely recorded as a dam, and as a sire."""
    return set(pedigree.dam.tolist()) - {-1}, set(pedigree.sire.tolist()) - {-1}


def _no_young(pedigree: Pedigree, pairs: Iterable[PairDecision]) -> dict[int, str]:
    reasons = {}
    for each in pairs:
        if each.decision == "together-no-young":
            sire, dam = pedigree.place(each.sire, each.dam)
            why = f": {each.reason}" if each.reason else ""
            reasons[sire] = f"stays with {pedigree.label(dam)} without young{why}"
            reasons[dam] = f"stays with {pedigree.label(sire)} without young{why}"
    return reasons


def _by_decision(decision: AnimalDecision | None) -> str:
    if decision is None:
        return ""
    return f"rests: {decision.reason}" if decision.reason else "rests this season"


def _by_record(pedigree: Pedigree, place: int, *, sires: set[int], dams: set[int]) -> str:
    if place in pedigree.counts:
        return f"a group of {pedigree.counts[place]}, not told apart: not paired one by one"
    doubt = _sex_in_doubt(pedigree, place, sires=sires, dams=dams)
    animal = pedigree.animals[place]
    if not doubt and animal is not None and animal.may_breed is False:
        note = animal.text.get("may_breed_note", "")
        return f"may not breed: {note}" if note else "may not breed by the records"
    return doubt


def _sex_in_doubt(pedigree: Pedigree, place: int, *, sires: set[int], dams: set[int]) -> str:
    """Why an animal can be neither a sire nor a dam of the plan, or ""."""
    sex = pedigree.sexes[place]
    if sex not in ("male", "female"):
        return "sex not recorded" if sex == "unknown" else "hermaphrodite: not paired"
    if (place in dams and sex == "male") or (place in sires and sex == "female"):
        role = "dam" if sex == "male" else "sire"
        return f"recorded as {sex} but named as a {role}: settle its sex first"
    return ""


def _by_age(pedigree: Pedigree, place: int, policy: Policy, season: int | None) -> str:
    born = pedigree.born(place)
    sex = pedigree.sexes[place]
    line = pedigree.fact(place, "line")
    window = policy.breeding_age.get((line, sex)) or policy.breeding_age.get(("", sex))
    if season is None:
        return ""
    if born is not None and born.earliest >= season:
        return "born after the season starts"
    if window is None:
        return ""
    if born is None:
        return "birth date not recorded, so its age cannot be judged (an estimate as ~1999 helps)"
    return _outside(window, born, season)


def _outside(window: AgeWindow, born: DateRange, season: int) -> str:
    """Why an age lies outside the window over the whole range of possible birth dates, or ""."""
    youngest, oldest = window.youngest, window.oldest
    if completed(born.earliest, season, youngest.unit) < youngest.count:
        return f"too young to breed (from {youngest})"
    age = completed(min(born.latest, season), season, oldest.unit)
    whole = float(oldest.count).is_integer()
    if (int(age) if whole else age) > oldest.count:
        return f"past breeding age (up to {oldest})"
    return ""


def ages_at_breeding(pedigree: Pedigree) -> dict[str, tuple[float, float]]:
    """Youngest and oldest age in years at which sires and dams of these records had young."""
    ages: dict[str, tuple[float, float]] = {}
    for role, sex in (("sire", "male"), ("dam", "female")):
        found = []
        for child, parent in enumerate(getattr(pedigree, role).tolist()):
            born = pedigree.born(child)
            theirs = pedigree.born(parent) if parent >= 0 else None
            if born and theirs and born.exact and theirs.exact:
                found.append((born.earliest - theirs.earliest) / 365.25)
        if found:
            ages[sex] = (min(found), max(found))
    return ages
