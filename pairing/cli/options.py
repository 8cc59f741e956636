"""The options that all commands share, declared once, and how they reach the library."""

from __future__ import annotations

import functools
import inspect
import os
import shlex
import sys
from dataclasses import dataclass, fields, replace
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from pairing import __version__
from pairing.errors import OptionError
from pairing.spelling import did_you_mean, visible

if TYPE_CHECKING:
    from collections.abc import Callable

    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population
    from pairing.records.audit import Audit
    from pairing.records.table import Records
    from pairing.report.content import Answer

FORMATS = ("table", "csv", "json", "xlsx")
_NO_OPTIONS = ("also_read",)
ENDINGS_NOT_WRITTEN = ("xls", "ods", "html", "htm", "pdf", "parquet", "docx", "svg", "png")


def _option(name: str, meaning: str, metavar: str | None = None) -> Any:
    return typer.Option(name, metavar=metavar, help=meaning)


@dataclass(frozen=True, slots=True)
class Call:
    """The shared options of one call; their annotations declare them to the command line."""

    records: Annotated[
        str,
        typer.Argument(
            metavar="RECORDS",
            help="Table of animals: CSV, .xlsx, .ods or Parquet file, database address, or - .",
        ),
    ]
    policy: Annotated[Path | None, _option("--policy", "The programme's rules (TOML).", "FILE")] = (
        None
    )
    decisions: Annotated[
        list[Path] | None,
        _option("--decisions", "Table of decisions, CSV or .xlsx; repeatable.", "FILE"),
    ] = None
    as_of: Annotated[str | None, _option("--as-of", "Count the living on this day.", "DATE")] = None
    column_map: Annotated[
        list[str] | None,
        _option("--map", "Settle what a column means; repeatable.", "COLUMN=FIELD"),
    ] = None
    facts: Annotated[
        Path | None, _option("--facts", "A second table about the animals, joined by id.", "FILE")
    ] = None
    events: Annotated[
        Path | None, _option("--events", "List of events: id, date, event, from, to.", "FILE")
    ] = None
    table: Annotated[
        str | None, _option("--table", "Sheet of a workbook or table of a database.", "NAME")
    ] = None
    query: Annotated[str | None, _option("--query", "SELECT for a database.", "SQL")] = None
    unknown_parents: Annotated[
        str | None,
        _option("--unknown-parents", "How unknown parents count: unrelated.", "HOW"),
    ] = None
    format: Annotated[
        str | None, _option("--format", "table (default), csv, json or xlsx.", "KIND")
    ] = None
    out: Annotated[
        Path | None,
        _option("--out", "Write the answer to a file; its ending can name the format.", "FILE"),
    ] = None
    for_spreadsheet: Annotated[
        bool,
        typer.Option(
            "--for-spreadsheet", help="In CSV, make text harmless that would run as a formula."
        ),
    ] = False
    seed: Annotated[int, _option("--seed", "Seed of random steps, kept in the answer.", "N")] = 1
    quiet: Annotated[
        bool, typer.Option("--quiet", help="Say nothing on standard error but errors.")
    ] = False
    also_read: tuple[Path, ...] = ()

    def say(self, sentence: str) -> None:
        """A sentence on standard error, unless --quiet."""
        if sentence and not self.quiet:
            print(visible(sentence), file=sys.stderr)  # noqa: T201

    @property
    def inputs(self) -> list[Path]:
        """Files the call reads."""
        named = [self.policy, self.facts, self.events, *(self.decisions or ())]
        files = [Path(each) for each in (*named, *self.also_read) if each is not None]
        return files if self._is_no_file else [Path(self.records), *files]

    @property
    def again(self) -> str:
        """The records with the options by which they were read, to be typed again."""
        given: list[tuple[str, object]] = [
            ("--policy", self.policy),
            *(("--decisions", each) for each in self.decisions or ()),
            *(("--map", each) for each in self.column_map or ()),
            ("--facts", self.facts),
            ("--events", self.events),
            ("--table", self.table),
            ("--query", self.query),
        ]
        words = [f"{option} {quoted(str(value))}" for option, value in given if value is not None]
        return " ".join([quoted(self.records), *words])

    @property
    def _is_no_file(self) -> bool:
        return self.records == "-" or "://" in self.records

    def read_policy(self, *, judging: bool = False) -> Policy:
        """The programme's rules, with the command line's own over them.

        `judging` tells that matings are judged by them, so that a rule which this version
        does not act on is said.
        """
        from pairing.policy.decision_tables import read_decision_tables
        from pairing.policy.reading import read_policy, unused_keys_note
        from pairing.policy.rules import Policy

        policy = Policy() if self.policy is None else read_policy(self.policy)
        policy = read_decision_tables(self.decisions or (), policy)
        if judging:
            self.say(unused_keys_note(policy))
        if self.unknown_parents is not None:
            policy = replace(policy, unknown_parents=self.unknown_parents)
        if self.as_of is not None:
            policy = replace(policy, as_of=_day("--as-of", self.as_of))
        return policy

    def read(self, policy: Policy) -> Records:
        """The records, with the facts and events of the call."""
        from pairing.records.mapping import EVENT_FIELDS
        from pairing.records.readers import read_records

        self.chosen_format()
        without = () if self.events is not None else EVENT_FIELDS
        own = self.column_map or ()
        return read_records(
            self.records,
            column_map=[
                entry
                for entry in self.settled_columns(policy)
                # A policy's words on lists of events do no harm to a call without one.
                if entry in own or entry.rpartition("=")[2].strip() not in without
            ],
            table=self.table,
            query=self.query,
            facts=self.facts,
            events=self.events,
            as_of=policy.as_of,
            rules=policy.records,
        )

    def settled_columns(self, policy: Policy) -> tuple[str, ...]:
        """What the call and then the policy say of columns."""
        return (*(self.column_map or ()), *_not_settled(policy, self.column_map))

    def audited(self, policy: Policy) -> Audit:
        """The records with every finding; how they were read goes to standard error."""
        from pairing.records.audit import audit_records

        audit = audit_records(self.read(policy), policy.records)
        self.say(f"{audit.records.name}: {audit.reading}.")
        if audit.decisions_applied:
            self.say(f"Decisions about the records applied: {audit.decisions_applied}.")
        return audit

    def usable(self, policy: Policy) -> Audit:
        """As `audited`, with a pointer to the doubts, for commands that go on from there."""
        audit = self.audited(policy)
        doubts = audit.count("error") + audit.count("warning")
        if doubts and not audit.stopping:
            self.say(
                f"{doubts} doubt{'s' if doubts > 1 else ''} about the records; "
                f"`pairing audit {self.again}` explains {'them' if doubts > 1 else 'it'}."
            )
        return audit

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
        self, records: Records | None, policy: Policy | None, population: Population | None
    ) -> dict[str, Any]:
        """The assumptions that head the answer."""
        from pairing.report.content import about

        return about(__version__, records, policy, population, seed=self.seed)

    def chosen_format(self) -> str:
        """The format asked for, else the one that the ending of --out names, else a table."""
        ending = self.out.suffix.lower().lstrip(".") if self.out else ""
        if self.format is not None:
            if self.format not in FORMATS:
                raise OptionError(
                    f'--format: "{self.format}" is not known.',
                    remedy=did_you_mean(self.format, FORMATS) or "Use table, csv, json or xlsx.",
                )
            if self.format == "xlsx" and self.out is None:
                raise OptionError(
                    "--format xlsx: a workbook cannot be shown on a screen.",
                    remedy="Say where to write it: --out FILE.xlsx.",
                )
            return self.format
        if ending in ENDINGS_NOT_WRITTEN:
            raise OptionError(
                f"--out: this version writes no .{ending} files.",
                remedy="Use an ending of .csv, .json, .xlsx or .txt.",
            )
        return ending if ending in FORMATS else "table"

    def give(self, answer: Answer, audit: Audit | None = None) -> None:
        """Write the answer where it belongs: to --out, or to standard output.

        `audit` is that of the records the answer rests on: it tells how many decisions about
        them were applied.
        """
        from pairing.report.content import with_decisions
        from pairing.report.export import write_file, written

        answer = with_decisions(answer, 0 if audit is None else audit.decisions_applied)

        chosen = self.chosen_format()
        if self.out is not None:
            content = written(answer, chosen, for_spreadsheet=self.for_spreadsheet)
            write_file(content, self.out, inputs=self.inputs)
            self.say(f"Written: {self.out}")
        elif chosen == "table":
            self.show(answer)
        else:
            sys.stdout.write(written(answer, chosen, for_spreadsheet=self.for_spreadsheet).decode())
            sys.stdout.flush()

    def show(self, answer: Answer) -> None:
        """Lay the answer out on standard output: for a terminal, or as plain text in a pipe."""
        if sys.stdout.isatty():
            from pairing.report.terminal import console_for, print_answer

            print_answer(answer, console_for(sys.stdout))
        else:
            from pairing.report.export import to_text

            sys.stdout.write(to_text(answer))
        sys.stdout.flush()


def with_shared_options(command: Callable[..., None]) -> Callable[..., None]:
    """A command that takes a `Call` and its own options, as typer reads it: with all options.

    The records come first, then the command's own arguments and options, then the shared ones
    it does not declare itself.
    """
    own = [
        parameter
        for name, parameter in inspect.signature(command, eval_str=True).parameters.items()
        if name != "call"
    ]
    named = {parameter.name for parameter in own}
    annotations = inspect.get_annotations(Call, eval_str=True)
    shared = [
        inspect.Parameter(
            each.name,
            inspect.Parameter.KEYWORD_ONLY,
            default=inspect.Parameter.empty if each.name == "records" else each.default,
            annotation=annotations[each.name],
        )
        for each in fields(Call)
        if each.name not in named and each.name not in _NO_OPTIONS
    ]
    taken = {parameter.name for parameter in shared}
    both = sorted(
        [*(each.replace(kind=shared[0].kind) for each in own), *shared],
        key=lambda parameter: parameter.name != "records",
    )

    @functools.wraps(command)
    def run(**values: Any) -> None:
        given = {name: value for name, value in values.items() if name in taken}
        given.setdefault("records", values.get("records") or "-")
        command(
            Call(**given), **{name: value for name, value in values.items() if name not in taken}
        )

    run.__signature__ = inspect.Signature(both)  # type: ignore[attr-defined]
    run.__annotations__ = {each.name: each.annotation for each in both}
    return run


def quoted(word: str) -> str:
    """A word of the command line as it must be typed."""
    if os.name != "nt":
        return shlex.quote(word)
    return f'"{word}"' if " " in word else word


def _not_settled(policy: Policy, column_map: list[str] | None) -> list[str]:
    """Entries of the policy's column map for fields that the call does not settle itself."""
    settled = {entry.rpartition("=")[2].strip() for entry in column_map or ()} - {""}
    return [
        entry
        for entry in policy.records.column_map
        if entry.rpartition("=")[2].strip() not in settled
    ]


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
