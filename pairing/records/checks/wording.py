"""Text columns as the view has them, by distinct words, and how checks speak of animals."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.records.columns import ArrowText, Coded, coded, picked, replaced
from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from pairing.records.animals import Animals


def ids_of(animals: Animals) -> Sequence[str]:
    """Ids of the animals with a row, in Arrow's layout where the records are kept so."""
    return by_animal(animals, replaced(animals.records.fields["id"], animals.aliases))


def by_animal(animals: Animals, cells: Sequence[str]) -> Sequence[str]:
    """A column's cells on the rows that stand for the animals."""
    rows = animals.first_row
    if len(cells) == len(rows) and (rows == np.arange(len(rows), dtype=np.int32)).all():
        return cells
    if not isinstance(cells, ArrowText):
        return picked(cells, rows)
    import pyarrow

    return ArrowText(cells.array.take(pyarrow.array(rows)))


def words_by_animal(animals: Animals, field: str) -> Coded | None:
    """A field's distinct words and each animal's, as the view has it; None without the field."""
    patched = animals.patched.get(field, {})
    if field in animals.records.fields:
        column = coded(by_animal(animals, animals.records.fields[field]))
    elif patched:
        column = Coded(("",), np.zeros(len(animals), dtype=np.int32))
    else:
        return None
    if not patched:
        return column
    places = {word: place for place, word in enumerate(column.words)}
    codes = column.codes.copy()
    for animal, cell in patched.items():
        codes[animal] = places.setdefault(cell, len(places))
    return Coded(tuple(places), codes)


def with_line(animals: Animals, place: int) -> str:
    """An animal and the line of its row: ``A1 (line 2)``."""
    name = animals.names[place]
    return f"{name} (line {animals.line(place)})" if place < len(animals) else name


def some_of(animals: Animals, places: Iterable[int], most: int = 3) -> str:
    """Some animals with their lines, and how many more there are."""
    everyone = list(places)
    named = [with_line(animals, place) for place in everyone[:most]]
    rest = len(everyone) - len(named)
    return f"{', '.join(named)} and {rest:,} more" if rest else listed(named, most=most)
