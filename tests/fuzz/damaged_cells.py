"""Damage to the cells of a table, as hands and programs do it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from pairing.records.fields import SEX_WORDS, SPELLINGS
from tests.fuzz.seed_tables import cut_short

if TYPE_CHECKING:
    import random
    from collections.abc import Callable

    from tests.fuzz.seed_tables import Grid

DATES = (
    *("2019", "2019-05", "2019-05-31", "2019?", "~2019", "[2018..2020]", "../2019", "2019/.."),
    *("31/05/2019", "05/31/2019", "3.4.19", "May-19", "31 May 2019", "2019-W53-7", "201X", "20XX"),
    *("1900-02-29", "2019-02-30", "2019-13", "0000", "9999", "10000-01-01", "-0001", "99/99/9999"),
    *("43586", "1E5", "2019-05-31T12:00", "[2018,2020]", "{2018}", "today", "1/1/1", "٢٠١٩"),
    *("二〇一九年", "[..]", "[2019..", "2020..2019"),
)
IDS = ("nobody", "0", "?", "unknown", "wild", "A|B", "A:0.5|B:0.6", "a1", " A1 ", "Ａ１", "001")
WORDS = (
    *list(SEX_WORDS)[:20],
    *("самец", "самка", "オス", "雌", "ذكر", "männlich", "♂♀", "yes", "LIVING"),
)
FORMULAS = ("=1+1", "@SUM(A1)", "+1", "-2+3", '=HYPERLINK("x";"y")', "\t=1", "=cmd|' /C x'!A0")
ODD = (
    *("\u200b", "\ufeff", "\u202e", "\x00", "\x1a", "\x85", "\u2028", "\ud7ff", "\x0b"),
    *("\U0001f426", "İ", "ﬁ"),
)
MARKS = ('"', "'", "a\nb", "a\rb", ",", ";|")


def _place(grid: Grid, chance: random.Random) -> tuple[int, int]:
    row = chance.randrange(len(grid))
    if not grid[row]:
        grid[row] = [""]
    return row, chance.randrange(len(grid[row]))


def place_of(grid: Grid, chance: random.Random, *names: str) -> int:
    """The place of one of the columns named, or of any."""
    at = [place for place, heading in enumerate(grid[0]) if heading in names]
    return chance.choice(at) if at else chance.randrange(max(1, len(grid[0])))


def _set(grid: Grid, column: int, cell: str, chance: random.Random, *, share: float = 0.2) -> None:
    for row in grid[1:]:
        if column < len(row) and chance.random() < share:
            row[column] = cell


def _repeat_header(grid: Grid, chance: random.Random) -> None:
    grid.insert(chance.randint(0, len(grid)), list(grid[0]))


def _swap_columns(grid: Grid, chance: random.Random) -> None:
    a, b = place_of(grid, chance), place_of(grid, chance)
    for row in grid[chance.choice((0, 0, 1)) :]:
        if max(a, b) < len(row):
            row[a], row[b] = row[b], row[a]


def _rename_column(grid: Grid, chance: random.Random) -> None:
    if grid[0]:
        spelled = [
            *SPELLINGS,
            *SPELLINGS,
            "twin of",
            "breed",
            "Gender",
            "herd",
            "Cage",
            "",
            "hatch",
        ]
        grid[0][place_of(grid, chance)] = chance.choice(spelled)


def _repeat_column(grid: Grid, chance: random.Random) -> None:
    column = place_of(grid, chance)
    for row in grid:
        row.insert(chance.randint(0, len(row)), row[column] if column < len(row) else "")


def _drop_column(grid: Grid, chance: random.Random) -> None:
    column = place_of(grid, chance)
    for row in grid:
        del row[column : column + 1]


def _repeat_rows(grid: Grid, chance: random.Random) -> None:
    for row in chance.sample(grid, min(len(grid), 3)):
        again = list(row)
        if again and chance.random() < 0.7:
            again[chance.randrange(len(again))] = chance.choice(("", "A1", "other", "m", "2001"))
        grid.insert(chance.randint(1, len(grid)), again)


def _shuffle(grid: Grid, chance: random.Random) -> None:
    below = grid[1:]
    chance.shuffle(below)
    grid[1:] = below


def _blank_rows(grid: Grid, chance: random.Random) -> None:
    blank = chance.choice(([], [""], ["", ""], [" "] * len(grid[0]), ["\u00a0"]))
    for _time in range(chance.randint(1, 3)):
        grid.insert(chance.randint(0, len(grid)), list(blank))


def _unknown_ids(grid: Grid, chance: random.Random) -> None:
    column = place_of(grid, chance, "id", "sire", "dam", "clone_of", "genetic_dam")
    _set(grid, column, chance.choice(IDS), chance, share=chance.choice((0.1, 0.5)))


def _dates(grid: Grid, chance: random.Random) -> None:
    column = place_of(grid, chance, "born", "died", "entered", "left", "last_seen", "date")
    for row in grid[1:]:
        if column < len(row) and chance.random() < 0.5:
            row[column] = chance.choice(DATES)


def _cycles(grid: Grid, chance: random.Random) -> None:
    """Offspring as parents of their ancestors, or of themselves."""
    own = place_of(grid, chance, "id")
    parent = place_of(grid, chance, "sire", "dam", "clone_of", "genetic_dam")
    names = [row[own] for row in grid[1:] if own < len(row)]
    for row in grid[1:]:
        if parent < len(row) and names and chance.random() < 0.2:
            row[parent] = chance.choice(names)


def _lists(grid: Grid, chance: random.Random) -> None:
    own = place_of(grid, chance, "id")
    names = [row[own] for row in grid[1:] if own < len(row)] or ["X"]
    column = place_of(grid, chance, "sire", "dam", "genetic_dam", "clone_of")
    for row in grid[1:]:
        if column < len(row) and chance.random() < 0.2:
            parts = [chance.choice([*names, "X9", ""]) for _part in range(chance.randint(1, 4))]
            weights = ("", "", ":0.5", ":0.25", ":1", ":2", ":-1", ":nan", ":", ":1e-300", ":x")
            row[column] = chance.choice("||||;, /").join(
                part + chance.choice(weights) for part in parts
            )


def _odd_cells(grid: Grid, chance: random.Random) -> None:
    words = chance.choice((WORDS, FORMULAS, ODD, IDS, DATES, MARKS))
    for _time in range(chance.randint(1, 8)):
        row, column = _place(grid, chance)
        cell = chance.choice(words)
        old = grid[row][column]
        grid[row][column] = chance.choice((cell, old + cell, cell + old))


def _huge_cells(grid: Grid, chance: random.Random) -> None:
    row, column = _place(grid, chance)
    size = chance.choice((300, 5_000, 40_000, 400_000 if chance.random() < 0.05 else 8_000))
    grid[row][column] = (chance.choice(["A", "A|", "7", "=", "é", " ", "A:0.1|", "\n"]) * size)[
        :size
    ]


def _long_row(grid: Grid, chance: random.Random) -> None:
    row = grid[chance.randrange(len(grid))]
    row += [chance.choice(("", "x"))] * chance.randint(1, 400)


def _short_row(grid: Grid, chance: random.Random) -> None:
    row = grid[chance.randrange(len(grid))]
    del row[chance.randint(0, len(row)) :]


def _title(grid: Grid, chance: random.Random) -> None:
    for _time in range(chance.randint(1, 4)):
        grid.insert(0, chance.choice((["Studbook of 2019"], ["Printed", "2019-01-01"], ["# x"])))


def _join(grid: Grid, chance: random.Random) -> None:
    """Rows of another table below."""
    grid += cut_short(chance)[chance.choice((0, 1)) :]


GRID_MUTATIONS: tuple[Callable[[Grid, random.Random], None], ...] = (
    _repeat_header,
    _swap_columns,
    _rename_column,
    _repeat_column,
    _drop_column,
    _repeat_rows,
    _shuffle,
    _blank_rows,
    _unknown_ids,
    _dates,
    _cycles,
    _lists,
    _odd_cells,
    _odd_cells,
    _huge_cells,
    _long_row,
    _short_row,
    _title,
    _join,
)
