"""Doubts about litters: their days, their dams, their size, and the time between them.

A litter is a word of the column `litter`. Most keepers give each litter a number of its own;
some count anew for each dam, so that every dam has a litter 1. The column itself tells which:
see `_Litters.counted_anew`. Young of an embryo's donor were borne by another dam, so that their
dam says nothing of their litter. A dam whose row stands for several animals has no litters.
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import UNKNOWN
from pairing.records.checks.breeding_ages import donor_told, group_rows_of, shortest_days
from pairing.records.checks.wording import some_of, words_by_animal
from pairing.records.fields import MISSING_PARENT
from pairing.records.findings import Finding
from pairing.spelling import listed

if TYPE_CHECKING:
    from pairing.records.animals import Animals, BoolArray, PlaceArray
    from pairing.records.columns import Coded
    from pairing.records.rules import RecordRules

DAYS_OF_A_LITTER = 3
"""Days over which the births of one litter may spread; common practice, no source."""
SHARED_WORDS = 0.1
"""Share of litter words with several dams above which a column counts anew for each dam."""

_NO_LITTER = MISSING_PARENT | {"0", "-", "--", "n/a", "none", "nil", "no", "x"}
_EVER = 1 << 30
_DAY_BITS = 22


def litters_in_doubt(animals: Animals, rules: RecordRules) -> list[Finding]:
    """Litters born days apart, with several dams, or larger than the policy believes.

    None of it is impossible: births spread over days, young are fostered, litters are put
    together. Each is a warning that names the lawful case. Several sires are no doubt at all.
    """
    litters = _litters_of(animals)
    if litters is None:
        return []
    findings = _dams_differ(litters) + _dates_differ(litters)
    if rules.largest_litter is not None:
        findings += _too_large(litters, rules.largest_litter)
    return findings


@dataclass(frozen=True)
class _Litters:
    """The young with a litter, by columns.

    Attributes
    ----------
    words
        The distinct words for litters.
    young
        Places of the animals, shape (young,).
    word
        Each one's place among `words`, shape (young,).
    dam
        Place of the dam that bore it, -1 where that is not known, shape (young,).
    """

    animals: Animals
    words: tuple[str, ...]
    young: PlaceArray
    word: PlaceArray
    dam: PlaceArray

    @cached_property
    def last_dam(self) -> PlaceArray:
        """The highest place of a dam with young of each word, -1 without any."""
        last = np.full(len(self.words), UNKNOWN, dtype=np.int32)
        np.maximum.at(last, self.word, self.dam)
        return last

    @cached_property
    def shared(self) -> BoolArray:
        """Whether each word has young of several dams, shape (words,)."""
        shared = np.zeros(len(self.words), dtype=bool)
        shared[self.word[(self.dam != UNKNOWN) & (self.dam != self.last_dam[self.word])]] = True
        return shared

    @cached_property
    def counted_anew(self) -> bool:
        """Whether the column gives the same words to litters of different dams as a habit.

        It does when more than one word in ten is shared by several dams. A single shared word
        may be a slip even where words are few, unless it is a bare number or one letter.
        """
        shared = np.flatnonzero(self.shared)
        if len(shared) <= SHARED_WORDS * np.count_nonzero(self.last_dam != UNKNOWN):
            return False
        word = self.words[int(shared[0])]
        return len(shared) > 1 or len(word) == 1 or not any(map(str.isalpha, word))

    @cached_property
    def litter(self) -> PlaceArray:
        """A number for the litter of each one, -1 where it is in doubt, shape (young,).

        It is the word's number, but that of word and dam where the word has several dams (or
        may have, as a habit of the column); there, young of an unknown dam belong to none.
        """
        by_dam = self.last_dam != UNKNOWN if self.counted_anew else self.shared
        litter = self.word.copy()
        apart = np.flatnonzero(by_dam[self.word])
        if len(apart):
            known = apart[self.dam[apart] != UNKNOWN]
            litter[apart] = UNKNOWN
            key = self.word[known].astype(np.int64) * len(self.animals.names) + self.dam[known]
            litter[known] = len(self.words) + np.unique(key, return_inverse=True)[1]
        return litter

    def members(self, wanted: list[int]) -> dict[int, list[int]]:
        """Indices of the young of some litters, by litter, in file order."""
        flags = np.zeros(int(self.litter.max()) + 2, dtype=bool)
        flags[wanted] = True
        found: dict[int, list[int]] = {litter: [] for litter in wanted}
        for index in np.flatnonzero(flags[self.litter]).tolist():
            found[int(self.litter[index])].append(index)
        return found

    def finding(self, kind: str, index: int, said: str, advice: str) -> Finding:
        """A finding about a litter, at the row of one of its young."""
        animals, place = self.animals, int(self.young[index])
        word = self.words[int(self.word[index])]
        return Finding(
            kind,
            f"litter {word} {said}.",
            advice,
            id=animals.names[place],
            row=animals.line(place),
            column=animals.records.columns.get("litter"),
            found=word,
        )

    def who(self, indices: list[int]) -> str:
        """The dam where she is known, and some of the young with their lines."""
        dams = {int(self.dam[index]) for index in indices} - {UNKNOWN}
        dam = "".join(f'dam "{self.animals.names[each]}", ' for each in dams)
        return dam + some_of(self.animals, [int(self.young[index]) for index in indices])


def _litters_of(animals: Animals) -> _Litters | None:
    """The litters of the records; None where none is recorded."""
    column = words_by_animal(animals, "litter")
    if column is None:
        return None
    blank = map(_NO_LITTER.__contains__, map(str.casefold, column.words))
    told = ~np.fromiter(blank, dtype=bool, count=len(column.words))
    dam = np.where(donor_told(animals) | (animals.dam < 0), UNKNOWN, animals.dam)
    with_litter = told[column.codes] & ~_with_group_dam(animals)
    young = np.flatnonzero(with_litter).astype(np.int32)
    if not len(young):
        return None
    return _Litters(animals, column.words, young, column.codes[young], dam[young].astype(np.int32))


def _with_group_dam(animals: Animals) -> BoolArray:
    """Whether the dam of each animal is a row that stands for several."""
    if "count" not in animals.values:
        return np.zeros(len(animals), dtype=bool)
    groups = np.zeros(len(animals.names) + 2, dtype=bool)
    groups[: len(animals)] = group_rows_of(animals)
    # The two last places are those of an unknown parent and of one of several: -1 and -2.
    flags: BoolArray = groups[animals.dam]
    return flags


def _dams_differ(litters: _Litters) -> list[Finding]:
    """Litters with several recorded dams, unless the column counts anew for each dam.

    In such a column a shared word is no sign of a fault, and it does no harm: young are taken
    for litter-mates only where they have one dam too.
    """
    if litters.counted_anew or not litters.shared.any():
        return []
    by_word: dict[int, dict[int, list[int]]] = defaultdict(lambda: defaultdict(list))
    doubtful = litters.shared[litters.word] & (litters.dam != UNKNOWN)
    for index in np.flatnonzero(doubtful).tolist():
        by_word[int(litters.word[index])][int(litters.dam[index])].append(index)
    names = litters.animals.names
    findings = []
    for by_dam in by_word.values():
        # Of the dam with the fewest young, the later in the file: hers are likeliest the slip.
        odd = min(by_dam.values(), key=lambda indices: (len(indices), -indices[0]))
        dams = listed(f'"{names[dam]}"' for dam in by_dam)
        young = [int(litters.young[indices[0]]) for indices in by_dam.values()]
        findings.append(
            litters.finding(
                "litter-dams-differ",
                odd[0],
                f"has young of the dams {dams}: {some_of(litters.animals, young)}",
                "Correct a dam or the litter. The dam is the one that bore the young; one that "
                "only fostered it belongs in reared_by.",
            )
        )
    return findings


def _dates_differ(litters: _Litters) -> list[Finding]:
    """Litters with births surely more than `DAYS_OF_A_LITTER` days apart."""
    born = litters.animals.dates.get("born")
    if born is None:
        return []
    earliest, latest = born.earliest[litters.young], born.latest[litters.young]
    # A last place takes those in no litter: -1.
    size = int(litters.litter.max()) + 2
    last, first = np.full(size, -_EVER, dtype=np.int32), np.full(size, _EVER, dtype=np.int32)
    np.maximum.at(last, litters.litter, earliest)
    np.minimum.at(first, litters.litter, latest)
    apart = np.flatnonzero((last - first)[:-1] > DAYS_OF_A_LITTER).tolist()
    findings = []
    for indices in litters.members(apart).values() if apart else ():
        soonest = min(indices, key=lambda index: int(latest[index]))
        farthest = max(indices, key=lambda index: int(earliest[index]))
        dates = [born.reading[int(litters.young[index])] for index in (soonest, farthest)]
        days = " to ".join(date.text for date in dates if date is not None)
        findings.append(
            litters.finding(
                "litter-dates-differ",
                farthest,
                f"was born on days from {days}: {litters.who(indices)}",
                "Correct a date, or give one of them another litter. Where births spread over "
                "days, or litters are put together, accept it.",
            )
        )
    return findings


def _too_large(litters: _Litters, largest: int) -> list[Finding]:
    """Litters of more young than believed; a row for several animals counts as so many."""
    animals = litters.animals
    counts = np.ones(len(litters.young), dtype=np.int64)
    if "count" in animals.values:
        reading = animals.values["count"]
        counts = np.array([int(str(value)) for value in reading.values])[
            reading.codes[litters.young]
        ]
    known = litters.litter != UNKNOWN
    sizes = np.bincount(litters.litter[known], weights=counts[known]).astype(np.int64)
    large = np.flatnonzero(sizes > largest).tolist()
    return [
        litters.finding(
            "litter-too-large",
            indices[0],
            f"has {sizes[litter]} young; at most {largest} "
            f"{'is' if largest == 1 else 'are'} believed: {litters.who(indices)}",
            "Split it where it is two litters under one name. Where young were fostered in, or "
            "litters put together, accept it; else raise largest_litter in the policy.",
        )
        for litter, indices in (litters.members(large).items() if large else ())
    ]


def litters_too_close(animals: Animals, rules: RecordRules) -> list[Finding]:
    """Births of one dam that are too far apart for one litter and too close for two.

    Surely more than `DAYS_OF_A_LITTER` days apart, and closer than the gestation by more than
    so many: some kinds conceive on the day they bear, and then carry a little shorter or
    longer. Without a gestation in the policy nothing is said. Births under one litter word
    are the concern of ``litter-dates-differ``. One finding for each later birth.
    """
    if rules.gestation is None or "born" not in animals.dates:
        return []
    births = _births(animals)
    pairs = births.too_close(shortest_days(rules.gestation) - DAYS_OF_A_LITTER)
    column = words_by_animal(animals, "litter") if pairs else None
    findings: dict[int, Finding] = {}
    for one, other in pairs:
        if other not in findings:
            named = _of_other_litters(column, births.young(one), births.young(other))
            if named is not None:
                findings[other] = _too_close(animals, rules, *named)
    return list(findings.values())


@dataclass(frozen=True)
class _Births:
    """Births by dam and first possible day; young of one dam with the same dates are one birth.

    Attributes
    ----------
    places
        Places of the young, in that order, shape (young,).
    starts
        Where each birth begins among `places`, and their number at the end, shape (births + 1,).
    dam, earliest, latest
        Of each birth, shape (births,).
    """

    places: PlaceArray
    starts: PlaceArray
    dam: PlaceArray
    earliest: PlaceArray
    latest: PlaceArray

    def young(self, birth: int) -> list[int]:
        """Places of the young of a birth, in file order."""
        return sorted(self.places[self.starts[birth] : self.starts[birth + 1]].tolist())

    def too_close(self, days: int) -> list[tuple[int, int]]:
        """Pairs of births, first and later, surely fewer than `days` apart and in no litter."""
        pairs = []
        # Each birth is held against the next, the next but one and so on, as long as any of
        # these may lie within the days; mostly the next does not.
        first = np.arange(len(self.dam) - 1)
        step = 1
        while len(first):
            later = first + step
            near = self.dam[later] == self.dam[first]
            near &= self.earliest[later] - self.earliest[first] < days
            first, later = first[near], later[near]
            sure = self.latest[later] - self.earliest[first] < days
            sure &= self.earliest[later] - self.latest[first] > DAYS_OF_A_LITTER
            pairs += list(zip(first[sure].tolist(), later[sure].tolist(), strict=True))
            step += 1
            first = first[first + step < len(self.dam)]
        return pairs


def _births(animals: Animals) -> _Births:
    born = animals.dates["born"]
    bore = (animals.dam >= 0) & born.known & ~_with_group_dam(animals) & ~donor_told(animals)
    bore &= animals.dam != np.arange(len(animals))
    places = np.flatnonzero(bore).astype(np.int32)
    key = (animals.dam[places].astype(np.int64) << _DAY_BITS) | born.earliest[places]
    places = places[np.argsort(key)]
    dam, earliest, latest = animals.dam[places], born.earliest[places], born.latest[places]
    new = np.ones(len(places), dtype=bool)
    new[1:] = (dam[1:] != dam[:-1]) | (earliest[1:] != earliest[:-1]) | (latest[1:] != latest[:-1])
    starts = np.flatnonzero(new).astype(np.int32)
    return _Births(
        places,
        np.append(starts, np.int32(len(places))).astype(np.int32),
        dam[starts],
        earliest[starts],
        latest[starts],
    )


def _of_other_litters(
    column: Coded | None, one: list[int], other: list[int]
) -> tuple[int, int] | None:
    """Young of two births that do not share a litter word, or None where all do."""
    if column is None:
        return one[0], other[0]

    def word(place: int) -> str:
        text = column.words[int(column.codes[place])]
        return "" if text.casefold() in _NO_LITTER else text

    for later in other:
        for first in one:
            if word(first) == "" or word(first) != word(later):
                return first, later
    return None


def _too_close(animals: Animals, rules: RecordRules, first: int, later: int) -> Finding:
    dam = animals.names[int(animals.dam[later])]
    name, days = animals.names[later], [animals.born(place) for place in (first, later)]
    on = [f"{'on' if date.exact else 'in'} {date.text}" for date in days if date is not None]
    return Finding(
        "litters-too-close",
        f"dam {dam} bore {animals.names[first]} {on[0]} and {name} {on[1]}, less than a gestation "
        f"apart ({rules.gestation}); {animals.names[first]} is on line {animals.line(first)}.",
        f"Correct a date or the dam of {name}. Where a dam may carry two litters at once, or "
        "lays anew before the first clutch hatches, accept it.",
        id=name,
        row=animals.line(later),
        column=animals.records.columns.get("dam"),
        found=dam,
    )
