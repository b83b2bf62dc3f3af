"""Logs in .mat files: vectors, columns of matrices, fields of structures."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.io import savemat

from gainbench.errors import LogError
from gainbench.evidence import matlab
from gainbench.evidence.matlab import MatlabTable

TIME = np.arange(5) * 0.5


@pytest.fixture
def mat(tmp_path):
    def write(variables, **settings):
        path = tmp_path / "run.mat"
        savemat(path, variables, **settings)
        return path

    return write


@pytest.mark.parametrize("settings", [{}, {"do_compression": True}, {"format": "4"}, {"oned_as": "column"}])
def test_vectors(mat, settings):
    path = mat({"t": TIME, "i": TIME**2, "gain": 3.0, "note": "a text"}, **settings)
    table = MatlabTable(path)
    assert [one.name for one in table.columns] == ["t", "i"]
    assert table.rows == 5
    current, time = table.load([1, 0], time=0)
    assert np.array_equal(time.values, TIME)
    assert np.array_equal(current.values, TIME**2)


def test_matrices_and_structures(mat):
    block = np.column_stack([TIME, TIME + 1.0])
    path = mat(
        {"data": block, "wide": block.T, "run": {"t": TIME, "inner": {"speed_rpm": TIME}}, "cube": np.ones((2,) * 3)}
    )
    table = MatlabTable(path)
    names = [one.name for one in table.columns]
    assert names == ["data(:,1)", "data(:,2)", "wide(1,:)", "wide(2,:)", "run.t", "run.inner.speed_rpm"]
    assert table.columns[5].unit == "rpm"
    for raw, expected in zip(table.load(range(6), time=0), [TIME, TIME + 1.0] * 2 + [TIME, TIME], strict=True):
        assert np.array_equal(raw.values, expected)


def test_types_of_numbers(mat):
    counts = np.array([2**60 + 1, 2**60 + 2], dtype=np.int64)
    table = MatlabTable(mat({"n": counts, "b": np.array([True, False]), "u": np.array([1, 2], dtype=np.uint16)}))
    places = {one.name: place for place, one in enumerate(table.columns)}
    (count,) = table.load([places["n"]], time=places["n"])
    assert count.values.tolist() == counts.tolist()
    assert table.load([places["u"]], time=None)[0].values.tolist() == [1.0, 2.0]
    holes = MatlabTable(mat({"t": [0.0, np.nan, np.inf]}))
    assert holes.load([0], time=0)[0].missing.tolist() == [False, True, True]


def test_columns_of_different_length(mat):
    table = MatlabTable(mat({"t": TIME, "i": TIME[:-1]}))
    with pytest.raises(LogError, match=r"^run\.mat: columns of different length: t has 5 values, i has 4 values; map"):
        table.load([0, 1], time=0)


@pytest.mark.parametrize(
    ("content", "reason"),
    [
        (b"MATLAB 7.3 MAT-file, Platform: X", "version 7.3 is not read; save it again with"),
        (b"\x89HDF\r\n\x1a\n", "version 7.3 is not read"),
        (b" " * 512 + b"\x89HDF\r\n\x1a\n", "version 7.3 is not read"),
        (b"MATLAB 5.0 MAT-file" + b" " * 200, "not a .mat file that can be read"),
        (b"t;i\n0;1\n", "not a .mat file that can be read"),
    ],
)
def test_what_cannot_be_read(tmp_path, content, reason):
    path = tmp_path / "run.mat"
    path.write_bytes(content)
    with pytest.raises(LogError, match=rf"^run\.mat: .*{reason}"):
        MatlabTable(path)


def test_no_vectors_and_too_many_numbers(mat, monkeypatch):
    with pytest.raises(LogError, match=r"^run\.mat: no usable columns"):
        MatlabTable(mat({"gain": 3.0, "note": "a text"}))
    path = mat({"t": TIME, "s": {"w": np.zeros(10_000)}}, do_compression=True)
    monkeypatch.setattr("gainbench.evidence.columns.MOST_VALUES", 4)
    with pytest.raises(LogError, match=r"^run\.mat: too large"):
        MatlabTable(path)
    # A structure tells its size only once it is unpacked.
    monkeypatch.setattr("gainbench.evidence.columns.MOST_VALUES", 5_000)
    with pytest.raises(LogError, match=r"^run\.mat: too large"):
        MatlabTable(path)
    assert path.read_bytes()[: len(matlab.MAGIC)] == matlab.MAGIC
