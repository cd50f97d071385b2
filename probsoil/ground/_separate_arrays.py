"""A promise to the compiler that the arrays of a function do not overlap.

Without it the compiler has to test, before every loop over lanes, whether a row it writes may
be one it reads; with more than a few arrays it gives up and leaves the loop scalar. C says it
with `restrict`, numba has no word for it.
"""

from collections.abc import Callable
from typing import Any, cast

from llvmlite import ir
from numba import types
from numba.extending import intrinsic


@intrinsic
def _no_alias(_context: Any) -> tuple[Any, Callable[..., Any]]:
    def generate(context: Any, builder: Any, _signature: Any, _args: Any) -> Any:
        for argument in builder.function.args:
            if argument.name.startswith("arg.") and isinstance(argument.type, ir.PointerType):
                argument.add_attribute("noalias")
        return context.get_dummy_value()

    return types.void(), generate


# an intrinsic is called without the context that its definition takes
arrays_are_separate = cast("Callable[[], None]", _no_alias)
"""To be called once in a compiled function: no array written there shares memory with another."""
