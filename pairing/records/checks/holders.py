"""Holders: one holder under several names, and whom to ask about a finding."""

from __future__ import annotations

from bisect import bisect_left
from collections import defaultdict
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from pairing.records.checks.wording import words_by_animal
from pairing.records.fields import MISSING_PARENT
from pairing.records.findings import Finding
from pairing.records.ids.look_alikes import in_latin

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping, Sequence

    from pairing.records.animals import Animals
    from pairing.records.columns import Coded
    from pairing.records.rules import RecordRules

_FIELDS = ("holder", "born_at")
_SHORT_FORMS = {"saint": "st", "and": "", "the": "", "limited": "ltd", "incorporated": "inc"}
_LONG_NAME, _LONG_WORD = 8, 5
_MOST_COMPARED = 20_000


@dataclass(slots=True)
class _Name:
    """A name as it is spelled: how often, and where first."""

    word: str
    rows: int
    field: str
    animal: int


def look_alike_holders(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Names of holders and birth places that differ only in spelling."""
    read = ((field, words_by_animal(animals, field)) for field in _FIELDS)
    columns = {field: column for field, column in read if column is not None}
    by_fold: dict[str, dict[str, None]] = defaultdict(dict)
    for column in columns.values():
        for word in column.words:
            if word.casefold() not in MISSING_PARENT and (fold := _folded(word)):
                by_fold[fold][word] = None
    slips = list(_one_letter_off({fold: min(words) for fold, words in by_fold.items()}))
    if not slips and all(len(words) == 1 for words in by_fold.values()):
        return []
    names = _names(animals, columns)
    spelled = {
        fold: sorted((names[word] for word in words if word in names), key=_usual_first)
        for fold, words in by_fold.items()
    }
    pairs = []
    for usual, *others in filter(None, spelled.values()):
        pairs += [(rarer, usual) for rarer in others]
    for one, other in slips:
        if spelled[one] and spelled[other]:
            usual, rarer = sorted((spelled[one][0], spelled[other][0]), key=_usual_first)
            pairs.append((rarer, usual))
    return [_look_alike(animals, rarer, usual) for rarer, usual in pairs]


def _usual_first(name: _Name) -> tuple[int, int]:
    return -name.rows, name.animal


def _look_alike(animals: Animals, name: _Name, usual: _Name) -> Finding:
    return Finding(
        "look-alike-holder",
        f'{name.field} "{name.word}" is spelled almost as "{usual.word}" '
        f"({name.rows:,} against {usual.rows:,} {'entry' if usual.rows == 1 else 'entries'}).",
        "If they are one, use one spelling; until then they count as two.",
        id=animals.names[name.animal],
        row=animals.line(name.animal),
        column=animals.records.columns.get(name.field),
        found=name.word,
    )


def _names(animals: Animals, columns: Mapping[str, Coded]) -> dict[str, _Name]:
    """Every spelling of a holder or birth place that animals have, with its first animal."""
    names: dict[str, _Name] = {}
    for field, column in columns.items():
        counts = np.bincount(column.codes, minlength=len(column.words))
        firsts = np.full(len(column.words), len(animals), dtype=np.int64)
        # Assigned from the end, so that the first animal of each word is the one that stays.
        firsts[column.codes[::-1]] = np.arange(len(animals) - 1, -1, -1)
        for word, count, first in zip(column.words, counts.tolist(), firsts.tolist(), strict=True):
            if word in names:
                names[word].rows += count
            elif count:
                names[word] = _Name(word, count, field, first)
    return names


def _folded(name: str) -> str:
    """A name without case, accents, blanks and signs, and with words such as Saint cut short."""
    words = _words(name)
    # Numbers stay apart: room 1-12 is not room 11-2.
    kept = [_SHORT_FORMS.get(word, word) for word in words] if len(words) > 1 else words
    text = ""
    for word in kept:
        apart = text[-1:].isdigit() and word[:1].isdigit()
        text += f" {word}" if apart else word
    return text


def _words(name: str) -> list[str]:
    plain = in_latin(name).casefold().replace("'", "")
    return "".join(letter if letter.isalnum() else " " for letter in plain).split()


def _one_letter_off(usual: Mapping[str, str]) -> Iterator[tuple[str, str]]:
    """Pairs of long names, by fold, that a slip of one letter may have made of one."""
    long = [name for name in usual if len(name) >= _LONG_NAME]
    if len(long) > _MOST_COMPARED:
        return
    shortened: dict[str, list[str]] = defaultdict(list)
    for name in long:
        shorter = (name[:at] + name[at + 1 :] for at in range(len(name)))
        for text in dict.fromkeys([name, *shorter]):
            shortened[text].append(name)
    seen: set[tuple[str, str]] = set()
    for alike in shortened.values():
        for place, one in enumerate(alike):
            for other in alike[place + 1 :]:
                pair = (min(one, other), max(one, other))
                if pair not in seen and _a_slip(usual[one], usual[other]):
                    yield pair
                seen.add(pair)


def _a_slip(one: str, other: str) -> bool:
    """Whether two names differ by a slip in one long word, its first letter apart.

    Short words, numbers and first letters tell holders apart: Barn A from Barn B, East from West.
    """
    words = [_words(name) for name in (one, other)]
    differing = [pair for pair in zip(*words, strict=False) if pair[0] != pair[1]]
    if len(words[0]) != len(words[1]) or len(differing) != 1:
        return False
    first, second = differing[0]
    long = min(len(first), len(second)) >= _LONG_WORD
    if not long or first[0] != second[0] or not (first + second).isalpha():
        return False
    start = _shared(first, second)
    end = _shared(first[start:][::-1], second[start:][::-1])
    lost, put = first[start : len(first) - end], second[start : len(second) - end]
    swapped = len(lost) == 2 and lost == put[::-1]
    return swapped or (len(lost) <= 1 and len(put) <= 1)


def _shared(one: str, other: str) -> int:
    """How many letters two texts share from their start."""
    pairs = enumerate(zip(one, other, strict=False))
    differing = (place for place, (first, second) in pairs if first != second)
    return next(differing, min(len(one), len(other)))


# Whom to ask


def with_holders(findings: Sequence[Finding], animals: Animals) -> list[Finding]:
    """Findings with the holder who can be asked about them, where one is recorded.

    It is the holder of the animal, and for a parent without a row that of the young whose row
    is named.
    """
    column = words_by_animal(animals, "holder")
    if column is None or not findings:
        return list(findings)
    places = _places(findings, animals)
    said = [
        "" if word.casefold() in MISSING_PARENT and word.casefold() != "wild" else word
        for word in column.words
    ]
    return [
        replace(finding, holder=said[column.codes[place]])
        if place >= 0 and not finding.holder and said[column.codes[place]]
        else finding
        for finding, place in zip(findings, places, strict=True)
    ]


def _places(findings: Sequence[Finding], animals: Animals) -> list[int]:
    """The animal each finding is about, or the one on its row; -1 for none."""
    ids = [animals.aliases.get(each.id, each.id) if each.id else "" for each in findings]
    places: list[int] = animals.names.find_all(ids).tolist()
    lost = [number for number, place in enumerate(places) if place < 0]
    by_row = {
        number: row
        for number in lost
        if (row := _record_row(animals.records.lines, findings[number].row)) >= 0
    }
    if by_row:
        wanted = np.array(sorted(set(by_row.values())))
        standing = np.flatnonzero(np.isin(animals.first_row, wanted))
        animal_of = dict(zip(animals.first_row[standing].tolist(), standing.tolist(), strict=True))
        for number in lost:
            places[number] = animal_of.get(by_row.get(number, -1), -1)
    return [place if place < len(animals) else -1 for place in places]


def _record_row(lines: Sequence[int], line: int | None) -> int:
    """Place of the row on a line of the file, or -1."""
    if line is None:
        return -1
    row = bisect_left(lines, line)
    return row if row < len(lines) and lines[row] == line else -1
