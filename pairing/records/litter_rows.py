"""Rows that stand for whole litters, by numbers born, dead and weaned.

Such a row counts for so many animals as were weaned, or else were born and did not die. The
numbers stay in the record beside it, for what they tell of survival.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import Reading
from pairing.records.findings import Finding

if TYPE_CHECKING:
    from collections.abc import Mapping

    from pairing.records.animals import Animals

LITTER_NUMBERS = ("number_born", "number_dead", "number_weaned")
"""Fields of a row that stands for a litter."""


def count_of_litters(
    values: Mapping[str, Reading[object]], counted: np.ndarray, animals: int
) -> Reading[object] | None:
    """How many animals each row stands for, the numbers of litters taken into account.

    Parameters
    ----------
    values
        What the fields say, by name.
    counted
        Whether a count is recorded, shape (animals,): it is used as it stands.
    """
    told = {name: values[name] for name in LITTER_NUMBERS if name in values}
    if not told:
        return values.get("count")
    rows = np.zeros(animals, dtype=bool)
    for reading in told.values():
        rows |= reading.where(lambda number: number is not None)
    own = values.get("count")
    numbers = (
        np.ones(animals, dtype=np.int64)
        if own is None
        else np.array(own.values, dtype=np.int64)[own.codes]
    )
    for row in np.flatnonzero(rows & ~counted).tolist():
        said = {name: reading[row] for name, reading in told.items()}
        numbers[row] = _alive(said)
    distinct, codes = np.unique(numbers, return_inverse=True)
    return Reading(tuple(distinct.tolist()), codes.astype(np.int32))


def _alive(said: Mapping[str, object]) -> int:
    weaned, born, dead = (
        said.get(name) for name in ("number_weaned", "number_born", "number_dead")
    )
    if isinstance(weaned, int):
        return weaned
    if isinstance(born, int):
        return max(0, born - (dead if isinstance(dead, int) else 0))
    return 1


def litter_numbers_in_doubt(animals: Animals, rules: object) -> list[Finding]:  # noqa: ARG001
    """Litters of which more died or were weaned than were born."""
    born = animals.values.get("number_born")
    if born is None:
        return []
    findings = []
    for place in born.places(lambda number: number is not None):
        said = {name: animals.value(name, place) for name in LITTER_NUMBERS}
        dead, weaned = (
            number if isinstance(number := said[name], int) else 0
            for name in ("number_dead", "number_weaned")
        )
        number_born = said["number_born"]
        if isinstance(number_born, int) and dead + weaned > number_born:
            findings.append(
                Finding(
                    "litter-numbers-disagree",
                    f"{animals.names[place]}: of {number_born} born, {dead} died and {weaned} were "
                    "weaned.",
                    "Correct the numbers; until then those weaned count, or those born less "
                    "those that died.",
                    id=animals.names[place],
                    row=animals.line(place),
                    column=animals.records.columns.get("number_born"),
                    found=str(number_born),
                )
            )
    return findings
