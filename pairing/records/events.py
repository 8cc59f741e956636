"""A list of events: births, moves, deaths; from it follows where an animal was on any day."""

from __future__ import annotations

import datetime
import hashlib
from collections import defaultdict
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from pairing.dates import iso
from pairing.errors import RecordsError
from pairing.records.columns import coded
from pairing.records.date_columns import read_date_column
from pairing.records.fields import folded, tidy
from pairing.records.findings import Finding
from pairing.spelling import did_you_mean, listed

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from pairing.dates import DateRange
    from pairing.records.raw import RawTable
    from pairing.records.table import Records

EVENT_WORDS = {
    **dict.fromkeys(("birth", "born", "hatch", "hatched", "hatching"), "birth"),
    **dict.fromkeys(("death", "died", "dead", "euthanised", "euthanasia", "culled"), "death"),
    **dict.fromkeys(("transfer", "transferred", "move", "moved", "loan", "loan return"), "move"),
    **dict.fromkeys(
        ("arrival", "arrived", "entry", "entered", "import", "imported", "capture", "captured"),
        "arrival",
    ),
    **dict.fromkeys(
        (
            "departure",
            "departed",
            "left",
            "export",
            "exported",
            "sale",
            "sold",
            "release",
            "released",
        ),
        "departure",
    ),
    **dict.fromkeys(
        ("seen", "sighted", "sighting", "census", "captured again", "recapture"), "sighting"
    ),
}
"""Words for an event, folded, with what each means."""

EVENT_COLUMNS = {
    "id": ("id", "animal", "animal id", "studbook number"),
    "date": ("date", "day", "when", "event date"),
    "event": ("event", "what", "event type"),
    "from": ("from", "from holder"),
    "to": ("to", "to holder", "holder"),
}
"""Columns of a list of events, with their spellings."""

_FIELD_OF = {
    "birth": "born",
    "death": "died",
    "arrival": "entered",
    "departure": "left",
    "sighting": "last_seen",
}
_FIRST_COUNTS = ("birth", "death")


@dataclass(frozen=True, slots=True)
class Event:
    """One event of an animal.

    Attributes
    ----------
    line
        Line of the list.
    kind
        ``birth``, ``death``, ``move``, ``arrival``, ``departure`` or ``sighting``.
    origin, destination
        Holders it left and came to; blank where not told.
    """

    id: str
    line: int
    kind: str
    date: DateRange
    origin: str
    destination: str


def with_events(
    records: Records,
    table: RawTable,
    *,
    as_of: DateRange | None = None,
    date_order: str | None = None,
) -> Records:
    """The records as they stood on a day, after a list of events.

    The last move or arrival up to the day tells the holder; births and deaths fill blank
    dates; the last arrival, departure and sighting up to the day tell those. A cell of the
    records is replaced only for the holder and for departures, arrivals and sightings, which
    change with the day; where a birth or death contradicts the records, that is a finding.

    Parameters
    ----------
    as_of
        Events that may lie after this day do not count; by default all count.

    Raises
    ------
    RecordsError
        If the list has no column for the id, the date or the event.
    """
    events, findings = read_events(table, date_order=date_order)
    by_animal: dict[str, list[Event]] = defaultdict(list)
    for event in events:
        by_animal[event.id].append(event)
    fields = {
        name: list(records.column(name)) for name in (*_FIELD_OF.values(), "holder", "born_at")
    }
    ids = records.column("id")
    for place, name in enumerate(ids):
        if name in by_animal:
            findings += _apply(records, fields, place, by_animal[name], table.name, as_of)
    known = set(ids)
    findings += _strangers(table, [each for each in events if each.id not in known])
    columns = dict(records.columns)
    for name in fields:
        columns.setdefault(name, f"events in {table.name}")
    told = {name: tuple(cells) for name, cells in fields.items() if any(cells)}
    digest = hashlib.sha256(f"{records.sha256}\n{table.sha256}".encode()).hexdigest()
    return replace(
        records,
        reading=f"{records.reading}; {len(events):,} events from {table.name} ({table.kind})",
        sha256=digest,
        fields={**records.fields, **told},
        columns={
            name: column
            for name, column in columns.items()
            if name in records.fields or name in told
        },
        findings=(*records.findings, *findings),
    )


def read_events(
    table: RawTable, *, date_order: str | None = None
) -> tuple[list[Event], list[Finding]]:
    """The events of a list in order of time, and what could not be read."""
    where = _columns(table)

    def cells(column: str) -> Sequence[str]:
        if column not in where:
            return ("",) * len(table.lines)
        return tuple(map(tidy, table.columns[where[column]]))

    days = coded(cells("date"))
    dates = read_date_column(days.words, field="date", order=date_order)
    findings = [
        Finding("event-unreadable", f"{table.name}: {sentence}", "Write the day as 2019-05-31.")
        for _place, (_kind, sentence) in sorted(dates.problems.items())
    ]
    unknown: dict[str, list[int]] = defaultdict(list)
    events = []
    for row, (name, word, origin, destination) in enumerate(
        zip(cells("id"), cells("event"), cells("from"), cells("to"), strict=True)
    ):
        date = dates.dates[int(days.codes[row])]
        line = int(table.lines[row])
        kind = EVENT_WORDS.get(word.casefold())
        if kind is None:
            unknown[word].append(line)
        elif name and date is not None:
            events.append(Event(name, line, kind, date, origin, destination))
        else:
            lacking = "id" if not name else "date"
            findings.append(
                Finding(
                    "event-unreadable",
                    f"{table.name}, line {line}: the event has no {lacking}; it is not used.",
                    f"Give its {lacking}.",
                    found=word,
                )
            )
    findings += [_unknown_word(table, word, lines) for word, lines in unknown.items()]
    return sorted(events, key=lambda each: (each.date.latest, each.line)), findings


def _unknown_word(table: RawTable, word: str, lines: list[int]) -> Finding:
    hint = did_you_mean(word, EVENT_WORDS)
    return Finding(
        "event-unreadable",
        f'{table.name}: the event "{word}" is not known; {len(lines):,} such '
        f"{'row is' if len(lines) == 1 else 'rows are'} not used (line "
        f"{listed(map(str, lines), most=4)}).",
        f"Expected birth, death, move, arrival, departure or sighting. {hint}".rstrip(),
        found=word,
    )


def _columns(table: RawTable) -> dict[str, int]:
    spelled = {
        folded(spelling): column
        for column, spellings in EVENT_COLUMNS.items()
        for spelling in spellings
    }
    where: dict[str, int] = {}
    for place, heading in enumerate(table.header):
        column = spelled.get(folded(heading))
        if column is not None:
            where.setdefault(column, place)
    missing = [column for column in ("id", "date", "event") if column not in where]
    if missing:
        raise RecordsError(
            f"{table.name}: no column for {listed(missing)} among {listed(table.header, most=12)}.",
            remedy="A list of events has the columns id, date, event, from, to.",
        )
    return where


def _strangers(table: RawTable, events: Sequence[Event]) -> list[Finding]:
    if not events:
        return []
    names = list(dict.fromkeys(event.id for event in events))
    return [
        Finding(
            "fact-without-animal",
            f"{table.name} has events of {len(names):,} {'id' if len(names) == 1 else 'ids'} "
            f"without a row in the records: {listed(names)} (first on line {events[0].line}).",
            "Correct the ids there or add the animals; the events are not used.",
            found=names[0],
        )
    ]


def _apply(
    records: Records,
    fields: Mapping[str, list[str]],
    place: int,
    events: Sequence[Event],
    name: str,
    as_of: DateRange | None,
) -> list[Finding]:
    """Fill the cells of one animal; what contradicts them is returned."""
    findings = []
    holder = ""
    for event in events:
        if as_of is not None and event.date.latest > as_of.latest:
            if event.kind in _FIRST_COUNTS:
                findings += _first(records, fields, place, event, name)
            continue
        if event.kind in _FIRST_COUNTS:
            findings += _first(records, fields, place, event, name)
        elif event.kind in _FIELD_OF:
            fields[_FIELD_OF[event.kind]][place] = _as_text(event.date)
        if event.origin and holder and tidy(event.origin) != holder:
            findings.append(_another_place(records, place, event, holder, name))
        if event.kind == "birth" and event.destination:
            fields["born_at"][place] = fields["born_at"][place] or event.destination
        if event.destination and event.kind != "departure":
            holder = event.destination
            fields["holder"][place] = holder
        elif event.kind == "move" and as_of is not None and event.origin:
            holder = ""
    if not holder:
        fields["holder"][place] = _holder_before(events, as_of) or fields["holder"][place]
    return findings


def _holder_before(events: Sequence[Event], as_of: DateRange | None) -> str:
    """Where an animal was before its first move, when that lies after the day."""
    moves = [event for event in events if event.origin]
    if as_of is None or not moves or moves[0].date.latest <= as_of.latest:
        return ""
    return moves[0].origin


def _first(
    records: Records, fields: Mapping[str, list[str]], place: int, event: Event, name: str
) -> list[Finding]:
    """A birth or death: fills a blank date, or must agree with the one recorded."""
    field = _FIELD_OF[event.kind]
    own = fields[field][place]
    if own == "":
        fields[field][place] = _as_text(event.date)
        return []
    recorded = read_date_column([own], field=field).dates[0]
    if recorded is None or (
        recorded.earliest <= event.date.latest and event.date.earliest <= recorded.latest
    ):
        return []
    animal = records.column("id")[place]
    return [
        Finding(
            "events-disagree",
            f"{animal}: {name} (line {event.line}) has a {event.kind} on {event.date.text}, the "
            f'records say {field} "{own}"; the records are used.',
            "Correct one of the two.",
            id=animal,
            row=int(records.lines[place]),
            column=records.columns.get(field),
            found=own,
        )
    ]


def _another_place(records: Records, place: int, event: Event, holder: str, name: str) -> Finding:
    animal = records.column("id")[place]
    return Finding(
        "events-disagree",
        f"{animal}: by {name} (line {event.line}) it left {event.origin} on {event.date.text}, but "
        f"it was at {holder} until then.",
        "Look for a move that is missing or misspelled.",
        id=animal,
        row=int(records.lines[place]),
        found=event.origin,
    )


def _as_text(date: DateRange) -> str:
    """A date in a form that means the same in any column."""
    if date.exact:
        return iso(date.earliest)
    if date.earliest == datetime.date.min.toordinal():
        return f"../{iso(date.latest)}"
    if date.latest == datetime.date.max.toordinal():
        return f"{iso(date.earliest)}/.."
    return f"[{iso(date.earliest)}..{iso(date.latest)}]"
