"""Workbooks and CSV for spreadsheets: every text comes back as it was, and none of it runs."""

from __future__ import annotations

import csv
import io
import os
import stat
import sys
import zipfile
from typing import TYPE_CHECKING, Any

import openpyxl
import pytest
from hypothesis import given
from hypothesis import strategies as st
from python_calamine import CalamineWorkbook

from pairing.errors import OptionError
from pairing.report.content import Answer
from pairing.report.export import (
    WRITERS,
    csv_text,
    harmless,
    to_csv,
    to_workbook,
    write_file,
    write_view,
    written,
)
from pairing.report.spreadsheet import (
    LONGEST_NAME,
    LONGEST_TEXT,
    AnswerInSheets,
    Sheet,
    SheetNames,
    workbook_bytes,
    write_workbook,
)

if TYPE_CHECKING:
    from pathlib import Path

FORMULAS = (
    "=1+1",
    "+1+1",
    "-1+1",
    "@SUM(A1)",
    "\t=1+1",
    "\rA",
    "  =1+1",
    "\u00a0=1+1",
    "\ufeff=1+1",
    "＝1+1",
    "＋1+1",
    "－1+1",
    "＠SUM(A1)",
    '=HYPERLINK("x","y")',
    "-",
    "=",
)
PLAIN = ("", "A12", "007", "-12", "+3", "-1.5", "-2e3", "Köcherfliege", "a=b", "S12|S15", "☃")
TEXTS = (*FORMULAS, *PLAIN, "1E+05", "http://example.org/x", "TRUE", "2019-05-31", " both ends ")


def answer_of(columns: tuple[str, ...], rows: tuple[tuple[Any, ...], ...]) -> Answer:
    """An answer of one table."""
    return Answer(("It is so.",), (), {}, columns, rows, {"version": "1", "as_of": None})


def by_openpyxl(content: bytes) -> dict[str, list[list[Any]]]:
    """Every sheet of a workbook, read by one reader."""
    workbook = openpyxl.load_workbook(io.BytesIO(content))
    return {sheet.title: [list(row) for row in sheet.iter_rows()] for sheet in workbook}


def by_calamine(content: bytes) -> dict[str, list[list[Any]]]:
    """Every sheet of a workbook, read by the other reader."""
    workbook = CalamineWorkbook.from_filelike(io.BytesIO(content))
    return {
        name: workbook.get_sheet_by_name(name).to_python(skip_empty_area=False)
        for name in workbook.sheet_names
    }


def test_texts_come_back_as_they_were_and_are_no_formulas():
    """Every text is a text cell for both readers: no formula, number, date or link."""
    rows = [(number, text) for number, text in enumerate(TEXTS)]
    content = workbook_bytes([Sheet("Texts", ("number", "text"), rows)])
    cells = by_openpyxl(content)["Texts"][1:]
    for (number, text), (first, second) in zip(rows, cells, strict=True):
        assert first.value == number
        if text:
            assert (second.data_type, second.hyperlink) == ("s", None)
            # Spreadsheets keep a carriage return as a code of their own.
            assert second.value.replace("_x000D_", "\r") == text
        else:
            assert second.value is None
    again = by_calamine(content)["Texts"][1:]
    assert [row[1].replace("_x000D_", "\r") for row in again] == [text for _number, text in rows]
    with zipfile.ZipFile(io.BytesIO(content)) as parts:
        sheet = parts.read("xl/worksheets/sheet1.xml").decode()
    assert "<f>" not in sheet
    assert "hyperlink" not in sheet


def test_numbers_booleans_and_blanks_are_themselves():
    """Numbers stay numbers, booleans booleans, None is blank; what no cell keeps is text."""
    row = (1, 0.1, True, None, "", 10**16, float("inf"), -3)
    content = workbook_bytes([Sheet("S", tuple("abcdefgh"), [row])])
    values = [cell.value for cell in by_openpyxl(content)["S"][1]]
    assert values == [1, 0.1, True, None, None, "10000000000000000", "inf", -3]
    assert [type(value) for value in values[:3]] == [int, float, bool]


def test_signs_that_no_workbook_holds_are_replaced():
    """Control characters and halves of characters do not make a workbook unreadable."""
    content = workbook_bytes([Sheet("S", ("a",), [("x\x00y\ud800z\uffff", "b")])])
    text = by_calamine(content)["S"][1][0]
    assert text.endswith("y\ufffdz\ufffd")
    assert by_openpyxl(content)["S"][1][1].value == "b"


def test_seventy_thousand_rows_come_back():
    """A long table is read back whole, by both readers, in order."""
    rows = [(f"Ä{number:05}", number) for number in range(70_000)]
    content = workbook_bytes([Sheet("Long", ("id", "number"), rows)])
    read = by_calamine(content)["Long"]
    assert read[0] == ["id", "number"]
    assert [(each[0], int(each[1])) for each in read[1:]] == rows
    sheet = openpyxl.load_workbook(io.BytesIO(content), read_only=True)["Long"]
    last = list(sheet.iter_rows(min_row=70_001, values_only=True))
    assert last == [rows[-1]]


def test_a_table_longer_than_a_sheet_goes_on_and_that_is_said(tmp_path: Path):
    """Rows beyond a sheet's limit stand on further sheets, each with the header, and said."""
    rows = [(number,) for number in range(10)]
    sheets = [Sheet("All", ("n",), rows), Sheet("All (2)", (), [("mine", 1)])]
    path = tmp_path / "book.xlsx"
    notes = write_workbook(sheets, path, most_rows=5)
    read = by_calamine(path.read_bytes())
    assert list(read) == ["All", "All (3)", "All (4)", "All (2)", "Notes"]
    parts = [read[name] for name in ("All", "All (3)", "All (4)")]
    assert [part[0] for part in parts] == [["n"]] * 3
    assert [row[0] for part in parts for row in part[1:]] == list(range(10))
    assert notes == (
        'A sheet takes 5 rows, so the table is on 3 sheets: "All", "All (3)", "All (4)".',
    )
    assert read["Notes"] == [["What did not fit"], [notes[0]]]


def test_a_full_sheet_has_no_empty_one_after_it(tmp_path: Path):
    """A table that fits to the row stays on one sheet and nothing is said."""
    path = tmp_path / "book.xlsx"
    assert write_workbook([Sheet("A", ("n",), [(1,), (2,)])], path, most_rows=3) == ()
    assert list(by_calamine(path.read_bytes())) == ["A"]


def test_a_text_too_long_for_a_cell_is_cut_and_that_is_said(tmp_path: Path):
    """A cell never loses its end in silence."""
    path = tmp_path / "book.xlsx"
    notes = write_workbook([Sheet("A", ("t",), [("x" * 40_000,), ("y" * LONGEST_TEXT,)])], path)
    cells = by_openpyxl(path.read_bytes())["A"]
    assert len(cells[1][0].value) == LONGEST_TEXT
    assert cells[1][0].value.endswith("x [cut here]")
    assert cells[2][0].value == "y" * LONGEST_TEXT
    assert len(notes) == 1
    assert "1 longer text is cut" in notes[0]


def test_too_many_columns_are_refused():
    """A table wider than a sheet is an error that says what to do."""
    header = tuple(map(str, range(16_385)))
    with pytest.raises(OptionError, match=r"16,385 columns and a sheet takes 16,384.*\n.*\.csv"):
        workbook_bytes([Sheet("Kinship", header, [])])


def test_same_input_same_bytes():
    """A workbook holds no clock: written twice it is the same, and its parts are dated alike."""
    sheets = [Sheet("A", ("n", "t"), [(1, "x")] * 5)]
    content = workbook_bytes(sheets)
    assert content == workbook_bytes(sheets)
    with zipfile.ZipFile(io.BytesIO(content)) as parts:
        assert {part.date_time[0] for part in parts.infolist()} == {1980}
        core = parts.read("docProps/core.xml").decode()
    assert "2000-01-01T00:00:00Z" in core
    assert core.count("T00:00:00Z") == core.count("</dcterms:")


def test_header_stays_in_sight_and_columns_are_wide_enough():
    """The header is bold and frozen; widths follow the content within bounds."""
    content = workbook_bytes([Sheet("A", ("n", "message"), [(1, "word " * 50), (2, "w" * 30)])])
    sheet = openpyxl.load_workbook(io.BytesIO(content))["A"]
    assert sheet.freeze_panes == "A2"
    assert sheet["A1"].font.bold
    assert not sheet["A2"].font.bold
    assert sheet.column_dimensions["A"].width < 15
    assert 30 < sheet.column_dimensions["B"].width < 70


@given(st.lists(st.text(max_size=40), max_size=12))
def test_names_of_sheets_are_valid_and_unique(wanted: list[str]):
    """Any names become valid ones, without regard to capitals each only once."""
    names = SheetNames()
    given_names = [names.valid(each) for each in wanted]
    for name in given_names:
        assert 1 <= len(name.encode("utf-16-le")) // 2 <= LONGEST_NAME
        assert not set(name) & set("[]:*?/\\")
        assert name == name.strip("'")
    assert len({name.casefold() for name in given_names}) == len(wanted)


def test_names_of_sheets_stay_readable():
    """A name is changed no more than it must be; of like names the later ones are numbered."""
    names = SheetNames()
    wanted = ["Zoo Süd", "ZOO SÜD", "A/B: tank [1]", "'quoted'", "", "History", "x" * 40, "x" * 50]
    assert [names.valid(each) for each in wanted] == [
        "Zoo Süd",
        "ZOO SÜD (2)",
        "A-B- tank -1-",
        "quoted",
        "Sheet",
        "History (2)",
        "x" * 31,
        "x" * 27 + " (2)",
    ]


@given(st.lists(st.text(max_size=33), min_size=1, max_size=6))
def test_a_workbook_of_any_names_can_be_read(wanted: list[str]):
    """Names of holders, whatever they hold, never make an unreadable workbook."""
    content = workbook_bytes([Sheet(each, ("n",), [(1,)]) for each in wanted])
    assert len(by_calamine(content)) == len(wanted)


def test_a_missing_package_is_told(monkeypatch: pytest.MonkeyPatch):
    """Without the package that writes workbooks the error says how to get it."""
    monkeypatch.setitem(sys.modules, "xlsxwriter", None)
    with pytest.raises(OptionError, match=r"needs the package xlsxwriter.*\n.*pairing\[report\]"):
        workbook_bytes([Sheet("A", ("n",), [])])


def test_an_answer_as_a_workbook_has_its_table_and_what_it_rests_on():
    """Any answer with a table can be a workbook: the table first, then headline and about."""
    content = to_workbook(answer_of(("id", "F"), (("=A", 0.125), ("B", None))))
    read = by_calamine(content)
    assert read["Answer"] == [["id", "F"], ["=A", 0.125], ["B", ""]]
    assert ["It is so.", ""] in read["About"]
    assert ["version", "1"] in read["About"]


def test_an_answer_with_sheets_of_its_own_keeps_them():
    """An answer that says how its workbook is laid out is laid out so."""
    answer = AnswerInSheets(
        ("So.",), (), {}, ("n",), ((1,),), {}, sheets=(Sheet("Mine", ("n",), [(7,)]),)
    )
    read = by_calamine(to_workbook(answer))
    assert list(read) == ["Mine", "About"]
    assert read["Mine"] == [["n"], [7]]


@pytest.mark.parametrize("text", FORMULAS)
def test_a_formula_is_made_harmless_for_a_spreadsheet_only(text: str):
    """What would run gets an apostrophe with --for-spreadsheet; plain CSV stays exact."""
    assert harmless(text) == f"'{text}"
    answer = answer_of((text, "n"), ((text, -5),))
    exact = list(csv.reader(io.StringIO(to_csv(answer), newline="")))
    assert exact == [[text, "n"], [text, "-5"]]
    safe = list(csv.reader(io.StringIO(csv_text(answer, for_spreadsheet=True), newline="")))
    assert safe == [[f"'{text}", "n"], [f"'{text}", "-5"]]


@pytest.mark.parametrize("text", PLAIN)
def test_other_texts_and_numbers_stay_as_they_are(text: str):
    """Nothing is changed that a spreadsheet would not run."""
    assert harmless(text) == text


def test_numbers_stay_numbers_for_a_spreadsheet():
    """Negative numbers, booleans and blanks are written alike in both kinds of CSV."""
    answer = answer_of(("a", "b", "c", "d"), ((-0.25, -3, True, None),))
    assert csv_text(answer, for_spreadsheet=True) == to_csv(answer) == "a,b,c,d\n-0.25,-3,true,\n"


@given(st.text(max_size=8))
def test_no_text_for_a_spreadsheet_begins_a_formula(text: str):
    """Whatever a cell holds, behind its blanks it begins no formula unless it is a number."""
    safe = harmless(text)
    assert safe in (text, f"'{text}")
    begun = safe.lstrip()
    if begun[:1] in {"=", "+", "-", "@"}:
        float(begun.replace(",", "."))


def test_every_writer_gives_bytes_or_text_and_written_gives_bytes():
    """`written` gives UTF-8 for the kinds that are text, and the workbook as it is."""
    answer = answer_of(("ä",), (("=1",),))
    assert set(WRITERS) == {"table", "csv", "json", "xlsx"}
    assert written(answer, "csv") == "ä\n=1\n".encode()
    assert written(answer, "csv", for_spreadsheet=True) == "ä\n'=1\n".encode()
    assert written(answer, "xlsx")[:2] == b"PK"
    assert written(answer, "json", for_spreadsheet=True) == written(answer, "json")


def test_bytes_and_text_are_put_in_place_whole(tmp_path: Path):
    """A file is replaced by bytes or text, readable as others are, and no input is."""
    out, source = tmp_path / "a.xlsx", tmp_path / "records.csv"
    source.write_text("id\n", encoding="utf-8")
    write_file(b"PK\x00", out, inputs=[source])
    assert out.read_bytes() == b"PK\x00"
    write_file("ä\n", out, inputs=[source])
    assert out.read_bytes() == "ä\n".encode()
    mask = os.umask(0)
    os.umask(mask)
    assert stat.S_IMODE(out.stat().st_mode) == 0o666 & ~mask
    with pytest.raises(OptionError, match="is an input of this call"):
        write_file(b"", source, inputs=[source])
    assert sorted(path.name for path in tmp_path.iterdir()) == ["a.xlsx", "records.csv"]


def test_a_view_is_written_as_it_is(tmp_path: Path):
    """The view holds every cell as text: exact in CSV, text in a workbook, harmless on demand."""
    header = ["id", "Notes of keepers", ""]
    rows = [["007", 'a\nb, "c"', ""], ["-12", "=1+1", "  "]]
    plain, safe, book = (tmp_path / name for name in ("v.csv", "safe.csv", "v.XLSX"))
    assert write_view(header, iter(rows), plain, inputs=[]) == ()
    assert list(csv.reader(io.StringIO(plain.read_text("utf-8"), newline=""))) == [header, *rows]
    write_view(header, iter(rows), safe, inputs=[], for_spreadsheet=True)
    assert list(csv.reader(io.StringIO(safe.read_text("utf-8"), newline="")))[2] == [
        "-12",
        "'=1+1",
        "  ",
    ]
    write_view(header, iter(rows), book, inputs=[])
    assert by_calamine(book.read_bytes())["View"] == [header, *rows]
    with pytest.raises(OptionError, match=r"is an input.*\n?Give --view another name"):
        write_view(header, rows, plain, inputs=[plain])


def test_a_view_that_fails_leaves_what_was_there(tmp_path: Path):
    """When the rows end in an error the old file stays and nothing is left beside it."""
    out = tmp_path / "v.csv"
    out.write_text("old", encoding="utf-8")

    def rows():
        yield ["1"]
        raise OptionError("No more.")

    with pytest.raises(OptionError, match=r"No more\."):
        write_view(["id"], rows(), out, inputs=[])
    assert [path.name for path in tmp_path.iterdir()] == ["v.csv"]
    assert out.read_text("utf-8") == "old"
