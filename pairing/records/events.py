"""A list of events: births, moves, deaths; from it follows where an animal was on any day."""

from __future__ import annotations

import hashlib
from collections import defaultdict
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from pairing.dates import parse_date
from pairing.errors import RecordsError
from pairing.records.columns import coded, replaced
from pairing.records.date_columns import NO_DATE, read_date_column
from pairing.records.fields import folded, tidy
from pairing.records.findings import Finding
from pairing.records.plain_dates import iso_date
from pairing.records.rules import RecordRules
from pairing.spelling import did_you_mean, listed

if TYPE_CHECKING:
    from collections.abc import Sequence

    from pairing.dates import DateRange
    from pairing.records.files.raw import RawTable
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
    rules: RecordRules | None = None,
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
    rules
        What the programme has settled: the order of day and month, and merged ids, whose
        events are one animal's.

    Raises
    ------
    RecordsError
        If the list has no column for the id, the date or the event.
    """
    rules = rules or RecordRules()
    events, findings = read_events(table, date_order=rules.date_order)
    by_animal: dict[str, list[Event]] = defaultdict(list)
    for event in events:
        by_animal[rules.aliases.get(event.id, event.id)].append(event)
    ids = replaced(records.column("id"), rules.aliases)
    story = _Story(records, table.name, as_of, rules.date_order)
    for place, name in enumerate(ids):
        if name in by_animal:
            findings += story.tell(place, by_animal[name])
    fields = story.fields
    known = set(ids)
    findings += _strangers(
        table, [each for each in events if rules.aliases.get(each.id, each.id) not in known]
    )
    columns = dict(records.columns)
    for name in fields:
        columns.setdefault(name, f"events in {table.name}")
    told = {
        name: tuple(cells) for name, cells in fields.items() if any(cells) or name in records.fields
    }
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


class _Story:
    """Applies the events of one animal after another to the cells of the records."""

    def __init__(
        self, records: Records, name: str, as_of: DateRange | None, date_order: str | None
    ) -> None:
        told = (*_FIELD_OF.values(), "holder", "born_at")
        self.fields = {field: list(records.column(field)) for field in told}
        self._records = records
        self._name = name
        self._as_of = as_of
        self._recorded = {
            field: _dates(records.column(field), field, date_order)
            for field in (_FIELD_OF[kind] for kind in _FIRST_COUNTS)
        }

    def tell(self, place: int, events: Sequence[Event]) -> list[Finding]:
        """Fill the cells of one animal; what contradicts them is returned."""
        findings = []
        for event in events:
            if event.kind in _FIRST_COUNTS:
                findings += self._first(place, event)
            elif event.kind in _FIELD_OF and self._counts(event):
                self.fields[_FIELD_OF[event.kind]][place] = iso_date(event.date)
                if event.kind == "arrival":
                    self._come_back(place, event, events)
            if event.kind == "birth" and event.destination:
                born_at = self.fields["born_at"]
                born_at[place] = born_at[place] or event.destination
        return findings + self._find_holder(place, events)

    def _counts(self, event: Event) -> bool:
        """Whether an event has surely happened by the day."""
        return self._as_of is None or event.date.latest <= self._as_of.latest

    def _come_back(self, place: int, arrival: Event, events: Sequence[Event]) -> None:
        """A departure before an arrival in the list is over."""
        if any(each.kind == "departure" for each in events[: events.index(arrival)]):
            self.fields["left"][place] = ""

    def _find_holder(self, place: int, events: Sequence[Event]) -> list[Finding]:
        findings = []
        own = self.fields["holder"][place]
        holder: str | None = None
        for event in filter(self._counts, events):
            if event.origin and holder and event.origin != holder:
                findings.append(self._another_place(place, event, holder))
            if event.destination and event.kind != "departure":
                holder = event.destination
            elif event.kind == "move":
                was = event.origin or holder
                holder = "" if own == was else own
        later = [each for each in events if each.kind != "birth" and not self._counts(each)]
        if holder is None and any(each.origin or each.destination for each in later):
            holder = next((each.origin for each in later if each.origin), "")
        self.fields["holder"][place] = own if holder is None else holder
        return findings

    def _first(self, place: int, event: Event) -> list[Finding]:
        """A birth or death: fills a blank date, or must agree with the one recorded."""
        field = _FIELD_OF[event.kind]
        own = self.fields[field][place]
        before = self._records.column(field)[place]
        if own.casefold() in NO_DATE:
            self.fields[field][place] = iso_date(event.date)
            return []
        recorded = self._recorded[field][place] if own == before else parse_date(own)
        if recorded is None or (
            recorded.earliest <= event.date.latest and event.date.earliest <= recorded.latest
        ):
            return []
        said = (
            f'the records say {field} "{own}"; the records are used'
            if own == before
            else f"an earlier one on {own}; that is used"
        )
        return [
            self._finding(
                place,
                f"{self._name} (line {event.line}) has a {event.kind} on {event.date.text}, "
                f"{said}.",
                "Correct one of the two.",
                field,
                own,
            )
        ]

    def _another_place(self, place: int, event: Event, holder: str) -> Finding:
        return self._finding(
            place,
            f"by {self._name} (line {event.line}) it left {event.origin} on {event.date.text}, but "
            f"it was at {holder} until then.",
            "Look for a move that is missing or misspelled.",
            "",
            event.origin,
        )

    def _finding(self, place: int, said: str, remedy: str, field: str, found: str) -> Finding:
        animal = self._records.column("id")[place]
        return Finding(
            "events-disagree",
            f"{animal}: {said}",
            remedy,
            id=animal,
            row=int(self._records.lines[place]),
            column=self._records.columns.get(field),
            found=found,
        )


def _dates(cells: Sequence[str], field: str, date_order: str | None) -> list[DateRange | None]:
    """The date of each cell of a column."""
    column = coded(cells)
    dates = read_date_column(column.words, field=field, order=date_order).dates
    return [dates[code] for code in column.codes.tolist()]
