import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QImage, QPainter
from PySide6.QtWidgets import QWidget

from gainbench_app.theme import DARK, LIGHT
from gainbench_app.what_it_does.measured_marks import Bead, Layer, bead_of, paint_beads, paint_thread


def drawn(paint, theme=LIGHT):
    """What is painted on a card of 40 by 20 pixels."""
    image = QImage(40, 20, QImage.Format.Format_RGB32)
    image.fill(QColor(theme.card))
    with QPainter(image) as painter:
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        paint(painter)
    return image


def brightness(image):
    return np.array([[image.pixelColor(x, y).lightnessF() for x in range(40)] for y in range(20)])


def luminance(colour):
    channels = np.array(QColor(colour).getRgbF()[:3])
    linear = np.where(channels <= 0.04045, channels / 12.92, ((channels + 0.055) / 1.055) ** 2.4)
    return float(linear @ (0.2126, 0.7152, 0.0722)) + 0.05


def beads(painter, bead, *, faint=False):
    at = np.array([10.0, 30.0])
    paint_beads(painter, across=at, down=np.array([10.0, 10.0]), bead=bead, colour=LIGHT.ink, theme=LIGHT, faint=faint)


def test_logs_are_told_apart_by_the_form_of_their_beads(qapp):
    forms = [drawn(lambda painter, one=one: beads(painter, one)) for one in Bead]
    assert all(one != other for index, one in enumerate(forms) for other in forms[:index])
    assert [bead_of(index) for index in range(5)] == [*Bead, Bead.ROUND]


def test_faint_beads_are_smaller_not_only_lighter(qapp):
    strong, faint = (
        brightness(drawn(lambda painter, faint=faint: beads(painter, Bead.ROUND, faint=faint)))
        for faint in (False, True)
    )
    empty = brightness(drawn(lambda painter: None))
    assert 0 < np.sum(faint < empty - 0.02) < np.sum(strong < empty - 0.02)


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=["light", "dark"])
@pytest.mark.parametrize("quantity", ["speed", "current", "voltage"])
def test_the_thin_line_can_be_seen(qapp, theme, quantity):
    across, down = np.array([0.0, 40.0]), np.array([10.5, 10.5])
    image = drawn(
        lambda painter: paint_thread(painter, across=across, down=down, colour=getattr(theme, quantity), theme=theme),
        theme,
    )
    line = max(
        (image.pixelColor(20, y) for y in range(20)), key=lambda one: abs(luminance(one) - luminance(theme.card))
    )
    pair = sorted((luminance(line), luminance(theme.card)))
    assert pair[1] / pair[0] >= 3.0


def test_a_layer_is_painted_once_on_the_screen_and_every_time_in_a_picture(qtbot):
    layer, calls = Layer(), []

    class Card(QWidget):
        key = (1,)

        def paintEvent(self, event):  # noqa: N802
            with QPainter(self) as painter:
                layer.paint(painter, self.key, self.mark)

        def mark(self, painter):
            calls.append(painter)
            painter.fillRect(2, 2, 5, 5, Qt.GlobalColor.red)

    card = Card()
    qtbot.addWidget(card)
    card.resize(20, 20)
    first = card.grab().toImage()
    assert first.pixelColor(4, 4) == QColor(Qt.GlobalColor.red)
    assert card.grab().toImage() == first
    assert len(calls) == layer.painted == 1
    card.key = (2,)
    card.grab()
    assert layer.painted == 2
    drawn(lambda painter: layer.paint(painter, card.key, card.mark))
    assert (len(calls), layer.painted) == (3, 2)
