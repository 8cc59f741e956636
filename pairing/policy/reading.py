"""Reading a policy file: every unknown key and every unusable value named, all at once."""

from __future__ import annotations

import hashlib
import tomllib
from pathlib import Path
from typing import TYPE_CHECKING, Any

from pairing.dates import AgeWindow
from pairing.errors import PolicyError
from pairing.policy.keys import AGE_KEYS, KEYS, LISTS, Key, NotUnderstoodError
from pairing.policy.rules import (
    AnimalDecision,
    Holder,
    Limits,
    LivingRule,
    PairDecision,
    Policy,
    StoredSemen,
    Weights,
)
from pairing.spelling import did_you_mean, listed

if TYPE_CHECKING:
    from collections.abc import Mapping

Values = dict[str, Any]
Ages = dict[tuple[str, str], AgeWindow]


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
    ages: Ages = {}
    lists: dict[str, list[Values]] = {}
    for table, value in tables.items():
        if table not in KEYS:
            reader.unknown(f"[{table}]", table, KEYS)
        elif table == "breeding_age":
            ages = reader.breeding_ages(value)
        elif table in LISTS:
            lists[table] = reader.entries(table, value)
        elif not isinstance(value, dict):
            reader.problems.append(f"{table}: expected a table written as [{table}].")
        else:
            plain[table] = reader.table(f"[{table}]", KEYS[table], value)
    problems = reader.problems + _contradictions(plain, ages, lists)
    if problems:
        raise PolicyError(
            f"{name}: the policy cannot be used as it is.",
            details=problems,
            remedy="Correct what is named above; `pairing start RECORDS` writes one to begin with.",
        )
    return _assembled(plain, ages, lists, tuple(reader.not_yet_used), sha256)


class _TableReader:
    """Collects the problems of all tables, so that they can be told at once."""

    def __init__(self) -> None:
        self.problems: list[str] = []
        self.not_yet_used: list[str] = []

    def unknown(self, where: str, key: str, known: Mapping[str, object]) -> None:
        hint = did_you_mean(key, known) or f"Known here: {', '.join(known)}."
        self.problems.append(f'{where}: "{key}" is not known. {hint}')

    def table(self, where: str, keys: Mapping[str, Key], values: Mapping[str, Any]) -> Values:
        read: Values = {}
        for key, value in values.items():
            if key not in keys:
                self.unknown(where, key, keys)
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

    def entries(self, table: str, value: object) -> list[Values]:
        if not isinstance(value, list) or not all(isinstance(each, dict) for each in value):
            self.problems.append(f"{table}: expected entries written as [[{table}]].")
            return []
        return [
            self.table(f"[[{table}]] number {number}", KEYS[table], entry)
            for number, entry in enumerate(value, start=1)
        ]

    def breeding_ages(self, value: object) -> Ages:
        if not isinstance(value, dict):
            self.problems.append("breeding_age: expected a table written as [breeding_age].")
            return {}
        windows: Ages = {}
        own = {key: each for key, each in value.items() if not isinstance(each, dict)}
        for sex, window in self.table("[breeding_age]", AGE_KEYS, own).items():
            windows["", sex] = window
        for line, each in value.items():
            if isinstance(each, dict):
                where = f'[breeding_age."{line}"]'
                for sex, window in self.table(where, AGE_KEYS, each).items():
                    windows[line, sex] = window
        return windows


def _contradictions(
    plain: Mapping[str, Values], ages: Ages, lists: Mapping[str, list[Values]]
) -> list[str]:
    problems = []
    programme = plain.get("programme", {})
    start, end = programme.get("season_start"), programme.get("season_end")
    if start and end and end.latest < start.earliest:
        problems.append(
            f"[programme]: the season ends ({end.text}) before it starts ({start.text})."
        )
    for (line, sex), window in ages.items():
        if _days(window.youngest) > _days(window.oldest):
            place = f'[breeding_age."{line}"]' if line else "[breeding_age]"
            problems.append(
                f"{place} {sex}: from {window.youngest} to {window.oldest} leaves no age."
            )
    seen: dict[tuple[str, str], str] = {}
    for entry in lists.get("pairs", []):
        if "until" in entry:
            continue
        pair = (entry.get("sire", ""), entry.get("dam", ""))
        decision = entry.get("decision", "")
        if seen.get(pair, decision) != decision and {seen[pair], decision} & {"never"}:
            problems.append(
                f"[[pairs]]: {pair[0]} x {pair[1]} is both {seen[pair]} and {decision}."
            )
        seen[pair] = decision
    problems += [
        f"[[animals]]: {entry.get('id')} at-most needs litters = a number."
        for entry in lists.get("animals", [])
        if entry.get("decision") == "at-most" and "litters" not in entry
    ]
    return problems


def _days(age: Any) -> float:
    return float(age.count) * {"years": 365.25, "months": 30.44, "weeks": 7, "days": 1}[age.unit]


def _assembled(
    plain: Mapping[str, Values],
    ages: Ages,
    lists: Mapping[str, list[Values]],
    not_yet_used: tuple[str, ...],
    sha256: str | None,
) -> Policy:
    living = plain.get("living", {})
    members: LivingRule = living.get("members", LivingRule())
    mating = plain.get("mating", {})
    return Policy(
        **plain.get("programme", {}),
        **plain.get("records", {}),
        living=LivingRule(living.get("presumed_dead_after"), members.members, members.value),
        breeding_age=ages,
        **mating,
        limits=Limits(**plain.get("limits", {})),
        weights=Weights(**plain.get("weights", {})),
        pairs=tuple(PairDecision(**entry) for entry in lists.get("pairs", [])),
        animals=tuple(AnimalDecision(**entry) for entry in lists.get("animals", [])),
        holders=tuple(Holder(**entry) for entry in lists.get("holders", [])),
        may_cross=_crossings(lists.get("lines", [])),
        stored_semen=tuple(StoredSemen(**entry) for entry in lists.get("gametes", [])),
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
