"""``pairing check``: may this mating go ahead, and where would its inbreeding come from?"""

from typing import Annotated

import typer

from pairing.cli.options import Call, share_option


def check(
    call: Call,
    sire: Annotated[list[str], typer.Option("--sire", metavar="ID", help="The male; repeatable.")],
    dam: Annotated[list[str], typer.Option("--dam", metavar="ID", help="The female; repeatable.")],
    offspring_inbreeding: Annotated[
        str | None,
        typer.Option(
            "--offspring-inbreeding",
            metavar="X",
            help="Highest inbreeding of young, as 0.0625 or 6.25%.",
        ),
    ] = None,
) -> None:
    """May this mating go ahead, and where would its inbreeding come from?"""
    from dataclasses import replace

    rules = call.read_policy(judging=True)
    limit = share_option("--offspring-inbreeding", offspring_inbreeding)
    if limit is not None:
        rules = replace(rules, limits=replace(rules.limits, offspring_inbreeding=limit))
    audit = call.usable(rules)
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
        ),
        audit,
    )
    if any(each.verdict == BREAKS_LIMIT for each in checks):
        raise typer.Exit(1)
