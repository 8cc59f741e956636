"""Kinship without its table: products and blocks for pedigrees too large to hold all pairs.

The kinship matrix is T D T' / 2, with T the flow of genes and D the Mendelian sampling
variances (HENDERSON_1976), so that K x needs one pass up the pedigree and one down
(COLLEAU_2002). The inbreeding of everybody comes from the same passes, run for many parents
at once in waves: a parent's turn comes when the inbreeding of all its ancestors is known
(after SARGOLZAEI_2005).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.pedigree.gene_flow import GeneFlow, ancestors_of, gene_flow

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.pedigree.genotypes import Genotypes

    FloatArray = npt.NDArray[np.float64]
    IndexArray = npt.NDArray[np.int32]
    PlaceArray = npt.NDArray[np.int64]

_COLUMNS = 64
"""Right-hand sides of one pass."""


def self_kinship(genotypes: Genotypes) -> tuple[FloatArray, FloatArray]:
    """Self-kinship and Mendelian sampling variance D of every genotype, each of shape (N,).

    Self-kinship is (1 + F) / 2 for an ordinary animal. D_i = 1 - (K_ss + K_dd) / 2, an
    unknown parent adding nothing; for a stand-in it is twice what its self-kinship exceeds
    the mean kinship among its possible parents by.
    """
    waves = _Waves(genotypes)
    own = waves.run()
    return own, waves.variance(np.arange(len(genotypes)))


class _Waves:
    """Computes kinships of mated pairs in an order in which each rests on known ones."""

    def __init__(self, genotypes: Genotypes) -> None:
        self._g = genotypes
        n = len(genotypes)
        self._own = np.full(n, 0.5)
        self._pair_kinship: dict[tuple[int, int], float] = {}
        self._touched_by_groups = sorted({*genotypes.members, *genotypes.selfed_groups()})
        self._parents_kinship: dict[int, float] = {}
        self._updated_each_turn = sorted([*genotypes.copies, *self._touched_by_groups])
        both = np.flatnonzero((genotypes.sire >= 0) & (genotypes.dam >= 0))
        low = np.minimum(genotypes.sire[both], genotypes.dam[both]).astype(np.int64)
        high = np.maximum(genotypes.sire[both], genotypes.dam[both]).astype(np.int64)
        self._children = both
        extra = [
            (min(a, b), max(a, b))
            for parts in genotypes.copies.values()
            for place, (a, _chance) in enumerate(parts)
            for b, _other in parts[:place]
        ]
        keys = np.concatenate([low * n + high, np.array([a * n + b for a, b in extra], np.int64)])
        unique, inverse = np.unique(keys, return_inverse=True)
        self._pair_of_child = inverse[: len(both)]
        self._pairs = np.stack([unique // n, unique % n], axis=1)
        mates = np.bincount(self._pairs.ravel(), minlength=n)
        first_more = mates[self._pairs[:, 0]] >= mates[self._pairs[:, 1]]
        self._pivot = np.where(first_more, self._pairs[:, 0], self._pairs[:, 1])
        self._mate = np.where(first_more, self._pairs[:, 1], self._pairs[:, 0])

    def run(self) -> FloatArray:
        """Self-kinship of every genotype."""
        turn = self._turns()
        values = np.zeros(len(self._pairs))
        child_order = np.argsort(self._pair_of_child, kind="stable")
        sorted_pairs = self._pair_of_child[child_order]
        for wave in range(int(turn.max(initial=-1)) + 1):
            self._update_stand_ins()
            due = np.flatnonzero(turn == wave)
            pivots = np.unique(self._pivot[due])
            for start in range(0, len(pivots), _COLUMNS):
                chosen = pivots[start : start + _COLUMNS]
                here = due[np.isin(self._pivot[due], chosen)]
                values[here] = self._kinship_of_pairs(chosen, here)
                for pair in here.tolist() if self._g.copies else ():
                    key = (int(self._pairs[pair, 0]), int(self._pairs[pair, 1]))
                    self._pair_kinship[key] = float(values[pair])
                first = np.searchsorted(sorted_pairs, here)
                last = np.searchsorted(sorted_pairs, here, side="right")
                for pair, a, b in zip(here.tolist(), first.tolist(), last.tolist(), strict=True):
                    children = self._children[child_order[a:b]]
                    self._own[children] = (1.0 + values[pair]) / 2
                    for each in children.tolist() if self._g.members else ():
                        self._parents_kinship[each] = float(values[pair])
        self._update_stand_ins()
        return self._own

    def _turns(self) -> IndexArray:
        """The wave of every pair: one more than the last wave its pivot's ancestry waits for."""
        g = self._g
        n = len(g)
        sire, dam = g.sire.tolist(), g.dam.tolist()
        pivot = self._pivot.tolist()
        pair_of_child = dict(
            zip(self._children.tolist(), self._pair_of_child.tolist(), strict=True)
        )
        known_after = [-1] * (n + 1)
        turn_of_pivot = [0] * n
        pair_number = (
            {(int(a), int(b)): number for number, (a, b) in enumerate(self._pairs.tolist())}
            if g.copies
            else {}
        )
        for each in range(n):
            above = max(known_after[sire[each]], known_after[dam[each]])
            turn_of_pivot[each] = above + 1
            for place, (a, _chance) in enumerate(g.copies.get(each, ())):
                above = max(above, known_after[a])
                for b, _other in g.copies[each][:place]:
                    pair = pair_number[min(a, b), max(a, b)]
                    above = max(above, turn_of_pivot[pivot[pair]])
            if each in g.copies:
                turn_of_pivot[each] = above + 1
            elif each in pair_of_child:
                above = max(above, turn_of_pivot[pivot[pair_of_child[each]]])
            known_after[each] = above
        return np.array([turn_of_pivot[each] for each in pivot], dtype=np.int32)

    def _kinship_of_pairs(self, pivots: PlaceArray, pairs: PlaceArray) -> FloatArray:
        part = ancestors_of(self._g, np.union1d(pivots, self._mate[pairs]))
        flow = gene_flow(self._g, part)
        unit = np.zeros((len(part), len(pivots)))
        unit[np.searchsorted(part, pivots), np.arange(len(pivots))] = 1.0
        q = flow.up(unit)
        q *= self.variance(part)[:, None] / 2
        v = flow.down(q)
        column = np.searchsorted(pivots, self._pivot[pairs])
        return np.asarray(v[np.searchsorted(part, self._mate[pairs]), column])

    def variance(self, part: PlaceArray) -> FloatArray:
        """D of the genotypes of a part, from the self-kinships known so far."""
        padded = np.append(self._own, 0.0)
        variance: FloatArray = 1.0 - (padded[self._g.sire[part]] + padded[self._g.dam[part]]) / 2
        for each in self._g.copies:
            place = int(np.searchsorted(part, each))
            if place < len(part) and part[place] == each:
                variance[place] = self._stand_in_variance(each)
        for each in self._touched_by_groups:
            place = int(np.searchsorted(part, each))
            if place < len(part) and part[place] == each:
                variance[place] = self._group_variance(each)
        return np.asarray(np.maximum(variance, 0.0))

    def _group_variance(self, each: int) -> float:
        """D of a group, or of the young of two members of one group."""
        sire, dam = int(self._g.sire[each]), int(self._g.dam[each])
        padded = np.append(self._own, 0.0)
        alone = 1.0 - float(padded[sire] + padded[dam]) / 2
        if sire >= 0 and sire == dam and sire in self._g.members:
            alone = 1.0 + self._apart(sire) - 2 * float(self._own[sire])
        return alone / self._g.members.get(each, 1)

    def _apart(self, group: int) -> float:
        """Kinship of two different members of a group."""
        return float(self._own[group]) - self._group_variance(group) / 2

    def _with_groups(self, each: int) -> float:
        """Self-kinship of a group, or of young whose parents are two members of one."""
        sire, dam = int(self._g.sire[each]), int(self._g.dam[each])
        one_group = sire >= 0 and sire == dam and sire in self._g.members
        between = self._parents_kinship.get(each, 0.0)
        alone = (1.0 + (self._apart(sire) if one_group else between)) / 2
        if each not in self._g.members:
            return alone
        own = sum(float(self._own[parent]) for parent in (sire, dam) if parent >= 0)
        apart = own / 4 + between / 2
        return apart + (alone - apart) / self._g.members[each]

    def _stand_in_variance(self, stand_in: int) -> float:
        if stand_in in self._g.pools:
            return 0.0
        return 2.0 * (self._g.own_kinship(stand_in, self._own) - self._within(stand_in))

    def _within(self, stand_in: int) -> float:
        """Mean kinship among the animals a stand-in may be."""
        parts = self._g.copies[stand_in]
        between = sum(
            chance
            * other
            * (self._own[a] if a == b else self._pair_kinship.get((min(a, b), max(a, b)), 0.0))
            for a, chance in parts
            for b, other in parts
        )
        return float(between)

    def _update_stand_ins(self) -> None:
        """Self-kinships that rest on others found since: of stand-ins and of groups."""
        for each in self._updated_each_turn:
            if each in self._g.pools:
                self._own[each] = self._within(each)
            elif each in self._g.copies:
                self._own[each] = self._g.own_kinship(each, self._own)
            else:
                self._own[each] = self._with_groups(each)


def kinship_product(flow: GeneFlow, variance: FloatArray, x: FloatArray) -> FloatArray:
    """K x for x of shape (N,) or (N, k), in time linear in N (COLLEAU_2002)."""
    q = flow.up(x)
    q *= (variance[:, None] if q.ndim == 2 else variance) / 2
    return flow.down(q)


def kinship_block(
    genotypes: Genotypes, variance: FloatArray, rows: PlaceArray, columns: PlaceArray
) -> FloatArray:
    """Kinship of `rows` with `columns`, shape (rows, columns), through their ancestors only."""
    if len(rows) < len(columns):
        return np.ascontiguousarray(kinship_block(genotypes, variance, columns, rows).T)
    part = ancestors_of(genotypes, np.union1d(rows, columns))
    flow = gene_flow(genotypes, part)
    row_numbers = np.searchsorted(part, rows)
    block = np.empty((len(rows), len(columns)))
    for start in range(0, len(columns), _COLUMNS):
        chosen = columns[start : start + _COLUMNS]
        unit = np.zeros((len(part), len(chosen)))
        unit[np.searchsorted(part, chosen), np.arange(len(chosen))] = 1.0
        block[:, start : start + len(chosen)] = kinship_product(flow, variance[part], unit)[
            row_numbers
        ]
    return block
