"""How loops over millions of animals are compiled, and kept for later runs."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, ParamSpec, TypeVar

from numba import njit

if TYPE_CHECKING:
    from collections.abc import Callable

Given = ParamSpec("Given")
Found = TypeVar("Found")


def kernel(function: Callable[Given, Found]) -> Callable[Given, Found]:
    """Compile at first use, and keep the code if any folder for that can be written to.

    The code is kept beside the module, else in the user's own cache folder; where neither can
    be, every process compiles anew. Kernels leave the interpreter to other threads.
    """
    return _compiled(function, {})


def part_of_kernels(function: Callable[Given, Found]) -> Callable[Given, Found]:
    """A function that kernels call, put into each of them."""
    return _compiled(function, {"inline": "always"})


def _compiled(function: Callable[Given, Found], more: dict[str, Any]) -> Callable[Given, Found]:
    options = {"nogil": True, "boundscheck": False, **more}
    compiled: Callable[Given, Found]
    try:
        compiled = njit(cache=True, **options)(function)
    except RuntimeError:
        compiled = njit(**options)(function)
    return compiled
