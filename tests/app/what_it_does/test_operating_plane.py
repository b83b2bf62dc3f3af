import math
from dataclasses import replace

import pytest
from PySide6.QtCore import QPoint
from PySide6.QtGui import QColor
from PySide6.QtWidgets import QWidget

from gainbench.assess import assess
from gainbench.sheetfile import parse_sheet
from gainbench_app.theme import LIGHT
from gainbench_app.what_it_does.operating_plane import OperatingPlane

RPM = math.tau / 60.0


@pytest.fixture
def plane(qtbot, appearance):
    holder = QWidget()
    holder.resize(380, 300)
    qtbot.addWidget(holder)
    found = OperatingPlane(appearance, holder)
    found.resize(360, 280)
    with qtbot.waitExposed(holder):
        holder.show()
    yield found
    holder.hide()


def assessed(demo_texts, name="label-unwinder", values=None):
    document = parse_sheet(demo_texts[name], f"{name}.bench.toml")
    return assess((document.with_values(values) if values else document).sheet)


def show(plane, assessment, unit="rpm", size=RPM):
    plane.show_assessment(assessment, speed_unit=unit, speed_size=size)
    return plane.panels()[0]


def near(image, box, colour):
    """How many pixels of a panel are of a colour, give or take smooth edges."""
    wanted = QColor(colour).getRgb()[:3]
    return sum(
        max(abs(one - other) for one, other in zip(image.pixelColor(x, y).getRgb()[:3], wanted, strict=True)) < 40
        for y in range(round(box.top()), round(box.bottom()))
        for x in range(round(box.left()), round(box.right()))
    )


@pytest.mark.parametrize("name", ["label-unwinder", "sieve-drum", "bottle-indexer"])
def test_the_path_is_in_sight(plane, demo_texts, name):
    found = assessed(demo_texts, name)
    axes = show(plane, found)
    trace, torque = found.response.trace, found.plant.torque
    assert axes.x.low <= float(trace.speed.min()) / RPM
    assert axes.x.high >= float(trace.speed.max()) / RPM
    size = 1e-3 if torque * found.plant.current_limit < 2.0 else 1.0
    assert axes.y.high >= torque * float(trace.current.max()) / size
    assert axes.y.low <= torque * float(trace.current.min()) / size
    assert near(plane.grab().toImage(), axes.box, LIGHT.speed) > 30


def test_beyond_limits_it_is_hatched_and_within_it_is_not(plane, demo_texts):
    found = assessed(demo_texts)
    axes = show(plane, found)
    image = plane.grab().toImage()
    ground = QColor(LIGHT.mixed(LIGHT.breaks, 0.10)).name().upper()
    most = found.plant.torque * found.plant.current_limit / 1e-3

    def at(rpm, torque):
        """Colours of a few pixels about a place, so that no line of the hatching stands for all of it."""
        middle = axes.point(rpm, torque)
        return {
            QColor(image.pixel(round(middle.x()) + dx, round(middle.y()) + dy)).name().upper()
            for dx in range(-2, 3)
            for dy in range(-2, 3)
        }

    assert ground in at(3000.0, 1.08 * most)
    assert ground not in at(3000.0, 0.8 * most)
    assert ground in at(6400.0, 0.2 * most)
    assert ground not in at(5600.0, 0.2 * most)


def test_the_voltage_line_is_there(plane, demo_texts):
    show(plane, assessed(demo_texts))
    image = plane.grab().toImage()
    box = plane.panels()[0].box
    assert near(image, box, LIGHT.voltage) > 30


def test_another_unit_scales_the_axis(plane, demo_texts):
    found = assessed(demo_texts)
    rpm = show(plane, found).x
    radians = show(plane, found, "rad/s", 1.0).x
    assert radians.high == pytest.approx(rpm.high * RPM, rel=0.3)
    assert radians.high < 0.2 * rpm.high


def test_a_negative_reference_is_shown_to_the_left(plane, demo_texts):
    axes = show(plane, assessed(demo_texts, values={"duty.reference_speed": "-1500 rpm"}))
    assert axes.x.low < -1500.0
    assert axes.x.high < 1500.0
    assert axes.y.low < -1000.0


def test_a_sine_machine_tells_the_share_of_its_circle(plane, demo_texts):
    show(plane, assessed(demo_texts))
    assert plane.circle_share is None
    show(plane, assessed(demo_texts, "bottle-indexer"))
    assert 0.9 < plane.circle_share < 1.0


def test_without_a_response_there_are_the_limits_alone(plane, demo_texts):
    found = assessed(demo_texts)
    axes = show(plane, replace(found, response=None))
    assert axes.x.high > 5000.0
    assert "path" not in plane.accessibleDescription()
    assert not plane.grab().isNull()


def test_the_cursor_reads_out(plane, demo_texts, qtbot):
    axes = show(plane, assessed(demo_texts))
    # A pointer that is there already does not move.
    qtbot.mouseMove(plane, QPoint(1, 1))
    before = plane.grab().toImage()
    qtbot.mouseMove(plane, QPoint(round(axes.box.center().x()), round(axes.box.center().y())))
    assert plane.grab().toImage() != before
    assert "path up to" in plane.accessibleDescription()
