"""Sums of rows of a table, in vector instructions.

The compiler leaves short loops over a row as single numbers, three times slower; these
steps are therefore written out as vectors, with a plain twin for runs without compilation.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from numba import config, types
from numba.extending import intrinsic

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    FloatArray = npt.NDArray[np.float64]

LANES = 32
"""Columns of a table of rows. Compiled modules that use it must be compiled anew if it changes."""

_WIDTH = 4
"""Numbers of one vector; the compiler splits it where the processor has shorter ones."""

_BYTES = 8
"""Bytes of a number, which is all that rows are aligned to."""


def _vectors(context: Any, builder: Any, kind: Any, array: Any, place: Any) -> list[Any]:
    """Addresses of the vectors of one row."""
    from llvmlite import ir

    number = ir.IntType(64)
    vector = ir.VectorType(ir.DoubleType(), _WIDTH).as_pointer()
    base = builder.ptrtoint(context.make_array(kind)(context, builder, array).data, number)
    row = builder.add(base, builder.mul(place, ir.Constant(number, LANES * _BYTES)))
    steps = range(0, LANES * _BYTES, _WIDTH * _BYTES)
    return [builder.inttoptr(builder.add(row, ir.Constant(number, step)), vector) for step in steps]


def _repeated(builder: Any, value: Any) -> Any:
    """A vector with one number in every lane."""
    from llvmlite import ir

    vector = ir.Constant(ir.VectorType(ir.DoubleType(), _WIDTH), ir.Undefined)
    for lane in range(_WIDTH):
        vector = builder.insert_element(vector, value, ir.Constant(ir.IntType(32), lane))
    return vector


def _row_step(*, add: bool) -> Any:
    """Generator of the instructions that put shares of rows on, or in place of, another row."""

    def generate(context: Any, builder: Any, signature: Any, arguments: Any) -> Any:
        target, to, source = arguments[:3]
        into = _vectors(context, builder, signature.args[0], target, to)
        factors = [_repeated(builder, share) for share in arguments[4::2]]
        out_of = [
            _vectors(context, builder, signature.args[2], source, of) for of in arguments[3::2]
        ]
        for one, *others in zip(into, *out_of, strict=True):
            gifts = [
                builder.fmul(factor, builder.load(other, align=_BYTES))
                for factor, other in zip(factors, others, strict=True)
            ]
            value = gifts[0] if len(gifts) == 1 else builder.fadd(*gifts)
            if add:
                value = builder.fadd(builder.load(one, align=_BYTES), value)
            builder.store(value, one, align=_BYTES)
        return context.get_dummy_value()

    return generate


def _one(target: Any, source: Any) -> Any:
    return types.void(target, types.int64, source, types.int64, types.float64)


def _two(target: Any, source: Any) -> Any:
    return types.void(
        target, types.int64, source, types.int64, types.float64, types.int64, types.float64
    )


def _add_row(_typing: Any, target: Any, _to: Any, source: Any, _of: Any, _share: Any) -> Any:
    return _one(target, source), _row_step(add=True)


def _set_row(_typing: Any, target: Any, _to: Any, source: Any, _of: Any, _share: Any) -> Any:
    return _one(target, source), _row_step(add=False)


def _add_two(
    _typing: Any, target: Any, _to: Any, source: Any, _a: Any, _b: Any, _c: Any, _d: Any
) -> Any:
    return _two(target, source), _row_step(add=True)


def _set_two(
    _typing: Any, target: Any, _to: Any, source: Any, _a: Any, _b: Any, _c: Any, _d: Any
) -> Any:
    return _two(target, source), _row_step(add=False)


def _add_plainly(target: FloatArray, to: int, source: FloatArray, *shares: Any) -> None:
    target[to] += _sum(source, shares)


def _set_plainly(target: FloatArray, to: int, source: FloatArray, *shares: Any) -> None:
    target[to] = _sum(source, shares)


def _sum(source: FloatArray, shares: tuple[Any, ...]) -> FloatArray:
    parts = zip(shares[::2], shares[1::2], strict=True)
    total: FloatArray = sum(share * source[of] for of, share in parts)
    return total


add_row: Any = _add_plainly if config.DISABLE_JIT else intrinsic(_add_row)
"""``target[to] += share * source[of]``, for tables of `LANES` columns stored by rows."""

set_row: Any = _set_plainly if config.DISABLE_JIT else intrinsic(_set_row)
"""``target[to] = share * source[of]``."""

add_two: Any = _add_plainly if config.DISABLE_JIT else intrinsic(_add_two)
"""``target[to] += share * source[of] + rest * source[also]``."""

set_two: Any = _set_plainly if config.DISABLE_JIT else intrinsic(_set_two)
"""``target[to] = share * source[of] + rest * source[also]``."""
