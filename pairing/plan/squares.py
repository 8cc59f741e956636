"""The quadratic part of the objective as a sum of squares, one for each ancestor.

Kinship is K = T D T' / 2, so c'Kc = 1/2 sum_j D_j q_j^2 with q = T'c: what the plan's young
would carry of each ancestor j. Ancestors whose genes reach the candidates in the same
proportions share one square. Where all shares are whole multiples of some unit, q_j takes
whole values only, and z_j >= q_j^2 can be cut by the chords between neighbouring whole
values: exact at every plan, and tighter than tangents in between.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.population.diversity import Population

    FloatArray = npt.NDArray[np.float64]
    PlaceArray = npt.NDArray[np.int64]

_FINEST = 2.0**40
"""Shares that are no multiple of this fraction are not treated as whole multiples."""
_LARGEST_SHARE = 2**20
_COLUMNS = 512


@dataclass(frozen=True, slots=True)
class Squares:
    """G squares of sums over candidates: c'Kc = sum_g weight_g q_g^2, q = share @ c.

    Attributes
    ----------
    share
        Coefficients, shape (G, candidates).
    weight
        Factor of each square, shape (G,), positive.
    whole
        Whether q_g is whole at every plan, shape (G,).
    """

    share: FloatArray
    weight: FloatArray
    whole: npt.NDArray[np.bool_]

    def sums(self, count: FloatArray) -> FloatArray:
        """The sums q of contributions `count`."""
        return self.share @ count


def squares_of(population: Population, places: PlaceArray, *, unit: int) -> Squares:
    """The squares of c'Kc among the animals at `places`, every c_x being a multiple of `unit`."""
    flow, variance, of_animal = population.kinship.gene_flow()
    columns = []
    for start in range(0, len(places), _COLUMNS):
        chosen = of_animal[places[start : start + _COLUMNS]]
        ones = np.zeros((flow.n, len(chosen)))
        ones[chosen, np.arange(len(chosen))] = 1.0
        columns.append(flow.up(ones))
    share = np.concatenate(columns, axis=1) if columns else np.zeros((flow.n, 0))
    used = np.flatnonzero((share.max(axis=1, initial=0.0) > 0) & (variance > 0))
    share, weight = share[used], variance[used] / 2
    largest = share.max(axis=1)
    pattern = np.round(share / largest[:, None], 12)
    weight = weight * largest**2
    unique, group = np.unique(pattern, axis=0, return_inverse=True)
    total = np.bincount(group.ravel(), weights=weight, minlength=len(unique)).astype(np.float64)
    return _whole_multiples(unique, total, unit)


def _whole_multiples(pattern: FloatArray, weight: FloatArray, unit: int) -> Squares:
    """Rescale each row, where possible, so that q is whole whenever c is in units."""
    share = pattern.copy()
    weight = weight.copy()
    whole = np.zeros(len(pattern), dtype=bool)
    for number, row in enumerate(pattern):
        least = row[row > 0].min()
        for divisor in (1, 2, 3, 4, 5, 6, 7, 8):
            multiples = row * divisor / least
            if np.allclose(multiples, np.round(multiples), rtol=0, atol=1e-9):
                values = np.round(multiples).astype(np.int64)
                step = math.gcd(*values[values > 0].tolist())
                scaled = values / step
                if scaled.max() <= _LARGEST_SHARE:
                    share[number] = scaled / unit
                    weight[number] *= (row.max() / (scaled.max() / unit)) ** 2
                    whole[number] = True
                break
    return Squares(share, weight, whole)
