"""The machine-readable plan: the fields of `propose`, as JSON and as CSV rows."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from pairing.plan.compare import Outcome
    from pairing.plan.pairs import PlannedPair
    from pairing.plan.plan import Plan
    from pairing.plan.todo import Task
    from pairing.policy.rules import Policy


def plan_fields(plan: Plan, policy: Policy) -> dict[str, Any]:
    """The machine-readable plan."""
    ids = plan.population.pedigree.ids
    return {
        "programme": policy.name or None,
        "pairs": [_pair_fields(plan, pair) for pair in plan.pairs],
        "not_paired": [
            {
                "id": ids[task.animal],
                "sex": plan.population.pedigree.sexes[task.animal],
                "reason": task.reason,
            }
            for task in plan.tasks
            if not task.partners
        ],
        "animals": [_animal_fields(plan, task) for task in plan.tasks],
        "moves": [
            {
                "id": ids[move.animal],
                "from": move.origin,
                "to": move.destination,
                "km": move.km,
                "reason": move.reason,
            }
            for move in plan.moves
        ],
        "summary": _summary_fields(plan),
    }


def _pair_fields(plan: Plan, pair: PlannedPair) -> dict[str, Any]:
    population = plan.population
    ids = population.pedigree.ids
    return {
        "rank": pair.rank,
        "sire": ids[pair.sire],
        "dam": ids[pair.dam],
        "young": pair.young,
        "offspring_inbreeding": pair.offspring_inbreeding,
        "mean_kinship_sire": float(population.mean_kinship[pair.sire]),
        "mean_kinship_dam": float(population.mean_kinship[pair.dam]),
        "known_ancestry_sire": float(population.known_ancestry[pair.sire]),
        "known_ancestry_dam": float(population.known_ancestry[pair.dam]),
        "gene_diversity_gain": pair.gene_diversity_gain,
        "same_holder": pair.same_holder,
        "move_km": pair.move_km,
        "reasons": list(pair.reasons),
        "alternatives": [
            {
                "sire": ids[each.sire],
                "dam": ids[each.dam],
                "offspring_inbreeding": each.offspring_inbreeding,
                "cost": each.cost,
            }
            for each in pair.alternatives
        ],
    }


def _animal_fields(plan: Plan, task: Task) -> dict[str, Any]:
    pedigree = plan.population.pedigree
    return {
        "id": pedigree.ids[task.animal],
        "holder": pedigree.fact(task.animal, "holder") or None,
        "what_to_do": task.what_to_do,
        "partner": ", ".join(pedigree.ids[each] for each in task.partners) or None,
        "move_from": task.moves[0].origin if task.moves else None,
        "move_to": ", then ".join(move.destination for move in task.moves) or None,
        "reason": task.reason,
    }


def _summary_fields(plan: Plan) -> dict[str, Any]:
    outcome = plan.outcome
    return {
        "young": plan.season.young,
        "gene_diversity_now": plan.population.gene_diversity,
        "gene_diversity_after": None if outcome is None else outcome.gene_diversity_after,
        "mean_offspring_inbreeding": None if outcome is None else outcome.mean_offspring_inbreeding,
        "highest_offspring_inbreeding": None
        if outcome is None
        else outcome.highest_offspring_inbreeding,
        "objective": None if outcome is None else outcome.objective,
        "best_possible": plan.best_possible,
        "gap": plan.gap,
        "gap_gene_diversity": gap_in_diversity(plan),
        "proved_best": plan.proved_best,
        "compared_with": {
            name: None if other is None else _outcome_fields(other)
            for name, other in plan.compared_with.items()
        },
    }


def gap_in_diversity(plan: Plan) -> float | None:
    """The gap as gene diversity: by how much 1 - m' could be higher if all of it were that."""
    if plan.gap is None or plan.outcome is None:
        return None
    young, size = plan.outcome.young, plan.population.size
    weight = plan.diversity_weight
    return plan.gap * young / (size + young) / weight if weight else None


def _outcome_fields(outcome: Outcome) -> dict[str, Any]:
    return {
        "young": outcome.young,
        "gene_diversity_after": outcome.gene_diversity_after,
        "mean_offspring_inbreeding": outcome.mean_offspring_inbreeding,
        "highest_offspring_inbreeding": outcome.highest_offspring_inbreeding,
        "objective": outcome.objective,
    }


_PAIR_COLUMNS = (
    "rank",
    "sire",
    "dam",
    "young",
    "offspring_inbreeding",
    "mean_kinship_sire",
    "mean_kinship_dam",
    "known_ancestry_sire",
    "known_ancestry_dam",
    "gene_diversity_gain",
    "same_holder",
    "move_km",
    "reasons",
    "alternatives",
)


def plan_rows(plan: Plan) -> tuple[tuple[str, ...], tuple[tuple[Any, ...], ...]]:
    """Columns and rows of the plan as one table, a row a pair."""
    rows = []
    for pair in plan.pairs:
        fields = _pair_fields(plan, pair)
        fields["reasons"] = " ".join(fields["reasons"])
        fields["alternatives"] = "; ".join(
            f"{each['sire']} x {each['dam']}" for each in fields["alternatives"]
        )
        rows.append(tuple(fields[column] for column in _PAIR_COLUMNS))
    return _PAIR_COLUMNS, tuple(rows)
