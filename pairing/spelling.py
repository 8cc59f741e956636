"""Nearest known names, for messages that offer the word that was probably meant."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable


def nearest_names(word: str, known: Iterable[str], *, most: int = 1) -> list[str]:
    """Known names that look like `word`, best first; empty when none comes close."""
    import difflib

    by_folded = {name.casefold(): name for name in known}
    close = difflib.get_close_matches(word.casefold(), list(by_folded), n=most, cutoff=0.6)
    return [by_folded[name] for name in close]


def did_you_mean(word: str, known: Iterable[str]) -> str:
    """A closing sentence such as ``Did you mean "dam"?``, or an empty string."""
    close = nearest_names(word, known)
    return f'Did you mean "{close[0]}"?' if close else ""


def listed(names: Iterable[str], *, most: int = 6, word: str = "and") -> str:
    """Names as a phrase: ``A, B and C``, or ``A, B, C and 9 more`` past `most`."""
    all_names = list(names)
    if len(all_names) > most:
        return f"{', '.join(all_names[:most])} {word} {len(all_names) - most} more"
    if len(all_names) < 2:
        return "".join(all_names)
    return f"{', '.join(all_names[:-1])} {word} {all_names[-1]}"


_CONTROL = re.compile(r"[\x00-\x08\x0b-\x1f\x7f-\x9f]")


def visible(text: str) -> str:
    """Text with control characters shown as a mark, so that none reaches a screen."""
    return _CONTROL.sub("\N{REPLACEMENT CHARACTER}", text)
