"""Products of the kinship matrix with vectors, in one pass up and one down; arrays only.

K = T D T' / 2 (HENDERSON_1976), so that K x takes time linear in the number of animals
(COLLEAU_2002). Animals are numbered from 0, parents before their young, -1 is unknown.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.compiling import kernel

if TYPE_CHECKING:
    import numpy.typing as npt

    PlaceArray = npt.NDArray[np.int32]
    FloatArray = npt.NDArray[np.float64]


@kernel
def sampling_variance(sire: PlaceArray, dam: PlaceArray, own: FloatArray) -> FloatArray:
    """D = 1 - (K_ss + K_dd) / 2 of each animal, an unknown parent adding nothing."""
    variance = np.empty(len(own), np.float64)
    for each in range(len(own)):
        first = own[sire[each]] if sire[each] >= 0 else 0.0
        second = own[dam[each]] if dam[each] >= 0 else 0.0
        variance[each] = 1.0 - 0.5 * (first + second)
    return variance


@kernel
def multiply(sire: PlaceArray, dam: PlaceArray, variance: FloatArray, x: FloatArray) -> None:
    """Put K x in place of x, shape (n,)."""
    for each in range(len(x) - 1, -1, -1):
        half = 0.5 * x[each]
        if sire[each] >= 0:
            x[sire[each]] += half
        if dam[each] >= 0:
            x[dam[each]] += half
        x[each] = half * variance[each]
    for each in range(len(x)):
        value = x[each]
        if sire[each] >= 0:
            value += 0.5 * x[sire[each]]
        if dam[each] >= 0:
            value += 0.5 * x[dam[each]]
        x[each] = value


@kernel
def multiply_columns(
    sire: PlaceArray, dam: PlaceArray, variance: FloatArray, x: FloatArray
) -> None:
    """Put K x in place of x, shape (n, k): its columns share the way through the pedigree."""
    columns = x.shape[1]
    for each in range(len(x) - 1, -1, -1):
        first, second, part = sire[each], dam[each], variance[each]
        for column in range(columns):
            half = 0.5 * x[each, column]
            if first >= 0:
                x[first, column] += half
            if second >= 0:
                x[second, column] += half
            x[each, column] = half * part
    for each in range(len(x)):
        first, second = sire[each], dam[each]
        for column in range(columns):
            value = x[each, column]
            if first >= 0:
                value += 0.5 * x[first, column]
            if second >= 0:
                value += 0.5 * x[second, column]
            x[each, column] = value
