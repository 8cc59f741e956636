"""``pairing audit``: can these records be trusted?"""

import typer

from pairing.cli.options import (
    Call,
    FormatOption,
    MapOption,
    OutOption,
    PolicyOption,
    QuietOption,
    RecordsArgument,
)


def audit(
    records: RecordsArgument,
    policy: PolicyOption = None,
    column_map: MapOption = None,
    output_format: FormatOption = None,
    out: OutOption = None,
    quiet: QuietOption = False,
) -> None:
    """Can these records be trusted?"""
    call = Call(
        records, policy, None, tuple(column_map or ()), None, output_format, out, quiet=quiet
    )
    rules = call.read_policy()
    from pairing.records.audit import audit_records
    from pairing.report.audit_content import audit_answer

    audited = audit_records(call.read())
    call.give(audit_answer(audited, call.about(audited.records, rules, None)))
    if audited.stopping:
        raise typer.Exit(1)
