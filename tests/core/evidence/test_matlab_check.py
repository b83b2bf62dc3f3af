"""Damaged .mat files are found out before anything reads them."""

from __future__ import annotations

import zlib

import numpy as np
import pytest
from scipy.io import savemat

from gainbench.evidence.matlab_check import DamagedError, check_elements
from gainbench.evidence.reading import survey_log

RUN = {"t": np.arange(40) / 1e3, "i": np.cos(np.arange(40.0))}
RICH = {
    "run": {"t": RUN["t"], "note": "first", "nested": {"w": np.arange(6).reshape(2, 3)}},
    "cells": np.array([np.arange(3), "x", np.zeros((0, 0))], dtype=object),
    "z": np.array([1.0 + 2.0j, 3.0]),
    "flag": np.array([True, False]),
    "small": np.int8(3),
    "name": "a text",
}


@pytest.mark.parametrize("packed", [False, True])
@pytest.mark.parametrize("content", [RUN, RICH])
def test_what_is_whole_passes(tmp_path, content, packed):
    savemat(tmp_path / "a.mat", content, do_compression=packed)
    check_elements(tmp_path / "a.mat")


# Places in the second of two variables of 376 bytes each, behind a header of 128.
@pytest.mark.parametrize(
    ("place", "value"), [(504 + 48, 126), (504 + 49, 239), (504 + 17, 202), (504 + 16, 77), (508, 9)]
)
def test_what_would_end_the_process_is_refused(tmp_path, log_refusal, place, value):
    path = tmp_path / "a.mat"
    savemat(path, RUN)
    content = bytearray(path.read_bytes())
    assert content[place] != value
    content[place] = value
    path.write_bytes(content)
    with pytest.raises(DamagedError):
        check_elements(path)
    assert "save it again" in log_refusal(path)


def test_any_damage_is_passed_or_refused(tmp_path):
    rng = np.random.default_rng(1)
    path = tmp_path / "a.mat"
    savemat(path, RICH)
    whole = path.read_bytes()
    refused = 0
    for _ in range(300):
        content = bytearray(whole)
        for place in rng.integers(128, len(whole), 3):
            content[place] = rng.integers(0, 256)
        path.write_bytes(content)
        try:
            check_elements(path)
        except (DamagedError, zlib.error):
            refused += 1
    assert 30 < refused < 300
    path.write_bytes(whole)
    assert {one.name for one in survey_log(path).columns} >= {"run.t", "z"} - {"z"}
