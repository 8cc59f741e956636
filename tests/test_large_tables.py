"""Tables of herdbook size are read by other code; it must say the same of every table."""

from __future__ import annotations

import csv
import io
import json
import os
import subprocess
import sys
import textwrap
from typing import TYPE_CHECKING

import numpy as np
import pyarrow
import pytest
from hypothesis import HealthCheck, assume, example, given, settings
from hypothesis import strategies as st

from pairing.errors import RecordsError
from pairing.kinship.engine import kinship as compute_kinship
from pairing.pedigree import descent
from pairing.pedigree.descent import build_pedigree
from pairing.records import descent_order, ordering
from pairing.records.audit import Audit, audit_records
from pairing.records.columns import ArrowText, coded, picked, replaced, tidied
from pairing.records.fields import tidy
from pairing.records.files import delimited, large_delimited
from pairing.records.files.raw import RawTable
from pairing.records.ids.naming import Numbering, number_animals
from pairing.records.readers import read_records
from tests.pedigrees import as_text, small_pedigrees

if TYPE_CHECKING:
    from pathlib import Path

HIDING = """
import sys
for name in {hidden!r}:
    sys.modules[name] = None
"""


# The reader by columns against the reader by rows


def by_rows(content: bytes) -> RawTable | str:
    """The table by the row-by-row reader, or its refusal."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(delimited, "LARGE", len(content) + 1)
        try:
            return delimited.read_delimited("herd.csv", content)
        except RecordsError as error:
            return str(error)


def by_columns(content: bytes) -> RawTable | None:
    """The table by the reader of large text, None where it declines."""
    return delimited._by_columns("herd.csv", content)


def told(table: RawTable) -> dict:
    """All that a table says."""
    return {
        "name": table.name,
        "kind": table.kind,
        "sha256": table.sha256,
        "header": table.header,
        "header_line": table.header_line,
        "columns": [list(column) for column in table.columns],
        "lines": list(map(int, table.lines)),
        "overlong": {int(row): tuple(cells) for row, cells in table.overlong.items()},
    }


def assert_same(content: bytes) -> None:
    """Both readers say the same; the one for large text may decline."""
    table = by_columns(content)
    if table is None:
        return
    expected = by_rows(content)
    assert isinstance(expected, RawTable), expected
    assert told(table) == told(expected)


CELLS = st.sampled_from(
    [
        *("", "A", "007", "1", " ", "  A b ", "NA", "NULL", "nan", "true", "1.0", "-9999", "1e5"),
        *("Zoë", "é", "\u00a0", "\u2028", "x\ty", '"q"', '"a,b"', '""', '"', 'a"b', "a\x0bb", "#"),
        *('"two\nlines"', '"two\r\nlines"', "'", "\\", "2019-05-31", "\ufeff", "\x85", '"x" '),
    ]
)
LINES = st.lists(CELLS, max_size=5)
TOPS = st.sampled_from(
    [
        "id,sire,dam",
        "id,sire,dam,note",
        "\ufeffid,sire,dam",
        "# a comment\nid,sire,dam",
        "# a comment\r\n\r\n#another\r\nid,sire,dam",
        "A title\n\nid,sire,dam,x",
        "Printed today,,\nid,sire,dam",
        "#id,sire,dam",
        "id;sire;dam",
        "id\tsire\tdam",
        "id|sire|dam",
        '"id","sire","dam"',
        '"i\nd",sire,dam,id',
        "id,sire,dam,,",
        " id , sire,dam ",
        "\nid,sire,dam",
        ",,\n , ,\nid,sire,dam",
        "id",
        "",
    ]
)
ENDS = st.sampled_from(["\n", "\n", "\n", "\r\n", "\r", "\n\n", "\r\n\r\n", "\n,,\n"])


PLAIN_CELLS = CELLS.filter(lambda cell: '"' not in cell)


@st.composite
def messy_texts(draw: st.DrawFn) -> str:
    """Text that is nearly a table: most rows have the header's width, some anything."""
    top = draw(TOPS)
    delimiter = next((sign for sign in ";\t|" if sign in top), ",")
    end, mixed = draw(ENDS), draw(st.integers(0, 3)) == 0
    width = top.splitlines()[-1].count(delimiter) + 1 if top else 3
    cells = draw(st.sampled_from([PLAIN_CELLS, CELLS]))
    row = st.lists(cells, min_size=width, max_size=width)
    if draw(st.integers(0, 5)) == 0:
        row |= LINES
    text = top
    for each in draw(st.lists(row, max_size=6)):
        text += (draw(ENDS) if mixed else end) + delimiter.join(each)
    return text + draw(st.sampled_from(["", "\n", "\r\n", "\n\n", "\n \n", ","]))


@settings(max_examples=1500)
@given(messy_texts())
@example("id,sire,dam\nA,,\nB,A")
@example('id,sire,dam\n"A",,\n"B\nb",A,\nC,,\n')
def test_reader_of_large_text_says_what_the_other_says(text):
    """Header, cells, lines and overlong rows are the same for every text that it takes."""
    assert_same(text.encode())


@settings(max_examples=400)
@given(
    st.lists(st.lists(CELLS, min_size=3, max_size=3), min_size=1, max_size=6),
    st.sampled_from(["\n", "\r\n"]),
    st.sampled_from([csv.QUOTE_MINIMAL, csv.QUOTE_ALL]),
    st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "cp1252"]),
)
def test_text_that_a_program_wrote_is_read_alike(rows, end, quoting, encoding):
    """Tables as spreadsheets write them are read alike, quotes and encodings included."""
    out = io.StringIO()
    csv.writer(out, lineterminator=end, quoting=quoting).writerows([["id", "sire", "dam"], *rows])
    try:
        content = out.getvalue().encode(encoding)
    except UnicodeEncodeError:
        assume(False)
    assert_same(content)


@settings(max_examples=300)
@given(st.text(alphabet='aé,;|\t"\n\r #0\ufeff\u3000', max_size=40), TOPS)
def test_any_text_is_read_alike(text, top):
    """Any run of signs below a header is read alike."""
    assert_same(f"{top}\n{text}".encode())


@pytest.mark.parametrize(
    ("text", "lines"),
    [
        ("id,sire,dam\nA,,\nB,A,\n", [2, 3]),
        ("id,sire,dam\r\nA,,\r\n\r\nB,A,\r\n", [2, 4]),
        ("id,sire,dam\n\n\nA,,\n,,\nB,A,", [4, 6]),
        ('id,sire,dam\n"A","",""\n"B","A",""\n', [2, 3]),
        ("\ufeffid;sire;dam\nÅ;;\n007;Å;\n", [2, 3]),
        ("# title\nid\tsire\tdam\nA\t\t\nB\tA\t\n", [3, 4]),
    ],
)
def test_tidy_text_is_not_declined(text, lines):
    """What a herdbook's program writes is read by the quick reader, and not handed back."""
    table = by_columns(text.encode())
    assert table is not None
    assert list(table.lines) == lines
    assert_same(text.encode())


@pytest.mark.parametrize(
    "text",
    [
        "id,sire,dam\rA,,\rB,A,\r",
        'id,sire,dam\nA "x,,\nB,A,\n',
        'id,sire,dam\n"A",,\nB\n',
    ],
)
def test_untidy_text_is_left_to_the_other_reader(text):
    """Where a text could be read in two ways the quick reader declines."""
    assert by_columns(text.encode()) is None


@pytest.mark.parametrize(
    ("rows", "overlong"),
    [
        ("A,,\nB\n", {}),
        ("A,,,x\nB,A,\n", {0: ("A", "", "", "x")}),
        ("A,,\n\nB\r\nC,A,B,,,y z\nD,,,,\n", {2: ("C", "A", "B", "", "", "y z")}),
        ("A\n,,\nB,A,,é\n", {1: ("B", "A", "", "é")}),
    ],
)
def test_uneven_rows_are_read_by_columns_too(rows, overlong):
    """A row that is too short or too long costs itself, not the whole herdbook."""
    content = f"id,sire,dam\n{rows}".encode()
    table = by_columns(content)
    assert table is not None
    assert dict(table.overlong) == overlong
    assert_same(content)


def test_wide_blocks_are_read_alike():
    """A text of several blocks keeps its words, lines and quoted line ends."""
    rows = [f'{number:07d},{number // 2:07d},,"m"' for number in range(20_000)]
    rows[777] = '0000777,,,"f"'
    content = ("id,sire,dam,sex\n" + "\n".join(rows)).encode()
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(large_delimited, "_BLOCK", 1 << 12)
        table = by_columns(content)
    assert table is not None
    assert told(table) == told(by_rows(content))


# Columns and ids

WORDS = st.one_of(
    st.sampled_from(
        [
            *("", "A", "a", "007", "7", " A ", "A  b", "Zoë", "Zoe\u0308", "ﬁn", "fin", "½", "雄"),
            *("\u00a0", "12345678", "123456789", "12345678\x00", "x" * 40, "\u3000A", "é" * 9),
        ]
    ),
    st.text(max_size=12).filter(lambda text: text.isprintable()),
)
COLUMNS = st.lists(WORDS, min_size=1, max_size=12)


def arrows_of(cells: list[str], *, words: bool, cut: int = 0) -> ArrowText:
    """Cells in Arrow's layout, as text or as words and codes, `cut` cells off the front."""
    array = pyarrow.array([*["cut off"] * cut, *cells], "string")
    if words:
        array = array.dictionary_encode()
    return ArrowText(array.slice(cut))


ARROWS = st.builds(
    lambda words, cut: {"words": words, "cut": cut}, st.booleans(), st.integers(0, 2)
)


@given(COLUMNS, ARROWS, st.data())
def test_columns_in_both_layouts_are_the_same(cells, arrows, data):
    """Cells, slices, codes, tidied, replaced and picked cells do not depend on the layout."""
    column = arrows_of(cells, **arrows)
    assert list(column) == cells
    assert [column[place] for place in range(len(cells))] == cells
    assert column[1:3] == tuple(cells[1:3])
    words = coded(column)
    assert [words.words[code] for code in words.codes.tolist()] == cells
    assert list(tidied(column)) == [tidy(cell) for cell in cells]
    changes = data.draw(st.dictionaries(st.sampled_from(cells) | WORDS, WORDS, max_size=3))
    expected = [changes.get(cell, cell) for cell in cells]
    assert list(replaced(column, changes)) == list(replaced(tuple(cells), changes)) == expected
    rows = np.array(data.draw(st.lists(st.integers(0, len(cells) - 1))), dtype=np.int64)
    assert picked(column, rows) == picked(tuple(cells), rows) == [cells[row] for row in rows]


@given(COLUMNS, ARROWS)
def test_tidied_and_replaced_columns_can_be_worked_on_again(cells, arrows):
    """A column that was tidied is one like any other: its distinct words are distinct."""
    column = tidied(arrows_of(cells, **arrows))
    words = coded(column)
    assert len(set(words.words)) == len(words.words)
    assert [words.words[code] for code in words.codes.tolist()] == [tidy(each) for each in cells]
    assert list(tidied(replaced(column, {"A": "B"}))) == [
        {"A": "B"}.get(tidy(each), tidy(each)) for each in cells
    ]


def numbered(numbering: Numbering) -> tuple:
    """All that a numbering says."""
    return (
        list(numbering.names),
        numbering.first_row.tolist(),
        numbering.animal_of_row.tolist(),
    )


@settings(max_examples=150)
@given(COLUMNS, COLUMNS, ARROWS, ARROWS)
def test_ids_are_numbered_alike(ids, cells, of_ids, of_cells):
    """Numbers, first rows and what is found are the same by hashes and by dictionary."""
    plain, hashed = number_animals(tuple(ids)), number_animals(arrows_of(ids, **of_ids))
    assert numbered(hashed) == numbered(plain)
    expected = plain.names.find_all(tuple(cells)).tolist()
    for names in (plain.names, hashed.names):
        assert names.find_all(arrows_of(cells, **of_cells)).tolist() == expected
        assert names.find_all(tuple(cells)).tolist() == expected
        for cell in [*cells, *ids]:
            assert names.find(cell) == plain.names.find(cell)
            assert names.has_row(cell) == (cell in ids and cell != "")
            assert (cell in names) == names.has_row(cell)
    places = np.arange(len(plain.names), dtype=np.int64)
    assert hashed.names.of_rows(places) == plain.names.of_rows(places) == list(plain.names)
    assert hashed.names.add_stub("a stub") == plain.names.add_stub("a stub") == len(plain.names) - 1
    assert hashed.names.find("a stub") == len(plain.names) - 1
    assert list(hashed.names) == list(plain.names)


def test_many_ids_are_numbered_alike():
    """Fifty thousand ids, a tenth of them twice, are numbered alike and all found again."""
    generator = np.random.default_rng(7)
    ids = [f"{each:06d}" for each in generator.integers(0, 400_000, 50_000)]
    assert len(set(ids)) < len(ids)
    plain, hashed = number_animals(tuple(ids)), number_animals(arrows_of(ids, words=False))
    assert numbered(hashed) == numbered(plain)
    assert (hashed.names.find_all(tuple(ids)) == plain.animal_of_row).all()


# Order of descent


def loops_and_all(draw: st.DrawFn) -> tuple[np.ndarray, np.ndarray, int]:
    """Parents of some animals, any of them anybody's parent; a few have no row."""
    animals, extra = draw(st.integers(1, 12)), draw(st.integers(0, 3))
    parent = st.lists(st.integers(-2, animals + extra - 1), min_size=animals, max_size=animals)
    sire, dam = (np.array(draw(parent), dtype=np.int32) for _role in range(2))
    return sire, dam, animals + extra


PARENTS = st.composite(loops_and_all)()


def by_readiness(sire: np.ndarray, dam: np.ndarray, count: int) -> np.ndarray:
    """Generations by the plain way."""
    children = np.concatenate([np.flatnonzero(sire >= 0), np.flatnonzero(dam >= 0)])
    parents = np.concatenate([sire[sire >= 0], dam[dam >= 0]])
    other = children != parents
    return descent_order._by_readiness(
        children[other].astype(np.int32), parents[other].astype(np.int32), count
    )


@settings(max_examples=500)
@given(PARENTS)
@example((np.array([1, 0], dtype=np.int32), np.array([-1, -1], dtype=np.int32), 2))
@example((np.array([1, 2, 0, 1], dtype=np.int32), np.array([3, -1, -1, -1], dtype=np.int32), 4))
def test_generations_are_the_same_in_both_ways(parents):
    """Compiled code and the plain way give every animal its generation, -1 on or below a loop."""
    sire, dam, count = parents
    assert ordering.generations(sire, dam, count).tolist() == by_readiness(*parents).tolist()


@given(PARENTS)
def test_generations_by_definition(parents):
    """A generation is one more than the parents' latest; what hangs on a loop has none."""
    sire, dam, count = parents
    generation = by_readiness(*parents)
    for child in range(count):
        above = [
            int(side[child])
            for side in (sire, dam)
            if child < len(sire) and side[child] >= 0 and side[child] != child
        ]
        depths = [int(generation[each]) for each in above]
        if generation[child] >= 0:
            assert generation[child] == max((depth + 1 for depth in depths), default=0)
        else:
            assert -1 in depths


def test_long_lines_of_descent_are_numbered():
    """A line of a hundred thousand generations, youngest first, is numbered without recursion."""
    n = 100_000
    sire = np.append(np.arange(1, n, dtype=np.int32), np.int32(-1))
    dam = np.full(n, -1, dtype=np.int32)
    assert (ordering.generations(sire, dam, n) == np.arange(n)[::-1]).all()


# A whole table by both routes


def route(content: bytes, *, large: bool) -> Audit:
    """The audit by the code for large tables or for small ones."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(delimited, "LARGE", 0 if large else len(content) + 1)
        patch.setattr(descent_order, "LARGE", 0 if large else 1 << 30)
        return audit_records(read_records("-", stdin=content))


@st.composite
def dirty_tables(draw: st.DrawFn) -> bytes:
    """Records with duplicates, loops, own parents, stubs, dates and words of many kinds."""
    ids = st.sampled_from(["A", "B", "C", "D", "e", "007", "7", "Zoë", "NA", "0", ""])
    parents = st.one_of(ids, st.sampled_from(["X1", "wild", "unk", "A|B", "A:0.7|X2:0.3", "A|"]))
    words = {
        "sex": ["m", "f", "u", "steer", "??"],
        "born": ["", "2019-05-31", "31/05/2019", "4/3/2019", "2018", "soon", "43616"],
        "origin": ["", "wild", "captive"],
        "clone_of": ["", "A", "B"],
        "count": ["", "1", "30"],
        "note": ["", " x "],
    }
    extra = draw(st.lists(st.sampled_from(sorted(words)), unique=True))
    rows = [
        [draw(ids), draw(parents), draw(parents), *(draw(st.sampled_from(words[w])) for w in extra)]
        for _row in range(draw(st.integers(1, 9)))
    ]
    out = io.StringIO()
    writer = csv.writer(out, lineterminator=draw(st.sampled_from(["\n", "\r\n"])))
    writer.writerows([["id", "sire", "dam", *extra], *rows])
    return out.getvalue().encode()


@settings(max_examples=250)
@given(dirty_tables())
def test_audit_is_the_same_by_both_routes(content):
    """Every finding and every animal are the same, however large the code thinks the table is."""
    assume(by_rows(content) is not None and not isinstance(by_rows(content), str))
    small, large = route(content, large=False), route(content, large=True)
    assert large.findings == small.findings
    assert large.reading == small.reading
    assert list(large.animals) == list(small.animals)
    assert list(large.animals.names) == list(small.animals.names)
    assert large.records.fields.keys() == small.records.fields.keys()
    for field, cells in small.records.fields.items():
        assert list(large.records.fields[field]) == list(cells)


@settings(max_examples=80, suppress_health_check=[HealthCheck.filter_too_much])
@given(small_pedigrees(possible=True, clones=True, selfing=True, dates=True), st.booleans())
def test_pedigree_is_the_same_by_both_routes(rows, backwards):
    """Both routes build one pedigree with one kinship, parents before offspring or after."""
    text = as_text(rows[::-1] if backwards else rows)
    first, second = (build_pedigree(route(text.encode(), large=large)) for large in (False, True))
    assert list(first.ids) == list(second.ids)
    for name in ("sire", "dam", "generation", "founder", "presumed"):
        assert (getattr(first, name) == getattr(second, name)).all()
    assert first.possible_sires == second.possible_sires
    assert first.possible_dams == second.possible_dams
    assert first.same_genotype_as == second.same_genotype_as
    places = range(len(first))
    tables = [compute_kinship(each).block(places, places) for each in (first, second)]
    assert (tables[0] == tables[1]).all()


@settings(max_examples=40)
@given(small_pedigrees())
def test_pedigree_in_file_order_has_the_same_kinships(rows):
    """In a large pedigree animals of a generation stay in file order; kinship is the same."""
    text = as_text(rows).encode()
    small = build_pedigree(route(text, large=False))
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(descent, "LARGE", 0)
        large = build_pedigree(route(text, large=True))
    assert sorted(small.ids) == sorted(large.ids)
    ids = list(small.ids)
    tables = [
        compute_kinship(each).block(each.place(*ids), each.place(*ids)) for each in (small, large)
    ]
    assert (tables[0] == tables[1]).all()


# Without compiled code, and without the packages


def large_herd(path: Path) -> Path:
    """A herd of many animals with a duplicate, a blank id, a loop and parents without a row."""
    rows = ["id,sire,dam,sex,born,note"]
    for number in range(6000):
        sire, dam = (f"H{number // 3 + k:05d}" if number > 30 + k else "" for k in (0, 1))
        rows.append(f"H{number:05d},{sire},{dam},{'mf'[number % 2]},{1950 + number // 100},é")
    rows += ["H00001,,,f,1950,é", ",H00001,,,,", "Q1,Q2,,m,,", "Q2,Q1,,m,,", "R,stub,H00001,,,"]
    path.write_text("\n".join(rows), encoding="utf-8")
    return path


SCRIPT = """
import json, sys
from pairing.records import descent_order
from pairing.records.files import delimited
delimited.LARGE = descent_order.LARGE = 0
from pairing.records.audit import audit_records
from pairing.records.descent_order import generations
from pairing.records.readers import read_records
audit = audit_records(read_records(sys.argv[1]))
print(json.dumps({
    "findings": [[each.line("herd"), each.severity] for each in audit.findings],
    "generations": generations(audit.animals).tolist(),
    "names": list(audit.animals.names),
    "arrow": type(audit.records.fields["id"]).__name__,
}))
"""


def answer(path: Path, *hidden: str, **environment: str) -> dict:
    """What another process finds in a table, some packages hidden from it."""
    done = subprocess.run(
        [sys.executable, "-c", HIDING.format(hidden=hidden) + textwrap.dedent(SCRIPT), str(path)],
        capture_output=True,
        check=False,
        env=os.environ | environment,
        timeout=300,
    )
    assert done.returncode == 0, done.stderr.decode()
    return json.loads(done.stdout)


@pytest.mark.parametrize(
    ("hidden", "layout"),
    [
        ((), "ArrowText"),
        (("pyarrow",), "tuple"),
        (("numba",), "ArrowText"),
        (("numba", "pyarrow"), "tuple"),
    ],
)
def test_large_table_is_read_where_a_package_is_missing(tmp_path, hidden, layout):
    """Without the packages for large tables the same is found, only more slowly."""
    path = large_herd(tmp_path / "herd.csv")
    expected = route(path.read_bytes(), large=False)
    found = answer(path, *hidden)
    assert found["arrow"] == layout
    assert found["names"] == list(expected.animals.names)
    assert found["generations"] == descent_order.generations(expected.animals).tolist()
    assert found["findings"] == [[each.line("herd"), each.severity] for each in expected.findings]
    assert {each.kind for each in expected.findings} >= {"duplicate-id", "loop", "missing-id"}


def test_compiled_code_says_the_same_uncompiled():
    """The order of descent is the same when its code runs as plain Python."""
    script = """
        import json
        import numpy as np
        from pairing.records import ordering
        draw = np.random.default_rng(3)
        found = []
        for _table in range(60):
            n = int(draw.integers(1, 40))
            sire, dam = (draw.integers(-2, n + 2, n).astype(np.int32) for _role in range(2))
            found.append(ordering.generations(sire, dam, n + 2).tolist())
            ranks = np.arange(n)
            sire, dam = (np.where(side < ranks, side, -1).astype(np.int32) for side in (sire, dam))
            found.append(ordering.generations(sire[::1], dam, n + 2).tolist())
        print(json.dumps(found))
    """
    answers = []
    for off in ("0", "1"):
        done = subprocess.run(
            [sys.executable, "-c", textwrap.dedent(script)],
            capture_output=True,
            check=True,
            env=os.environ | {"NUMBA_DISABLE_JIT": off},
            timeout=300,
        )
        answers.append(json.loads(done.stdout))
    assert answers[0] == answers[1]


def test_parents_looked_up_at_once_are_the_same(monkeypatch):
    """Finding both parents' ids in two threads changes nothing, possible parents included."""
    text = b"id,sire,dam\nA,,\nB,,\nC,A|B,B\nD,C,X\nE,,D\n"
    alone = audit_records(read_records("-", stdin=text))
    monkeypatch.setattr("pairing.records.parents._MANY", 0)
    together = audit_records(read_records("-", stdin=text))
    assert tuple(alone.animals) == tuple(together.animals)
    assert alone.findings == together.findings
