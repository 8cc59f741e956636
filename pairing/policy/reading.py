"""Reading a policy file: every unknown key and every unusable value named, all at once."""

from __future__ import annotations

import hashlib
import tomllib
from pathlib import Path
from typing import TYPE_CHECKING, Any

from pairing.dates import AgeWindow
from pairing.errors import PolicyError
from pairing.policy.keys import (
    AGE_TABLES,
    KEYS,
    LISTS,
    Key,
    NotUnderstoodError,
    missing_keys,
    needless_keys,
)
from pairing.policy.rules import (
    AnimalDecision,
    Holder,
    Limits,
    LivingRule,
    PairDecision,
    Policy,
    StoredSemen,
    Weights,
    pair_clashes,
    record_clashes,
)
from pairing.records.rules import Decision, RecordRules
from pairing.spelling import did_you_mean, listed

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

Values = dict[str, Any]
Entries = dict[str, list[tuple[str, Values]]]
"""List of the policy to its sound entries, each with its place."""
Ages = dict[tuple[str, str], AgeWindow]
_PEDIGREE_KEYS = ("unknown_parents", "litter_shares_sire")
"""Keys of [records] that are about the pedigree, and so fields of the policy itself."""


def read_policy(path: str | Path) -> Policy:
    """Read and check a programme's policy.

    Raises
    ------
    PolicyError
        If the file cannot be read as TOML, a key is unknown (the nearest known one is
        named), or a value cannot be used. All faults are named together.
    """
    path = Path(path)
    try:
        content = path.read_bytes()
    except OSError as error:
        raise PolicyError(
            f"{path}: the policy cannot be read ({error.strerror or error}).",
            remedy="Check the path; `pairing start RECORDS --out FILE.toml` writes one.",
        ) from None
    try:
        tables = tomllib.loads(content.decode("utf-8-sig"))
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise PolicyError(
            f"{path}: this is not a readable policy file ({error}).",
            remedy="Texts stand in quotation marks, dates as 2027-03-01 without.",
        ) from None
    return policy_from_tables(tables, name=path.name, sha256=hashlib.sha256(content).hexdigest())


def policy_from_tables(
    tables: Mapping[str, Any], *, name: str = "policy", sha256: str | None = None
) -> Policy:
    """A checked `Policy` from the tables of a policy file; raises `PolicyError` as above."""
    reader = _TableReader()
    plain: dict[str, Values] = {}
    ages: dict[str, Ages] = {}
    lists: Entries = {}
    for table, value in tables.items():
        if table not in KEYS or "." in table:
            reader.unknown(f"[{table}]", table, KEYS)
        elif table in AGE_TABLES:
            ages[table] = reader.age_windows(table, value)
        elif table in LISTS:
            lists[table] = reader.entries(table, value)
        elif not isinstance(value, dict):
            reader.problems.append(f"{table}: expected a table written as [{table}].")
        else:
            plain[table] = reader.table(f"[{table}]", KEYS[table], value, _lists_inside(table))
            for key in filter(value.__contains__, _lists_inside(table)):
                lists[f"{table}.{key}"] = reader.entries(f"{table}.{key}", value[key])
    problems = reader.problems + _contradictions(plain, ages, lists)
    if problems:
        raise PolicyError(
            f"{name}: the policy cannot be used as it is.",
            details=problems,
            remedy="Correct what is named above; `pairing start RECORDS` writes one to begin with.",
        )
    return _assembled(plain, ages, lists, tuple(reader.not_yet_used), sha256)


def _lists_inside(table: str) -> list[str]:
    return [name.removeprefix(f"{table}.") for name in LISTS if name.startswith(f"{table}.")]


class _TableReader:
    """Collects the problems of all tables, so that they can be told at once."""

    def __init__(self) -> None:
        self.problems: list[str] = []
        self.not_yet_used: list[str] = []

    def unknown(self, where: str, key: str, known: Mapping[str, object]) -> None:
        hint = did_you_mean(key, known) or f"Known here: {', '.join(known)}."
        self.problems.append(f'{where}: "{key}" is not known. {hint}')

    def table(
        self,
        where: str,
        keys: Mapping[str, Key],
        values: Mapping[str, Any],
        lists_inside: Sequence[str] = (),
    ) -> Values:
        read: Values = {}
        for key, value in values.items():
            if key in lists_inside:
                continue
            if key not in keys:
                self.unknown(where, key, dict.fromkeys([*keys, *lists_inside]))
                continue
            try:
                read[key] = keys[key].convert(value)
            except NotUnderstoodError as expected:
                shown = f'"{value}"' if isinstance(value, str) else value
                self.problems.append(f"{where} {key}: found {shown}, expected {expected}.")
            if not keys[key].used:
                self._note_unused(where, key)
        for key, described in keys.items():
            if described.required and key not in values:
                self.problems.append(f'{where}: "{key}" is missing ({described.meaning}).')
        return read

    def _note_unused(self, where: str, key: str) -> None:
        table = where.split("]")[0].lstrip("[")
        entry = (
            f"[{table}]"
            if table in ("conditions", "depression", "futures")
            else (f"[{table}] {key}")
        )
        if entry not in self.not_yet_used:
            self.not_yet_used.append(entry)

    def entries(self, table: str, value: object) -> list[tuple[str, Values]]:
        """The entries without a fault, each with its place."""
        if not isinstance(value, list) or not all(isinstance(each, dict) for each in value):
            self.problems.append(f"{table}: expected entries written as [[{table}]].")
            return []
        sound = []
        for number, entry in enumerate(value, start=1):
            where = f"[[{table}]] number {number}"
            faults_before = len(self.problems)
            read = self.table(where, KEYS[table], entry)
            decision = read.get("decision")
            self.problems += [
                f'{where}: "{key}" is missing; {decision} needs it ({KEYS[table][key].meaning}).'
                for key in missing_keys(table, decision, entry)
            ] + [
                f'{where}: {decision} does not take "{key}"; leave it out.'
                for key in needless_keys(table, decision, entry)
            ]
            if len(self.problems) == faults_before:
                sound.append((where, read))
        return sound

    def age_windows(self, table: str, value: object) -> Ages:
        if not isinstance(value, dict):
            self.problems.append(f"{table}: expected a table written as [{table}].")
            return {}
        windows: Ages = {}
        own = {key: each for key, each in value.items() if not isinstance(each, dict)}
        for sex, window in self.table(f"[{table}]", AGE_TABLES[table], own).items():
            windows["", sex] = window
        for line, each in value.items():
            if isinstance(each, dict):
                where = f'[{table}."{line}"]'
                for sex, window in self.table(where, AGE_TABLES[table], each).items():
                    windows[line, sex] = window
        return windows


def _contradictions(
    plain: Mapping[str, Values], ages: Mapping[str, Ages], lists: Entries
) -> list[str]:
    problems = []
    programme = plain.get("programme", {})
    start, end = programme.get("season_start"), programme.get("season_end")
    if start and end and end.latest < start.earliest:
        problems.append(
            f"[programme]: the season ends ({end.text}) before it starts ({start.text})."
        )
    for table, windows in ages.items():
        for (line, sex), window in windows.items():
            if _days(window.youngest) > _days(window.oldest):
                place = f'[{table}."{line}"]' if line else f"[{table}]"
                problems.append(
                    f"{place} {sex}: from {window.youngest} to {window.oldest} leaves no age."
                )
    pairs = [(place, PairDecision(**entry)) for place, entry in lists.get("pairs", ())]
    about_records = [
        (place, Decision(**entry)) for place, entry in lists.get("records.decisions", ())
    ]
    return problems + pair_clashes(pairs) + record_clashes(about_records)


def _days(age: Any) -> float:
    return float(age.count) * {"years": 365.25, "months": 30.44, "weeks": 7, "days": 1}[age.unit]


def _assembled(
    plain: Mapping[str, Values],
    ages: Mapping[str, Ages],
    lists: Entries,
    not_yet_used: tuple[str, ...],
    sha256: str | None,
) -> Policy:
    living = plain.get("living", {})
    members: LivingRule = living.get("members", LivingRule())
    mating = plain.get("mating", {})

    def listed_as(table: str) -> list[Values]:
        return [entry for _place, entry in lists.get(table, ())]

    own = plain.get("records", {})
    about_pedigree = {key: own[key] for key in _PEDIGREE_KEYS if key in own}
    return Policy(
        **plain.get("programme", {}),
        **about_pedigree,
        records=RecordRules(
            column_map=own.get("map", ()),
            **{key: own[key] for key in own if key not in (*_PEDIGREE_KEYS, "map")},
            parent_age=ages.get("parent_age", {}),
            stored_semen=frozenset(entry["id"] for entry in listed_as("gametes")),
            decisions=tuple(Decision(**entry) for entry in listed_as("records.decisions")),
        ),
        living=LivingRule(living.get("presumed_dead_after"), members.members, members.value),
        breeding_age=ages.get("breeding_age", {}),
        **mating,
        limits=Limits(**plain.get("limits", {})),
        weights=Weights(**plain.get("weights", {})),
        pairs=tuple(PairDecision(**entry) for entry in listed_as("pairs")),
        animals=tuple(AnimalDecision(**entry) for entry in listed_as("animals")),
        holders=tuple(Holder(**entry) for entry in listed_as("holders")),
        may_cross=_crossings(listed_as("lines")),
        stored_semen=tuple(StoredSemen(**entry) for entry in listed_as("gametes")),
        not_yet_used=not_yet_used,
        sha256=sha256,
    )


def _crossings(lines: list[Values]) -> dict[str, frozenset[str]]:
    """Permission to cross goes both ways, whichever line names the other."""
    may_cross: dict[str, set[str]] = {}
    for entry in lines:
        for other in entry.get("may_cross", ()):
            may_cross.setdefault(entry["name"], set()).add(other)
            may_cross.setdefault(other, set()).add(entry["name"])
    return {line: frozenset(others) for line, others in may_cross.items()}


def unused_keys_note(policy: Policy) -> str:
    """A sentence naming the keys that this version reads but does not act upon, or ""."""
    if not policy.not_yet_used:
        return ""
    return (
        f"The policy's {listed(policy.not_yet_used)} "
        f"{'is' if len(policy.not_yet_used) == 1 else 'are'} read and checked, but this version "
        f"does not act on {'it' if len(policy.not_yet_used) == 1 else 'them'}."
    )
