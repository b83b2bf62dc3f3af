import json
import math

import pytest
from PySide6.QtCore import QLockFile

from gainbench_app.autosave import Autosave, forget, left_behind


@pytest.fixture
def autosave(desk, tmp_path):
    found = Autosave(desk, tmp_path / "unsaved", delay_ms=1)
    yield found
    found.release()


def died(autosave):
    """What a process leaves that has no time to tidy up: its file, and a lock that nobody holds."""
    autosave._lock.unlock()
    autosave._lock = None


def test_unsaved_work_is_written_and_goes_once_it_is_saved(autosave, desk, qtbot, tmp_path):
    desk.set_values({"machine.inductance": "0.9 mH"})
    qtbot.waitUntil(autosave.file.exists)
    desk.save(tmp_path / "mine.bench.toml")
    assert not autosave.file.exists()
    desk.set_values({"machine.inductance": "0.8 mH"})
    qtbot.waitUntil(autosave.file.exists)
    desk.undo()
    qtbot.waitUntil(lambda: not autosave.file.exists())


def test_what_a_slider_moved_is_written_too(autosave, desk, qtbot, tmp_path):
    desk.begin_gesture("aims.current.crossover")
    desk.move("aims.current.crossover", math.tau * 700.0)
    qtbot.waitUntil(autosave.file.exists)
    died(autosave)
    (unsaved,) = left_behind(tmp_path / "unsaved")
    assert 'crossover = "0.7 kHz"' in unsaved.text
    # The hand is still on the slider: writing must not let it go.
    desk.cancel_gesture()
    assert desk.text("aims.current.crossover") == "1 kHz"


def test_a_process_that_lives_keeps_its_own(autosave, desk, qtbot, tmp_path):
    desk.set_values({"machine.inductance": "0.9 mH"})
    qtbot.waitUntil(autosave.file.exists)
    assert left_behind(tmp_path / "unsaved") == []
    lock = QLockFile(str(autosave.file.with_suffix(".lock")))
    assert not lock.tryLock(0)


def test_what_was_left_behind_is_found_whole(autosave, desk, qtbot, tmp_path, clock):
    clock[0] += 60.0
    desk.set_values({"machine.inductance": "0.9 mH"})
    desk.set_values({"machine.resistance": "0.6 kg", "machine.max_speed": None})
    qtbot.waitUntil(autosave.file.exists)
    died(autosave)
    (unsaved,) = left_behind(tmp_path / "unsaved")
    assert unsaved.name == "label-unwinder.bench.toml"
    assert unsaved.path is None
    assert unsaved.since == clock[0]
    assert 'inductance = "0.9 mH"' in unsaved.text
    assert dict(unsaved.wrong) == {"machine.resistance": "0.6 kg", "machine.max_speed": None}
    forget(unsaved)
    assert left_behind(tmp_path / "unsaved") == []


def test_damaged_files_are_passed_over(tmp_path):
    for number, text in enumerate(["", "[]", "{}", json.dumps({"format": 2}), '{"format": 1, "name": "x"}']):
        (tmp_path / f"unsaved-{number}.json").write_text(text, encoding="utf-8")
    assert left_behind(tmp_path) == []
    assert left_behind(tmp_path / "none") == []


def test_a_folder_that_cannot_be_written_stops_nothing(desk, qtbot, tmp_path):
    (tmp_path / "unsaved").write_text("a file is in the way", encoding="utf-8")
    autosave = Autosave(desk, tmp_path / "unsaved", delay_ms=1)
    desk.set_values({"machine.inductance": "0.9 mH"})
    qtbot.wait(30)
    assert desk.text("machine.inductance") == "0.9 mH"
    autosave.release()
