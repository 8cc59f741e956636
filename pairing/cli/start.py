"""``pairing start``: a commented policy written from the records, to edit."""

import sys
from dataclasses import replace
from itertools import count
from pathlib import Path

from pairing.cli.options import Call


def start(call: Call) -> None:
    """Write a commented policy from the records, to edit."""
    call = replace(call, format="table")
    out = call.out
    rules = call.read_policy()
    audit = call.usable(rules)
    population = call.population(audit, rules)
    from pairing.report.export import write_file
    from pairing.report.starter import starter_policy

    text = starter_policy(
        population, audit.records, rules=rules.records, column_map=call.settled_columns(rules)
    )
    if out is None:
        sys.stdout.write(text)
        return
    _keep_what_is_there(call, out, text)
    write_file(text, out, inputs=call.inputs)
    call.say(
        f"Written: {out}. Read it, change what is not yours, then: "
        f"pairing propose {replace(call, policy=out, column_map=None).again}"
    )


def _keep_what_is_there(call: Call, out: Path, text: str) -> None:
    """Rules that a keeper has edited are not lost: they are kept beside the new ones."""
    if not out.is_file() or any(out.samefile(each) for each in call.inputs if each.exists()):
        return
    before = out.read_bytes()
    if before != text.encode():
        names = (out.with_name(f"{out.name}.before{number or ''}") for number in count())
        kept = next(name for name in names if not name.exists())
        kept.write_bytes(before)
        call.say(f"What {out} held before is kept as {kept}.")
