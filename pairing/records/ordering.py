"""Generations of a large pedigree, compiled. Arrays only; `descent_order` stands in front."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.compiling import kernel

if TYPE_CHECKING:
    import numpy.typing as npt

    PlaceArray = npt.NDArray[np.int32]


def generations(sire: PlaceArray, dam: PlaceArray, count: int) -> PlaceArray:
    """Length of the longest line above each of `count` animals, -1 on or below a loop.

    Parameters
    ----------
    sire, dam
        Places of the parents, shape (animals,), negative where unknown; places past the end
        are parents without a row.
    """
    generation = np.zeros(count, dtype=np.int32)
    if not _in_order(sire, dam, generation):
        generation[:] = 0
        _by_depth(sire, dam, generation)
    return generation


@kernel
def by_generation(generation: PlaceArray) -> PlaceArray:
    """Places in order of generation, those of one generation in their own order."""
    n = len(generation)
    starts = np.zeros(generation.max() + 2, dtype=np.int32)
    for place in range(n):
        starts[generation[place] + 1] += 1
    for depth in range(1, len(starts)):
        starts[depth] += starts[depth - 1]
    order = np.empty(n, dtype=np.int32)
    for place in range(n):
        depth = generation[place]
        order[starts[depth]] = place
        starts[depth] += 1
    return order


@kernel
def _in_order(sire: PlaceArray, dam: PlaceArray, generation: PlaceArray) -> bool:
    """Fill in one pass, as far as parents stand before their young; False where they do not."""
    n = len(sire)
    for child in range(n):
        depth = 0
        for parent in (sire[child], dam[child]):
            if parent >= 0 and parent != child:
                if child < parent < n:
                    return False
                depth = max(depth, generation[parent] + 1)
        generation[child] = depth
    return True


@kernel
def _by_depth(sire: PlaceArray, dam: PlaceArray, generation: PlaceArray) -> None:
    """Walk up from each animal with a stack of its own; animals on a loop end with -1."""
    n = len(sire)
    state = np.zeros(n, dtype=np.uint8)  # 0 new, 1 on the stack, 2 done
    stack = np.empty(n + 1, dtype=np.int32)
    for start in range(n):
        if state[start] == 2:
            continue
        top = 0
        stack[0] = start
        state[start] = 1
        while top >= 0:
            child = stack[top]
            depth = np.int32(0)
            waits = False
            for parent in (sire[child], dam[child]):
                if parent < 0 or parent == child:
                    continue
                if parent >= n:
                    depth = max(depth, np.int32(1)) if depth >= 0 else depth
                elif state[parent] == 2:
                    if generation[parent] < 0:
                        depth = np.int32(-1)
                    elif depth >= 0:
                        depth = max(depth, generation[parent] + 1)
                elif state[parent] == 1:
                    depth = np.int32(-1)
                elif not waits:
                    waits = True
                    top += 1
                    stack[top] = parent
                    state[parent] = 1
            if not waits:
                generation[child] = depth
                state[child] = 2
                top -= 1
    # What waited for an animal of its own loop was closed too early: sink all below a loop.
    changed = True
    while changed:
        changed = False
        for child in range(n):
            if generation[child] >= 0:
                for parent in (sire[child], dam[child]):
                    if 0 <= parent < n and parent != child and generation[parent] < 0:
                        generation[child] = -1
                        changed = True
