import pytest
from PySide6.QtCore import QEvent, QPointF, Qt
from PySide6.QtGui import QEnterEvent
from PySide6.QtWidgets import QLineEdit, QVBoxLayout, QWidget

from gainbench_app.widgets.tolerance_box import ToleranceBox, bare_tolerance


@pytest.fixture
def box(qtbot):
    page = QWidget()
    layout = QVBoxLayout(page)
    other, found = QLineEdit(), ToleranceBox("resistance")
    layout.addWidget(other)
    layout.addWidget(found)
    qtbot.addWidget(page)
    with qtbot.waitActive(page):
        page.show()
        page.activateWindow()
    other.setFocus()
    yield found
    page.close()


@pytest.mark.parametrize("text", ["10 %", "±10 %", " ± 10 %", "+-10 %", "+/- 10 %"])
def test_the_sign_is_not_part_of_it(text):
    assert bare_tolerance(text) == "10 %"


def test_it_is_quiet_until_it_is_pointed_at(box):
    box.show_tolerance(None, "")
    assert box.text() == box.placeholderText() == ""
    box.enterEvent(QEnterEvent(QPointF(1, 1), QPointF(1, 1), QPointF(1, 1)))
    assert box.placeholderText() == "±"
    box.leaveEvent(QEvent(QEvent.Type.Leave))
    assert box.placeholderText() == ""


def test_it_is_reached_by_the_keyboard(box, qtbot):
    assert box.focusPolicy() & Qt.FocusPolicy.TabFocus
    box.setFocus()
    assert box.placeholderText() == "±"
    box.previousInFocusChain().setFocus()
    assert box.placeholderText() == ""


def test_it_is_as_wide_as_it_needs(box):
    box.show_tolerance("10 %", "")
    narrow = box.width()
    box.show_tolerance("0.05 ohm", "")
    assert box.width() > narrow
    assert box.fontMetrics().horizontalAdvance(box.text()) < box.width()


def test_it_says_why_it_is_refused(box):
    box.show_tolerance("200 %", "must be at most 100 %")
    assert box.toolTip() == box.accessibleDescription() == "must be at most 100 %"
    box.show_tolerance("20 %", "")
    assert box.toolTip().startswith("tolerance: ")
