"""Doubts about parents and time: dead, gone, too young or too old when their young were born.

A date is an interval of days; each doubt holds on every day that the intervals allow.
Parents that are one of several possible are judged elsewhere. A parent whose row stands for
several animals is not judged: a tank outlives the fish in it.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from pairing.dates import Age, completed
from pairing.records.checks.lifetimes import may_have_returned
from pairing.records.checks.parentage import PARENT_SEX
from pairing.records.checks.wording import words_by_animal
from pairing.records.fields import MISSING_PARENT
from pairing.records.findings import Finding

if TYPE_CHECKING:
    from collections.abc import Mapping

    from pairing.dates import AgeWindow, DateRange
    from pairing.records.animals import Animals, BoolArray, PlaceArray
    from pairing.records.rules import RecordRules

ANY_GESTATION_DAYS = 400
"""Days from conception to birth that are believed where the policy does not say.

More than any farm animal carries; elephants, rhinoceroses, giraffes and some sharks carry
longer, and need ``gestation`` in the policy. Common practice, no source.
"""

_DAYS = {"days": 1.0, "weeks": 7.0, "months": 365.2425 / 12, "years": 365.2425}
_CALENDAR_SLACK = 4
_NEVER = 1 << 30
_MOST_DAYS = 1 << 28


def longest_days(age: Age) -> int:
    """Days that surely complete an age: for months and years, up to a week too many."""
    slack = _CALENDAR_SLACK if age.unit in ("months", "years") else 0
    return min(math.ceil(age.count * _DAYS[age.unit]) + slack, _MOST_DAYS)


def shortest_days(age: Age) -> int:
    """Days in which an age is surely not passed: for months and years, up to a week too few."""
    slack = _CALENDAR_SLACK if age.unit in ("months", "years") else 0
    return max(0, min(math.floor(age.count * _DAYS[age.unit]) - slack, _MOST_DAYS))


def group_rows_of(animals: Animals) -> BoolArray:
    """Whether each animal's row stands for another number of animals than one."""
    counts = animals.values.get("count")
    if counts is None:
        return np.zeros(len(animals), dtype=bool)
    return counts.where(lambda count: count != 1)


def donor_told(animals: Animals) -> BoolArray:
    """Whether a genetic dam is recorded for each animal, so that its dam did not bear it."""
    donors = words_by_animal(animals, "genetic_dam")
    if donors is None:
        return np.zeros(len(animals), dtype=bool)
    told: BoolArray = np.array([word != "" for word in donors.words], dtype=bool)[donors.codes]
    return told


def parents_dead(animals: Animals, rules: RecordRules) -> list[Finding]:
    """Dams that died before the birth, and sires that died before the conception.

    A sire may have died up to a gestation before the birth. Where the policy does not say how
    long that is, a sire dead for more than `ANY_GESTATION_DAYS` is a warning; one that died
    before the birth but later than that is a note, which goes away once it says so.
    Young from stored semen are lawful practice: ``sperm_storage`` allows for them, beside the
    gestation. A donor of embryos that died before the birth is a note, as they can be stored.
    """
    born, died = animals.dates.get("born"), animals.dates.get("died")
    if born is None or died is None:
        return []
    findings = []
    stored = longest_days(rules.sperm_storage) if rules.sperm_storage else 0
    carried = longest_days(rules.gestation) if rules.gestation else ANY_GESTATION_DAYS
    least = stored + carried if rules.gestation else stored
    for child in _born_after(animals, "sire", died.latest + least, born.earliest):
        sire = int(animals.sire[child])
        if animals.names[sire] in rules.stored_semen:
            continue
        sure = int(born.earliest[child]) > int(died.latest[sire]) + stored + carried
        findings.append(_sire_dead(animals, child, sire, rules, sure=sure))
    donors = donor_told(animals)
    findings += [
        _dam_dead(animals, child, int(animals.dam[child]), donor=bool(donors[child]))
        for child in _born_after(animals, "dam", died.latest, born.earliest)
    ]
    return findings


def _sire_dead(
    animals: Animals, child: int, sire: int, rules: RecordRules, *, sure: bool
) -> Finding:
    name = animals.names[child]
    before = f"{_before_conception(rules, storage=True)} " if sure else ""
    advice = (
        "Correct a date or the sire. Young from stored semen are right: then name him under "
        "[[gametes]] in the policy, say sperm_storage under [records], or accept it."
        if sure
        else "Right where he died while she carried, or his semen was stored. Say gestation "
        "under [records] in the policy to have it judged."
    )
    return _about_parent(
        animals,
        "parent-dead",
        "sire",
        child,
        f"died {_text(animals.date('died', sire))}, {before}before {name} was born "
        f"{_on(animals.born(child))}",
        advice,
        milder=None if sure else "note",
    )


def _dam_dead(animals: Animals, child: int, dam: int, *, donor: bool) -> Finding:
    advice = (
        "Right where embryos were stored; else correct a date or the donor."
        if donor
        else "Correct a date or the dam. Where eggs hatch after her death, accept it; a donor of "
        "stored embryos belongs in the column genetic_dam."
    )
    return _about_parent(
        animals,
        "parent-dead",
        "dam",
        child,
        f"died {_text(animals.date('died', dam))}, before {animals.names[child]} was born "
        f"{_on(animals.born(child))}",
        advice,
        milder="note" if donor else None,
        column="genetic_dam" if donor else "dam",
    )


def parents_left(animals: Animals, rules: RecordRules) -> list[Finding]:
    """Parents that had left before the young was conceived, and did not come back.

    Nothing is said where a parent may have entered again or been seen since, where its death
    before the birth is the graver doubt, and of young that came in from outside after their
    birth: their parents may live there.
    """
    born, left = animals.dates.get("born"), animals.dates.get("left")
    if born is None or left is None:
        return []
    carried = longest_days(rules.gestation) if rules.gestation else ANY_GESTATION_DAYS
    stored = longest_days(rules.sperm_storage) if rules.sperm_storage else 0
    gone = np.where(may_have_returned(animals), np.int32(_NEVER), left.latest)
    findings = []
    for role, least in (("sire", carried + stored), ("dam", carried)):
        for child in _born_after(animals, role, gone + least, born.earliest):
            parent = int(getattr(animals, role)[child])
            stored_sire = role == "sire" and animals.names[parent] in rules.stored_semen
            if stored_sire or _not_gone(animals, child, parent):
                continue
            name = animals.names[child]
            before = (
                f"{_before_conception(rules, storage=role == 'sire')} before"
                if rules.gestation
                else "long before"
            )
            findings.append(
                _about_parent(
                    animals,
                    "parent-left",
                    role,
                    child,
                    f"left {_text(animals.date('left', parent))}, {before} {name} was born "
                    f"{_on(animals.born(child))}",
                    f"Correct a date or the {role}; if {name} was got elsewhere, or from stored "
                    "semen or embryos, accept it.",
                )
            )
    return findings


def _not_gone(animals: Animals, child: int, parent: int) -> bool:
    """Whether something else than its date of leaving speaks of a parent or its young."""
    born, left = animals.born(child), animals.date("left", parent)
    entered, seen = animals.date("entered", child), animals.date("last_seen", parent)
    died = animals.date("died", parent)
    if born is None or left is None:
        return True
    return (
        (entered is not None and entered.latest > born.earliest)
        or (seen is not None and seen.latest > left.earliest)
        or (died is not None and died.earliest < born.latest)
    )


def parents_of_unlikely_age(animals: Animals, rules: RecordRules) -> list[Finding]:
    """Parents outside the ages at which births are believed, by sex and by the parent's line.

    Without ages in the policy nothing is said: what is common in these records is no measure,
    as a wrong date makes it. A limit in whole years (or months, or weeks) counts completed
    ones, so that "up to 12" bars no parent before its thirteenth birthday. No parent grows
    older than it lived; what is born later is `parents_dead`'s concern.
    """
    born = animals.dates.get("born")
    if born is None or not rules.parent_age:
        return []
    findings = []
    for role, sex in PARENT_SEX.items():
        windows, codes = _windows(animals, rules.parent_age, sex)
        if not any(windows):
            continue
        ripe = _days_by_window(born.earliest, windows, codes, young=True)
        spent = _days_by_window(born.latest, windows, codes, young=False)
        parents = getattr(animals, role)
        early = _of_parents(animals, ripe, parents, unknown=-_NEVER) > born.latest
        late = _of_parents(animals, spent, parents, unknown=_NEVER) < born.earliest
        for child in np.flatnonzero(early | late).tolist():
            parent = int(parents[child])
            window = windows[int(codes[parent])] if child != parent else None
            if window is not None:
                findings += _unlikely_age(animals, role, child, window)
    return findings


def _unlikely_age(animals: Animals, role: str, child: int, window: AgeWindow) -> list[Finding]:
    parent = int(getattr(animals, role)[child])
    own, theirs = animals.born(child), animals.born(parent)
    if own is None or theirs is None:
        return []
    kind, believed = "parent-too-young", f"from {window.youngest}"
    said = _too_young(own, theirs, window.youngest)
    if not said:
        kind, believed = "parent-too-old", f"up to {window.oldest}"
        said = _too_old(own, theirs, animals.date("died", parent), window.oldest)
    if not said:
        return []
    return [
        _about_parent(
            animals,
            kind,
            role,
            child,
            f"{said}; births are believed {believed}",
            f"Correct a date or the {role}; if it is right, accept it, or change parent_age in "
            "the policy.",
        )
    ]


def _too_young(own: DateRange, theirs: DateRange, youngest: Age) -> str:
    """What is said of a parent that is surely too young, or ""; one born later is no parent."""
    exact = own.exact and theirs.exact
    if theirs.earliest > own.latest or (exact and theirs.earliest == own.latest):
        return ""
    if completed(theirs.earliest, own.latest, youngest.unit) >= youngest.count:
        return ""
    age = _age_in_words(theirs.earliest, own.latest, youngest.unit)
    return f"was {'' if exact else 'at most '}{age} old at its birth"


def _too_old(own: DateRange, theirs: DateRange, died: DateRange | None, oldest: Age) -> str:
    """What is said of a parent that is surely too old, or ""."""
    last = own.earliest if died is None else min(own.earliest, died.earliest)
    if last <= theirs.latest or not _past(completed(theirs.latest, last, oldest.unit), oldest):
        return ""
    exact = own.exact and theirs.exact and last == own.earliest
    age = _age_in_words(theirs.latest, last, oldest.unit)
    when = "at its birth" if last == own.earliest else "when it died"
    return f"was {'' if exact else 'at least '}{age} old {when}"


def _past(age: float, oldest: Age) -> bool:
    whole = float(oldest.count).is_integer()
    return (int(age) if whole else age) > oldest.count


def _age_in_words(born: int, on: int, unit: str) -> str:
    """Completed units; years as months where they are few."""
    count = completed(born, on, unit)
    if unit == "years" and count < 3:
        unit, count = "months", completed(born, on, "months")
    return str(Age(math.floor(count), unit))


def _windows(
    animals: Animals, ages: Mapping[tuple[str, str], AgeWindow], sex: str
) -> tuple[list[AgeWindow | None], PlaceArray]:
    """The window of each distinct line, and each animal's place among them."""
    lines = words_by_animal(animals, "line") if any(line for line, _sex in ages) else None
    if lines is None:
        return [ages.get(("", sex))], np.zeros(len(animals), dtype=np.int32)
    known = ["" if word.casefold() in MISSING_PARENT else word for word in lines.words]
    return [ages.get((line, sex)) or ages.get(("", sex)) for line in known], lines.codes


def _days_by_window(
    born: PlaceArray, windows: list[AgeWindow | None], codes: PlaceArray, *, young: bool
) -> PlaceArray:
    """The day before which an animal is too young, or after which it may be too old.

    A few days too late, or too early: `_unlikely_age` counts exactly.
    """
    if young:
        days = [-_MOST_DAYS if each is None else longest_days(each.youngest) for each in windows]
    else:
        days = [_MOST_DAYS if each is None else shortest_days(each.oldest) for each in windows]
    if len(days) == 1:
        return born + np.int32(days[0])
    limit: PlaceArray = born + np.array(days, dtype=np.int32)[codes]
    return limit


def _born_after(animals: Animals, role: str, limit: PlaceArray, born: PlaceArray) -> list[int]:
    """Animals born after a day of the one parent recorded in a role."""
    parents = getattr(animals, role)
    late = np.flatnonzero(_of_parents(animals, limit, parents, unknown=_NEVER) < born)
    return [child for child in late.tolist() if parents[child] != child]


def _of_parents(
    animals: Animals, days: PlaceArray, parents: PlaceArray, *, unknown: int
) -> PlaceArray:
    """A day of each animal's parent; `unknown` where it has no row, or one for several animals.

    The two last places are those of an unknown parent and of one of several: -1 and -2.
    """
    padded = np.full(len(animals.names) + 2, unknown, dtype=np.int32)
    padded[: len(animals)] = days
    if "count" in animals.values:
        padded[: len(animals)][group_rows_of(animals)] = unknown
    taken: PlaceArray = padded[parents]
    return taken


def _before_conception(rules: RecordRules, *, storage: bool) -> str:
    carried = str(rules.gestation) if rules.gestation else f"{ANY_GESTATION_DAYS} days"
    stored = f" and {rules.sperm_storage} of stored sperm" if rules.sperm_storage else ""
    return f"more than {carried}{stored if storage else ''}"


def _about_parent(
    animals: Animals,
    kind: str,
    role: str,
    child: int,
    said: str,
    advice: str,
    *,
    milder: str | None = None,
    column: str | None = None,
) -> Finding:
    parent = int(getattr(animals, role)[child])
    name = animals.names[parent]
    return Finding(
        kind,
        f"{role} {name} of {animals.names[child]} {said}; {name} is on line "
        f"{animals.line(parent)}.",
        advice,
        id=animals.names[child],
        row=animals.line(child),
        column=animals.records.columns.get(column or role),
        found=name,
        milder=milder,
    )


def _text(date: DateRange | None) -> str:
    return "" if date is None else date.text


def _on(date: DateRange | None) -> str:
    """A date after "was born"."""
    if date is None:
        return ""
    return f"{'on' if date.exact else 'in'} {date.text}"
