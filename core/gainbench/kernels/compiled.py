"""How kernels are compiled: the two decorators that every kernel has one of."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar, cast

import numba

from gainbench.kernels.code_cache import code_cache

Function = TypeVar("Function", bound=Callable[..., object])

_PACKAGE = "gainbench.kernels."


def compiled(function: Function) -> Function:
    """Compile a function when it is first called, without the interpreter's lock, and keep a kernel's code on disk."""
    return _kept(function, forceinline=False)


def inlined(function: Function) -> Function:
    """The same for a small function that its callers take in whole."""
    return _kept(function, forceinline=True)


def _kept(function: Function, *, forceinline: bool) -> Function:
    dispatcher: Any = numba.njit(nogil=True, error_model="numpy", forceinline=forceinline)(function)
    if not function.__module__.startswith(_PACKAGE):
        return cast("Function", dispatcher)
    # The folder is read when caching is enabled: it is set for this moment only, other users of numba keep their own.
    settings: Any = numba.config
    before = settings.CACHE_DIR
    settings.CACHE_DIR = str(code_cache(function.__module__.removeprefix(_PACKAGE)))
    try:
        dispatcher.enable_caching()
    finally:
        settings.CACHE_DIR = before
    return cast("Function", dispatcher)
