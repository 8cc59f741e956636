"""`RecordRules`: what a programme has settled about reading its records."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

    from pairing.dates import Age, AgeWindow, DateRange

DATE_ORDERS = ("day-first", "month-first")
DECISIONS = {
    "use-row": "of several rows with one id, believe the one on line `row`",
    "merge": "the ids of `also` are the animal `id`",
    "drop-link": "the recorded `parent` (sire or dam) of `id` is not used",
    "set": "for `id`, read `value` in the field `field`",
    "accept": "the finding `kind` about `id` is right as recorded",
}
"""What may be decided about records, each with its meaning; the rows themselves never change."""


@dataclass(frozen=True, slots=True)
class Decision:
    """One decision about the records: it changes the view of them, never the rows.

    Attributes
    ----------
    decision
        A key of `DECISIONS`.
    id
        The animal concerned, as the records spell it.
    row
        For ``use-row``: line of the file (row of the sheet).
    also
        For ``merge``: the other ids of the animal.
    parent
        For ``drop-link``: ``sire`` or ``dam``.
    field, value
        For ``set``: a field of a record and what to read in it.
    kind
        For ``accept``: the kind of finding.
    who, when, why
        Who decided, when, and for what reason; kept and shown.
    """

    decision: str
    id: str
    row: int | None = None
    also: tuple[str, ...] = ()
    parent: str = ""
    field: str = ""
    value: str = ""
    kind: str = ""
    who: str = ""
    when: DateRange | None = None
    why: str = ""


@dataclass(frozen=True, slots=True)
class RecordRules:
    """How records are read and judged.

    Attributes
    ----------
    column_map
        As the ``--map`` options of a call.
    date_order
        ``day-first`` or ``month-first`` for dates such as 03/04/2019; None to find out.
    selfing
        Whether one animal may rightly be both parents of another.
    parent_age
        ``(line, sex)`` to the ages at which births are believed, the line "" standing for
        all others; empty when any age is.
    gestation
        Time from conception to birth; None when not told.
    sperm_storage
        How long after a sire's death (or departure) young of his may still be conceived.
    stored_semen
        Sires of whom semen is stored: their young may be conceived after their death.
    largest_litter
        Young in a litter at most; None when not told.
    decisions
        What the programme has decided about doubtful rows.
    """

    column_map: tuple[str, ...] = ()
    date_order: str | None = None
    selfing: bool = False
    parent_age: Mapping[tuple[str, str], AgeWindow] = field(default_factory=dict)
    gestation: Age | None = None
    sperm_storage: Age | None = None
    stored_semen: frozenset[str] = frozenset()
    largest_litter: int | None = None
    decisions: tuple[Decision, ...] = ()

    @property
    def aliases(self) -> dict[str, str]:
        """Every merged id to the id its animal is kept under."""
        kept = {
            also: each.id
            for each in self.decisions
            if each.decision == "merge"
            for also in each.also
        }

        def last(name: str) -> str:
            seen = {name}
            while name in kept and kept[name] not in seen:
                name = kept[name]
                seen.add(name)
            return name

        return {also: last(also) for also in kept}
