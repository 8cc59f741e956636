"""Findings: what is doubtful in the records, where, and what to do about it."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Kind:
    """A kind of finding: how grave it is and what it means.

    `stops` is true when it leaves kinship undefined, so that only `audit` can go on.
    The severity is that of the gravest case; a finding may be milder.
    """

    severity: str
    meaning: str
    stops: bool = False


KINDS: dict[str, Kind] = {
    "duplicate-id": Kind(
        "error",
        "several rows have one id: an error where they name different parents, a "
        "warning where other fields differ (those are used as unknown) or a parent is blank "
        "in one of them (the other is used), a note where they say the same",
        stops=True,
    ),
    "own-parent": Kind("error", "an animal is recorded as its own parent", stops=True),
    "loop": Kind("error", "animals are recorded as their own ancestors", stops=True),
    "extra-cells": Kind(
        "error",
        "a row has more cells than the header, so its columns cannot be trusted",
        stops=True,
    ),
    "missing-id": Kind("error", "a row without an id; it is left out"),
    "id-means-unknown": Kind(
        "warning",
        "an animal's id is a word for an unknown parent, so it cannot be named as one",
    ),
    "clone-without-row": Kind(
        "warning", "the animal that another is a clone of is not in the records; not used"
    ),
    "both-sexes": Kind("warning", "one animal is recorded as a sire and as a dam"),
    "sex-against-role": Kind(
        "warning", "a recorded sex does not fit the animal's role as a parent"
    ),
    "sire-is-dam": Kind("warning", "one animal is recorded as both parents of another"),
    "parent-younger": Kind("warning", "a parent is born after its child"),
    "parent-without-row": Kind(
        "note", "a parent has no row of its own; it counts as an animal of unknown ancestry"
    ),
    "death-before-birth": Kind("warning", "an animal dies before it is born"),
    "unreadable-date": Kind("warning", "a date cannot be read; it is used as unknown"),
    "unreadable-sex": Kind("warning", "a word for sex is not known; it is used as unknown"),
    "unreadable-parent": Kind("error", "a list of possible parents cannot be read", stops=True),
    "unreadable-value": Kind("warning", "a value cannot be read; it is used as blank"),
    "sex-not-recorded": Kind("note", "a parent's sex is not recorded, though its role tells it"),
    "doubtful-founder": Kind(
        "note",
        "both parents are blank, there is no origin column, and the animal was born "
        "after the programme's first birth",
    ),
    "founder-with-parents": Kind(
        "note", "origin says founder but parents are recorded; the parents are used"
    ),
    "group-row": Kind("warning", "a row stands for several animals; this version counts it as one"),
    "asked-about": Kind("note", "a column might be a field; its meaning is not guessed"),
    "column-passed-over": Kind("note", "two columns claim one field; one of them is used"),
}
"""Every kind of finding, with its severity."""

SEVERITIES = ("error", "warning", "note")


@dataclass(frozen=True, slots=True)
class Finding:
    """One doubt about the records.

    Attributes
    ----------
    kind
        A key of `KINDS`.
    id
        The animal concerned, or None.
    row
        Line of the file (or row of the sheet, counted from 1, header included), or None.
    column
        Column as the file spells it, or None.
    found
        What the file says.
    message
        A sentence for the keeper.
    remedy
        What to do.
    milder
        The severity where it is less than the kind's gravest.
    holder
        Who keeps (or last kept) the animal, and so can be asked; None when not recorded.
    """

    kind: str
    message: str
    remedy: str
    id: str | None = None
    row: int | None = None
    column: str | None = None
    found: str | None = None
    milder: str | None = None
    holder: str | None = None

    @property
    def severity(self) -> str:
        """``error``, ``warning`` or ``note``."""
        return self.milder or KINDS[self.kind].severity

    @property
    def stops(self) -> bool:
        """Whether it leaves kinship undefined."""
        return KINDS[self.kind].stops and self.severity == "error"

    def line(self, source: str) -> str:
        """The finding as one line of text: file, row, column, what, and what to do."""
        where = [source]
        if self.row is not None:
            where.append(f"line {self.row}")
        if self.column is not None:
            where.append(f'column "{self.column}"')
        return f"{', '.join(where)}: {self.message} {self.remedy}".rstrip()
