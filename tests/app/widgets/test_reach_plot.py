import math

import numpy as np
import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QColor, QWheelEvent
from PySide6.QtWidgets import QWidget

from gainbench.reach import ReachArea
from gainbench_app.theme import LIGHT
from gainbench_app.widgets.map_view import MapPoint, MapView
from gainbench_app.widgets.reach_plot import ReachPlot
from gainbench_app.widgets.scales import Range

LEFT_BUTTON = Qt.MouseButton.LeftButton


def area(first=10.0, last=100.0, *, low=20.0, high=70.0):
    """A strip of even margins [deg] between two crossovers [Hz]."""
    crossover = math.tau * np.geomspace(first, last, 20)
    return ReachArea(crossover=crossover, low=np.full(20, math.radians(low)), high=np.full(20, math.radians(high)))


def point(hertz, degrees, name=""):
    return MapPoint(crossover=math.tau * hertz, margin=math.radians(degrees), name=name)


def view(*areas, at=None, asked=True, met=True, kept=()):
    return MapView(
        areas=areas or (area(),),
        decades=Range(low=0.0, high=3.0, step=1.0),
        degrees=Range(low=0.0, high=90.0, step=30.0),
        point=at or point(30.0, 45.0),
        asked=asked,
        met=met,
        kept=kept,
    )


@pytest.fixture
def plot(qtbot, appearance):
    holder = QWidget()
    holder.resize(360, 140)
    qtbot.addWidget(holder)
    found = ReachPlot("speed", appearance, holder)
    found.resize(340, found.height())
    found.show_view(view())
    with qtbot.waitExposed(holder):
        holder.show()
    yield found
    holder.hide()


@pytest.fixture
def heard(plot):
    found = []
    plot.moved.connect(lambda crossover, margin: found.append((crossover / math.tau, math.degrees(margin))))
    return found


def colour_at(widget, at):
    return QColor(widget.grab().toImage().pixel(at.toPoint()))


def test_what_can_be_met_is_filled_and_what_cannot_is_shaded(plot):
    inside = colour_at(plot, plot.place_of(point(50.0, 30.0)))
    outside = colour_at(plot, plot.place_of(point(500.0, 30.0)))
    assert inside == QColor(LIGHT.mixed(LIGHT.speed, 0.24))
    assert outside == QColor(LIGHT.mixed(LIGHT.outline, 0.20))
    assert colour_at(plot, plot.place_of(point(50.0, 80.0))) == outside
    assert colour_at(plot, plot.place_of(point(30.0, 45.0))) == QColor(LIGHT.speed)


def test_a_target_that_can_be_met_stays_and_another_is_drawn_to_the_edge(plot):
    inside = plot.nearest(plot.place_of(point(50.0, 60.0)))
    assert inside.crossover / math.tau == pytest.approx(50.0, rel=0.01)
    assert math.degrees(inside.margin) == pytest.approx(60.0, abs=0.06)
    above = plot.nearest(plot.place_of(point(50.0, 85.0)))
    assert above.crossover / math.tau == pytest.approx(50.0, rel=0.01)
    assert 69.8 < math.degrees(above.margin) < 70.0
    beside = plot.nearest(plot.place_of(point(700.0, 50.0)))
    assert 95.0 < beside.crossover / math.tau < 100.0
    assert math.degrees(beside.margin) == pytest.approx(50.0, abs=0.06)


def test_of_two_parts_the_nearer_one_is_taken(plot):
    plot.show_view(view(area(2.0, 8.0), area(100.0, 400.0)))
    assert plot.nearest(plot.place_of(point(15.0, 45.0))).crossover / math.tau < 8.0
    assert plot.nearest(plot.place_of(point(60.0, 45.0))).crossover / math.tau > 100.0
    plot.show_view(view(area(2000.0, 8000.0)))
    assert plot.nearest(plot.place_of(point(15.0, 45.0))) is None


def test_taking_hold_of_the_point_does_not_move_it(plot, heard, qtbot):
    at = plot.place_of(point(30.0, 45.0)).toPoint()
    qtbot.mousePress(plot, LEFT_BUTTON, pos=at + QPoint(2, 1))
    assert heard == []
    qtbot.mouseMove(plot, at + QPoint(22, 1))
    qtbot.mouseRelease(plot, LEFT_BUTTON, pos=at + QPoint(22, 1))
    asked = plot.panels()[0].x_at(plot.place_of(point(30.0, 45.0)).x() + 20.0)
    assert heard[-1][0] == pytest.approx(asked, rel=0.01)


def test_a_drag_begins_and_ends_once(plot, heard, qtbot):
    told = []
    plot.grabbed.connect(lambda: told.append("grabbed"))
    plot.dropped.connect(lambda: told.append("dropped"))
    qtbot.mousePress(plot, LEFT_BUTTON, pos=plot.place_of(point(60.0, 60.0)).toPoint())
    qtbot.mouseMove(plot, plot.place_of(point(70.0, 50.0)).toPoint())
    qtbot.mouseRelease(plot, LEFT_BUTTON, pos=plot.place_of(point(70.0, 50.0)).toPoint())
    qtbot.mouseMove(plot, plot.place_of(point(20.0, 50.0)).toPoint())
    assert told == ["grabbed", "dropped"]
    assert len(heard) == 2
    assert heard[-1] == pytest.approx((70.0, 50.0), rel=0.02)


@pytest.mark.parametrize(
    ("key", "modifier", "asked"),
    [
        (Qt.Key.Key_Right, Qt.KeyboardModifier.NoModifier, (30.3, 45.0)),
        (Qt.Key.Key_Left, Qt.KeyboardModifier.ShiftModifier, (29.97, 45.0)),
        (Qt.Key.Key_Up, Qt.KeyboardModifier.NoModifier, (30.0, 45.45)),
        (Qt.Key.Key_Down, Qt.KeyboardModifier.ShiftModifier, (30.0, 44.955)),
        (Qt.Key.Key_PageUp, Qt.KeyboardModifier.NoModifier, (33.0, 45.0)),
    ],
)
def test_keys_ask_for_a_percent(plot, heard, qtbot, key, modifier, asked):
    qtbot.keyClick(plot, key, modifier)
    assert heard == [pytest.approx(asked)]


def test_steps_that_come_faster_than_frames_add_up(plot, heard, qtbot):
    plot.moved.connect(plot.show_point)
    for _ in range(3):
        qtbot.keyClick(plot, Qt.Key.Key_Right)
    assert heard[-1][0] == pytest.approx(30.0 * 1.01**3)


def test_the_wheel_acts_only_with_focus(plot, heard, qtbot, qapp):
    def turn():
        event = QWheelEvent(
            QPointF(100.0, 50.0),
            plot.mapToGlobal(QPointF(100.0, 50.0)),
            QPoint(),
            QPoint(0, 120),
            Qt.MouseButton.NoButton,
            Qt.KeyboardModifier.NoModifier,
            Qt.ScrollPhase.NoScrollPhase,
            False,
        )
        qapp.sendEvent(plot, event)
        return event.isAccepted()

    plot.clearFocus()
    assert not turn()
    assert heard == []
    plot.activateWindow()
    plot.setFocus()
    assert turn()
    assert heard == [pytest.approx((30.3, 45.0))]


def test_a_point_that_only_tells_cannot_be_moved(plot, heard, qtbot):
    plot.show_view(view(asked=False))
    qtbot.mousePress(plot, LEFT_BUTTON, pos=plot.place_of(point(60.0, 60.0)).toPoint())
    qtbot.mouseRelease(plot, LEFT_BUTTON, pos=plot.place_of(point(60.0, 60.0)).toPoint())
    qtbot.keyClick(plot, Qt.Key.Key_Right)
    assert heard == []
    assert "reached: 30.0" in plot.accessibleDescription()


def test_a_point_that_cannot_be_met_is_a_cross(plot):
    plot.show_view(view(at=point(500.0, 60.0), met=False))
    at = plot.place_of(point(500.0, 60.0))
    assert colour_at(plot, at) == QColor(LIGHT.breaks)
    assert colour_at(plot, at + QPointF(0.0, 4.0)) != QColor(LIGHT.breaks)
    assert "cannot be met" in plot.accessibleDescription()


def test_kept_tunings_are_rings_with_names(plot, qtbot):
    before = plot.grab().toImage()
    kept = point(15.0, 60.0, "first light")
    plot.show_view(view(kept=(kept,)))
    ringed = plot.grab().toImage()
    assert ringed != before
    assert "kept first light: 15.0" in plot.accessibleDescription()
    qtbot.mouseMove(plot, plot.place_of(kept).toPoint())
    assert plot.grab().toImage() != ringed


def test_the_largest_margin_is_read_out(plot, qtbot):
    assert "largest margin there 70.0°" in plot.accessibleDescription()
    before = plot.grab().toImage()
    qtbot.mouseMove(plot, plot.place_of(point(200.0, 45.0)).toPoint())
    assert plot.grab().toImage() != before


def test_without_a_map_it_says_so(plot):
    plot.show_view(None)
    assert plot.accessibleDescription() == "being prepared"
    assert not plot.grab().isNull()
