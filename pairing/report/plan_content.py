"""What `propose` says: the pairs first, then why, who does what, what is kept, how sure."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from pairing.dates import iso
from pairing.plan.candidates import NO_LIMIT, season_start
from pairing.report.content import (
    CAUTION,
    Answer,
    Section,
    Table,
    assumptions,
    counted,
    described,
    kinship_shown,
)
from pairing.report.plan_fields import plan_fields, plan_rows

if TYPE_CHECKING:
    from collections.abc import Mapping

    from pairing.pedigree.descent import Pedigree
    from pairing.plan.pairs import PlannedPair
    from pairing.plan.plan import Plan
    from pairing.plan.todo import Move, Task
    from pairing.policy.rules import Policy
    from pairing.records.table import Records

MOST_EXPLAINED = 25
"""Pairs explained one by one for people; the machine-readable answer explains all."""
MOST_LISTED = 60

RULES_OF_PAIRING = {
    "random_mating": "random mating (expected)",
    "lowest_mean_kinship_first": "lowest mean kinships first",
    "least_inbreeding": "least inbreeding alone",
}


def plan_answer(
    plan: Plan,
    records: Records,
    policy: Policy,
    about: dict[str, Any],
    *,
    by: str = "pair",
    notes: tuple[str, ...] = (),
) -> Answer:
    """The content of a plan.

    Parameters
    ----------
    by
        ``pair``, ``animal`` or ``holder``: what the first tables are grouped by.
    """
    notes = (*plan.notes, *notes)
    order = {
        "pair": (_pairs, _why, _others, _moves),
        "animal": (_by_animal, _pairs, _moves),
        "holder": (_by_holder, _pairs, _moves),
    }[by]
    sections = [section for build in order for section in build(plan)]
    sections += [*_kept(plan), _sure(plan, policy)]
    if notes:
        sections.append(Section("Notes", notes))
    sections.append(assumptions(plan.population, records, policy))
    columns, rows = plan_rows(plan)
    return Answer(
        headline=_headline(plan, policy),
        sections=tuple(sections),
        fields=plan_fields(plan, policy),
        csv_columns=columns,
        csv_rows=rows,
        about=about,
        notes=notes,
        cautions=(CAUTION,),
    )


def _headline(plan: Plan, policy: Policy) -> tuple[str, ...]:
    name = f"{policy.name}: " if policy.name else ""
    start = season_start(plan.population, policy)
    season = f" in the season from {iso(start)}" if start is not None else " next season"
    if plan.outcome is None:
        return (f"{name}No young are wanted{season}, so nobody is paired.",)
    young = plan.outcome.young
    first = f"{name}{counted(len(plan.pairs), 'pair')} for {young} young{season}."
    now, after = plan.population.gene_diversity, plan.outcome.gene_diversity_after
    return (
        first,
        f"Gene diversity goes from {kinship_shown(now)} to {kinship_shown(after)}; young are "
        f"inbred to {kinship_shown(plan.outcome.mean_offspring_inbreeding)} on average and "
        f"{kinship_shown(plan.outcome.highest_offspring_inbreeding)} at most.",
        proof_sentence(plan),
    )


def proof_sentence(plan: Plan) -> str:
    """How near the plan is to the best one within the limits, honestly worded."""
    if plan.proved_best:
        return "Proved best: no other set of pairs within the limits does better."
    gap = plan.gap or 0.0
    return (
        f"No set of pairs within the limits can be better by more than {_gap_shown(gap)} "
        "kinship per young (proved)."
    )


def _gap_shown(gap: float) -> str:
    return f"{max(gap, 1e-6):.6f}" if gap < 1e-4 else f"{gap:.4f}"


def _pairs(plan: Plan) -> list[Section]:
    if not plan.pairs:
        return []
    pedigree = plan.population.pedigree
    moves = {move.pair: move for move in plan.moves}
    rows = [
        (
            pair.rank,
            pedigree.label(pair.sire),
            pedigree.label(pair.dam),
            pair.young,
            kinship_shown(pair.offspring_inbreeding),
            f"{pair.gene_diversity_gain:+.4f}",
            _where(pedigree, pair, moves),
        )
        for pair in plan.pairs[:MOST_LISTED]
    ]
    sentences = [
        "The pair that adds most gene diversity on its own comes first, then the least inbred. "
        "Diversity and inbreeding are shares from 0 to 1; a pair may lower diversity a little "
        "where the number of young wanted, or a standing decision, calls for it."
    ]
    if len(plan.pairs) > MOST_LISTED:
        sentences.append(
            f"The first {MOST_LISTED} of {len(plan.pairs)} pairs; all are in the answer of "
            "--format csv."
        )
    headings = ("", "male", "female", "young", "inbreeding of young", "diversity gained", "where")
    table = Table(headings, described(rows), numeric=(0, 3, 4, 5))
    return [Section("Who with whom", tuple(sentences), (table,))]


def _where(pedigree: Pedigree, pair: PlannedPair, moves: Mapping[tuple[int, int], Move]) -> str:
    if pair.same_holder:
        return pedigree.fact(pair.sire, "holder")
    move = moves.get((pair.sire, pair.dam))
    if move is not None:
        return f"{pedigree.ids[move.animal]} moves to {move.destination}"
    return ""


def _why(plan: Plan) -> list[Section]:
    if not plan.pairs:
        return []
    pedigree = plan.population.pedigree
    sentences = []
    for pair in plan.pairs[:MOST_EXPLAINED]:
        said = " ".join(pair.reasons)
        second = _second_choices(pedigree, pair)
        names = f"{pedigree.label(pair.sire)} x {pedigree.label(pair.dam)}"
        sentences.append(f"{pair.rank}. {names}. {said} {second}")
    if len(plan.pairs) > MOST_EXPLAINED:
        sentences.append(
            f"(The other {len(plan.pairs) - MOST_EXPLAINED} pairs are explained in the answer of "
            "--format json.)"
        )
    return [Section("Why these pairs", tuple(sentences))]


def _second_choices(pedigree: Pedigree, pair: PlannedPair) -> str:
    if not pair.alternatives:
        return "There is no permitted alternative."
    said = []
    for each in pair.alternatives:
        text = f"{pedigree.label(each.sire)} x {pedigree.label(each.dam)}"
        if each.swaps_with is not None:
            other = [pedigree.label(place) for place in each.swaps_with]
            text += f" (swapping with {other[0]} x {other[1]})"
        said.append(f"{text} {_cost_shown(each.cost)}")
    return f"Second choices: {'; '.join(said)}."


def _cost_shown(cost: float) -> str:
    return "at no cost" if cost < 5e-5 else f"for {cost:.4f} more"


def _others(plan: Plan) -> list[Section]:
    pedigree = plan.population.pedigree
    idle = [task for task in plan.tasks if not task.partners]
    if not idle:
        return []
    if len(idle) > MOST_LISTED:
        return [
            Section(
                "The others",
                (
                    f"{counted(len(idle), 'living animal')} are not paired; what each is to do, "
                    "and why, is in --by animal and --format json.",
                ),
            )
        ]
    rows = [(pedigree.label(task.animal), task.what_to_do, task.reason) for task in idle]
    table = Table(("animal", "what to do", "why"), described(rows))
    return [
        Section(
            "The others",
            (f"{counted(len(idle), 'living animal')} not paired this season.",),
            (table,),
        )
    ]


def _moves(plan: Plan) -> list[Section]:
    if not plan.moves:
        return []
    pedigree = plan.population.pedigree
    rows = [
        (
            pedigree.label(move.animal),
            move.origin,
            move.destination,
            None if move.km is None else f"{move.km:.0f}",
            move.reason,
        )
        for move in plan.moves[:MOST_LISTED]
    ]
    sentences = [f"{counted(len(plan.moves), 'transfer')} so that the pairs can meet."]
    if len(plan.moves) > MOST_LISTED:
        sentences.append(f"The first {MOST_LISTED} are shown; all are in --format json.")
    table = Table(("animal", "from", "to", "km", "why"), described(rows), numeric=(3,))
    return [Section("Transfers", tuple(sentences), (table,))]


def _task_row(pedigree: Pedigree, task: Task) -> tuple[object, ...]:
    places = ", then ".join(move.destination for move in task.moves)
    move = f"move to {places}" if places else None
    return (pedigree.label(task.animal), task.what_to_do, move, task.reason)


def _by_animal(plan: Plan) -> list[Section]:
    pedigree = plan.population.pedigree
    rows = [_task_row(pedigree, task) for task in plan.tasks]
    table = Table(("animal", "what to do", "transfer", "why"), described(rows))
    return [Section("What every animal is to do", (), (table,))]


def _by_holder(plan: Plan) -> list[Section]:
    pedigree = plan.population.pedigree
    held: dict[str, list[Task]] = {}
    for task in plan.tasks:
        held.setdefault(pedigree.fact(task.animal, "holder"), []).append(task)
    sections = []
    for holder in sorted(held):
        rows = [_task_row(pedigree, task) for task in held[holder]]
        table = Table(("animal", "what to do", "transfer", "why"), described(rows))
        arriving = [move for move in plan.moves if move.destination == holder and holder]
        sentences = tuple(
            f"{pedigree.label(move.animal)} comes from {move.origin} {move.reason}."
            for move in arriving
        )
        sections.append(Section(holder or "No holder recorded", sentences, (table,)))
    return sections


def _kept(plan: Plan) -> list[Section]:
    if plan.outcome is None:
        return []
    now = plan.population.gene_diversity
    rows: list[tuple[object, ...]] = [
        ("today", None, kinship_shown(now), kinship_shown(plan.population.mean_inbreeding), None)
    ]
    for name, outcome in (
        ("this plan", plan.outcome),
        *((words, plan.compared_with.get(key)) for key, words in RULES_OF_PAIRING.items()),
    ):
        if outcome is not None:
            rows.append(
                (
                    name,
                    outcome.young,
                    kinship_shown(outcome.gene_diversity_after),
                    kinship_shown(outcome.mean_offspring_inbreeding),
                    kinship_shown(outcome.highest_offspring_inbreeding),
                )
            )
    headings = ("", "young", "gene diversity", "mean inbreeding", "highest inbreeding")
    table = Table(headings, described(rows), numeric=(1, 2, 3, 4))
    return [
        Section(
            "What is kept",
            (
                "The same young by other rules of pairing, for comparison. Random mating keeps no "
                "limit; the others keep all of yours. Inbreeding is that of the young; in the "
                "first row, of the animals living today.",
            ),
            (table,),
        )
    ]


def _sure(plan: Plan, policy: Policy) -> Section:
    sentences = [proof_sentence(plan)] if plan.outcome is not None else []
    if plan.population.size:
        known = plan.population.mean_of(plan.population.known_ancestry)
        sentences.append(
            f"{known:.0%} of the living animals' ancestry is known on average; where it is "
            "not, inbreeding is at least what is shown."
        )
    sentences.append("Limits kept: " + "; ".join(limits_kept(plan, policy)) + ".")
    weights = policy.weights
    said = [
        f"{name} {getattr(weights, name):g}"
        for name in ("inbreeding", "diversity", "travel", "merit")
        if getattr(weights, name)
    ]
    sentences.append(f"Weights: {', '.join(said) or 'none'}.")
    if plan.pairs:
        sentences.append(
            "Costs of second choices are in kinship per young: what the plan makes least, the "
            "inbreeding of the young and the diversity lost together."
        )
    return Section("How sure", tuple(sentences))


def limits_kept(plan: Plan, policy: Policy) -> list[str]:
    """The limits that the plan kept, in words."""
    limits = policy.limits
    males = policy.litters_per_male
    kept = [
        "inbreeding of young "
        + (
            "without limit"
            if plan.matings.inbreeding_limit is None
            else f"at most {plan.matings.inbreeding_limit:.4f}"
        ),
        "parents with offspring and full sibs "
        + ("allowed" if policy.allow_closest else "kept apart"),
        "litters a male "
        + ("without limit" if males is None or males >= NO_LIMIT else f"at most {males}"),
        f"litters a female at most {limits.litters_per_female}",
        f"{limits.young_per_litter} young a litter",
    ]
    if limits.share_per_male is not None:
        kept.append(f"one male at most {limits.share_per_male:.0%} of the young")
    if limits.moves is not None:
        kept.append(f"transfers at most {limits.moves}")
    if plan.matings.bars["lines"].any():
        kept.append("lines kept apart")
    return kept
