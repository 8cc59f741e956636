"""Ids to row numbers over Arrow's text buffers: a hash table with open addressing, compiled.

Arrays only; `naming` stands in front. Mapping ids is what reading a large herdbook costs, so
the table keeps 32 bits of each hash beside the row and compares bytes only where they agree.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from numba import types
from numba.extending import intrinsic

from pairing.compiling import kernel, part_of_kernels

if TYPE_CHECKING:
    import numpy.typing as npt

    CodeArray = npt.NDArray[np.int32]
    ByteArray = npt.NDArray[np.uint8]
    SlotArray = npt.NDArray[np.uint64]

# Multipliers of the 64-bit mixing step: odd, with about half their bits set.
_GOLDEN = np.uint64(0x9E3779B97F4A7C15)
_MIX = np.uint64(0xD6E8FEB86659FD93)
_HALF = np.uint64(32)
_TOP = np.uint64(20)
_LOW = np.uint64(0xFFFFFFFF)


@intrinsic
def _eight_bytes(typing_context: Any, text: Any, place: Any) -> Any:  # noqa: ARG001
    """Eight bytes of a uint8 array from `place` on as one number, aligned or not."""
    signature = types.uint64(text, types.int64)

    def generate(context: Any, builder: Any, signature: Any, arguments: Any) -> Any:
        from llvmlite import ir

        array = context.make_array(signature.args[0])(context, builder, arguments[0])
        address = builder.add(builder.ptrtoint(array.data, ir.IntType(64)), arguments[1])
        return builder.load(builder.inttoptr(address, ir.IntType(64).as_pointer()), align=1)

    return signature, generate


@part_of_kernels
def _hash(text: ByteArray, start: int, length: int) -> Any:
    value = np.uint64(length) * _GOLDEN
    while length >= 8:
        value = (value ^ _eight_bytes(text, start)) * _MIX
        value ^= value >> _HALF
        start += 8
        length -= 8
    if length:
        rest = np.uint64(0)
        for place in range(length):
            rest |= np.uint64(text[start + place]) << np.uint64(8 * place)
        value = (value ^ rest) * _MIX
        value ^= value >> _HALF
    return value * _GOLDEN


@part_of_kernels
def _same(one: ByteArray, first: Any, other: ByteArray, second: Any, length: Any) -> bool:
    while length >= 8:
        if _eight_bytes(one, first) != _eight_bytes(other, second):
            return False
        first += 8
        second += 8
        length -= 8
    for place in range(length):  # noqa: SIM110
        if one[first + place] != other[second + place]:
            return False
    return True


_FREE = np.uint64(0xFFFFFFFFFFFFFFFF)
_BATCH = 32


@kernel
def build(ends: CodeArray, text: ByteArray) -> tuple[SlotArray, CodeArray]:
    """A hash table of ids, and each row's first row with the same id.

    Parameters
    ----------
    ends, text
        Offsets, shape (n + 1,), and bytes of the ids.

    Returns
    -------
    slots, first
        A slot holds a row in its upper and a piece of its hash in its lower 32 bits. `first`
        has shape (n,), -1 for a blank id.
    """
    n = len(ends) - 1
    size = 16
    while size < 2 * n:
        size <<= 1
    slots = np.full(size, _FREE, np.uint64)
    first = np.empty(n, np.int32)
    seen = np.empty(1, np.uint64)  # keeps the early reads of a batch from being optimised away
    starts = np.zeros(_BATCH, np.int64)
    lengths = np.zeros(_BATCH, np.int64)
    places = np.zeros(_BATCH, np.int64)
    tags = np.zeros(_BATCH, np.uint64)
    near = np.uint64(0)
    for begin in range(0, n, _BATCH):
        here = min(_BATCH, n - begin)
        for each in range(here):
            starts[each] = ends[begin + each]
            lengths[each] = np.int64(ends[begin + each + 1]) - starts[each]
            value = _hash(text, starts[each], lengths[each])
            places[each] = np.int64(value >> _TOP) & (size - 1)
            tags[each] = value & _LOW
        for each in range(here):
            near ^= slots[places[each]]
        for each in range(here):
            row = begin + each
            if lengths[each] == 0:
                first[row] = -1
                continue
            at = places[each]
            first[row] = row
            while slots[at] != _FREE:
                if slots[at] & _LOW == tags[each]:
                    known = np.int64(slots[at] >> _HALF)
                    other = np.int64(ends[known])
                    alike = np.int64(ends[known + 1]) - other == lengths[each]
                    if alike and _same(text, other, text, starts[each], lengths[each]):
                        first[row] = known
                        break
                at = (at + 1) & (size - 1)
            if first[row] == row:
                slots[at] = (np.uint64(row) << _HALF) | tags[each]
    seen[0] = near
    return slots, first


@kernel
def renumber(slots: SlotArray, number: CodeArray) -> None:
    """Put other numbers in place of the rows of a table."""
    for at in range(len(slots)):
        if slots[at] != _FREE:
            row = np.int64(slots[at] >> _HALF)
            slots[at] = (np.uint64(number[row]) << _HALF) | (slots[at] & _LOW)


@kernel
def find(
    ends: CodeArray, text: ByteArray, id_ends: CodeArray, id_text: ByteArray, slots: SlotArray
) -> CodeArray:
    """Row of each cell's id: -1 where the cell is blank, -2 where no row has that id.

    Cells go in batches, so that the far reads of one need not wait for those of another.
    """
    n = len(ends) - 1
    size = len(slots)
    found = np.full(n, -1, np.int32)
    seen = np.empty(1, np.uint64)
    near = np.uint64(0)
    starts = np.zeros(_BATCH, np.int64)
    lengths = np.zeros(_BATCH, np.int64)
    places = np.zeros(_BATCH, np.int64)
    tags = np.zeros(_BATCH, np.uint64)
    for begin in range(0, n, _BATCH):
        here = min(_BATCH, n - begin)
        for each in range(here):
            starts[each] = ends[begin + each]
            lengths[each] = np.int64(ends[begin + each + 1]) - starts[each]
            if lengths[each]:
                value = _hash(text, starts[each], lengths[each])
                places[each] = np.int64(value >> _TOP) & (size - 1)
                tags[each] = value & _LOW
        for each in range(here):
            at = places[each]
            while lengths[each] and slots[at] != _FREE and slots[at] & _LOW != tags[each]:
                at = (at + 1) & (size - 1)
            places[each] = at
        for each in range(here):
            if lengths[each] and slots[places[each]] != _FREE:
                near ^= np.uint64(id_text[id_ends[slots[places[each]] >> _HALF]])
        for each in range(here):
            if lengths[each] == 0:
                continue
            found[begin + each] = -2
            at = places[each]
            while slots[at] != _FREE:
                if slots[at] & _LOW == tags[each]:
                    known = np.int64(slots[at] >> _HALF)
                    other = np.int64(id_ends[known])
                    alike = np.int64(id_ends[known + 1]) - other == lengths[each]
                    if alike and _same(id_text, other, text, starts[each], lengths[each]):
                        found[begin + each] = known
                        break
                at = (at + 1) & (size - 1)
    seen[0] = near
    return found


@kernel
def all_plain(text: ByteArray) -> bool:
    """Whether every byte is a visible ASCII letter, digit or sign: no blank among them."""
    step = 4096
    for begin in range(0, len(text), step):
        odd = False
        for place in range(begin, min(begin + step, len(text))):
            odd |= (text[place] < 33) | (text[place] > 126)
        if odd:
            return False
    return True
