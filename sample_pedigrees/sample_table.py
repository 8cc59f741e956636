"""What the four sample makers share: an animal, a kinship table, dates and the CSV writer."""

from __future__ import annotations

import csv
from dataclasses import dataclass
from datetime import date, timedelta
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence
    from pathlib import Path

AS_OF = date(2026, 11, 30)
"""The last day of every sample; nothing recorded is later."""


@dataclass
class Animal:
    """One animal as it truly lived; what is written about it may say less.

    `sire` and `dam` are positions in the list of animals, or None where not recorded.
    """

    position: int
    id: str
    sex: str
    sire: int | None
    dam: int | None
    born: date
    died: date | None = None
    left: date | None = None
    end_cause: str = ""
    holder: str = ""

    def present_on(self, day: date) -> bool:
        """Tell whether the animal is born, alive and in the programme on this day."""
        ended = (self.died is not None and self.died <= day) or (
            self.left is not None and self.left <= day
        )
        return self.born <= day and not ended

    def age_on(self, day: date) -> float:
        """Age in years on this day."""
        return (day - self.born).days / 365.25


class KinshipTable:
    """Kinship of all animals so far, grown one animal at a time by the tabular recursion.

    Kinship is the chance that an allele drawn from each of two animals is identical by descent.
    An animal's kinship with each earlier one is the mean of its parents' kinships with that one,
    and with itself (1 + F) / 2, where F is the kinship of its parents.
    A parent that is not recorded counts as unrelated to everybody.
    """

    def __init__(self, capacity: int) -> None:
        self._kinship = np.zeros((capacity, capacity))
        self._count = 0

    def add(self, sire: int | None, dam: int | None) -> float:
        """Append an animal with these parents and return its inbreeding coefficient."""
        new = self._count
        for parent in (sire, dam):
            if parent is not None:
                self._kinship[new, :new] += self._kinship[parent, :new] / 2
        self._kinship[:new, new] = self._kinship[new, :new]
        inbreeding = 0.0 if sire is None or dam is None else self.between(sire, dam)
        self._kinship[new, new] = (1 + inbreeding) / 2
        self._count += 1
        return inbreeding

    def between(self, first: int, second: int) -> float:
        """Kinship of two animals."""
        return float(self._kinship[first, second])

    def mean_with(self, one: int, others: Sequence[int]) -> float:
        """Mean kinship of one animal with these others."""
        return float(self._kinship[one, list(others)].mean())


def day_between(random: np.random.Generator, first: date, last: date) -> date:
    """Draw a day from first to last, both included."""
    return first + timedelta(days=int(random.integers(0, (last - first).days + 1)))


def iso(day: date | None) -> str:
    """The day as ISO text, blank for None."""
    return "" if day is None else day.isoformat()


def less_exact(day: date, draw: float, *, month_only: float, year_only: float) -> str:
    """The day as ISO text, with these shares given to the month or to the year only.

    Days of the last two years are always exact, so that nobody is dead "some day in 2026".
    """
    if day.year >= AS_OF.year - 1 or draw >= month_only + year_only:
        return day.isoformat()
    return f"{day:%Y-%m}" if draw < month_only else f"{day:%Y}"


def write_table(path: Path, columns: Sequence[str], rows: Iterable[Mapping[str, str]]) -> None:
    """Write a CSV file: UTF-8, LF line ends, a header, then one row an animal."""
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.DictWriter(file, columns, lineterminator="\n")
        writer.writeheader()
        writer.writerows(rows)
