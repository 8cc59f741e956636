"""``pairing audit``: can these records be trusted?"""

from pathlib import Path
from typing import Annotated

import typer

from pairing.cli.options import Call
from pairing.errors import OptionError


def audit(
    call: Call,
    records: Annotated[
        str | None,
        typer.Argument(
            metavar="RECORDS",
            help="Table of animals: CSV, .xlsx, .ods or Parquet file, database address, or - .",
        ),
    ] = None,
    view: Annotated[
        Path | None,
        typer.Option(
            "--view", metavar="FILE", help="Write the records as they are used, CSV or .xlsx."
        ),
    ] = None,
    explain: Annotated[
        str | None,
        typer.Option("--explain", metavar="KIND", help="Explain one kind of finding."),
    ] = None,
) -> None:
    """Can these records be trusted?"""
    if explain is not None:
        from pairing.report.explain_content import explain_answer

        call.give(explain_answer(explain, call.about(None, None, None)))
        return
    if records is None:
        raise OptionError("Which records?", remedy="pairing audit RECORDS.csv")
    rules = call.read_policy()
    from pairing.report.audit_content import audit_answer

    audited = call.audited(rules)
    answer = audit_answer(audited, call.about(audited.records, rules, None))
    call.give(answer)
    if call.out is not None and call.format is None and not call.quiet:
        call.show(answer)
    if view is not None:
        from pairing.records.written_view import view_of
        from pairing.report.export import write_view

        header, rows = view_of(audited)
        notes = write_view(
            header, rows, view, inputs=call.inputs, for_spreadsheet=call.for_spreadsheet
        )
        left_out = sum(finding.kind == "missing-id" for finding in audited.findings)
        without = f"; {left_out} without an id left out" if left_out else ""
        for sentence in (*notes, f"Written: {view}, the records as they are used{without}."):
            call.say(sentence)
    if audited.stopping:
        raise typer.Exit(1)
