from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QLabel

from gainbench_app.shortcuts import SHEET, WITHIN, ShortcutList, sequences, told


def test_no_key_has_two_meanings():
    keys = [one.toString() for name in SHEET for one in sequences(name)]
    assert len(set(keys)) == len(keys)
    assert all(keys)


def test_the_list_shows_every_one(qtbot):
    dialog = ShortcutList()
    qtbot.addWidget(dialog)
    shown = {one.text() for one in dialog.findChildren(QLabel)}
    for one in [*SHEET.values(), *(one for group in WITHIN.values() for one in group)]:
        assert {told(one), one.does} <= shown


def test_keys_are_written_as_the_system_does():
    assert told(SHEET["redo"]) == "Ctrl+Shift+Z, Ctrl+Y"
    assert sequences("quit") == [QKeySequence("Ctrl+Q")]
