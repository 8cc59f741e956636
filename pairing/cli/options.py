"""The options that commands share, and how their values reach the library."""

from __future__ import annotations

import sys
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from pairing import __version__
from pairing.errors import OptionError
from pairing.spelling import did_you_mean, visible

if TYPE_CHECKING:
    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population
    from pairing.records.audit import Audit
    from pairing.records.table import Records
    from pairing.report.content import Answer

RecordsArgument = Annotated[
    str, typer.Argument(metavar="RECORDS", help="Table of animals: CSV or .xlsx file, or - .")
]
PolicyOption = Annotated[
    Path | None, typer.Option("--policy", metavar="FILE", help="The programme's rules (TOML).")
]
AsOfOption = Annotated[
    str | None,
    typer.Option("--as-of", metavar="DATE", help="Count the living on this day."),
]
MapOption = Annotated[
    list[str] | None,
    typer.Option("--map", metavar="COLUMN=FIELD", help="Settle what a column means; repeatable."),
]
UnknownParentsOption = Annotated[
    str | None,
    typer.Option("--unknown-parents", metavar="HOW", help="How unknown parents count: unrelated."),
]
FormatOption = Annotated[
    str | None,
    typer.Option("--format", metavar="KIND", help="table (default), csv or json."),
]
OutOption = Annotated[
    Path | None,
    typer.Option(
        "--out", metavar="FILE", help="Write the answer to a file; its ending can name the format."
    ),
]
SeedOption = Annotated[
    int, typer.Option("--seed", metavar="N", help="Seed of random steps, kept in the answer.")
]
QuietOption = Annotated[
    bool, typer.Option("--quiet", help="Say nothing on standard error but errors.")
]

FORMATS = ("table", "csv", "json")
ENDINGS_NOT_WRITTEN = ("xlsx", "xls", "ods", "html", "htm", "pdf", "parquet", "docx", "svg", "png")


@dataclass(frozen=True, slots=True)
class Call:
    """The shared options of one call."""

    records: str
    policy: Path | None = None
    as_of: str | None = None
    column_map: tuple[str, ...] = ()
    unknown_parents: str | None = None
    format: str | None = None
    out: Path | None = None
    seed: int = 1
    quiet: bool = False
    also_read: tuple[Path, ...] = ()

    def say(self, sentence: str) -> None:
        """A sentence on standard error, unless --quiet."""
        if sentence and not self.quiet:
            print(visible(sentence), file=sys.stderr)  # noqa: T201

    @property
    def inputs(self) -> list[Path]:
        """Files the call reads."""
        named = [Path(each) for each in (self.records, self.policy) if each not in (None, "-")]
        return [*named, *self.also_read]

    def read(self) -> Records:
        """The records, and on standard error how they were read."""
        from pairing.records.readers import read_records

        self.chosen_format()
        records = read_records(self.records, column_map=self.column_map)
        self.say(f"{records.name}: {records.reading}.")
        return records

    def audited(self) -> Audit:
        """The records with every finding, and on standard error how many there are."""
        from pairing.records.audit import audit_records

        audit = audit_records(self.read())
        doubts = audit.count("error") + audit.count("warning")
        if doubts and not audit.stopping:
            self.say(
                f"{doubts} doubt{'s' if doubts > 1 else ''} about the records; "
                f"`pairing audit {self.records}` explains {'them' if doubts > 1 else 'it'}."
            )
        return audit

    def read_policy(self, *, judging: bool = False) -> Policy:
        """The programme's rules, with the command line's own over them.

        `judging` tells that matings are judged by them, so that a rule which this version
        does not act on is said.
        """
        from pairing.policy.reading import read_policy, unused_keys_note
        from pairing.policy.rules import Policy

        policy = Policy() if self.policy is None else read_policy(self.policy)
        if judging:
            self.say(unused_keys_note(policy))
        if self.unknown_parents is not None:
            policy = replace(policy, unknown_parents=self.unknown_parents)
        if self.as_of is not None:
            policy = replace(policy, as_of=_day("--as-of", self.as_of))
        return policy

    def population(self, audit: Audit, policy: Policy) -> Population:
        """The living population of audited records."""
        from pairing.kinship.engine import kinship
        from pairing.pedigree.descent import build_pedigree
        from pairing.population.diversity import living_population

        pedigree = build_pedigree(audit, litter_shares_sire=policy.litter_shares_sire)
        kin = kinship(pedigree, unknown_parents=policy.unknown_parents)
        population = living_population(kin, as_of=policy.as_of, rule=policy.living)
        for warning in population.warnings:
            self.say(f"Note: {warning}")
        return population

    def about(
        self, records: Records, policy: Policy | None, population: Population | None
    ) -> dict[str, Any]:
        """The assumptions that head the answer."""
        from pairing.report.content import about

        return about(__version__, records, policy, population, seed=self.seed)

    def chosen_format(self) -> str:
        """The format asked for, else the one that the ending of --out names, else a table."""
        if self.format is not None:
            if self.format not in FORMATS:
                raise OptionError(
                    f'--format: "{self.format}" is not known.',
                    remedy=did_you_mean(self.format, FORMATS) or "Use table, csv or json.",
                )
            return self.format
        ending = self.out.suffix.lower().lstrip(".") if self.out else ""
        if ending in ENDINGS_NOT_WRITTEN:
            raise OptionError(
                f"--out: this version writes no .{ending} files.",
                remedy="Use an ending of .csv, .json or .txt.",
            )
        return ending if ending in ("csv", "json") else "table"

    def give(self, answer: Answer) -> None:
        """Write the answer where it belongs: to --out, or to standard output."""
        chosen = self.chosen_format()
        if self.out is not None:
            from pairing.report.export import WRITERS, write_file

            write_file(WRITERS[chosen](answer), self.out, inputs=self.inputs)
            self.say(f"Written: {self.out}")
        elif chosen == "table" and sys.stdout.isatty():
            from pairing.report.terminal import console_for, print_answer

            print_answer(answer, console_for(sys.stdout))
            sys.stdout.flush()
        else:
            from pairing.report.export import WRITERS

            sys.stdout.write(WRITERS[chosen](answer))
            sys.stdout.flush()


def _day(option: str, text: str) -> Any:
    from pairing.dates import EXPECTED, parse_date

    day = parse_date(text)
    if day is None:
        raise OptionError(f'{option}: "{text}" is not a date.', remedy=f"Expected {EXPECTED}.")
    return day


def share_option(option: str, text: str | None) -> float | None:
    """A share such as ``0.0625`` or ``6.25%`` from the command line."""
    if text is None:
        return None
    from pairing.policy.keys import NotUnderstoodError, share

    try:
        return share(text if text.strip().endswith("%") else float(text))
    except (NotUnderstoodError, ValueError):
        raise OptionError(
            f'{option}: "{text}" is not a share.',
            remedy="Expected a share from 0 to 1 such as 0.0625, or 6.25%.",
        ) from None
