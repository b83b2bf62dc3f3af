"""Files are written whole or not at all."""

from __future__ import annotations

import os
from dataclasses import replace

import pytest

from gainbench.errors import HandoverError
from gainbench.handover import write_handover, write_header

NAME = "label_unwinder_gains.h"


@pytest.fixture
def write(demos, sources):
    def written(folder, **keys):
        return write_handover(demos["label-unwinder"], folder, source=sources["label-unwinder"], **keys)

    return written


def test_writes_the_header(demos, sources, write, tmp_path):
    path = write(tmp_path)
    assert path == tmp_path / NAME
    expected = write_header(demos["label-unwinder"], sources["label-unwinder"]).text
    assert path.read_bytes() == expected.encode("ascii")
    assert os.listdir(tmp_path) == [NAME]


def test_creates_the_last_folder_only(write, tmp_path):
    assert write(tmp_path / "new").is_file()
    with pytest.raises(HandoverError, match="there is no folder"):
        write(tmp_path / "no" / "such")
    assert not (tmp_path / "no").exists()


def test_an_existing_file_stays_without_replace(write, tmp_path):
    (tmp_path / NAME).write_text("mine")
    with pytest.raises(HandoverError, match=r"is there already; .*--replace"):
        write(tmp_path)
    assert (tmp_path / NAME).read_text() == "mine"
    assert write(tmp_path, replace=True).read_text().startswith("/*\n")
    assert os.listdir(tmp_path) == [NAME]


def test_a_dangling_link_is_a_file_that_is_there(write, tmp_path):
    (tmp_path / NAME).symlink_to(tmp_path / "elsewhere")
    with pytest.raises(HandoverError, match="is there already"):
        write(tmp_path)
    assert not (tmp_path / "elsewhere").exists()


@pytest.mark.parametrize("place", ["file", "file/below"])
def test_a_file_is_no_folder(write, tmp_path, place):
    (tmp_path / "file").write_text("mine")
    with pytest.raises(HandoverError, match=r"not a folder|no folder"):
        write(tmp_path / place)
    assert (tmp_path / "file").read_text() == "mine"


def test_a_folder_of_that_name_is_in_the_way(write, tmp_path):
    (tmp_path / NAME).mkdir()
    with pytest.raises(HandoverError, match="in the way"):
        write(tmp_path, replace=True)


@pytest.mark.parametrize("folder", ["", "a\0b"])
def test_no_folder_at_all(write, folder):
    with pytest.raises(HandoverError, match="not the name of a folder"):
        write(folder)


@pytest.mark.parametrize("broken", ["fsync", "replace"])
def test_a_failure_leaves_nothing_behind(write, tmp_path, monkeypatch, broken):
    def fails(*_):
        raise OSError(28, "No space left on device")

    (tmp_path / NAME).write_text("mine")
    monkeypatch.setattr(os, broken, fails)
    with pytest.raises(HandoverError, match="No space left on device; nothing was written"):
        write(tmp_path, replace=True)
    assert os.listdir(tmp_path) == [NAME]
    assert (tmp_path / NAME).read_text() == "mine"
    with pytest.raises(HandoverError, match="nothing was written"):
        write(tmp_path / "new")
    assert not (tmp_path / "new").exists()


def test_what_is_refused_creates_no_folder(demos, sources, tmp_path):
    assessment = demos["label-unwinder"]
    refused = replace(assessment, speed=replace(assessment.speed, gains=None, figures=None))
    with pytest.raises(HandoverError, match="nothing is exported"):
        write_handover(refused, tmp_path / "new", source=sources["label-unwinder"])
    with pytest.raises(HandoverError, match="prefix"):
        write_handover(assessment, tmp_path / "new", source=sources["label-unwinder"], prefix="_x")
    assert not list(tmp_path.iterdir())
