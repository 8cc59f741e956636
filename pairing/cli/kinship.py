"""``pairing kinship``: how related is everybody?"""

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from pairing.cli.options import Call
from pairing.errors import OptionError
from pairing.spelling import did_you_mean

if TYPE_CHECKING:
    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population

SETS = ("living", "candidates", "all")


def kinship(
    call: Call,
    among: Annotated[
        str,
        typer.Option(
            "--among",
            metavar="WHO",
            help="living (default), candidates, all, or a file with one id a line.",
        ),
    ] = "living",
    long: Annotated[
        bool, typer.Option("--long", help="CSV as first,second,kinship instead of a square.")
    ] = False,
) -> None:
    """How related is everybody?"""
    if among not in SETS:
        call = replace(call, also_read=(Path(among),))
    rules = call.read_policy()
    audit = call.usable(rules)
    population = call.population(audit, rules)
    from pairing.report.population_content import kinship_answer

    call.give(
        kinship_answer(
            population,
            audit.records,
            rules,
            call.about(audit.records, rules, population),
            places=_places(population, rules, among),
            among=among if among in SETS else f"named in {Path(among).name}",
            long=long,
        ),
        audit,
    )


def _places(population: "Population", rules: "Policy", among: str) -> Any:
    import numpy as np

    if among == "living":
        return population.living
    if among == "all":
        return population.pedigree.file_order.astype(np.int64)
    if among == "candidates":
        from pairing.plan.candidates import find_candidates

        found = find_candidates(population, rules)
        return np.concatenate([found.males, found.females])
    try:
        lines = Path(among).read_text(encoding="utf-8-sig").splitlines()
    except (OSError, UnicodeDecodeError):
        raise OptionError(
            f'--among: "{among}" is neither {", ".join(SETS)} nor a readable file.',
            remedy=did_you_mean(among, SETS) or "Give a text file with one id a line.",
        ) from None
    ids = [line.split(",")[0].strip().strip('"') for line in lines]
    wanted = [each for each in ids if each and each.casefold() != "id"]
    if not wanted:
        raise OptionError(f"--among: {among} names no animal.", remedy="Give one id a line.")
    return np.array(population.pedigree.place(*wanted), dtype=np.int64)
