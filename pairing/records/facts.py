"""A second table about the animals, joined by id: what the records leave blank, it fills."""

from __future__ import annotations

import hashlib
from collections import defaultdict
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from pairing.records.columns import coded, replaced
from pairing.records.date_columns import NO_DATE, read_date_column
from pairing.records.fields import DATE_FIELDS, MISSING_PARENT, SPELLINGS
from pairing.records.files.raw import Sought
from pairing.records.findings import Finding
from pairing.records.ids.look_alikes import groups_alike, number_breaks
from pairing.records.mapping import map_columns
from pairing.records.plain_dates import plain_date
from pairing.records.rules import RecordRules
from pairing.records.words import read_word, same_meaning
from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Hashable, Mapping, Sequence

    from pairing.dates import DateRange
    from pairing.records.files.raw import RawTable
    from pairing.records.table import Records

FACTS = Sought("second table about the animals", "animal", SPELLINGS, ("id",))
"""A second table, as it is looked for in a file."""
_LATEST = "last_seen"
_PARENTS = ("sire", "dam", "genetic_dam")
_NOTHING = MISSING_PARENT - {"wild"}
_MOST_NAMED = 6


@dataclass(frozen=True, slots=True)
class _Said:
    """What a cell says: its text, and what tells whether another cell says the same."""

    text: str
    meaning: Hashable = None
    days: tuple[int, int] | None = None

    @property
    def is_unreadable(self) -> bool:
        """Whether it is a word of which nobody knows what it says."""
        return self.days is None and self.meaning is None

    def contradicts(self, other: _Said) -> bool:
        """Whether not both can be right: dates only where no day is common to both."""
        if self.days is not None and other.days is not None:
            return self.days[1] < other.days[0] or other.days[1] < self.days[0]
        return not self.is_unreadable and self.meaning != other.meaning


@dataclass(frozen=True, slots=True)
class _Cells:
    """What each cell of a column says, None where nothing; doubtful dates; the order of days."""

    said: Sequence[_Said | None]
    doubts: Sequence[Finding] = ()
    order: str = ""


def with_facts(
    records: Records,
    facts: RawTable,
    column_map: Sequence[str] = (),
    *,
    rules: RecordRules | None = None,
) -> Records:
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
    rules
        What the programme has settled: the order of day and month, and merged ids, whose rows
        count as one animal's.

    Raises
    ------
    RecordsError
        If the second table has no column for the id.
    """
    rules = rules or RecordRules()
    second = map_columns(facts, column_map, required=("id",))
    named = second.column("id")
    ids = replaced(records.column("id"), rules.aliases)
    rows: dict[str, list[int]] = defaultdict(list)
    for row, name in enumerate(replaced(named, rules.aliases)):
        rows[name].append(row)
    without_id = rows.pop("", [])
    findings = [_in_second(second, each) for each in second.findings]
    findings += _unused_rows(ids, second, rows, without_id)
    fields, columns = dict(records.fields), dict(records.columns)
    has_zero = "0" in records.column("id")
    orders = []
    for field, cells in second.fields.items():
        if field == "id":
            continue
        order = rules.date_order
        told = _read(second, field, cells, order, has_zero=has_zero)
        known = _read(records, field, records.column(field), order, has_zero=has_zero)
        of_animal = [rows.get(name, []) for name in ids]
        fields[field], found = _filled(records, second, of_animal, field, known.said, told.said)
        columns.setdefault(field, second.columns[field])
        findings += [*told.doubts, *found]
        orders += [told.order] if told.order else []
    carried, split = _carried(records, second, ids, rows)
    how = "; ".join([second.reading, *orders])
    reading = f"{records.reading}; facts from {second.name} ({how})"
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
        joined_ids=records.joined_ids.union(named) - {""},
    )


def with_look_alikes(strangers: Sequence[str], known: Sequence[str]) -> list[str]:
    """Ids that the records lack, the first few with those of theirs that are spelled almost so.

    Such as ``3 (perhaps 0003)``; see `pairing.records.ids.look_alikes.essence`.
    """
    first = list(strangers[:_MOST_NAMED])
    alike: dict[str, list[str]] = {}
    cells = [*first, *known]
    for group in groups_alike(cells):
        for place in group:
            if place < len(first):
                breaks = number_breaks(cells[place])
                others = (cells[other] for other in group if other >= len(first))
                alike[cells[place]] = [
                    each for each in dict.fromkeys(others) if number_breaks(each) == breaks
                ]
    hinted = [
        f"{name} (perhaps {listed(alike[name], most=3, word='or')})" if alike.get(name) else name
        for name in first
    ]
    return [*hinted, *strangers[_MOST_NAMED:]]


def _in_second(second: Records, finding: Finding) -> Finding:
    """A finding about the second table itself; its line is not one of the records."""
    line = "" if finding.row is None else f", line {finding.row}"
    return replace(
        finding,
        message=f"{second.name}{line}: {finding.message}",
        row=None,
        milder="warning" if finding.stops else finding.milder,
    )


def _unused_rows(
    ids: Sequence[str], second: Records, rows: Mapping[str, list[int]], without_id: Sequence[int]
) -> list[Finding]:
    findings = []
    known = set(ids)
    strangers = [name for name in rows if name not in known]
    if strangers:
        first = [rows[name][0] for name in strangers[:_MOST_NAMED]]
        one = len(strangers) == 1
        them = "id there or add the animal" if one else "ids there or add the animals"
        told = [column for field, column in second.columns.items() if field != "id"]
        lost = listed([*told, *second.carried], most=_MOST_NAMED) or "them"
        findings.append(
            Finding(
                "fact-without-animal",
                f"{second.name} has rows about {len(strangers):,} "
                f"{'id' if one else 'ids'} without a row in the records: "
                f"{listed(with_look_alikes(strangers, ids), most=_MOST_NAMED)} "
                f"({_lines(second, first)}).",
                f"Correct the {them}; until then what {second.name} says of {lost} is lost.",
                found=strangers[0],
            )
        )
    if without_id:
        one = len(without_id) == 1
        findings.append(
            Finding(
                "fact-without-animal",
                f"{second.name} has {len(without_id):,} {'row' if one else 'rows'} without an id "
                f"({_lines(second, without_id)}).",
                f"Give {'it' if one else 'them'} an id; {'it is' if one else 'they are'} not used.",
                found="",
            )
        )
    return findings


def _lines(second: Records, rows: Sequence[int]) -> str:
    lines = [str(int(second.lines[row])) for row in rows]
    return f"line{'s' if len(lines) > 1 else ''} {listed(lines, most=_MOST_NAMED)}"


def _read(
    table: Records, field: str, cells: Sequence[str], date_order: str | None, *, has_zero: bool
) -> _Cells:
    column = coded(cells)
    codes = column.codes.tolist()
    if field not in DATE_FIELDS:
        said = [_word(field, word, has_zero=has_zero) for word in column.words]
        return _Cells([said[code] for code in codes])
    dates = read_date_column(column.words, field=field, order=date_order)
    days = [_day(word, date) for word, date in zip(column.words, dates.dates, strict=True)]
    doubts = []
    for code, (kind, sentence) in sorted(dates.problems.items()):
        line = int(table.lines[codes.index(code)])
        doubts.append(
            Finding(
                kind,
                f"{table.name}, line {line}: {sentence}",
                "Write the day as 2019-05-31.",
                found=column.words[code],
            )
        )
    return _Cells([days[code] for code in codes], doubts, dates.said)


def _day(word: str, date: DateRange | None) -> _Said | None:
    if date is None:
        return None if word.casefold() in NO_DATE else _Said(word)
    days = (date.earliest, date.latest)
    return _Said(plain_date(date), days, days)


def _word(field: str, word: str, *, has_zero: bool) -> _Said | None:
    meaning: Hashable = same_meaning(field, word)
    if meaning == "" or word.casefold() in _NOTHING:
        return None
    if field in _PARENTS:
        if word == "0" and not has_zero:
            return None
        meaning = frozenset(word.split("|"))
    elif field in ("merit", "count"):
        meaning = str(read_word(field, word)[0])
    return _Said(word, meaning)


def _filled(
    records: Records,
    second: Records,
    rows: Sequence[Sequence[int]],
    field: str,
    known: Sequence[_Said | None],
    told: Sequence[_Said | None],
) -> tuple[tuple[str, ...], list[Finding]]:
    cells = list(records.column(field))
    findings: list[Finding] = []
    for place, of_animal in enumerate(rows):
        words: dict[Hashable, _Said] = {}
        for each in (told[row] for row in of_animal):
            if each is not None and not each.is_unreadable:
                words.setdefault(each.meaning, each)
        if len(words) > 1 and field == _LATEST:
            latest = max(words.values(), key=lambda each: (each.days or (0, 0))[::-1])
            words = {latest.meaning: latest}
        own = known[place]
        if own is None and len(words) == 1:
            cells[place] = next(iter(words.values())).text
        elif len(words) > 1 if own is None else any(map(own.contradicts, words.values())):
            said = [each.text for each in words.values()]
            findings.append(
                _disagreement(records, second, place, field, said, of_animal, own is not None)
            )
    return tuple(cells), findings


def _disagreement(
    records: Records,
    second: Records,
    place: int,
    field: str,
    said: Sequence[str],
    rows: Sequence[int],
    kept: bool,
) -> Finding:
    name, own = records.column("id")[place], records.column(field)[place]
    used = f'the records\' own "{own}" is used' if kept else "none of them is used"
    either = " or ".join(f'"{text}"' for text in said)
    return Finding(
        "facts-disagree",
        f"{name}: {field} is {either} in {second.name} ({_lines(second, rows)}); {used}.",
        "Correct one of the two tables." if kept else f"Correct {second.name}.",
        id=name,
        row=int(records.lines[place]),
        column=records.columns.get(field, second.columns[field]),
        found=own,
    )


def _carried(
    records: Records, second: Records, ids: Sequence[str], rows: Mapping[str, list[int]]
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
        carried[name] = tuple(next(iter(values.get(each, ())), "") for each in ids)
    return carried, split
