"""F1 in a dialog that must be answered: the guide opens beside it, can be used, and both end well."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import QPoint, Qt, QTimer
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QDialog, QLineEdit

from gainbench_app.dialogs import Dialogs, Unsaved
from gainbench_app.guide.pages import slug
from gainbench_app.handover_dialog import HandoverDialog, HandoverRequest
from gainbench_app.shortcuts import ShortcutList

REQUEST = HandoverRequest(title="Label unwinder", folder=Path("firmware"), prefix="LABEL_UNWINDER")
LEFT_BUTTON, NONE = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier


@pytest.fixture
def in_dialog(qtbot):
    """Does something in the dialog that comes up next, and takes it away in any case."""

    def plan(act, *, below=None):
        def look():
            dialog = QApplication.activeModalWidget()
            if dialog is None or dialog is below or not dialog.isActiveWindow():
                QTimer.singleShot(10, look)
                return
            try:
                act(dialog)
            finally:
                if dialog.isVisible():
                    dialog.reject()

        QTimer.singleShot(0, look)

    return plan


@pytest.fixture
def press_f1(window, qtbot):
    """Press the key where the focus is in a dialog, and wait until the guide has the keys."""

    def press(dialog):
        qtbot.keyClick(dialog.focusWidget() or dialog, Qt.Key.Key_F1)
        qtbot.waitUntil(lambda: window.guide.window is not None and window.guide.window.isActiveWindow())

    return press


def click_page(guide, name):
    """Choose a page as the screen would: a window that is shut out gets nothing."""
    items = [guide.pages.item(number) for number in range(guide.pages.count())]
    item = next(one for one in items if one.data(Qt.ItemDataRole.UserRole) == name)
    at = guide.pages.viewport().mapTo(guide, guide.pages.visualItemRect(item).center())
    QTest.mouseClick(guide.windowHandle(), LEFT_BUTTON, NONE, at)


def test_f1_in_a_dialog_opens_the_page_that_speaks_of_it(window, press_f1, in_dialog):
    dialogs, shelf, seen = Dialogs(), window.shelf, []

    def act(dialog):
        press_f1(dialog)
        guide = window.guide.window
        assert guide.isVisible()
        seen.append((guide.view.page, slug(guide.view.textCursor().block().text())))
        click_page(guide, "words")
        seen.append(guide.view.page)

    for ask, page, section in (
        (lambda: dialogs.handover(window, REQUEST), "handover", "handover"),
        (lambda: dialogs.name_of_tuning(shelf, "first light"), "shelf", "keep"),
        (lambda: dialogs.note(shelf, "first light", ""), "shelf", "use"),
        (lambda: dialogs.rows_to_set(window, window.desk), "first-steps", "2-put-in-your-motor"),
        (lambda: dialogs.show(ShortcutList(window)), "keys", "keys"),
        (lambda: dialogs.unsaved(window, "Label unwinder"), "the-sheet", "the-sheet"),
        (lambda: dialogs.replace_file(window, Path("gains.h")), "handover", "handover"),
        (lambda: dialogs.tell(shelf, "The shelf stays as it is", "why"), "shelf", "the-shelf"),
    ):
        seen.clear()
        in_dialog(act)
        ask()
        assert seen == [(page, section), "words"]
        assert window.guide.window.isVisible()
    window.close()
    assert not window.guide.window.isVisible()


def test_the_dialog_goes_on_while_the_guide_is_open(window, qtbot, press_f1, in_dialog):
    def act(dialog):
        press_f1(dialog)
        dialog.activateWindow()
        box = dialog.findChild(QLineEdit)
        box.selectAll()
        QTest.mouseClick(dialog.windowHandle(), LEFT_BUTTON, NONE, box.mapTo(dialog, QPoint(4, 4)))
        qtbot.keyClicks(box, "calm ")
        dialog.keep.click()

    in_dialog(act)
    assert "calm" in Dialogs().name_of_tuning(window.shelf, "first light").name
    guide = window.guide.window
    assert guide.isVisible()
    click_page(guide, "driven")
    assert guide.view.page == "driven"
    window.close()


def test_esc_closes_the_guide_alone_and_gives_the_keys_back(window, qtbot, press_f1, in_dialog):
    def act(dialog):
        press_f1(dialog)
        guide = window.guide.window
        QTest.keyClick(guide.windowHandle(), Qt.Key.Key_Escape)
        assert not guide.isVisible()
        assert dialog.isVisible()
        qtbot.waitUntil(dialog.isActiveWindow)
        next(one for one in dialog.buttons() if one.text().replace("&", "") == "Discard changes").click()

    in_dialog(act)
    assert Dialogs().unsaved(window, "Label unwinder") is Unsaved.DISCARD


def test_the_guide_is_free_again_over_the_window(window, qtbot, press_f1, in_dialog):
    """Also one that was open before the dialog was."""
    window.guide.open_at("words")
    guide = window.guide.window
    shut_out = []

    def act(dialog):
        click_page(guide, "driven")
        shut_out.append(guide.view.page)
        press_f1(dialog)
        click_page(guide, "driven")
        shut_out.append(guide.view.page)

    in_dialog(act)
    Dialogs().handover(window, REQUEST)
    assert shut_out == ["words", "driven"]
    assert guide.windowHandle().transientParent() == window.windowHandle()
    window.activateWindow()
    qtbot.waitUntil(window.isActiveWindow)
    window.on_bench.row("machine.resistance").box.setFocus()
    qtbot.keyClick(window.on_bench.row("machine.resistance").box, Qt.Key.Key_F1)
    assert guide.view.page == "the-sheet"
    window.close()


def test_a_dialog_over_a_dialog_has_the_guide_too_and_hands_it_down(window, qtbot, press_f1, in_dialog):
    pages = []

    def over(dialog):
        press_f1(dialog)
        click_page(window.guide.window, "words")
        pages.append(window.guide.window.view.page)

    def act(dialog):
        assert isinstance(dialog, HandoverDialog)
        press_f1(dialog)
        dialog.activateWindow()
        inner = QDialog(dialog)
        in_dialog(over, below=dialog)
        inner.exec()
        click_page(window.guide.window, "driven")
        pages.append(window.guide.window.view.page)

    in_dialog(act)
    Dialogs().handover(window, REQUEST)
    assert pages == ["words", "driven"]
    window.close()


def test_it_opens_beside_the_dialog(window, qtbot, press_f1, in_dialog):
    """On the side where there is more room, as far away as is needed and the screen lets."""
    window.guide.open_at("words")
    guide = window.guide.window
    guide.resize(guide.minimumSize())
    placed = []

    def act(dialog):
        room = dialog.screen().availableGeometry()
        for corner in (room.topLeft(), room.topRight() - QPoint(dialog.width(), 0)):
            dialog.move(corner)
            dialog.activateWindow()
            qtbot.waitUntil(dialog.isActiveWindow)
            press_f1(dialog)
            at = guide.frameGeometry()
            edge = at.right() == room.right() if corner == room.topLeft() else at.left() == room.left()
            placed.append(edge or not at.intersects(dialog.frameGeometry()))

    in_dialog(act)
    Dialogs().name_of_tuning(window.shelf, "first light")
    assert placed == [True, True]
    window.close()
