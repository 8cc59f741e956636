"""Kinship in the trade's own words: "as between half sibs"."""

from __future__ import annotations

RELATIONS: tuple[tuple[float, str], ...] = (
    (1 / 4, "full sibs, or parent and offspring"),
    (3 / 16, "three-quarter sibs"),
    (1 / 8, "half sibs"),
    (1 / 16, "first cousins"),
    (1 / 32, "first cousins once removed"),
    (1 / 64, "second cousins"),
    (1 / 128, "second cousins once removed"),
    (1 / 256, "third cousins"),
)
"""Kinship of non-inbred relatives, falling; common practice, values as in the tabular method."""

_ROUNDING = 5e-5


def same_as(kinship: float) -> str:
    """The relation of non-inbred animals that has this kinship, or the two it lies between.

    Values are compared at the four decimals that are shown.
    """
    if kinship < _ROUNDING:
        return "unrelated in these records"
    if kinship > RELATIONS[0][0] + _ROUNDING:
        return f"closer than {RELATIONS[0][1]}"
    for value, words in RELATIONS:
        if abs(kinship - value) <= _ROUNDING:
            return f"as between {words}"
    above = [(value, words) for value, words in RELATIONS if value > kinship]
    below = [(value, words) for value, words in RELATIONS if value < kinship]
    if not below:
        return f"less than {RELATIONS[-1][1]}"
    (high, higher), (low, lower) = above[-1], below[0]
    nearer_low = kinship - low < high - kinship
    return f"a little more than {lower}" if nearer_low else f"a little less than {higher}"
