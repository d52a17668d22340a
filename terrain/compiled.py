"""How our kernels become machine code. Importing this imports numba, which takes half a second: import it late.

The loops are written so that the compiler turns them into vector instructions: unit stride, one subject each,
no branch inside. `compiled` functions are plain functions of a module (numba's cache ignores everything else
that may tell two of them apart), let other threads run, and take arrays without NaN. What Python has no word
for stands here as a function of its own.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar, cast

import numba
from llvmlite import ir
from numba.core import types
from numba.extending import intrinsic

Function = TypeVar("Function", bound=Callable[..., Any])

_BYTE_POINTER, _INT = ir.IntType(8).as_pointer(), ir.IntType(32)


def compiled(function: Function) -> Function:
    """Machine code for a function, kept on disk; arithmetic may be reordered, NaN is not expected."""
    return cast(Function, numba.njit(fastmath=True, nogil=True, cache=True, error_model="numpy")(function))


def compiled_as_written(function: Function) -> Function:
    """As `compiled`, but every rounding as Python does it: where a comparison must fall as in the plain form."""
    return cast(Function, numba.njit(nogil=True, cache=True, error_model="numpy")(function))


def _larger(_context: Any, one: Any, other: Any) -> Any:
    if one != other or not isinstance(one, types.Float):
        return None

    def emit(_target: Any, builder: Any, _signature: Any, arguments: Any) -> Any:
        is_larger = builder.fcmp_ordered(">", *arguments, flags=("fast",))
        return builder.select(is_larger, *arguments, flags=("fast",))

    return one(one, other), emit


# The larger of two floats of one type. Plain `max` loses the licence to reorder on its way through numba, and a
# running maximum then goes point by point: ten times slower than this.
larger = cast(Callable[[Any, Any], Any], intrinsic(_larger))


def _place(target: Any, builder: Any, signature: Any, arguments: Any) -> Any:
    array = target.make_array(signature.args[0])(target, builder, arguments[0])
    return builder.gep(array.data, [arguments[1]])


def _pair_at(_context: Any, array: Any, place: Any) -> Any:
    bits = 2 * array.dtype.bitwidth

    def emit(target: Any, builder: Any, signature: Any, arguments: Any) -> Any:
        pointer = builder.bitcast(_place(target, builder, signature, arguments), ir.IntType(bits).as_pointer())
        return builder.load(pointer, align=bits // 16)

    word: Any = types.int32 if bits == 32 else types.int64

    return word(array, place), emit


def _half(second: bool) -> Callable[..., Any]:
    def half(_context: Any, word: Any) -> Any:
        def emit(_target: Any, builder: Any, _signature: Any, arguments: Any) -> Any:
            (whole,) = arguments
            width = word.bitwidth // 2
            if second:
                whole = builder.lshr(whole, ir.Constant(whole.type, width))
            part = builder.trunc(whole, ir.IntType(width))
            return builder.sitofp(part, ir.FloatType()) if width == 16 else builder.bitcast(part, ir.FloatType())

        return types.float32(word), emit

    return half


# Two neighbours in an array of int16 or float32, at an unsigned index, fetched at once; and each of them as float32.
pair_at = cast(Callable[[Any, Any], Any], intrinsic(_pair_at))
first_of = cast(Callable[[Any], Any], intrinsic(_half(second=False)))
second_of = cast(Callable[[Any], Any], intrinsic(_half(second=True)))


def _ask_for(_context: Any, array: Any, place: Any) -> Any:
    def emit(target: Any, builder: Any, signature: Any, arguments: Any) -> Any:
        pointer = builder.bitcast(_place(target, builder, signature, arguments), _BYTE_POINTER)
        kind = ir.FunctionType(ir.VoidType(), [_BYTE_POINTER, _INT, _INT, _INT])
        ask = builder.module.declare_intrinsic("llvm.prefetch", [_BYTE_POINTER], kind)
        builder.call(ask, [pointer, _INT(0), _INT(3), _INT(1)])  # to read, into every cache, data
        return target.get_dummy_value()

    return types.void(array, place), emit


# Begin to fetch the memory line of an array's element without waiting for it.
ask_for = cast(Callable[[Any, Any], None], intrinsic(_ask_for))
