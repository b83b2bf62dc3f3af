import numpy as np
from PySide6.QtCore import QPoint, Qt

from gainbench_app.pictures import drawing

LEFT_BUTTON = Qt.MouseButton.LeftButton


def test_points_lie_on_the_loop_and_the_box_hides_them(bench_column, evidence, qtbot):
    column = bench_column(evidence["closed"])
    bode, overlay = column.bode, column.bode.measured
    (points,) = overlay.points["speed"]
    crossover = bode.marks["speed"].crossover_hz
    sure = points.sure
    at = np.interp(crossover, points.frequency_hz[sure], points.magnitude_db[sure])
    assert abs(at) < 0.5
    (entry,) = overlay.legend.entries
    assert (entry.name, entry.more) == ("noise.csv", "as T/(1 − T)")
    assert "with the gains of the bench" in overlay.legend.toolTip()
    shown = bode.grab().toImage()
    qtbot.mouseClick(overlay.legend.box, LEFT_BUTTON)
    assert not overlay.points
    assert bode.grab().toImage() != shown


def test_they_belong_to_their_loop(bench_column, evidence, qtbot):
    column = bench_column(evidence["plant"])
    overlay = column.bode.measured
    qtbot.mouseClick(column.loops.buttons["current"], LEFT_BUTTON)
    assert not overlay.points
    (entry,) = overlay.legend.entries
    assert entry.more == "is of the speed loop"
    qtbot.mouseClick(column.loops.buttons["speed"], LEFT_BUTTON)
    assert set(overlay.points) == {"speed"}
    assert overlay.legend.entries[0].more == "plant times PI"


def test_axes_begin_where_the_sure_points_do(bench_column, evidence):
    column = bench_column(evidence["plant"])
    axes = column.bode.panels()[0]
    lowest = column.bode.measured.lowest_hz
    assert 10.0**axes.x.low <= lowest
    values = column.bode.measured.seen("speed", "magnitude_db", above_hz=0.0)
    assert values[0] >= axes.y.low
    assert values[1] <= axes.y.high


def test_a_closed_loop_is_not_painted_anew_while_gains_move(bench_column, evidence, desk):
    column = bench_column(evidence["closed"])
    column.bode.grab()
    overlay = column.bode.measured
    painted = overlay.layer.painted
    desk.begin_gesture("aims.speed.phase_margin")
    for degrees in (60.1, 60.2):
        desk.move("aims.speed.phase_margin", np.radians(degrees))
        desk.compute_now()
        column.bode.grab()
    desk.cancel_gesture()
    assert overlay.layer.painted == painted


def test_the_cursor_reads_the_point_there(bench_column, evidence, qtbot, appearance):
    column = bench_column(evidence["closed"])
    bode = column.bode
    (points,) = bode.measured.points["speed"]
    hertz = float(points.frequency_hz[10])
    readings = bode.measured.readings("magnitude_db", hertz, ending=" dB", theme=appearance.theme)
    assert readings == [(f"• {points.magnitude_db[10]:.1f} dB", appearance.theme.speed)]
    bare = bode.grab().toImage()
    axes = bode.panels()[0]
    qtbot.mouseMove(bode, QPoint(round(float(axes.across(hertz))), round(axes.box.center().y())))
    assert bode.grab().toImage() != bare


def test_what_is_not_exact_says_so(bench_column, evidence, desk):
    column = bench_column(evidence["closed"])
    desk.set_values({"aims.speed.reference_weight": "0.6"})
    desk.compute_now()
    (entry,) = column.bode.measured.legend.entries
    assert entry.more == "speed reference to speed with a reference weight of 0.6 is not L/(1 + L)"
    assert entry.bead is None
    assert not column.bode.measured.points


def test_pictures_name_the_log(bench_column, evidence):
    column = bench_column(evidence["closed"])
    assert "noise.csv" in drawing([column.bode], title="x").decode()
