"""Files gone wrong: sound tables, cut short and then damaged as keepers and programs damage them.

Every file follows from one number, so that a failure can be repeated.
"""

from __future__ import annotations

import csv
import io
import random
import zipfile
import zlib
from contextlib import suppress
from dataclasses import replace
from typing import TYPE_CHECKING

from tests.fuzz.damaged_cells import GRID_MUTATIONS, place_of
from tests.fuzz.journey import Tables
from tests.fuzz.kinds_of_files import KINDS, Form, without_times, written_as
from tests.fuzz.seed_tables import (
    DECISIONS,
    EVENTS,
    FACTS,
    ODDITIES,
    ROWS,
    Grid,
    corpus,
    cut_short,
)
from tests.test_workbooks import with_member

if TYPE_CHECKING:
    from collections.abc import Callable

_SHARE_DAMAGED = 0.5
_SHARE_WITH_COMPANION = 0.25


def made(number: int) -> Tables:
    """The tables of one call, all of them following from `number`."""
    chance = random.Random(f"mutated file {number}")
    grid = cut_short(chance)
    for _time in range(chance.choice((0, 1, 1, 2, 3, 5))):
        chance.choice(GRID_MUTATIONS)(grid, chance)
    kind = chance.choices(list(KINDS), [weight for _maker, weight in KINDS.values()])[0]
    content, filled = KINDS[kind][0](grid, chance)
    if chance.random() < _SHARE_DAMAGED:
        content, filled = _damaged(content, chance), None
    tables = Tables(content, strict=chance.random() < 0.5, filled=filled)
    return replace(
        tables,
        facts=_companion(FACTS, grid, chance),
        events=_companion(EVENTS, grid, chance),
        decisions=_companion(DECISIONS, grid, chance),
    )


def again_mutated(tables: Tables, chance: random.Random) -> Tables:
    """The same tables with the cells, or else the bytes, of the records damaged once more."""
    text = tables.records.decode("utf-8", "replace")
    delimiter = max(",;\t|", key=text[:2000].count)
    try:
        grid = list(csv.reader(io.StringIO(text, newline=""), delimiter=delimiter))
    except csv.Error:
        grid = []
    if not any(grid) or tables.records.startswith((b"PK", b"PAR1", b"\xff", b"\xfe")):
        return replace(tables, records=_damaged(tables.records, chance))
    chance.choice(GRID_MUTATIONS)(grid, chance)
    return replace(tables, records=written_as(grid, Form(delimiter=delimiter)))


def seeds() -> list[Tables]:
    """Sound tables of every kind, from which a fuzzer may set out."""
    chance = random.Random("seeds")
    found = []
    for name in corpus():
        grid = [list(row) for row in corpus()[name][: ROWS // 2]]
        for maker, _weight in KINDS.values():
            found.append(Tables(maker([list(row) for row in grid], chance)[0]))
    beside = Tables(ODDITIES.encode(), FACTS.encode(), EVENTS.encode(), DECISIONS.encode())
    return [*found, beside, replace(beside, strict=True)]


def _companion(text: str, records: Grid, chance: random.Random) -> bytes | None:
    """A table beside the records, mostly about their animals; often none."""
    if chance.random() > _SHARE_WITH_COMPANION:
        return None
    grid = list(csv.reader(io.StringIO(text)))
    own = place_of(records, chance, "id")
    names = [row[own] for row in records[1:] if own < len(row) and row[own]]
    for column in [place for place, heading in enumerate(grid[0]) if heading in ("id", "also")]:
        for row in grid[1:]:
            if names and row[column] and chance.random() < 0.7:
                row[column] = chance.choice(names)
    for _time in range(chance.choice((0, 0, 1, 1, 2, 3))):
        chance.choice(GRID_MUTATIONS)(grid, chance)
    content, _filled = KINDS[chance.choice(("text", "text", "workbook"))][0](grid, chance)
    return _damaged(content, chance) if chance.random() < 0.3 else content


# Damage to bytes


def _damaged(content: bytes, chance: random.Random) -> bytes:
    if content.startswith(b"PK") and chance.random() < 0.7:
        with suppress(zipfile.BadZipFile, zlib.error, EOFError, NotImplementedError, ValueError):
            return _damaged_member(content, chance)
    for _time in range(chance.choice((1, 1, 2, 4))):
        content = chance.choice(_BYTE_MUTATIONS)(content, chance)
    return content


def _damaged_member(content: bytes, chance: random.Random) -> bytes:
    """A workbook that is a sound archive, with one of its parts damaged."""
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        member = chance.choice(archive.namelist())
        part = archive.read(member)
    changed = chance.choice(_BYTE_MUTATIONS)(part, chance)
    return without_times(with_member(content, member, changed.decode("utf-8", "replace")))


def _flip(content: bytes, chance: random.Random) -> bytes:
    changed = bytearray(content)
    for _time in range(chance.choice((1, 1, 3, 20))):
        if changed:
            changed[chance.randrange(len(changed))] ^= 1 << chance.randrange(8)
    return bytes(changed)


def _truncate(content: bytes, chance: random.Random) -> bytes:
    return content[: chance.randint(0, len(content))]


def _behead(content: bytes, chance: random.Random) -> bytes:
    return content[chance.randint(0, min(40, len(content))) :]


def _span(content: bytes, chance: random.Random) -> tuple[int, int]:
    start = chance.randint(0, len(content))
    return start, min(len(content), start + chance.choice((1, 5, 50, 500)))


def _duplicate(content: bytes, chance: random.Random) -> bytes:
    start, end = _span(content, chance)
    return content[:end] + content[start:end] * chance.choice((1, 2, 10)) + content[end:]


def _remove(content: bytes, chance: random.Random) -> bytes:
    start, end = _span(content, chance)
    return content[:start] + content[end:]


def _splice(content: bytes, chance: random.Random) -> bytes:
    other, _filled = KINDS[chance.choice(list(KINDS))][0](cut_short(chance), chance)
    return content[: chance.randint(0, len(content))] + other[chance.randint(0, len(other)) :]


def _insert(content: bytes, chance: random.Random) -> bytes:
    marks = (
        b'"', b'""', b"\x00", b"\xff", b"\xfe\xff", b"\xef\xbb\xbf", b"\r", b"\n", b"\r\r\n", b",",
        b";", b"\t", b"|", b"#", b"\x1a", b"\xe2\x80\xa8", b"\xc2\x85", b"\x81", b"'", b"\\",
        b"\x0c", b"\x1c", b"\xed\xa0\x80",
    )  # fmt: skip
    for _time in range(chance.choice((1, 1, 2, 5))):
        at = chance.randint(0, len(content))
        content = content[:at] + chance.choice(marks) + content[at:]
    return content


def _exchange(content: bytes, chance: random.Random) -> bytes:
    """One sign for another, throughout or once."""
    old, new = chance.sample(
        [b",", b";", b"\t", b"|", b'"', b"\n", b"\r\n", b" ", b"0", b"\x00"], 2
    )
    return content.replace(old, new, chance.choice((-1, -1, 1, 5)))


_BYTE_MUTATIONS: tuple[Callable[[bytes, random.Random], bytes], ...] = (
    _flip,
    _flip,
    _truncate,
    _behead,
    _duplicate,
    _remove,
    _splice,
    _insert,
    _insert,
    _exchange,
)
