"""Columns of text: as plain cells, or as Arrow buffers where a table is large.

Both are sequences of cells. What must be quick over millions of rows works on their distinct
words and a code for each row, never on the cells one by one.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, overload

import numpy as np

from pairing.records.fields import tidy

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    import numpy.typing as npt

    CodeArray = npt.NDArray[np.int32]
    BoolArray = npt.NDArray[np.bool_]

_LONG = 1 << 20
_FIRST_PLAIN = np.uint8(ord("!"))
_PLAIN = np.uint8(ord("~") - ord("!"))


@dataclass(frozen=True, slots=True)
class Coded:
    """A column as its distinct `words`, in order of first use, and each row's place among them."""

    words: tuple[str, ...]
    codes: CodeArray

    def rows_of(self, places: Sequence[int]) -> npt.NDArray[np.int64]:
        """Rows whose word is one of those at `places`."""
        wanted = np.zeros(len(self.words), dtype=bool)
        wanted[list(places)] = True
        return np.flatnonzero(wanted[self.codes])


class ArrowText(Sequence[str]):
    """Cells of a column in Arrow's layout: offsets into one run of UTF-8 bytes."""

    def __init__(self, array: Any) -> None:
        """Take a ``pyarrow`` string or dictionary array without nulls."""
        self.array = array

    def __len__(self) -> int:
        return len(self.array)

    @overload
    def __getitem__(self, place: int) -> str: ...
    @overload
    def __getitem__(self, place: slice) -> tuple[str, ...]: ...
    def __getitem__(self, place: int | slice) -> str | tuple[str, ...]:
        if isinstance(place, slice):
            return tuple(self.array[place].to_pylist())
        return str(self.array[int(place)].as_py())

    def __iter__(self) -> Iterator[str]:
        for start in range(0, len(self.array), 65536):
            yield from self.array[start : start + 65536].to_pylist()

    def __eq__(self, other: object) -> bool:
        return (
            isinstance(other, Sequence)
            and len(self) == len(other)
            and all(mine == theirs for mine, theirs in zip(self, other, strict=True))
        )

    def __hash__(self) -> int:
        return id(self)

    @property
    def is_coded(self) -> bool:
        """Whether the column is kept as distinct words and codes."""
        import pyarrow

        return bool(pyarrow.types.is_dictionary(self.array.type))

    def bytes_of(self) -> tuple[CodeArray, npt.NDArray[np.uint8]]:
        """Offsets, shape (n + 1,), and the bytes they point into."""
        _valid, offsets, data = self.array.buffers()
        start = self.array.offset
        ends = np.frombuffer(offsets, np.int32)[start : start + len(self.array) + 1]
        text = np.frombuffer(data, np.uint8) if data is not None else np.zeros(0, np.uint8)
        return ends, text

    def coded(self) -> Coded:
        """Distinct words and codes."""
        array = self.array if self.is_coded else self.array.dictionary_encode()
        codes = array.indices.to_numpy(zero_copy_only=False).astype(np.int32, copy=False)
        return Coded(tuple(array.dictionary.to_pylist()), codes)

    def tidied(self) -> ArrowText:
        """The column with every cell tidied; only rows that need it are touched one by one."""
        import pyarrow
        import pyarrow.compute

        if self.is_coded:
            words = [tidy(word) for word in self.array.dictionary.to_pylist()]
            places = {word: place for place, word in enumerate(dict.fromkeys(words))}
            if len(places) == len(words):
                new = self.array.indices
            else:
                moved = pyarrow.array([places[word] for word in words], pyarrow.int32())
                new = moved.take(self.array.indices)
            return ArrowText(
                pyarrow.DictionaryArray.from_arrays(new, pyarrow.array(list(places), "string"))
            )
        rows = self.untidy_rows()
        if not len(rows):
            return self
        mask = np.zeros(len(self), dtype=bool)
        mask[rows] = True
        mended = [tidy(cell) for cell in self.array.take(pyarrow.array(rows)).to_pylist()]
        return ArrowText(
            pyarrow.compute.replace_with_mask(
                self.array, pyarrow.array(mask), pyarrow.array(mended, "string")
            )
        )

    def untidy_rows(self) -> npt.NDArray[np.int64]:
        """Rows of a plain column with a blank, or with anything but plain letters and signs."""
        ends, text = self.bytes_of()
        used = text[ends[0] : ends[-1]]
        if len(used) > _LONG and _all_plain(used):
            return np.zeros(0, dtype=np.int64)
        # Bytes below the first plain one wrap round to the top, so that one comparison does.
        odd = (used - _FIRST_PLAIN) > _PLAIN
        if not odd.any():
            return np.zeros(0, dtype=np.int64)
        places = np.flatnonzero(odd) + int(ends[0])
        return np.unique(np.searchsorted(ends, places, side="right") - 1)


def _all_plain(text: npt.NDArray[np.uint8]) -> bool:
    """Whether a long text has no blank or odd letter; False where compiled code is not there."""
    try:
        from pairing.records.ids.hashing import all_plain
    except ImportError:
        return False
    return bool(all_plain(text))


def coded(cells: Sequence[str]) -> Coded:
    """Distinct words of a column and each row's code."""
    if isinstance(cells, ArrowText):
        return cells.coded()
    places: dict[str, int] = {}
    codes = np.fromiter(
        (places.setdefault(cell, len(places)) for cell in cells), dtype=np.int32, count=len(cells)
    )
    return Coded(tuple(places), codes)


def tidied(cells: Sequence[str]) -> Sequence[str]:
    """A column with every cell tidied (NFKC, trimmed, inner blanks folded to one)."""
    return cells.tidied() if isinstance(cells, ArrowText) else tuple(map(tidy, cells))


def replaced(cells: Sequence[str], words: Mapping[str, str]) -> Sequence[str]:
    """A column with some whole cells replaced."""
    if not words:
        return cells
    if not isinstance(cells, ArrowText):
        return tuple(words.get(cell, cell) for cell in cells)
    import pyarrow
    import pyarrow.compute

    array = cells.array.cast("string") if cells.is_coded else cells.array
    mask = pyarrow.compute.is_in(array, pyarrow.array(list(words), "string"))
    old = pyarrow.compute.filter(array, mask).to_pylist()
    if not old:
        return cells
    new = pyarrow.array([words[cell] for cell in old], "string")
    return ArrowText(pyarrow.compute.replace_with_mask(array, mask, new))


def picked(cells: Sequence[str], rows: npt.NDArray[np.int32] | npt.NDArray[np.int64]) -> list[str]:
    """Cells of some rows."""
    if not isinstance(cells, ArrowText):
        return [cells[row] for row in rows.tolist()]
    import pyarrow

    taken: list[str] = cells.array.take(pyarrow.array(rows)).to_pylist()
    return taken
