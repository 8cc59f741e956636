"""`Policy`: the programme's rules as frozen values, with the defaults of a call without any.

Here too is what its decisions must not do: contradict each other.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from pairing.records.rules import RecordRules

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping, Sequence

    from pairing.dates import AgeWindow, DateRange
    from pairing.records.rules import Decision

PAIR_SYSTEM = "pairs"
MATING_SYSTEMS = ("pairs", "one-male-several-females")
LATER_SYSTEMS = ("group", "rotation", "brother-sister")
PAIR_DECISIONS = ("together", "together-no-young", "must-breed", "never")
ANIMAL_DECISIONS = ("rest", "must-breed", "at-most")


@dataclass(frozen=True, slots=True)
class Limits:
    """What a plan must keep to; None means no limit (or, for `young`, the default number).

    Attributes
    ----------
    offspring_inbreeding
        Highest inbreeding coefficient of young, in [0, 1]; meeting it is allowed.
    above_breed_mean
        How far young may lie above the mean inbreeding of the living.
    young
        How many young are wanted, exactly.
    young_per_litter
        How many young a litter has, exactly; a remainder makes one smaller litter.
    litters_per_male, litters_per_female
        Litters an animal may have this season.
    share_per_male
        Largest share of all young by one male, in (0, 1].
    moves
        Transfers between holders at most.
    """

    offspring_inbreeding: float | None = None
    above_breed_mean: float | None = None
    young: int | None = None
    young_per_litter: int = 1
    litters_per_male: int | None = None
    litters_per_female: int = 1
    share_per_male: float | None = None
    moves: int | None = None


@dataclass(frozen=True, slots=True)
class Weights:
    """The weights of the objective, all in kinship per young or as interface rules say."""

    inbreeding: float = 1.0
    diversity: float = 1.0
    travel: float = 0.0
    merit: float = 0.0


@dataclass(frozen=True, slots=True)
class PairDecision:
    """A standing decision on one pair."""

    sire: str
    dam: str
    decision: str
    until: DateRange | None = None
    reason: str = ""


@dataclass(frozen=True, slots=True)
class AnimalDecision:
    """A standing decision on one animal; `litters` belongs to ``at-most``."""

    id: str
    decision: str
    litters: int | None = None
    until: DateRange | None = None
    reason: str = ""


@dataclass(frozen=True, slots=True)
class Holder:
    """Where a holder is, in degrees; None where not given."""

    name: str
    latitude: float | None = None
    longitude: float | None = None
    places: int | None = None


@dataclass(frozen=True, slots=True)
class StoredSemen:
    """Stored gametes: the sire may be dead; each litter takes a dose."""

    id: str
    doses: int


@dataclass(frozen=True, slots=True)
class LivingRule:
    """Who makes up the population.

    `members` is ``living``, ``bred_within_years`` or ``born_since``, with `years` or `year`
    in `value`.
    """

    presumed_dead_after: float | None = None
    members: str = "living"
    value: int | None = None


@dataclass(frozen=True, slots=True)
class Policy:
    """All rules of a programme. `Policy()` is what holds without a file.

    Attributes
    ----------
    breeding_age
        ``(line, sex)`` to the ages at which it may breed, the line "" standing for all
        others; empty without limits.
    may_cross
        Line to the other lines it may be mated with.
    not_yet_used
        Keys that were read and checked but that this version does not act upon.
    sha256
        Of the file's bytes; None without a file. With tables of decisions beside it, of the
        digests of all (see `read_decision_tables`).
    """

    name: str = ""
    season_start: DateRange | None = None
    season_end: DateRange | None = None
    as_of: DateRange | None = None
    unknown_parents: str = "unrelated"
    litter_shares_sire: bool = True
    records: RecordRules = field(default_factory=RecordRules)
    living: LivingRule = field(default_factory=LivingRule)
    breeding_age: Mapping[tuple[str, str], AgeWindow] = field(default_factory=dict)
    system: str = PAIR_SYSTEM
    allow_closest: bool = False
    limits: Limits = field(default_factory=Limits)
    weights: Weights = field(default_factory=Weights)
    pairs: tuple[PairDecision, ...] = ()
    animals: tuple[AnimalDecision, ...] = ()
    holders: tuple[Holder, ...] = ()
    may_cross: Mapping[str, frozenset[str]] = field(default_factory=dict)
    stored_semen: tuple[StoredSemen, ...] = ()
    not_yet_used: tuple[str, ...] = ()
    sha256: str | None = None

    @property
    def litters_per_male(self) -> int | None:
        """Litters a male may have: as given, else one in pairs and no limit elsewhere."""
        if self.limits.litters_per_male is None and self.system == PAIR_SYSTEM:
            return 1
        return self.limits.litters_per_male


def pair_clashes(decisions: Sequence[tuple[str, PairDecision]]) -> list[str]:
    """Faults of pairs that are never to mate and yet have another decision.

    Each decision comes with its place, for the message. One that ends does not clash: which
    of the two holds depends on the season.
    """
    first: dict[tuple[str, str], list[tuple[str, str]]] = {}
    problems = []
    for place, each in decisions:
        if each.until is not None:
            continue
        earlier = first.setdefault((each.sire, each.dam), [])
        clash = next(
            (
                said
                for said in earlier
                if said[1] != each.decision and "never" in (said[1], each.decision)
            ),
            None,
        )
        if clash:
            problems.append(
                f"{place}: {each.sire} x {each.dam} is {each.decision}, "
                f"but {clash[0]} says {clash[1]}."
            )
        earlier.append((place, each.decision))
    return problems


def record_clashes(decisions: Sequence[tuple[str, Decision]]) -> list[str]:
    """Faults of decisions about records that cannot hold together.

    One id read from two rows, merged twice or in a circle, a link dropped twice or both
    dropped and set, a field set to two values. Each decision comes with its place.
    """
    first: dict[tuple[str, ...], tuple[str, str]] = {}
    problems = []
    for place, each in decisions:
        for key, says, once in _claims(each):
            if key not in first:
                first[key] = (place, says)
                continue
            where, said = first[key]
            if said != says:
                problems.append(f"{place}: {says}, but {where} says {said}.")
            elif once:
                problems.append(f"{place}: {says}, which {where} says already.")
    return problems + _merging_in_circles(decisions)


def _claims(decision: Decision) -> Iterator[tuple[tuple[str, ...], str, bool]]:
    """What a decision lays claim to, what it says of that, and whether it may be said only once."""
    name = decision.id
    if decision.decision == "use-row":
        yield ("row", name), f"{name} is read from line {decision.row}", False
    elif decision.decision == "merge":
        for other in decision.also:
            yield ("merged", other), f"{other} is merged into {name}", True
    elif decision.decision == "drop-link":
        parent = decision.parent
        yield ("field", name, parent), f"the {parent} of {name} is dropped", True
    elif decision.decision == "set":
        value = f'set to "{decision.value}"' if decision.value else "cleared"
        says = f"{decision.field} of {name} is {value}"
        if decision.field in ("sire", "dam"):
            says = f"the {says}"
        yield ("field", name, decision.field), says, False


def _merging_in_circles(decisions: Sequence[tuple[str, Decision]]) -> list[str]:
    """One fault a circle of merges, with every id in it, told at its last entry."""
    into = {
        other: (each.id, number)
        for number, (_place, each) in reversed(list(enumerate(decisions)))
        if each.decision == "merge"
        for other in each.also
    }
    problems = []
    seen: set[str] = set()
    for start in into:
        path: list[str] = []
        here = start
        while here in into and here not in seen:
            seen.add(here)
            path.append(here)
            here = into[here][0]
        if here in path:
            circle = path[path.index(here) :]
            last = max(into[each][1] for each in circle)
            steps = ", ".join(
                f"{each} into {into[each][0]} ({decisions[into[each][1]][0]})" for each in circle
            )
            problems.append(f"{decisions[last][0]}: merging goes round in a circle: {steps}.")
    return problems
