import pytest
from PySide6.QtCore import QRectF
from PySide6.QtWidgets import QWidget

from gainbench.model import Experiment
from gainbench_app.what_it_does.measured_legend import ROW_PX, LegendEntry, MeasuredLegend, readings_room, unread_entry
from gainbench_app.what_it_does.measured_logs import Unread
from gainbench_app.what_it_does.measured_marks import Bead
from gainbench_app.widgets.figure import Axes
from gainbench_app.widgets.scales import Range


@pytest.fixture
def legend(qtbot, appearance):
    parent = QWidget()
    qtbot.addWidget(parent)
    parent.resize(500, 100)
    found = MeasuredLegend("measured steps", appearance, parent, left=98.0, threaded=True)
    with qtbot.waitExposed(parent):
        parent.show()
    found.place(500, 100)
    yield found
    parent.hide()


def unread(reason):
    return unread_entry(Unread(name="a.csv", experiment=Experiment.STEP_CHECK, reason=reason))


def test_a_log_that_gives_no_curve_says_in_short_why(legend):
    reason = "a.csv: there is no such file; it was looked for at x/a.csv"
    assert unread("") == LegendEntry(name="a.csv", more="is being read", tip="a.csv is being read")
    assert unread(reason).more == "there is no such file"
    legend.show_entries([unread(reason)])
    assert legend.toolTip() == reason
    assert legend.accessibleDescription() == "a.csv: there is no such file"
    assert not legend.box.isVisible()
    assert not legend.shows
    assert legend.height_px == ROW_PX


def test_it_is_there_only_for_logs(legend):
    assert not legend.isVisible()
    legend.show_entries([LegendEntry(name="a.csv", bead=Bead.ROUND)])
    assert legend.isVisible()
    assert legend.box.isVisible()
    assert legend.shows
    legend.show_entries([])
    assert not legend.isVisible()
    assert legend.height_px == 0


def test_long_names_leave_room_for_what_is_said(legend):
    legend.show_entries([LegendEntry(name="a" * 200 + ".csv", more="overshoot 4 %", bead=Bead.ROUND)])
    long = legend.grab().toImage()
    legend.show_entries([LegendEntry(name="a" * 200 + ".csv", more="overshoot 5 %", bead=Bead.ROUND)])
    assert legend.grab().toImage() != long


def test_readings_end_before_the_next_panel():
    unit = Range(low=0.0, high=1.0, step=0.5)
    axes = Axes(box=QRectF(100.0, 20.0, 300.0, 60.0), x=unit, y=unit)
    assert readings_room(axes, 50.0 + 14.0 + 3 * 15.0) == 3
    assert readings_room(axes, 60.0) == 1
