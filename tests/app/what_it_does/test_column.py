import pytest
from PySide6.QtCore import QPoint, Qt

from gainbench_app.what_it_does.column import WhatItDoes
from gainbench_app.what_it_does.spans import load_span, step_span, whole_span

LEFT_BUTTON = Qt.MouseButton.LeftButton


@pytest.fixture
def column(qtbot, desk, appearance):
    found = WhatItDoes(desk, appearance)
    qtbot.addWidget(found)
    found.resize(760, 800)
    with qtbot.waitExposed(found):
        found.show()
    found.activateWindow()
    yield found
    found.hide()


def test_keys_choose_the_span(column, desk, qtbot):
    duty, figures = desk.sheet.duty, desk.assessment.response.figures
    spans = {"3": load_span(duty, figures), "2": step_span(duty, figures), "1": whole_span(duty)}
    for key, span in spans.items():
        qtbot.keyClicks(column.plots, key)
        assert column.plots.view.span == span


def test_a_dragged_span_survives_a_live_update(column, desk, qtbot):
    box = column.plots.panels()[0].box
    start, stop = (QPoint(round(box.left() + share * box.width()), 90) for share in (0.25, 0.5))
    qtbot.mousePress(column.plots, LEFT_BUTTON, pos=start)
    qtbot.mouseMove(column.plots, stop)
    qtbot.mouseRelease(column.plots, LEFT_BUTTON, pos=stop)
    dragged = column.plots.view.span
    trace = column.plots.view.trace
    desk.move("aims.speed.crossover", 250.0)
    desk.compute_now()
    assert column.plots.view.trace is not trace
    assert column.plots.view.span == dragged


def test_speed_is_shown_in_either_unit(column, desk, qtbot):
    assert column.plots.view.speed_unit == column.plots.speed_unit.text() == "rpm"
    qtbot.mouseClick(column.plots.speed_unit, LEFT_BUTTON)
    assert column.plots.view.speed_unit == "rad/s"
    assert column.plots.view.speed_size == 1.0
    qtbot.keyClick(column.plots.speed_unit, Qt.Key.Key_Space)
    assert column.plots.view.speed_unit == "rpm"
    desk.set_values({"duty.reference_speed": "9000 deg/s"})
    desk.compute_now()
    seen = []
    for _ in range(3):
        qtbot.mouseClick(column.plots.speed_unit, LEFT_BUTTON)
        seen.append(column.plots.view.speed_unit)
    assert set(seen) == {"rpm", "rad/s", "deg/s"}


def drag(column, qtbot, path, share):
    """Drag a handle to a share of what is shown."""
    handles = column.plots.handles
    time = next(one for one in handles.times if one.path == path)
    start = QPoint(round(handles.place_of(time)), 10)
    stop = QPoint(round(column.plots.panels()[0].box.width() * share) + 8, 10)
    qtbot.mousePress(handles, LEFT_BUTTON, pos=start)
    qtbot.mouseMove(handles, stop)
    return stop


def test_a_time_of_the_duty_is_dragged_live_as_one_step_of_undo(column, desk, qtbot):
    stop = drag(column, qtbot, "duty.load_at", 0.8)
    desk.compute_now()
    assert desk.sheet.duty.load_time == pytest.approx(0.36, rel=0.02)
    assert column.plots.handles.times[1].at == desk.sheet.duty.load_time
    qtbot.mouseRelease(column.plots.handles, LEFT_BUTTON, pos=stop)
    assert desk.text("duty.load_at").endswith(" ms")
    assert desk.settled_document().sheet == desk.sheet
    desk.undo()
    assert desk.text("duty.load_at") == "250 ms"
    assert not desk.can_undo


def test_the_span_stays_while_a_handle_is_held(column, desk, qtbot):
    qtbot.keyClicks(column.plots, "3")
    before = column.plots.view.span
    stop = drag(column, qtbot, "duty.load_at", 0.4)
    desk.compute_now()
    assert column.plots.view.span == before
    qtbot.mouseRelease(column.plots.handles, LEFT_BUTTON, pos=stop)
    assert column.plots.view.span != before
    assert column.plots.view.span == load_span(desk.sheet.duty, desk.assessment.response.figures)


def test_no_handle_leaves_what_the_sheet_allows(column, desk, qtbot):
    desk.set_values({"duty.stop_at": "350 ms"})
    desk.compute_now()
    for path, share in (("duty.reference_at", 0.99), ("duty.load_at", 1.0), ("duty.stop_at", 0.0)):
        stop = drag(column, qtbot, path, share)
        qtbot.mouseRelease(column.plots.handles, LEFT_BUTTON, pos=stop)
        assert desk.settled_document().sheet == desk.sheet
        assert desk.valid


def test_where_it_is_narrow_the_third_view_leaves_first(column, qtbot):
    assert column.third.isVisible()
    assert not column.more_views.isVisible()
    column.resize(640, 600)
    assert not column.third.isVisible()
    assert column.bode.isVisible()
    qtbot.mouseClick(column.more_views, LEFT_BUTTON)
    assert column.third.isVisible()
    assert not column.bode.isVisible()
    qtbot.mouseClick(column.third.back, LEFT_BUTTON)
    assert column.bode.isVisible()
    column.resize(760, 800)
    assert column.third.isVisible()
    assert column.bode.isVisible()


def test_the_ledger_is_of_the_loop_that_is_looked_at(column, qtbot):
    assert column.third.ledger.shown.loop == "speed"
    qtbot.mouseClick(column.loops.buttons["current"], LEFT_BUTTON)
    assert column.third.ledger.shown.loop == "current"
    qtbot.mouseClick(column.loops.buttons["both loops"], LEFT_BUTTON)
    assert column.third.ledger.shown.loop == "speed"


def test_a_sheet_that_is_not_valid_hatches_the_third_view_too(column, desk):
    desk.set_values({"machine.resistance": "0.6 kg"})
    desk.compute_now()
    assert column.third.view.stale == "last valid sheet"
