"""Hashes of ids without what is easily mistyped, compiled.

Arrays only; `look_alikes` stands in front.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from pairing.compiling import kernel

if TYPE_CHECKING:
    import numpy.typing as npt

    CodeArray = npt.NDArray[np.int32]
    ByteArray = npt.NDArray[np.uint8]
    HashArray = npt.NDArray[np.uint64]

# An odd multiplier with about half its bits set.
_MIX = np.uint64(0x9E3779B97F4A7C15)
_START = np.uint64(0xD6E8FEB86659FD93)
_HALF = np.uint64(32)


@kernel
def essence_hashes(ends: CodeArray, text: ByteArray, table: ByteArray, zeros: bool) -> HashArray:
    """Hash of each cell's essence, 0 where the essence is blank.

    Parameters
    ----------
    ends, text
        Offsets, shape (n + 1,), and bytes of the cells.
    table
        Byte to the byte it counts as, 0 for one that separates, shape (256,).
    zeros
        Whether those in front of a number count.
    """
    n = len(ends) - 1
    hashes = np.zeros(n, np.uint64)
    for row in range(n):
        value = _START
        last = np.int64(ends[row + 1])
        in_number = False
        blank = True
        for place in range(np.int64(ends[row]), last):
            letter = table[text[place]]
            if letter == 0:
                in_number = False
                continue
            digit = 48 <= letter <= 57
            if letter == 48 and not zeros and not in_number and place + 1 < last:
                following = table[text[place + 1]]
                if 48 <= following <= 57:
                    continue
            in_number = digit
            blank = False
            value = (value ^ np.uint64(letter)) * _MIX
            value ^= value >> _HALF
        if not blank:
            hashes[row] = value
    return hashes
