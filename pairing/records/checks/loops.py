"""Loops of descent: animals recorded as their own ancestors, named in order."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.records.descent_order import descent_edges, generations
from pairing.records.findings import Finding
from pairing.spelling import listed

if TYPE_CHECKING:
    import networkx

    from pairing.records.animals import Animals
    from pairing.records.rules import RecordRules


_SMALL_KNOT = 200


def loops_of_descent(animals: Animals, rules: RecordRules) -> list[Finding]:  # noqa: ARG001
    """Loops of descent: one finding for each knot, with a shortest loop through it."""
    knotted = np.flatnonzero(generations(animals) < 0)
    if not len(knotted):
        return []
    import networkx

    caught = set(knotted.tolist())
    children, parents = descent_edges(animals)
    graph = networkx.DiGraph(
        (parent, child)
        for child, parent in zip(children.tolist(), parents.tolist(), strict=True)
        if parent in caught and child in caught and parent != child
    )
    findings = []
    knots = [knot for knot in networkx.strongly_connected_components(graph) if len(knot) > 1]
    for knot in sorted(knots, key=min):
        first = min(knot)
        within = graph.subgraph(knot)
        first, loop = _shortest(within, first)
        names = [animals.names[each] for each in [first, *loop]]
        others = sorted(animals.names[each] for each in knot - set(loop))
        also = (
            f" {listed(others, most=20)} {'is' if len(others) == 1 else 'are'} caught in it too."
            if others
            else ""
        )
        findings.append(
            Finding(
                "loop",
                f"{' is a parent of '.join(names)}: an animal cannot be its own ancestor.{also}",
                "One of these parents is wrong; correct it or leave it blank.",
                id=names[0],
                row=animals.line(first),
                found=", ".join(names),
            )
        )
    return findings


def _shortest(within: networkx.DiGraph[int], first: int) -> tuple[int, list[int]]:
    """A shortest loop and the animal it starts from; of a large knot, one through `first`."""
    import networkx

    starts = sorted(within) if len(within) <= _SMALL_KNOT else [first]
    loops = (
        (start, networkx.shortest_path(within, child, start))
        for start in starts
        for child in sorted(within.successors(start))
    )
    return min(loops, key=lambda each: (len(each[1]), each[0]))
