"""Reading Parquet files."""

import datetime
import hashlib
import io
import uuid
from decimal import Decimal

import pyarrow as pa
import pyarrow.parquet as pq
import pytest

from pairing.errors import RecordsError
from pairing.records.files.parquet import read_parquet
from pairing.records.mapping import map_columns

DAY = datetime.date(2019, 5, 1)
NOON = datetime.datetime(2019, 5, 1, 12, 30)
MIDNIGHT = datetime.datetime(2019, 5, 1)


def parquet(columns: dict[str, object], **options: object) -> bytes:
    """Bytes of a Parquet file with these columns."""
    out = io.BytesIO()
    pq.write_table(pa.table(columns), out, **options)
    return out.getvalue()


def refusal(content: bytes, **options: object) -> str:
    """Message with which a file is refused."""
    with pytest.raises(RecordsError) as caught:
        read_parquet("herd.parquet", content, **options)
    assert caught.value.exit_status == 2
    return str(caught.value)


@pytest.mark.parametrize(
    ("values", "expected"),
    [
        (pa.array(["007", " a  b ", None, "NULL"]), ("007", " a  b ", "", "NULL")),
        (pa.array(["Tür", "x"], pa.large_string()), ("Tür", "x")),
        (pa.array([7, None, -3], pa.int64()), ("7", "", "-3")),
        (pa.array([2**64 - 1], pa.uint64()), ("18446744073709551615",)),
        (pa.array([7.0, 0.1, None, float("nan")]), ("7", "0.1", "", "")),
        (pa.array([0.1, 7.0], pa.float32()), ("0.1", "7")),
        (pa.array([True, False, None]), ("yes", "no", "")),
        (pa.array([DAY, None]), ("2019-05-01", "")),
        (pa.array([MIDNIGHT, NOON], pa.timestamp("ns")), ("2019-05-01", "2019-05-01 12:30:00")),
        (pa.array([NOON], pa.timestamp("us", tz="UTC")), ("2019-05-01 12:30:00+00:00",)),
        (pa.array([datetime.time(6, 5)], pa.time64("ns")), ("06:05:00",)),
        (pa.array([datetime.timedelta(hours=30)]), ("30:00:00",)),
        (pa.array([Decimal("5.00"), Decimal("0.50"), Decimal("100")]), ("5", "0.5", "100")),
        (pa.array(["f", "m", None, "f"]).dictionary_encode(), ("f", "m", "", "f")),
        (pa.array([b"T\xc3\xbcr", None], pa.binary()), ("Tür", "")),
        (pa.array([uuid.UUID(int=7).bytes], pa.uuid()), (str(uuid.UUID(int=7)),)),
    ],
)
def test_values_are_read_as_a_keeper_writes_them(values, expected):
    """Every plain kind of value becomes its text, and nothing becomes a blank."""
    ids = [f"A{place}" for place in range(len(values))]
    table = read_parquet("herd.parquet", parquet({"id": ids, "value": values}))
    assert table.columns[1] == expected


def test_all_about_the_file_is_told():
    """Name, kind, fingerprint, headings and line numbers describe the file as read."""
    content = parquet({" animal  id ": ["A", "B"], "sire": [None, "A"], "dam": [None, None]})
    table = read_parquet("herd.parquet", content)
    assert (table.name, table.kind, table.header_line) == ("herd.parquet", "Parquet", 1)
    assert table.sha256 == hashlib.sha256(content).hexdigest()
    assert table.header == ("animal id", "sire", "dam")
    assert tuple(table.lines) == (2, 3)
    assert map_columns(table).fields["sire"] == ("", "A")


def test_wholly_blank_rows_are_left_out_and_keep_the_numbers_of_others():
    """A row without any value is left out, and the rows below it keep their numbers."""
    content = parquet({"id": ["A", None, "", "B"], "sire": [None, "  ", "A", "A"]})
    table = read_parquet("herd.parquet", content)
    assert table.columns == (("A", "", "B"), ("", "A", "A"))
    assert tuple(table.lines) == (2, 4, 5)


def test_rows_in_several_groups_stay_in_order():
    """Columns cut into many groups, each with words of its own, are joined in order."""
    ids = [f"A{place}" for place in range(1000)]
    content = parquet({"id": ids, "sex": ["f", "m"] * 500}, row_group_size=7)
    table = read_parquet("herd.parquet", content)
    assert table.columns == (tuple(ids), ("f", "m") * 500)


def test_lists_and_records_are_refused_with_every_such_column():
    """Columns of lists and records are named, all of them, with what to do."""
    content = parquet({"id": ["A"], "tests": [["x"]], "place": [{"farm": 1}]})
    message = refusal(content)
    assert 'Column "tests" holds list<' in message
    assert 'Column "place" holds struct<' in message
    assert message.endswith("Leave such a column out of the file, or write its values as text.")


def test_bytes_that_are_no_text_are_refused_with_their_column():
    """A column of bytes that are no UTF-8 is named."""
    content = parquet({"id": ["A"], "photo": pa.array([b"\xff\xfe\x00"], pa.binary())})
    assert 'Column "photo" holds bytes that are no text (UTF-8).' in refusal(content)


@pytest.mark.parametrize("cut", [4, 30, -9, -1])
def test_damaged_file_is_refused(cut):
    """A file cut short anywhere is refused with what to do, and without a traceback."""
    message = refusal(parquet({"id": ["A", "B"], "sire": ["", "A"]})[:cut])
    assert message.startswith("herd.parquet: the Parquet file cannot be read (")
    assert message.endswith("Write it again, or save the table as CSV and try again.")


def test_file_without_rows_is_refused():
    """A file of columns without rows is shown its headings."""
    assert refusal(parquet({"id": pa.array([], pa.string())})) == (
        "herd.parquet: there is a header but no animal.\n"
        "Its columns are: id\n"
        "Expected one row an animal."
    )


def test_named_table_is_refused():
    """--table has nothing to choose in a Parquet file, and the name is not passed over."""
    message = refusal(parquet({"id": ["A"]}), table="Animals")
    assert message == (
        'herd.parquet: a Parquet file holds a single table, there is no "Animals" in it.\n'
        "Leave --table out."
    )


def test_file_that_claims_billions_of_cells_is_refused():
    """A small file that stands for half a billion cells and more is refused by its own count."""
    rows = 20_000_001
    nothing = pa.nulls(rows)
    content = parquet({f"c{place}": nothing for place in range(26)})
    assert len(content) < 1_000_000
    assert refusal(content).startswith(
        "herd.parquet: the file claims 20,000,001 rows of 26 columns."
    )


@pytest.mark.parametrize("said_to_repeat", [True, False])
def test_long_text_repeated_in_a_small_file_is_held_once(said_to_repeat):
    """A megabyte of text in ten thousand rows takes a megabyte, not ten thousand."""
    words = pa.DictionaryArray.from_arrays(pa.array([0] * 10_000, pa.int32()), ["x" * 1_000_000])
    content = parquet(
        {"id": [str(place) for place in range(10_000)], "note": words}, store_schema=said_to_repeat
    )
    table = read_parquet("herd.parquet", content)
    assert len(set(map(id, table.columns[1]))) == 1
