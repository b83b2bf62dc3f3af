"""What the tests of the window stand on: a desk with the demo sheet, a window over it, and dialogs that answer."""

from __future__ import annotations

from pathlib import Path

import pytest

from qt_presence import qt_is_missing

WITHOUT_QT = ("test_start.py", "test_display.py")


class SkippedModule(pytest.Module):
    """A test file that needs Qt where there is none."""

    def collect(self):
        pytest.skip(qt_is_missing(), allow_module_level=True)


def pytest_pycollect_makemodule(module_path, parent):
    """Skip, with the reason, before the file's own imports fail."""
    if module_path.name not in WITHOUT_QT and qt_is_missing():
        return SkippedModule.from_parent(parent, path=module_path)
    return None


class Answers:
    """Stands for the dialogs: it answers what a test has put in, and remembers what was said."""

    def __init__(self):
        self.open: Path | None = None
        self.save: Path | None = None
        self.log: Path | None = None
        self.leave = "cancel"
        self.choice = None
        self.replace = False
        self.asked: list[str] = []
        self.told: list[tuple[str, str]] = []
        self.requests: list[object] = []
        self.named: tuple[str, str] | None = None
        self.noted: str | None = None
        self.picture: Path | None = None
        self.device = None
        self.recovery = "later"
        self.restart = False
        self.restarts: list[str] = []
        self.recovered: list[str] = []
        self.rows: dict[str, str] = {}
        self.shown: list[object] = []

    def sheet_to_open(self, parent):
        self.asked.append("open")
        return self.open

    def log_to_open(self, parent):
        self.asked.append("log")
        return self.log

    def sheet_to_save(self, parent, suggestion):
        self.asked.append(f"save as {suggestion.name}")
        return self.save

    def unsaved(self, parent, title):
        from gainbench_app.dialogs import Unsaved

        self.asked.append(f"unsaved {title}")
        return Unsaved(self.leave)

    def handover(self, parent, request):
        self.requests.append(request)
        return self.choice

    def replace_file(self, parent, path):
        self.asked.append(f"replace {path.name}")
        return self.replace

    def name_of_tuning(self, parent, suggestion):
        from gainbench_app.keep_dialog import NamedTuning

        self.asked.append(f"name {suggestion}")
        return NamedTuning(name=self.named[0], note=self.named[1]) if self.named is not None else None

    def note(self, parent, name, note):
        self.asked.append(f"note {name}: {note}")
        return self.noted

    def picture_to_save(self, parent, suggestion):
        self.asked.append(f"picture {suggestion}")
        return self.picture

    def printer(self, parent):
        return self.device

    def recover(self, parent, name, when):
        from gainbench_app.dialogs import Recovery

        self.recovered.append(name)
        return Recovery(self.recovery)

    def restart_now(self, parent, message):
        self.restarts.append(message)
        return self.restart

    def rows_to_set(self, parent, desk):
        return self.rows

    def show(self, dialog):
        self.shown.append(dialog)

    def tell(self, parent, title, message):
        self.told.append((title, message))


@pytest.fixture
def answers():
    return Answers()


@pytest.fixture
def clock():
    """A clock that a test turns."""
    return [1_000_000.0]


@pytest.fixture
def desk(qapp, demo_texts, clock):
    """The label unwinder, assessed."""
    from gainbench.sheetfile import parse_sheet
    from gainbench_app.desk import Desk

    name = "label-unwinder"
    found = Desk(parse_sheet(demo_texts[name], f"{name}.bench.toml"), clock=lambda: clock[0])
    found.compute_now()
    return found


@pytest.fixture
def appearance(qapp):
    from gainbench_app.widgets.appearance import Appearance

    return Appearance()


@pytest.fixture
def window(qtbot, qapp, desk, appearance, answers):
    """A window over the desk, shown."""
    from gainbench_app.theme import LIGHT, body_font, style_sheet
    from gainbench_app.window import Window

    qapp.setStyle("Fusion")
    qapp.setFont(body_font())
    qapp.setStyleSheet(style_sheet(LIGHT))
    found = Window(desk, appearance=appearance, dialogs=answers)
    qtbot.addWidget(found, before_close_func=lambda _: setattr(answers, "leave", "discard"))
    with qtbot.waitExposed(found):
        found.show()
    found.activateWindow()
    return found


@pytest.fixture(autouse=True)
def nothing_left_over(request):
    """A window that a test leaves on the screen is a failure; what is to be deleted goes now."""
    yield
    if "qapp" in request.fixturenames:
        from PySide6.QtCore import QCoreApplication, QEvent
        from PySide6.QtWidgets import QApplication

        assert not [one for one in QApplication.topLevelWidgets() if one.isVisible()]
        # Outside of an event loop nothing else does it, and each style sheet is applied to all that is left.
        QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)
