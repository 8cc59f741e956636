"""``pairing start``: a commented policy written from the records, to edit."""

import sys

from pairing.cli.options import (
    AsOfOption,
    Call,
    MapOption,
    OutOption,
    QuietOption,
    RecordsArgument,
)


def start(
    records: RecordsArgument,
    out: OutOption = None,
    as_of: AsOfOption = None,
    column_map: MapOption = None,
    quiet: QuietOption = False,
) -> None:
    """Write a commented policy from the records, to edit."""
    call = Call(records, None, as_of, tuple(column_map or ()), None, "table", out, quiet=quiet)
    rules = call.read_policy()
    audit = call.audited()
    population = call.population(audit, rules)
    from pairing.report.export import write_file
    from pairing.report.starter import starter_policy

    text = starter_policy(population, audit.records)
    if out is None:
        sys.stdout.write(text)
        return
    write_file(text, out, inputs=call.inputs)
    call.say(
        f"Written: {out}. Read it, change what is not yours, then: "
        f"pairing propose {records} --policy {out}"
    )
