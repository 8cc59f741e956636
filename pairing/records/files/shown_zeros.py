"""Zeros in front of numbers, which a sheet shows by a cell's format and does not store.

Ids such as 0003 are often kept as the number 3 in a cell of the format ``0000``. The reader of
workbooks gives the number only, so which cells have such a format is found out here.
"""

from __future__ import annotations

import re
from array import array
from bisect import bisect_right

_ONLY_ZEROS = re.compile(r"0{2,20}(?:;.*)?", re.DOTALL)
"""Longer formats are not honoured: few cells could fill the memory with zeros."""
_SHOWN_WITH_ZEROS = re.compile(r"0[0-9]{1,19}", re.ASCII)
_MOST_RUNS = 20_000_000


class Digits:
    """How many digits cells show at least, in runs of rows; rows and columns count from 0."""

    def __init__(self) -> None:
        self._columns: dict[int, tuple[array[int], array[int], array[int]]] = {}
        self._unsorted: set[int] = set()
        self._runs = 0

    def note(self, row: int, column: int, digits: int, rows: int = 1) -> None:
        """A cell, or a run of them below each other, shows at least so many digits."""
        firsts, ends, widths = self._columns.setdefault(
            column, (array("Q"), array("Q"), array("B"))
        )
        if ends and ends[-1] == row and widths[-1] == digits:
            ends[-1] = row + rows
        elif self._runs < _MOST_RUNS:
            self._runs += 1
            if firsts and row < firsts[-1]:
                self._unsorted.add(column)
            firsts.append(row)
            ends.append(row + rows)
            widths.append(digits)

    def of_row(self, row: int) -> list[tuple[int, int]]:
        """Columns with such a cell in a row, each with its number of digits."""
        while self._unsorted:
            self._sort(self._unsorted.pop())
        found = []
        for column, (firsts, ends, widths) in self._columns.items():
            run = bisect_right(firsts, row) - 1
            if run >= 0 and row < ends[run]:
                found.append((column, widths[run]))
        return found

    def _sort(self, column: int) -> None:
        firsts, ends, widths = zip(*sorted(zip(*self._columns[column], strict=True)), strict=True)
        self._columns[column] = (array("Q", firsts), array("Q", ends), array("B", widths))


def digits_of_format(code: str) -> int:
    """Digits that a number format of zeros only shows at least; 0 for any other format."""
    return len(code.partition(";")[0]) if _ONLY_ZEROS.fullmatch(code) else 0


def digits_of_text(text: str) -> int:
    """Digits of a whole number that is shown with zeros in front; 0 for any other text."""
    return len(text) if _SHOWN_WITH_ZEROS.fullmatch(text) else 0


def with_zeros(number: str, digits: int) -> str:
    """A whole number as it is shown; 0 stays as it is, which says that a parent is not known."""
    whole = number.isdigit() and number != "0"
    return number.zfill(digits) if whole else number
