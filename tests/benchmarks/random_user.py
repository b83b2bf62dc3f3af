"""A user without a plan, over all widgets: ``python tests/benchmarks/random_user.py --actions 20000 --seed 1``.

Seeded. Presses, types, drags and uses the keyboard on whatever is shown, while dialogs answer at random.
It fails on an exception, on a message of Qt, and on a state that the sheet cannot save and reload to itself.
"""

from __future__ import annotations

import argparse
import os
import random
import sys
import tempfile
import time
import traceback
from collections import Counter
from pathlib import Path
from typing import Any

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

IGNORED = ("This plugin does not support",)
"""What the offscreen platform says of itself."""
TEXTS = (
    "0.6 ohm", "1 mH", "52 mN*m/A", "60 Hz", "1 kHz", "55 deg", "0", "1e-3 kg*m^2", "20 A", "48 V", "nonsense", "",
    "10 %", "4096", "2 kHz", "30 ms", "1500 rpm", "-800 rpm", "1e999 V", "0.5", "\N{OHM SIGN}", "45 N*m/rad", "-3 V",
)  # fmt: skip
NAMES = ("softer", "harder", "first light", "", 'a "quoted" one', "x" * 120)
CHECK_EVERY = 25


class TroubleError(Exception):
    """What the user ran into."""


class Answers:
    """Dialogs that answer at random, and never wait for anyone."""

    def __init__(self, rng: random.Random, folder: Path, sheets: list[Path]) -> None:
        self._rng, self._folder, self._sheets = rng, folder, sheets

    def _maybe(self, value: Any) -> Any:
        return value if self._rng.random() < 0.6 else None

    def sheet_to_open(self, parent: Any) -> Path | None:
        return self._maybe(self._rng.choice(self._sheets))

    def sheet_to_save(self, parent: Any, suggestion: Path) -> Path | None:
        return self._maybe(self._folder / f"saved-{self._rng.randrange(3)}.bench.toml")

    def unsaved(self, parent: Any, title: str) -> Any:
        from gainbench_app.dialogs import Unsaved

        return self._rng.choice(list(Unsaved))

    def handover(self, parent: Any, request: Any) -> Any:
        from gainbench_app.handover_dialog import HandoverChoice

        return self._maybe(HandoverChoice(folder=self._folder / "firmware", prefix=None))

    def replace_file(self, parent: Any, path: Path) -> bool:
        return self._rng.random() < 0.5

    def name_of_tuning(self, parent: Any, suggestion: str) -> Any:
        from gainbench_app.keep_dialog import NamedTuning

        name = suggestion if self._rng.random() < 0.5 else self._rng.choice(NAMES)
        return self._maybe(NamedTuning(name=name, note=self._rng.choice(("", 'a note # "x"'))))

    def note(self, parent: Any, name: str, note: str) -> str | None:
        return self._maybe(self._rng.choice(("", "another note", "two\nlines")))

    def recover(self, parent: Any, name: str, when: str) -> Any:
        from gainbench_app.dialogs import Recovery

        return self._rng.choice(list(Recovery))

    def picture_to_save(self, parent: Any, suggestion: str) -> Path | None:
        return self._maybe(self._folder / self._rng.choice(("a.png", "b.svg", "c.bmp")))

    def printer(self, parent: Any) -> None:
        return None

    def log_to_open(self, parent: Any) -> Path | None:
        return self._maybe(self._folder / self._rng.choice(("driven.csv", "driven.csv", "empty.csv", "none.csv")))

    def restart_now(self, parent: Any, message: str) -> bool:
        return self._rng.random() < 0.5

    def rows_to_set(self, parent: Any, desk: Any) -> dict[str, str]:
        return self._maybe({"machine.resistance": "0.5 ohm", "machine.max_speed": "7000 rpm"}) or {}

    def show(self, dialog: Any) -> None:
        dialog.show()
        dialog.close()
        dialog.deleteLater()

    def tell(self, parent: Any, title: str, message: str) -> None:
        if "Traceback" in message:
            raise TroubleError(message)


class User:
    """Does something, and looks whether all is well."""

    def __init__(self, seed: int, folder: Path) -> None:
        from PySide6.QtCore import qInstallMessageHandler
        from PySide6.QtWidgets import QApplication

        from gainbench.sheetfile import parse_sheet
        from gainbench_app.desk import Desk
        from gainbench_app.habits import Memory
        from gainbench_app.theme import LIGHT, body_font, style_sheet
        from gainbench_app.warming import warm_up_window
        from gainbench_app.widgets.appearance import Appearance
        from gainbench_app.window import Window
        from gainbench_resources import demo_log, demo_sheet, demo_sheet_names

        self.rng = random.Random(seed)
        self.folder = folder
        self.done: Counter[str] = Counter()
        self.messages: list[str] = []
        self.raised: list[str] = []
        existing = QApplication.instance()
        self.application = existing or QApplication([])
        self._handler = qInstallMessageHandler(self._message)
        self._hook = sys.excepthook
        sys.excepthook = lambda *what: self.raised.append("".join(traceback.format_exception(*what)))
        self.application.setFont(body_font())
        self.application.setStyleSheet(style_sheet(LIGHT))
        warm_up_window()
        sheets = []
        for name in demo_sheet_names():
            sheets.append(folder / f"{name}.bench.toml")
            sheets[-1].write_text(demo_sheet(name).read_text(encoding="utf-8"), encoding="utf-8")
        (folder / "driven.csv").write_bytes(demo_log("label-unwinder-driven.csv").read_bytes())
        (folder / "empty.csv").write_bytes(b"")
        file = sheets[0]
        self.desk = Desk(parse_sheet(file.read_text(encoding="utf-8"), file.name))
        self.window = Window(
            self.desk,
            appearance=Appearance(LIGHT),
            dialogs=Answers(self.rng, folder, sheets),
            memory=Memory(folder / "window.json"),
        )
        self.window.resize(1400, 900)
        self.window.show()
        self.window.activateWindow()

    def _message(self, kind: Any, context: Any, message: str) -> None:
        if not any(one in message for one in IGNORED):
            self.messages.append(message)

    def finish(self) -> None:
        """Put things back."""
        from PySide6.QtCore import qInstallMessageHandler

        self.window.hide()
        self.window.deleteLater()
        self.application.processEvents()
        qInstallMessageHandler(self._handler)
        sys.excepthook = self._hook

    # What there is to do

    def act(self) -> None:
        """One action on one widget that is shown."""
        from PySide6.QtWidgets import QAbstractButton, QComboBox, QLineEdit, QTableView, QWidget

        from gainbench_app.guide.view import GuideView
        from gainbench_app.what_we_ask.findings import FindingRow
        from gainbench_app.widgets.figure import Figure
        from gainbench_app.widgets.slim_slider import SlimSlider

        kinds = (QAbstractButton, QComboBox, QLineEdit, SlimSlider, Figure, QTableView, FindingRow, GuideView)
        chosen = self.rng.choice(("keys", "menu", *(["widget"] * 18)))
        if chosen == "menu":
            self._menu()
        elif chosen == "keys":
            self._key(self.application.focusWidget() or self.window)
        else:
            found = [
                one for one in self.window.findChildren(QWidget)
                if isinstance(one, kinds) and one.isVisible() and one.isEnabled()
            ]  # fmt: skip
            self._use(self.rng.choice(found))
        if self.rng.random() < 0.3:
            self.application.processEvents()

    def _use(self, widget: Any) -> None:
        from PySide6.QtWidgets import QAbstractButton, QAbstractScrollArea, QComboBox, QLineEdit

        self.done[type(widget).__name__] += 1
        if self.rng.random() < 0.15:
            widget.setFocus()
            self._key(widget)
        elif isinstance(widget, QLineEdit):
            self._type(widget)
        elif isinstance(widget, QComboBox):
            if widget.count():
                index = self.rng.randrange(widget.count())
                widget.setCurrentIndex(index)
                widget.activated.emit(index)
        elif isinstance(widget, QAbstractButton):
            if getattr(widget, "menu", lambda: None)() is None:
                widget.click()
        elif isinstance(widget, QAbstractScrollArea):
            self._press(widget.viewport())
        else:
            self._drag(widget)

    def _type(self, box: Any) -> None:
        from PySide6.QtCore import Qt
        from PySide6.QtTest import QTest

        box.setFocus()
        box.selectAll()
        text = self.rng.choice(TEXTS)
        if not text:
            QTest.keyClick(box, Qt.Key.Key_Delete)
        for letter in text:
            box.insert(letter)
        QTest.keyClick(box, self.rng.choice((Qt.Key.Key_Return, Qt.Key.Key_Return, Qt.Key.Key_Escape, Qt.Key.Key_Tab)))

    def _place(self, widget: Any) -> Any:
        from PySide6.QtCore import QPoint

        return QPoint(self.rng.randrange(max(1, widget.width())), self.rng.randrange(max(1, widget.height())))

    def _press(self, widget: Any) -> None:
        from PySide6.QtCore import Qt
        from PySide6.QtTest import QTest

        QTest.mouseClick(widget, Qt.MouseButton.LeftButton, pos=self._place(widget))

    def _drag(self, widget: Any) -> None:
        from PySide6.QtCore import Qt
        from PySide6.QtTest import QTest

        QTest.mousePress(widget, Qt.MouseButton.LeftButton, pos=self._place(widget))
        for _ in range(self.rng.randrange(4)):
            QTest.mouseMove(widget, self._place(widget))
        if self.rng.random() < 0.15:
            QTest.keyClick(widget, Qt.Key.Key_Escape)
        QTest.mouseRelease(widget, Qt.MouseButton.LeftButton, pos=self._place(widget))
        if self.rng.random() < 0.05:
            QTest.mouseDClick(widget, Qt.MouseButton.LeftButton, pos=self._place(widget))

    def _key(self, widget: Any) -> None:
        from PySide6.QtCore import Qt
        from PySide6.QtTest import QTest

        keys, modifiers = Qt.Key, Qt.KeyboardModifier
        none, shift, control = modifiers.NoModifier, modifiers.ShiftModifier, modifiers.ControlModifier
        pairs = (
                (keys.Key_Left, none), (keys.Key_Right, none), (keys.Key_Up, none), (keys.Key_Down, none),
                (keys.Key_Left, shift), (keys.Key_PageUp, none), (keys.Key_Escape, none), (keys.Key_Tab, none),
                (keys.Key_Space, none), (keys.Key_Return, none), (keys.Key_Delete, none), (keys.Key_F2, none),
                (keys.Key_Z, control), (keys.Key_Z, control), (keys.Key_Y, control), (keys.Key_K, control),
                (keys.Key_1, control), (keys.Key_4, control), (keys.Key_S, control), (keys.Key_E, control),
                (keys.Key_Slash, control), (keys.Key_1, none), (keys.Key_2, none), (keys.Key_3, none),
                (keys.Key_5, control), (keys.Key_F1, none),
        )  # fmt: skip
        key, modifier = self.rng.choice(pairs)
        if getattr(widget, "menu", lambda: None)() is not None:
            # A menu that is popped up waits for someone to choose; its actions are used by themselves.
            return
        self.done["keys"] += 1
        QTest.keyClick(widget, key, modifier)

    def _menu(self) -> None:
        menu = self.window.menu_of_more
        actions = [
            menu.undo, menu.redo, menu.save_as, menu.paste_rows, menu.copy_picture, menu.save_picture, menu.print,
            menu.shortcuts, menu.guide, *menu.demos.actions(), *menu.scales.values(),
        ]  # fmt: skip
        menu.aboutToShow.emit()
        actions += menu.recent.actions()
        action = self.rng.choice(actions)
        self.done["menu"] += 1
        if action.isEnabled():
            action.trigger()

    # Whether all is well

    def check(self) -> None:
        """Fail on what went wrong, and on a sheet that does not come back as it was.

        Raises
        ------
        TroubleError
            With what went wrong.
        """
        from gainbench.sheetfile import read_sheet, write_sheet

        self.application.processEvents()
        if self.raised:
            raise TroubleError(self.raised[0])
        if self.messages:
            raise TroubleError(f"Qt said: {self.messages[0]}")
        document = self.desk.settled_document()
        path = self.folder / "again.bench.toml"
        write_sheet(document, path)
        again = read_sheet(path)
        if again.text() != document.text():
            raise TroubleError("the text that was saved is another one")
        name = document.name
        if again.renamed(name).sheet != self.desk.sheet:
            raise TroubleError(f"the sheet that was saved means something else:\n{again.sheet}\n{self.desk.sheet}")
        self.desk.compute_now()


def run(actions: int, seed: int, folder: Path) -> Counter[str]:
    """Do so many things.

    Raises
    ------
    TroubleError
        With the number of the action, and what went wrong.
    """
    user = User(seed, folder)
    try:
        for number in range(actions):
            try:
                user.act()
                if number % CHECK_EVERY == CHECK_EVERY - 1:
                    user.check()
            except Exception as error:
                raise TroubleError(f"action {number} of seed {seed}: {type(error).__name__}: {error}") from error
        user.check()
        return user.done
    finally:
        user.finish()


def main() -> int:
    """Run, and tell."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--actions", type=int, default=20_000)
    parser.add_argument("--seed", type=int, default=1)
    options = parser.parse_args()
    start = time.perf_counter()
    with tempfile.TemporaryDirectory() as folder:
        done = run(options.actions, options.seed, Path(folder))
    told = ", ".join(f"{name} {count}" for name, count in sorted(done.items()))
    sys.stdout.write(f"{options.actions} actions in {time.perf_counter() - start:.0f} s, no trouble: {told}\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
