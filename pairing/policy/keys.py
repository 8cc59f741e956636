"""Every key a policy file may have: what it takes, what it means, whether this version acts on it.

The reader, the starter file and the docs' key table all read `KEYS`.
"""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from typing import TYPE_CHECKING

from pairing.dates import AgeWindow, DateRange, parse_age, parse_date
from pairing.policy.rules import (
    ANIMAL_DECISIONS,
    LATER_SYSTEMS,
    MATING_SYSTEMS,
    PAIR_DECISIONS,
    LivingRule,
)

if TYPE_CHECKING:
    from collections.abc import Callable


MOST = 1_000_000
"""No programme counts beyond this in one season."""


class NotUnderstoodError(ValueError):
    """A value that a key cannot take; the text says what is expected."""


@dataclass(frozen=True, slots=True)
class Key:
    """One key of a policy table."""

    convert: Callable[[object], object]
    meaning: str
    required: bool = False
    used: bool = True


def text(value: object) -> str:
    """A text that is not blank."""
    if isinstance(value, str) and value.strip():
        return value.strip()
    raise NotUnderstoodError('a text in quotation marks, such as "A12"')


def yes_no(value: object) -> bool:
    """A TOML boolean."""
    if isinstance(value, bool):
        return value
    raise NotUnderstoodError("true or false")


def day(value: object) -> DateRange:
    """A date, of reduced precision too."""
    if isinstance(value, datetime.datetime):
        value = value.date()
    if isinstance(value, datetime.date):
        value = value.isoformat()
    read = parse_date(str(value)) if isinstance(value, str | int) else None
    if read is None:
        raise NotUnderstoodError("a date such as 2027-03-01")
    return read


def whole(least: int) -> Callable[[object], int]:
    """A whole number, `least` or more."""

    def convert(value: object) -> int:
        if isinstance(value, int) and not isinstance(value, bool) and least <= value <= MOST:
            return value
        raise NotUnderstoodError(f"a whole number from {least} to {MOST}")

    return convert


def number(least: float | None = None, most: float | None = None) -> Callable[[object], float]:
    """A finite number within bounds."""

    def convert(value: object) -> float:
        if isinstance(value, int | float) and not isinstance(value, bool):
            fits = (least is None or value >= least) and (most is None or value <= most)
            if fits and value == value and abs(value) != float("inf"):
                return float(value)
        bounds = "" if least is None else f" from {least:g}"
        bounds += "" if most is None else f" to {most:g}"
        raise NotUnderstoodError(f"a number{bounds}")

    return convert


def share(value: object) -> float:
    """A share in [0, 1], also written as a percentage such as ``"6.25%"``."""
    if isinstance(value, str) and value.strip().endswith("%"):
        try:
            value = float(value.strip()[:-1]) / 100
        except ValueError:
            value = None
    if isinstance(value, int | float) and not isinstance(value, bool) and 0 <= value <= 1:
        return float(value)
    raise NotUnderstoodError('a share from 0 to 1 such as 0.0625, or "6.25%"')


def one_of(*words: str, later: tuple[str, ...] = ()) -> Callable[[object], str]:
    """One of some words; those of `later` are known but not available yet."""

    def convert(value: object) -> str:
        if value in words:
            return str(value)
        if value in later:
            raise NotUnderstoodError(f'{" or ".join(words)}; "{value}" is not available yet')
        raise NotUnderstoodError(f"one of: {', '.join(words)}")

    return convert


def texts(value: object) -> frozenset[str]:
    """A list of texts."""
    if isinstance(value, list) and all(isinstance(each, str) for each in value):
        return frozenset(each.strip() for each in value)
    raise NotUnderstoodError('a list of texts such as ["southern"]')


def ages(value: object) -> AgeWindow:
    """Two ages, from and to."""
    if isinstance(value, list) and len(value) == 2:
        youngest, oldest = parse_age(value[0]), parse_age(value[1])
        if youngest and oldest:
            return AgeWindow(youngest, oldest)
    raise NotUnderstoodError('two ages, from and to: [2, 15] or ["8 weeks", "18 months"]')


def members(value: object) -> LivingRule:
    """The rule for who makes up the population."""
    if value == "living":
        return LivingRule()
    rule, equals, years = value.partition("=") if isinstance(value, str) else ("", "", "")
    if equals and rule.strip() in ("bred_within_years", "born_since") and years.strip().isdigit():
        return LivingRule(members=rule.strip(), value=int(years))
    raise NotUnderstoodError('"living", "bred_within_years = 3" or "born_since = 2015"')


AGE_KEYS = {
    "male": Key(ages, 'ages from and to which males breed, in years or as "8 weeks"'),
    "female": Key(ages, "ages from and to which females breed"),
}

KEYS: dict[str, dict[str, Key]] = {
    "programme": {
        "name": Key(text, "the programme's name, printed above every answer"),
        "season_start": Key(day, "ages are judged on this day"),
        "season_end": Key(day, "last day of the season"),
        "as_of": Key(day, "the population is counted on this day"),
    },
    "records": {
        "unknown_parents": Key(
            one_of("unrelated", later=("like-contemporaries",)), "how unknown parents count"
        ),
        "litter_shares_sire": Key(
            yes_no, "whether litter-mates with the same possible sires have one sire"
        ),
    },
    "living": {
        "presumed_dead_after": Key(
            number(0), "years of age after which an animal without news counts as dead"
        ),
        "members": Key(members, "who makes up the population"),
    },
    "breeding_age": AGE_KEYS,
    "mating": {
        "system": Key(one_of(*MATING_SYSTEMS, later=LATER_SYSTEMS), "how animals are mated"),
        "allow_closest": Key(yes_no, "whether parent x offspring and full sibs may mate"),
    },
    "limits": {
        "offspring_inbreeding": Key(share, "highest inbreeding of young; meeting it is allowed"),
        "above_breed_mean": Key(share, "how far young may lie above the mean inbreeding"),
        "young": Key(whole(0), "young wanted this season, exactly"),
        "young_per_litter": Key(whole(1), "young in a litter"),
        "litters_per_male": Key(whole(0), "litters a male may have this season"),
        "litters_per_female": Key(whole(0), "litters a female may have this season"),
        "share_per_male": Key(share, "largest share of all young by one male"),
        "moves": Key(whole(0), "transfers between holders at most"),
    },
    "weights": {
        "inbreeding": Key(number(0), "weight of the mean inbreeding of the young"),
        "diversity": Key(number(0), "weight of the gene diversity of the population"),
        "travel": Key(number(0), "weight of the mean distance moved, per 1000 km"),
        "merit": Key(number(0), "weight of the mean merit of the parents"),
    },
    "pairs": {
        "sire": Key(text, "id of the male", required=True),
        "dam": Key(text, "id of the female", required=True),
        "decision": Key(one_of(*PAIR_DECISIONS), "what holds for the pair", required=True),
        "until": Key(day, "last day on which the decision holds"),
        "reason": Key(text, "why, shown in the plan"),
    },
    "animals": {
        "id": Key(text, "id of the animal", required=True),
        "decision": Key(one_of(*ANIMAL_DECISIONS), "what holds for it", required=True),
        "litters": Key(whole(0), "with at-most: how many litters"),
        "until": Key(day, "last day on which the decision holds"),
        "reason": Key(text, "why, shown in the plan"),
    },
    "holders": {
        "name": Key(text, "the holder as the records spell it", required=True),
        "latitude": Key(number(-90, 90), "degrees north"),
        "longitude": Key(number(-180, 180), "degrees east"),
        "places": Key(whole(0), "animals it has room for", used=False),
    },
    "lines": {
        "name": Key(text, "a line as the records spell it", required=True),
        "may_cross": Key(texts, "other lines it may be mated with"),
    },
    "gametes": {
        "id": Key(text, "id of the male whose semen is stored", required=True),
        "doses": Key(whole(0), "doses left; each litter takes one", required=True),
    },
    "conditions": {
        "name": Key(text, "name of the heritable condition", required=True, used=False),
        "inheritance": Key(
            one_of("recessive", "x-linked", "dominant"), "how it passes on", used=False
        ),
        "allele_frequency": Key(share, "frequency of the allele", used=False),
        "limit": Key(share, "highest tolerated chance of affected young", used=False),
        "one_parent_tested_free": Key(yes_no, "whether one parent must be tested free", used=False),
    },
    "depression": {
        "outcome": Key(text, "a 0/1 column of the records", used=False),
        "survived_to_days": Key(number(0), "outcome: alive at this age", used=False),
        "haploid_lethal_equivalents": Key(number(), "cost of inbreeding per gamete", used=False),
        "diploid_lethal_equivalents": Key(number(), "cost of inbreeding per animal", used=False),
        "source": Key(text, "where the figure comes from", used=False),
    },
    "futures": {
        "name": Key(text, "name of the future", required=True, used=False),
        "places": Key(whole(0), "animals the programme has room for", used=False),
    },
}
"""Table of the policy to its keys."""

LISTS = frozenset({"pairs", "animals", "holders", "lines", "gametes", "conditions", "futures"})
"""Tables written as ``[[name]]``, once for each entry."""
