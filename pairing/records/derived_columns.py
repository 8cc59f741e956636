"""Columns that a table does not have and a keeper asks for: parts of cells, bounds of dates."""

from __future__ import annotations

import re
from dataclasses import replace
from typing import TYPE_CHECKING

from pairing.records.columns import tidied
from pairing.records.fields import DATE_FIELDS, folded, tidy
from pairing.spelling import did_you_mean

if TYPE_CHECKING:
    from collections.abc import Sequence

    from pairing.records.files.raw import RawTable

_BOUNDS = ("the earliest day", "an estimate", "the latest day")


def with_derived_columns(
    table: RawTable, column_map: Sequence[str]
) -> tuple[RawTable, list[str], list[str]]:
    """The table with a column more for each entry that asks for one.

    Parameters
    ----------
    column_map
        See `pairing.records.mapping.map_columns`.

    Returns
    -------
    table, column_map, problems
        In the map the new columns go by their headings.
    """
    plain: list[str] = []
    problems: list[str] = []
    for entry in column_map:
        theirs, _equals, field = (part.strip() for part in entry.rpartition("="))
        if column_place(table.header, theirs) is not None:
            plain.append(entry)
        elif "~" in theirs:
            table = _with_part(table, entry, theirs, plain, problems)
        elif "/" in theirs:
            table = _with_bounds(table, entry, field, plain, problems)
        else:
            plain.append(entry)
    return table, plain, problems


def column_place(header: Sequence[str], name: str) -> int | None:
    """Place of a column: spelled exactly so, else the first that differs only in trifles."""
    if name in header:
        return header.index(name)
    by_folded = {folded(each): place for place, each in reversed(list(enumerate(header)))}
    return by_folded.get(folded(name))


def no_column(entry: str, name: str, header: Sequence[str]) -> str:
    """What is wrong with an entry of a column map that names a column that is not there."""
    return f'--map "{entry}": there is no column "{name}". {did_you_mean(name, header)}'.rstrip()


def names_in(entry: str) -> list[str]:
    """The columns that an entry of a column map speaks of, its signs taken as such."""
    theirs = entry.rpartition("=")[0]
    return [part.strip() for part in re.split(r"[+/]", theirs.partition("~")[0])]


def _with_part(
    table: RawTable, entry: str, theirs: str, plain: list[str], problems: list[str]
) -> RawTable:
    """The table with what a regular expression finds in a column, for ``Column~PATTERN=field``."""
    name, _tilde, pattern = (part.strip() for part in theirs.partition("~"))
    place = column_place(table.header, name)
    try:
        expression = re.compile(pattern)
    except re.error as error:
        problems.append(f'--map "{entry}": "{pattern}" is no regular expression ({error}).')
        return table
    if place is None:
        problems.append(no_column(entry, name, table.header))
        return table
    heading = f"{table.header[place]}~{pattern}"
    found = tuple(_found(expression, cell) for cell in table.columns[place])
    filled = [cell for cell in table.columns[place] if cell.strip()]
    if filled and not any(found):
        problems.append(
            f'--map "{entry}": "{pattern}" finds nothing in any of the {len(filled):,} filled '
            f'cells of "{table.header[place]}", such as "{filled[0].strip()}".'
        )
        return table
    plain.append(f"{heading}={entry.rpartition('=')[2]}")
    return _with_column(table, heading, found)


def _found(expression: re.Pattern[str], cell: str) -> str:
    """What an expression finds in a cell: its first group, or all of it; blank if nothing."""
    found = expression.search(tidy(cell))
    if found is None:
        return ""
    return (found.group(1) if expression.groups else found.group()) or ""


def _with_bounds(
    table: RawTable, entry: str, field: str, plain: list[str], problems: list[str]
) -> RawTable:
    """The table with the interval between two columns, for ``Earliest/Latest=born``."""
    names = names_in(entry)
    places = [column_place(table.header, name) for name in names]
    missing = [
        no_column(entry, name, table.header)
        for name, place in zip(names, places, strict=True)
        if place is None
    ]
    if field not in DATE_FIELDS or len(names) > len(_BOUNDS):
        first, middle, last = _BOUNDS
        problems.append(
            f'--map "{entry}": a slash stands between the columns of {first} and {last} of a date '
            f"(and {middle} between them); expected Earliest/Latest=born or "
            "Earliest/Date/Latest=born."
        )
        return table
    if missing:
        problems += missing
        return table
    columns = [tidied(table.columns[place]) for place in places if place is not None]
    heading = "/".join(table.header[place] for place in places if place is not None)
    plain.append(f"{heading}={field}")
    return _with_column(table, heading, tuple(map(_interval, *columns)))


def _interval(earliest: str, *others: str) -> str:
    """The interval between two bounds, either of which may be blank: then that end is open.

    A cell between the bounds is an estimate; it stands in for a bound that is blank.
    """
    from pairing.records.date_columns import NO_DATE

    first, *between, last = (
        "" if cell.casefold() in NO_DATE else cell for cell in (earliest, *others)
    )
    estimate = between[0] if between else ""
    first, last = first or estimate, last or estimate
    if first == last:
        return first
    # Blanks around the slash tell it from those inside a date such as 31/05/2019.
    return f"{first or '..'} / {last or '..'}"


def _with_column(table: RawTable, heading: str, cells: tuple[str, ...]) -> RawTable:
    return replace(table, header=(*table.header, heading), columns=(*table.columns, cells))
