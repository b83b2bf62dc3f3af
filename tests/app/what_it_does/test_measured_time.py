import numpy as np
import pytest
from PySide6.QtCore import QPoint, Qt

from gainbench_app.pictures import drawing
from gainbench_app.theme import DARK

LEFT_BUTTON = Qt.MouseButton.LeftButton


def differs(one, other):
    return one.grab().toImage() != other


def test_a_step_check_lies_over_the_prediction_and_the_box_hides_it(bench_column, evidence, qtbot):
    column = bench_column(evidence["step"])
    plots, overlay = column.plots, column.plots.measured
    assert [len(one) for one in overlay.lines] == [1, 1, 1]
    assert overlay.legend.isVisible()
    assert overlay.legend.box.accessibleName() == "measured steps"
    (entry,) = overlay.legend.entries
    assert entry.name == "label-unwinder-step.csv"
    assert entry.more.startswith("overshoot\N{NO-BREAK SPACE}4.4\N{NO-BREAK SPACE}% (predicted 3.4), rise")
    assert "settling time: 27.35 ms measured" in overlay.legend.toolTip()
    shown = plots.grab().toImage()
    qtbot.mouseClick(overlay.legend.box, LEFT_BUTTON)
    assert overlay.lines == ((), (), ())
    assert differs(plots, shown)
    qtbot.keyClick(overlay.legend.box, Qt.Key.Key_Space)
    assert len(overlay.lines[0]) == 1
    overlay.legend.box.clearFocus()


def test_the_box_is_remembered_from_sheet_to_sheet_and_not_there_without_a_log(bench_column, evidence, desk, qtbot):
    column = bench_column()
    legend = column.plots.measured.legend
    assert not legend.isVisible()
    assert legend.height_px == 0
    bench_column(evidence["step"])
    qtbot.mouseClick(legend.box, LEFT_BUTTON)
    bench_column()
    assert not legend.isVisible()
    bench_column(evidence["step"])
    assert legend.isVisible()
    assert not legend.box.isChecked()


def test_axes_hold_what_was_measured(bench_column, evidence, desk):
    column = bench_column(evidence["step"])
    desk.set_values({"duty.reference_speed": "300 rpm"})
    desk.compute_now()
    speed = column.plots.panels()[0].y
    assert speed.high * column.plots.view.speed_size > 1500.0 * np.pi / 30.0
    (entry,) = column.plots.measured.legend.entries
    assert "steps to 1\N{NARROW NO-BREAK SPACE}500\N{NO-BREAK SPACE}rpm, not as the duty" in entry.more


def test_a_drag_of_gains_paints_no_measured_line_anew(bench_column, evidence, desk):
    column = bench_column(evidence["step"])
    column.plots.grab()
    overlay = column.plots.measured
    lines, painted = overlay.lines, overlay.layer.painted
    desk.begin_gesture("aims.speed.phase_margin")
    for degrees in (60.1, 60.2, 60.3):
        desk.move("aims.speed.phase_margin", np.radians(degrees))
        desk.compute_now()
        column.plots.grab()
    desk.cancel_gesture()
    assert overlay.lines is lines
    assert overlay.layer.painted == painted


def test_lines_follow_unit_span_and_reference(bench_column, evidence, desk, qtbot):
    column = bench_column(evidence["step"])
    overlay = column.plots.measured
    rpm = overlay.lines[0][0]
    qtbot.mouseClick(column.plots.speed_unit, LEFT_BUTTON)
    assert overlay.lines[0][0].highest == pytest.approx(rpm.highest * np.pi / 30.0)
    qtbot.mouseClick(column.spans.buttons["step"], LEFT_BUTTON)
    assert overlay.lines[0][0].x[-1] <= column.plots.view.span.stop + 1e-3
    desk.set_values({"duty.reference_at": "50 ms"})
    desk.compute_now()
    speed = overlay.lines[0][0]
    half = speed.x[np.flatnonzero(speed.y > 0.5 * speed.highest)[0]]
    assert half == pytest.approx(0.055, abs=3e-3)


def test_the_cursor_reads_what_was_measured_there(bench_column, evidence, qtbot):
    column = bench_column(evidence["step"])
    plots = column.plots
    box = plots.panels()[0].box
    bare = plots.grab().toImage()
    qtbot.mouseMove(plots, QPoint(round(box.left() + 0.2 * box.width()), round(box.center().y())))
    assert differs(plots, bare)
    ((words, _),) = plots.measured.readings(0, 0.15, size=np.pi / 30.0, step=1.0, colour="")
    assert words.startswith("• 1\N{NARROW NO-BREAK SPACE}")
    assert plots.measured.readings(0, 0.4, size=1.0, step=1.0, colour="") == []


def test_pictures_name_the_log(bench_column, evidence, qtbot):
    column = bench_column(evidence["step"])
    content = drawing([column.plots], title="x").decode()
    assert "step.csv" in content
    assert ">measured<" in content
    qtbot.mouseClick(column.plots.measured.legend.box, LEFT_BUTTON)
    assert "step.csv" not in drawing([column.plots], title="x").decode()


def test_a_missing_log_says_so_and_the_plots_go_on(bench_column, evidence, desk):
    column = bench_column(evidence["step"].replace("label-unwinder-step", "lost"))
    legend = column.plots.measured.legend
    (entry,) = legend.entries
    assert (entry.name, entry.more) == ("lost.csv", "there is no such file")
    assert legend.isVisible()
    assert not legend.box.isVisible()
    assert column.plots.measured.lines == ((), (), ())
    desk.set_values({"aims.speed.crossover": "50 Hz"})
    desk.compute_now()
    assert column.plots.view.trace is desk.assessment.response.trace


def test_another_theme_paints_them_in_its_colours(bench_column, evidence, appearance):
    column = bench_column(evidence["step"])
    light = column.plots.grab().toImage()
    painted = column.plots.measured.layer.painted
    appearance.show(DARK)
    assert differs(column.plots, light)
    assert column.plots.measured.layer.painted == painted + 1
