"""The content of an answer as plain data: what is said, before anyone decides how it looks.

An `Answer` holds the machine-readable fields beside the sentences and tables for people, so
that the terminal, CSV and JSON all say the same.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from pairing.dates import iso

if TYPE_CHECKING:
    from collections.abc import Sequence

    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population
    from pairing.records.table import Records

Cell = str | int | float | bool | None

CAUTION = (
    "This is about genes only. Whether an animal is fit to breed, mate or travel is for its vet "
    "and keeper to say; permits, animal health rules, welfare law and ownership are local and "
    "come first."
)


@dataclass(frozen=True, slots=True)
class Table:
    """A table for people: headings and cells of text; `numeric` columns align right."""

    headings: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    numeric: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True)
class Section:
    """One question answered: a title, sentences, and tables."""

    title: str
    sentences: tuple[str, ...] = ()
    tables: tuple[Table, ...] = ()


@dataclass(frozen=True, slots=True)
class Answer:
    """All that one command has to say.

    Attributes
    ----------
    headline
        The answer first, in a sentence or two.
    sections
        The rest for people, grouped by question.
    fields
        The machine-readable answer without `about` and `notes`.
    csv_columns, csv_rows
        The machine-readable answer as one table.
    about
        Assumptions that head every machine-readable answer.
    notes
        What a reader must know besides.
    cautions
        What stands below the answer wherever it could hurt an animal.
    """

    headline: tuple[str, ...]
    sections: tuple[Section, ...]
    fields: dict[str, Any]
    csv_columns: tuple[str, ...]
    csv_rows: tuple[tuple[Any, ...], ...]
    about: dict[str, Any]
    notes: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()


def about(
    version: str,
    records: Records | None,
    policy: Policy | None,
    population: Population | None,
    *,
    seed: int,
) -> dict[str, Any]:
    """What an answer rests on: version, date, rules, and fingerprints of the inputs."""
    return {
        "version": version,
        "as_of": None if population is None or population.as_of is None else iso(population.as_of),
        "seed": seed,
        "replicates": None,
        "unknown_parents": None if population is None else population.kinship.unknown_parents,
        "living_rule": None if population is None else population.rule,
        "records_sha256": None if records is None else records.sha256,
        "policy_sha256": None if policy is None else policy.sha256,
    }


def kinship_shown(value: float | None) -> str:
    """A kinship, inbreeding or diversity as people read it: four decimals."""
    return "-" if value is None else f"{value:.4f}"


def share_shown(value: float) -> str:
    """A share as a percentage."""
    return f"{value:.0%}"


def counted(number: int, word: str, plural: str = "") -> str:
    """A number with its noun: ``1 pair``, ``12 pairs``."""
    return f"{number:,} {word if number == 1 else plural or word + 's'}"


def census(population: Population) -> str:
    """The living as males.females.unknown; hermaphrodites are added in words."""
    males, females, unknown = (
        population.count_of_sex(sex) for sex in ("male", "female", "unknown")
    )
    both = population.count_of_sex("hermaphrodite")
    extra = f" and {counted(both, 'hermaphrodite')}" if both else ""
    return f"{males}.{females}.{unknown}{extra}"


def assumptions(population: Population, records: Records, policy: Policy | None) -> Section:
    """The section that every answer about a population closes with: what it rests on."""
    pedigree = population.pedigree
    presumed = int(pedigree.presumed.sum())
    stubs = len(pedigree.view.stubs)
    sentences = [
        f"Records: {records.name}, {counted(len(records), 'row')} ({records.reading}).",
        f"Population: {population.rule}; {population.size:,} animals, {census(population)} "
        "(males.females.unknown).",
        "Parents not recorded count as unrelated to everybody, which may understate inbreeding."
        if population.kinship.unknown_parents == "unrelated"
        else f"Parents not recorded: {population.kinship.unknown_parents}.",
    ]
    if presumed:
        sentences.append(
            f"{counted(presumed, 'animal')} with both parents blank count as founders, as there "
            "is no origin column to tell."
        )
    if stubs:
        sentences.append(
            f"{counted(stubs, 'parent')} without a row of their own count as animals of unknown "
            "ancestry."
        )
    if policy is not None and policy.name:
        sentences.append(f"Policy: {policy.name}.")
    return Section(RESTS_ON, (*sentences, *population.warnings))


RESTS_ON = "What this rests on"


def with_decisions(answer: Answer, applied: int) -> Answer:
    """The answer with a sentence on how many decisions about the records it rests on."""
    if not applied:
        return answer
    sentence = (
        f"{counted(applied, 'decision')} of the policy about the records "
        f"{'is' if applied == 1 else 'are'} applied."
    )
    sections = tuple(
        replace(section, sentences=(*section.sentences, sentence))
        if section.title == RESTS_ON
        else section
        for section in answer.sections
    )
    return replace(answer, sections=sections, notes=(*answer.notes, sentence))


def described(rows: Sequence[Sequence[object]]) -> tuple[tuple[str, ...], ...]:
    """Cells as text, None as a dash."""
    return tuple(tuple("-" if cell is None else str(cell) for cell in row) for row in rows)
