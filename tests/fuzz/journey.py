"""One file through all that reads records, and what must hold of it whatever it holds."""

from __future__ import annotations

import csv
import re
import signal
from contextlib import contextmanager, suppress
from dataclasses import dataclass, replace
from itertools import dropwhile
from typing import TYPE_CHECKING
from unittest import mock

import numpy as np

from pairing.dates import Age, AgeWindow, parse_date
from pairing.errors import PairingError
from pairing.kinship.engine import kinship
from pairing.pedigree.descent import build_pedigree
from pairing.policy.decision_tables import read_decision_tables
from pairing.policy.rules import Policy
from pairing.records.animals import ROLES
from pairing.records.audit import Audit, audit_records
from pairing.records.events import EVENTS, with_events
from pairing.records.files import delimited
from pairing.records.files.beginnings import DELIMITERS
from pairing.records.findings import KINDS, SEVERITIES
from pairing.records.readers import read_records, read_table
from pairing.records.rules import RecordRules
from pairing.records.written_view import view_of
from pairing.report.audit_content import audit_answer
from pairing.report.content import about
from pairing.report.export import written

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence
    from pathlib import Path

    from pairing.records.files.raw import RawTable
    from pairing.records.table import Records

SECONDS = 10
"""The time that a small file may take."""

STRICT = Policy(
    as_of=parse_date("2020-06-30"),
    records=RecordRules(
        date_order="day-first",
        selfing=True,
        parent_age={
            ("", "male"): AgeWindow(Age(1), Age(20)),
            ("", "female"): AgeWindow(Age(8, "weeks"), Age(200, "months")),
            ("hill", "male"): AgeWindow(Age(2), Age(3)),
        },
        gestation=Age(30, "days"),
        sperm_storage=Age(1),
        largest_litter=3,
    ),
)
"""A policy under which every check has something to say."""

FACTS, DECISIONS = "facts.csv", "decisions.csv"

_TITLES = 20


@dataclass(frozen=True)
class Tables:
    """The bytes of one call: the records, and tables beside them or None.

    `filled` are the lines of the records that hold anything, where whoever made them knows.
    """

    records: bytes
    facts: bytes | None = None
    events: bytes | None = None
    decisions: bytes | None = None
    strict: bool = False
    filled: tuple[int, ...] | None = None


class TooSlowError(Exception):
    """A file took longer than it may."""


@contextmanager
def in_time(seconds: float = SECONDS) -> Iterator[None]:
    """Raise `TooSlowError` in what takes longer; only where the system has alarms."""
    if not hasattr(signal, "SIGALRM"):
        yield
        return

    def ring(_number: int, _frame: object) -> None:
        raise TooSlowError(f"took more than {seconds} s")

    before = signal.signal(signal.SIGALRM, ring)
    signal.setitimer(signal.ITIMER_REAL, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)
        signal.signal(signal.SIGALRM, before)


def travel(tables: Tables, folder: Path, *, thorough: bool = False, answers: bool = False) -> str:
    """Read, audit and compute; how far the records came: refused, stopped or computed.

    Parameters
    ----------
    folder
        Where tables that are read from files are put.
    thorough
        Also read the records by columns as if they were large, and read the view again.
    answers
        Also write what `audit` says, in every format of text.

    Raises
    ------
    AssertionError
        If a row is lost, a finding is malformed, or an answer makes no sense.
    """
    try:
        raw = read_table("-", stdin=tables.records)
    except PairingError as error:
        _check_words(error)
        return "refused"
    _check_rows(raw, tables)
    policy = _policy(tables, folder)
    try:
        records = _records(tables, folder, policy)
    except PairingError as error:
        _check_words(error)
        return "refused"
    assert list(records.lines) == list(raw.lines)
    audit = audit_records(records, policy.records)
    check_findings(audit)
    _check_every_row_counts(audit)
    inbreeding = None if audit.stopping else _inbreeding(audit)
    rows = _view(audit)
    if answers:
        _check_answers(audit, policy)
    if thorough:
        _check_by_columns(tables, folder, policy, audit)
        if inbreeding is not None:
            _check_view(rows, audit, inbreeding)
    return "stopped" if inbreeding is None else "computed"


def _policy(tables: Tables, folder: Path) -> Policy:
    policy = STRICT if tables.strict else Policy()
    if tables.decisions is None:
        return policy
    path = folder / DECISIONS
    path.write_bytes(tables.decisions)
    try:
        return read_decision_tables([path], policy)
    except PairingError as error:
        _check_words(error)
        return policy


def _records(tables: Tables, folder: Path, policy: Policy) -> Records:
    records = read_records("-", stdin=tables.records)
    if tables.facts is not None:
        path = folder / FACTS
        path.write_bytes(tables.facts)
        try:
            records = read_records("-", stdin=tables.records, facts=path, rules=policy.records)
        except PairingError as error:
            _check_words(error)
    if tables.events is not None:
        with suppress(PairingError):
            events = read_table("-", stdin=tables.events, sought=EVENTS)
            records = with_events(records, events, as_of=policy.as_of, rules=policy.records)
    return records


def _inbreeding(audit: Audit) -> dict[str, float]:
    found = kinship(build_pedigree(audit))
    values = found.inbreeding
    assert np.isfinite(values).all()
    assert ((values >= -1e-12) & (values <= 1 + 1e-12)).all(), values
    return dict(zip(found.pedigree.ids, values.tolist(), strict=True))


def _view(audit: Audit) -> list[list[str]]:
    header, below = view_of(audit)
    rows = [header, *below]
    assert len(rows) == len(audit.animals) + 1
    assert {len(row) for row in rows} == {len(header)}
    assert all(isinstance(cell, str) for row in rows for cell in row)
    return rows


# What must hold


def _check_words(error: PairingError) -> None:
    """An error says what is wrong in words that can be written anywhere."""
    assert error.headline.strip()
    str(error).encode("utf-8")


def check_findings(audit: Audit) -> None:
    """Every finding is of a known kind and points to a row and a column that exist."""
    lines = set(audit.records.lines)
    columns = {*audit.records.columns.values(), *audit.records.carried}
    beside = f"{FACTS}: "
    for finding in (*audit.findings, *audit.accepted):
        assert finding.kind in KINDS, finding
        assert finding.severity in SEVERITIES, finding
        assert finding.message.strip(), finding
        assert finding.remedy.strip(), finding
        assert finding.row is None or finding.row in lines, finding
        if finding.column is not None and not finding.message.startswith(beside):
            assert finding.column in columns, finding
        finding.line(audit.records.name).encode("utf-8")


def _check_every_row_counts(audit: Audit) -> None:
    """Each row is an animal, or a finding says that it has no id."""
    without_id = {finding.row for finding in audit.findings if finding.kind == "missing-id"}
    aliases = audit.animals.aliases
    for line, name in zip(audit.records.lines, audit.records.column("id"), strict=True):
        if name == "":
            assert line in without_id, f"line {line} has no id and no finding"
        else:
            kept = aliases.get(name, name)
            assert audit.animals.names.has_row(kept), f"{name!r} of line {line} is lost"


def _check_rows(raw: RawTable, tables: Tables) -> None:
    """Every line that holds anything is in the table, or stands above it as a title."""
    text = "-separated text" in raw.kind
    if text:
        expected = _rows_by_hand(raw, tables.records)
        assert list(raw.lines) == [line for line, _cells in expected]
        width = len(raw.header)
        for place, (line, cells) in enumerate(expected):
            read = [column[place] for column in raw.columns]
            assert read == [*cells, *[""] * width][:width], f"line {line}"
            over = any(cell.strip() for cell in cells[width:])
            assert over == (place in raw.overlong), f"line {line}"
    if tables.filled is not None:
        below = [line for line in tables.filled if line > raw.header_line]
        assert list(raw.lines) == below
        assert len(tables.filled) - len(below) <= _TITLES


def _rows_by_hand(raw: RawTable, content: bytes) -> list[tuple[int, list[str]]]:
    """Rows below the header that hold anything, each with its line, by other means."""
    lines = re.findall("[^\r\n]*(?:\r\n|\r|\n)|[^\r\n]+", _text(content))
    above, below = lines[: raw.header_line - 1], lines[raw.header_line - 1 :]
    delimiter = {word: sign for sign, word in DELIMITERS.items()}[raw.kind.partition("-")[0]]
    titles = csv.reader(dropwhile(_is_comment, above), delimiter=delimiter)
    assert sum(any(cell.strip() for cell in row) for row in titles) <= _TITLES, above
    reader = csv.reader(below, delimiter=delimiter)
    rows: list[tuple[int, list[str]]] = []
    start = raw.header_line
    for row in reader:
        rows.append((start, row))
        start = raw.header_line + reader.line_num
    return [(line, row) for line, row in rows[1:] if any(cell.strip() for cell in row)]


def _is_comment(line: str) -> bool:
    return line.strip() == "" or line.lstrip().startswith("#")


def _text(content: bytes) -> str:
    if content.startswith((b"\xff\xfe", b"\xfe\xff")):
        return content.decode("utf-16")
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError:
        return content.decode("cp1252")


def _check_by_columns(tables: Tables, folder: Path, policy: Policy, audit: Audit) -> None:
    """A file read as large files are gives the same animals and the same findings."""
    with mock.patch.object(delimited, "LARGE", 1):
        records = _records(tables, folder, policy)
    other = audit_records(records, policy.records)
    assert other.records.reading == audit.records.reading
    assert list(other.records.lines) == list(audit.records.lines)
    for field, cells in audit.records.fields.items():
        assert tuple(other.records.fields[field]) == tuple(cells), field
    assert {name: tuple(cells) for name, cells in other.records.carried.items()} == {
        name: tuple(cells) for name, cells in audit.records.carried.items()
    }
    assert other.findings == audit.findings
    assert list(other.animals) == list(audit.animals)


def _check_answers(audit: Audit, policy: Policy) -> None:
    """The answer can be written in every format."""
    answer = audit_answer(audit, about("0", audit.records, policy, None, seed=1))
    for kind in ("table", "json", "csv"):
        written(answer, kind)


def _check_view(rows: Sequence[Sequence[str]], audit: Audit, inbreeding: dict[str, float]) -> None:
    """The view is read again to the same animals with the same inbreeding."""
    if any("\x00" in cell for row in rows for cell in row):
        return  # a sign that no text file may hold
    if len(rows) == 1:
        return
    content = "\n".join(",".join(_quoted(cell) for cell in row) for row in rows).encode()
    again = audit_records(read_records("-", stdin=content))
    assert not again.stopping, [finding.message for finding in again.stopping]
    values = _inbreeding(again)
    assert values.keys() <= inbreeding.keys()
    assert _in_use(audit) <= values.keys()
    assert all(abs(values[name] - inbreeding[name]) < 1e-9 for name in values)


def _in_use(audit: Audit) -> set[str]:
    """Animals with a row, and all that are a parent in the view."""
    view = audit.animals
    sides = ((role, place) for role in ROLES for place in range(len(view)))
    parents = {name for role, place in sides for name, _chance in view.parents(role, place)}
    return parents | {animal.id for animal in view}


def _quoted(cell: str) -> str:
    return '"' + cell.replace('"', '""') + '"'


def with_rows(tables: Tables, rows: Sequence[Sequence[str]]) -> Tables:
    """The same call with records of these cells, every one in quotation marks."""
    text = "\n".join(",".join(map(_quoted, row)) for row in rows)
    return replace(tables, records=text.encode())
