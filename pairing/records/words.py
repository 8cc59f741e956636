"""Reading the words of a column: each distinct word once, whatever the number of rows."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

from pairing.records import fields
from pairing.spelling import did_you_mean

if TYPE_CHECKING:
    from collections.abc import Mapping

_TOO_SHORT_TO_GUESS = 2
_COUNTS = re.compile(r"\d{1,9}(?:\.\d{1,9}){0,2}$", re.ASCII)
_LONGEST_NUMBER = 7
MOST_IN_A_ROW = 10_000_000


@dataclass(frozen=True, slots=True)
class Misread:
    """Why a word could not be read: the kind of finding and what was expected."""

    kind: str
    expected: str


Read = tuple[object, Misread | None]


@dataclass(frozen=True, slots=True)
class _Words:
    known: Mapping[str, object]
    blank: object
    expected: str
    kind: str = "unreadable-value"


_FIXED = {
    "sex": _Words(
        fields.SEX_WORDS, "unknown", "male, female, unknown, hermaphrodite", "unreadable-sex"
    ),
    "status": _Words(fields.STATUS_WORDS, "", "living, dead, gone, lost"),
    "origin": _Words(fields.ORIGIN_WORDS, "", "wild, foundation, imported, captive, unknown"),
    "end_cause": _Words(
        {cause: cause for cause in fields.END_CAUSES},
        "unknown",
        "natural, euthanised-ill, culled, slaughtered, used, unknown",
    ),
    "may_breed": _Words(fields.YES_NO_WORDS, None, "yes, no"),
}
_NUMBERS = ("number_born", "number_dead", "number_weaned")
WORD_FIELDS = (*_FIXED, "merit", "count", *_NUMBERS)
"""Fields that `read_word` reads."""


def read_word(field: str, cell: str) -> Read:
    """The value of a cell of one of `WORD_FIELDS`, and why not where it cannot be read."""
    if field == "merit":
        return _number(cell)
    if field == "count":
        return _count(cell)
    if field in _NUMBERS:
        return _whole_number(cell)
    words = _FIXED[field]
    word = cell.casefold()
    if word == "" or (word in fields.MISSING_PARENT and word not in words.known):
        return words.blank, None
    if word in words.known:
        return words.known[word], None
    hint = did_you_mean(word, words.known) if len(word) > _TOO_SHORT_TO_GUESS else ""
    return words.blank, Misread(words.kind, f"one of: {words.expected}. {hint}".rstrip())


def same_meaning(field: str, cell: str) -> str:
    """What a cell says, so that ``m`` and ``male`` are the same; blank when it says nothing."""
    if field not in _FIXED:
        return cell
    said = str(_FIXED[field].known.get(cell.casefold(), cell))
    return "" if said == "unknown" else said


def is_castrate(cell: str) -> bool:
    """Whether a word for sex says that the animal is castrated."""
    return cell.casefold() in fields.CASTRATE_WORDS


def counted_by_sex(cell: str) -> dict[str, int]:
    """Animals of each sex in a count written as males.females or males.females.unknown."""
    if "." not in cell or not _COUNTS.match(cell):
        return {}
    return dict(zip(("male", "female", "unknown"), map(int, cell.split(".")), strict=False))


def _number(cell: str) -> Read:
    if cell == "" or cell.casefold() in fields.MISSING_PARENT:
        return None, None
    try:
        number = float(cell)
    except ValueError:
        number = math.nan
    if math.isfinite(number):
        return number, None
    hint = ", with a point before the decimals" if "," in cell else ""
    return None, Misread("unreadable-value", f"a number{hint}.")


def _whole_number(cell: str) -> Read:
    if cell == "" or cell.casefold() in fields.MISSING_PARENT:
        return None, None
    if cell.isascii() and cell.isdigit() and len(cell) <= _LONGEST_NUMBER:
        return int(cell), None
    return None, Misread("count-unreadable", "a whole number such as 6.")


def _count(cell: str) -> Read:
    """A number of animals, or males.females or males.females.unknown."""
    if cell == "" or cell.casefold() in fields.MISSING_PARENT:
        return 1, None
    counted = sum(int(part) for part in cell.split(".")) if _COUNTS.match(cell) else None
    if counted is None or counted > MOST_IN_A_ROW:
        return 1, Misread(
            "count-unreadable", "a whole number such as 30, or males.females.unknown as 12.15.3."
        )
    return counted, None
