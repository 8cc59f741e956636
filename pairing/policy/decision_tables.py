"""Decisions in tables, for keepers who do not write TOML: CSV or a workbook, one row a decision.

What a row may hold is what `KEYS` says of `[[pairs]]`, `[[animals]]` and
`[[records.decisions]]`; which of the three it is follows from its decision.
"""

from __future__ import annotations

import hashlib
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from pairing.errors import PolicyError, RecordsError
from pairing.policy.keys import KEYS, NotUnderstoodError, missing_keys, needless_keys, one_of
from pairing.policy.rules import (
    ANIMAL_DECISIONS,
    PAIR_DECISIONS,
    AnimalDecision,
    PairDecision,
    Policy,
    pair_clashes,
    record_clashes,
)
from pairing.records.fields import FIELDS, folded
from pairing.records.findings import KINDS
from pairing.records.readers import read_table
from pairing.records.rules import DECISIONS, Decision
from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Mapping, Sequence
    from pathlib import Path

    from pairing.records.files.raw import RawTable

DECISION_WORDS: dict[str, tuple[str, ...]] = {
    "pairs": PAIR_DECISIONS,
    "animals": ANIMAL_DECISIONS,
    "records.decisions": tuple(DECISIONS),
}
"""List of the policy to the decisions that its rows may have."""

_ALL_WORDS = tuple(dict.fromkeys(word for words in DECISION_WORDS.values() for word in words))
_COLUMNS = {folded(key): key for table in DECISION_WORDS for key in KEYS[table]}
_SAME_COLUMN = {"reason": "why"}
"""`reason` of the season's decisions and `why` of those about records may share a column."""
_KEPT_AS_NOTES = ("who", "when")
"""Columns that a row without a use for them may fill; they stay in the table."""
_LONGEST_NUMBER = 12
_NUMBERS = ("row", "litters")
_WORDS: dict[str, tuple[str, ...]] = {
    "decision": _ALL_WORDS,
    "parent": ("sire", "dam"),
    "field": tuple(FIELDS),
    "kind": tuple(KINDS),
}
"""Keys whose cells are words of ours, written in any case and with blanks for hyphens."""


def read_decision_tables(paths: Sequence[Path], policy: Policy) -> Policy:
    """The policy with the decisions of tables after its own.

    A table has a column `decision` and whatever its decisions need, in any order: `sire`,
    `dam`, `until`, `reason`; `id`, `litters`; `row`, `also` (several ids separated by ``|``),
    `parent`, `field`, `value`, `kind`, `who`, `when`, `why`. Other columns are the keeper's
    own, unless one looks like a misspelling of these.

    The `sha256` of the result is that of the text of all digests, one a line: the policy's
    (an empty line without a file), then those of the tables in their order.

    Raises
    ------
    PolicyError
        If a table cannot be read, a row does not say what its decision needs, or decisions
        contradict each other or the policy's. All faults are named together.
    """
    if not paths:
        return policy
    problems: list[str] = []
    rows: list[_Row] = []
    names, digests = [], [policy.sha256 or ""]
    for path in paths:
        try:
            table = read_table(path)
        except RecordsError as error:
            names.append(path.name)
            problems.append(" ".join([error.headline, *error.details, error.remedy]).rstrip())
            continue
        names.append(table.name)
        digests.append(table.sha256)
        rows += _rows(table, problems)
    extended = _extended(policy, rows, problems)
    if problems:
        raise PolicyError(
            f"{listed(names)}: the decisions cannot be used as they are.",
            details=problems,
            remedy="Correct what is named above and save the table again.",
        )
    digest = hashlib.sha256("\n".join(digests).encode()).hexdigest()
    return replace(extended, sha256=digest)


@dataclass(frozen=True, slots=True)
class _Row:
    """A row without a fault: the list it belongs to, its place, and its values by key."""

    table: str
    place: str
    values: Mapping[str, Any]


def _extended(policy: Policy, rows: Sequence[_Row], problems: list[str]) -> Policy:
    def both(
        table: str, own: Sequence[Any], entry: Callable[..., Any]
    ) -> tuple[tuple[str, Any], ...]:
        here = [(f"the policy's [[{table}]] number {n}", each) for n, each in enumerate(own, 1)]
        more = [(row.place, entry(**row.values)) for row in rows if row.table == table]
        # What a table repeats from the policy, as after `pairing start`, is decided once.
        return (*here, *(each for each in more if each[1] not in own))

    pairs = both("pairs", policy.pairs, PairDecision)
    animals = both("animals", policy.animals, AnimalDecision)
    about_records = both("records.decisions", policy.records.decisions, Decision)
    problems += pair_clashes(pairs) + record_clashes(about_records)
    return replace(
        policy,
        pairs=tuple(each for _place, each in pairs),
        animals=tuple(each for _place, each in animals),
        records=replace(policy.records, decisions=tuple(each for _place, each in about_records)),
    )


def _columns(table: RawTable, problems: list[str]) -> dict[str, list[int]]:
    """Key to the places of its columns; faults of the header go to `problems`."""
    columns: dict[str, list[int]] = {}
    for position, heading in enumerate(table.header):
        key = _COLUMNS.get(folded(heading))
        if key:
            columns.setdefault(_SAME_COLUMN.get(key, key), []).append(position)
        elif meant := _misspelled(heading):
            problems.append(
                f'{table.name}, line {table.header_line}, column "{heading}": not known. Did you '
                f'mean "{meant}"? If it holds notes of your own, give it another name.'
            )
    if "decision" not in columns:
        problems.append(
            f'{table.name}, line {table.header_line}: found no column "decision", expected '
            f"one that says in each row what is decided: {', '.join(_ALL_WORDS)}."
        )
    return columns


def _misspelled(heading: str) -> str:
    """The column of ours that a heading is a misspelling of, or an empty string."""
    import difflib

    # Nearer than elsewhere: "Remarks" is a column of notes and not "reason".
    close = difflib.get_close_matches(folded(heading), _COLUMNS, n=1, cutoff=0.7)
    return _COLUMNS[close[0]] if close else ""


def _rows(table: RawTable, problems: list[str]) -> Iterator[_Row]:
    """The rows of a table that are without a fault; the faults go to `problems`."""
    columns = _columns(table, problems)
    if "decision" not in columns:
        return
    for number, line in enumerate(table.lines):
        place = f"{table.name}, line {line}"
        if number in table.overlong:
            problems.append(
                f"{place}: found more cells than the {len(table.header)} columns of the header, "
                "expected none beyond them."
            )
            continue
        cells = {
            key: [(table.header[at], table.columns[at][number].strip()) for at in positions]
            for key, positions in columns.items()
        }
        if not any(cell for same in cells.values() for _heading, cell in same):
            continue
        row, faults = _read_row(place, cells)
        problems += faults
        if row:
            yield row


def _read_row(
    place: str, cells: Mapping[str, Sequence[tuple[str, str]]]
) -> tuple[_Row | None, list[str]]:
    """A row from its cells, key to each heading with its cell, or the faults that it has."""
    faults: list[str] = []
    filled: dict[str, tuple[str, str]] = {}
    for key, same in cells.items():
        for heading, cell in same:
            if cell and filled.setdefault(key, (heading, cell))[1] != cell:
                faults.append(
                    f'{place}, column "{heading}": found "{cell}", expected blank or the same as '
                    f'in column "{filled[key][0]}".'
                )
    heading, cell = filled.get("decision", (cells["decision"][0][0], ""))
    decision = _our_word("decision", cell)
    try:
        one_of(*_ALL_WORDS)(decision)
    except NotUnderstoodError as expected:
        return None, [*faults, _fault(place, heading, cell, str(expected))]
    table = _table_of(decision, filled)
    if table is None:
        faults.append(
            f'{place}: found {_told(filled)}, expected either "sire" and "dam" or "id" filled; '
            f"{decision} is about a pair or about one animal."
        )
        return None, faults
    values, more = _read_cells(place, table, decision, filled, cells)
    faults += more
    return (None if faults else _Row(table, place, values)), faults


def _table_of(decision: str, filled: Mapping[str, object]) -> str | None:
    """The list that a row belongs to; None when its animals do not tell."""
    tables = [table for table, words in DECISION_WORDS.items() if decision in words]
    if len(tables) > 1:
        of_pair, of_one = bool(filled.keys() & {"sire", "dam"}), "id" in filled
        tables = [] if of_pair == of_one else ["pairs" if of_pair else "animals"]
    return tables[0] if tables else None


def _told(filled: Mapping[str, tuple[str, str]]) -> str:
    named = [f'{key} "{filled[key][1]}"' for key in ("id", "sire", "dam") if key in filled]
    return listed(named) or "none of them"


def _read_cells(
    place: str,
    table: str,
    decision: str,
    filled: Mapping[str, tuple[str, str]],
    cells: Mapping[str, object],
) -> tuple[dict[str, Any], list[str]]:
    keys = KEYS[table]
    faults = []
    values: dict[str, Any] = {"decision": decision}
    if decision == "set" and "value" in cells:
        values["value"] = ""
    given = {_own_name(key, table): said for key, said in filled.items() if key != "decision"}
    needless = needless_keys(table, decision, given)
    for key, (heading, cell) in given.items():
        if key not in keys or key in needless:
            if key not in _KEPT_AS_NOTES:
                faults.append(
                    _fault(place, heading, cell, f'a blank cell; {decision} does not take "{key}"')
                )
            continue
        try:
            values[key] = keys[key].convert(_typed(key, cell))
        except NotUnderstoodError as expected:
            faults.append(_fault(place, heading, cell, str(expected)))
    required = [key for key, described in keys.items() if described.required]
    faults += [
        f'{place}, column "{key}": found nothing, expected {keys[key].meaning}; '
        f"{decision} needs it."
        for key in [*required, *missing_keys(table, decision, values)]
        if key not in values and key not in given
    ]
    return values, faults


def _own_name(key: str, table: str) -> str:
    return "reason" if key == "why" and "reason" in KEYS[table] else key


def _typed(key: str, cell: str) -> object:
    """A cell as the policy file would write it."""
    if key in _NUMBERS and cell.isascii() and cell.isdigit() and len(cell) <= _LONGEST_NUMBER:
        return int(cell)
    if key == "also":
        return [part for part in map(str.strip, cell.split("|")) if part]
    return _our_word(key, cell)


def _our_word(key: str, cell: str) -> str:
    return {folded(word): word for word in _WORDS.get(key, ())}.get(folded(cell), cell)


def _fault(place: str, heading: str, cell: str, expected: str) -> str:
    found = f'"{cell}"' if cell else "nothing"
    return f'{place}, column "{heading}": found {found}, expected {expected}.'
