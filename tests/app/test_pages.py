"""The evidence page in its window, pressed, dragged and typed into."""

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QMimeData, QPoint, QPointF, Qt, QUrl
from PySide6.QtGui import QDragEnterEvent, QDropEvent, QGuiApplication
from PySide6.QtWidgets import QAbstractButton, QComboBox, QLineEdit, QScrollArea, QWidget

from gainbench.evidence.estimate import Estimate, EstimateName, Identification
from gainbench.model import Experiment, SignalName
from gainbench_app.pages.evidence.fit_task import FitReport, RunResult
from gainbench_app.pages.evidence.page import EvidencePage
from gainbench_app.theme import LIGHT, body_font, style_sheet
from gainbench_app.what_it_does.spans import Span
from identified import some_motion

LEFT_BUTTON = Qt.MouseButton.LeftButton
CONTROL = Qt.KeyboardModifier.ControlModifier
PATIENCE_MS = 60_000


@pytest.fixture(scope="session")
def motion():
    return some_motion(0.5)


@pytest.fixture
def driven_log(tmp_path, motion):
    path = tmp_path / "run-07.csv"
    rows = np.column_stack([motion.time, motion.voltage[0], motion.current[0], motion.speed[0]])
    np.savetxt(path, rows, fmt="%.5f", delimiter=",", header="t [s],u [V],i [A],w", comments="")
    return path


@pytest.fixture
def page(qtbot, qapp, desk, appearance, answers):
    """The page by itself, as wide as it is in the smallest window."""
    qapp.setStyle("Fusion")
    qapp.setFont(body_font())
    qapp.setStyleSheet(style_sheet(LIGHT))
    found = EvidencePage(desk, appearance, dialogs=answers)
    qtbot.addWidget(found, before_close_func=lambda one: one.close_down())
    found.resize(836, 700)
    with qtbot.waitExposed(found):
        found.show()
    found.activateWindow()
    found.enter()
    return found


@pytest.fixture
def filled(page, qtbot, answers, driven_log):
    """The page with a log whose speed has no unit yet, which is then given."""
    answers.log = driven_log
    qtbot.mouseClick(page.list.add, LEFT_BUTTON)
    fill(qtbot, page)
    return page


def fill(qtbot, page):
    settle(qtbot, page)
    choose(row_of(page, "w").signal_box, "speed")
    type_into(qtbot, row_of(page, "w").unit, "rad/s")
    settle(qtbot, page)


def settle(qtbot, page):
    qtbot.waitUntil(lambda: not page.logs.reading, timeout=PATIENCE_MS)


def row_of(page, name):
    return next(one for one in page.mapping.columns if one.column.name == name)


def choose(box, word):
    box.setCurrentIndex(box.findData(word))
    box.activated.emit(box.currentIndex())


def type_into(qtbot, box, text):
    box.setFocus()
    box.selectAll()
    qtbot.keyClicks(box, text)
    qtbot.keyClick(box, Qt.Key.Key_Return)


def mapping(desk):
    return {one.signal: (one.column, one.unit, one.scale) for one in desk.sheet.evidence[0].columns}


def dropped(window, paths):
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(path)) for path in paths])
    action, keys = Qt.DropAction.CopyAction, Qt.KeyboardModifier.NoModifier
    enter = QDragEnterEvent(QPoint(9, 9), action, data, LEFT_BUTTON, keys)
    enter.setAccepted(False)
    window.dragEnterEvent(enter)
    if enter.isAccepted():
        window.dropEvent(QDropEvent(QPointF(9, 9), action, data, LEFT_BUTTON, keys))
    return enter.isAccepted()


# To the page and back


def test_the_page_takes_the_place_of_two_columns_and_gives_it_back(window, qtbot):
    assert window.middle.isVisible()
    qtbot.mouseClick(window.top.evidence, LEFT_BUTTON)
    page = window.pages.evidence
    assert page.isVisible()
    assert not window.middle.isVisible()
    assert not window.right.isVisible()
    assert window.left.isVisible()
    assert window.shelf.isVisible()
    assert window.top.evidence.text() == window.menu_of_more.evidence.text() == "Back to tuning"
    qtbot.keyClick(page.list.add, Qt.Key.Key_Escape)
    assert window.middle.isVisible()
    assert window.top.evidence.text() == window.menu_of_more.evidence.text() == "Evidence"
    qtbot.keyClick(window, Qt.Key.Key_L, CONTROL)
    assert page.isVisible()
    qtbot.keyClick(window, Qt.Key.Key_2, CONTROL)
    assert window.middle.isVisible()
    window.menu_of_more.evidence.trigger()
    assert page.isVisible()
    assert window.figures() == []
    window.pages.show_tuning()
    assert window.what_it_does.plots in window.figures()


def test_escape_in_a_box_takes_the_typing_back_first(filled, qtbot):
    left = []
    filled.left.connect(lambda: left.append(True))
    unit = row_of(filled, "w").unit
    unit.setFocus()
    qtbot.keyClicks(unit, "x")
    qtbot.keyClick(unit, Qt.Key.Key_Escape)
    assert unit.text() == "rad/s"
    assert not left
    qtbot.keyClick(unit, Qt.Key.Key_Escape)
    assert left


# Logs


def test_the_demo_logs_by_their_button(page, qtbot, desk):
    qtbot.mouseClick(page.list.demo, LEFT_BUTTON)
    settle(qtbot, page)
    assert [one.experiment for one in desk.sheet.evidence] == [Experiment.DRIVEN, Experiment.STEP_CHECK]
    assert "5\N{NARROW NO-BREAK SPACE}000 rows" in page.list.rows_shown[0].state.text()
    assert not page.list.demo.isVisible()
    page.logs.choose(0)
    assert [one.name for one in page.signals.plots.shown] == ["angle", "current", "voltage"]
    for _ in range(2):
        qtbot.mouseClick(page.list.rows_shown[0].remove, LEFT_BUTTON)
    assert desk.sheet.evidence == ()
    assert not page.signals.isVisible()
    desk.undo()
    assert len(page.list.rows_shown) == 1


def test_a_file_that_is_missing_is_told_beside_its_name(page, qtbot, desk, driven_log):
    page.add(driven_log)
    settle(qtbot, page)
    driven_log.unlink()
    page.logs.look_again()
    settle(qtbot, page)
    row = page.list.rows_shown[0]
    assert row.problem.isVisible()
    assert "no such file" in row.problem.text()
    assert len(desk.sheet.evidence) == 1


# What columns hold


def test_a_guess_is_shown_with_its_reason_and_a_unit_is_asked_for(page, qtbot, desk, driven_log):
    page.add(driven_log)
    settle(qtbot, page)
    assert "from its name and its unit" in row_of(page, "u [V]").why.text()
    row = row_of(page, "w")
    assert "the file gives no unit" in row.why.text()
    assert SignalName.SPEED not in mapping(desk)
    choose(row.signal_box, "speed")
    assert "type its unit" in row.problem.text()
    assert SignalName.SPEED not in mapping(desk)
    type_into(qtbot, row.unit, "kg")
    assert "mass" in row.problem.text()
    assert row.unit.accessibleDescription()
    type_into(qtbot, row.unit, "rpm")
    assert mapping(desk)[SignalName.SPEED] == ("w", "rpm", 1.0)
    assert not row.problem.isVisible()


def test_a_mapping_is_corrected_and_each_correction_is_undone(filled, qtbot, desk):
    row = row_of(filled, "i [A]")
    type_into(qtbot, row.scale, "-2,5")
    assert mapping(desk)[SignalName.CURRENT] == ("i [A]", "A", -2.5)
    type_into(qtbot, row.scale, "none")
    assert "scale" in row.problem.text()
    assert mapping(desk)[SignalName.CURRENT] == ("i [A]", "A", -2.5)
    desk.undo()
    assert mapping(desk)[SignalName.CURRENT] == ("i [A]", "A", 1.0)
    choose(row.signal_box, "")
    assert SignalName.CURRENT not in mapping(desk)
    assert not row.unit.isEnabled()
    desk.undo()
    choose(row.signal_box, "torque")
    type_into(qtbot, row.unit, "N*m")
    assert mapping(desk)[SignalName.TORQUE] == ("i [A]", "N*m", 1.0)
    assert SignalName.CURRENT not in mapping(desk)


def test_the_experiment_is_chosen_with_its_recipe_in_sight(filled, desk):
    recipe = filled.recipe
    assert recipe.experiment.currentData() == "driven"
    assert "emergency stop" in recipe.text.text()
    choose(recipe.experiment, "no-load")
    assert desk.sheet.evidence[0].experiment is Experiment.NO_LOAD
    assert "Uncouple the load" in recipe.text.text()
    assert "would suggest: driven run" in recipe.guessed.text()


def test_recipes_can_be_read_before_there_is_a_log(page, desk):
    choose(page.recipe.experiment, "coast-down")
    assert "open the terminals" in page.recipe.text.text()
    assert desk.sheet.evidence == ()


# The span


def at(plots, share, *, panel=0):
    box = plots.panels()[panel].box
    return QPointF(box.left() + share * box.width(), box.center().y()).toPoint()


def drag(qtbot, plots, start, stop):
    qtbot.mousePress(plots, LEFT_BUTTON, pos=start)
    for share in (0.3, 0.7, 1.0):
        qtbot.mouseMove(plots, start + (stop - start) * share)
    qtbot.mouseRelease(plots, LEFT_BUTTON, pos=stop)


def test_a_span_is_dragged_and_its_ends_are_moved(filled, qtbot):
    plots, logs = filled.signals.plots, filled.logs
    length = logs.overview(logs.chosen).length
    drag(qtbot, plots, at(plots, 0.2), at(plots, 0.6, panel=1))
    span = logs.span(logs.chosen)
    assert span.start == pytest.approx(0.2 * length, abs=0.01 * length)
    assert span.stop == pytest.approx(0.6 * length, abs=0.01 * length)
    drag(qtbot, plots, at(plots, 0.6), at(plots, 0.8))
    moved = logs.span(logs.chosen)
    assert moved.start == span.start
    assert moved.stop == pytest.approx(0.8 * length, abs=0.01 * length)
    assert filled.signals.stop.text() == f"{moved.stop:.6g} s"
    assert "of it count" in filled.list.rows_shown[0].state.text()
    qtbot.mouseDClick(plots, LEFT_BUTTON, pos=at(plots, 0.5))
    assert logs.span(logs.chosen) is None


def test_the_keys_move_an_end_and_take_it_back(filled, qtbot):
    plots, logs = filled.signals.plots, filled.logs
    plots.setFocus()
    for _ in range(10):
        qtbot.keyClick(plots, Qt.Key.Key_Right)
    qtbot.keyClick(plots, Qt.Key.Key_Down)
    assert logs.span(logs.chosen).start == pytest.approx(0.1 * logs.overview(logs.chosen).length)
    qtbot.keyClick(plots, Qt.Key.Key_Left)
    assert "last end is chosen" in plots.accessibleDescription()
    assert plots.span.stop < logs.overview(logs.chosen).length
    qtbot.keyClick(plots, Qt.Key.Key_Escape)
    assert plots.span.stop == logs.overview(logs.chosen).length


def test_a_span_is_typed(filled, qtbot):
    signals, logs = filled.signals, filled.logs
    type_into(qtbot, signals.start, "0.1")
    type_into(qtbot, signals.stop, "300 ms")
    assert logs.span(logs.chosen) == Span(start=0.1, stop=0.3)
    type_into(qtbot, signals.stop, "3 kg")
    assert signals.problem.isVisible()
    assert signals.stop.accessibleDescription()
    type_into(qtbot, signals.stop, "0.05 s")
    assert "begins before it ends" in signals.problem.text()
    assert logs.span(logs.chosen) == Span(start=0.1, stop=0.3)
    qtbot.mouseClick(signals.whole, LEFT_BUTTON)
    assert logs.span(logs.chosen) is None
    assert not signals.problem.isVisible()


# Fitting


def report_of(desk, *, remarks=("dead time: none",)):
    values = {EstimateName.RESISTANCE: 0.66, EstimateName.INDUCTANCE: 0.5e-3, EstimateName.TORQUE_CONSTANT: 0.05}
    found = {
        name: Estimate(value=one, low=0.99 * one, high=1.01 * one, run_low=0.95 * one, run_high=1.05 * one)
        for name, one in values.items()
    }
    runs = tuple(RunResult(fit_percent=98.0, remarks=remarks) for _ in desk.sheet.evidence)
    return FitReport(found=Identification(estimates=found, regression={}, runs=()), runs=runs)


@pytest.fixture
def fitted(filled, desk):
    """The page after a fit whose outcome is known."""
    filled.fitting._asked = filled.fitting._now()
    filled.fitting._finish(report_of(desk))
    return filled


def line_of(page, name):
    return next(one for one in page.estimates.lines if one.name.value == name)


def test_a_fit_from_a_drop_to_a_value_in_the_left_column(qtbot, window, desk, driven_log, tmp_path):
    notes = tmp_path / "notes.txt"
    notes.write_text("nothing\n", encoding="utf-8")
    assert not dropped(window, [notes])
    assert not dropped(window, [driven_log, notes])
    assert dropped(window, [driven_log])
    filled = window.pages.evidence
    fill(qtbot, filled)
    assert desk.sheet.evidence[0].log == driven_log.as_posix()
    assert "since the sheet has no file yet" in filled.list.rows_shown[0].state.text()
    assert dropped(window, [notes, tmp_path / "gone.csv"])
    settle(qtbot, filled)
    said = filled.list.trouble.text().splitlines()
    assert [one.partition(".")[0] for one in said] == ["nothing was added: notes", "nothing was added: gone"]
    assert len(filled.list.rows_shown) == 1
    assert window.figures() == [filled.signals.plots]
    with qtbot.waitSignal(filled.fitting.job.finished, timeout=PATIENCE_MS):
        qtbot.mouseClick(filled.fit, LEFT_BUTTON)
        assert filled.cancel.isVisible()
        assert filled.progress.isVisible()
        assert not filled.fit.isVisible()
    assert filled.fit.isVisible()
    line = line_of(filled, "resistance")
    assert float(line.row.sheet) == 0.6
    assert float(line.row.value) == pytest.approx(0.6, rel=0.02)
    (run,) = filled.runs
    assert [[one.name for one in plots.shown] for plots in run.plots] == [
        ["speed", "residual"],
        ["current", "residual"],
    ]
    qtbot.mouseClick(line.accept, LEFT_BUTTON)
    assert float(window.on_bench.row("machine.resistance").box.text().split()[0]) == pytest.approx(0.6, rel=0.02)
    filled.grab()


def test_one_is_accepted_and_taken_back(fitted, qtbot, desk):
    line = line_of(fitted, "resistance")
    assert (line.row.value, line.row.difference) == ("0.660", "+10.0 %")
    qtbot.mouseClick(line.accept, LEFT_BUTTON)
    assert desk.text("machine.resistance") == "0.66 ohm"
    assert desk.text('tolerance."machine.resistance"') == "5 %"
    assert desk.sheet.evidence[0].note == "accepted: resistance"
    assert line_of(fitted, "resistance").row.difference == "0 %"
    assert not fitted.estimates.stale.isVisible()
    desk.undo()
    assert desk.text("machine.resistance") == "0.60 ohm"
    assert desk.sheet.evidence[0].note == ""
    assert line_of(fitted, "resistance").row.difference == "+10.0 %"


def test_all_that_is_ticked_is_accepted_in_one_step(fitted, qtbot, desk):
    assert fitted.estimates.all.text() == "Accept all"
    line_of(fitted, "inductance").tick.click()
    assert fitted.estimates.all.text() == "Accept 1 of 2"
    qtbot.mouseClick(fitted.estimates.all, LEFT_BUTTON)
    assert (desk.text("machine.resistance"), desk.text("machine.inductance")) == ("0.66 ohm", "0.45 mH")
    line_of(fitted, "inductance").tick.click()
    qtbot.mouseClick(fitted.estimates.all, LEFT_BUTTON)
    assert desk.text("machine.inductance") == "0.5 mH"
    desk.undo()
    desk.undo()
    assert desk.text("machine.resistance") == "0.60 ohm"
    qtbot.mouseClick(fitted.estimates.copy, LEFT_BUTTON)
    lines = [one.split("\t") for one in QGuiApplication.clipboard().text().splitlines()]
    assert [one[0] for one in lines] == ["estimate", "resistance", "inductance", "torque constant"]
    assert lines[1][1:3] == ["0.660", "Ω"]
    torque = line_of(fitted, "torque_constant")
    assert not torque.accept.isVisible()
    assert torque.words.toolTip() == "follows from the back-EMF constant"


def test_a_poor_fit_is_doubted(filled, desk):
    filled.fitting._asked = filled.fitting._now()
    report = report_of(desk)
    filled.fitting._finish(replace(report, runs=(replace(report.runs[0], fit_percent=40.0),)))
    assert "before anything of it is accepted" in filled.runs[0].problem.text()


def test_what_changes_after_a_fit_is_said(fitted, qtbot):
    assert fitted.runs[0].remarks.text() == "\N{EN DASH} dead time: none"
    choose(row_of(fitted, "i [A]").signal_box, "")
    assert fitted.estimates.stale.isVisible()
    fitted.logs._desk.undo()
    assert not fitted.estimates.stale.isVisible()
    fitted.logs.choose_span(fitted.logs.chosen, Span(start=0.1, stop=0.2))
    assert fitted.estimates.stale.isVisible()


def test_a_fit_is_cancelled_and_the_last_one_stays(fitted, qtbot):
    report = fitted.fitting.report
    qtbot.mouseClick(fitted.fit, LEFT_BUTTON)
    assert fitted.fitting.running
    qtbot.mouseClick(fitted.cancel, LEFT_BUTTON)
    assert not fitted.fitting.running
    assert fitted.fit.isVisible()
    assert not fitted.progress.isVisible()
    assert fitted.fitting.report is report
    assert fitted.estimates.isVisible()


def test_another_sheet_has_other_logs_and_no_estimates(fitted, desk, demo_texts):
    desk.open_text(demo_texts["sieve-drum"], "drum.bench.toml")
    assert fitted.list.rows_shown == []
    assert fitted.runs == []
    assert not fitted.estimates.isVisible()
    assert not fitted.fit.isEnabled()


def test_every_control_has_a_name(fitted):
    kinds = (QAbstractButton, QLineEdit, QComboBox)
    controls = [one for kind in kinds for one in fitted.findChildren(kind) if one.isVisible()]
    assert len(controls) > 20
    assert not [one for one in controls if not (one.accessibleName() or getattr(one, "text", lambda: "")())]
    reached = [one for one in fitted.findChildren(QWidget) if one.focusPolicy() & Qt.FocusPolicy.TabFocus]
    assert not [one for one in reached if isinstance(one, QScrollArea) and not one.accessibleName()]
    assert fitted.signals.plots.accessibleName()


def test_it_fits_into_the_smallest_window(fitted):
    inner = fitted.area.widget()
    assert inner.minimumSizeHint().width() <= fitted.area.viewport().width()
    fitted.grab()
