"""Rows that stand for several animals: tanks, shoals and harems known by counts."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.records.columns import ArrowText, picked
from pairing.records.findings import Finding

if TYPE_CHECKING:
    from collections.abc import Sequence

    import numpy.typing as npt

    from pairing.records.animals import Animals
    from pairing.records.rules import RecordRules


def group_rows(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Rows that stand for another number of animals than one."""
    counts = animals.values.get("count")
    if counts is None:
        return []
    return [
        Finding(
            "group-row",
            f"{animals.names[place]} stands for {counts[place]} animals that are not told apart."
            if counts[place]
            else f"{animals.names[place]} is a group that is empty now; it does not live.",
            "Its figures are those of one animal drawn from them at random; give each animal a "
            "row of its own where you can.",
            id=animals.names[place],
            row=animals.line(place),
            column=animals.records.columns.get("count"),
            found=animals.cell("count", place),
        )
        for place in counts.places(lambda count: count != 1)
    ]


def rows_of_nothing_but_an_id(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Rows with an id and no other cell, of animals that nobody names as a parent.

    They may be headings ("1990s") or totals in a table of more columns than ids and parents.
    """
    fields = animals.records.fields
    others = [cells for name, cells in fields.items() if name != "id"]
    others += animals.records.carried.values()
    parents = sum(name in fields for name in ("sire", "dam"))
    if len(others) <= parents:
        return []
    if any(_never_blank(cells) for cells in others):
        return []
    sires, dams = animals.roles
    empty = animals.places[~(sires | dams)[: len(animals)]]
    for cells in others:
        if not len(empty):
            return []
        empty = empty[_blank(cells, animals.first_row[empty])]
    return [
        Finding(
            "nothing-but-an-id",
            f"{animals.names[place]} has an id and nothing else in its row, and is nobody's "
            "parent.",
            "If it is no animal (a heading, a total), delete the row; until then it counts as one.",
            id=animals.names[place],
            row=animals.line(place),
            column=animals.records.columns.get("id"),
            found=animals.names[place],
        )
        for place in empty.tolist()
    ]


def _never_blank(cells: Sequence[str]) -> bool:
    """Whether a column of few words has none that is blank: the quick way out."""
    return (
        isinstance(cells, ArrowText)
        and cells.is_coded
        and all(word.strip() for word in cells.coded().words)
    )


def _blank(cells: Sequence[str], rows: npt.NDArray[np.int32]) -> npt.NDArray[np.bool_]:
    if isinstance(cells, ArrowText) and cells.is_coded:
        words = cells.coded()
        says_nothing = np.array([not word.strip() for word in words.words], dtype=bool)
        flags: npt.NDArray[np.bool_] = says_nothing[words.codes[rows]]
        return flags
    if isinstance(cells, ArrowText):
        ends, _text = cells.bytes_of()
        maybe = ends[rows + 1] - ends[rows] < _FEW_LETTERS
        maybe[maybe] = [not cell.strip() for cell in picked(cells, rows[maybe])]
        return maybe
    return np.array([not cells[row].strip() for row in rows.tolist()], dtype=bool)


_FEW_LETTERS = 4
