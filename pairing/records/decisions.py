"""Decisions about records, applied to the view: cells of it change, the rows never do."""

from __future__ import annotations

from typing import TYPE_CHECKING

from pairing.records.duplicates import PARENT_FIELDS
from pairing.records.fields import tidy
from pairing.records.findings import Finding

if TYPE_CHECKING:
    from collections.abc import Callable, MutableMapping

    from pairing.records.animals import PlaceArray
    from pairing.records.ids.naming import Names
    from pairing.records.rules import Decision, RecordRules
    from pairing.records.table import Records

    Patches = MutableMapping[str, dict[int, str]]


def applied_decisions(
    rules: RecordRules,
    records: Records,
    names: Names,
    first_row: PlaceArray,
    cell: Callable[[str, int], str],
    patched: Patches,
) -> list[Finding]:
    """Patch what the decisions change; a finding for each that changes nothing.

    Merged ids and chosen rows are in `names` and `first_row` already, and ``accept`` is judged
    when all findings are known.

    Parameters
    ----------
    cell
        The cell of a field and an animal as the view has it so far.
    patched
        Field to animals whose cell is not that of their row; it is added to.
    """
    findings = []
    aliases = rules.aliases
    for number, each in enumerate(rules.decisions, start=1):
        animal = names.find(aliases.get(each.id, each.id))
        problem = _without_effect(each, animal, records, first_row, cell)
        if problem:
            findings.append(
                Finding(
                    "decision-without-effect",
                    f"decision {number} ({each.decision} {each.id}) changes nothing: {problem}.",
                    "Correct it in the policy, or take it out.",
                    id=each.id,
                    found=each.decision,
                )
            )
        elif each.decision == "drop-link":
            patched[each.parent][animal] = ""
            if each.parent == "dam" and "genetic_dam" in records.fields:
                patched["genetic_dam"][animal] = ""
        elif each.decision == "set":
            patched[each.field][animal] = tidy(each.value)
    return findings


def _without_effect(
    decision: Decision,
    animal: int,
    records: Records,
    first_row: PlaceArray,
    cell: Callable[[str, int], str],
) -> str:
    """Why a decision changes nothing, or a blank text."""
    if decision.decision == "accept":
        return ""
    if decision.decision == "merge":
        absent = [also for also in decision.also if not _is_named(records, also)]
        return f"no row or parent is called {', '.join(absent)}" if absent else ""
    if not 0 <= animal < len(first_row):
        return f'there is no row with the id "{decision.id}"'
    if decision.decision == "use-row":
        if int(records.lines[int(first_row[animal])]) != decision.row:
            return f"line {decision.row} is no row of {decision.id}"
        return ""
    if decision.decision == "drop-link":
        fields = [decision.parent, *(["genetic_dam"] if decision.parent == "dam" else [])]
        if all(cell(field, animal) == "" for field in fields):
            return f"no {decision.parent} is recorded"
        return ""
    if cell(decision.field, animal) == tidy(decision.value):
        return f'{decision.field} reads "{decision.value}" already'
    return ""


def _is_named(records: Records, name: str) -> bool:
    return name in records.joined_ids or any(
        field in records.fields and name in records.fields[field]
        for field in ("id", *PARENT_FIELDS)
    )
