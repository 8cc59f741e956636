"""What `audit` says: whether the records can be trusted, then the doubts, gravest first.

Forty findings are a page. However many there are, the answer for people stays one: every
kind is a line of a table, a few rows of the kinds that matter follow, and the file of
``--out`` holds them all, sorted by whom to ask.
"""

from __future__ import annotations

import re
from bisect import bisect_left
from collections import Counter
from dataclasses import dataclass
from itertools import groupby
from typing import TYPE_CHECKING, Any

from pairing.records.explanations import EXPLANATIONS
from pairing.records.findings import KINDS, SEVERITIES
from pairing.report.content import Section, Table, counted, described
from pairing.report.spreadsheet import AnswerInSheets, Sheet

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

    from pairing.records.audit import Audit
    from pairing.records.findings import Finding

FINDING_FIELDS = (
    "kind",
    "severity",
    "id",
    "row",
    "column",
    "found",
    "message",
    "remedy",
    "holder",
)
MOST_SHOWN = 40
"""Findings shown on the page; up to this many, all of them."""
NO_HOLDER = "(holder not recorded)"

_SHOWN_OF_A_KIND = {"stops": 20, "error": 4, "warning": 3, "note": 0}
_NOTES_SHOWN_ALONE = 3
_PAGE_LINES = 60
_LEAST_LINES = 20
_LINES_OF_A_TITLE = 2
_MOST_WITH_REMEDIES = 12
"""Up to so few findings, the page has room for what to do about each."""
_MOST_HOLDERS = 10
_MOST_ACCEPTED = 10
_MOST_HOLDER_SHEETS = 100
_LONGEST_MESSAGE = 400
_STOPS = "error, stops"
_LEGEND = {
    _STOPS: "an error that stops leaves kinship undefined",
    "error": "an error makes a row or a cell unusable",
    "warning": "a warning needs a keeper's decision",
    "note": "a note is worth knowing",
}
_RANK = {severity: place for place, severity in enumerate(SEVERITIES)}


@dataclass(frozen=True, slots=True)
class _Group:
    """The findings of one kind and one severity."""

    kind: str
    severity: str
    stops: bool
    findings: tuple[Finding, ...]

    @property
    def in_words(self) -> str:
        return _STOPS if self.stops else self.severity


def audit_answer(audit: Audit, about: dict[str, Any]) -> AnswerInSheets:
    """The content of `audit`.

    JSON has the findings gravest first; CSV and the workbook have them by holder, then by row,
    as those who mend them need them.
    """
    groups = _groups(audit.findings)
    by_holder = sorted(audit.findings, key=_whom_to_ask)
    rows = tuple(tuple(finding_fields(finding).values()) for finding in by_holder)
    holders = _holder_counts(audit.findings)
    return AnswerInSheets(
        headline=_headline(audit),
        sections=tuple(
            section
            for section in (
                _kinds_section(groups),
                *_shown_sections(audit, groups),
                _holders_section(holders),
                _accepted_section(audit),
                _reading_section(audit),
            )
            if section is not None
        ),
        fields={
            "rows": len(audit.records),
            "animals": len(audit.animals),
            "decisions_applied": audit.decisions_applied,
            "findings": [finding_fields(finding) for finding in audit.findings],
        },
        csv_columns=FINDING_FIELDS,
        csv_rows=rows,
        about=about,
        sheets=_sheets(audit, groups, holders, rows),
    )


def finding_fields(finding: Finding) -> dict[str, Any]:
    """One finding, machine-readable."""
    return {name: getattr(finding, name) for name in FINDING_FIELDS}


def _whom_to_ask(finding: Finding) -> tuple[bool, str, str, int, int, str]:
    """Sorts by holder (animals without one last), then by row, whole columns first."""
    holder = finding.holder or ""
    rank = _RANK[finding.severity]
    return (not holder, holder.casefold(), holder, finding.row or 0, rank, finding.kind)


def _groups(findings: Iterable[Finding]) -> list[_Group]:
    """Findings by kind and severity, gravest first, of equal ones the more frequent."""
    by_kind: dict[tuple[bool, str, str], list[Finding]] = {}
    for finding in findings:
        key = (finding.stops, finding.severity, finding.kind)
        by_kind.setdefault(key, []).append(finding)
    groups = [
        _Group(kind, severity, stops, tuple(found))
        for (stops, severity, kind), found in by_kind.items()
    ]
    return sorted(
        groups,
        key=lambda each: (not each.stops, _RANK[each.severity], -len(each.findings), each.kind),
    )


def _headline(audit: Audit) -> tuple[str, ...]:
    counts = [
        counted(audit.count(severity), severity) for severity in SEVERITIES if audit.count(severity)
    ]
    applied = audit.decisions_applied
    decided = (
        (f"{counted(applied, 'decision')} of the policy {_were(applied)} applied.",)
        if applied
        else ()
    )
    if audit.stopping:
        number = len(audit.stopping)
        return (
            f"These records cannot be used yet: {counted(number, 'fault')} "
            f"{'leaves' if number == 1 else 'leave'} kinship undefined.",
            f"Found: {', '.join(counts)}.",
            *decided,
        )
    if not audit.findings:
        return ("These records can be used: nothing doubtful was found.", *decided)
    first = (
        "These records can be used; read the doubts below first."
        if audit.count("error") or audit.count("warning")
        else "These records can be used; there is nothing to decide, only notes."
    )
    return (first, f"Found: {', '.join(counts)}.", *decided)


def _were(number: int) -> str:
    return "was" if number == 1 else "were"


def _kinds_section(groups: Sequence[_Group]) -> Section | None:
    if not groups:
        return None
    rows = [
        [each.in_words, f"{len(each.findings):,}", each.kind, EXPLANATIONS[each.kind].to_do]
        for each in groups
    ]
    present = {each.in_words for each in groups}
    legend = "; ".join(text for words, text in _LEGEND.items() if words in present)
    return Section(
        "What was found, and what to do",
        (
            f"{legend[0].upper()}{legend[1:]}.",
            "More about a kind: pairing audit --explain KIND",
        ),
        (Table(("severity", "number", "kind", "what to do"), described(rows), numeric=(1,)),),
    )


def _shown_sections(audit: Audit, groups: Sequence[_Group]) -> list[Section]:
    """The first rows of each kind, gravest first, until the page is full."""
    everything = len(audit.findings)
    crowded = everything > MOST_SHOWN
    room = max(_LEAST_LINES, _PAGE_LINES - len(groups))
    shown_in_all = 0
    sections: list[Section] = []
    for group in groups:
        most = everything
        if crowded:
            of_a_kind = _SHOWN_OF_A_KIND["stops" if group.stops else group.severity]
            if groups[0].severity == "note":
                of_a_kind = _NOTES_SHOWN_ALONE
            most = min(of_a_kind, room - _LINES_OF_A_TITLE, MOST_SHOWN - shown_in_all)
        shown = group.findings[: max(most, 0)]
        if shown:
            room -= len(shown) + _LINES_OF_A_TITLE
            shown_in_all += len(shown)
            sections.append(_group_section(audit, group, shown))
    if crowded:
        sections.append(
            Section(
                "The rest",
                (
                    f"{shown_in_all} of {everything:,} findings are shown. "
                    "--out findings.xlsx (or .csv) writes all of them, each with its line and "
                    "what to do, sorted by the holder to ask.",
                ),
            )
        )
    return sections


def _group_section(audit: Audit, group: _Group, shown: Sequence[Finding]) -> Section:
    title = f"{group.kind}: {counted(len(group.findings), group.severity)}"
    if len(shown) < len(group.findings):
        title += f", the first {len(shown)}" if len(shown) > 1 else ", the first"
    sentences: tuple[str, ...] = ()
    messages = [_said(audit, each) for each in shown]
    if len(audit.findings) <= _MOST_WITH_REMEDIES:
        remedies = {each.remedy for each in shown}
        if len(remedies) == 1:
            sentences = (f"What to do: {shown[0].remedy}",)
        else:
            messages = [
                f"{message} {each.remedy}" for message, each in zip(messages, shown, strict=True)
            ]
    return Section(title, sentences, (_lines_and(messages, shown),))


def _lines_and(messages: Sequence[str], findings: Sequence[Finding]) -> Table:
    """Messages behind their lines, in a table without headings, which cost a page's lines."""
    if all(each.row is None for each in findings):
        return Table(("",), described([[message] for message in messages]))
    rows = [
        ["" if each.row is None else f"line {each.row}", message]
        for each, message in zip(findings, messages, strict=True)
    ]
    return Table(("", ""), described(rows), numeric=(0,))


def _said(audit: Audit, finding: Finding) -> str:
    """The message with the animal in it, its name behind its id, and no longer than fits."""
    message = finding.message
    if finding.id is not None:
        word = re.escape(finding.id)
        alone = re.compile(rf"(?<![\w\"]){word}(?![\w\"])")
        name = _name_of(audit, finding)
        if not re.search(rf"(?<!\w){word}(?!\w)", message):
            message = f"{finding.id}: {message}"
        if name:
            message = alone.sub(lambda found: f"{found[0]} {name}", message, count=1)
    if len(message) <= _LONGEST_MESSAGE:
        return message
    part = _LONGEST_MESSAGE // 2
    return f"{message[:part].rstrip()} [... whole with --out ...] {message[-part:].lstrip()}"


def _name_of(audit: Audit, finding: Finding) -> str:
    """The animal's name, where the finding is on a row of its own; else blank."""
    records = audit.records
    if finding.row is None or "name" not in records.fields:
        return ""
    place = bisect_left(records.lines, finding.row)
    if place < len(records) and records.column("id")[place] == finding.id:
        return records.column("name")[place]
    return ""


def _holder_counts(findings: Iterable[Finding]) -> dict[str | None, Counter[str]]:
    """Findings of each severity for each holder, alphabetical, unrecorded last."""
    counts: dict[str | None, Counter[str]] = {}
    for finding in findings:
        counts.setdefault(finding.holder or None, Counter())[finding.severity] += 1
    order = sorted(counts, key=lambda holder: (holder is None, (holder or "").casefold(), holder))
    return {holder: counts[holder] for holder in order}


def _holders_section(counts: Mapping[str | None, Counter[str]]) -> Section | None:
    named = [holder for holder in counts if holder is not None]
    if len(named) < 2:
        return None
    most_first = sorted(
        named, key=lambda holder: tuple(-counts[holder][each] for each in SEVERITIES)
    )
    shown: list[str | None] = [*most_first[:_MOST_HOLDERS]]
    sentences: tuple[str, ...] = ()
    if len(named) > _MOST_HOLDERS:
        left = counted(len(named) - _MOST_HOLDERS, "more holder")
        sentences = (f"{left} with fewer are in the file of --out.",)
    if None in counts:
        shown.append(None)
    rows = [
        [holder or NO_HOLDER, *(f"{counts[holder][each]:,}" for each in SEVERITIES)]
        for holder in shown
    ]
    table = Table(("holder", "errors", "warnings", "notes"), described(rows), numeric=(1, 2, 3))
    return Section("Whom to ask", sentences, (table,))


def _accepted_section(audit: Audit) -> Section | None:
    """Findings that a decision of the policy accepts as right."""
    if not audit.accepted:
        return None
    shown = audit.accepted[:_MOST_ACCEPTED]
    sentences: tuple[str, ...] = ()
    if len(shown) < len(audit.accepted):
        sentences = (f"The first {len(shown)} of {len(audit.accepted):,}.",)
    messages = [f"{each.kind}: {_said(audit, each)}" for each in shown]
    return Section("Accepted by decision", sentences, (_lines_and(messages, shown),))


def _reading_section(audit: Audit) -> Section:
    records = audit.records
    applied = audit.decisions_applied
    return Section(
        "What was read",
        (
            f"{records.name}: {counted(len(records), 'row')}, "
            f"{counted(len(audit.animals), 'animal')} ({audit.reading}).",
            "No row was changed."
            if not applied
            else f"No row was changed; {counted(applied, 'decision')} of the policy "
            f"{_were(applied)} applied to the view of them.",
        ),
    )


def _sheets(
    audit: Audit,
    groups: Sequence[_Group],
    counts: Mapping[str | None, Counter[str]],
    rows: Sequence[tuple[Any, ...]],
) -> tuple[Sheet, ...]:
    """A summary, all findings, and a sheet a holder to send out."""
    place = FINDING_FIELDS.index("holder")
    named = {holder for holder in counts if holder is not None}
    busiest = sorted(named, key=lambda holder: (-counts[holder].total(), holder))
    with_sheet = set(busiest[:_MOST_HOLDER_SHEETS])
    holders = [
        Sheet(holder, FINDING_FIELDS, tuple(theirs))
        for holder, theirs in groupby(rows, key=lambda row: row[place])
        if holder in with_sheet
    ]
    summary = _summary_sheet(audit, groups, counts, len(named) - len(with_sheet))
    return (summary, Sheet("All findings", FINDING_FIELDS, rows), *holders)


def _summary_sheet(
    audit: Audit,
    groups: Sequence[_Group],
    counts: Mapping[str | None, Counter[str]],
    without_sheet: int,
) -> Sheet:
    by_holder = [
        (holder or NO_HOLDER, *(count[severity] for severity in SEVERITIES), count.total())
        for holder, count in counts.items()
    ]
    use = [
        "Each holder's sheet can be sent to that holder; All findings has every finding, also of "
        "animals without a recorded holder.",
        "row is the line of the file (the row of the sheet), the header included; column is the "
        "heading as the file spells it; found is what stands there.",
        "Mend the records where they are kept, or write a decision into the policy, and run the "
        "audit again. This workbook is not read back.",
    ]
    if without_sheet:
        use.append(
            f"{counted(without_sheet, 'holder')} with the fewest findings "
            f"{'has' if without_sheet == 1 else 'have'} no sheet of "
            f"{'its' if without_sheet == 1 else 'their'} own; filter All findings for them."
        )
    rows: list[tuple[Any, ...]] = [
        *((line,) for line in _headline(audit)),
        (f"Records: {audit.records.name}, {counted(len(audit.records), 'row')}.",),
        (f"Decisions of the policy applied: {audit.decisions_applied}.",),
        (),
    ]
    headings = {0, len(rows)}
    rows.append(("kind", "severity", "how many", "what to do", "what it means"))
    rows += [
        (
            each.kind,
            each.in_words,
            len(each.findings),
            EXPLANATIONS[each.kind].to_do,
            KINDS[each.kind].meaning,
        )
        for each in groups
    ]
    headings.add(len(rows) + 1)
    rows += [(), ("holder to ask", "errors", "warnings", "notes", "all"), *by_holder, ()]
    headings.add(len(rows))
    rows += [("How to use this workbook",), *((line,) for line in use)]
    return Sheet("Summary", (), rows, frozenset(headings))
