import pytest
from PySide6.QtCore import QEvent, QObject, Qt
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QWidget

from gainbench_app.widgets.grounded import Grounded


class Plain(Grounded, QWidget):
    def paintEvent(self, event):  # noqa: N802
        with QPainter(self) as painter:
            painter.fillRect(self.rect(), QColor("#102030"))


class Paints(QObject):
    """Who was painted."""

    def __init__(self):
        super().__init__()
        self.seen = []

    def eventFilter(self, watched, event):  # noqa: N802
        if event.type() == QEvent.Type.Paint:
            self.seen.append(watched)
        return False


@pytest.fixture
def pair(qtbot):
    below = QWidget()
    below.setStyleSheet("QWidget { background: transparent; }")
    inner = Plain(below)
    inner.setGeometry(10, 10, 40, 20)
    below.resize(100, 60)
    qtbot.addWidget(below)
    with qtbot.waitExposed(below):
        below.show()
    return below, inner


def test_what_is_below_is_not_painted_with_it(pair, qtbot):
    inner = pair[1]
    paints = Paints()
    for one in pair:
        one.installEventFilter(paints)
    inner.update()
    qtbot.waitUntil(lambda: bool(paints.seen))
    assert set(paints.seen) == {inner}


def test_another_style_does_not_take_that_away(pair):
    below, inner = pair
    below.setStyleSheet("QWidget { background: transparent; color: red; }")
    assert inner.testAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
