"""Kernels are compiled without the interpreter's lock, and their code lies in the folder of these sources."""

from __future__ import annotations

import importlib
import pkgutil

import numba

import gainbench.kernels
from gainbench.kernels.code_cache import code_cache
from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.linalg import matmul


@inlined
def twice(x):
    return 2.0 * x


@compiled
def one_more_than_twice(x):
    return twice(x) + 1.0


def test_both_decorators_compile():
    assert one_more_than_twice(3.0) == 7.0
    assert one_more_than_twice.targetoptions["nogil"]
    assert one_more_than_twice.targetoptions["error_model"] == "numpy"
    assert twice.targetoptions["forceinline"]


def test_the_code_lies_in_the_folder_of_these_sources():
    assert str(matmul._cache.cache_path).startswith(str(code_cache("linalg")))


def test_other_users_of_numba_keep_their_folder():
    assert str(code_cache("linalg").parent) not in str(numba.config.CACHE_DIR)


def test_every_kernel_has_one_of_the_two():
    for module in pkgutil.iter_modules(gainbench.kernels.__path__):
        for name, value in vars(importlib.import_module(f"gainbench.kernels.{module.name}")).items():
            if isinstance(value, numba.core.dispatcher.Dispatcher):
                home = value.py_func.__module__.rpartition(".")[2]
                assert str(value._cache.cache_path).startswith(str(code_cache(home))), f"{module.name}.{name}"
