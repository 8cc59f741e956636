"""A second table about the animals, joined by id: what the records leave blank, it fills."""

from __future__ import annotations

import hashlib
from collections import defaultdict
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from pairing.records.fields import MISSING_PARENT
from pairing.records.findings import Finding
from pairing.records.mapping import map_columns
from pairing.records.words import same_meaning
from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from pairing.records.raw import RawTable
    from pairing.records.table import Records

_LATEST = "last_seen"
_MOST_NAMED = 6


@dataclass(frozen=True, slots=True)
class _Told:
    """What the rows of the second table say of one animal in one column: words and lines."""

    words: Mapping[str, str]
    lines: tuple[int, ...]


def with_facts(records: Records, facts: RawTable, column_map: Sequence[str] = ()) -> Records:
    """The records with the cells that a second table adds.

    An animal may have many rows there, as in a list of captures; they fill a cell only where
    they all agree (of ``last_seen`` the latest counts). A cell of the records is never
    replaced: where the second table says something else, that is a finding.

    Parameters
    ----------
    facts
        A table with a column for the id.
    column_map
        As for `map_columns`.

    Raises
    ------
    RecordsError
        If the second table has no column for the id.
    """
    second = map_columns(facts, column_map, required=("id",))
    rows: dict[str, list[int]] = defaultdict(list)
    for row, name in enumerate(second.column("id")):
        if name:
            rows[name].append(row)
    findings = _strangers(records, second, rows)
    fields, columns = dict(records.fields), dict(records.columns)
    for field, cells in second.fields.items():
        if field == "id":
            continue
        fields[field], found = _filled(records, second, rows, field, cells)
        columns.setdefault(field, second.columns[field])
        findings += found
    carried, split = _carried(records, second, rows)
    reading = f"{records.reading}; facts from {second.name} ({second.reading})"
    if split:
        reading += f"; not carried, as rows of one animal differ: {listed(split)}"
    digest = hashlib.sha256(f"{records.sha256}\n{second.sha256}".encode()).hexdigest()
    return replace(
        records,
        reading=reading,
        sha256=digest,
        fields=fields,
        carried=carried,
        columns=columns,
        findings=(*records.findings, *findings),
    )


def _strangers(records: Records, second: Records, rows: Mapping[str, list[int]]) -> list[Finding]:
    known = {*records.column("id"), *records.column("sire"), *records.column("dam")}
    strangers = [name for name in rows if name not in known]
    if not strangers:
        return []
    lines = [int(second.lines[rows[name][0]]) for name in strangers[:_MOST_NAMED]]
    return [
        Finding(
            "fact-without-animal",
            f"{second.name} has rows about {len(strangers):,} "
            f"{'id' if len(strangers) == 1 else 'ids'} that the records do not name: "
            f"{listed(strangers, most=_MOST_NAMED)} (line{'s' if len(lines) > 1 else ''} "
            f"{listed(map(str, lines))}).",
            "Correct the ids there or in the records; the rows are not used.",
            found=strangers[0],
        )
    ]


def _told(second: Records, rows: Sequence[int], field: str, cells: Sequence[str]) -> _Told:
    words: dict[str, str] = {}
    for row in rows:
        cell = cells[row]
        meaning = same_meaning(field, cell)
        if meaning and cell.casefold() not in MISSING_PARENT - {"wild"}:
            words.setdefault(meaning, cell)
    return _Told(words, tuple(int(second.lines[row]) for row in rows))


def _filled(
    records: Records,
    second: Records,
    rows: Mapping[str, list[int]],
    field: str,
    cells: Sequence[str],
) -> tuple[tuple[str, ...], list[Finding]]:
    own = list(records.column(field))
    findings: list[Finding] = []
    for place, name in enumerate(records.column("id")):
        if name not in rows:
            continue
        told = _told(second, rows[name], field, cells)
        if len(told.words) > 1 and field == _LATEST:
            told = _Told(_latest(told.words), told.lines)
        said = same_meaning(field, own[place])
        blank = said == "" or own[place].casefold() in MISSING_PARENT - {"wild"}
        if blank and len(told.words) == 1:
            own[place] = next(iter(told.words.values()))
        elif (blank and len(told.words) > 1) or (not blank and set(told.words) - {said}):
            findings.append(_disagreement(records, second, place, field, told, own[place]))
    return tuple(own), findings


def _latest(words: Mapping[str, str]) -> dict[str, str]:
    """The latest of several dates; all of them where one cannot be read."""
    from pairing.records.date_columns import read_date_column

    cells = list(words.values())
    dates = read_date_column(cells, field=_LATEST).dates
    known = [(date.latest, cell) for date, cell in zip(dates, cells, strict=True) if date]
    if len(known) < len(cells):
        return dict(words)
    return {"latest": max(known)[1]}


def _disagreement(
    records: Records, second: Records, place: int, field: str, told: _Told, own: str
) -> Finding:
    name = records.column("id")[place]
    where = listed((str(line) for line in told.lines), most=4)
    said = " or ".join(f'"{cell}"' for cell in told.words.values())
    kept = f'the records\' own "{own}" is used' if own else "none of them is used"
    return Finding(
        "facts-disagree",
        f"{name}: {field} is {said} in {second.name} (line{'s' if len(told.lines) > 1 else ''} "
        f"{where}); {kept}.",
        "Correct one of the two tables.",
        id=name,
        row=int(records.lines[place]),
        column=records.columns.get(field, second.columns[field]),
        found=own,
    )


def _carried(
    records: Records, second: Records, rows: Mapping[str, list[int]]
) -> tuple[dict[str, Sequence[str]], list[str]]:
    """Other columns of the second table, where all rows of each animal agree."""
    carried = dict(records.carried)
    split = []
    for heading, cells in second.carried.items():
        values = {name: {cells[row] for row in places} - {""} for name, places in rows.items()}
        if any(len(words) > 1 for words in values.values()):
            split.append(heading)
            continue
        name = heading if heading not in carried else f"{heading} ({second.name})"
        carried[name] = tuple(next(iter(values.get(each, ())), "") for each in records.column("id"))
    return carried, split
