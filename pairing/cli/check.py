"""``pairing check``: may this mating go ahead, and where would its inbreeding come from?"""

from typing import Annotated

import typer

from pairing.cli.options import (
    AsOfOption,
    Call,
    FormatOption,
    MapOption,
    OutOption,
    PolicyOption,
    QuietOption,
    RecordsArgument,
    SeedOption,
    UnknownParentsOption,
    share_option,
)


def check(
    records: RecordsArgument,
    sire: Annotated[list[str], typer.Option("--sire", metavar="ID", help="The male; repeatable.")],
    dam: Annotated[list[str], typer.Option("--dam", metavar="ID", help="The female; repeatable.")],
    policy: PolicyOption = None,
    offspring_inbreeding: Annotated[
        str | None,
        typer.Option(
            "--offspring-inbreeding",
            metavar="X",
            help="Highest inbreeding of young, as 0.0625 or 6.25%.",
        ),
    ] = None,
    as_of: AsOfOption = None,
    column_map: MapOption = None,
    unknown_parents: UnknownParentsOption = None,
    output_format: FormatOption = None,
    out: OutOption = None,
    seed: SeedOption = 1,
    quiet: QuietOption = False,
) -> None:
    """May this mating go ahead, and where would its inbreeding come from?"""
    from dataclasses import replace

    call = Call(
        records,
        policy,
        as_of,
        tuple(column_map or ()),
        unknown_parents,
        output_format,
        out,
        seed,
        quiet,
    )
    rules = call.read_policy(judging=True)
    limit = share_option("--offspring-inbreeding", offspring_inbreeding)
    if limit is not None:
        rules = replace(rules, limits=replace(rules.limits, offspring_inbreeding=limit))
    audit = call.audited()
    population = call.population(audit, rules)
    from pairing.plan.check import BREAKS_LIMIT, check_matings
    from pairing.report.check_content import check_answer

    pairs = [(each, other) for each in sire for other in dam]
    checks = check_matings(population, pairs, policy=rules)
    call.give(
        check_answer(
            population,
            checks,
            audit.records,
            rules,
            call.about(audit.records, rules, population),
        )
    )
    if any(each.verdict == BREAKS_LIMIT for each in checks):
        raise typer.Exit(1)
