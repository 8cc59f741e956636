"""Loops of descent: animals recorded as their own ancestors, named in order."""

from __future__ import annotations

from collections import defaultdict
from typing import TYPE_CHECKING

from pairing.records.findings import Finding
from pairing.spelling import listed

if TYPE_CHECKING:
    from collections.abc import Mapping

    from pairing.records.animals import Animal


def loops_of_descent(animals: list[Animal], by_id: Mapping[str, Animal]) -> list[Finding]:
    """Loops of descent: one finding for each knot, with a shortest loop through it."""
    parents = {
        animal.id: [above for above in _rests_on(animal) if above in by_id and above != animal.id]
        for animal in animals
    }
    knotted = _never_reached(parents)
    if not knotted:
        return []
    import networkx

    graph = networkx.DiGraph(
        (parent, child) for child in knotted for parent in parents[child] if parent in knotted
    )
    findings = []
    knots = [knot for knot in networkx.strongly_connected_components(graph) if len(knot) > 1]
    for knot in sorted(knots, key=lambda knot: min(by_id[name].row for name in knot)):
        first = min(knot, key=lambda name: by_id[name].row)
        within = graph.subgraph(knot)
        loop = min(
            (
                networkx.shortest_path(within, child, first)
                for child in sorted(within.successors(first))
            ),
            key=len,
        )
        chain = " is a parent of ".join([first, *loop])
        rest = len(knot) - len(loop)
        also = (
            f" {listed(sorted(knot - set(loop)), most=20)} "
            f"{'is' if rest == 1 else 'are'} caught in it too."
            if rest
            else ""
        )
        findings.append(
            Finding(
                "loop",
                f"{chain}: an animal cannot be its own ancestor.{also}",
                "One of these parents is wrong; correct it or leave it blank.",
                id=first,
                row=by_id[first].row,
                found=", ".join([first, *loop]),
            )
        )
    return findings


def _rests_on(animal: Animal) -> list[str]:
    """Ids whose genes an animal has: its possible parents, and the animal it is a clone of."""
    above = [parent for side in (animal.sire, animal.dam) for parent, _chance in side]
    return [*above, animal.text["clone_of"]] if "clone_of" in animal.text else above


def _never_reached(parents: Mapping[str, list[str]]) -> set[str]:
    """Animals that cannot be put after all their parents: those on a loop, or below one."""
    waiting = {child: len(set(each)) for child, each in parents.items()}
    children: dict[str, list[str]] = defaultdict(list)
    for child, each in parents.items():
        for parent in set(each):
            children[parent].append(child)
    ready = [name for name, count in waiting.items() if count == 0]
    while ready:
        for child in children[ready.pop()]:
            waiting[child] -= 1
            if waiting[child] == 0:
                ready.append(child)
    return {name for name, count in waiting.items() if count > 0}
