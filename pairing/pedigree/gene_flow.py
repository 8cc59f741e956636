"""The flow of genes: what each animal passes to its descendants, without the matrix of it.

T_ij is the share of i's genes expected to come from j along all lines; T_ii = 1. A pass up
the pedigree gives T' x, a pass down T r, each in time linear in the number of animals
(COLLEAU_2002).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.pedigree.genotypes import Genotypes

    FloatArray = npt.NDArray[np.float64]
    PlaceArray = npt.NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class _Step:
    """The arrows into one level: who passes how much of what to whom.

    `child`, `parent` and `share` have one entry an arrow, sorted by parent; `starts` marks
    where each parent's run begins and `parents` names them.
    """

    child: PlaceArray
    parent: PlaceArray
    share: FloatArray
    parents: PlaceArray
    starts: PlaceArray


@dataclass(frozen=True, slots=True)
class GeneFlow:
    """T of the factors K = T D T' / 2, as passes up and down; `n` genotypes."""

    n: int
    steps: tuple[_Step, ...]

    def up(self, x: FloatArray) -> FloatArray:
        """T' x: what each genotype passes on to the weights x of its descendants."""
        q = np.array(x, dtype=np.float64)
        for step in reversed(self.steps):
            if len(step.child):
                gift = q[step.child]
                gift *= step.share[:, None] if q.ndim == 2 else step.share
                q[step.parents] += np.add.reduceat(gift, step.starts, axis=0)
        return q

    def down(self, r: FloatArray) -> FloatArray:
        """T r: what reaches each genotype of the amounts r that arise in its ancestors."""
        v = np.array(r, dtype=np.float64)
        for step in self.steps:
            if len(step.child):
                gift = v[step.parent]
                gift *= step.share[:, None] if v.ndim == 2 else step.share
                np.add.at(v, step.child, gift)
        return v


def gene_flow(genotypes: Genotypes, among: PlaceArray | None = None) -> GeneFlow:
    """The passes of a pedigree, or of a part of it that holds all its own ancestors.

    Parameters
    ----------
    among
        Ascending places of the part; the passes then number its genotypes from 0.
    """
    n = len(genotypes)
    places = np.arange(n) if among is None else among
    number = np.full(n + 1, -1, dtype=np.int64)
    number[places] = np.arange(len(places))
    sire, dam = genotypes.sire[places], genotypes.dam[places]
    level = genotypes.level[places]
    child = [np.flatnonzero(sire >= 0), np.flatnonzero(dam >= 0)]
    parent = [number[sire[child[0]]], number[dam[child[1]]]]
    share = [np.full(len(each), 0.5) for each in child]
    copied = [
        (number[each], number[source], chance)
        for each, parts in genotypes.copies.items()
        if number[each] >= 0
        for source, chance in parts
    ]
    if copied:
        child.append(np.array([each[0] for each in copied]))
        parent.append(np.array([each[1] for each in copied]))
        share.append(np.array([each[2] for each in copied]))
    children, parents = np.concatenate(child), np.concatenate(parent)
    order = np.lexsort((children, parents, level[children]))
    children, parents = children[order], parents[order]
    shares = np.concatenate(share)[order]
    edges = np.searchsorted(level[children], np.arange(int(level.max(initial=0)) + 2))
    steps = []
    for a, b in zip(edges[:-1].tolist(), edges[1:].tolist(), strict=True):
        unique, starts = np.unique(parents[a:b], return_index=True)
        steps.append(_Step(children[a:b], parents[a:b], shares[a:b], unique, starts))
    return GeneFlow(len(places), tuple(steps))


def ancestors_of(genotypes: Genotypes, places: PlaceArray) -> PlaceArray:
    """Ascending places of the genotypes given and of all they descend from."""
    wanted = np.zeros(len(genotypes) + 1, dtype=bool)
    wanted[places] = True
    for level in reversed(genotypes.levels()):
        here = np.flatnonzero(wanted[level]) + level.start
        wanted[genotypes.sire[here]] = True
        wanted[genotypes.dam[here]] = True
        for each in here.tolist() if genotypes.copies else ():
            for source, _chance in genotypes.copies.get(each, ()):
                wanted[source] = True
    return np.flatnonzero(wanted[:-1])
