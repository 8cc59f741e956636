"""Which column is which field: recognised by its heading, settled by the keeper, or asked about."""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING

from pairing.errors import RecordsError
from pairing.records.columns import tidied
from pairing.records.conditions import condition_columns
from pairing.records.derived_columns import (
    column_place,
    names_in,
    no_column,
    with_derived_columns,
)
from pairing.records.fields import (
    ASKED_ABOUT,
    FIELDS,
    HINTS,
    HOLDER_STAND_INS,
    SPELLINGS,
    folded,
    tidy,
)
from pairing.records.findings import Finding
from pairing.records.table import Records
from pairing.spelling import did_you_mean, listed

if TYPE_CHECKING:
    from collections.abc import Collection, Sequence

    from pairing.records.files.raw import RawTable

EVENT_FIELDS = ("date", "event", "from", "to")
"""Columns that only a list of events has."""
IDENTITY_FIELDS = ("id", "sire", "dam", "clone_of", "genetic_dam")
_JOINT = "-"


def map_columns(
    table: RawTable,
    column_map: Sequence[str] = (),
    *,
    required: Sequence[str] = ("id", "sire", "dam"),
) -> Records:
    """Give the columns of a raw table the names of our fields.

    Parameters
    ----------
    column_map
        Settled by the keeper: ``"Their Column=field"``, ``"A+B=id"`` to join columns with
        a hyphen, ``"Earliest/Latest=born"`` or ``"Earliest/Date/Latest=born"`` for a date
        between bounds, ``"Column~PATTERN=field"`` to take what a regular expression finds
        in a column (its first group, if it has one), ``"Column="`` to leave a column alone,
        ``"=field"`` where there is no column for a required field.
    required
        Fields without which the table is refused.

    Raises
    ------
    RecordsError
        If there is no column for a required field, two columns claim one of them, or
        `column_map` names a column or field that does not exist.
    """
    overlong = _overlong_rows(table)
    table, column_map, problems = with_derived_columns(table, column_map)
    settled, left_alone, more = settled_columns(table.header, column_map)
    problems += more
    chosen, findings, ambiguous = _recognised_columns(table.header, settled, left_alone)
    problems += ambiguous
    missing = [field for field in required if field not in chosen]
    if missing and not problems:
        problems.append(_missing_columns(table.header, missing))
    if problems:
        raise RecordsError(
            f"{table.name}: the columns cannot be told apart.",
            details=problems,
            remedy="Settle a column with --map 'Their Column=field', for instance "
            "--map 'Father=sire'.",
        )
    fields = {field: cells_of(table, where, field) for field, where in chosen.items()}
    used = {position for where in chosen.values() if len(where) == 1 for position in where}
    carried = {
        name: table.columns[position]
        for position, name in enumerate(_distinct(table.header))
        if position not in used
    }
    columns = {
        field: "+".join(table.header[position] for position in where)
        for field, where in chosen.items()
        if where
    }
    header = f", header on line {table.header_line}" if table.header_line > 1 else ""
    reading = f"{table.kind}{header}; {_mapping_sentence(columns)}"
    tests = [each.heading for each in condition_columns(carried)]
    if tests:
        reading += f"; test results: {listed(tests, most=8)}"
    absent = [field for field, where in chosen.items() if not where]
    if absent:
        reading += f"; no column for {listed(absent)}"
    return Records(
        table.name,
        reading,
        table.sha256,
        table.lines,
        fields,
        carried,
        columns,
        (*findings, *overlong),
    )


def entries_by_table(
    tables: Sequence[tuple[Sequence[str], Collection[str]]], column_map: Sequence[str]
) -> list[tuple[str, ...]]:
    """Entries of a column map for each table of a call.

    An entry is for every table that may have its field and has its column. One whose column
    none of these has is given to the first of them, where it is found wrong.

    Parameters
    ----------
    tables
        Header of each, and the fields that it may have.
    """
    shares: list[list[str]] = [[] for _table in tables]
    for entry in column_map:
        theirs, _equals, field = (part.strip() for part in entry.rpartition("="))
        may = [place for place, (_header, fields) in enumerate(tables) if field in fields]
        may = may or list(range(len(tables)))
        headers = {place: tables[place][0] for place in may}
        whole = any(theirs in header for header in headers.values())
        names = [theirs] if whole else names_in(entry)
        homes = [
            place
            for place, header in headers.items()
            if any(column_place(header, name) is not None for name in names)
        ]
        for place in homes or may[:1]:
            shares[place].append(entry)
    return [tuple(entries) for entries in shares]


def _distinct(header: tuple[str, ...]) -> list[str]:
    """Headings told apart: one without words by its place, a repeated one by its number."""
    seen: Counter[str] = Counter()
    names = []
    for position, heading in enumerate(header, start=1):
        name = heading or f"column {position}"
        seen[name] += 1
        names.append(name if seen[name] == 1 else f"{name} ({seen[name]})")
    return names


def settled_columns(
    header: tuple[str, ...], column_map: Sequence[str], fields: Collection[str] = FIELDS
) -> tuple[dict[str, tuple[int, ...]], set[int], list[str]]:
    """Places of the columns that a map settles, those it leaves alone, and what is wrong in it."""
    settled: dict[str, tuple[int, ...]] = {}
    left_alone: set[int] = set()
    problems: list[str] = []
    for entry in column_map:
        theirs, equals, field = (part.strip() for part in entry.rpartition("="))
        if not equals:
            problems.append(f'--map "{entry}": expected Their Column=field.')
            continue
        if theirs == "" and field in fields and field != "id":
            settled[field] = ()
            continue
        names = [theirs] if theirs in header else [part.strip() for part in theirs.split("+")]
        found = [column_place(header, name) for name in names]
        problems += [
            no_column(entry, name, header)
            for name, position in zip(names, found, strict=True)
            if position is None
        ]
        where = tuple(position for position in found if position is not None)
        if field == "":
            left_alone.update(where)
        elif field not in fields:
            problems.append(_no_field(entry, field, fields))
        elif field in settled:
            problems.append(f'--map "{entry}": "{field}" is already settled by another --map.')
        else:
            settled[field] = where
    return settled, left_alone, problems


def _no_field(entry: str, field: str, fields: Collection[str]) -> str:
    if field in EVENT_FIELDS:
        return f'--map "{entry}": only a list of events (--events) has a field "{field}".'
    if field in FIELDS:
        return f'--map "{entry}": a list of events has no field "{field}".'
    hint = did_you_mean(field, fields)
    return f'--map "{entry}": there is no field "{field}". {hint}'.rstrip()


def _recognised_columns(
    header: tuple[str, ...], settled: dict[str, tuple[int, ...]], left_alone: set[int]
) -> tuple[dict[str, tuple[int, ...]], list[Finding], list[str]]:
    chosen = dict(settled)
    taken = left_alone | {position for where in settled.values() for position in where}
    findings: list[Finding] = []
    claims: dict[str, list[int]] = {}
    for position, name in enumerate(header):
        field = SPELLINGS.get(folded(name))
        if position not in taken and field is not None and field not in settled:
            claims.setdefault(field, []).append(position)
    problems = []
    for field, places in claims.items():
        order = {folded(spelling): rank for rank, spelling in enumerate(FIELDS[field].spellings)}
        places.sort(key=lambda position: (order[folded(header[position])], position))
        names = [header[position] for position in places]
        if len(places) > 1 and (field in IDENTITY_FIELDS or folded(names[0]) == folded(names[1])):
            problems.append(
                f"Columns {listed(map(_quoted, names))} could each be {field}; "
                f"say which with {_map_option(names[0], field)}."
            )
        findings += [_passed_over(name, names[0], field) for name in names[1:]]
        chosen[field] = (places[0],)
    if "holder" not in chosen:
        by_folded = {folded(name): position for position, name in enumerate(header)}
        stand_in = next((by_folded[word] for word in HOLDER_STAND_INS if word in by_folded), None)
        if stand_in is not None and stand_in not in taken:
            chosen["holder"] = (stand_in,)
            findings += [
                _passed_over(header[by_folded[word]], header[stand_in], "holder")
                for word in HOLDER_STAND_INS
                if by_folded.get(word, stand_in) != stand_in
            ]
    findings += _asked_about(header, chosen, taken)
    return chosen, findings, problems


def _passed_over(name: str, winner: str, field: str) -> Finding:
    return Finding(
        "column-passed-over",
        f'"{name}" could also be {field}; "{winner}" is used.',
        f'If "{name}" is the right one, say {_map_option(name, field)}.',
        column=name,
    )


def _asked_about(
    header: tuple[str, ...], chosen: dict[str, tuple[int, ...]], taken: set[int]
) -> list[Finding]:
    findings = []
    for position, name in enumerate(header):
        field = ASKED_ABOUT.get(folded(name)) or _hinted_at(name)
        if field is not None and field not in chosen and position not in taken:
            findings.append(
                Finding(
                    "asked-about",
                    f'"{name}" might be {field} ({FIELDS[field].meaning}); it is carried along '
                    "and not used.",
                    f"If it is, say {_map_option(name, field)}.",
                    column=name,
                )
            )
    return findings


def _hinted_at(name: str) -> str | None:
    """A field that a column's name speaks of without being one of its spellings."""
    bare = folded(name)
    hints = [field for field, words in HINTS.items() if any(word in bare for word in words)]
    return hints[0] if len(hints) == 1 else None


def _map_option(name: str, field: str) -> str:
    """The option that settles a column, in quotes that a name with an apostrophe survives."""
    quote = '"' if "'" in name else "'"
    return f"--map {quote}{name}={field}{quote}"


def _quoted(name: str) -> str:
    return f'"{name}"'


def _missing_columns(header: tuple[str, ...], missing: list[str]) -> str:
    guesses = [
        _map_option(guess, field) for field in missing if (guess := _likely(field, header, missing))
    ]
    hint = f" Perhaps {' '.join(guesses)}." if guesses else ""
    if not guesses:
        without = " ".join(f"--map '={field}'" for field in missing if field != "id")
        hint = f" If the table has none, say {without}." if without else ""
    return f"No column for {listed(missing)} among {listed(map(_quoted, header), most=12)}.{hint}"


def _likely(field: str, header: tuple[str, ...], missing: list[str]) -> str | None:
    """A column whose name holds a spelling of the field and of no other that is missing."""
    fitting = [
        name
        for name in header
        if _speaks_of(name, field)
        and not any(_speaks_of(name, other) for other in missing if other != field)
    ]
    return fitting[0] if fitting else None


def _speaks_of(name: str, field: str) -> bool:
    bare = folded(name)
    of_an_id = bare.startswith("id") or bare.endswith(("id", "no", "number", "nr"))
    if field == "id" and (of_an_id or "studbook" in bare):
        return not any(_speaks_of(name, other) for other in ("sire", "dam"))
    words = [folded(spelling) for spelling in FIELDS[field].spellings if spelling != "id"]
    return any(word in bare for word in words)


def _overlong_rows(table: RawTable) -> list[Finding]:
    width = len(table.header)
    return [
        Finding(
            "extra-cells",
            f"the row has {len(cells)} cells, the header {width}.",
            "Mend the row: a comma inside a cell needs quotes around the cell.",
            row=table.lines[place],
            found=next(cell for cell in cells[width:] if cell.strip()),
        )
        for place, cells in table.overlong.items()
    ]


def cells_of(table: RawTable, where: tuple[int, ...], field: str) -> Sequence[str]:
    """Cells of a field, tidied; those of several columns joined, blank without a column."""
    if not where:
        return ("",) * len(table.lines)
    if len(where) == 1:
        cells = table.columns[where[0]]
        if field in ("may_breed_note", "name"):
            return tuple(cell.strip() for cell in cells)
        return tidied(cells)
    parts = zip(*(map(tidy, table.columns[position]) for position in where), strict=True)
    return tuple(_JOINT.join(part for part in each if part) for each in parts)


def _mapping_sentence(columns: dict[str, str]) -> str:
    named = [
        f"{column} = {field}"
        for field, column in columns.items()
        if folded(column) != folded(field)
    ]
    same = [field for field, column in columns.items() if folded(column) == folded(field)]
    parts = []
    if same:
        parts.append("columns " + ", ".join(same))
    if named:
        parts.append("taken as fields: " + ", ".join(named))
    return "; ".join(parts)
