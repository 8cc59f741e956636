"""Ids that a spreadsheet has turned into a number, a date or an error."""

from __future__ import annotations

import re
from collections import defaultdict
from itertools import islice
from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import ROLES
from pairing.records.checks.wording import ids_of
from pairing.records.columns import ArrowText, picked
from pairing.records.findings import Finding

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    import numpy.typing as npt

    from pairing.records.animals import Animals
    from pairing.records.rules import RecordRules

_MONTH = "(?:jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)"
_FORMS = {
    "number": r"-?[0-9]+(?:[.,][0-9]+)?e\+[0-9]{2,3}",
    "decimal": r"[0-9]+\.0",
    "date": rf"[0-9]{{4}}-[0-9]{{2}}-[0-9]{{2}}(?:[ t]00:00(?::00)?)?"
    rf"|[0-9]{{1,2}}/[0-9]{{1,2}}/[0-9]{{4}}|{_MONTH}-[0-9]{{1,2}}|[0-9]{{1,2}}-{_MONTH}"
    rf"(?:-[0-9]{{2,4}})?",
    "error": r"#(?:n/a|ref!|value!|name\?|null!|num!|div/0!)",
    "width": r"##+",
}
_SAID = {
    "number": "looks like an id that a spreadsheet turned into a number",
    "decimal": "looks like an id that a spreadsheet turned into a number with decimals",
    "date": "looks like an id that a spreadsheet turned into a date",
    "error": "is a spreadsheet's word for an error and no id",
    "width": "is what a spreadsheet shows when a column is too narrow for a number",
}
_SAID_OF_MANY = {
    "number": "look like ids that a spreadsheet turned into numbers",
    "decimal": "look like ids that a spreadsheet turned into numbers with decimals",
    "date": "look like ids that a spreadsheet turned into dates",
    "error": "are a spreadsheet's words for errors and no ids",
    "width": "are what a spreadsheet shows when a column is too narrow for a number",
}
_REMEDY = "Restore the id from the source, and format the column as text before typing."
# The pattern for lines is also given to another engine, so it uses what both know.
_ANY = f"(?i)^(?:{'|'.join(_FORMS.values())})$"
_LINE = re.compile(_ANY, re.MULTILINE)
_KINDS = {kind: re.compile(form, re.IGNORECASE) for kind, form in _FORMS.items()}
_ROUNDED = re.compile(r"[1-9][0-9]{14}0+")
_KEPT_DIGITS = 15
_FEWEST_ROUNDED = 3
_MOST_ONE_BY_ONE = 20
_MOST_COMPARED = 100_000
_DENSE = 0.05


def spreadsheet_damage(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Ids, of animals and of parents without a row, that a spreadsheet has spoilt."""
    ids = ids_of(animals)
    absent = [animals.names[place] for place in animals.stubs]
    places = [*_damaged(ids), *(place + len(animals) for place in _damaged(absent))]
    by_kind: dict[str, list[int]] = defaultdict(list)
    for place in places:
        name = animals.names[place]
        kind = next(kind for kind, form in _KINDS.items() if form.fullmatch(name))
        by_kind[kind].append(place)
    findings = []
    for kind, damaged in by_kind.items():
        if _way_of_naming(kind, damaged, animals, ids):
            continue
        if len(damaged) > _MOST_ONE_BY_ONE:
            findings.append(_many(animals, kind, damaged))
        else:
            findings += [_one(animals, kind, place) for place in damaged]
    return findings + _rounded(animals, ids)


def _damaged(ids: Sequence[str]) -> list[int]:
    """Places of ids that look like a spreadsheet's work."""
    if not isinstance(ids, ArrowText):
        if not _LINE.search("\n".join(ids)):
            return []
        return [place for place, name in enumerate(ids) if _LINE.fullmatch(name)]
    plain = ArrowText(ids.array.cast("string")) if ids.is_coded else ids
    ends, text = plain.bytes_of()
    # Every form has a sign that stands before the digits in the order of bytes.
    signs = np.flatnonzero(text[ends[0] : ends[-1]] < ord("0"))
    if not len(signs):
        return []
    if len(signs) > _DENSE * len(plain):
        import pyarrow.compute

        found = pyarrow.compute.match_substring_regex(plain.array, _ANY)
        return np.flatnonzero(found.to_numpy(zero_copy_only=False)).tolist()
    rows = np.unique(np.searchsorted(ends, signs + int(ends[0]), side="right") - 1)
    names = picked(plain, rows)
    return [row for row, name in zip(rows.tolist(), names, strict=True) if _LINE.fullmatch(name)]


def _way_of_naming(kind: str, damaged: list[int], animals: Animals, ids: Sequence[str]) -> bool:
    """Whether animals are rather named so on purpose."""
    if kind == "date":
        if 2 * len(damaged) > len(animals.names):
            return True
        return _any(ids, r"^[A-Z][a-z]+-[0-9]+$", rf"(?i)^{_MONTH}-[0-9]+$")
    return kind == "decimal" and _any(ids, r"^[0-9]+\.[0-9]*[1-9]$", "^$")


def _any(ids: Iterable[str], form: str, but: str) -> bool:
    """Whether an id has one form and not the other."""
    wanted, passed_over = re.compile(form), re.compile(but)
    return any(
        wanted.match(name) and not passed_over.match(name) for name in islice(ids, _MOST_COMPARED)
    )


def _where(animals: Animals, place: int) -> tuple[int, str | None]:
    """Row and column of an id; for a parent without a row those of its first young."""
    if place < len(animals):
        return animals.line(place), animals.records.columns["id"]
    for role in ROLES:
        young = animals.children.of(place, role)
        if young:
            return animals.line(young[0]), animals.records.columns.get(role)
    return 0, None


def _one(animals: Animals, kind: str, place: int) -> Finding:
    name = animals.names[place]
    row, column = _where(animals, place)
    return Finding(
        "spreadsheet-damage",
        f'"{name}" {_SAID[kind]}.',
        _REMEDY,
        id=name,
        row=row or None,
        column=column,
        found=name,
    )


def _many(animals: Animals, kind: str, damaged: list[int]) -> Finding:
    named = ", ".join(f'"{animals.names[place]}"' for place in damaged[:3])
    return Finding(
        "spreadsheet-damage",
        f"{len(damaged):,} ids {_SAID_OF_MANY[kind]}: {named} and {len(damaged) - 3:,} more.",
        _REMEDY,
        column=animals.records.columns["id"],
    )


def _rounded(animals: Animals, ids: Sequence[str]) -> list[Finding]:
    """One finding where long numbers have lost their last digits."""
    long, cut = _long_numbers(ids)
    if len(cut) < _FEWEST_ROUNDED or 2 * len(cut) < long:
        return []
    named = ", ".join(f'"{animals.names[place]}"' for place in cut[:3])
    return [
        Finding(
            "spreadsheet-damage",
            f"{len(cut):,} of {long:,} ids of more than {_KEPT_DIGITS} digits end in zeros after "
            f"the {_KEPT_DIGITS}th, as when a spreadsheet has rounded them: {named}.",
            _REMEDY,
            row=animals.line(cut[0]),
            column=animals.records.columns["id"],
        )
    ]


def _long_numbers(ids: Sequence[str]) -> tuple[int, list[int]]:
    """How many ids are longer than a spreadsheet's numbers, and those that it may have cut."""
    if not isinstance(ids, ArrowText):
        longer = [place for place, name in enumerate(ids) if len(name) > _KEPT_DIGITS]
        return len(longer), [place for place in longer if _ROUNDED.fullmatch(ids[place])]
    plain = ArrowText(ids.array.cast("string")) if ids.is_coded else ids
    ends, text = plain.bytes_of()
    long: npt.NDArray[np.int64] = np.flatnonzero(np.diff(ends) > _KEPT_DIGITS)
    ending = long[text[ends[1:][long] - 1] == ord("0")]
    names = picked(plain, ending)
    cut = [
        row for row, name in zip(ending.tolist(), names, strict=True) if _ROUNDED.fullmatch(name)
    ]
    return len(long), cut
