"""A list of events: births, moves, deaths; from it follows where an animal was on any day."""

from __future__ import annotations

import hashlib
import re
from collections import Counter, defaultdict
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from pairing.errors import RecordsError
from pairing.records.columns import coded, replaced
from pairing.records.date_columns import read_date_column
from pairing.records.derived_columns import with_derived_columns
from pairing.records.event_stories import Story, place_key, spellings_of_places
from pairing.records.facts import with_look_alikes
from pairing.records.fields import FIELDS, folded
from pairing.records.files.raw import Sought
from pairing.records.findings import Finding
from pairing.records.mapping import cells_of, settled_columns
from pairing.records.rules import RecordRules
from pairing.spelling import did_you_mean, listed

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from pairing.dates import DateRange
    from pairing.records.date_columns import DateReading
    from pairing.records.files.raw import RawTable
    from pairing.records.table import Records

_WORDS_OF = {
    "birth": "birth, born, captive birth, captive born, hatch, hatched, hatching",
    "death": (
        "death, died, dead, found dead, killed, euthanised, euthanized, euthanasia, put down, "
        "put to sleep, cull, culled, culling, slaughter, slaughtered"
    ),
    "move": (
        "move, moved, moved in, moved out, movement, relocated, relocation, rehomed, transfer, "
        "transfer in, transfer out, transferred, transferred in, transferred out, loan, loaned, "
        "loan in, loan out, loaned in, loaned out, on loan, lent, breeding loan, on breeding loan, "
        "loan return, loan returned, loan ended, end of loan, return, returned, return from loan, "
        "returned from loan, donation, donated, gift, exchange, exchanged, swap, swapped, trade, "
        "traded"
    ),
    "arrival": (
        "arrival, arrived, entry, entered, import, imported, capture, captured, wild caught, "
        "acquisition, acquired, purchase, purchased, bought, received, confiscation, confiscated, "
        "seized, rescue, rescued"
    ),
    "departure": (
        "departure, departed, left, export, exported, sale, sold, release, released, "
        "reintroduction, reintroduced, escape, escaped, lost, lost to follow up, missing, stolen"
    ),
    "sighting": (
        "seen, seen alive, sighted, sighting, observed, observation, census, inventory, recapture, "
        "recaptured, captured again"
    ),
}
EVENT_WORDS = {word: kind for kind, words in _WORDS_OF.items() for word in words.split(", ")}
"""Words for an event, without case and punctuation, with what each means."""

EVENT_COLUMNS = {
    "id": FIELDS["id"].spellings,
    "date": ("date", "day", "when", "event date"),
    "event": ("event", "what", "event type"),
    "from": ("from", "from holder"),
    "to": ("to", "to holder", "holder"),
}
"""Columns of a list of events, with their spellings."""

_NEEDED = ("id", "date", "event")
EVENTS = Sought(
    "list of events",
    "event",
    {
        folded(spelling): column
        for column, spellings in EVENT_COLUMNS.items()
        for spelling in spellings
    },
    _NEEDED,
)
"""A list of events, as it is looked for in a file."""
_SIGNS = re.compile(r"[\W_]+")


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


@dataclass(frozen=True, slots=True)
class EventList:
    """A list of events as read.

    Attributes
    ----------
    events
        Those that can be used, in order of time.
    findings
        What could not be read or is doubtful.
    ids
        Every id that stands in the list.
    said
        How it was read, in words: columns settled by the keeper, the order of day and month.
    """

    events: tuple[Event, ...]
    findings: tuple[Finding, ...]
    ids: frozenset[str]
    said: str


def with_events(
    records: Records,
    table: RawTable,
    column_map: Sequence[str] = (),
    *,
    as_of: DateRange | None = None,
    rules: RecordRules | None = None,
) -> Records:
    """The records as they stood on a day, after a list of events.

    The last move or arrival up to the day tells the holder; births and deaths fill blank
    dates; the last arrival, departure and sighting up to the day tell those. A cell of the
    records is replaced only for the holder and for departures, arrivals and sightings, which
    change with the day; where a birth or death contradicts the records, that is a finding.
    Places that differ in case, blanks and punctuation only are one, as the records spell it.

    Parameters
    ----------
    column_map
        ``"Their Column=field"`` as for `map_columns`, for id, date, event, from and to.
    as_of
        Events that may lie after this day do not count; by default all count.
    rules
        What the programme has settled: the order of day and month, and merged ids, whose
        events are one animal's.

    Raises
    ------
    RecordsError
        If the list has no column for the id, the date or the event, or `column_map` names a
        column or field that does not exist.
    """
    rules = rules or RecordRules()
    read = read_events(table, column_map, date_order=rules.date_order)
    findings = list(read.findings)
    spelled = spellings_of_places(records, read.events)
    by_animal: dict[str, list[Event]] = defaultdict(list)
    for event in read.events:
        by_animal[rules.aliases.get(event.id, event.id)].append(_spelled(event, spelled))
    ids = replaced(records.column("id"), rules.aliases)
    story = Story(records, table.name, as_of, rules.date_order)
    for place, name in enumerate(ids):
        if name in by_animal:
            findings += story.tell(place, by_animal[name])
    fields = story.fields
    known = set(ids)
    strange = [each for each in read.events if rules.aliases.get(each.id, each.id) not in known]
    findings += _strangers(table, strange, ids)
    columns = dict(records.columns)
    for name in fields:
        columns.setdefault(name, f"events in {table.name}")
    told = {
        name: tuple(cells) for name, cells in fields.items() if any(cells) or name in records.fields
    }
    digest = hashlib.sha256(f"{records.sha256}\n{table.sha256}".encode()).hexdigest()
    return replace(
        records,
        reading=f"{records.reading}; {_counted(len(read.events), 'event')} from {table.name} "
        f"({'; '.join(filter(None, (table.kind, read.said)))})",
        sha256=digest,
        fields={**records.fields, **told},
        columns={
            name: column
            for name, column in columns.items()
            if name in records.fields or name in told
        },
        findings=(*records.findings, *findings),
        joined_ids=records.joined_ids | read.ids,
    )


def _spelled(event: Event, spelled: Mapping[str, str]) -> Event:
    """The event with its places as they are spelled elsewhere."""
    origin, destination = (spelled[place_key(each)] for each in (event.origin, event.destination))
    return replace(event, origin=origin, destination=destination)


def read_events(
    table: RawTable, column_map: Sequence[str] = (), *, date_order: str | None = None
) -> EventList:
    """The events of a list, and what could not be read; see `with_events`."""
    table, where, said = _columns(table, column_map)
    cells = {column: cells_of(table, where.get(column, ()), column) for column in EVENT_COLUMNS}
    days = coded(cells["date"])
    dates = read_date_column(days.words, field="date", order=date_order)
    codes = days.codes.tolist()
    findings = _doubtful_dates(table, days.words, codes, dates)
    unknown: dict[str, list[int]] = defaultdict(list)
    events = []
    for row, (name, word, origin, destination) in enumerate(
        zip(cells["id"], cells["event"], cells["from"], cells["to"], strict=True)
    ):
        date = dates.dates[codes[row]]
        line = int(table.lines[row])
        kind = EVENT_WORDS.get(_plain(word))
        if kind is None:
            unknown[word].append(line)
        elif name and date is not None:
            events.append(Event(name, line, kind, date, origin, destination))
        else:
            lacking = "id" if not name else "date"
            readable = " that can be read" if name and codes[row] in dates.problems else ""
            findings.append(
                Finding(
                    "event-unreadable",
                    f"{table.name}, line {line}: the event has no {lacking}{readable}; it is not "
                    "used.",
                    f"Give its {lacking}.",
                    found=word,
                )
            )
    findings += [_unknown_word(table, word, lines) for word, lines in unknown.items()]
    return EventList(
        tuple(sorted(events, key=lambda each: (each.date.latest, each.line))),
        tuple(findings),
        frozenset(cells["id"]) - {""},
        "; ".join(filter(None, (said, dates.said))),
    )


def _doubtful_dates(
    table: RawTable, words: Sequence[str], codes: Sequence[int], dates: DateReading
) -> list[Finding]:
    """A finding for each doubtful date, with the first line on which it stands."""
    first: dict[int, int] = {}
    for row, code in enumerate(codes):
        if code in dates.problems:
            first.setdefault(code, row)
    return [
        Finding(
            kind,
            f"{table.name}, line {int(table.lines[first[code]])}: {sentence}",
            "Write the day as 2019-05-31.",
            found=words[code],
        )
        for code, (kind, sentence) in sorted(dates.problems.items())
    ]


def _plain(word: str) -> str:
    """A word for an event without case and punctuation."""
    return _SIGNS.sub(" ", word.casefold()).strip()


def _unknown_word(table: RawTable, word: str, lines: list[int]) -> Finding:
    said = f'the event "{word}" is not known' if word else "what happened is blank"
    return Finding(
        "event-unreadable",
        f"{table.name}: {said}; {len(lines):,} such "
        f"{'row is' if len(lines) == 1 else 'rows are'} not used (line "
        f"{listed(map(str, lines), most=4)}).",
        f"Expected birth, death, move, arrival, departure or sighting. {_meant(word)}".rstrip(),
        found=word,
    )


def _meant(word: str) -> str:
    """A sentence on the known word that an unknown one holds or is spelled like, if any."""
    words = f" {_plain(word)} "
    held = max((each for each in EVENT_WORDS if f" {each} " in words), key=len, default=None)
    if held is None:
        return did_you_mean(word, EVENT_WORDS)
    return f'It holds "{held}": write {EVENT_WORDS[held]}, if it was one.'


def _columns(
    table: RawTable, column_map: Sequence[str]
) -> tuple[RawTable, dict[str, tuple[int, ...]], str]:
    """The table, where each column of ours stands in it, and what the keeper settled in words."""
    table, column_map, problems = with_derived_columns(table, column_map)
    where, left_alone, more = settled_columns(table.header, column_map, tuple(EVENT_COLUMNS))
    if problems + more:
        raise RecordsError(
            f"{table.name}: the columns cannot be told apart.",
            details=problems + more,
            remedy="A list of events has the columns id, date, event, from, to.",
        )
    said = ", ".join(
        f"{'+'.join(table.header[place] for place in places)} = {column}"
        for column, places in where.items()
    )
    taken = left_alone | {place for places in where.values() for place in places}
    for place, heading in enumerate(table.header):
        column = EVENTS.columns.get(folded(heading))
        if column is not None and place not in taken:
            where.setdefault(column, (place,))
    missing = [column for column in _NEEDED if not where.get(column)]
    if missing:
        raise RecordsError(
            f"{table.name}: no column for {listed(missing)} among {listed(table.header, most=12)}.",
            remedy="A list of events has the columns id, date, event, from, to; settle one with "
            f"--map 'Their Column={missing[-1]}'.",
        )
    return table, where, f"taken as fields: {said}" if said else ""


def _strangers(table: RawTable, events: Sequence[Event], known: Sequence[str]) -> list[Finding]:
    if not events:
        return []
    in_order = sorted(events, key=lambda each: each.line)
    names = list(dict.fromkeys(event.id for event in in_order))
    them = "id there or add the animal" if len(names) == 1 else "ids there or add the animals"
    kinds = Counter(event.kind for event in in_order)
    lost = listed(_counted(count, kind) for kind, count in kinds.items())
    return [
        Finding(
            "fact-without-animal",
            f"{table.name} has events of {_counted(len(names), 'id')} without a row in the "
            f"records: {listed(with_look_alikes(names, known))} (first on line "
            f"{in_order[0].line}).",
            f"Correct the {them}; until then {lost} {'is' if len(events) == 1 else 'are'} lost.",
            found=names[0],
        )
    ]


def _counted(count: int, what: str) -> str:
    return f"{count:,} {what}{'' if count == 1 else 's'}"
