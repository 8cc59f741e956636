"""``pairing propose``: who should breed with whom next season, and how many young?"""

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import replace
from typing import TYPE_CHECKING, Annotated

import typer

from pairing.cli.options import Call, share_option
from pairing.errors import OptionError
from pairing.spelling import did_you_mean

if TYPE_CHECKING:
    from pairing.policy.rules import Policy


GROUPINGS = ("pair", "animal", "holder")


def propose(
    call: Call,
    young: Annotated[
        int | None,
        typer.Option("--young", metavar="N", min=0, help="Young wanted this season, exactly."),
    ] = None,
    young_per_litter: Annotated[
        int | None,
        typer.Option("--young-per-litter", metavar="N", min=1, help="Young in a litter."),
    ] = None,
    offspring_inbreeding: Annotated[
        str | None,
        typer.Option(
            "--offspring-inbreeding",
            metavar="X",
            help="Highest inbreeding of young, as 0.0625 or 6.25%.",
        ),
    ] = None,
    litters_per_male: Annotated[
        int | None,
        typer.Option("--litters-per-male", metavar="N", min=0, help="Litters a male may have."),
    ] = None,
    litters_per_female: Annotated[
        int | None,
        typer.Option("--litters-per-female", metavar="N", min=0, help="Litters a female may have."),
    ] = None,
    within: Annotated[
        float | None,
        typer.Option(
            "--within",
            metavar="SECONDS",
            min=0.1,
            help="Stop the exact search after this; the plan may then differ from run to run.",
        ),
    ] = None,
    by: Annotated[
        str, typer.Option("--by", metavar="WHAT", help="Group by pair (default), animal, holder.")
    ] = "pair",
) -> None:
    """Who should breed with whom next season, and how many young?"""
    if by not in GROUPINGS:
        raise OptionError(
            f'--by: "{by}" is not known.',
            remedy=did_you_mean(by, GROUPINGS) or "Use pair, animal or holder.",
        )
    given = {
        "young": young,
        "young_per_litter": young_per_litter,
        "offspring_inbreeding": share_option("--offspring-inbreeding", offspring_inbreeding),
        "litters_per_male": litters_per_male,
        "litters_per_female": litters_per_female,
    }
    rules = _with_limits(call.read_policy(judging=True), given)
    audit = call.usable(rules)
    population = call.population(audit, rules)
    from pairing.plan.plan import propose_plan
    from pairing.policy.reading import unused_keys_note
    from pairing.report.plan_content import plan_answer

    with _progress(call) as progress:
        plan = propose_plan(population, rules, within=within, progress=progress)
    note = unused_keys_note(rules)
    call.give(
        plan_answer(
            plan,
            audit.records,
            rules,
            call.about(audit.records, rules, population),
            by=by,
            notes=(*([note] if note else []), *population.warnings),
        ),
        audit,
    )


def _with_limits(rules: "Policy", given: dict[str, float | None]) -> "Policy":
    """The policy with the limits of the command line over its own."""
    from pairing.policy.keys import MOST

    stated = {name: value for name, value in given.items() if value is not None}
    for name, value in stated.items():
        if value > MOST:
            raise OptionError(
                f"--{name.replace('_', '-')}: {value} is more than any programme counts.",
                remedy=f"Expected a whole number up to {MOST}.",
            )
    return replace(rules, limits=replace(rules.limits, **stated))  # type: ignore[arg-type]


@contextmanager
def _progress(call: Call) -> Iterator[Callable[[int, int], None] | None]:
    """A line of progress on a terminal's standard error; nothing in a pipe or with --quiet."""
    if call.quiet or not sys.stderr.isatty():
        yield None
        return
    from rich.progress import Progress, SpinnerColumn, TextColumn, TimeElapsedColumn

    from pairing.report.terminal import console_for

    with Progress(
        SpinnerColumn(),
        TextColumn("Looking for the best plan"),
        TimeElapsedColumn(),
        console=console_for(sys.stderr),
        transient=True,
    ) as shown:
        task = shown.add_task("plan", total=None)
        yield lambda done, total: shown.update(task, completed=done, total=total)
