"""Columns about heritable conditions: results of tests and what was seen on the animal.

Words that mean different things to different laboratories ("positive", "+/-", "homozygous")
are not read.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

from pairing.records.fields import tidy

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

_NOTHING = (
    "",
    "?",
    ".",
    "-",
    "na",
    "n/a",
    "null",
    "none",
    "unk",
    "unknown",
    "not known",
    "untested",
    "not tested",
    "not done",
    "pending",
    "inconclusive",
    "not examined",
    "not recorded",
)
_TEST = {
    "free": "free clear n/n normal negative neg noncarrier non-carrier wt wt/wt n/y",
    "carrier": "carrier heterozygous heterozygote het n/m m/n n/mut mut/n wt/mut mut/wt",
    "affected": "affected m/m mut/mut m/y at-risk",
}
_SEEN = {
    "affected": "affected yes y true 1 present",
    "unaffected": "unaffected no n false 0 absent normal healthy free clear",
}
CONDITION_TEST_WORDS: dict[str, str | None] = {
    **dict.fromkeys(_NOTHING),
    **{word: result for result, words in _TEST.items() for word in words.split()},
    "non carrier": "free",
    "clear by parentage": "free",
    "clear by descent": "free",
    "homozygous normal": "free",
    "wild type": "free",
    "at risk": "affected",
    "homozygous affected": "affected",
}
"""Words for the result of a test, folded, with the result each means; None for no result."""

CONDITION_SEEN_WORDS: dict[str, str | None] = {
    **dict.fromkeys(_NOTHING),
    **{word: result for result, words in _SEEN.items() for word in words.split()},
    "not affected": "unaffected",
}
"""Words for what was seen, folded, with what each means; None for nothing."""

CONDITION_WORDS: dict[str, Mapping[str, str | None]] = {
    "test": CONDITION_TEST_WORDS,
    "seen": CONDITION_SEEN_WORDS,
}
EXPECTED_WORDS = {"test": ("free", "carrier", "affected"), "seen": ("affected", "unaffected")}

_HEADING = re.compile(r"(?P<name>.*\S)_(?P<part>test|seen|test_on)", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class ConditionColumn:
    """A column about a condition.

    Attributes
    ----------
    heading
        As the file spells it.
    condition
        NAME of ``NAME_test``.
    part
        ``test``, ``seen`` or ``test_on``.
    """

    heading: str
    condition: str
    part: str


def condition_columns(headers: Iterable[str]) -> list[ConditionColumn]:
    """The columns ``NAME_test``, ``NAME_seen`` and ``NAME_test_on``, in the order of the file."""
    found = []
    for heading in headers:
        match = _HEADING.fullmatch(heading.strip())
        if match:
            found.append(ConditionColumn(heading, match["name"].strip(), match["part"].lower()))
    return found


def condition_word(part: str, cell: str) -> str | None:
    """What a cell of a column ``NAME_test`` or ``NAME_seen`` says; None for nothing.

    Raises
    ------
    KeyError
        If the word is not known.
    """
    return CONDITION_WORDS[part][tidy(cell).casefold()]
