"""What `audit` says: whether the records can be trusted, then every doubt, grouped by kind."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from pairing.records.findings import KINDS, SEVERITIES
from pairing.report.content import Answer, Section, Table, counted, described

if TYPE_CHECKING:
    from pairing.records.audit import Audit
    from pairing.records.findings import Finding

_COLUMNS = ("kind", "severity", "id", "row", "column", "found", "message", "remedy")
_SHOWN_OF_A_KIND = {"error": 12, "warning": 8, "note": 3}
_SHOWN_THAT_STOP = 60


def audit_answer(audit: Audit, about: dict[str, Any]) -> Answer:
    """The content of `audit`."""
    sections: list[Section] = []
    for severity in SEVERITIES:
        kinds: dict[str, list[Finding]] = {}
        for finding in audit.findings:
            if finding.severity == severity:
                kinds.setdefault(finding.kind, []).append(finding)
        order = sorted(kinds, key=lambda each: (not KINDS[each].stops, -len(kinds[each]), each))
        sections += [_kind_section(severity, kind, kinds[kind]) for kind in order]
    records = audit.records
    sections.append(
        Section(
            "What was read",
            (
                f"{records.name}: {counted(len(records), 'row')}, "
                f"{counted(len(audit.animals), 'animal')} ({records.reading}).",
                "No row was changed.",
            ),
        )
    )
    return Answer(
        headline=_headline(audit),
        sections=tuple(sections),
        fields={
            "rows": len(records),
            "animals": len(audit.animals),
            "decisions_applied": 0,
            "findings": [finding_fields(finding) for finding in audit.findings],
        },
        csv_columns=_COLUMNS,
        csv_rows=tuple(
            tuple(finding_fields(finding)[column] for column in _COLUMNS)
            for finding in audit.findings
        ),
        about=about,
    )


def finding_fields(finding: Finding) -> dict[str, Any]:
    """One finding, machine-readable."""
    return {
        "kind": finding.kind,
        "severity": finding.severity,
        "id": finding.id,
        "row": finding.row,
        "column": finding.column,
        "found": finding.found,
        "message": finding.message,
        "remedy": finding.remedy,
    }


def _headline(audit: Audit) -> tuple[str, ...]:
    counts = [
        counted(audit.count(severity), severity) for severity in SEVERITIES if audit.count(severity)
    ]
    if audit.stopping:
        number = len(audit.stopping)
        return (
            f"These records cannot be used yet: {counted(number, 'fault')} "
            f"{'leaves' if number == 1 else 'leave'} kinship undefined.",
            f"Found: {', '.join(counts)}.",
        )
    if not audit.findings:
        return ("These records can be used: nothing doubtful was found.",)
    return (
        "These records can be used; read the doubts below first.",
        f"Found: {', '.join(counts)}.",
    )


def _kind_section(severity: str, kind: str, findings: list[Finding]) -> Section:
    stops = any(finding.stops for finding in findings)
    shown = findings[: _SHOWN_THAT_STOP if stops else _SHOWN_OF_A_KIND[severity]]
    sentences = [f"{KINDS[kind].meaning[0].upper()}{KINDS[kind].meaning[1:]}."]
    if len(findings) > len(shown):
        sentences.append(
            f"The first {len(shown)} of {len(findings):,}; all are in the answer of --format csv."
        )
    remedies = {finding.remedy for finding in findings}
    headings = ["line", "animal", "what was found"]
    rows = [[finding.row, finding.id, finding.message] for finding in shown]
    if len(remedies) == 1:
        sentences.append(f"What to do: {findings[0].remedy}")
    else:
        headings.append("what to do")
        rows = [[*row, finding.remedy] for row, finding in zip(rows, shown, strict=True)]
    table = Table(tuple(headings), described(rows), numeric=(0,))
    title = f"{counted(len(findings), severity)}: {kind.replace('-', ' ')}"
    return Section(title, tuple(sentences), (table,))
