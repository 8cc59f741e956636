"""Reading tables of animals, whatever program saved them."""

from __future__ import annotations

import datetime
import io
import sqlite3
from contextlib import closing

import pytest
from openpyxl import Workbook

from pairing.errors import RecordsError
from pairing.records.audit import audit_records
from pairing.records.fields import ASKED_ABOUT, FIELDS, HOLDER_STAND_INS
from pairing.records.files.beginnings import DELIMITERS
from pairing.records.readers import read_records

SETTLE = "Settle a column with --map 'Their Column=field', for instance --map 'Father=sire'."
SAVE_AS = "Save it from your spreadsheet as CSV or .xlsx and try again."
NOT_TEXT = "\n".join(
    (
        "standard input: this is not a table of text.",
        "Expected comma, semicolon, tab or pipe separated text, or an .xlsx workbook.",
        SAVE_AS,
    )
)
EMPTY = "standard input: the file is empty.\nExpected a table of animals."
SMALL = "id,sire,dam\nA,,\nB,A,\n"


def read(content: str | bytes, *column_map: str):
    """Records of a table given as text or bytes."""
    content = content.encode() if isinstance(content, str) else content
    return read_records("-", column_map=column_map, stdin=content)


def refusal(content: str | bytes, *column_map: str) -> str:
    """The whole message with which a table is refused."""
    with pytest.raises(RecordsError, match=r"\w") as caught:
        read(content, *column_map)
    return str(caught.value)


def workbook(*sheets: list[list[object]]) -> bytes:
    """Bytes of an .xlsx workbook with these sheets, a list of rows each."""
    book = Workbook()
    book.remove(book.active)
    for rows in sheets:
        sheet = book.create_sheet()
        for row in rows:
            sheet.append(row)
    out = io.BytesIO()
    book.save(out)
    return out.getvalue()


# Delimiters, encodings, line ends


@pytest.mark.parametrize(("delimiter", "name"), DELIMITERS.items())
def test_delimiter_is_found_out(delimiter, name):
    """Comma, semicolon, tab and pipe each split the cells, and the delimiter is named."""
    records = read("id,sire,dam,note\nA,,,x\nB,A,,y\n".replace(",", delimiter))
    assert records.fields["id"] == ("A", "B")
    assert records.fields["sire"] == ("", "A")
    assert records.carried == {"note": ("x", "y")}
    assert records.reading == f"{name}-separated text, UTF-8; columns id, sire, dam"


def test_a_delimiter_inside_a_quoted_cell_splits_nothing():
    """Commas within quotation marks belong to the cell, also in the header."""
    records = read('id,sire,dam,"place, county"\nA,,,"Tarn, north; east|west"\n')
    assert records.carried == {"place, county": ("Tarn, north; east|west",)}


def test_pipes_of_possible_parents_are_no_delimiter():
    """A comma-separated table stays one when cells list possible parents with pipes."""
    assert read("id,sire,dam\nA,S|T,U|V\nB,S|T,U|V\n").fields["sire"] == ("S|T", "S|T")


@pytest.mark.parametrize(
    ("encoding", "name"),
    [
        ("utf-8", "UTF-8"),
        ("utf-8-sig", "UTF-8"),
        ("utf-16", "UTF-16"),
        ("cp1252", "Windows-1252"),
    ],
)
def test_encoding_is_found_out(encoding, name):
    """UTF-8 with and without a mark, UTF-16 and Windows-1252 give the same text."""
    records = read("id,sire,dam,name\nA,,,Müller – Åsa\n".encode(encoding))
    assert records.fields["id"] == ("A",)
    assert records.fields["name"] == ("Müller – Åsa",)
    assert records.reading.startswith(f"comma-separated text, {name};")


def test_big_endian_utf_16_is_read():
    """UTF-16 in either byte order is read when its mark says which."""
    content = b"\xfe\xff" + "id,sire,dam,name\nA,,,Åsa\n".encode("utf-16-be")
    assert read(content).fields["name"] == ("Åsa",)


@pytest.mark.parametrize("line_end", ["\n", "\r", "\r\n"])
def test_every_line_end_gives_the_same_rows(line_end):
    """LF, CR and CRLF give the same rows on the same lines."""
    records = read(SMALL.replace("\n", line_end))
    assert records.fields["id"] == ("A", "B")
    assert records.lines == (2, 3)


@pytest.mark.parametrize("line_end", ["\n", "\r\n"])
def test_a_quoted_line_break_stays_in_its_cell(line_end):
    """A line break within quotation marks is part of the cell, and later rows keep their line."""
    text = 'id,sire,dam,note\nA,,,"two\nlines"\nB,A,,x\n'.replace("\n", line_end)
    records = read(text)
    assert records.fields["id"] == ("A", "B")
    assert records.carried["note"] == (f"two{line_end}lines", "x")
    assert records.lines == (2, 4)


@pytest.mark.parametrize("line_end", ["\n", "\r", "\r\n"])
@pytest.mark.parametrize(
    "head", ["# herd of 2026\n#second, line\n", "# one\n\n# after a blank line\n\n", "\n\n# one\n"]
)
def test_comment_lines_before_the_header_are_passed_over(head, line_end):
    """Lines that begin with # before the header are no rows but count as lines of the file."""
    records = read((head + SMALL).replace("\n", line_end))
    assert records.fields["id"] == ("A", "B")
    assert records.lines == (head.count("\n") + 2, head.count("\n") + 3)


def test_a_header_that_begins_with_a_hash_is_the_header():
    """A line that begins with # and names the columns is the header, not a comment."""
    records = read("# a herd\n#id,sire,dam\nA,,\nB,A,\n")
    assert records.fields["id"] == ("A", "B")
    assert records.lines == (3, 4)


def test_an_id_that_begins_with_a_hash_is_a_row():
    """Only lines before the header can be comments."""
    assert read("id,sire,dam\n#7,,\nB,#7,\n").fields["id"] == ("#7", "B")


def test_blank_rows_are_passed_over():
    """Rows without any text, before, between and after the animals, are not animals."""
    records = read("\n\nid,sire,dam\n\nA,,\n,,\n  , ,\t\n\nB,A,\n\n")
    assert records.fields["id"] == ("A", "B")
    assert records.lines == (5, 9)


def test_short_rows_are_filled_with_blanks():
    """A row with fewer cells than the header has blanks in the others."""
    records = read("id,sire,dam,note\nA\nB,A\n")
    assert records.fields["sire"] == ("", "A")
    assert records.carried == {"note": ("", "")}
    assert records.findings == ()


def test_blank_cells_past_the_header_are_no_fault():
    """Trailing delimiters, as spreadsheets write them, are not extra cells."""
    assert read("id,sire,dam,,\nA,,,,\nB,A,,,\n").findings == ()


# Workbooks


def test_workbook_is_told_by_its_content():
    """An .xlsx workbook is read as one whatever its name, and its sheet is named."""
    records = read(workbook([["id", "sire", "dam"], ["A", None, None], ["B", "A", None]]))
    assert records.fields["id"] == ("A", "B")
    assert records.fields["sire"] == ("", "A")
    assert records.lines == (2, 3)
    assert records.reading == 'workbook, sheet "Sheet"; columns id, sire, dam'


def test_workbook_dates_and_numbers_read_as_a_keeper_sees_them():
    """Dates come in ISO form, whole numbers without a decimal point, others in full."""
    rows = [
        ["id", "sire", "dam", "born", "died", "merit", "may breed", "weight"],
        [7.0, None, None, datetime.date(2019, 5, 31), None, 99.5, True, 12.0],
        [8, 7.0, None, datetime.datetime(2020, 1, 2), 2021, 100.0, False, 0.1],
    ]
    records = read(workbook(rows))
    assert records.fields["id"] == ("7", "8")
    assert records.fields["sire"] == ("", "7")
    assert records.fields["born"] == ("2019-05-31", "2020-01-02")
    assert records.fields["died"] == ("", "2021")
    assert records.fields["merit"] == ("99.5", "100")
    assert records.fields["may_breed"] == ("yes", "no")
    assert records.carried == {"weight": ("12", "0.1")}


def test_workbook_text_that_looks_like_a_number_stays_text():
    """An id kept as text in a spreadsheet keeps its leading zeros."""
    records = read(workbook([["id", "sire", "dam"], ["007", None, None], ["1e5", "007", None]]))
    assert records.fields["id"] == ("007", "1e5")
    assert records.fields["sire"] == ("", "007")


def test_first_sheet_that_holds_a_table_is_read():
    """Empty sheets in front of the table are passed over."""
    content = workbook([], [["id", "sire", "dam"], ["A", None, None]], [["id"], ["Z"]])
    assert read(content).fields["id"] == ("A",)


def test_workbook_rows_keep_their_number():
    """Blank rows above the header count, so that a message names the row of the sheet."""
    rows = [[None], [None], ["id", "sire", "dam"], ["A", None, None], [None], ["B", "A", None]]
    assert read(workbook(rows)).lines == (4, 6)


def test_formulas_are_not_evaluated():
    """A formula that the spreadsheet has not worked out is never worked out here."""
    rows = [["id", "sire", "dam", "x"], ["A", None, None, "=1+1"], ["B", "A", None, "=2+3"]]
    records = read(workbook(rows))
    assert records.fields["id"] == ("A", "B")
    assert not {"2", "5"} & set(records.carried["x"])


def test_formulas_in_text_are_kept_as_text():
    """Text that a spreadsheet would run is carried along letter by letter."""
    formula = '=HYPERLINK("http://x")'
    records = read('id,sire,dam,note\nA,,,"=HYPERLINK(""http://x"")"\n')
    assert records.carried["note"] == (formula,)


# Cells


def test_ids_are_kept_as_text():
    """Ids that look like numbers, dates or powers are left as they are written."""
    ids = ("007", "7", "1e5", "2019-05-01", "+3", "0x1", "1.0", "-")
    records = read("id,sire,dam\n" + "".join(f"{each},,\n" for each in ids))
    assert records.fields["id"] == ids


def test_cells_are_compared_in_one_form():
    """Ids are trimmed, inner blanks folded to one, and letters brought to one form (NFKC)."""
    text = "id,sire,dam\nＡ１ ,,\n  B \t 2,\u00a0Ａ１,\nE\u0301,,\n"
    records = read(text)
    assert records.fields["id"] == ("A1", "B 2", "É")
    assert records.fields["sire"] == ("", "A1", "")


def test_other_columns_are_carried_untouched():
    """Columns that are no field keep every blank and every letter of their cells."""
    records = read('id,sire,dam,Note  here\nA,,,"  Ａ  b "\n')
    assert records.carried == {"Note here": ("  Ａ  b ",)}


def test_columns_of_one_name_are_all_carried():
    """Two other columns with the same heading are both carried along."""
    records = read("id,sire,dam,note,note\nA,,,first,second\n")
    assert sorted(cells for cells in records.carried.values()) == [("first",), ("second",)]


def test_columns_without_a_heading_are_carried():
    """A column with no heading is carried along under its place."""
    assert read("id,sire,dam,,x\nA,,,1,2\n").carried == {"column 4": ("1",), "x": ("2",)}


# Columns


def _variants(spelling: str) -> list[str]:
    words = spelling.replace("_", " ").split()
    return [
        spelling,
        "_".join(words).upper(),
        "-".join(words).title(),
        ".".join(words),
        f" {'  '.join(words)} ",
        "".join(words),
    ]


@pytest.mark.parametrize(
    ("field", "spelling"),
    [(field.name, spelling) for field in FIELDS.values() for spelling in field.spellings],
)
def test_every_spelling_of_a_field_is_recognised(field, spelling):
    """Case, blanks, _, - and . in a heading are left out of account, for every spelling."""
    for heading in _variants(spelling):
        others = [each for each in ("id", "sire", "dam") if each != field]
        records = read(f"{','.join([*others, heading])}\n{','.join(['A'] * len(others))},cell\n")
        assert records.fields[field] == ("cell",), heading
        assert records.carried == {}


@pytest.mark.parametrize(
    ("field", "spellings"),
    [
        ("id", "id|animal|animal id|studbook number|registration|regno|ear tag"),
        ("mark", "mark|ring|band|chip|transponder|tattoo"),
        ("sire", "sire|father"),
        ("dam", "dam|mother"),
        ("born", "born|birth|birth date|dob"),
        ("died", "died|death|dod"),
        ("end_cause", "cause of death|end cause"),
        ("holder", "holder|institution|location|farm|tank"),
        ("origin", "origin|source"),
        ("line", "line|variety|subspecies|strain"),
        ("may_breed", "may breed|available|breeding"),
        ("merit", "merit|index|ebv"),
        ("clone_of", "clone of|identical twin of"),
        ("group", "group|shoal|harem"),
        ("count", "count|number"),
        ("genetic_dam", "genetic dam|donor"),
        ("reared_by", "reared by|foster"),
    ],
)
def test_promised_spellings_are_among_the_fields(field, spellings):
    """Every column spelling promised to users belongs to its field."""
    known = {each.replace("_", " ") for each in FIELDS[field].spellings}
    assert set(spellings.split("|")) <= known


def test_headings_in_other_words_are_named_in_the_reading():
    """The one line on how the file was read names each column taken under another name."""
    records = read("Ear Tag,Father,mother,born,note\nA,,,2019,x\n")
    assert records.columns == {"id": "Ear Tag", "sire": "Father", "dam": "mother", "born": "born"}
    assert records.reading == (
        "comma-separated text, UTF-8; columns born; taken as fields: Ear Tag = id, "
        "Father = sire, mother = dam"
    )


def test_holder_is_taken_in_a_stated_order_and_the_losers_are_named():
    """Of several columns that could be the holder one is used; the others are carried and named."""
    records = read("id,sire,dam,farm,location\nA,,,f,l\n")
    assert records.fields["holder"] == ("l",)
    assert records.carried == {"farm": ("f",)}
    [finding] = records.findings
    assert finding.kind == "column-passed-over"
    assert finding.message == '"farm" could also be holder; "location" is used.'
    assert finding.remedy == "If \"farm\" is the right one, say --map 'farm=holder'."
    assert finding.column == "farm"


@pytest.mark.parametrize("stand_in", HOLDER_STAND_INS)
def test_herd_and_cage_stand_in_for_the_holder(stand_in):
    """Without a column for the holder, a herd or cage is the holder."""
    assert read(f"id,sire,dam,{stand_in}\nA,,,x\n").fields["holder"] == ("x",)
    assert read(f"id,sire,dam,holder,{stand_in}\nA,,,h,x\n").fields["holder"] == ("h",)


def test_a_stand_in_passed_over_is_named():
    """When herd is taken as the holder, cage is carried along and named as passed over."""
    records = read("id,sire,dam,cage,herd\nA,,,c,h\n")
    assert records.fields["holder"] == ("h",)
    assert records.carried == {"cage": ("c",)}
    assert [finding.column for finding in records.findings] == ["cage"]


@pytest.mark.parametrize(("folded_name", "field"), ASKED_ABOUT.items())
def test_doubtful_columns_are_asked_about_and_not_used(folded_name, field):
    """Breed, twin of, owner and breeder are carried along with a question, never guessed."""
    heading = "Twin of" if folded_name == "twinof" else folded_name
    records = read(f"id,sire,dam,{heading}\nA,,,x\n")
    assert field not in records.fields
    assert records.carried == {heading: ("x",)}
    [finding] = records.findings
    assert finding.kind == "asked-about"
    assert finding.message == (
        f'"{heading}" might be {field} ({FIELDS[field].meaning}); it is carried along and not used.'
    )
    assert finding.remedy == f"If it is, say --map '{heading}={field}'."
    assert read(f"id,sire,dam,{heading}\nA,,,x\n", f"{heading}={field}").findings == ()


# --map


def test_map_settles_a_column():
    """Their Column=field gives a column its field, whatever its case, blanks and signs."""
    for entry in ("Their Column=mark", "their_column=mark", "THEIR-COLUMN = mark"):
        records = read("id,sire,dam,Their Column\nA,,,x\n", entry)
        assert records.fields["mark"] == ("x",)
        assert records.columns["mark"] == "Their Column"
        assert records.carried == {}


def test_map_wins_over_a_column_of_that_name():
    """A column settled with --map takes its field from the column that has it by name."""
    records = read("id,sire,dam,Nick\nA,,,x\n", "Nick=name")
    assert records.fields["name"] == ("x",)
    records = read("id,sire,dam,name,Nick\nA,,,n,x\n", "Nick=name")
    assert records.fields["name"] == ("x",)
    assert records.carried == {"name": ("n",)}


def test_map_joins_columns_with_a_hyphen():
    """A+B+C=id joins the cells that are not blank, and the columns stay carried along."""
    text = "Cage,Tag,Year,Sire,Dam\nC1, 7 ,2019,,\nC2,,2020,C1-7-2019,\n"
    records = read(text, "Cage+Tag+Year=id")
    assert records.fields["id"] == ("C1-7-2019", "C2-2020")
    assert records.fields["sire"] == ("", "C1-7-2019")
    assert records.carried == {"Cage": ("C1", "C2"), "Tag": (" 7 ", ""), "Year": ("2019", "2020")}


def test_map_leaves_a_column_alone():
    """Column= carries a column along although its name is a field's."""
    records = read("id,sire,dam,line\nA,,,7\n", "line=")
    assert "line" not in records.fields
    assert records.carried == {"line": ("7",)}
    assert read("id,sire,dam,owner\nA,,,7\n", "owner=").findings == ()


def test_map_reads_a_heading_with_signs_of_its_own():
    """A heading that holds + or = can be settled by its full name."""
    assert read("id,sire,dam,a+b\nA,,,x\n", "a+b=mark").fields["mark"] == ("x",)
    assert read("id,sire,dam,a=b\nA,,,x\n", "a=b=mark").fields["mark"] == ("x",)


def test_map_settles_ambiguous_columns():
    """Two columns that could each be the id are told apart with --map."""
    records = read("id,animal,sire,dam\n1,A,,\n2,B,A,\n", "animal=id")
    assert records.fields["id"] == ("A", "B")
    assert records.carried == {"id": ("1", "2")}


def test_every_problem_of_the_map_is_named_at_once():
    """Unknown columns and fields, missing signs and fields settled twice come in one message."""
    message = refusal(
        "id,sire,dam,name\nA,,,x\n",
        "nam=id",
        "name",
        "name=sier",
        "sire=dam",
        "name=dam",
        "zzzz=mark",
        "name=qqqq",
    )
    assert message.splitlines() == [
        "standard input: the columns cannot be told apart.",
        '--map "nam=id": there is no column "nam". Did you mean "name"?',
        '--map "name": expected Their Column=field.',
        '--map "name=sier": there is no field "sier". Did you mean "sire"?',
        '--map "name=dam": "dam" is already settled by another --map.',
        '--map "zzzz=mark": there is no column "zzzz".',
        '--map "name=qqqq": there is no field "qqqq".',
        SETTLE,
    ]


# Refusals, word for word


@pytest.mark.parametrize("content", ["", " \n\t\n", "\ufeff", "# only\n# comments\n", "# one"])
def test_empty_file_is_refused(content):
    """A file without text, or with comments only, is called empty."""
    assert refusal(content) == EMPTY


@pytest.mark.parametrize("content", ["id,sire,dam\n", "id,sire,dam", "id,sire,dam\n,,\n\n"])
def test_header_without_animals_is_refused(content):
    """A header with no row below it is shown with its line."""
    assert refusal(content) == (
        "standard input: there is a header but no animal.\n"
        "Line 1 reads: id, sire, dam\n"
        "Expected one row an animal below the header."
    )


def test_header_without_animals_is_shown_on_its_own_line():
    """The line named for a header without animals is the header's, comments counted."""
    assert "Line 3 reads: id, sire, dam" in refusal("# one\n# two\nid,sire,dam\n")


def test_empty_workbook_is_refused():
    """A workbook whose sheets hold nothing is called empty."""
    assert refusal(workbook([], [])) == EMPTY


@pytest.mark.parametrize(
    "content",
    [
        b"id,sire,dam\nA,\x00,\n",
        bytes(range(256)),
        b"\x89PNG\r\n\x1a\n\x00\x00\x00\rIHDR",
        b"\xff\xfea",
        b"%PDF-1.7\n%\xe2\xe3\xcf\xd3\n\x00\x01",
    ],
)
def test_binary_file_is_refused(content):
    """Bytes that are no text are refused with the kinds of table that are read."""
    assert refusal(content) == NOT_TEXT


def test_broken_workbook_is_refused():
    """A damaged workbook is refused with what to do."""
    message = refusal(b"PK\x03\x04 no more than a beginning")
    assert message.startswith("standard input: the workbook cannot be read (")
    assert message.endswith(f").\n{SAVE_AS}")


def test_folder_is_refused(tmp_path):
    """A folder in place of a file is called a folder."""
    with pytest.raises(RecordsError, match="folder") as caught:
        read_records(tmp_path)
    assert str(caught.value) == (
        f"{tmp_path}: this is a folder, not a file.\nName the file inside it."
    )


def test_missing_file_is_refused_with_the_nearest_name(tmp_path):
    """A file that is not there is named with one beside it that has nearly that name."""
    (tmp_path / "tarn-crane.csv").write_text(SMALL, encoding="utf-8")
    wrong = tmp_path / "tarn-crnae.csv"
    with pytest.raises(RecordsError, match="no such file") as caught:
        read_records(wrong)
    assert str(caught.value) == (
        f"{wrong}: there is no such file.\nDid you mean {tmp_path / 'tarn-crane.csv'}?"
    )


def test_missing_file_is_refused_without_a_near_name(tmp_path):
    """A file that is not there, nor its folder, is refused with what to do."""
    wrong = tmp_path / "nowhere" / "x.csv"
    with pytest.raises(RecordsError, match="no such file") as caught:
        read_records(wrong)
    assert str(caught.value) == (
        f"{wrong}: there is no such file.\nCheck the path and the spelling."
    )


@pytest.mark.parametrize(
    ("content", "line"),
    [
        ('id,sire,dam\nA,,"\nB,A,\n', 2),
        ('id,sire,dam,note\nA,,,x\nB,A,,"open\nC,A,,y\nD,A,,z\n', 3),
    ],
)
def test_unclosed_quotation_mark_is_refused_with_its_line(content, line):
    """A quotation mark that is never closed swallows no rows: its line is named."""
    message = refusal(content)
    assert message.startswith(f"standard input, line {line}: the row cannot be read (")
    assert message.endswith(").\nLook for a quotation mark that is opened and never closed.")


def test_huge_cell_is_refused_with_its_line():
    """A cell past a million letters is taken for an unclosed quotation mark."""
    message = refusal("id,sire,dam,note\nA,,,x\nB,A,," + "x" * 1_000_001 + "\n")
    assert message == (
        "standard input, line 3: the row cannot be read "
        "(field larger than field limit (1000000)).\n"
        "Look for a quotation mark that is opened and never closed."
    )


def test_extra_cells_are_a_finding_of_their_row():
    """A row with more cells than the header is kept and reported with its line."""
    records = read("id,sire,dam\nA,,\nB,A,,Tarn, north\n")
    assert records.fields["id"] == ("A", "B")
    [finding] = records.findings
    assert finding.kind == "extra-cells"
    assert finding.stops
    assert finding.row == 3
    assert finding.found == "Tarn"
    assert finding.message == "the row has 5 cells, the header 3."
    assert finding.remedy == "Mend the row: a comma inside a cell needs quotes around the cell."


def test_ambiguous_columns_are_refused():
    """Two columns that could each be an id or a parent are named with the way out."""
    assert refusal("id,animal,sire,father,dam\nA,A,,,\n").splitlines() == [
        "standard input: the columns cannot be told apart.",
        'Columns "id" and "animal" could each be id; say which with --map \'id=id\'.',
        'Columns "sire" and "father" could each be sire; say which with --map \'sire=sire\'.',
        SETTLE,
    ]


def test_repeated_heading_of_a_field_is_refused():
    """A field's heading that stands twice is not guessed at."""
    assert refusal("id,sire,dam,sex,Sex\nA,,,m,f\n").splitlines() == [
        "standard input: the columns cannot be told apart.",
        'Columns "sex" and "Sex" could each be sex; say which with --map \'sex=sex\'.',
        SETTLE,
    ]


def test_missing_columns_are_refused_with_likely_ones():
    """A table without columns for id and parents is shown its headings and the likely ones."""
    assert refusal("Studbook ID,Father no,Mother no,sex\nA,,,m\n").splitlines() == [
        "standard input: the columns cannot be told apart.",
        'No column for id, sire and dam among "Studbook ID", "Father no", "Mother no" and '
        "\"sex\". Perhaps --map 'Studbook ID=id' --map 'Father no=sire' "
        "--map 'Mother no=dam'.",
        SETTLE,
    ]


def test_missing_columns_are_refused_without_near_names():
    """Headings that resemble nothing are shown without a guess."""
    assert refusal("a,b\n1,2\n").splitlines() == [
        "standard input: the columns cannot be told apart.",
        'No column for id, sire and dam among "a" and "b". If the table has none, say '
        "--map '=sire' --map '=dam'.",
        SETTLE,
    ]


def test_refusals_name_the_file_and_not_its_folder(tmp_path):
    """A fault within a file is told with the file's own name."""
    path = tmp_path / "empty.csv"
    path.write_bytes(b"")
    with pytest.raises(RecordsError, match=r"^empty\.csv: the file is empty"):
        read_records(path)


def test_field_without_a_column_may_be_said_to_have_none():
    """A table without parents is read when the keeper says that it has no such columns."""
    records = read("animal,sex\nA,m\nB,f\n", "=sire", "=dam")
    assert records.fields["sire"] == records.fields["dam"] == ("", "")
    assert "sire" not in records.columns
    assert records.reading.endswith("no column for sire and dam")
    assert audit_records(records).findings == ()


def test_sqlite_file_given_as_a_path_is_told_how_to_be_named(tmp_path):
    """A database file is refused with the address that would read it."""
    path = tmp_path / "herd.db"
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("create table animals (id text, sire text, dam text)")
        connection.commit()
    with pytest.raises(RecordsError, match="this is a SQLite database") as caught:
        read_records(path)
    assert f"sqlite:///{path} --table NAME" in str(caught.value)


def test_lines_above_the_header_are_passed_over():
    """A title and a date of printing above the header are no animals and no columns."""
    records = read("Otter studbook;;\nprinted 2024;;\nid;sire;dam\nA;;\nB;A;\n")
    assert records.fields["id"] == ("A", "B")
    assert list(records.lines) == [4, 5]
    assert "header on line 3" in records.reading


def test_list_of_parents_does_not_make_a_pipe_the_delimiter():
    """The delimiter that names our fields wins, however many pipes stand in the cells."""
    records = read("id,sire,dam\nA,S1|S2|S3|S4,D\nB,S1|S2|S3|S4,D\n")
    assert records.fields["sire"] == ("S1|S2|S3|S4", "S1|S2|S3|S4")
