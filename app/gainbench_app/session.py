"""From the start of the window to its end: settings, the first sheet, the compiler, and what a crash left behind."""

from __future__ import annotations

import os
import sys
import time
from dataclasses import replace
from functools import partial
from pathlib import Path

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication

from gainbench.assess import warm_up
from gainbench.errors import SheetError
from gainbench.sheetfile import SheetDocument, parse_sheet, read_sheet
from gainbench_app.autosave import Autosave, Unsaved, forget, left_behind
from gainbench_app.desk import Desk
from gainbench_app.dialogs import Recovery
from gainbench_app.habits import Habits, Memory, with_recent
from gainbench_app.layout_memory import lay_out, with_layout
from gainbench_app.live import Readiness, WarmUp
from gainbench_app.places import config_folder, state_folder
from gainbench_app.restarting import Restart, carried_over, start_again, take_up
from gainbench_app.theme import Scheme, body_font
from gainbench_app.themes import Themes
from gainbench_app.warming import warm_up_window
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.window import Window
from gainbench_resources import demo_sheet, demo_sheet_names


def open_window(path: str | None) -> int:
    """Open the window and run until it is closed.

    Parameters
    ----------
    path : str, optional
        A bench sheet; without one the demo sheet opens. One that cannot be read is said in a dialog over the demo.

    Returns
    -------
    int
        Exit status of the application.
    """
    memory = Memory(config_folder() / "window.json")
    habits = memory.habits()
    application = _application(habits)
    carried = carried_over(os.environ)
    document, file, trouble = _first_document(path, carried)
    desk = Desk(document, path=file, readiness=Readiness.NOTHING)
    appearance = Appearance()
    # Before there are widgets: a style sheet that comes later lays all of them out a second time.
    themes = Themes(application, appearance, scheme=habits.scheme)
    window = Window(desk, appearance=appearance, memory=memory)
    themes.follow(window.menu_of_more)
    window.menu_of_more.scheme_chosen.connect(lambda chosen: memory.change(partial(_with_scheme, scheme=chosen)))
    lay_out(window, habits)
    if file is not None:
        memory.change(partial(with_recent, path=file))
    autosave = Autosave(desk, unsaved_folder())
    if carried is not None and not trouble:
        bring_back(desk, carried, autosave)
    restart = Restart(desk, unsaved_folder(), window)
    restart.ready.connect(application.exit)
    window.restart_wanted.connect(lambda: _restart(window, restart))
    warming = WarmUp(partial(warm_up, simulated=False), warm_up_window)
    warming.reached.connect(desk.reach)
    warming.finished.connect(window.settle_memory)
    warming.failed.connect(window.tell_failure)
    window.show()
    warming.start()
    if trouble:
        QTimer.singleShot(0, window, lambda: window.dialogs.tell(window, "This sheet cannot be opened", trouble))
    QTimer.singleShot(0, window, lambda: offer_recovery(window))
    status = application.exec()
    memory.change(partial(with_layout, window=window))
    memory.change(partial(_with_scheme, scheme=themes.scheme))
    # What is carried over has a file of its own; one that stayed would be offered as unsaved work some day.
    autosave.release()
    if restart.file is not None:
        start_again(restart.file, os.environ)
    warming.requestInterruption()
    warming.wait()
    return status


def unsaved_folder() -> Path:
    """Where unsaved work outlasts a crash."""
    return state_folder() / "unsaved"


def bring_back(desk: Desk, carried: Unsaved, autosave: Autosave) -> None:
    """Put the sheet that was carried over in the state that it was in; its file goes once it is safe elsewhere."""
    if carried.since is not None:
        desk.restore(carried.text, carried.name, path=carried.path, since=carried.since)
    if carried.wrong:
        desk.set_values(carried.wrong)
    autosave.write_now()
    forget(carried)


def _restart(window: Window, restart: Restart) -> None:
    trouble = restart.prepare()
    if trouble:
        window.dialogs.tell(window, "Not started again", trouble)


def offer_recovery(window: Window) -> None:
    """Ask about work that a process did not get to save: one sheet can be restored, the others wait or go."""
    for unsaved in left_behind(unsaved_folder()):
        when = time.strftime("%Y-%m-%d %H:%M", time.localtime(unsaved.since))
        answer = window.dialogs.recover(window, unsaved.name, when)
        if answer is Recovery.DISCARD:
            forget(unsaved)
        elif answer is Recovery.RESTORE:
            if not window.may_leave():
                return
            try:
                window.desk.restore(unsaved.text, unsaved.name, path=unsaved.path, since=unsaved.since)
            except SheetError as error:
                window.dialogs.tell(window, "This sheet cannot be restored", str(error))
                continue
            if unsaved.wrong:
                window.desk.set_values(unsaved.wrong)
            forget(unsaved)
            return


def _application(habits: Habits) -> QApplication:
    existing = QApplication.instance()
    if isinstance(existing, QApplication):
        application = existing
    else:
        take_up(habits.scale, os.environ)
        application = QApplication(sys.argv[:1])
    application.setApplicationName("Gainbench")
    application.setStyle("Fusion")
    application.setFont(body_font())
    return application


def _with_scheme(habits: Habits, *, scheme: Scheme) -> Habits:
    return replace(habits, scheme=scheme)


def _first_document(path: str | None, carried: Unsaved | None) -> tuple[SheetDocument, Path | None, str]:
    """The sheet to open with, its file, and what is to be said about one that cannot be read."""
    trouble = ""
    if carried is not None:
        try:
            return parse_sheet(carried.text, carried.name), carried.path, ""
        except SheetError as error:
            trouble = str(error)
    if path is not None:
        try:
            return read_sheet(path), Path(path), ""
        except SheetError as error:
            trouble = str(error)
    file = demo_sheet(demo_sheet_names()[0])
    return parse_sheet(file.read_text(encoding="utf-8"), file.name), None, trouble
