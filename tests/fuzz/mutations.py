"""Files gone wrong: sound tables, cut short and then damaged as keepers and programs damage them.

Every file follows from one number, so that a failure can be repeated.
"""

from __future__ import annotations

import csv
import datetime
import functools
import io
import random
import re
import zipfile
import zlib
from contextlib import suppress
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

import openpyxl
import pyarrow as pa
import pyarrow.parquet as pq

from pairing.records.fields import SEX_WORDS, SPELLINGS
from tests.fuzz.journey import Tables
from tests.test_workbooks import ods_cell, ods_row, open_document, saved, with_member

if TYPE_CHECKING:
    from collections.abc import Callable

Grid = list[list[str]]

SAMPLES = Path(__file__).parent.parent.parent / "sample_pedigrees"
_ROWS = 30
_SHARE_DAMAGED = 0.5
_SHARE_WITH_COMPANION = 0.25
_WITHOUT_CONTROLS = {code: "?" for code in range(32) if chr(code) not in "\t\n\r"}

ODDITIES = """\
id,name,sire,dam,sex,born,died,left,litter,clone_of,group,count,genetic_dam,reared_by,mark,status,\
holder,line,may_breed,merit,rust_test,rust_test_on,rust_seen
A1,"Ada, the first",,,f,2010,,,,,,,,,111,living,North Quay,hill,yes,1.5,free,2015,unaffected
A2,Bo,wild,wild,m,2010-05,2019-01-01,,,,,,,,112,dead,North Quay,hill,no,,carrier,,affected
A3,"Ce
De",A2,A1,m,[2012..2013],,,L1,,,,,,113,,Gannet House,hill,,2,N/N,,
A4,,A2,A1,cow,~2012,,2020-02-30,L1,A3,,,,,113,gone,Gannet House,dale,,x,,,
A5,,A2|A3,A4,u,../2014,,,L2,,,,A1,A4,,,,dale,,,,,
A6,,A2:0.7|A3:0.3,A4,9,03/04/2014,,,L2,,,,A1,,,,,,,,,,
A7,,A3:0.5|A9:0.25,A10,♀,44000,,,,A6,shoal 1,12.15.3,,,,,,,,,,,
A8,,?,0,steer,1/2/14,,,,,shoal 1,30,,,,,,,,,,,
A9,,A5,A6,male,2016-01?,2017?,,L3,,,,,,,lost,,,,,,,
A10,,A5,A6,female,May 2016,,,L3,,,,,,,,,,,,,,
007,,A9,A10,,2018-W05,,,,,,,,,,,,,,,,,
7,,A9,A7,,201X,,,,,,,,,,,,,,,,,
1E+05,,007,7,,2019-05-31/2020,,,,,,,,,,,,,,,,,
"""
FACTS = """\
id,born,died,sex,holder,last_seen,Weight
A1,2009,,f,,2019,12
A3,2013,,,Hazelwick,2020-01-02,9
A3,2013,2021,m,,2020-03-02,10
K0001,~2020,2021-12-19,male,,,
T001,,2001,f,Dunmere,,
A99,2001,,,,,
"""
EVENTS = """\
id,date,event,from,to
A1,2010-05-01,birth,,North Quay
A1,2015,move,North Quay,Gannet House
A2,2019-02,death,,
A3,03/04/2018,transfer,Gannet House,North Quay
A3,2017,seen,,
T001,2000-07-16,died,,
K0001,2021,sold,cage 30,
A98,2020,hatched,,
A4,,arrival,,
"""
DECISIONS = """\
decision,id,sire,dam,row,also,parent,field,value,kind,who,when,why,litters,until
use-row,A3,,,4,,,,,,Ann,2024-05-01,seen the card,,
merge,A9,,,,A10|A11,,,,,Ann,,same chip,,
drop-link,A6,,,,,dam,,,,,,,,
set,A4,,,,,,sex,male,,,,typing error,,
accept,A5,,,,,,,,parent-without-row,,,,,
set,A8,,,,,,dam,A1,,,,,,
rest,A7,,,,,,,,,,,,,
together,,A2,A1,,,,,,,,,bonded,,2028
at-most,A2,,,,,,,,,,,,1,
"""

DATES = (
    "2019 2019-05 2019-05-31 2019? ~2019 [2018..2020] ../2019 2019/.. 31/05/2019 05/31/2019 "
    "3.4.19 May-19 1900-02-29 2019-02-30 0000 9999 10000-01-01 -0001 43586 1E5 2019-05-31T12:00 "
    "201X 20XX 2019-W53-7 [2018,2020] {2018} 2019-13 99/99/9999 today 1/1/1 ٢٠١٩ 二〇一九年 [.. ]"
).split()
_IDS = ["nobody", "0", "?", "unknown", "wild", "A|B", "A:0.5|B:0.6", "a1", " A1 ", "Ａ１", "001"]
WORDS = [*list(SEX_WORDS)[:20], "самец", "самка", "オス", "雌", "ذكر", "männlich", "♂♀", "yes", "LIVING"]
_FORMULAS = ["=1+1", "@SUM(A1)", "+1", "-2+3", '=HYPERLINK("x";"y")', "\t=1", "=cmd|' /C x'!A0"]
_ODD = ["\u200b", "\ufeff", "\u202e", "\x00", "\x1a", "\x85", "\u2028", "\ud7ff", "\U0001f426", "İ", "ﬁ", "\x0b"]


@dataclass(frozen=True)
class Form:
    """How a grid of cells is written as text."""

    delimiter: str = ","
    line_end: str = "\n"
    encoding: str = "utf-8"
    quoting: int = csv.QUOTE_MINIMAL
    above: str = ""
    ends_open: bool = False


def made(number: int) -> Tables:
    """The tables of one call, all of them following from `number`."""
    chance = random.Random(f"mutated file {number}")
    grid = _cut_short(chance)
    for _time in range(chance.choice((0, 1, 1, 2, 3, 5))):
        chance.choice(_GRID_MUTATIONS)(grid, chance)
    kind = chance.choices(list(_KINDS), [weight for _maker, weight in _KINDS.values()])[0]
    content, filled = _KINDS[kind][0](grid, chance)
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
    chance.choice(_GRID_MUTATIONS)(grid, chance)
    return replace(tables, records=written_as(grid, Form(delimiter=delimiter)))


def seeds() -> list[Tables]:
    """Sound tables of every kind, from which a fuzzer may set out."""
    chance = random.Random("seeds")
    found = []
    for name in _corpus():
        grid = [list(row) for row in _corpus()[name][: _ROWS // 2]]
        for maker, _weight in _KINDS.values():
            found.append(Tables(maker([list(row) for row in grid], chance)[0]))
    beside = Tables(ODDITIES.encode(), FACTS.encode(), EVENTS.encode(), DECISIONS.encode())
    return [*found, beside, replace(beside, strict=True)]


@functools.cache
def _corpus() -> dict[str, Grid]:
    texts = {path.stem: path.read_text("utf-8") for path in sorted(SAMPLES.glob("*.csv"))}
    texts["oddities"] = ODDITIES
    return {name: list(csv.reader(io.StringIO(text, newline=""))) for name, text in texts.items()}


def _cut_short(chance: random.Random) -> Grid:
    header, *rows = _corpus()[chance.choice(list(_corpus()))]
    first = chance.choice((0, chance.randrange(len(rows))))
    return [list(row) for row in (header, *rows[first : first + chance.randint(1, _ROWS)])]


def _companion(text: str, records: Grid, chance: random.Random) -> bytes | None:
    """A table beside the records, mostly about their animals; often none."""
    if chance.random() > _SHARE_WITH_COMPANION:
        return None
    grid = list(csv.reader(io.StringIO(text)))
    own = _column(records, chance, "id")
    names = [row[own] for row in records[1:] if own < len(row) and row[own]]
    for column in [place for place, heading in enumerate(grid[0]) if heading in ("id", "also")]:
        for row in grid[1:]:
            if names and row[column] and chance.random() < 0.7:
                row[column] = chance.choice(names)
    for _time in range(chance.choice((0, 0, 1, 1, 2, 3))):
        chance.choice(_GRID_MUTATIONS)(grid, chance)
    content, _filled = _KINDS[chance.choice(("text", "text", "workbook"))][0](grid, chance)
    return _damaged(content, chance) if chance.random() < 0.3 else content


# Damage to cells


def _place(grid: Grid, chance: random.Random) -> tuple[int, int]:
    row = chance.randrange(len(grid))
    if not grid[row]:
        grid[row] = [""]
    return row, chance.randrange(len(grid[row]))


def _column(grid: Grid, chance: random.Random, *names: str) -> int:
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
    a, b = _column(grid, chance), _column(grid, chance)
    for row in grid[chance.choice((0, 0, 1)) :]:
        if max(a, b) < len(row):
            row[a], row[b] = row[b], row[a]


def _rename_column(grid: Grid, chance: random.Random) -> None:
    if grid[0]:
        spelled = [*SPELLINGS, *SPELLINGS, "twin of", "breed", "Gender", "herd", "Cage", "", "hatch"]
        grid[0][_column(grid, chance)] = chance.choice(spelled)


def _repeat_column(grid: Grid, chance: random.Random) -> None:
    column = _column(grid, chance)
    for row in grid:
        row.insert(chance.randint(0, len(row)), row[column] if column < len(row) else "")


def _drop_column(grid: Grid, chance: random.Random) -> None:
    column = _column(grid, chance)
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
    column = _column(grid, chance, "id", "sire", "dam", "clone_of", "genetic_dam")
    _set(grid, column, chance.choice(_IDS), chance, share=chance.choice((0.1, 0.5)))


def _dates(grid: Grid, chance: random.Random) -> None:
    column = _column(grid, chance, "born", "died", "entered", "left", "last_seen", "date")
    for row in grid[1:]:
        if column < len(row) and chance.random() < 0.5:
            row[column] = chance.choice(DATES)


def _cycles(grid: Grid, chance: random.Random) -> None:
    """Offspring as parents of their ancestors, or of themselves."""
    own = _column(grid, chance, "id")
    parent = _column(grid, chance, "sire", "dam", "clone_of", "genetic_dam")
    names = [row[own] for row in grid[1:] if own < len(row)]
    for row in grid[1:]:
        if parent < len(row) and names and chance.random() < 0.2:
            row[parent] = chance.choice(names)


def _lists(grid: Grid, chance: random.Random) -> None:
    own = _column(grid, chance, "id")
    names = [row[own] for row in grid[1:] if own < len(row)] or ["X"]
    column = _column(grid, chance, "sire", "dam", "genetic_dam", "clone_of")
    for row in grid[1:]:
        if column < len(row) and chance.random() < 0.2:
            parts = [chance.choice([*names, "X9", ""]) for _part in range(chance.randint(1, 4))]
            weights = ("", "", ":0.5", ":0.25", ":1", ":2", ":-1", ":nan", ":", ":1e-300", ":x")
            row[column] = chance.choice("||||;, /").join(
                part + chance.choice(weights) for part in parts
            )


def _odd_cells(grid: Grid, chance: random.Random) -> None:
    words = chance.choice((WORDS, _FORMULAS, _ODD, _IDS, DATES, ['"', "'", "a\nb", "a\rb", ",", ";|"]))
    for _time in range(chance.randint(1, 8)):
        row, column = _place(grid, chance)
        cell = chance.choice(words)
        old = grid[row][column]
        grid[row][column] = chance.choice((cell, old + cell, cell + old))


def _huge_cells(grid: Grid, chance: random.Random) -> None:
    row, column = _place(grid, chance)
    size = chance.choice((300, 5_000, 40_000, 400_000 if chance.random() < 0.05 else 8_000))
    grid[row][column] = (chance.choice(["A", "A|", "7", "=", "é", " ", "A:0.1|", "\n"]) * size)[:size]


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
    grid += _cut_short(chance)[chance.choice((0, 1)) :]


_GRID_MUTATIONS: tuple[Callable[[Grid, random.Random], None], ...] = (
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


# Kinds of files


def _as_text(grid: Grid, chance: random.Random) -> tuple[bytes, tuple[int, ...] | None]:
    form = Form(
        delimiter=chance.choice(",,,;\t|"),
        line_end=chance.choice(("\n", "\n", "\r\n", "\r")),
        encoding=chance.choice(
            ("utf-8", "utf-8", "utf-8", "utf-8-sig", "utf-16", "utf-16-be", "cp1252", "latin-1")
        ),
        quoting=chance.choice((csv.QUOTE_MINIMAL, csv.QUOTE_MINIMAL, csv.QUOTE_ALL)),
        above=chance.choice(("", "", "", "# a comment\n", '\n#"\n', "#\r\n\r\n", "# id,sire\n")),
        ends_open=chance.random() < 0.3,
    )
    return written_as(grid, form), None


def written_as(grid: Grid, form: Form) -> bytes:
    """A grid as delimited text."""
    out = io.StringIO()
    writer = csv.writer(
        out, delimiter=form.delimiter, lineterminator=form.line_end, quoting=form.quoting
    )
    writer.writerows(grid)
    text = form.above + out.getvalue()
    if form.ends_open:
        text = text.rstrip("\r\n")
    marked = "\ufeff" + text if form.encoding == "utf-16-be" else text
    return marked.encode(form.encoding, "replace")


def _filled(grid: Grid, first: int = 1) -> tuple[int, ...]:
    return tuple(
        line for line, row in enumerate(grid, first) if any(cell.strip() for cell in row)
    )


def _for_workbook(grid: Grid) -> Grid:
    return [[cell.translate(_WITHOUT_CONTROLS)[:30_000] for cell in row] for row in grid]


def _as_workbook(grid: Grid, chance: random.Random) -> tuple[bytes, tuple[int, ...] | None]:
    grid = _for_workbook(grid)
    book = openpyxl.Workbook()
    sheet = book.active
    for line, row in enumerate(grid, 1):
        for column, cell in enumerate(row, 1):
            if cell:
                place = sheet.cell(line, column)
                place.value, place.data_type = cell, "s"
    _with_values(sheet, chance)
    if chance.random() < 0.2:
        book.create_sheet("Notes").append(["a", "b"])
    return _without_times(saved(book)), _filled(grid)


def _with_values(sheet: openpyxl.worksheet.worksheet.Worksheet, chance: random.Random) -> None:
    """Numbers, dates and truths in place of some text."""
    day = datetime.datetime(2019, 5, 31, 12)
    values = (7, 7.5, 1e300, -0.0, True, day, day.date(), day.time(), datetime.timedelta(3, 4), "=1+1")
    for _time in range(chance.randrange(6)):
        row = chance.randint(1, max(1, sheet.max_row))
        place = sheet.cell(row, chance.randint(1, max(1, sheet.max_column)))
        if str(place.value or "").strip():
            place.value = chance.choice(values[:-1])


def _as_open_document(grid: Grid, chance: random.Random) -> tuple[bytes, tuple[int, ...] | None]:
    def escaped(cell: str) -> str:
        cell = cell.translate(_WITHOUT_CONTROLS).replace("&", "&amp;").replace("<", "&lt;")
        return cell.replace("\n", "</text:p><text:p>")

    rows = "".join(ods_row(*(ods_cell(escaped(cell)) for cell in row)) for row in grid)
    return _without_times(open_document(("Animals", rows))), None


def _without_times(content: bytes) -> bytes:
    """The same archive as if it had been made at the beginning of time."""
    out = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(content)) as old,
        zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new,
    ):
        for name in old.namelist():
            part = re.sub(rb"\d{4}-\d\d-\d\dT[\d:]{8}Z", b"1980-01-01T00:00:00Z", old.read(name))
            new.writestr(zipfile.ZipInfo(name), part, zipfile.ZIP_DEFLATED)
    return out.getvalue()


def _as_parquet(grid: Grid, chance: random.Random) -> tuple[bytes, tuple[int, ...] | None]:
    width = len(grid[0])
    even = [[*row, *[""] * width][:width] for row in grid]
    header, *below = even
    columns = []
    for place in range(width):
        cells: pa.Array = pa.array([row[place] for row in below], pa.string())
        if chance.random() < 0.3:
            cells = cells.dictionary_encode()
        columns.append(cells)
    if columns and chance.random() < 0.3:
        days = [datetime.date(2019, 5, 31), None, datetime.date(1, 1, 1)]
        columns[-1] = pa.array([chance.choice(days) for _row in below], pa.date32())
    out = io.BytesIO()
    table = pa.Table.from_arrays(columns, names=header)
    pq.write_table(table, out, compression=chance.choice(("none", "snappy", "gzip", "zstd")))
    return out.getvalue(), None


_KINDS: dict[
    str,
    tuple[Callable[[Grid, random.Random], tuple[bytes, tuple[int, ...] | None]], int],
] = {
    "text": (_as_text, 75),
    "workbook": (_as_workbook, 10),
    "open document": (_as_open_document, 7),
    "parquet": (_as_parquet, 8),
}


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
    return _without_times(with_member(content, member, changed.decode("utf-8", "replace")))


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
    other, _filled = _KINDS[chance.choice(list(_KINDS))][0](_cut_short(chance), chance)
    return content[: chance.randint(0, len(content))] + other[chance.randint(0, len(other)) :]


def _insert(content: bytes, chance: random.Random) -> bytes:
    marks = (
        b'"', b'""', b"\x00", b"\xff", b"\xfe\xff", b"\xef\xbb\xbf", b"\r", b"\n", b"\r\r\n", b",",
        b";", b"\t", b"|", b"#", b"\x1a", b"\xe2\x80\xa8", b"\xc2\x85", b"\x81", b"'", b"\\", b"\x0c",
        b"\x1c", b"\xed\xa0\x80",
    )  # fmt: skip
    for _time in range(chance.choice((1, 1, 2, 5))):
        at = chance.randint(0, len(content))
        content = content[:at] + chance.choice(marks) + content[at:]
    return content


def _exchange(content: bytes, chance: random.Random) -> bytes:
    """One sign for another, throughout or once."""
    old, new = chance.sample([b",", b";", b"\t", b"|", b'"', b"\n", b"\r\n", b" ", b"0", b"\x00"], 2)
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
