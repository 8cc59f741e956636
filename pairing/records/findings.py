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
    "parent-perhaps-another": Kind(
        "warning",
        "a parent has no row of its own, and an animal that has one is written almost so",
    ),
    "nothing-but-an-id": Kind(
        "warning", "a row has an id and nothing else: a heading or a total among the animals?"
    ),
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
    "group-row": Kind("note", "a row stands for several animals that are not told apart"),
    "count-unreadable": Kind("warning", "the number of animals a row stands for cannot be read"),
    "litter-numbers-disagree": Kind(
        "warning", "more young of a litter died or were weaned than were born"
    ),
    "ambiguous-date": Kind(
        "warning", "a date can be read day first or month first; both readings stay possible"
    ),
    "two-digit-year": Kind("warning", "a year has two digits; its century is assumed"),
    "serial-date": Kind(
        "warning", "a date is a spreadsheet's number of days; it is read as the day it stands for"
    ),
    "look-alike-id": Kind("note", "two ids differ only in what is easily mistyped"),
    "spreadsheet-damage": Kind(
        "warning", "an id looks as if a spreadsheet had turned it into a number or a date"
    ),
    "mark-on-two-ids": Kind("warning", "one ring, chip or tattoo is recorded for two ids"),
    "mark-used-again": Kind(
        "note", "a mark was given again after its first bearer had died or left"
    ),
    "same-animal-twice": Kind(
        "note", "two ids agree in parents, birth and sex and in a name or local id"
    ),
    "look-alike-holder": Kind("note", "two names of holders differ only in spelling"),
    "parent-dead": Kind("warning", "a parent died too early to have this young"),
    "parent-left": Kind("note", "a parent had left the programme before this young was conceived"),
    "parent-too-young": Kind("warning", "a parent was too young when its young was born"),
    "parent-too-old": Kind("warning", "a parent was too old when its young was born"),
    "left-before-born": Kind("warning", "an animal left before it was born"),
    "entered-before-born": Kind("warning", "an animal entered before it was born"),
    "event-after-death": Kind(
        "warning", "an animal is recorded as seen, entering or leaving after it died"
    ),
    "date-far-ahead": Kind("warning", "a date lies far after all others"),
    "status-against-dates": Kind("warning", "a status contradicts the dates"),
    "litter-dates-differ": Kind("warning", "animals of one litter are born on different days"),
    "litter-dams-differ": Kind("warning", "animals of one litter have different dams"),
    "litter-too-large": Kind("warning", "a litter is larger than the policy believes"),
    "litters-too-close": Kind("warning", "a dam has litters closer together than a gestation"),
    "possible-parent-impossible": Kind(
        "warning", "one of several possible parents cannot be the parent; it is set aside"
    ),
    "castrate-as-parent": Kind("warning", "a castrated animal is recorded as a parent"),
    "recipient-dam": Kind("warning", "the recorded dam may be the recipient of an embryo"),
    "clone-differs": Kind("warning", "a clone contradicts the animal it copies"),
    "line-differs": Kind("note", "an animal's line is not that of its parents"),
    "line-broken": Kind("note", "a line kept by brother-sister matings has another mating in it"),
    "origin-with-one-parent": Kind(
        "note", "origin says founder although one parent is recorded; the parent is used"
    ),
    "test-unreadable": Kind("warning", "a test result or observation cannot be read"),
    "facts-disagree": Kind("warning", "a second table says something else than the records"),
    "fact-without-animal": Kind(
        "warning", "a row of a second table is about no animal of the records"
    ),
    "events-disagree": Kind("warning", "the list of events contradicts itself or the records"),
    "event-unreadable": Kind("warning", "an event cannot be read; it is not used"),
    "decision-without-effect": Kind(
        "warning", "a decision about the records names something that is not there"
    ),
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
