"""Every key a policy file may have: what it takes, what it means, whether this version acts on it.

The reader, the starter file and the docs' key table all read `KEYS`.
"""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from typing import TYPE_CHECKING

from pairing.dates import Age, AgeWindow, DateRange, parse_age, parse_date
from pairing.policy.rules import (
    ANIMAL_DECISIONS,
    LATER_SYSTEMS,
    MATING_SYSTEMS,
    PAIR_DECISIONS,
    LivingRule,
)
from pairing.records.fields import FIELDS, tidy
from pairing.records.findings import KINDS
from pairing.records.mapping import EVENT_FIELDS
from pairing.records.rules import DATE_ORDERS, DECISIONS
from pairing.spelling import nearest_names

if TYPE_CHECKING:
    from collections.abc import Callable, Collection, Iterable


MOST = 1_000_000
"""No programme counts beyond this in one season."""
_LAST_LINE = 1_000_000_000
"""No table of animals is longer than this."""


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


def animal_id(value: object) -> str:
    """An id as the records' own are compared: NFKC, trimmed, inner blanks folded to one."""
    return tidy(text(value))


def animal_ids(value: object) -> tuple[str, ...]:
    """One id or a list of them."""
    ids = [value] if isinstance(value, str) else value
    if (
        isinstance(ids, list)
        and ids
        and all(isinstance(each, str) and each.strip() for each in ids)
    ):
        return tuple(tidy(each) for each in ids)
    raise NotUnderstoodError('an id such as "A12" or a list of them, ["A12", "A13"]')


def cell_text(value: object) -> str:
    """What is to be read in a cell: a text, also blank, a number, a day, or true and false."""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, datetime.datetime):
        value = value.date()
    if isinstance(value, datetime.date):
        return value.isoformat()
    if isinstance(value, str | int | float):
        return tidy(str(value))
    raise NotUnderstoodError('what to read in the field, such as "A12"; "" clears it')


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


def whole(least: int, most: int = MOST) -> Callable[[object], int]:
    """A whole number from `least` to `most`."""

    def convert(value: object) -> int:
        if isinstance(value, int) and not isinstance(value, bool) and least <= value <= most:
            return value
        raise NotUnderstoodError(f"a whole number from {least} to {most}")

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
        raise NotUnderstoodError(f"one of: {', '.join(words)}{_perhaps(str(value), words)}")

    return convert


def _perhaps(word: str, known: Iterable[str]) -> str:
    close = nearest_names(word, known)
    return f' (did you mean "{close[0]}"?)' if close else ""


def acceptable_kind(value: object) -> str:
    """A kind of finding that may be right as recorded."""
    if isinstance(value, str) and value in KINDS and KINDS[value].stops:
        raise NotUnderstoodError(
            f'a finding that leaves kinship defined; "{value}" cannot be accepted, '
            "only mended by drop-link, set or use-row"
        )
    return one_of(*(name for name, kind in KINDS.items() if not kind.stops))(value)


def texts(value: object) -> frozenset[str]:
    """A list of texts."""
    if isinstance(value, list) and all(isinstance(each, str) for each in value):
        return frozenset(each.strip() for each in value)
    raise NotUnderstoodError('a list of texts such as ["southern"]')


def column_map(value: object) -> tuple[str, ...]:
    """Entries as those of ``--map``; which columns there are is known only to the records."""
    if not isinstance(value, list) or not all(isinstance(each, str) for each in value):
        raise NotUnderstoodError('a list of texts such as ["Their Column=id"]')
    settled: set[str] = set()
    wanted: list[str] = []
    for entry in value:
        theirs, _equals, field = (part.strip() for part in entry.rpartition("="))
        if not theirs:
            wanted.append(f'Their Column=field in place of "{entry}"')
        elif field and field not in FIELDS and field not in EVENT_FIELDS:
            wanted.append(f'a field after the = of "{entry}"{_perhaps(field, FIELDS)}')
        elif field in settled:
            wanted.append(f'"{field}" only once')
        settled |= {field} - {""}
    if wanted:
        raise NotUnderstoodError("; ".join(wanted))
    return tuple(entry.strip() for entry in value)


def span(value: object) -> Age:
    """A length of time with its unit.

    A bare number would count as years, and ``gestation = 63`` never means that.
    """
    read = parse_age(value) if isinstance(value, str) else None
    if read is None:
        raise NotUnderstoodError('a time with its unit, such as "63 days" or "11 months"')
    return read


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


AGE_TABLES: dict[str, dict[str, Key]] = {
    "parent_age": {
        "male": Key(ages, "ages of a sire at which a birth is believed"),
        "female": Key(ages, "ages of a dam at which a birth is believed"),
    },
    "breeding_age": {
        "male": Key(ages, 'ages from and to which males breed, in years or as "8 weeks"'),
        "female": Key(ages, "ages from and to which females breed"),
    },
}
"""Tables of ages, each with tables of the same keys for single lines inside it."""

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
        "map": Key(column_map, "columns and the fields they hold, as with --map"),
        "date_order": Key(one_of(*DATE_ORDERS), "how dates such as 03/04/2019 are meant"),
        "selfing": Key(yes_no, "whether one animal may rightly be both parents of another"),
        "gestation": Key(span, "time from conception to birth"),
        "sperm_storage": Key(span, "how long after a sire's death young of his may be conceived"),
        "largest_litter": Key(whole(1), "young in a litter at most"),
    },
    "records.decisions": {
        "decision": Key(one_of(*DECISIONS), "what is decided about the records", required=True),
        "id": Key(animal_id, "id of the animal", required=True),
        "row": Key(whole(1, _LAST_LINE), "line of the row that is believed"),
        "also": Key(animal_ids, "the other ids of the animal"),
        "parent": Key(one_of("sire", "dam"), "the parent that is not used"),
        "field": Key(one_of(*(name for name in FIELDS if name != "id")), "the field that is set"),
        "value": Key(cell_text, "what is read in the field; blank clears it"),
        "kind": Key(acceptable_kind, "the kind of finding that is right as recorded"),
        "who": Key(text, "who decided"),
        "when": Key(day, "when it was decided"),
        "why": Key(text, "for what reason"),
    },
    "parent_age": AGE_TABLES["parent_age"],
    "living": {
        "presumed_dead_after": Key(
            number(0), "years of age after which an animal without news counts as dead"
        ),
        "members": Key(members, "who makes up the population"),
    },
    "breeding_age": AGE_TABLES["breeding_age"],
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
        "sire": Key(animal_id, "id of the male", required=True),
        "dam": Key(animal_id, "id of the female", required=True),
        "decision": Key(one_of(*PAIR_DECISIONS), "what holds for the pair", required=True),
        "until": Key(day, "last day on which the decision holds"),
        "reason": Key(text, "why, shown in the plan"),
    },
    "animals": {
        "id": Key(animal_id, "id of the animal", required=True),
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
        "id": Key(animal_id, "id of the male whose semen is stored", required=True),
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
"""Table of the policy to its keys; `records.decisions` is the list `decisions` in `records`."""

LISTS = frozenset(
    {
        "records.decisions",
        "pairs",
        "animals",
        "holders",
        "lines",
        "gametes",
        "conditions",
        "futures",
    }
)
"""Tables written as ``[[name]]``, once for each entry."""

NEEDS: dict[str, dict[str, tuple[str, ...]]] = {
    "records.decisions": {
        "use-row": ("row",),
        "merge": ("also",),
        "drop-link": ("parent",),
        "set": ("field", "value"),
        "accept": ("kind",),
    },
    "animals": {"at-most": ("litters",)},
}
"""Table to what each of its decisions needs beside the keys that are always required."""


def missing_keys(table: str, decision: object, given: Collection[str]) -> list[str]:
    """Keys that this decision needs and that are not given."""
    return [key for key in NEEDS.get(table, {}).get(str(decision), ()) if key not in given]


def needless_keys(table: str, decision: object, given: Collection[str]) -> list[str]:
    """Keys that only another decision about the records needs; they would say nothing here."""
    if table != "records.decisions" or decision not in NEEDS[table]:
        return []
    others = {key for keys in NEEDS[table].values() for key in keys}
    return [key for key in given if key in others - set(NEEDS[table][str(decision)])]
