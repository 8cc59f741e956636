"""Every doubt about a set of records, all at once."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from pairing.errors import RecordsError
from pairing.records.checks.breeding_ages import (
    parents_dead,
    parents_left,
    parents_of_unlikely_age,
)
from pairing.records.checks.breeding_lines import lines_broken, lines_differ
from pairing.records.checks.chronology import death_before_birth, parents_younger
from pairing.records.checks.groups import group_rows, rows_of_nothing_but_an_id
from pairing.records.checks.holders import look_alike_holders, with_holders
from pairing.records.checks.identity import look_alike_ids, same_animals_twice
from pairing.records.checks.lifetimes import (
    dates_far_ahead,
    events_after_death,
    events_before_birth,
    statuses_against_dates,
)
from pairing.records.checks.litters import litters_in_doubt, litters_too_close
from pairing.records.checks.loops import loops_of_descent
from pairing.records.checks.marks import marks_on_several_ids
from pairing.records.checks.origins import doubtful_founders, founders_with_parents
from pairing.records.checks.parentage import (
    clones_without_row,
    own_parents,
    parents_without_row,
    roles_and_sexes,
    same_parent_twice,
)
from pairing.records.checks.spreadsheets import spreadsheet_damage
from pairing.records.checks.unlikely_parents import (
    castrates_as_parents,
    clones_differ,
    origins_with_one_parent,
    recipient_dams,
    unreadable_tests,
)
from pairing.records.findings import SEVERITIES, Finding
from pairing.records.litter_rows import litter_numbers_in_doubt
from pairing.records.rules import RecordRules
from pairing.records.view import read_animals

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from pairing.records.animals import Animals
    from pairing.records.table import Records

CHECKS: tuple[Callable[[Animals, RecordRules], list[Finding]], ...] = (
    own_parents,
    same_parent_twice,
    clones_without_row,
    parents_without_row,
    roles_and_sexes,
    death_before_birth,
    parents_younger,
    parents_dead,
    parents_left,
    parents_of_unlikely_age,
    events_before_birth,
    events_after_death,
    dates_far_ahead,
    statuses_against_dates,
    litters_in_doubt,
    litters_too_close,
    founders_with_parents,
    doubtful_founders,
    origins_with_one_parent,
    group_rows,
    rows_of_nothing_but_an_id,
    litter_numbers_in_doubt,
    look_alike_ids,
    spreadsheet_damage,
    same_animals_twice,
    marks_on_several_ids,
    look_alike_holders,
    lines_differ,
    lines_broken,
    castrates_as_parents,
    recipient_dams,
    clones_differ,
    unreadable_tests,
    loops_of_descent,
)
"""Every check of the view; the order is of no consequence."""


@dataclass(frozen=True, slots=True)
class Audit:
    """Records with their cleaned view and every finding.

    Attributes
    ----------
    records
        The rows as written.
    animals
        The view: one entry an animal with a row of its own, in file order.
    findings
        Gravest first, then by row.
    decisions_applied
        How many of the programme's decisions about the records had an effect.
    accepted
        Findings that a decision accepts as right; they are not among `findings`.
    """

    records: Records
    animals: Animals
    findings: tuple[Finding, ...]
    decisions_applied: int = 0
    accepted: tuple[Finding, ...] = ()

    @property
    def reading(self) -> str:
        """How the records were read: file, columns, and the order of day and month."""
        said = [dates.said for dates in self.animals.dates.values() if dates.said]
        return "; ".join([self.records.reading, *said])

    @property
    def stopping(self) -> tuple[Finding, ...]:
        """The findings that leave kinship undefined."""
        return tuple(finding for finding in self.findings if finding.stops)

    def count(self, severity: str) -> int:
        """How many findings have this severity."""
        return sum(finding.severity == severity for finding in self.findings)

    def require_kinship(self) -> None:
        """Raise a `RecordsError` that names every fault leaving kinship undefined, if any."""
        if self.stopping:
            faults = len(self.stopping)
            raise RecordsError(
                f"{self.records.name}: {faults} fault{'s' if faults > 1 else ''} "
                f"leave{'s' if faults == 1 else ''} kinship undefined.",
                details=[finding.line(self.records.name) for finding in self.stopping],
                remedy="Mend the rows named above; `pairing audit` lists every doubt.",
            )


def audit_records(records: Records, rules: RecordRules | None = None) -> Audit:
    """Check records and collect every finding; nothing is raised and no row is changed.

    Parameters
    ----------
    rules
        What the programme has settled about its records, decisions included.
    """
    rules = rules or RecordRules()
    animals, findings = read_animals(records, rules)
    findings = [*records.findings, *findings]
    for check in CHECKS:
        findings += check(animals, rules)
    findings = with_holders(findings, animals)
    kept, accepted, unused = _accepted(findings, rules, animals.aliases)
    without_effect = sum(each.kind == "decision-without-effect" for each in kept) + len(unused)
    kept += unused
    rank = {severity: place for place, severity in enumerate(SEVERITIES)}
    kept.sort(key=lambda finding: (rank[finding.severity], finding.kind, finding.row or 0))
    return Audit(
        records,
        animals,
        tuple(kept),
        decisions_applied=len(rules.decisions) - without_effect,
        accepted=tuple(accepted),
    )


def _accepted(
    findings: list[Finding], rules: RecordRules, aliases: Mapping[str, str]
) -> tuple[list[Finding], list[Finding], list[Finding]]:
    """Findings that remain, those a decision accepts, and a finding for each idle decision."""
    wanted = {
        (each.kind, aliases.get(each.id, each.id)): number
        for number, each in enumerate(rules.decisions, start=1)
        if each.decision == "accept"
    }
    if not wanted:
        return findings, [], []
    accepted = [each for each in findings if (each.kind, each.id) in wanted and not each.stops]
    settled = {(each.kind, each.id) for each in accepted}
    kept = [each for each in findings if (each.kind, each.id) not in settled]
    unused = [
        Finding(
            "decision-without-effect",
            f"decision {number} (accept {kind} of {animal}) changes nothing: there is no such "
            "finding.",
            "Correct it in the policy, or take it out.",
            id=animal,
            found="accept",
        )
        for (kind, animal), number in wanted.items()
        if (kind, animal) not in settled
    ]
    return kept, accepted, unused
