"""How our kernels become machine code. Importing this imports numba, which takes half a second: import it late.

The loops are written so that the compiler turns them into vector instructions: unit stride, one subject each,
no branch inside. `compiled` functions are plain functions of a module (numba's cache ignores everything else
that may tell two of them apart), let other threads run, and take arrays without NaN.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar, cast

import numba
from numba.core import types
from numba.extending import intrinsic

Function = TypeVar("Function", bound=Callable[..., Any])


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
