"""Parents before offspring: how many generations stand above each animal of a view."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import ROLES

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.records.animals import Animals, PlaceArray

LARGE = 50_000
"""From so many animals on, compiled code finds the order."""


def descent_edges(animals: Animals) -> tuple[PlaceArray, PlaceArray]:
    """Children and parents, one entry an arrow: sure and possible parents, models of clones."""
    children: list[npt.NDArray[np.int32]] = []
    parents: list[npt.NDArray[np.int32]] = []
    for role in ROLES:
        above = getattr(animals, role)
        known = np.flatnonzero(above >= 0).astype(np.int32)
        children.append(known)
        parents.append(above[known])
    extra = [
        (animal, animals.names.find(name))
        for (_role, animal), parts in animals.possible.items()
        for name, _chance in parts
    ]
    extra += list(animals.clones.items())
    if extra:
        children.append(np.array([child for child, _parent in extra], dtype=np.int32))
        parents.append(np.array([parent for _child, parent in extra], dtype=np.int32))
    return np.concatenate(children), np.concatenate(parents)


def generations(animals: Animals) -> PlaceArray:
    """Length of the longest line of descent above each of the view's names.

    It is found once for each view: both the audit and the pedigree ask for it.

    Returns
    -------
    array, shape (names,)
        0 where no parent is known; -1 for animals on a loop of descent, or below one.
    """
    if "generation" not in animals.derived:
        found = _generations(animals)
        found.setflags(write=False)
        animals.derived["generation"] = found
    return animals.derived["generation"]


def _generations(animals: Animals) -> PlaceArray:
    count = len(animals.names)
    if not animals.possible and not animals.clones and count >= LARGE:
        try:
            from pairing.records import ordering
        except ImportError:
            pass
        else:
            return ordering.generations(animals.sire, animals.dam, count)
    children, parents = descent_edges(animals)
    differing = children != parents
    return _by_readiness(children[differing], parents[differing], count)


def by_generation(generation: PlaceArray) -> PlaceArray:
    """Places in order of generation, those of one generation as they stand."""
    if len(generation) >= LARGE:
        try:
            from pairing.records import ordering
        except ImportError:
            pass
        else:
            order: PlaceArray = ordering.by_generation(generation)
            return order
    return np.argsort(generation, kind="stable").astype(np.int32)


def _by_readiness(children: PlaceArray, parents: PlaceArray, count: int) -> PlaceArray:
    """Take animals whose parents are all placed, a generation at a time."""
    arrows = np.unique(children.astype(np.int64) * count + parents)
    child, parent = arrows // count, arrows % count
    order = np.argsort(parent, kind="stable")
    child = child[order].astype(np.int32)
    starts = np.searchsorted(parent[order], np.arange(count + 1)).tolist()
    waiting = np.bincount(child, minlength=count)
    generation = np.full(count, -1, dtype=np.int32)
    ready = np.flatnonzero(waiting == 0)
    depth = 0
    while len(ready):
        generation[ready] = depth
        depth += 1
        if len(ready) < _FEW:
            below = np.array(
                [each for one in ready.tolist() for each in child[starts[one] : starts[one + 1]]],
                dtype=np.int64,
            )
        else:
            flags = np.zeros(count, dtype=bool)
            flags[ready] = True
            below = child[flags[parent[order]]].astype(np.int64)
        if not len(below):
            break
        freed, times = np.unique(below, return_counts=True)
        waiting[freed] -= times
        ready = freed[waiting[freed] == 0]
    return generation


_FEW = 64
