"""Doubts about parents that are possible and still unlikely, and about clones and tests."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import ROLES, UNKNOWN
from pairing.records.checks.wording import by_animal, some_of, words_by_animal
from pairing.records.columns import coded
from pairing.records.conditions import (
    CONDITION_WORDS,
    EXPECTED_WORDS,
    ConditionColumn,
    condition_columns,
)
from pairing.records.fields import FOUNDER_ORIGINS, folded, tidy
from pairing.records.findings import Finding
from pairing.spelling import listed

if TYPE_CHECKING:
    from pairing.records.animals import Animals
    from pairing.records.rules import RecordRules

_MOST_WORDS = 10
_RECIPIENT_HEADINGS = frozenset({"recipient", "recipientdam", "embryotransfer", "et", "surrogate"})
_YES = frozenset({"yes", "y", "true", "1", "x", "et", "recipient", "embryo transfer", "surrogate"})


def castrates_as_parents(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Castrated animals with young; they may have been castrated later."""
    castrated = animals.values.get("castrated")
    places = castrated.places(bool) if castrated is not None else []
    findings = []
    for place in places:
        for role, flags in zip(ROLES, animals.roles, strict=True):
            if not flags[place]:
                continue
            name, (first, *more) = animals.names[place], animals.children.of(place, role)
            said = f" and {len(more)} more" if more else ""
            findings.append(
                Finding(
                    "castrate-as-parent",
                    f'{role} "{name}" of {animals.names[first]}{said} is recorded as '
                    f'"{animals.cell("sex", place)}" (line {animals.line(place)}).',
                    f"Correct the {role} or the sex; if {name} was castrated later, accept it by a "
                    "decision. The link is used.",
                    id=name,
                    row=animals.line(first),
                    column=animals.records.columns.get(role),
                    found=animals.cell("sex", place),
                )
            )
    return findings


# Embryo transfer


def recipient_dams(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Dams that may only have borne the young, and donors that cannot be one."""
    return [*_borne_without_donor(animals), *_doubtful_donors(animals)]


def _borne_without_donor(animals: Animals) -> list[Finding]:
    """Young marked as transferred embryos with no genetic dam but the one that bore them."""
    findings = []
    for heading in animals.records.carried:
        if folded(heading) not in _RECIPIENT_HEADINGS:
            continue
        column = coded(by_animal(animals, animals.records.carried[heading]))
        said = [tidy(word) for word in column.words]
        yes = [place for place, word in enumerate(said) if word.casefold() in _YES]
        # The column may also name the recipient, which is wrong only if she stands as the dam.
        named = [place for place, word in enumerate(said) if word and place not in set(yes)]
        for animal in column.rows_of([*yes, *named]).tolist():
            word = said[int(column.codes[animal])]
            dam = _only_dam(animals, animal)
            if dam is None or (word.casefold() not in _YES and word != dam):
                continue
            name = animals.names[animal]
            findings.append(
                Finding(
                    "recipient-dam",
                    f'{name} has {heading} "{word}" and no genetic dam; its dam {dam} may only '
                    "have borne it.",
                    "Record the donor as genetic_dam, or unknown there if she is not known.",
                    id=name,
                    row=animals.line(animal),
                    column=heading,
                    found=word,
                )
            )
    return findings


def _only_dam(animals: Animals, place: int) -> str | None:
    """The dam of an animal that counts as its genetic dam for want of another."""
    dam = animals.aliases.get(animals.cell("dam", place), animals.cell("dam", place))
    donor = animals.cell("genetic_dam", place)
    if int(animals.dam[place]) == UNKNOWN or (donor and donor != dam):
        return None
    return dam


def _doubtful_donors(animals: Animals) -> list[Finding]:
    """Genetic dams that are male, or the recorded dam herself."""
    column = words_by_animal(animals, "genetic_dam")
    if column is None:
        return []
    findings = []
    for place in column.rows_of([at for at, word in enumerate(column.words) if word]).tolist():
        dam = int(animals.dam[place])
        why, remedy = _no_donor(animals, place, dam) if dam >= 0 else ("", "")
        if why:
            findings.append(
                Finding(
                    "recipient-dam",
                    f"{why}.",
                    remedy,
                    id=animals.names[place],
                    row=animals.line(place),
                    column=animals.records.columns.get("genetic_dam"),
                    found=animals.names[dam],
                )
            )
    return findings


def _no_donor(animals: Animals, place: int, donor: int) -> tuple[str, str]:
    """Why an animal's genetic dam is none, and what to do; blank texts where she may be."""
    name, said = animals.names[place], animals.names[donor]
    recorded = animals.cell("dam", place)
    if animals.aliases.get(recorded, recorded) == said:
        return (
            f"{name} has {said} as its dam and as its genetic dam",
            "Leave genetic_dam blank unless the recorded dam is a recipient.",
        )
    until = "until then she counts as the dam"
    if animals.sex(donor) == "male":
        return (
            f"genetic dam {said} of {name} is recorded as male",
            f"Correct the donor or its sex; {until}.",
        )
    own, theirs = animals.born(place), animals.born(donor)
    if own is not None and theirs is not None and theirs.earliest > own.latest:
        return (
            f"genetic dam {said} of {name} was born {theirs.text}, after it ({own.text})",
            f"Correct the donor or a date; {until}.",
        )
    return "", ""


# Clones


def clones_differ(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Clones and identical twins that contradict the animal they copy."""
    findings = []
    for clone, model in animals.clones.items():
        said = _differences(animals, clone, model)
        if said:
            name = animals.names[clone]
            findings.append(
                Finding(
                    "clone-differs",
                    f"{name} is a clone of {animals.names[model]}, but {listed(said)}.",
                    "Correct the row that is wrong, or clear clone_of if they are litter-mates. "
                    f"Until then the parents of {animals.names[model]} count.",
                    id=name,
                    row=animals.line(clone),
                    column=animals.records.columns.get("clone_of"),
                    found=animals.names[model],
                )
            )
    return findings


def _differences(animals: Animals, clone: int, model: int) -> list[str]:
    """What a clone's row says that cannot be so, as clauses."""
    said = []
    if model >= len(animals):
        return []
    sexes = animals.sex(clone), animals.sex(model)
    if sexes[0] != sexes[1] and "unknown" not in sexes:
        said.append(f"it is {sexes[0]} and not {sexes[1]}")
    for role in ROLES:
        parents = getattr(animals, role)
        own, theirs = int(parents[clone]), int(parents[model])
        if own >= 0 and theirs >= 0 and own != theirs:
            said.append(f'its {role} is "{animals.names[own]}" and not "{animals.names[theirs]}"')
    own_birth, their_birth = animals.born(clone), animals.born(model)
    if own_birth and their_birth and own_birth.latest < their_birth.earliest:
        said.append(f"it was born {own_birth.text} and the other later, {their_birth.text}")
    return said


# Origins


def origins_with_one_parent(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Animals whose origin says founder although one parent is recorded."""
    if "origin" not in animals.values:
        return []
    founder = animals.values["origin"].where(lambda value: value in FOUNDER_ORIGINS)
    one = (animals.sire != UNKNOWN) != (animals.dam != UNKNOWN)
    findings = []
    for place in np.flatnonzero(founder & one).tolist():
        origin, name = str(animals.value("origin", place)), animals.names[place]
        parents = [parent for role in ROLES for parent, _chance in animals.parents(role, place)]
        findings.append(
            Finding(
                "origin-with-one-parent",
                f"{name} has origin {origin} and one recorded parent, "
                f"{listed(parents, word='or')}.",
                "Correct the origin if it was bred here; clear the parent if it came from outside. "
                "Until then the parent is used.",
                id=name,
                row=animals.line(place),
                column=animals.records.columns.get("origin"),
                found=origin,
            )
        )
    return findings


# Tests for conditions


def unreadable_tests(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Words in columns about conditions that are not understood, each word once."""
    findings = []
    for column in condition_columns(animals.records.carried):
        if column.part in CONDITION_WORDS:
            findings += _unreadable(animals, column)
    return findings


def _unreadable(animals: Animals, column: ConditionColumn) -> list[Finding]:
    cells = coded(by_animal(animals, animals.records.carried[column.heading]))
    known = CONDITION_WORDS[column.part]
    words: dict[str, list[int]] = {}
    numbers = np.bincount(cells.codes, minlength=len(cells.words))
    for place, word in enumerate(cells.words):
        meant = tidy(word).casefold()
        # A word may stand only in rows without an id.
        if meant not in known and numbers[place]:
            words.setdefault(meant, []).append(place)
    if len(words) > _MOST_WORDS:
        places = cells.rows_of([each for same in words.values() for each in same]).tolist()
        spelled = [tidy(cells.words[each[0]]) for each in words.values()]
        return [_no_such_column(animals, column, spelled, places)]
    return [
        _unreadable_word(animals, column, tidy(cells.words[same[0]]), cells.rows_of(same).tolist())
        for same in words.values()
    ]


def _unreadable_word(
    animals: Animals, column: ConditionColumn, word: str, places: list[int]
) -> Finding:
    name = animals.names[places[0]]
    treated = "not tested" if column.part == "test" else "not examined"
    if len(places) == 1:
        message = (
            f'{name}: {column.heading} "{word}" is not understood; {name} counts as {treated}.'
        )
    else:
        message = (
            f'{column.heading} "{word}" is not understood; {len(places):,} animals count as '
            f"{treated}: {some_of(animals, places)}."
        )
    return Finding(
        "test-unreadable",
        message,
        f"Write {listed(EXPECTED_WORDS[column.part], word='or')}.",
        id=name,
        row=animals.line(places[0]),
        column=column.heading,
        found=word,
    )


def _no_such_column(
    animals: Animals, column: ConditionColumn, words: list[str], places: list[int]
) -> Finding:
    examples = listed([f'"{word}"' for word in words[:3]])
    return Finding(
        "test-unreadable",
        f"{len(words):,} different words in {column.heading}, on {len(places):,} animals, are not "
        f"understood, for instance {examples}.",
        f"Write {listed(EXPECTED_WORDS[column.part], word='or')}; if the column is not about a "
        "condition, give it another heading.",
        row=animals.line(places[0]),
        column=column.heading,
        found=words[0],
    )
