"""Reading spreadsheet workbooks, sound, odd and hostile."""

import base64
import datetime
import hashlib
import io
import re
import struct
import zipfile
import zlib
from contextlib import suppress
from pathlib import Path

import openpyxl
import pytest

from pairing.errors import RecordsError
from pairing.records.files.package import SAVE_AS
from pairing.records.files.workbook import read_workbook
from pairing.records.readers import read_records

DAMAGED = "herd.xlsx: the workbook cannot be read ("
HEADER = ["id", "sire", "dam"]


def saved(book: openpyxl.Workbook) -> bytes:
    """Bytes of a workbook."""
    out = io.BytesIO()
    book.save(out)
    return out.getvalue()


def workbook(**sheets: list[list[object]]) -> bytes:
    """Bytes of an .xlsx workbook with these sheets by name, a list of rows each."""
    book = openpyxl.Workbook()
    book.remove(book.active)
    for title, rows in sheets.items():
        sheet = book.create_sheet(title.replace("_", " "))
        for row in rows:
            sheet.append(row)
    return saved(book)


def with_member(content: bytes, member: str, text: str) -> bytes:
    """The same archive with one member replaced or added."""
    out = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(content)) as old,
        zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new,
    ):
        for name in old.namelist():
            if name != member:
                new.writestr(name, old.read(name))
        new.writestr(member, text)
    return out.getvalue()


SHEET = "xl/worksheets/sheet1.xml"


def sheet_xml(rows: str, dimension: str = "A1", declaration: str = "") -> bytes:
    """An .xlsx workbook whose one sheet is this XML."""
    return with_member(
        workbook(Animals=[HEADER]),
        SHEET,
        f'{declaration}<worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main">'
        f'<dimension ref="{dimension}"/><sheetData>{rows}</sheetData></worksheet>',
    )


def cell(place: str, text: str) -> str:
    """XML of a cell of text."""
    return f'<c r="{place}" t="inlineStr"><is><t>{text}</t></is></c>'


ROWS = (
    f'<row r="1">{cell("A1", "id")}{cell("B1", "sire")}{cell("C1", "dam")}</row>'
    f'<row r="2">{cell("A2", "A")}</row>'
)


OPEN_DOCUMENT = "urn:oasis:names:tc:opendocument:xmlns"


def open_document(*sheets: tuple[str, str], kind: str = "spreadsheet", manifest: str = "") -> bytes:
    """Bytes of an OpenDocument file with these sheets: name, and XML of the rows."""
    tables = "".join(
        f'<table:table table:name="{title}">{rows}</table:table>' for title, rows in sheets
    )
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("mimetype", f"application/vnd.oasis.opendocument.{kind}")
        archive.writestr(
            "META-INF/manifest.xml",
            f'<manifest:manifest xmlns:manifest="{OPEN_DOCUMENT}:manifest:1.0">{manifest}'
            "</manifest:manifest>",
        )
        archive.writestr(
            "content.xml",
            f'<office:document-content xmlns:office="{OPEN_DOCUMENT}:office:1.0" '
            f'xmlns:table="{OPEN_DOCUMENT}:table:1.0" xmlns:text="{OPEN_DOCUMENT}:text:1.0" '
            'xmlns:calcext="urn:org:documentfoundation:names:experimental:calc:xmlns:calcext:1.0">'
            f"<office:body><office:spreadsheet>{tables}</office:spreadsheet></office:body>"
            "</office:document-content>",
        )
    return out.getvalue()


def ods_cell(text: str, attributes: str = 'office:value-type="string"') -> str:
    """XML of a cell of an OpenDocument spreadsheet."""
    return f"<table:table-cell {attributes}><text:p>{text}</text:p></table:table-cell>"


def ods_row(*cells: str, repeated: int = 1) -> str:
    """XML of a row of an OpenDocument spreadsheet that stands for one or more."""
    return (
        f'<table:table-row table:number-rows-repeated="{repeated}">{"".join(cells)}'
        "</table:table-row>"
    )


ODS_HEADER = ods_row(*map(ods_cell, HEADER))


def read(content: bytes, table: str | None = None):
    """The table of a workbook."""
    return read_workbook("herd.xlsx", content, table)


def refusal(content: bytes, table: str | None = None) -> str:
    """Message with which a workbook is refused."""
    with pytest.raises(RecordsError) as caught:
        read(content, table)
    assert caught.value.exit_status == 2
    return str(caught.value)


@pytest.fixture
def little_memory():
    """Two gigabytes more than is in use: what sets more aside than it should ends the run."""
    resource = pytest.importorskip("resource")
    sizes = Path("/proc/self/statm")
    if not sizes.exists():
        pytest.skip("this system does not tell how much memory is in use")
    in_use = int(sizes.read_text(encoding="ascii").split()[0]) * resource.getpagesize()
    before = resource.getrlimit(resource.RLIMIT_AS)
    resource.setrlimit(resource.RLIMIT_AS, (in_use + 2_000_000_000, before[1]))
    yield
    resource.setrlimit(resource.RLIMIT_AS, before)


# Cells


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        ("007", "007"),
        (" a  b\nc ", " a  b\nc "),
        (7, "7"),
        (7.0, "7"),
        (7.5, "7.5"),
        (-3, "-3"),
        (100000, "100000"),
        (datetime.date(2019, 5, 1), "2019-05-01"),
        (datetime.datetime(2019, 5, 1), "2019-05-01"),
        (datetime.datetime(2019, 5, 1, 13, 30), "2019-05-01 13:30:00"),
        (datetime.time(6, 5), "06:05:00"),
        (datetime.timedelta(hours=30, minutes=5), "30:05:00"),
        (True, "yes"),
        (False, "no"),
        ("#N/A", "#N/A"),
        ("#REF!", "#REF!"),
        (None, ""),
    ],
)
def test_cells_are_read_as_a_keeper_sees_them(value, expected):
    """Each kind of cell becomes the text that a keeper would write for it."""
    book = openpyxl.Workbook()
    book.active.append(["id", "sire", "note"])
    book.active.append(["A", "", value])
    if isinstance(value, str) and value.startswith("#"):
        book.active["C2"].data_type = "e"
    assert read(saved(book)).columns[2] == (expected,)


def test_cells_of_an_open_document_are_read_alike():
    """Text, numbers, dates, truths and errors of an .ods workbook become the same texts."""
    cells = (
        ods_cell("007"),
        ods_cell("x", 'office:value-type="float" office:value="7"'),
        ods_cell("x", 'office:value-type="date" office:date-value="2019-05-01"'),
        ods_cell("x", 'office:value-type="date" office:date-value="2019-05-01T13:30:00"'),
        ods_cell("x", 'office:value-type="boolean" office:boolean-value="true"'),
        ods_cell(
            "#REF!",
            'office:value-type="string" office:string-value="" calcext:value-type="error"',
        ),
    )
    headings = (ods_cell(heading) for heading in ("id", "n", "born", "seen", "ok", "sire"))
    table = read(open_document(("Animals", ods_row(*headings) + ods_row(*cells))))
    assert [column[0] for column in table.columns] == [
        "007",
        "7",
        "2019-05-01",
        "2019-05-01 13:30:00",
        "yes",
        "#REF!",
    ]


XLS = base64.b85decode(
    "c-rk)O=wd=5dQZ4<c}szYbvy22nDP5M=Bol(#8tflcjo5L}(L}Luivq(n~#PwdN=Yo)j;Idg!I<#UJ#bHxEKZ4}u"
    "^xdh{eHcxdySnfFrDTA_hjiM%h_*_qj$*?GIO`+nXmHZ9FQY%5_M`k|w2`QfS3DJuSo5C*kd7PFPwN5yhcSMd92A"
    "w4FZ1z&r44SBsw(D1-`Nfh`*<vcE8Xd;)6Z6l6J3<<?C^eKaKPs3d*A+$<d%|b5--68b8^nEV$sAz5o?W4X+>Kqp"
    "1L!C#QJU*+nOIwJj!eg=dAew_{!7I+=D>s$h*Tg_RlNhhFhN#hiIna_0rgP~$%Z<2)05C=9$!2>}sU<{cx##fRiU"
    "Hp$`}#%9)o-s}f%HGt>b-x^`)Co@>u+fWFb!)|aWWSXM3=!WCT-fubfJhwjF_zOVj!2vCdLcPI3OFH3nhIfMg0qz"
    "d|C%mi7W}piF}T#9NCkuxA$;>kA68S!fTF-plqN9qA41N`6k&$VTyEl{_ES5$>I2jXr|@%U}FzQ3=3D;f{a7!Za$"
    "r2(Ixbnc-<v@o6rbd8Py%bEe>;HM*3Wr)(#rykl<Z>Zxz3f_~MsSPol-o@%_Xv43;iM7T(8a(M~tD6xs7{2HmP#-"
    "MP(p8n4vKIc`1*ZT;=&>DQX^h#5L~eqrn8Ol>%4nyfLmdg^e_d|Fs)4=m^Dq7f@JXZCzBY)K<YtxCExSGHu3q_0X"
    "QNrvND-@vmjo_WSDYb>$n=&EE;yn%U*tag)RI-dD~#&+UGRPkSD_dJYV<=)hMFvNYQvUxjfNepb17%p76aN)v*3m"
    "5+i%6<iqhaJOtp!CS&j{RL{g-Y4|O!D92G$!abNw1X0k)t|~shaX<CrnlGr8a3(`CiC4L!;+0hNQ$XR&)N+ONOex"
    "o=qEuw{8p7I)1s9IREnaKLP(r1@Q"
)


def test_workbook_of_the_old_kind_is_read():
    """An .xls workbook is read, from its sheet of animals, with the sheet's row numbers."""
    table = read(zlib.decompress(XLS))
    assert table.kind == 'workbook, sheet "Animals" of 2 (not read: "Notes")'
    assert table.header == ("id", "sire", "dam", "born", "note")
    assert (table.header_line, tuple(table.lines)) == (3, (4, 5))
    assert table.columns[0][0] == "007"
    assert table.columns[1] == ("7", "yes")
    assert table.columns[3][0] == "2019-05-01"


def test_errors_of_a_workbook_of_the_old_kind_are_told():
    """An error cell of an .xls workbook is its text."""
    assert read(zlib.decompress(XLS)).columns[0] == ("007", "#N/A")


def number_record(row: int, column: int) -> bytes:
    """Beginning of the record of a number in an .xls workbook."""
    return struct.pack("<4H", 0x27E, 10, row, column)


@pytest.mark.usefixtures("little_memory")
def test_cell_far_from_the_table_in_a_workbook_of_the_old_kind_takes_no_memory():
    """A cell said to stand in the last place of all is refused with both ends."""
    sound = zlib.decompress(XLS)
    assert sound.count(number_record(3, 2)) == 1
    far = sound.replace(number_record(3, 2), number_record(0xFFFF, 0xFFFF))
    assert "Its filled cells reach from B3 to CRXP65536" in refusal(far)


@pytest.mark.usefixtures("little_memory")
@pytest.mark.parametrize("claim", [(0, 0x7FFFFFFF, 0, 256), (9, 3, 0, 5), (0, 5, 9, 3)])
def test_claimed_size_of_a_workbook_of_the_old_kind_takes_no_memory(claim):
    """A sheet that claims more rows than there can be, or fewer than none, is refused."""
    sound = zlib.decompress(XLS)
    true = struct.pack("<2I2H", 2, 5, 1, 6)
    assert sound.count(true) == 1
    assert refusal(sound.replace(true, struct.pack("<2I2H", *claim))).startswith(DAMAGED)


@pytest.mark.usefixtures("little_memory")
def test_damaged_workbook_of_the_old_kind_is_refused():
    """An .xls workbook cut short or with any byte changed gives a table or a refusal."""
    sound = zlib.decompress(XLS)
    for cut in (8, 100, 600, 2000):
        assert refusal(sound[:cut]).startswith(DAMAGED)
    for place in [*range(8, 600, 3), *range(600, len(sound), 31)]:
        changed = bytearray(sound)
        changed[place] ^= 0xFF
        with suppress(RecordsError):
            assert read(bytes(changed)).columns


def test_other_document_of_the_old_kind_is_refused():
    """A file of the same family without a workbook is told to be none."""
    other = zlib.decompress(XLS).replace(
        "Workbook".encode("utf-16-le"), "WordDocu".encode("utf-16-le")
    )
    assert refusal(other).startswith(f"{DAMAGED}it is no workbook)")


def test_formula_is_its_saved_value():
    """A formula gives the value that was saved with it, a saved empty text a blank."""
    rows = (
        f'<row r="1">{cell("A1", "id")}{cell("B1", "sire")}{cell("C1", "dam")}</row>'
        f'<row r="2">{cell("A2", "A")}<c r="B2" t="str"><f>CONCAT("S","1")</f><v>S1</v></c>'
        '<c r="C2" t="str"><f>TRIM(" ")</f><v></v></c></row>'
    )
    table = read(sheet_xml(rows))
    assert table.columns == (("A",), ("S1",), ("",))
    assert table.kind == 'workbook, sheet "Animals"'


def test_formulas_saved_without_value_are_blank_and_said():
    """Formulas that were never calculated are blank, counted, and the first is named."""
    content = workbook(Animals=[HEADER, ["A", "=1+1", ""], ["B", "", "=A2"]])
    table = read(content)
    assert table.columns == (("A", "B"), ("", ""), ("", ""))
    assert table.kind == (
        'workbook, sheet "Animals", 2 formulas saved without a value read as blank (first: B2)'
    )
    cells = ods_cell("A"), '<table:table-cell table:formula="of:=1+1"/>'
    table = read(open_document(("Animals", ODS_HEADER + ods_row(*cells))))
    assert table.kind.endswith(", 1 formula saved without a value read as blank (first: B2)")


def formatted(code: str, rows: list[list[object]]) -> bytes:
    """A workbook of one sheet whose cells below the header all have a number format."""
    book = openpyxl.Workbook()
    book.active.title = "Animals"
    for row in [HEADER, *rows]:
        book.active.append(row)
    for row in book.active.iter_rows(min_row=2):
        for each in row:
            each.number_format = code
    return saved(book)


@pytest.mark.parametrize(
    ("code", "value", "expected"),
    [
        ("0000", 3, "0003"),
        ("0000", 3.0, "0003"),
        ("00", 3, "03"),
        ("0000;-0000;;@", 3, "0003"),
        ("0000", 12345, "12345"),
        ("0000", 0, "0"),
        ("0000", -3, "-3"),
        ("0000", 3.5, "3.5"),
        ("0000", "3", "3"),
        ("0000", True, "yes"),
        ("0", 3, "3"),
        ("General", 3, "3"),
        ("#,##0", 3, "3"),
        ("0.00", 3, "3"),
        ('"A"0000', 3, "3"),
        ("0" * 30, 3, "3"),
    ],
)
def test_numbers_have_the_zeros_with_which_they_are_shown(code, value, expected):
    """A whole number whose format is zeros only reads as shown; 0 stays, as no parent is 0."""
    table = read(formatted(code, [["A", value, ""]]))
    assert table.columns[1] == (expected,)
    assert table.kind.endswith(", leading zeros as the sheet shows them") is (
        expected in ("0003", "03")
    )


def test_zeros_are_told_by_the_parser_too():
    """A sheet that takes the XML parser, here for its formulas, has the same zeros."""
    table = read(formatted("0000", [[1, "=A2", ""], [2, None, 1]]))
    assert table.columns == (("0001", "0002"), ("", ""), ("", "0001"))


def test_zeros_by_a_style_that_cells_need_not_name():
    """A cell without a style has the first one, which may be zeros only."""
    content = sheet_xml(
        ROWS + '<row r="3"><c r="A3"><v>7</v></c><c r="B3" s="1"><v>7</v></c></row>'
    )
    styles = (
        '<styleSheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main">'
        '<numFmts count="1"><numFmt numFmtId="164" formatCode="000"/></numFmts>'
        '<cellStyleXfs><xf numFmtId="164"/><xf numFmtId="164"/></cellStyleXfs>'
        '<cellXfs count="2"><xf numFmtId="164"/><xf numFmtId="0"/></cellXfs></styleSheet>'
    )
    table = read(with_member(content, "xl/styles.xml", styles))
    assert (table.columns[0], table.columns[1]) == (("A", "007"), ("", "7"))


def test_only_cells_with_the_format_have_zeros():
    """Formats that change from row to row are told apart, in whatever order the cells stand."""
    book = openpyxl.load_workbook(
        io.BytesIO(workbook(Animals=[HEADER, *[[n] for n in range(1, 8)]]))
    )
    for row, code in ((2, "00"), (3, "00"), (5, "000"), (6, "00"), (8, "00")):
        book.active[f"A{row}"].number_format = code
    expected = ("01", "02", "3", "004", "05", "6", "07")
    assert read(saved(book)).columns[0] == expected
    xml = zipfile.ZipFile(io.BytesIO(saved(book))).read(SHEET).decode()
    rows = re.findall(r"<row .*?</row>", xml)
    turned = xml.replace("".join(rows), "".join([rows[0], *rows[:0:-1]]))
    assert turned != xml
    assert read(with_member(saved(book), SHEET, turned)).columns[0] == expected


def test_zeros_are_counted_from_the_first_column_of_the_table():
    """A table that begins further right and further down has its zeros in the right cells."""
    book = openpyxl.Workbook()
    for row in ([], [None, None, *HEADER], [None, None, 5, 4, 3]):
        book.active.append(row)
    book.active["D3"].number_format = "0000"
    assert [column[0] for column in read(saved(book)).columns] == ["5", "0004", "3"]


@pytest.mark.parametrize(
    ("shown", "expected"), [("0003", "0003"), ("3", "3"), ("3.0", "3"), ("0", "0"), ("000", "0")]
)
def test_zeros_of_an_open_document(shown, expected):
    """A number of an .ods workbook reads as the sheet shows it, if that is with zeros."""
    value = "0" if expected == "0" else "3"
    number = ods_cell(shown, f'office:value-type="float" office:value="{value}"')
    rows = ODS_HEADER + ods_row(ods_cell("A"), number) + ods_row(ods_cell("B"), number, repeated=2)
    table = read(open_document(("Animals", rows)))
    assert table.columns[1] == (expected,) * 3
    assert table.kind.endswith("leading zeros as the sheet shows them") is (expected == "0003")


def test_many_styles_are_read():
    """Where more styles of zeros are used than are looked for one by one, all are honoured."""
    book = openpyxl.Workbook()
    book.active.append(HEADER)
    for number in range(1, 151):
        book.active.append([number])
        cell = book.active.cell(number + 1, 1)
        cell.number_format = "0000"
        cell.font = openpyxl.styles.Font(size=number)
    assert read(saved(book)).columns[0][::149] == ("0001", "0150")


def test_row_of_errors_only_is_a_row():
    """A row whose only content is an error is not passed over."""
    row = '<row r="3"><c r="B3" t="e"><f>1/0</f><v>#DIV/0!</v></c></row>'
    table = read(sheet_xml(ROWS + row))
    assert table.columns == (("A", ""), ("", "#DIV/0!"), ("", ""))
    assert tuple(table.lines) == (2, 3)


def test_duration_out_of_range_is_refused_without_a_traceback():
    """A number that no calendar holds, formatted as a duration, does not end in a traceback."""
    book = openpyxl.Workbook()
    book.active.append(HEADER)
    book.active.append(["A", "", 1e300])
    book.active["C2"].number_format = "[h]:mm:ss"
    assert refusal(saved(book)).startswith(DAMAGED)


# Rows


def test_rows_keep_their_numbers_in_the_sheet():
    """Empty rows and columns before and between change no row number."""
    blank = [None]
    animals = [[None, None, "A", "S"], blank, [], [None, None, "B"]]
    content = workbook(Animals=[blank, blank, [None, None, *HEADER], blank, *animals])
    table = read(content)
    assert table.header == tuple(HEADER)
    assert (table.header_line, tuple(table.lines)) == (3, (5, 8))
    assert table.columns == (("A", "B"), ("S", ""), ("", ""))


def test_rows_of_an_open_document_keep_their_numbers():
    """Rows that stand for many are counted as many."""
    blank = "<table:table-cell/>"
    rows = ods_row(blank, repeated=3) + ODS_HEADER + ods_row(blank, repeated=1000)
    rows += ods_row(ods_cell("A"), ods_cell("S")) + ods_row(ods_cell("B"), repeated=2)
    table = read(open_document(("Animals", rows + ods_row(blank, repeated=1_040_000))))
    assert (table.header_line, tuple(table.lines)) == (4, (1005, 1006, 1007))
    assert table.columns[0] == ("A", "B", "B")


def test_merged_cells_stand_in_their_first_place():
    """A merged cell counts once, where it begins, and its rows keep their numbers."""
    book = openpyxl.Workbook()
    for row in (HEADER, ["A", "S", ""], ["B", None, "D"]):
        book.active.append(row)
    book.active.merge_cells("B2:B3")
    table = read(saved(book))
    assert table.columns == (("A", "B"), ("S", ""), ("", "D"))


# Sheets


def test_first_sheet_with_our_columns_is_chosen():
    """Without a name the first sheet with two of our headings is read, and the others named."""
    notes = [["Herd of the north farm"], ["printed in May"]]
    table = read(workbook(Notes=notes, Old_list=[*notes, HEADER, ["A"]], New=[HEADER, ["B"]]))
    assert table.kind == 'workbook, sheet "Old list" of 3 (not read: "Notes" and "New")'
    assert table.columns[0] == ("A",)


def test_first_filled_sheet_is_chosen_where_none_has_our_columns():
    """Without any of our headings the first sheet that holds anything is read."""
    table = read(workbook(Empty=[], One=[["a", "b"], ["1", "2"]], Two=[["c"], ["3"]]))
    assert table.kind.startswith('workbook, sheet "One" of 3')


def test_sheet_with_a_header_row_only_is_not_passed_over():
    """A sheet of one row holds something."""
    assert "Line 1 reads: id, sire, dam" in refusal(workbook(Animals=[HEADER]))


def test_hidden_sheets_are_looked_at_last():
    """A hidden sheet is chosen only if no visible one serves, and called hidden."""
    book = openpyxl.load_workbook(
        io.BytesIO(workbook(Draft=[HEADER, ["old"]], Animals=[HEADER, ["A"]]))
    )
    book["Draft"].sheet_state = "hidden"
    content = saved(book)
    assert read(content).columns[0] == ("A",)
    table = read(content, "Draft")
    assert table.columns[0] == ("old",)
    assert table.kind.endswith(", a hidden sheet")


def test_charts_are_no_sheets():
    """A sheet that is a chart is neither chosen nor counted."""
    book = openpyxl.load_workbook(io.BytesIO(workbook(Animals=[HEADER, ["A"]])))
    book.create_chartsheet("Curve", 0)
    assert read(saved(book)).kind == 'workbook, sheet "Animals"'


@pytest.mark.parametrize("wanted", ["New list", "new list", " NEWLIST "])
def test_sheet_is_chosen_by_name(wanted):
    """A sheet is found by its name whatever the case and blanks."""
    content = workbook(Animals=[HEADER, ["A"]], New_list=[HEADER, ["B"]])
    table = read(content, wanted)
    assert table.columns[0] == ("B",)
    assert table.sha256 == hashlib.sha256(content).hexdigest()


def test_unknown_sheet_is_refused_with_the_nearest():
    """A sheet that is not there is refused with all names and the nearest."""
    content = workbook(Animals=[HEADER, ["A"]], Notes=[["x"]])
    assert refusal(content, "Animal") == (
        'herd.xlsx: there is no sheet "Animal".\n'
        'The workbook has "Animals" and "Notes".\n'
        'Did you mean "Animals"?'
    )
    assert refusal(content, "zzz").endswith("Name one of its sheets with --table.")


def test_names_that_differ_by_case_and_blanks_must_be_exact():
    """A name that fits two sheets is refused, unless it is exactly one of them."""
    content = open_document(
        ("A B", ODS_HEADER + ods_row(ods_cell("1"))), ("ab", ODS_HEADER + ods_row(ods_cell("2")))
    )
    assert 'They are "A B" and "ab".' in refusal(content, "AB")
    assert read(content, "ab").columns[0] == ("2",)


MOVES = [["id", "date", "event", "to"], ["A", "2001-05-01", "move", "North Quay"]]
STUDBOOK = {
    "Animals": [["id", "name", "sire", "dam"], ["A", "Ada"]],
    "Moves": [["Transfers of the last years"], [], *MOVES],
    "Sexes": [["As of May"], ["id", "sex"], ["A", "f"]],
}


def studbook(tmp_path: Path, **sheets: list[list[object]]) -> Path:
    """A workbook with all tables of a programme, on disk."""
    path = tmp_path / "studbook.xlsx"
    path.write_bytes(workbook(**(STUDBOOK | sheets)))
    return path


def test_facts_and_events_are_found_on_other_sheets(tmp_path):
    """Of one workbook each table of the call is the sheet that has its columns, and it is said."""
    path = studbook(tmp_path)
    records = read_records(path, facts=path, events=path)
    assert records.fields["sex"] == ("f",)
    assert records.fields["holder"] == ("North Quay",)
    assert records.findings == ()
    said = 'facts from studbook.xlsx (workbook, sheet "Sexes" of 3, header on line 2;'
    assert said in records.reading
    assert '1 event from studbook.xlsx (workbook, sheet "Moves" of 3)' in records.reading


def test_sheet_of_events_is_found_by_settled_columns(tmp_path):
    """Columns that the keeper settles count when the sheet and its header are looked for."""
    moves = [["All moves"], ["No.", "Day of it", "Kind"], ["A", "2001-05-01", "died"]]
    path = studbook(tmp_path, Moves=moves)
    column_map = ("No.=id", "Day of it=date", "Kind=event")
    records = read_records(path, events=path, column_map=column_map)
    assert records.fields["died"] == ("2001-05-01",)


def test_more_sheets_of_events_are_named(tmp_path):
    """Where several sheets have the columns, the first is read and the others are said."""
    path = studbook(tmp_path, Moves_of_old=MOVES, Moves=MOVES)
    reading = read_records(path, events=path).reading
    assert 'sheet "Moves" of 4 (not read: "Moves of old"))' in reading


def test_workbook_without_events_is_refused_with_its_sheets(tmp_path):
    """Where no sheet has the columns of a list of events, what each lacks is said."""
    path = studbook(tmp_path, Moves=[["id", "date", "Kind"], ["A", "2001", "move"]], Notes=[])
    with pytest.raises(RecordsError) as caught:
        read_records(path, events=path)
    assert str(caught.value).splitlines() == [
        "studbook.xlsx: no sheet looks like a list of events.",
        'Sheet "Animals", read as records: not looked at.',
        'Sheet "Moves": no column for event.',
        'Sheet "Sexes": no column for date and event.',
        'Sheet "Notes" is empty.',
        "Expected columns for id, date and event; settle one with --map 'Their Column=event'.",
    ]


def test_workbook_without_another_sheet_gives_no_facts(tmp_path):
    """The sheet of the records is not joined with itself."""
    path = tmp_path / "studbook.xlsx"
    path.write_bytes(workbook(Animals=STUDBOOK["Animals"], Notes=[["printed in May"]]))
    with pytest.raises(RecordsError, match="no sheet looks like a second table about the animals"):
        read_records(path, facts=path)
    other = tmp_path / "facts.xlsx"
    other.write_bytes(workbook(Animals=[["id", "sex"], ["A", "f"]]))
    assert read_records(path, facts=other).fields["sex"] == ("f",)


def test_empty_list_of_events_is_refused(tmp_path):
    """A sheet with the columns of events and no row says so in words of events."""
    path = studbook(tmp_path, Moves=MOVES[:1])
    with pytest.raises(RecordsError, match=r"studbook\.xlsx: there is a header but no event\."):
        read_records(path, events=path)


def test_named_sheet_without_cells_is_called_empty():
    """A sheet that was asked for and holds nothing is named."""
    content = workbook(Animals=[HEADER, ["A"]], New=[])
    assert refusal(content, "new") == (
        'herd.xlsx: the sheet "New" is empty.\nExpected a table of animals.'
    )


# Files that are no sound workbook


def archive(**members: str) -> bytes:
    """Bytes of a zip archive."""
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new:
        for name, text in members.items():
            new.writestr(name, text)
    return out.getvalue()


@pytest.mark.parametrize(
    ("content", "headline"),
    [
        (archive(**{"word/document.xml": "<x/>"}), "this is a text document (.docx)."),
        (archive(**{"ppt/presentation.xml": "<x/>"}), "this is a presentation (.pptx)."),
        (archive(**{"xl/workbook.bin": "x"}), "this is a binary workbook (.xlsb)."),
        (
            open_document(kind="text"),
            "this is an OpenDocument file, but no spreadsheet.",
        ),
        (archive(**{"animals.csv": "id"}), "this is a zip archive without a workbook."),
    ],
)
def test_archive_that_is_no_workbook_is_named(content, headline):
    """A zip archive of another kind is called what it is."""
    assert refusal(content).splitlines()[0] == f"herd.xlsx: {headline}"


@pytest.mark.parametrize("cut", [10, 500, -1000, -30, -1])
def test_truncated_workbook_is_refused(cut):
    """A workbook cut short anywhere is refused with what to do."""
    message = refusal(workbook(Animals=[HEADER, ["A"]])[:cut])
    assert message == f"{DAMAGED}it is damaged or cut short).\n{SAVE_AS}"


def test_flipped_bytes_are_refused_or_read_but_never_a_traceback():
    """Any one byte changed gives a table or a refusal."""
    sound = workbook(Animals=[HEADER, ["A", "S", "D"]])
    for place in range(0, len(sound), 7):
        changed = bytearray(sound)
        changed[place] ^= 0xFF
        with suppress(RecordsError):
            assert read(bytes(changed)).columns


def test_broken_xml_is_refused():
    """A sheet whose XML ends early is refused."""
    content = with_member(workbook(Animals=[HEADER]), SHEET, "<worksheet><sheetData><row>")
    assert refusal(content).startswith(DAMAGED)


def test_missing_sheet_is_refused():
    """A workbook that names a sheet it does not hold is refused."""
    out = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(workbook(Animals=[HEADER]))) as old,
        zipfile.ZipFile(out, "w") as new,
    ):
        for name in old.namelist():
            if name != SHEET:
                new.writestr(name, old.read(name))
    assert refusal(out.getvalue()).startswith(DAMAGED)


def test_protected_workbook_is_named():
    """Workbooks under a password are called protected, whichever program protected them."""
    protected = (
        "herd.xlsx: the workbook is protected by a password.\n"
        "Open it in your spreadsheet, save a copy without a password and read the copy."
    )
    encrypted = b"\xd0\xcf\x11\xe0" + bytes(508) + "EncryptedPackage".encode("utf-16-le")
    assert refusal(encrypted) == protected
    manifest = "<manifest:file-entry><manifest:encryption-data/></manifest:file-entry>"
    assert refusal(open_document(("A", ODS_HEADER), manifest=manifest)) == protected


# Files made to exhaust memory

BOMB = "herd.xlsx: the file unpacks to far more than a table of animals can need."


def squeezed(content: bytes, member: str, millions: int) -> bytes:
    """The archive with one more member, of so many million equal letters."""
    out = io.BytesIO(content)
    with (
        zipfile.ZipFile(out, "a", zipfile.ZIP_DEFLATED) as new,
        new.open(member, "w", force_zip64=True) as large,
    ):
        for _million in range(millions):
            large.write(b" " * 1_000_000)
    return out.getvalue()


def with_stated_size(content: bytes, size: int) -> bytes:
    """The archive whose last member is said to be of this size unpacked."""
    changed = bytearray(content)
    entry = content.rindex(b"PK\x01\x02")
    struct.pack_into("<I", changed, entry + 24, size)
    return bytes(changed)


@pytest.mark.usefixtures("little_memory")
@pytest.mark.parametrize("member", ["xl/media/image1.png", "xl/sharedStrings.xml"])
def test_zip_bomb_is_refused_by_its_stated_size(member):
    """An archive that states an absurd size is refused without unpacking it."""
    content = squeezed(workbook(Animals=[HEADER, ["A"]]), member, 150)
    assert len(content) < 1_000_000
    assert refusal(content).splitlines()[0] == BOMB


@pytest.mark.usefixtures("little_memory")
def test_zip_bomb_that_lies_about_its_size_is_refused():
    """An archive that states a small size is unpacked piece by piece and refused all the same."""
    content = squeezed(workbook(Animals=[HEADER, ["A"]]), "xl/media/image1.png", 150)
    lying = with_stated_size(content, 1000)
    assert max(member.file_size for member in zipfile.ZipFile(io.BytesIO(lying)).infolist()) < 10**6
    assert refusal(lying).splitlines()[0] == BOMB


def test_lie_about_a_size_below_the_bound_is_refused():
    """A member that is larger than stated is damage, however small."""
    content = squeezed(workbook(Animals=[HEADER, ["A"]]), "xl/media/image1.png", 1)
    assert refusal(with_stated_size(content, 1000)).startswith(DAMAGED)


@pytest.mark.usefixtures("little_memory")
def test_dimension_beyond_the_cells_takes_no_memory():
    """A sheet that claims to reach to the last cell of all is read by the cells it has."""
    table = read(sheet_xml(ROWS, dimension="A1:XFD1048576"))
    assert table.columns == (("A",), ("",), ("",))


FAR = '<row r="1048576"><c r="XFD1048576"><v>1</v></c></row>'


@pytest.mark.usefixtures("little_memory")
@pytest.mark.parametrize(
    ("rows", "declaration"),
    [
        (ROWS + FAR, ""),
        (ROWS + FAR.replace('"', "'"), ""),
        (ROWS + FAR.replace("XFD", "&#88;FD"), ""),
        (ROWS + FAR.replace("<c r=", "<c s='0' r="), ""),
        (ROWS + FAR.replace("<v>", "<f>1</f><v>"), "<?xml version='1.0' encoding='utf-8'?>"),
    ],
)
def test_cell_far_from_the_table_takes_no_memory(rows, declaration):
    """A filled cell in the last place of all is refused with both ends, however it is written."""
    assert refusal(sheet_xml(rows, declaration=declaration)).splitlines() == [
        'herd.xlsx: sheet "Animals" is too large to be read as a workbook.',
        "Its filled cells reach from A1 to XFD1048576, 17,179,869,184 places; "
        "at most 20,000,000 are read.",
        "Delete what stands far from the table, or save the sheet as CSV and try again.",
    ]


@pytest.mark.usefixtures("little_memory")
def test_empty_cell_far_from_the_table_does_no_harm():
    """A cell that only has a format, in the last place of all, is no part of the table."""
    far = '<row r="1048576"><c r="XFD1048576" s="0"/></row>'
    assert read(sheet_xml(ROWS + far)).columns == (("A",), ("",), ("",))


@pytest.mark.usefixtures("little_memory")
def test_too_large_sheet_beside_the_table_does_no_harm():
    """A sheet too large to be read is passed over if another holds the animals."""
    content = workbook(Animals=[], New=[HEADER, ["B"]])
    xml = zipfile.ZipFile(io.BytesIO(sheet_xml(ROWS.replace("id", "x") + FAR))).read(SHEET)
    content = with_member(content, SHEET, xml.decode())
    assert read(content).columns[0] == ("B",)
    assert "too large" in refusal(content, "Animals")


@pytest.mark.usefixtures("little_memory")
def test_long_text_shared_by_many_cells_takes_no_memory():
    """A text of a megabyte to which a hundred thousand cells refer is refused."""
    text = f"<sst><si><t>{'x' * 1_000_000}</t></si></sst>"
    shared = "".join(f'<row r="{n}"><c r="A{n}" t="s"><v>0</v></c></row>' for n in range(3, 99_999))
    content = with_member(sheet_xml(ROWS + shared), "xl/sharedStrings.xml", text)
    assert refusal(content).splitlines()[0] == (
        'herd.xlsx: the cells of sheet "Animals" hold more text than a table can need.'
    )


@pytest.mark.usefixtures("little_memory")
@pytest.mark.parametrize(
    "row",
    [
        ods_row(
            ods_cell("x", 'office:value-type="string" table:number-columns-repeated="16384"'),
            repeated=1_048_576,
        ),
        ods_row(ods_cell("x"), repeated=30_000_000),
        ods_row(ods_cell("x" * 100_000), repeated=1_000_000),
        ods_row("<table:table-cell/>", repeated=1_048_000)
        + ods_row('<table:table-cell table:number-columns-repeated="16380"/>', ods_cell("x")),
    ],
)
def test_cells_of_an_open_document_that_stand_for_many_take_no_memory(row):
    """Cells and rows said to be repeated beyond all measure are refused by their number."""
    message = refusal(open_document(("Animals", ODS_HEADER + row)))
    assert "too large to be read" in message or "more text than a table can need" in message


def test_entities_that_multiply_are_refused():
    """XML whose entities stand for ever more text is refused."""
    entities = "".join(
        f'<!ENTITY e{n} "{f"&e{n - 1};" * 20 if n else "x" * 20}">' for n in range(12)
    )
    rows = ROWS.replace(">A<", ">&e11;<")
    content = sheet_xml(rows, declaration=f"<!DOCTYPE worksheet [{entities}]>")
    assert refusal(content).startswith(DAMAGED)


def test_a_million_places_are_read(little_memory):
    """A full column of a sheet is within what is read."""
    rows = f'<row r="1048576">{cell("A1048576", "Z")}</row>'
    table = read(sheet_xml(ROWS + rows, dimension="A1:C1048576"))
    assert table.columns[0] == ("A", "Z")
    assert tuple(table.lines) == (2, 1_048_576)
