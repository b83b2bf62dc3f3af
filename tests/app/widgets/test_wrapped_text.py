import pytest
from PySide6.QtGui import QFontMetricsF, QImage
from PySide6.QtWidgets import QVBoxLayout, QWidget

from gainbench_app.theme import DARK
from gainbench_app.widgets.wrapped_text import WrappedText


@pytest.fixture
def text(qtbot, appearance):
    page = QWidget()
    layout = QVBoxLayout(page)
    layout.setContentsMargins(0, 0, 0, 0)
    found = WrappedText(appearance)
    layout.addWidget(found)
    layout.addStretch(1)
    qtbot.addWidget(page)
    page.resize(200, 300)
    page.show()
    yield found
    page.close()


def lines(text):
    return round(text.height() / QFontMetricsF(text._hand).lineSpacing())


def test_it_is_as_high_as_its_lines(text):
    text.setText("one line")
    assert lines(text) == 1
    text.setText("a few words more than there is room for in one line of two hundred pixels")
    assert lines(text) == 3
    text.setText("")
    assert text.height() == 0


def test_another_width_breaks_elsewhere(text):
    text.setText("a few words more than there is room for in one line of two hundred pixels")
    high = text.height()
    text.window().resize(600, 300)
    assert text.height() < high


def test_other_words_in_as_many_lines_move_nothing(text, qtbot):
    text.setText("settles in 23.2 ms")
    before = text.geometry()
    text.setText("settles in 38.0 ms")
    assert text.geometry() == before
    assert text.text() == "settles in 38.0 ms"


def test_it_is_painted_in_the_theme(text, appearance):
    text.setText("words")
    light = text.grab().toImage()
    appearance.show(DARK)
    assert text.grab().toImage() != light
    text.setText("other")
    assert text.grab().toImage().convertToFormat(QImage.Format.Format_RGB32) != light
