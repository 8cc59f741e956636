"""However a table is saved, sorted or padded, and read from its own view: one kinship."""

from __future__ import annotations

import csv
import io
import sqlite3
import tempfile
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import HealthCheck, assume, example, given, settings
from hypothesis import strategies as st

from pairing.kinship.engine import kinship as compute_kinship
from pairing.pedigree import descent
from pairing.pedigree.descent import build_pedigree
from pairing.records.audit import Audit, audit_records
from pairing.records.files import delimited
from pairing.records.readers import read_records
from pairing.records.rules import Decision, RecordRules
from pairing.records.written_view import OTHER_IDS, SOURCE_LINE, view_of
from pairing.report.export import write_view
from tests.pedigrees import HEADER, Row, audit_of, small_pedigrees, sure

if TYPE_CHECKING:
    from collections.abc import Iterator

Table = list[list[str]]
Kinships = tuple[list[str], bytes]

FEW = settings(max_examples=25, suppress_health_check=[HealthCheck.function_scoped_fixture])


def kinships(audit: Audit) -> Kinships:
    """Every id, and the bits of every kinship between them in that order."""
    kinship = compute_kinship(build_pedigree(audit))
    ids = sorted(kinship.pedigree.ids)
    places = kinship.pedigree.place(*ids)
    return ids, np.ascontiguousarray(kinship.block(places, places)).tobytes()


def read(content: bytes) -> Audit:
    """The audit of the bytes of a file."""
    return audit_records(read_records("-", stdin=content))


def table_of(rows: list[Row]) -> Table:
    """Header and cells of a drawn pedigree."""
    return [HEADER.split(","), *(row.cells() for row in rows)]


# Ids as keepers write them; none has a sign of a list of possible parents.
IDS = st.sampled_from(
    [
        *("007", "7", "1E+05", "B-12/3", "Zoë", "Ærø 9", "müller", "MÜLLER", "ﬁn", "2019-05-31"),
        *("=A1", "+4", "a b", "o'neil", 'the "old" one', "a,b", "x;y", "½", "ring #4", "-9999"),
    ]
)
WIDER_IDS = st.sampled_from(["雄1", "Łoś", "🐇", "Ω2"])


@st.composite
def pedigrees(draw: st.DrawFn, *, wide: bool = False, **what: bool) -> list[Row]:
    """A small pedigree in which some animals have ids that are easily spoilt."""
    rows = draw(small_pedigrees(**({"possible": True, "clones": True, "dates": True} | what)))
    wanted = draw(st.lists(IDS | WIDER_IDS if wide else IDS, unique=True, max_size=len(rows)))
    renamed = {row.id: new_id for row, new_id in zip(rows, wanted, strict=False)}

    def side(parents):
        return tuple((renamed.get(name, name), chance) for name, chance in parents)

    return [
        replace(
            row,
            id=renamed.get(row.id, row.id),
            sire=side(row.sire),
            dam=side(row.dam),
            clone_of=renamed.get(row.clone_of, row.clone_of),
        )
        for row in rows
    ]


# Text


@dataclass(frozen=True)
class Manner:
    """How a program saves a table as text."""

    delimiter: str
    encoding: str
    line_end: str
    quoting: int

    def bytes_of(self, table: Table) -> bytes:
        """The file; None of its cells has a line end."""
        out = io.StringIO()
        csv.writer(
            out, delimiter=self.delimiter, lineterminator=self.line_end, quoting=self.quoting
        ).writerows(table)
        marks = {"utf-16-le": b"\xff\xfe", "utf-16-be": b"\xfe\xff"}
        return marks.get(self.encoding, b"") + out.getvalue().encode(self.encoding)


MANNERS = st.builds(
    Manner,
    st.sampled_from([",", ";", "\t", "|"]),
    st.sampled_from(["utf-8", "utf-8-sig", "utf-16-le", "utf-16-be", "cp1252"]),
    st.sampled_from(["\n", "\r\n", "\r"]),
    st.sampled_from([csv.QUOTE_MINIMAL, csv.QUOTE_ALL]),
)
BLANK_ROWS = st.sampled_from([[], [""], ["", "", ""], [" ", "", "\t"], ["\u00a0"]])
PADDING = st.sampled_from(["", "", " ", "  ", "\u00a0"])


@st.composite
def untidy(draw: st.DrawFn, table: Table) -> Table:
    """The same table with rows in another order, blank rows and padded cells."""
    rows = draw(st.permutations(table[1:]))
    dirty = [table[0]]
    for row in rows:
        dirty += draw(st.lists(BLANK_ROWS, max_size=1))
        dirty.append([f"{draw(PADDING)}{cell}{draw(PADDING)}" for cell in row])
    return [*dirty, *draw(st.lists(BLANK_ROWS, max_size=2))]


@pytest.fixture(params=["rows", "columns"])
def reader(request, monkeypatch) -> str:
    """Text read row by row, and by columns as large files are."""
    if request.param == "columns":
        monkeypatch.setattr(delimited, "LARGE", 0)
    return request.param


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(rows=pedigrees(wide=True), manner=MANNERS, data=st.data())
@example(rows=[Row("Zoë"), Row("B", sure("Zoë"))], manner=Manner(";", "cp1252", "\r", 1), data=None)
def test_text_saved_in_any_manner(reader, rows, manner, data):
    """Delimiter, encoding, line ends, quotes, order, blank rows and padding change no kinship."""
    table = table_of(rows)
    expected = kinships(read(plain(table)))
    dirty = table if data is None else data.draw(untidy(table))
    try:
        content = manner.bytes_of(dirty)
    except UnicodeEncodeError:
        assume(False)
    assert kinships(read(content)) == expected


def plain(table: Table) -> bytes:
    """A table as comma-separated UTF-8."""
    return Manner(",", "utf-8", "\n", csv.QUOTE_MINIMAL).bytes_of(table)


@FEW
@given(rows=pedigrees(possible=False, clones=False, wide=True), data=st.data())
def test_large_pedigrees_are_the_same_in_any_order(rows, data):
    """Animals that stay in file order, as in large herdbooks, have the kinships they had."""
    table = table_of(rows)
    expected = kinships(read(plain(table)))
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(descent, "LARGE", 0)
        patch.setattr("pairing.records.descent_order.LARGE", 0)
        patch.setattr(delimited, "LARGE", 0)
        assert kinships(read(plain(data.draw(untidy(table))))) == expected


# Other files


@FEW
@given(rows=pedigrees(wide=True), data=st.data())
def test_workbook_gives_the_same_kinships(rows, data):
    """The table in a workbook, rows in any order and padded, gives every kinship as it was."""
    from openpyxl import Workbook

    table = table_of(rows)
    book = Workbook()
    for row in data.draw(untidy(table)):
        book.active.append(row)
    for row in book.active.iter_rows():
        for cell in row:
            cell.data_type = "s" if cell.value is not None else cell.data_type
    out = io.BytesIO()
    book.save(out)
    assert kinships(read(out.getvalue())) == kinships(read(plain(table)))


@FEW
@given(rows=pedigrees(wide=True), data=st.data(), nulls=st.booleans())
def test_parquet_gives_the_same_kinships(rows, data, nulls):
    """The table as a Parquet file, blank cells as blanks or as nothing, gives every kinship."""
    import pyarrow
    import pyarrow.parquet

    table = table_of(rows)
    header, *cells = data.draw(untidy(table))
    columns = {
        name: [
            None if nulls and not row[place : place + 1] else "".join(row[place : place + 1])
            for row in cells
        ]
        for place, name in enumerate(header)
    }
    out = io.BytesIO()
    pyarrow.parquet.write_table(pyarrow.table(columns), out)
    assert kinships(read(out.getvalue())) == kinships(read(plain(table)))


@FEW
@given(rows=pedigrees(wide=True), data=st.data())
def test_sqlite_gives_the_same_kinships(rows, data):
    """The table in a database gives every kinship as it was."""
    pytest.importorskip("sqlalchemy")
    table = table_of(rows)
    header, *cells = data.draw(untidy(table))
    width = len(header)
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "herd.db"
        connection = sqlite3.connect(path)
        connection.execute(f"CREATE TABLE herd ({', '.join(f'{name} TEXT' for name in header)})")
        connection.executemany(
            f"INSERT INTO herd VALUES ({', '.join('?' * width)})",
            [[*row, *([None] * width)][:width] for row in cells],
        )
        connection.commit()
        connection.close()
        audit = audit_records(read_records(f"sqlite:///{path}", table="herd"))
    assert kinships(audit) == kinships(read(plain(table)))


# The view


def written(audit: Audit, ending: str = ".csv") -> bytes:
    """The view as the program writes it."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / f"view{ending}"
        header, rows = view_of(audit)
        write_view(header, rows, path, inputs=[])
        return path.read_bytes()


def cells_of(audit: Audit) -> Table:
    """Header and rows of the view."""
    header, rows = view_of(audit)
    return [header, *rows]


EXTRA = {
    "sex": ["m", "male", "♀", "steer", "u", "", "NA"],
    "origin": ["", "wild", "captive", "unknown", "import"],
    "status": ["", "alive", "sold", "?"],
    "genetic_dam": ["", "unknown", "first"],
    "Hatch Date": ["", "31/05/2019", "04/03/2019", "before 05/03/2001"],
    "died": ["", "31/05/2019", "after 04/13/2001", "1970s", "3 or 4/5/2001", "43616", "soon"],
    "herd": ["", "North", "Süd, 2"],
    "cage": ["1", "01"],
    "note": ["", "=1+1", " two  blanks ", 'a "word"', "line\nbreak"],
    "": ["", "7"],
    "line in the herdbook": ["4"],
}


@st.composite
def fuller_tables(draw: st.DrawFn) -> Table:
    """Pedigrees with more columns, duplicate rows and words for parents that are not known."""
    rows = draw(pedigrees(wide=True, selfing=True))
    extra = draw(st.lists(st.sampled_from(sorted(EXTRA)), unique=True, max_size=6))
    table = table_of(rows)
    if draw(st.booleans()):
        table = [row[:-1] for row in table]
        table[0].append("dob")
        for row in table[1:]:
            row.append(draw(st.sampled_from(["", "31/05/2019", "04/03/2019", "~2003", "1/6/98"])))
    for place, word in enumerate(("wild", "NA", "0")):
        if draw(st.booleans()):
            table.append([f"extra{place}", word, word, *([""] * (len(table[0]) - 3))])
    table[0] = table[0] + extra
    for row in table[1:]:
        row += [draw(st.sampled_from(EXTRA[name])).replace("first", rows[0].id) for name in extra]
    doubled = draw(st.lists(st.sampled_from(table[1:]), max_size=2))
    return table + [list(row) for row in doubled]


@settings(max_examples=150)
@given(fuller_tables())
def test_view_reads_back_to_the_same_kinships(table):
    """The view as CSV gives every kinship as it was, and its own view is the same again."""
    audit = read(plain(table))
    assume(not audit.stopping)
    again = read(written(audit))
    assert kinships(again) == kinships(audit)
    assert cells_of(again) == cells_of(audit)


@settings(max_examples=20)
@given(fuller_tables())
def test_view_in_a_workbook_reads_back_to_the_same_kinships(table):
    """The view as a workbook gives every kinship as it was, and its own view is the same again."""
    audit = read(plain(table))
    assume(not audit.stopping)
    again = read(written(audit, ".xlsx"))
    assert kinships(again) == kinships(audit)
    first, second = cells_of(audit), cells_of(again)
    assert [[cell.split() for cell in row] for row in second] == [
        [cell.split() for cell in row] for row in first
    ]


@FEW
@given(fuller_tables())
def test_view_read_by_columns_reads_back_to_the_same_kinships(table):
    """The view read as a large file gives every kinship as it was, and the same view."""
    audit = read(plain(table))
    assume(not audit.stopping)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(delimited, "LARGE", 0)
        again = read(written(audit))
    assert kinships(again) == kinships(audit)
    assert cells_of(again) == cells_of(audit)


@settings(max_examples=40)
@given(fuller_tables())
def test_view_tells_of_each_animal_what_the_records_told(table):
    """Sex, dates, words and texts of every animal are those of the records."""
    audit = read(plain(table))
    assume(not audit.stopping)
    for first, again in zip(audit.animals, read(written(audit)).animals, strict=True):
        assert (first.id, first.sex, first.status, first.origin, first.may_breed) == (
            (again.id, again.sex, again.status, again.origin, again.may_breed)
        )
        assert first.text == again.text
        days = [
            {name: (date.earliest, date.latest) for name, date in each.dates.items()}
            for each in (first, again)
        ]
        assert days[0] == days[1]


def view_cells(text: str, *decisions: Decision) -> tuple[Audit, Table]:
    """The audit of records under decisions, and its view."""
    rules = RecordRules(decisions=decisions)
    audit = audit_records(audit_of(text).records, rules)
    return audit, cells_of(audit)


@pytest.mark.parametrize(
    ("text", "decisions", "sire", "dam"),
    [
        ("id,sire,dam\nS,,\nC,S:0.7|NA:0.3,\n", (), "S:0.7|unknown:0.30000000000000004", ""),
        ("id,sire,dam\nC,S:0.7|NA:0.3,\n", (), "S:0.7|unknown:0.30000000000000004", ""),
        ("id,sire,dam\nUnknown,,\nC,S:0.7|NA:0.3,\n", (), "S:0.7|unknown:0.30000000000000004", ""),
        ("id,sire,dam\nC,wild,wild\n", (), "wild", ""),
        ("id,sire,dam,origin\nC,wild,,\n", (), "", ""),
        ("id,sire,dam\n0,,\nC,0,\n", (), "0", ""),
        ("id,sire,dam\nC,0,0\n", (), "", ""),
        ("id,sire,dam\nS|T,,\nS,,\nT,,\nC,S|T,\n", (), "S|T", ""),
        ("id,sire,dam\nC,S|T,\n", (), "S:0.5|T:0.5", ""),
        ("id,sire,dam,genetic_dam\nD,,,\nE,,,\nC,,D,E\n", (), "", "D"),
        ("id,sire,dam,genetic_dam\nD,,,\nC,,D,NA\n", (), "", "D"),
        (
            "id,sire,dam,genetic_dam\nD,,,\nE,,,\nC,X,D,F\n",
            (Decision("merge", "E", also=("F", "X")),),
            "E",
            "D",
        ),
        ("id,sire,dam\nS,,\nC,S,D\n", (Decision("drop-link", "C", parent="sire"),), "", "D"),
    ],
)
def test_parents_of_the_view(text, decisions, sire, dam):
    """Parents are written so that they read back as they are used."""
    audit, (header, *rows) = view_cells(text, *decisions)
    (row,) = [dict(zip(header, row, strict=True)) for row in rows if row[0] == "C"]
    assert (row["sire"], row["dam"]) == (sire, dam)
    again = read(written(audit))
    assert kinships(again) == kinships(audit)
    assert cells_of(again) == [header, *rows]


def test_view_of_merged_ids():
    """What named an animal by another id names it by the one it is kept under."""
    text = "id,sire,dam,clone_of,reared_by\nA,,,,\nT,,,B,B\n"
    audit, (header, *rows) = view_cells(text, Decision("merge", "A", also=("B",)))
    assert header == ["id", "sire", "dam", "clone_of", "reared_by", SOURCE_LINE, OTHER_IDS]
    assert rows == [["A", "", "", "", "", "2", "B"], ["T", "", "", "A", "A", "3", ""]]
    again = read(written(audit))
    assert kinships(again) == kinships(audit)
    assert cells_of(again) == [header, *rows]


def test_view_keeps_every_other_column_apart():
    """Columns that could be taken for a field, and those without a heading, are all kept."""
    text = (
        "id,sire,dam,born,dob,dob (as recorded),,herd,cage,note,note\nA,,,2001,2002,x,y,N,4,p,q\n"
    )
    audit = audit_of(text)
    header, row = cells_of(audit)
    assert dict(zip(header, row, strict=True)) == {
        "id": "A",
        "sire": "",
        "dam": "",
        "born": "2001",
        "holder": "N",
        "dob (as recorded)": "2002",
        "dob (as recorded) (2)": "x",
        "column 7": "y",
        "cage (as recorded)": "4",
        "note": "p",
        "note (2)": "q",
        SOURCE_LINE: "2",
    }
    assert cells_of(read(written(audit))) == [header, row]


# Dates


def told_apart_by_dams(rows: list[Row]) -> Iterator[Row]:
    """The rows; litters of unknown dams, which only a birth tells apart, are no litters."""
    for row in rows:
        yield row if row.dam else replace(row, litter="")


@settings(max_examples=150)
@given(pedigrees(wide=True, selfing=True))
def test_kinship_without_any_dates(rows):
    """Dropping all dates leaves every kinship as it was."""
    rows = list(told_apart_by_dams(rows))
    dated, undated = (
        read(plain(table_of(each))) for each in (rows, [replace(row, born="") for row in rows])
    )
    without_column = read(plain([row[:-1] for row in table_of(rows)]))
    set_aside = [each for each in dated.findings if each.kind == "possible-parent-impossible"]
    assume(not set_aside)
    assert kinships(dated) == kinships(undated) == kinships(without_column)
