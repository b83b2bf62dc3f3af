"""Every shortcut of the window in one list: what the window listens to, and what it shows when asked for the list."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QGridLayout, QLabel, QScrollArea, QVBoxLayout, QWidget

from gainbench_app.theme import MARGIN_PX


@dataclass(frozen=True, slots=True, kw_only=True)
class Shortcut:
    """Keys, and what they do."""

    keys: tuple[str, ...]
    does: str


SHEET: dict[str, Shortcut] = {
    "open": Shortcut(keys=("Ctrl+O",), does="open a sheet"),
    "save": Shortcut(keys=("Ctrl+S",), does="save"),
    "save_as": Shortcut(keys=("Ctrl+Shift+S",), does="save under another name"),
    "undo": Shortcut(keys=("Ctrl+Z",), does="take the last step back"),
    "redo": Shortcut(keys=("Ctrl+Shift+Z", "Ctrl+Y"), does="take the undo back"),
    "keep": Shortcut(keys=("Ctrl+K",), does="keep this tuning on the shelf"),
    "handover": Shortcut(keys=("Ctrl+E",), does="hand over to the firmware"),
    "evidence": Shortcut(keys=("Ctrl+L",), does="open the evidence page, or go back to the tuning"),
    "paste_rows": Shortcut(keys=("Ctrl+Shift+V",), does="paste rows from a data sheet"),
    "copy_picture": Shortcut(keys=("Ctrl+Shift+C",), does="copy a picture of the plots"),
    "print": Shortcut(keys=("Ctrl+P",), does="print"),
    "bench": Shortcut(keys=("Ctrl+1",), does="go to what is on the bench"),
    "does": Shortcut(keys=("Ctrl+2",), does="go to what it does"),
    "ask": Shortcut(keys=("Ctrl+3",), does="go to what we ask"),
    "shelf": Shortcut(keys=("Ctrl+4",), does="go to the shelf"),
    "findings": Shortcut(keys=("Ctrl+5",), does="go to the findings"),
    "guide": Shortcut(keys=("F1",), does="open the guide at what has the focus"),
    "shortcuts": Shortcut(keys=("Ctrl+/", "F12"), does="show this list"),
    "quit": Shortcut(keys=("Ctrl+Q",), does="quit"),
}
"""By the name of the action; they work everywhere in the window."""

GUIDE: dict[str, Shortcut] = {
    "back": Shortcut(keys=("Alt+Left",), does="go back to where you were"),
    "forward": Shortcut(keys=("Alt+Right",), does="go forward again"),
    "find": Shortcut(keys=("Ctrl+F",), does="find words in the page"),
    "next": Shortcut(keys=("F3",), does="go to the next of them"),
    "previous": Shortcut(keys=("Shift+F3",), does="go to the one before"),
    "close": Shortcut(keys=("Esc",), does="end the search, or close the guide"),
}
"""By the name of the action; they work in the window of the guide."""

WITHIN: dict[str, tuple[Shortcut, ...]] = {
    "In a box": (
        Shortcut(keys=("Return",), does="take what is typed"),
        Shortcut(keys=("Esc",), does="take the typing back"),
    ),
    "For the time plots": (
        Shortcut(keys=("1", "2", "3"), does="show the whole, the step, the load"),
        Shortcut(keys=("Up", "Down"), does="choose a time of the duty, on their handles"),
        Shortcut(keys=("Left", "Right"), does="move it by 1 %, with Shift by 0.1 %"),
    ),
    "On a slider or a reach map": (
        Shortcut(keys=("Left", "Right", "Up", "Down"), does="move by 1 %"),
        Shortcut(keys=("Shift+Left", "Shift+Right"), does="move by 0.1 %"),
        Shortcut(keys=("Esc",), does="take the movement back"),
    ),
    "On the evidence page": (
        Shortcut(keys=("Up", "Down"), does="choose an end of the span, on the signals"),
        Shortcut(keys=("Left", "Right"), does="move it by 1 %, with Shift by 0.1 %"),
        Shortcut(keys=("Esc",), does="take the movement back, or go back to the tuning"),
    ),
    "On a finding": (
        Shortcut(keys=("Space",), does="say why, and what to try next, or no more"),
        Shortcut(keys=("Return",), does="go to the entry that it asks to move"),
    ),
    "On the shelf": (
        Shortcut(keys=("Space",), does="draw the chosen tuning, or no more"),
        Shortcut(keys=("Return",), does="put the chosen tuning in force"),
        Shortcut(keys=("F2",), does="rename it"),
        Shortcut(keys=("Alt+Up", "Alt+Down"), does="put it further up or down"),
        Shortcut(keys=("Del",), does="take it off the shelf"),
    ),
    "In the guide": tuple(GUIDE.values()),
}
"""By where they work."""


def sequences(name: str) -> list[QKeySequence]:
    """The keys of an action of the window."""
    return [QKeySequence(keys) for keys in SHEET[name].keys]


def guide_sequences(name: str) -> list[QKeySequence]:
    """The keys of an action of the guide's window."""
    return [QKeySequence(keys) for keys in GUIDE[name].keys]


def told(shortcut: Shortcut) -> str:
    """Its keys, as this system writes them."""
    return ", ".join(QKeySequence(keys).toString(QKeySequence.SequenceFormat.NativeText) for keys in shortcut.keys)


class ShortcutList(QDialog):
    """Shows all of them."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Shortcuts")
        self.resize(520, 640)
        inner = QWidget()
        inner.setObjectName("paper")
        grid = QGridLayout(inner)
        grid.setContentsMargins(MARGIN_PX, MARGIN_PX, MARGIN_PX, MARGIN_PX)
        grid.setHorizontalSpacing(22)
        grid.setVerticalSpacing(4)
        grid.setColumnStretch(1, 1)
        line = 0
        for head, shortcuts in {"Everywhere": tuple(SHEET.values()), **WITHIN}.items():
            name = QLabel(head)
            name.setProperty("role", "head")
            name.setContentsMargins(0, 10 if line else 0, 0, 2)
            grid.addWidget(name, line, 0, 1, 2)
            line += 1
            for one in shortcuts:
                keys = QLabel(told(one))
                does = QLabel(one.does)
                does.setProperty("role", "muted")
                grid.addWidget(keys, line, 0)
                grid.addWidget(does, line, 1)
                line += 1
        grid.setRowStretch(line, 1)
        area = QScrollArea()
        area.setWidget(inner)
        area.setWidgetResizable(True)
        area.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        area.setAccessibleName("list of shortcuts")
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, MARGIN_PX - 6)
        layout.addWidget(area)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.reject)
        buttons.setContentsMargins(MARGIN_PX, 0, MARGIN_PX, 0)
        layout.addWidget(buttons)
