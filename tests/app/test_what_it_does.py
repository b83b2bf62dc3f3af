import math
from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QColor

from gainbench.assess import assess
from gainbench.model import DesignMethod, Duty
from gainbench.results import Level, LoopCurve, LoopFigures
from gainbench.sheetfile import parse_sheet
from gainbench_app.live import Readiness
from gainbench_app.theme import LIGHT
from gainbench_app.what_it_does.bode import BodePlot
from gainbench_app.what_it_does.column import WhatItDoes
from gainbench_app.what_it_does.headroom import headroom_line
from gainbench_app.what_it_does.loop_marks import bode_curve, loop_marks
from gainbench_app.what_it_does.spans import load_span, step_span, whole_span
from gainbench_app.what_it_does.time_plots import TimePlots
from gainbench_app.what_it_does.traces import decimated, merged, stretches
from gainbench_app.what_it_does.verdict import verdict

LEFT_BUTTON = Qt.MouseButton.LeftButton


@pytest.fixture
def column(qtbot, desk, appearance):
    found = WhatItDoes(desk, appearance)
    qtbot.addWidget(found)
    found.resize(760, 800)
    found.grab()
    return found


def sheet_of(demo_texts, name="label-unwinder"):
    return parse_sheet(demo_texts[name], f"{name}.bench.toml").sheet


# Traces


def ripple(count=9000):
    """A slow movement, a saw of a few ticks on it, and one sharp spike before the saw begins."""
    time = np.arange(count) / 20_000.0
    saw = np.where(np.arange(count) > 2000, (np.arange(count) % 10) / 10.0, 0.0)
    values = 2.0 * time / time[-1] + saw
    values[1000] = 30.0
    return time, values


def test_no_peak_is_lost():
    time, values = ripple()
    drawn = decimated(time, values, columns=600, least_ripple=0.1)
    assert drawn.highest == values.max()
    assert drawn.lowest == values.min()
    assert drawn.y.max() == 30.0
    assert len(drawn.x) <= 1200
    assert (np.diff(drawn.x) >= 0.0).all()


def test_ripple_is_a_band_about_its_mean():
    time, values = ripple()
    drawn = decimated(time, values, columns=600, least_ripple=0.1)
    assert len(drawn.bands) == 1
    band = drawn.bands[0]
    assert band.x[0] == pytest.approx(0.1, abs=0.02)
    assert band.x[-1] == pytest.approx(time[-1], abs=0.005)
    inside = (time > 0.15) & (time < 0.4)
    low, high = np.interp(time[inside], band.x, band.low), np.interp(time[inside], band.x, band.high)
    assert (values[inside] >= low - 0.02).all()
    assert (values[inside] <= high + 0.02).all()
    mean = np.interp(time[inside], drawn.x, drawn.y)
    np.testing.assert_allclose(mean, 2.0 * time[inside] / time[-1] + 0.45, atol=0.06)


def test_a_smooth_curve_has_no_band():
    time = np.linspace(0.0, 1.0, 9000)
    drawn = decimated(time, np.sin(3.0 * time), columns=600, least_ripple=1e-3)
    assert drawn.bands == ()
    np.testing.assert_allclose(np.interp(time, drawn.x, drawn.y), np.sin(3.0 * time), atol=1e-3)


def test_few_ticks_are_drawn_as_they_are():
    time, values = ripple()
    drawn = decimated(time[:2000], values[:2000], columns=600, least_ripple=0.1)
    assert drawn.x is not time
    np.testing.assert_array_equal(drawn.y, values[:2000])


def test_stretches_are_found_and_near_ones_joined():
    time = np.arange(10.0)
    flags = np.array([0, 1, 1, 0, 1, 0, 0, 0, 0, 1], dtype=bool)
    found = stretches(time, flags)
    assert found == [(1.0, 3.0), (4.0, 5.0), (9.0, 9.0)]
    assert merged(found, 1.0) == [(1.0, 5.0), (9.0, 9.0)]


# Spans


def test_spans_are_within_the_duty(demo_texts):
    for name in demo_texts:
        found = assess(sheet_of(demo_texts, name))
        duty, figures = found.sheet.duty, found.response.figures
        for span in (whole_span(duty), step_span(duty, figures), load_span(duty, figures), step_span(duty, None)):
            assert 0.0 <= span.start < span.stop <= duty.length
        assert step_span(duty, figures).start <= duty.reference_at < step_span(duty, figures).stop
        assert load_span(duty, figures).start <= duty.load_time < load_span(duty, figures).stop


def test_a_duty_without_a_load_has_a_load_span_all_the_same():
    duty = Duty(reference_speed=0.0, length=1.0, load_at=1.0)
    span = load_span(duty, None)
    assert 0.0 <= span.start < span.stop <= 1.0


# Marks of the loops


@pytest.fixture
def loops(demo_texts):
    found = assess(sheet_of(demo_texts))
    return {"speed": found.speed, "current": found.current}


@pytest.mark.parametrize("name", ["speed", "current"])
def test_marks_stand_where_the_margins_are(loops, name):
    loop = loops[name]
    curve = bode_curve(loop.curve, loop.figures)
    marks = loop_marks(curve, loop.figures)
    assert marks.crossover_hz == loop.figures.crossover_hz
    phase, gain = marks.phase_margin, marks.gain_margin
    assert phase.value == loop.figures.phase_margin_deg
    assert phase.frequency_hz == pytest.approx(loop.figures.crossover_hz, rel=0.01)
    assert phase.start == -180.0
    assert phase.stop - phase.start == pytest.approx(loop.figures.phase_margin_deg, abs=0.5)
    assert gain.start == 0.0
    assert -gain.stop == pytest.approx(loop.figures.gain_margin_db, abs=0.2)
    assert np.interp(gain.frequency_hz, curve.frequency_hz, curve.phase_deg) == pytest.approx(-180.0, abs=1.0)


def test_an_integrator_is_drawn_as_it_is_known():
    frequency = np.geomspace(0.1, 100.0, 200)
    curve = bode_curve(LoopCurve(frequency_hz=frequency, open_loop=10.0 / (1j * frequency)), None)
    np.testing.assert_allclose(curve.phase_deg, -90.0)
    assert np.interp(10.0, curve.frequency_hz, curve.magnitude_db) == pytest.approx(0.0, abs=1e-2)
    marks = loop_marks(curve, LoopFigures(stable=True, crossover_hz=10.0, phase_margin_deg=90.0))
    assert marks.gain_margin is None
    assert marks.phase_margin.stop == pytest.approx(-90.0)


def test_an_unstable_loop_has_no_marks(loops):
    curve = bode_curve(loops["speed"].curve, loops["speed"].figures)
    marks = loop_marks(curve, LoopFigures(stable=False))
    assert marks.crossover_hz is marks.phase_margin is marks.gain_margin is None


def test_the_bode_plot_paints_each_loop_in_its_colour(qtbot, appearance, loops):
    plot = BodePlot(appearance)
    qtbot.addWidget(plot)
    plot.resize(700, 300)
    plot.show_loops(loops)
    both = painted(plot)
    plot.show_loops({"current": loops["current"]})
    one = painted(plot)
    assert near(both, LIGHT.speed) > 50
    assert near(both, LIGHT.current) > 50
    assert near(one, LIGHT.speed) < 5
    assert set(plot.marks) == {"current"}
    plot.show_loops({})
    assert near(painted(plot), LIGHT.current) < 5


def painted(widget):
    image = widget.grab().toImage()
    return np.array(
        [[image.pixelColor(x, y).getRgb()[:3] for x in range(0, image.width(), 2)] for y in range(image.height())]
    )


def near(pixels, colour):
    wanted = np.array(QColor(colour).getRgb()[:3])
    return int((np.abs(pixels - wanted).max(axis=2) < 30).sum())


# Verdict and headroom


def test_the_verdict_is_that_of_the_findings(demo_texts):
    sheet = sheet_of(demo_texts)
    found = verdict(assess(sheet), problems={}, preparing=False)
    assert (found.level, found.words, found.more) == (Level.THIN, "Both loops hold", "2 findings are thin")


@pytest.mark.parametrize(
    ("values", "words"),
    [
        ({"aims.speed.crossover": "900 Hz"}, "Speed loop cannot meet its targets"),
        ({"aims.current.crossover": "9 kHz"}, "Current loop cannot meet its targets"),
        (
            {"aims.speed.method": "by-hand", "aims.speed.kp": "9 A*s/rad", "aims.speed.ki": "50 A/rad"},
            "Speed loop unstable",
        ),
        ({"duty.reference_speed": "9000 rpm"}, "Both loops hold, the duty does not"),
    ],
)
def test_trouble_is_named(demo_texts, values, words):
    document = parse_sheet(demo_texts["label-unwinder"], "x.bench.toml").with_values(values)
    found = verdict(assess(document.sheet), problems={}, preparing=False)
    assert found.level is Level.BREAKS
    assert found.words == words


def test_a_sheet_that_is_not_valid_comes_first(demo_texts):
    found = verdict(assess(sheet_of(demo_texts)), problems={"machine.resistance": "why"}, preparing=False)
    assert found.words == "Sheet not valid"
    assert "machine.resistance" in found.more


def test_what_is_being_prepared_is_not_judged(demo_texts):
    assert verdict(None, problems={}, preparing=True).level is None
    found = verdict(assess(sheet_of(demo_texts), simulated=False), problems={}, preparing=True)
    assert found.level is None
    assert "response" in found.more


def test_headroom_counts_from_the_limits(demo_texts):
    found = assess(sheet_of(demo_texts))
    figures = replace(found.response.figures, peak_voltage_v=-0.75 * found.plant.voltage_limit, voltage_limited_s=0.0)
    line = headroom_line(figures, found.plant, speed_unit="rpm", speed_size=math.tau / 60.0)
    words = " ".join(piece.text.replace("\N{NO-BREAK SPACE}", " ") for piece in line)
    assert "voltage 25 % current 1 % limited 9.00 ms" in words
    assert "overshoot 3.4 % settled in 23.2 ms" in words
    assert f"load dip {figures.load_dip_rad_s * 60.0 / math.tau:.2f} rpm" in words
    assert headroom_line(None, found.plant, speed_unit="rpm", speed_size=1.0) == ()
    unsettled = headroom_line(replace(figures, settling_time_s=None), found.plant, speed_unit="rpm", speed_size=1.0)
    assert any(piece.text == "not settled" for piece in unsettled)


# The column


def test_a_new_assessment_is_drawn(column, desk):
    before = column.plots.view.trace
    desk.set_values({"aims.speed.crossover": "30 Hz"})
    desk.compute_now()
    assert column.plots.view.trace is not before
    assert column.plots.view.trace is desk.assessment.response.trace
    assert column.bode.marks["speed"].crossover_hz == pytest.approx(30.0)
    assert near(painted(column.plots), LIGHT.speed) > 50


def test_speed_is_in_the_unit_that_was_typed(column, desk):
    assert column.plots.view.speed_unit == "rpm"
    desk.set_values({"duty.reference_speed": "100 rad/s"})
    desk.compute_now()
    assert column.plots.view.speed_unit == "rad/s"
    assert column.plots.view.speed_size == 1.0


def test_spans_can_be_chosen_and_dragged(column, qtbot, desk):
    duty = desk.sheet.duty
    assert column.plots.view.span == whole_span(duty)
    qtbot.mouseClick(column.spans.buttons["load"], LEFT_BUTTON)
    assert column.plots.view.span == load_span(duty, desk.assessment.response.figures)
    assert column.plots.view.deviation
    box = column.plots.panels()[0].box
    start, stop = (QPoint(round(box.left() + share * box.width()), 60) for share in (0.25, 0.5))
    whole = column.plots.view.span
    qtbot.mousePress(column.plots, LEFT_BUTTON, pos=start)
    qtbot.mouseMove(column.plots, stop)
    qtbot.mouseRelease(column.plots, LEFT_BUTTON, pos=stop)
    dragged = column.plots.view.span
    assert dragged.length == pytest.approx(0.25 * whole.length, rel=0.02)
    assert not any(button.isChecked() for button in column.spans.buttons.values())
    qtbot.mouseDClick(column.plots, LEFT_BUTTON, pos=stop)
    assert column.plots.view.span == whole_span(duty)


def test_limits_are_bands_and_time_on_them_is_marked(column):
    pixels = painted(column.plots)
    assert near(pixels, LIGHT.mixed(LIGHT.breaks, 0.10)) > 200
    assert near(pixels, LIGHT.breaks) >= 10


def test_the_cursor_reads_out(column, qtbot):
    # A pointer that is there already does not move.
    qtbot.mouseMove(column.plots, QPoint(1, 1))
    before = painted(column.plots)
    box = column.plots.panels()[0].box
    qtbot.mouseMove(column.plots, QPoint(round(box.center().x()), round(box.center().y())))
    assert column.plots.cursor_at == QPointF(round(box.center().x()), round(box.center().y()))
    assert (painted(column.plots) != before).any()
    qtbot.mouseMove(column.bode, QPoint(300, 60))
    assert near(painted(column.bode), LIGHT.outline) > 20


@pytest.mark.parametrize(
    ("values", "says"),
    [
        ({"aims.speed.crossover": "900 Hz"}, "targets of the speed loop cannot be met"),
        ({"aims.speed.method": "by-hand", "aims.speed.kp": "9 A*s/rad", "aims.speed.ki": "50 A/rad"}, "unstable"),
        ({"train.load_torque": "90 N*m"}, "see the findings"),
    ],
)
def test_where_there_is_no_response_it_says_why(column, desk, values, says):
    desk.set_values(values)
    desk.compute_now()
    assert column.plots.view.trace is None
    assert says in column.plots.view.message
    assert column.headroom.text == ""


def test_until_the_kernels_are_ready_the_margins_are_there(qtbot, appearance, demo_texts):
    from gainbench_app.desk import Desk

    desk = Desk(parse_sheet(demo_texts["label-unwinder"], "x.bench.toml"), readiness=Readiness.NOTHING)
    column = WhatItDoes(desk, appearance)
    qtbot.addWidget(column)
    assert column.words.text() == "Being prepared"
    desk.reach(Readiness.LOOPS)
    desk.compute_now()
    assert "being prepared" in column.plots.view.message
    assert column.bode.marks["speed"].phase_margin.value == pytest.approx(60.0)


def test_a_sheet_that_is_not_valid_leaves_hatched_plots(column, desk):
    trace = column.plots.view.trace
    desk.set_values({"machine.resistance": "0.6 kg"})
    desk.compute_now()
    assert column.plots.stale == column.bode.stale == "last valid sheet"
    assert column.plots.view.trace is trace
    assert column.words.text() == "Sheet not valid"
    desk.undo()
    desk.compute_now()
    assert column.plots.stale == ""


def test_one_loop_can_be_looked_at_alone(column, qtbot):
    qtbot.mouseClick(column.loops.buttons["current"], LEFT_BUTTON)
    assert set(column.bode.marks) == {"current"}
    qtbot.mouseClick(column.loops.buttons["both loops"], LEFT_BUTTON)
    assert set(column.bode.marks) == {"speed", "current"}


def test_both_bodies_of_an_elastic_train_are_drawn(qtbot, appearance, demo_texts):
    from gainbench_app.desk import Desk

    desk = Desk(parse_sheet(demo_texts["sieve-drum"], "x.bench.toml"))
    desk.set_values({"aims.speed.method": "by-hand", "aims.speed.kp": "0.4 A*s/rad", "aims.speed.ki": "2 A/rad"})
    column = WhatItDoes(desk, appearance)
    qtbot.addWidget(column)
    desk.compute_now()
    column.resize(700, 700)
    assert desk.assessment.response is not None
    assert not np.array_equal(column.plots.view.trace.load_speed, column.plots.view.trace.speed)
    assert near(painted(column.plots), LIGHT.speed) > 50


def test_plots_without_anything_to_show_are_empty(qtbot, appearance):
    plots = TimePlots(appearance)
    qtbot.addWidget(plots)
    plots.resize(600, 300)
    assert near(painted(plots), LIGHT.speed) == 0


def test_a_loop_by_hand_is_followed(column, desk):
    desk.choose_method("speed", DesignMethod.BY_HAND)
    desk.move("aims.speed.kp", 0.2)
    desk.compute_now()
    assert column.bode.marks["speed"].crossover_hz == pytest.approx(desk.assessment.speed.figures.crossover_hz)
