"""Tables from Parquet files, column by column."""

from __future__ import annotations

import hashlib
import io
from typing import TYPE_CHECKING

from pairing.errors import RecordsError
from pairing.records.files.cells import cell_text
from pairing.records.files.raw import RawTable

if TYPE_CHECKING:
    from collections.abc import Sequence

    import pyarrow as pa

_MOST_CELLS = 500_000_000


def read_parquet(name: str, content: bytes, table: str | None = None) -> RawTable:
    """A table from a Parquet file, every value as text.

    The columns' names count as row 1, so that `lines` start at 2.

    Parameters
    ----------
    name
        The file's own name.
    content
        Its bytes.
    table
        Must be None: a Parquet file holds a single table.

    Raises
    ------
    RecordsError
        If the file is damaged, holds no row, has columns that are no plain values (lists,
        records, bytes that are no text), claims far more rows than a table can need, or
        `table` is given.
    """
    import pyarrow as pa
    import pyarrow.parquet as pq

    if table is not None:
        raise RecordsError(
            f'{name}: a Parquet file holds a single table, there is no "{table}" in it.',
            remedy="Leave --table out.",
        )
    try:
        with pq.ParquetFile(io.BytesIO(content)) as file:
            _refuse_too_many(name, file.metadata.num_rows, file.metadata.num_columns)
            schema = file.schema_arrow
            _refuse_nested(name, schema)
            texts = [field.name for field in schema if _is_text(field.type)]
        # Repeated text is decoded once for all rows: a small file may repeat a long one.
        with pq.ParquetFile(io.BytesIO(content), read_dictionary=texts) as file:
            columns = [
                _texts(name, heading, column)
                for heading, column in zip(schema.names, file.read().columns, strict=True)
            ]
    except (pa.ArrowException, OSError, ValueError, OverflowError) as error:
        why = " ".join(str(error).split()).rstrip(".") or "it is damaged"
        raise RecordsError(
            f"{name}: the Parquet file cannot be read ({why}).",
            remedy="Write it again, or save the table as CSV and try again.",
        ) from None
    header = tuple(" ".join(heading.split()) for heading in schema.names)
    return _without_blank_rows(name, hashlib.sha256(content).hexdigest(), header, columns)


def _refuse_too_many(name: str, rows: int, columns: int) -> None:
    """Refuse by what the file states: a few bytes may stand for any number of equal values."""
    if rows * columns > _MOST_CELLS:
        raise RecordsError(
            f"{name}: the file claims {rows:,} rows of {columns:,} columns.",
            details=[f"At most {_MOST_CELLS:,} cells are read."],
            remedy="Write only the columns that are needed.",
        )


def _is_text(kind: pa.DataType) -> bool:
    import pyarrow.types as kinds

    return bool(kinds.is_string(kind) or kinds.is_large_string(kind))


def _refuse_nested(name: str, schema: pa.Schema) -> None:
    import pyarrow.types as kinds

    def value_kind(kind: pa.DataType) -> pa.DataType:
        return value_kind(kind.value_type) if kinds.is_dictionary(kind) else kind

    faults = [
        f'Column "{field.name}" holds {field.type}; expected text, numbers, dates or yes and no.'
        for field in schema
        if kinds.is_nested(value_kind(field.type))
    ]
    if faults:
        raise _unsuitable(name, faults)


def _unsuitable(name: str, faults: Sequence[str]) -> RecordsError:
    return RecordsError(
        f"{name}: not every column can be read as text.",
        details=faults,
        remedy="Leave such a column out of the file, or write its values as text.",
    )


def _texts(name: str, heading: str, column: pa.ChunkedArray) -> tuple[str, ...]:
    """One column as text: equal values of a dictionary share one text."""
    import pyarrow as pa

    texts: list[str] = []
    for chunk in column.chunks:
        if isinstance(chunk, pa.DictionaryArray):
            # A damaged file may point beyond its dictionary.
            chunk.validate(full=True)
            words = _value_texts(name, heading, chunk.dictionary)
            words.append("")
            texts.extend(map(words.__getitem__, chunk.indices.fill_null(-1).to_pylist()))
        else:
            texts.extend(_value_texts(name, heading, chunk))
    return tuple(texts)


def _value_texts(name: str, heading: str, values: pa.Array) -> list[str]:
    import pyarrow as pa
    import pyarrow.types as kinds

    kind = values.type
    if isinstance(kind, pa.BaseExtensionType) and kind.extension_name != "arrow.uuid":
        return _value_texts(name, heading, values.storage)
    if kinds.is_binary(kind) or kinds.is_large_binary(kind):
        try:
            values = values.cast(pa.large_string())
        except pa.ArrowInvalid:
            raise _unsuitable(
                name, [f'Column "{heading}" holds bytes that are no text (UTF-8).']
            ) from None
    if kinds.is_timestamp(kind) or kinds.is_duration(kind) or kinds.is_time64(kind):
        values = values.cast(_to_the_microsecond(kind), safe=False)
    if kinds.is_integer(kind):
        values = values.cast(pa.string())
    if kinds.is_float16(kind) or kinds.is_float32(kind):
        # By way of text, so that 0.1 of half the precision stays 0.1.
        values = values.cast(pa.string()).cast(pa.float64())
    texts = [cell_text(value) for value in values.to_pylist()]
    if None in texts:
        raise _unsuitable(name, [f'Column "{heading}" holds {kind}, which has no plain text.'])
    return [text or "" for text in texts]


def _to_the_microsecond(kind: pa.DataType) -> pa.DataType:
    """The same kind of time in microseconds, the finest that Python's own times hold."""
    import pyarrow as pa
    import pyarrow.types as kinds

    if kinds.is_timestamp(kind):
        return pa.timestamp("us", tz=kind.tz)
    return pa.duration("us") if kinds.is_duration(kind) else pa.time64("us")


def _without_blank_rows(
    name: str, sha256: str, header: tuple[str, ...], columns: Sequence[tuple[str, ...]]
) -> RawTable:
    rows = len(columns[0]) if columns else 0
    if not header:
        raise RecordsError(f"{name}: the file is empty.", remedy="Expected a table of animals.")
    blank = [place for place in range(rows) if not columns[0][place].strip()]
    for column in columns[1:]:
        blank = [place for place in blank if not column[place].strip()]
    if len(blank) == rows:
        raise RecordsError(
            f"{name}: there is a header but no animal.",
            details=[f"Its columns are: {', '.join(header)}"],
            remedy="Expected one row an animal.",
        )
    lines: Sequence[int] = range(2, rows + 2)
    if blank:
        left_out = set(blank)
        kept = [place for place in range(rows) if place not in left_out]
        columns = [tuple(column[place] for place in kept) for column in columns]
        lines = tuple(place + 2 for place in kept)
    return RawTable(name, "Parquet", sha256, header, 1, tuple(columns), lines)
