"""Loops of descent: animals recorded as their own ancestors, named in order."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.records.descent_order import descent_edges, generations
from pairing.records.findings import Finding
from pairing.spelling import listed

if TYPE_CHECKING:
    from pairing.records.animals import Animals
    from pairing.records.rules import RecordRules


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
        loop = min(
            (
                networkx.shortest_path(within, child, first)
                for child in sorted(within.successors(first))
            ),
            key=len,
        )
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
