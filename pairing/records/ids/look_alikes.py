"""Texts that differ only in what is easily mistyped: ids, marks, names of holders."""

from __future__ import annotations

import re
import unicodedata
from collections import defaultdict
from typing import TYPE_CHECKING

import numpy as np

from pairing.records.columns import ArrowText, picked

if TYPE_CHECKING:
    from collections.abc import Sequence

    import numpy.typing as npt

    from pairing.records.columns import CodeArray

_OTHER_ALPHABETS = str.maketrans(
    # Capitals of Cyrillic and Greek, then their small letters, each with the Latin letter it
    # is drawn as.
    "АВЕКМНОРСТХУІЈЅΑΒΕΖΗΙΚΜΝΟΡΤΥΧавекмнорстхуіјѕαοιρκν",
    "ABEKMHOPCTXYIJSABEZHIKMNOPTYXabekmhopctxyijsaoipkv",
)
_BREAK = " "
_FOLD = {
    **{place: _BREAK for place in range(128) if not chr(place).isalnum() and chr(place) != "\n"},
    **{ord(letter): digit for letter, digit in zip("oil", "011", strict=True)},
}
_LEADING_ZEROS = re.compile(r"(?<![0-9])0+(?=[0-9])")
_BETWEEN_DIGITS = re.compile(r"(?<=[0-9]) +(?=[0-9])")


def essence(text: str) -> str:
    """A text without what is easily mistyped.

    Left out of account are case, letters that look like digits (O and 0; l, I and 1), letters
    of other alphabets that look Latin, accents, zeros before each number, punctuation and
    blanks.
    """
    return _folded(text).replace(_BREAK, "")


def number_breaks(text: str) -> frozenset[int]:
    """Where in its `essence` a text has a sign or blank between two digits.

    Ids that are built of numbers (``1-11`` and ``11-1``) differ in these places and in
    nothing else.
    """
    folded = _folded(text)
    return frozenset(
        gap.start() - folded.count(_BREAK, 0, gap.start())
        for gap in _BETWEEN_DIGITS.finditer(folded)
    )


def words_only(text: str) -> str:
    """Letters and digits of a text, without case, accents, punctuation and blanks."""
    plain = text if text.isascii() else _latin(text)
    return "".join(letter for letter in plain.casefold() if letter.isalnum())


def in_latin(text: str) -> str:
    """A text with letters of other alphabets that look Latin replaced by these."""
    return text if text.isascii() else _latin(text)


def _folded(text: str, *, zeros: bool = False) -> str:
    plain = (text if text.isascii() else _latin(text)).lower().translate(_FOLD)
    return plain if zeros else _LEADING_ZEROS.sub("", plain)


def _latin(text: str) -> str:
    letters = unicodedata.normalize("NFKD", text).translate(_OTHER_ALPHABETS).casefold()
    kept = []
    for letter in letters:
        if unicodedata.combining(letter):
            continue
        digit = unicodedata.decimal(letter, None)
        if digit is not None:
            kept.append(str(digit))
        else:
            kept.append(letter if letter.isalnum() or letter == "\n" else _BREAK)
    return "".join(kept)


def groups_alike(
    cells: Sequence[str], *, distinct: bool = False, as_written: bool = False
) -> list[list[int]]:
    """Places of cells of one `essence`, each group in order; blank cells are like nothing.

    Parameters
    ----------
    distinct
        Whether no two cells are the same, as with ids; clean ones are passed over quickly then.
    as_written
        Whether letters and digits are taken as written, so that only case, signs and blanks
        (see `words_only`) are left out of account.
    """
    fold = words_only if as_written else essence
    if isinstance(cells, ArrowText):
        suspects = _suspects(cells, distinct=distinct, zeros=as_written)
        words: Sequence[str] = picked(cells, suspects)
        places = suspects.tolist()
    else:
        places = _suspects_among(cells, zeros=as_written)
        words = [cells[place] for place in places]
    folds: dict[str, str] = {}
    groups: dict[str, list[int]] = defaultdict(list)
    for place, word in zip(places, words, strict=True):
        if word not in folds:
            folds[word] = fold(word)
        if folds[word]:
            groups[folds[word]].append(place)
    return [group for group in groups.values() if len(group) > 1]


def _suspects_among(cells: Sequence[str], *, zeros: bool) -> list[int]:
    """Places of cells whose essence occurs again; all cells are folded in one go.

    With `zeros` those in front of numbers count, so that no cells of one `words_only` are
    missed.
    """
    text = "\n".join(cells)
    if not text:
        return []
    folded = _folded(text, zeros=zeros).replace(_BREAK, "").split("\n")
    seen: dict[str, int] = {}
    again: set[str] = set()
    for place, each in enumerate(folded):
        if each and seen.setdefault(each, place) != place:
            again.add(each)
    return [place for place, each in enumerate(folded) if each in again] if again else []


def _suspects(cells: ArrowText, *, distinct: bool, zeros: bool) -> npt.NDArray[np.int64]:
    """The same over Arrow's buffers, perhaps with a few places too many."""
    import pyarrow
    import pyarrow.compute

    try:
        from pairing.records.ids import folding
    except ImportError:
        return np.array(_suspects_among(tuple(cells), zeros=zeros), dtype=np.int64)

    plain = ArrowText(cells.array.cast("string")) if cells.is_coded else cells
    ends, text = plain.bytes_of()
    none = np.zeros(0, dtype=np.int64)
    if not len(text) or (distinct and surely_unlike(ends, text)):
        return none
    used = text[ends[0] : ends[-1]]
    if (used > 127).any():
        foreign = np.unique(
            np.searchsorted(ends, np.flatnonzero(used > 127) + int(ends[0]), side="right") - 1
        )
        mask = np.zeros(len(plain), dtype=bool)
        mask[foreign] = True
        latin = [_latin(cell) for cell in picked(plain, foreign)]
        plain = ArrowText(
            pyarrow.compute.replace_with_mask(
                plain.array, pyarrow.array(mask), pyarrow.array(latin, "string")
            )
        )
        ends, text = plain.bytes_of()
    hashes = folding.essence_hashes(ends, text, _TABLE, zeros)
    ordered = np.sort(hashes)
    again = np.unique(ordered[1:][(ordered[1:] == ordered[:-1]) & (ordered[1:] != 0)])
    return np.flatnonzero(np.isin(hashes, again)) if len(again) else none


def surely_unlike(ends: CodeArray, text: npt.NDArray[np.uint8]) -> bool:
    """Whether different ids are built so evenly that no two can have one essence.

    So it is where all have one length and every place in them holds digits only or one and
    the same letter or sign, and where all are numbers without zeros in front.
    """
    count = len(ends) - 1
    used = text[ends[0] : ends[-1]]
    if not count or not len(used):
        return True
    lengths = np.diff(ends)
    width = int(lengths[0])
    if (lengths == width).all():
        low, high = _extremes(used, width)
        return bool(((low == high) | ((low >= _ZERO) & (high <= _NINE))).all())
    if used.min() < _ZERO or used.max() > _NINE or lengths.min() == 0:
        return False
    return not bool((text[ends[:-1]] == _ZERO).any())


def _extremes(
    used: npt.NDArray[np.uint8], width: int
) -> tuple[npt.NDArray[np.uint8], npt.NDArray[np.uint8]]:
    """Least and greatest byte in each place of cells that are all `width` bytes long."""
    # Long rows of many cells are compared far quicker than short rows of one.
    long = width * _CELLS_AT_ONCE
    whole = len(used) // long * long
    rest = used[whole:].reshape(-1, width)
    low = np.full(width, 255, dtype=np.uint8)
    high = np.zeros(width, dtype=np.uint8)
    if len(rest):
        low, high = rest.min(axis=0), rest.max(axis=0)
    if whole:
        square = used[:whole].reshape(-1, long)
        low = np.minimum(low, square.min(axis=0).reshape(-1, width).min(axis=0))
        high = np.maximum(high, square.max(axis=0).reshape(-1, width).max(axis=0))
    return low, high


_CELLS_AT_ONCE = 256
_ZERO, _NINE = np.uint8(ord("0")), np.uint8(ord("9"))
_TABLE = np.array(
    [
        0 if (letter := chr(place).lower().translate(_FOLD)) in (_BREAK, "\n") else ord(letter)
        for place in range(128)
    ]
    + list(range(128, 256)),
    dtype=np.uint8,
)
"""ASCII bytes as `essence` has them, 0 for a break; other bytes stay."""
