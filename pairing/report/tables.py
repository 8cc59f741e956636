"""The machine-readable answers as pandas data frames, for the Python interface."""

from __future__ import annotations

from typing import TYPE_CHECKING

from pairing.policy.rules import Policy
from pairing.report.plan_fields import plan_fields
from pairing.report.population_content import ANIMAL_COLUMNS, animal_fields

if TYPE_CHECKING:
    import numpy.typing as npt
    import pandas

    from pairing.plan.plan import Plan
    from pairing.population.diversity import Population


def animal_table(population: Population, policy: Policy | None = None) -> pandas.DataFrame:
    """One row an animal, with the columns of the command `animals`."""
    import pandas

    return pandas.DataFrame(
        animal_fields(population, policy or Policy()), columns=list(ANIMAL_COLUMNS)
    )


def kinship_table(population: Population, places: npt.ArrayLike | None = None) -> pandas.DataFrame:
    """Kinship among the animals at `places` (the living by default), ids on both sides."""
    import numpy as np
    import pandas

    chosen = population.living if places is None else np.asarray(places, dtype=np.int64)
    ids = [population.pedigree.ids[place] for place in chosen.tolist()]
    return pandas.DataFrame(population.kinship.block(chosen, chosen), index=ids, columns=ids)


def pair_table(plan: Plan) -> pandas.DataFrame:
    """One row a pair of the plan, with the fields of the command `propose`."""
    import pandas

    return pandas.DataFrame(plan_fields(plan, Policy())["pairs"])
