"""The tabular method: kinship of every pair at once, a generation at a time.

K_ij = (K_sj + K_dj) / 2 for an animal i with parents s and d and any j that is not its
descendant; K_ii = (1 + K_sd) / 2; an unknown parent adds nothing. Source: EMIK_TERRILL_1949.
Exact in double precision down to about 25 generations: every value is a multiple of a power
of one half.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.pedigree.genotypes import Genotypes

    FloatArray = npt.NDArray[np.float64]

_TILE = 64
"""Rows computed together: few enough that their parents' rows stay in the cache."""


def tabular_kinship(genotypes: Genotypes) -> FloatArray:
    """Kinship of all N genotypes.

    Returns
    -------
    array, shape (N, N)
        Symmetric; ordinary diagonal entries are (1 + F) / 2.
    """
    n = len(genotypes)
    kinship = np.zeros((n, n))
    apart: dict[int, float] = {}
    for level in genotypes.levels():
        below = level.start
        for start in range(below, level.stop, _TILE):
            tile = slice(start, min(start + _TILE, level.stop))
            _rows(kinship, genotypes, tile, slice(0, below))
            kinship[:below, tile] = kinship[tile, :below].T
        for start in range(below, level.stop, _TILE):
            tile = slice(start, min(start + _TILE, level.stop))
            _rows(kinship, genotypes, tile, level)
        _diagonal(kinship, genotypes, level)
        _groups(kinship, genotypes, level, apart)
        if any(each in genotypes.copies for each in range(level.start, level.stop)):
            block = kinship[level, level]
            kinship[level, level] = (block + block.T) / 2
    return kinship


def _rows(kinship: FloatArray, genotypes: Genotypes, tile: slice, columns: slice) -> None:
    """Fill rows of a tile from the rows of their parents, for columns already known to those."""
    if columns.stop == columns.start:
        return
    sires, dams = genotypes.sire[tile], genotypes.dam[tile]
    both = np.flatnonzero((sires >= 0) & (dams >= 0))
    if len(both) == len(sires):
        rows = kinship[sires, columns]
        rows += kinship[dams, columns]
        rows *= 0.5
        kinship[tile, columns] = rows
    else:
        for parents in (sires, dams):
            known = np.flatnonzero(parents >= 0)
            kinship[tile.start + known, columns] += 0.5 * kinship[parents[known], columns]
    for each in range(tile.start, tile.stop) if genotypes.copies else ():
        for source, chance in genotypes.copies.get(each, ()):
            kinship[each, columns] += chance * kinship[source, columns]


def _diagonal(kinship: FloatArray, genotypes: Genotypes, level: slice) -> None:
    sires, dams = genotypes.sire[level], genotypes.dam[level]
    known = (sires >= 0) & (dams >= 0)
    inbreeding = np.where(known, kinship[sires, dams], 0.0)
    places = np.arange(level.start, level.stop)
    kinship[places, places] = (1.0 + inbreeding) / 2
    for each in places.tolist() if genotypes.copies else ():
        if each in genotypes.pools:
            parts = dict(genotypes.copies[each])
            sources, chances = list(parts), np.array(list(parts.values()))
            kinship[each, each] = chances @ kinship[np.ix_(sources, sources)] @ chances
        elif each in genotypes.copies:
            kinship[each, each] = genotypes.own_kinship(each, np.diagonal(kinship))


def _groups(
    kinship: FloatArray, genotypes: Genotypes, level: slice, apart: dict[int, float]
) -> None:
    """Self-kinships of groups, and of young of two members of one group.

    `apart` holds the kinship of two different members of each group met so far.
    """
    for each in range(level.start, level.stop) if genotypes.members else ():
        sire, dam = int(genotypes.sire[each]), int(genotypes.dam[each])
        if sire >= 0 and sire == dam and sire in apart:
            kinship[each, each] = (1.0 + apart[sire]) / 2
        if each in genotypes.members:
            count = genotypes.members[each]
            known = [parent for parent in (sire, dam) if parent >= 0]
            apart[each] = float(kinship[np.ix_(known, known)].sum()) / 4
            kinship[each, each] = apart[each] + (kinship[each, each] - apart[each]) / count
