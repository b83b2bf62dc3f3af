"""Saving is all or nothing."""

from __future__ import annotations

import os
import stat
from pathlib import Path

import pytest

from gainbench.errors import SheetError
from gainbench.sheetfile import parse_sheet, read_sheet, replace_file, write_sheet, writing


def test_saved_and_read_again_it_is_the_same(tmp_path, demo_texts):
    for name, text in demo_texts.items():
        path = tmp_path / f"{name}.bench.toml"
        write_sheet(parse_sheet(text, name), path)
        assert path.read_bytes() == text.encode()
        write_sheet(read_sheet(path), str(path))
        assert path.read_bytes() == text.encode()


def test_nothing_is_left_beside_it(tmp_path, demo):
    path = tmp_path / "x.bench.toml"
    write_sheet(parse_sheet(demo, "x"), path)
    write_sheet(parse_sheet(demo, "x").with_value("train.ratio", 2.0), path)
    assert os.listdir(tmp_path) == ["x.bench.toml"]


def test_the_mode_of_a_file_stays(tmp_path, demo):
    path = tmp_path / "x.bench.toml"
    path.write_text("old")
    path.chmod(0o640)
    write_sheet(parse_sheet(demo, "x"), path)
    assert stat.S_IMODE(path.stat().st_mode) == 0o640


def test_a_link_stays_a_link(tmp_path, demo):
    target = tmp_path / "far" / "x.bench.toml"
    target.parent.mkdir()
    target.write_text("old")
    link = tmp_path / "link.bench.toml"
    link.symlink_to(target)
    write_sheet(parse_sheet(demo, "x"), link)
    assert link.is_symlink()
    assert target.read_text(encoding="utf-8") == demo


@pytest.mark.parametrize("fails", ["write", "replace"])
def test_a_failure_leaves_what_was_there(tmp_path, demo, monkeypatch, fails):
    path = tmp_path / "x.bench.toml"
    path.write_text("old")

    def full(*given: object) -> None:
        raise OSError(28, "No space left on device")

    if fails == "write":
        monkeypatch.setattr(os, "fsync", full)
    else:
        monkeypatch.setattr(os, "replace", full)
    with pytest.raises(SheetError, match=r"^x\.bench\.toml: cannot be saved: No space left on device; nothing"):
        write_sheet(parse_sheet(demo, "x"), path)
    assert path.read_text() == "old"
    assert os.listdir(tmp_path) == ["x.bench.toml"]


def test_the_content_is_whole_on_the_disk_before_it_takes_the_name(tmp_path, monkeypatch):
    steps: list[str] = []
    flush, replace = os.fsync, os.replace
    monkeypatch.setattr(os, "fsync", lambda handle: (steps.append("flush"), flush(handle))[1])

    def renamed(source: Path, target: str) -> None:
        steps.append("replace")
        assert Path(source).read_bytes() == b"new"
        assert Path(source).parent == tmp_path
        replace(source, target)

    monkeypatch.setattr(os, "replace", renamed)
    replace_file(tmp_path / "x", b"new")
    assert steps[:2] == ["flush", "replace"]


def test_an_interruption_leaves_nothing_half_done(tmp_path, monkeypatch):
    def interrupted(*given: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(writing.os, "replace", interrupted)
    with pytest.raises(KeyboardInterrupt):
        replace_file(tmp_path / "x", b"new")
    assert os.listdir(tmp_path) == []


def test_places_that_take_no_file(tmp_path, demo):
    document = parse_sheet(demo, "x")
    with pytest.raises(SheetError, match="there is no folder"):
        write_sheet(document, tmp_path / "none" / "x.bench.toml")
    with pytest.raises(SheetError, match="this is a folder"):
        write_sheet(document, tmp_path)
    with pytest.raises(SheetError, match="not the name of a file"):
        write_sheet(document, "a\0b")
    with pytest.raises(SheetError, match="cannot be saved"):
        write_sheet(document, tmp_path / ("x" * 300))


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="root may write every file")
def test_a_file_that_is_read_only(tmp_path, demo):
    path = tmp_path / "x.bench.toml"
    path.write_text("old")
    path.chmod(0o444)
    with pytest.raises(SheetError, match="read-only"):
        write_sheet(parse_sheet(demo, "x"), path)
    assert path.read_text() == "old"
