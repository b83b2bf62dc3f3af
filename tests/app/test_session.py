import json
import os
import signal
import subprocess
import sys
import time

import pytest
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication

from gainbench_app import dialogs as dialogs_module
from gainbench_app.dialogs import Recovery
from gainbench_app.habits import Memory
from gainbench_app.places import config_folder
from gainbench_app.session import offer_recovery, open_window, unsaved_folder
from gainbench_app.window import Window


@pytest.fixture
def opened(qapp, monkeypatch, tmp_path):
    """Runs open_window until its response is there, and gives the window's words at the end."""

    def run(path):
        seen = {}
        told = []
        monkeypatch.setattr(dialogs_module.Dialogs, "tell", lambda self, parent, title, message: told.append(message))

        def look():
            shown = [one for one in QApplication.topLevelWidgets() if one.isVisible()]
            found = next((one for one in shown if isinstance(one, Window)), None)
            if found is not None and found.desk.assessment is not None and found.desk.assessment.response is not None:
                seen["title"], seen["words"] = found.desk.sheet.title, found.what_it_does.words.text()
                timer.stop()
                found.close()

        timer = QTimer()
        timer.timeout.connect(look)
        timer.start(20)
        assert open_window(path) == 0
        return seen, told

    sheet = qapp.styleSheet()
    yield run
    qapp.setStyleSheet(sheet)


def test_it_opens_on_the_demo_sheet(opened):
    seen, told = opened(None)
    assert seen == {"title": "Label unwinder", "words": "Both loops hold"}
    assert told == []


def test_it_opens_on_a_sheet_of_ones_own(opened, tmp_path, demo_texts):
    path = tmp_path / "drum.bench.toml"
    path.write_text(demo_texts["sieve-drum"], encoding="utf-8")
    seen, _ = opened(str(path))
    assert seen["title"] == "Sieve drum"


def test_a_sheet_that_cannot_be_read_is_told_over_the_demo(opened, tmp_path):
    seen, told = opened(str(tmp_path / "none.bench.toml"))
    assert seen["title"] == "Label unwinder"
    assert "no such file" in told[0]


EDITS_AND_HANGS = """
import sys
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication
from gainbench_app.session import open_window
application = QApplication(sys.argv[:1])
def edit():
    window = next(one for one in application.topLevelWidgets() if one.isVisible())
    window.desk.set_values({"machine.inductance": "0.9 mH"})
    window.desk.set_values({"machine.resistance": "0.6 kg"})
QTimer.singleShot(200, edit)
open_window(sys.argv[1])
"""


def test_unsaved_work_comes_back_after_the_process_was_killed(window, desk, answers, tmp_path, demo_texts):
    path = tmp_path / "mine.bench.toml"
    path.write_text(demo_texts["label-unwinder"], encoding="utf-8")
    process = subprocess.Popen([sys.executable, "-c", EDITS_AND_HANGS, str(path)])
    try:
        until = time.monotonic() + 60.0
        while not (found := list(unsaved_folder().glob("unsaved-*.json"))):
            assert time.monotonic() < until
            assert process.poll() is None
            time.sleep(0.05)
        # A window that lives keeps its own work: it is not offered to another one.
        offer_recovery(window)
        assert answers.recovered == []
    finally:
        process.send_signal(signal.SIGKILL)
        process.wait()
    (file,) = found
    assert json.loads(file.read_text(encoding="utf-8"))["path"] == str(path)
    answers.recovery = Recovery.LATER
    offer_recovery(window)
    assert answers.recovered == ["mine.bench.toml"]
    answers.recovery = Recovery.RESTORE
    offer_recovery(window)
    assert desk.text("machine.inductance") == "0.9 mH"
    assert desk.text("machine.resistance") == "0.6 kg"
    assert not desk.valid
    assert desk.path == path
    assert desk.unsaved_since is not None
    assert path.read_text(encoding="utf-8") == demo_texts["label-unwinder"]
    assert not file.exists()
    assert list(unsaved_folder().glob("*.json")) == []


def test_a_window_that_is_closed_leaves_nothing_behind(opened):
    opened(None)
    assert list(unsaved_folder().glob("*.json")) == []


def test_what_was_left_can_be_thrown_away(window, desk, answers, tmp_path):
    folder = unsaved_folder()
    folder.mkdir(parents=True, exist_ok=True)
    kept = {"format": 1, "name": "x.bench.toml", "path": None, "since": 1.0, "wrong": {}, "text": "format = 1"}
    (folder / "unsaved-1-a.json").write_text(json.dumps(kept), encoding="utf-8")
    (folder / "unsaved-1-b.json").write_text("{", encoding="utf-8")
    answers.recovery = Recovery.RESTORE
    offer_recovery(window)
    assert "cannot be restored" in answers.told[0][0]
    assert desk.sheet.title == "Label unwinder"
    answers.recovery = Recovery.DISCARD
    offer_recovery(window)
    assert answers.recovered == ["x.bench.toml"] * 2
    assert not (folder / "unsaved-1-a.json").exists()
    os.unlink(folder / "unsaved-1-b.json")


def test_the_layout_is_remembered(opened):
    memory = Memory(config_folder() / "window.json")
    opened(None)
    assert memory.habits().geometry
    opened(None)
