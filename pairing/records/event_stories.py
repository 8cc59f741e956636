"""What events tell of each animal: dates that they fill, and where it was on a day."""

from __future__ import annotations

import re
from collections import Counter
from typing import TYPE_CHECKING

from pairing.dates import parse_date
from pairing.records.columns import coded
from pairing.records.date_columns import NO_DATE, read_date_column
from pairing.records.findings import Finding
from pairing.records.plain_dates import iso_date

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from pairing.dates import DateRange
    from pairing.records.events import Event
    from pairing.records.table import Records

_FIELD_OF = {
    "birth": "born",
    "death": "died",
    "arrival": "entered",
    "departure": "left",
    "sighting": "last_seen",
}
_FIRST_COUNTS = ("birth", "death")
_SIGNS = re.compile(r"[\W_]+")
_NOT_BETWEEN_DIGITS = re.compile(r"(?<!\d) | (?!\d)")
_A_DAY = re.compile(r"\d{1,2} ?[/.-] ?\d{1,2} ?[/.-] ?'?\d\d")


def spellings_of_places(records: Records, events: Iterable[Event]) -> dict[str, str]:
    """How each place is spelled, by its `place_key`.

    The records' holders come first, the commonest spelling before others, then their birth
    places, then the list in its own order.
    """
    spelled: dict[str, str] = {}
    for field in ("holder", "born_at"):
        column = coded(records.column(field))
        counts = Counter(column.codes.tolist()) if len(column.words) > 1 else {}
        for place in sorted(range(len(column.words)), key=lambda each: -counts.get(each, 0)):
            word = column.words[place]
            spelled.setdefault(place_key(word), word)
    for event in events:
        for word in (event.origin, event.destination):
            spelled.setdefault(place_key(word), word)
    return spelled


def place_key(name: str) -> str:
    """A holder's name without case, blanks and punctuation, but numbers kept apart."""
    bare = _SIGNS.sub(" ", name.casefold()).strip()
    return _NOT_BETWEEN_DIGITS.sub("", bare) or name


def when(date: DateRange) -> str:
    """A date with the word before it: ``on 2019-05-31``, ``in 2019``."""
    return f"{'on' if date.exact or _A_DAY.search(date.text) else 'in'} {date.text}"


class Story:
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
                holder = "" if place_key(own) == place_key(was or "") else own
        later = [each for each in events if each.kind != "birth" and not self._counts(each)]
        if holder is None and any(each.origin or each.destination for each in later):
            holder = next((each.origin for each in later if each.origin), "")
        kept = holder is None or place_key(holder) == place_key(own)
        self.fields["holder"][place] = own if kept else holder or ""
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
            else f"an earlier one {when(recorded)}; that is used"
        )
        return [
            self._finding(
                place,
                f"{self._name} (line {event.line}) has a {event.kind} {when(event.date)}, {said}.",
                "Correct one of the two.",
                field,
                own,
            )
        ]

    def _another_place(self, place: int, event: Event, holder: str) -> Finding:
        return self._finding(
            place,
            f"by {self._name} (line {event.line}) it left {event.origin} {when(event.date)}, but "
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
