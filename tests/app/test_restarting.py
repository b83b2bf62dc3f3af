"""Another size at once: the program starts again, and the sheet is as it was."""

from __future__ import annotations

import json
import os
import subprocess
import sys

import pytest

from gainbench.sheetfile import parse_sheet
from gainbench_app.autosave import Autosave, left_behind
from gainbench_app.desk import Desk
from gainbench_app.places import config_folder
from gainbench_app.restarting import Restart, carried_over, scale_in_force, set_outside, start_again, take_up
from gainbench_app.session import bring_back, unsaved_folder


def test_a_size_that_is_set_outside_stays():
    ours, theirs, none = {}, {"QT_SCALE_FACTOR": "1.75"}, {}
    take_up(150, ours)
    take_up(150, theirs)
    take_up(100, none)
    assert (ours["QT_SCALE_FACTOR"], theirs["QT_SCALE_FACTOR"], none) == ("1.5", "1.75", {})
    assert [scale_in_force(one) for one in (ours, theirs, none, {"QT_SCALE_FACTOR": "big"})] == [150.0, 175.0, 100, 100]
    assert [set_outside(one) for one in (ours, theirs, none)] == [False, True, False]


def test_a_start_is_with_the_same_words_and_without_our_size(monkeypatch, tmp_path):
    seen = []
    monkeypatch.setattr(sys, "platform", "linux")
    monkeypatch.setattr(os, "execve", lambda *words: seen.append(words))
    environment = {"HOME": "somewhere"}
    take_up(150, environment)
    start_again(tmp_path / "x.json", environment)
    ((program, command, after),) = seen
    assert (program, command) == (sys.executable, [sys.executable, *sys.orig_argv[1:]])
    assert after == {"HOME": "somewhere", "GAINBENCH_CARRIED": str(tmp_path / "x.json")}
    start_again(tmp_path / "x.json", {"QT_SCALE_FACTOR": "2"})
    assert seen[1][2]["QT_SCALE_FACTOR"] == "2"


def test_where_it_cannot_start_again_that_is_said_and_nothing_is_lost(monkeypatch, capsys, desk, tmp_path):
    def refuse(*words):
        raise PermissionError("not allowed")

    monkeypatch.setattr(sys, "platform", "linux")
    monkeypatch.setattr(os, "execve", refuse)
    desk.set_values({"machine.inductance": "0.9 mH"})
    restart = Restart(desk, tmp_path)
    assert restart.prepare() == ""
    start_again(restart.file, {})
    assert "not started again: not allowed" in capsys.readouterr().err
    (found,) = left_behind(tmp_path)
    assert 'inductance = "0.9 mH"' in found.text


def test_where_the_sheet_cannot_be_written_nothing_is_closed(desk, tmp_path):
    (tmp_path / "file").write_text("", encoding="utf-8")
    restart = Restart(desk, tmp_path / "file")
    heard = []
    restart.ready.connect(lambda: heard.append(True))
    assert "cannot be carried over" in restart.prepare()
    assert (restart.file, heard) == (None, [])


def test_without_a_file_nothing_is_carried_over(tmp_path):
    assert carried_over({}) is None
    environment = {"GAINBENCH_CARRIED": str(tmp_path / "none.json")}
    assert carried_over(environment) is None
    assert environment == {}


@pytest.mark.parametrize("edits", [{}, {"machine.inductance": "0.9 mH", "machine.resistance": "0.6 kg"}])
def test_a_sheet_that_is_saved_stays_saved_and_another_one_does_not(desk, tmp_path, demo_texts, edits):
    path = tmp_path / "mine.bench.toml"
    desk.save(path)
    for entry, text in edits.items():
        desk.set_values({entry: text})
    restart = Restart(desk, tmp_path / "state")
    assert restart.prepare() == ""
    carried = carried_over({"GAINBENCH_CARRIED": str(restart.file)})
    after = Desk(parse_sheet(carried.text, carried.name), path=carried.path)
    autosave = Autosave(after, tmp_path / "state")
    bring_back(after, carried, autosave)
    assert (after.path, after.unsaved_since) == (path, desk.unsaved_since)
    assert {entry: after.text(entry) for entry in edits} == edits
    # What is not saved is in a file at any moment.
    assert [one.name for one in (tmp_path / "state").glob("*.json")] == ([autosave.file.name] if edits else [])
    autosave.release()


STARTS_AGAIN = """
import functools, json, os, sys
from gainbench_app import session
session.Autosave = functools.partial(session.Autosave, delay_ms=0)
edits, seen = json.loads(sys.argv[2]), sys.argv[3]
again = "GAINBENCH_CARRIED" in os.environ
def act(window):
    desk = window.desk
    if again:
        texts = {path: desk.text(path) for path in ("machine.inductance", "machine.resistance")}
        with open(seen, "w", encoding="utf-8") as file:
            json.dump({**texts, "pid": os.getpid(), "size": window.devicePixelRatioF(), "valid": desk.valid,
                       "path": str(desk.path), "unsaved": desk.unsaved_since, "title": desk.sheet.title}, file)
        session.QApplication.exit(0)
        return
    for path, text in edits.items():
        desk.set_values({path: text})
    session.QApplication.processEvents()
    assert list(session.unsaved_folder().glob("*.json"))
    window.dialogs.restart_now = lambda parent, message: True
    window.menu_of_more.scales[150].trigger()
session.offer_recovery = act
# Nothing is assessed here: the kernels need not be there.
session.warm_up = session.warm_up_window = lambda **_: None
sys.exit(session.open_window(sys.argv[1]))
"""


@pytest.mark.skipif(sys.platform == "win32", reason="there a process is not replaced but followed by another one")
def test_the_program_starts_again_with_the_sheet_as_it_was(tmp_path, demo_texts):
    edits = {"machine.inductance": "0.9 mH", "machine.resistance": "0.6 kg"}
    path, seen = tmp_path / "drum.bench.toml", tmp_path / "seen.json"
    path.write_text(demo_texts["sieve-drum"], encoding="utf-8")
    process = subprocess.Popen([sys.executable, "-c", STARTS_AGAIN, str(path), json.dumps(edits), str(seen)])
    assert process.wait(timeout=60.0) == 0
    found = json.loads(seen.read_text(encoding="utf-8"))
    # The same process: what waits for the first one waits for the second.
    assert found["pid"] == process.pid
    assert (found["size"], found["title"], found["path"]) == (1.5, "Sieve drum", str(path))
    assert {key: found[key] for key in edits} == edits
    assert not found["valid"]
    assert found["unsaved"] is not None
    assert path.read_text(encoding="utf-8") == demo_texts["sieve-drum"]
    assert list(unsaved_folder().glob("*.json")) == []
    (config_folder() / "window.json").unlink()
