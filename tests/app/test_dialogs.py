from pathlib import Path

import pytest
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QFileDialog, QMessageBox, QWidget

from gainbench_app.dialogs import Dialogs, Unsaved
from gainbench_app.handover_dialog import HandoverDialog, HandoverRequest


@pytest.fixture
def parent(qtbot):
    found = QWidget()
    qtbot.addWidget(found)
    return found


def when_shown(act):
    """Do something with the dialog that comes up."""

    def look():
        dialog = QApplication.activeModalWidget()
        if dialog is None:
            QTimer.singleShot(10, look)
        else:
            act(dialog)

    QTimer.singleShot(0, look)


def press(words):
    def act(dialog):
        next(button for button in dialog.buttons() if button.text().replace("&", "") == words).click()

    return act


@pytest.mark.parametrize(
    ("words", "answer"),
    [("Save", Unsaved.SAVE), ("Discard changes", Unsaved.DISCARD), ("Keep working", Unsaved.CANCEL)],
)
def test_unsaved_work_has_three_ways_out(parent, words, answer):
    when_shown(press(words))
    assert Dialogs().unsaved(parent, "Label unwinder") is answer


@pytest.mark.parametrize(("words", "answer"), [("Restart now", True), ("Later", False)])
def test_the_program_starts_again_only_if_that_is_wanted(parent, words, answer):
    when_shown(press(words))
    assert Dialogs().restart_now(parent, "another size") is answer


def test_a_message_is_told(parent):
    seen = []
    when_shown(lambda dialog: (seen.append(dialog.text()), dialog.accept()))
    Dialogs().tell(parent, "Not saved", "the folder is read-only")
    assert seen == ["the folder is read-only"]


def test_the_cautions_are_shown_before_a_handover(parent):
    request = HandoverRequest(title="Label unwinder", folder=Path("firmware"), prefix="LABEL_UNWINDER")
    when_shown(lambda dialog: dialog.reject())
    assert Dialogs().handover(parent, request) is None

    def accept(dialog):
        assert isinstance(dialog, HandoverDialog)
        dialog.write.click()

    when_shown(accept)
    assert Dialogs().handover(parent, request).folder == Path("firmware")


def test_a_name_without_an_ending_gets_it(parent, monkeypatch):
    for name, path in (("motor", "motor.bench.toml"), ("motor.toml", "motor.toml"), ("", None)):
        monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_, name=name: (name, ""))
        assert Dialogs().sheet_to_save(parent, Path("x")) == (Path(path) if path else None)


def test_no_file_is_chosen_where_none_was(parent, monkeypatch):
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_: ("", ""))
    assert Dialogs().sheet_to_open(parent) is None
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_: ("motor.bench.toml", ""))
    assert Dialogs().sheet_to_open(parent) == Path("motor.bench.toml")


@pytest.mark.parametrize("answer", [True, False])
def test_a_file_is_replaced_only_on_a_yes(parent, answer):
    buttons = QMessageBox.StandardButton
    when_shown(lambda dialog: dialog.button(buttons.Yes if answer else buttons.No).click())
    assert Dialogs().replace_file(parent, Path("gains.h")) is answer
