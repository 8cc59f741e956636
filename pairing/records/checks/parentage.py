"""Doubts about who is whose parent: own parents, parents without rows, roles against sexes."""

from __future__ import annotations

import re
from dataclasses import replace
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from pairing.records.animals import ROLES
from pairing.records.findings import Finding
from pairing.records.ids.look_alikes import essence, number_breaks
from pairing.spelling import listed, nearest_names

if TYPE_CHECKING:
    from pairing.records.animals import Animals, BoolArray
    from pairing.records.rules import RecordRules

PARENT_SEX = {"sire": "male", "dam": "female"}
_BLANKS_IN_OTHER_WORDS = frozenset(
    {"-", "--", "---", "n/a", "none", "nil", "not known", "unrecorded", "x", "xx", "xxx"}
)
_MOST_ABSENT, _MOST_KNOWN = 20, 5000
_MOST_COMPARED = 200_000
_SHORT = 4
_BETWEEN_PARENTS = re.compile(r"\s+or\s+|\s*[/;,&]\s*|\s+and\s+", re.IGNORECASE)
_REGISTRATIONS = re.compile(r"[/;,|+]")


def own_parents(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Animals recorded as their own parent."""
    own = animals.places
    findings = []
    for role in ROLES:
        places = np.flatnonzero(getattr(animals, role) == own).tolist()
        findings += [_own_parent(animals, place, role) for place in places]
    return findings


def _own_parent(animals: Animals, place: int, role: str) -> Finding:
    name = animals.names[place]
    return Finding(
        "own-parent",
        f"{name} is recorded as its own {role}.",
        f"Correct the {role} of {name}, or leave it blank if it is not known.",
        id=name,
        row=animals.line(place),
        column=animals.records.columns.get(role),
        found=name,
    )


def same_parent_twice(animals: Animals, rules: RecordRules) -> list[Finding]:
    """Animals whose sire and dam are one animal."""
    sire, dam = animals.sire, animals.dam
    both = np.flatnonzero((sire >= 0) & (sire == dam) & (sire != animals.places))
    remedy = (
        "Selfing is allowed by the policy; nothing to do if it is right."
        if rules.selfing
        else "Right only where animals fertilise themselves; otherwise correct one of the two."
    )
    return [
        Finding(
            "sire-is-dam",
            f"{animals.names[place]} has {animals.names[int(sire[place])]} as its sire and as its "
            "dam.",
            remedy,
            id=animals.names[place],
            row=animals.line(place),
            column=animals.records.columns.get("sire"),
            found=animals.names[int(sire[place])],
            milder="note" if rules.selfing else None,
        )
        for place in both.tolist()
        if sire[place] >= len(animals) or animals.value("count", int(sire[place]), 1) == 1
    ]


def parents_without_row(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Parents that have no row of their own, with the animal that was perhaps meant."""
    absent = [animals.names[place] for place in animals.stubs]
    hints = _hints(absent, animals)
    findings = []
    for place, parent in zip(animals.stubs, absent, strict=True):
        named = [(child, role) for role in ROLES for child in animals.children.of(place, role)]
        if not named:
            continue
        named.sort(key=lambda each: (each[0], ROLES.index(each[1])))
        child, role = named[0]
        who = listed((animals.names[each] for each, _role in named), most=4)
        hint = hints.get(parent, _NO_HINT)
        findings.append(
            Finding(
                "parent-perhaps-another" if hint.remedy else "parent-without-row",
                f'{role} "{parent}" of {who} has no row of its own.{hint.said}',
                hint.remedy
                or "It counts as an animal of unknown ancestry; add a row if more is known.",
                id=parent,
                row=animals.line(child),
                column=animals.records.columns.get(role),
                found=parent,
            )
        )
    return findings


class _Hint(NamedTuple):
    """What a parent's id might mean, and what to do then; no remedy where it is just a thought."""

    said: str
    remedy: str = ""


_NO_HINT = _Hint("")


def _hints(absent: list[str], animals: Animals) -> dict[str, _Hint]:
    """For parents without a row, what was perhaps meant.

    An id that differs in case, zeros, look-alike letters or one letter; one that holds the
    parent's as one of two registrations; several animals written as in a sentence.
    """
    if not absent or len(animals) > _MOST_COMPARED:
        return {}
    wanted = {essence(name): number_breaks(name) for name in absent}
    alike: dict[str, str] = {}
    holding: dict[str, str] = {}
    ids = animals.names[: len(animals)]
    for name in ids:
        short = essence(name)
        if wanted.get(short) == number_breaks(name):
            alike.setdefault(short, name)
        for part in _REGISTRATIONS.split(name) if _REGISTRATIONS.search(name) else ():
            holding.setdefault(part.strip(), name)
    hints: dict[str, _Hint] = {}
    for name in absent:
        several = _in_a_sentence(name, animals)
        if several:
            hints[name] = several
        elif essence(name) in alike:
            hints[name] = _another(name, alike[essence(name)])
        elif name in holding:
            hints[name] = _Hint(
                f' "{holding[name]}" holds this number among others.',
                f"If they are one animal, merge {name} into {holding[name]} by a decision; until "
                "then it counts as an animal of unknown ancestry.",
            )
        elif name.casefold() in _BLANKS_IN_OTHER_WORDS:
            hints[name] = _Hint(" If it means that the parent is not known, leave the cell blank.")
        elif len(absent) <= _MOST_ABSENT and len(ids) <= _MOST_KNOWN and len(name) > _SHORT:
            close = nearest_names(name, ids)
            if close and len(close[0]) == len(name):
                differing = sum(a != b for a, b in zip(close[0], name, strict=True))
                if differing == 1:
                    hints[name] = _another(name, close[0])
    return hints


def _another(name: str, meant: str) -> _Hint:
    return _Hint(
        f' "{meant}" is spelled almost alike.',
        f"If {meant} is meant, write it so, or merge {name} into it by a decision; until then it "
        "counts as an animal of unknown ancestry.",
    )


def _in_a_sentence(name: str, animals: Animals) -> _Hint | None:
    """Parents written as people write them, all of them ids: ``A or B``, ``A/B``, ``A?``."""
    parts = [part.strip() for part in _BETWEEN_PARENTS.split(name.rstrip("? "))]
    if "" in parts or parts == [name] or not all(map(animals.names.has_row, parts)):
        return None
    if len(parts) == 1:
        return _another(name, parts[0])
    return _Hint(
        f" It reads as one of {listed(parts, word='or')}.",
        f"Then write {'|'.join(parts)}; until then it counts as an animal of unknown ancestry.",
    )


def roles_and_sexes(animals: Animals, rules: RecordRules) -> list[Finding]:
    """Parents in both roles, and parents whose recorded sex does not fit their role."""
    findings = []
    sires, dams = animals.roles
    with_row = len(animals)
    sex = animals.values.get("sex")
    hermaphrodite = _of_sex(animals, "hermaphrodite")
    groups = np.zeros(len(animals.names), dtype=bool)
    if "count" in animals.values:
        groups[:with_row] = animals.values["count"].where(lambda count: count != 1)
    both = sires & dams & ~hermaphrodite & ~groups
    milder = "note" if rules.selfing else None
    findings += [
        replace(_both(animals, place), milder=milder) for place in np.flatnonzero(both).tolist()
    ]
    for role, flags, other in (("sire", sires, dams), ("dam", dams, sires)):
        wanted = PARENT_SEX[role]
        right = _of_sex(animals, wanted) | hermaphrodite
        doubtful = np.flatnonzero((flags & ~other & ~right & ~groups)[:with_row])
        for place in doubtful.tolist():
            recorded = "unknown" if sex is None else str(sex[place])
            findings.append(_one_role(animals, place, role, recorded))
    return findings


def _of_sex(animals: Animals, sex: str) -> BoolArray:
    flags = np.zeros(len(animals.names), dtype=bool)
    if "sex" in animals.values:
        flags[: len(animals)] = animals.values["sex"].where(lambda value: value == sex)
    return flags


def _both(animals: Animals, place: int) -> Finding:
    children = {role: animals.children.of(place, role)[0] for role in ROLES}
    said = {
        role: f"{animals.names[child]} (line {animals.line(child)})"
        for role, child in children.items()
    }
    name = animals.names[place]
    sex = animals.sex(place)
    recorded = f", and is recorded as {sex}" if sex in ("male", "female") else ""
    return Finding(
        "both-sexes",
        f"{name} is the sire of {said['sire']} and the dam of {said['dam']}{recorded}.",
        "Correct one of the two; if both are right, record its sex as hermaphrodite.",
        id=name,
        row=animals.line(place if place < len(animals) else children["dam"]),
        column=animals.records.columns.get("sex"),
        found=animals.sex(place),
    )


def _one_role(animals: Animals, place: int, role: str, recorded: str) -> Finding:
    wanted = PARENT_SEX[role]
    name = animals.names[place]
    child = animals.children.of(place, role)[0]
    young = animals.names[child]
    if recorded == "unknown":
        return Finding(
            "sex-not-recorded",
            f"{name} is the {role} of {young} (line {animals.line(child)}), but its sex is not "
            "recorded.",
            f"Record it as {wanted} if that is right; until then it is not paired.",
            id=name,
            row=animals.line(place),
            column=animals.records.columns.get("sex"),
            found="unknown",
        )
    return Finding(
        "sex-against-role",
        f'{role} "{name}" of {young} is recorded as {recorded} (line {animals.line(place)}).',
        f"A {role} must be {wanted}. Correct the sex of {name} or the {role} of {young}.",
        id=name,
        row=animals.line(child),
        column=animals.records.columns.get(role),
        found=recorded,
    )


def _clone_of_a_group(animals: Animals, place: int, model: int) -> Finding:
    count = animals.value("count", model)
    return Finding(
        "clone-differs",
        f"{animals.names[place]} is a clone of {animals.names[model]} "
        f"(line {animals.line(model)}), which stands for {count} animals: whose copy it is, "
        "is not known.",
        "Give the animal that it copies a row of its own; until then its own parents count.",
        id=animals.names[place],
        row=animals.line(place),
        column=animals.records.columns.get("clone_of"),
        found=animals.names[model],
    )


def clones_without_row(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Clones of animals that nobody knows."""
    if "clone_of" not in animals.records.fields and "clone_of" not in animals.patched:
        return []
    findings = []
    for place in range(len(animals)):
        copied = animals.text("clone_of", place)
        model = animals.names.find(animals.aliases.get(copied, copied)) if copied else -1
        if 0 <= model < len(animals) and animals.value("count", model, 1) != 1:
            findings.append(_clone_of_a_group(animals, place, model))
        if copied and animals.names.find(animals.aliases.get(copied, copied)) < 0:
            findings.append(
                Finding(
                    "clone-without-row",
                    f'{animals.names[place]} is a clone of "{copied}", which is not in the '
                    "records.",
                    "Add a row for it, or correct the id; until then its own parents count.",
                    id=animals.names[place],
                    row=animals.line(place),
                    column=animals.records.columns.get("clone_of"),
                    found=copied,
                )
            )
    return findings
