"""Reading a table of animals, whatever program saved it."""

from __future__ import annotations

import io
import os
import sys
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from pairing.errors import RecordsError
from pairing.records.derived_columns import names_in
from pairing.records.facts import FACTS, with_facts
from pairing.records.fields import FIELDS, folded
from pairing.records.files.delimited import read_delimited
from pairing.records.files.raw import ANIMALS
from pairing.records.mapping import EVENT_FIELDS, entries_by_table, map_columns

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence
    from typing import IO

    from pairing.dates import DateRange
    from pairing.records.files.raw import RawTable, Sought
    from pairing.records.rules import RecordRules
    from pairing.records.table import Records

_GLANCE = 1 << 16
_PIECE = 1 << 20
_MOST_TEXT = 4_000_000_000
_MOST_PACKED = 1_000_000_000
_LONGEST_LINE = 50_000_000


def read_records(
    source: str | Path,
    *,
    column_map: Sequence[str] = (),
    table: str | None = None,
    query: str | None = None,
    facts: str | Path | None = None,
    events: str | Path | None = None,
    as_of: DateRange | None = None,
    rules: RecordRules | None = None,
    stdin: bytes | None = None,
) -> Records:
    """Read a table of animals, one row each.

    Parameters
    ----------
    source
        Path of a delimited text file, a workbook (its first sheet that holds a table, unless
        `table` names one) or a Parquet file; a database address such as
        ``sqlite:///herd.db``; or ``-`` with the bytes of standard input in `stdin`.
    column_map
        See `map_columns`; an entry concerns each of the tables that has its column.
    table
        Which sheet of a workbook, or table of a database.
    query
        Which SELECT of a database, instead of a table.
    facts
        A second table about the animals, joined by id; see `with_facts`. Of a workbook the
        sheet that holds such a table is found, and that of the records not taken twice.
    events
        A list of events, found in a workbook likewise; see `with_events`.
    as_of
        Events that may lie after this day do not count.
    rules
        What the programme has settled about its records, for joining the other tables.

    Raises
    ------
    RecordsError
        If there is no such file, it is empty, has only a header, is not a table, or lacks
        a column for the id or a parent.
    """
    raw = read_table(
        source, table=table, query=query, stdin=stdin, sought=_with_map(ANIMALS, column_map)
    )
    second = listed = None
    if facts is not None:
        second = read_table(facts, sought=_with_map(FACTS, column_map), beside=raw)
    if events is not None:
        from pairing.records.events import EVENTS

        listed = read_table(events, sought=_with_map(EVENTS, column_map), beside=raw)
    own, of_facts, of_events = _shares(raw, second, listed, column_map)
    records = map_columns(raw, own)
    if second is not None:
        records = with_facts(records, second, of_facts, rules=rules)
    if listed is not None:
        from pairing.records.events import with_events

        records = with_events(records, listed, of_events, as_of=as_of, rules=rules)
    return records


def _with_map(sought: Sought, column_map: Sequence[str]) -> Sought:
    """What is sought, with the headings that a column map settles."""
    columns = dict(sought.columns)
    known = set(columns.values())
    for entry in column_map:
        theirs, _equals, field = (part.strip() for part in entry.rpartition("="))
        if field in known:
            columns.update({folded(name): field for name in (theirs, *names_in(entry)) if name})
    return replace(sought, columns=columns)


def _shares(
    raw: RawTable,
    second: RawTable | None,
    listed: RawTable | None,
    column_map: Sequence[str],
) -> tuple[tuple[str, ...], tuple[str, ...], tuple[str, ...]]:
    """Entries of a column map for the records, the facts and the events."""
    given = {
        name: (table.header, fields)
        for name, table, fields in (
            ("records", raw, {"", *FIELDS}),
            ("facts", second, {"", *FIELDS}),
            ("events", listed, {"", "id", *EVENT_FIELDS}),
        )
        if table is not None
    }
    if len(given) == 1:
        return tuple(column_map), (), ()
    shares = dict(zip(given, entries_by_table(list(given.values()), column_map), strict=True))
    return shares["records"], shares.get("facts", ()), shares.get("events", ())


def read_table(
    source: str | Path,
    *,
    table: str | None = None,
    query: str | None = None,
    stdin: bytes | None = None,
    sought: Sought = ANIMALS,
    beside: RawTable | None = None,
) -> RawTable:
    """Read a table as text, its columns not yet understood; see `read_records`.

    Parameters
    ----------
    sought
        The kind of table, by whose headings the sheet and the header are found.
    beside
        Another table of the call, whose sheet of the same workbook is not taken again.
    """
    if "://" in str(source):
        from pairing.records.files.database import is_database_address, read_database

        if is_database_address(str(source)):
            return read_database(str(source), table=table, query=query)
    name, content = _content(source, stdin)
    if query is not None:
        raise RecordsError(
            f"{name}: this is no database, so it cannot be asked with --query.",
            remedy="Leave --query out, or give an address such as sqlite:///herd.db.",
        )
    if content.startswith(b"SQLite format 3\x00"):
        raise RecordsError(
            f"{name}: this is a SQLite database.",
            remedy=f"Give it as an address, with the table: sqlite:///{source} --table NAME.",
        )
    if not content or content.isspace():
        raise RecordsError(f"{name}: the file is empty.", remedy=f"Expected a {sought.what}.")
    for reader in READERS.values():
        if content.startswith(reader.begins_with):
            return reader.read(name, content, table, sought, beside)
    if table is not None:
        raise RecordsError(
            f'{name}: this is delimited text, which holds one table only; "{table}" is not in it.',
            remedy="Leave --table out.",
        )
    return read_delimited(name, content, sought)


def _content(source: str | Path, stdin: bytes | None) -> tuple[str, bytes]:
    if str(source) == "-":
        name = "standard input"
        return name, _whole(name, sys.stdin.buffer) if stdin is None else stdin
    path = Path(source)
    if path.is_dir():
        raise RecordsError(
            f"{path}: this is a folder, not a file.", remedy="Name the file inside it."
        )
    name = path.name.encode("utf-8", "replace").decode()
    try:
        with path.open("rb") as file:
            return name, _whole(name, file)
    except FileNotFoundError:
        close = _similar_files(path)
        raise RecordsError(
            f"{path}: there is no such file.",
            remedy=f"Did you mean {close}?" if close else "Check the path and the spelling.",
        ) from None
    except OSError as error:
        raise RecordsError(
            f"{path}: the file cannot be read ({error.strerror or error}).",
            remedy="Check that you may read it and that no other program holds it.",
        ) from None


def _whole(name: str, source: IO[bytes]) -> bytes:
    """All bytes of a file, taken in pieces so that none can fill the memory unseen."""
    if source.seekable() and _in_one_piece(source):
        return source.read()
    content = io.BytesIO()
    length = 0
    is_text = True
    while piece := source.read(_PIECE):
        if content.tell() == 0:
            beginnings = (each for reader in READERS.values() for each in reader.begins_with)
            is_text = not piece.startswith(tuple(beginnings))
        content.write(piece)
        end = max(piece.rfind(b"\n"), piece.rfind(b"\r"))
        length = len(piece) - 1 - end if end >= 0 else length + len(piece)
        if is_text and length > _LONGEST_LINE:
            raise _line_too_long(name, content.getvalue())
        most = _MOST_TEXT if is_text else _MOST_PACKED
        if content.tell() > most:
            raise RecordsError(
                f"{name}: the file is larger than {most:,} bytes.",
                details=[
                    f"At most {_MOST_TEXT:,} bytes of text are read, and {_MOST_PACKED:,} of a "
                    "workbook or Parquet file."
                ],
                remedy="See that it is the table of animals; if so, save only what is needed.",
            )
    return content.getvalue()


def _in_one_piece(source: IO[bytes]) -> bool:
    """Whether a file may be read at once: it is not too large, and no line of it is too long."""
    size = source.seek(0, os.SEEK_END)
    step = _LONGEST_LINE // 2
    fits = size <= min(_MOST_PACKED, _MOST_TEXT)
    for start in range(0, size if fits else 0, step):
        source.seek(start)
        while source.tell() < min(start + step, size):
            piece = source.read(_GLANCE)
            if b"\n" in piece or b"\r" in piece:
                break
        else:
            fits = size <= _LONGEST_LINE
            break
    source.seek(0)
    return fits


def _line_too_long(name: str, content: bytes) -> RecordsError:
    line_ends = content.count(b"\n") + content.count(b"\r") - content.count(b"\r\n")
    return RecordsError(
        f"{name}, line {line_ends + 1}: the line is longer than {_LONGEST_LINE:,} bytes.",
        details=["Expected a table with one row an animal, each on a line of its own."],
        remedy="See that the file is the one you mean and that its line ends were kept.",
    )


def _similar_files(path: Path) -> str:
    from pairing.spelling import nearest_names

    try:
        names = [entry.name for entry in path.parent.iterdir() if entry.is_file()]
    except OSError:
        return ""
    close = nearest_names(path.name, names)
    return str(path.parent / close[0]) if close else ""


@dataclass(frozen=True, slots=True)
class Reader:
    """A kind of file: the bytes it begins with, and who reads it.

    `read` takes the file's name, its bytes, the name of a table inside it or None, what is
    sought, and another table of the call or None.
    """

    begins_with: tuple[bytes, ...]
    read: Callable[[str, bytes, str | None, Sought, RawTable | None], RawTable]


def _workbook(
    name: str, content: bytes, table: str | None, sought: Sought, beside: RawTable | None
) -> RawTable:
    from pairing.records.files.workbook import read_workbook

    return read_workbook(name, content, table, sought=sought, beside=beside)


def _parquet(
    name: str, content: bytes, table: str | None, _sought: Sought, _beside: RawTable | None
) -> RawTable:
    from pairing.records.files.parquet import read_parquet

    return read_parquet(name, content, table)


READERS: dict[str, Reader] = {
    "workbook": Reader((b"PK\x03\x04", b"PK\x05\x06", b"\xd0\xcf\x11\xe0"), _workbook),
    "parquet": Reader((b"PAR1",), _parquet),
}
"""Kinds of files told by how they begin; all else is tried as delimited text."""
