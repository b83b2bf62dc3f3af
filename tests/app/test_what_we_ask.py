import math

import pytest
from PySide6.QtCore import QPoint, Qt

from gainbench.model import CURRENT_METHODS, SPEED_METHODS, DesignMethod, IntegratorRule
from gainbench.plant import refer
from gainbench.results import Level
from gainbench.sheetfile import parse_sheet
from gainbench_app.desk import Desk
from gainbench_app.live import Readiness
from gainbench_app.what_we_ask.column import WhatWeAsk
from gainbench_app.what_we_ask.targets import METHOD_NAMES, targets
from gainbench_app.widgets.map_view import MapPoint

RETURN = Qt.Key.Key_Return
LEFT_BUTTON = Qt.MouseButton.LeftButton


@pytest.fixture
def column(qtbot, desk, appearance):
    found = WhatWeAsk(desk, appearance)
    qtbot.addWidget(found)
    found.resize(280, 900)
    found.grab()
    return found


def plain(text):
    return text.replace("\N{NO-BREAK SPACE}", " ")


def choose(card, method):
    card.method.setCurrentIndex(card.method.findData(method.value))
    card.method.activated.emit(card.method.currentIndex())


def test_the_figures_are_those_of_the_assessment(column):
    assert plain(column.speed.figures.text) == "60.0 Hz 60.0°"
    assert plain(column.current.figures.text) == "1.00 kHz 60.0°"
    assert plain(column.speed.others.text) == "gain 17.2 dB\nsensitivity 1.24"
    assert plain(column.speed.gains.text) == "Kp 0.4814 A·s/rad Ki 57.63 A/rad"


def test_gains_are_in_the_firmwares_form(column, desk):
    desk.set_values({"aims.firmware.gain_form": "kp-ti", "aims.firmware.speed_unit": "rpm"})
    desk.compute_now()
    gains = desk.assessment.speed.gains
    kp = gains.kp * math.tau / 60.0
    assert plain(column.speed.gains.text) == f"Kp {kp:.4g} A/rpm Ti {1e3 * gains.kp / gains.ki:.4g} ms"


@pytest.mark.parametrize("method", CURRENT_METHODS)
def test_every_method_of_the_current_loop_can_be_chosen(column, desk, method):
    choose(column.current, method)
    desk.compute_now()
    assert desk.valid
    assert desk.sheet.aims.current.method is method
    assert column.current.method.currentText() == METHOD_NAMES[method]
    assert all(column.current.row(key).box.text() for key in column.current.target_keys)


@pytest.mark.parametrize("method", SPEED_METHODS)
def test_every_method_of_the_speed_loop_can_be_chosen(column, desk, method):
    choose(column.speed, method)
    desk.compute_now()
    assert desk.valid
    assert desk.sheet.aims.speed.method is method
    assert column.speed.target_keys[-1] == "reference_weight"
    for key in column.speed.target_keys:
        assert column.speed.row(key).slider.isEnabled()


def test_a_slider_drag_is_live_and_one_step_of_undo(column, desk, qtbot):
    row = column.speed.row("crossover")
    at = QPoint(row.slider.width() // 2, row.slider.height() // 2)
    qtbot.mousePress(row.slider, LEFT_BUTTON, pos=at)
    seen = set()
    for step in range(5):
        qtbot.mouseMove(row.slider, at - QPoint(6 * step, 0))
        desk.compute_now()
        seen.add(desk.assessment.speed.figures.crossover_hz)
    qtbot.mouseRelease(row.slider, LEFT_BUTTON, pos=at - QPoint(24, 0))
    assert len(seen) == 5
    assert row.box.text().endswith(" Hz")
    assert row.box.text() != "60 Hz"
    desk.undo()
    assert row.box.text() == "60 Hz"
    assert not desk.can_undo


def test_the_users_unit_stays(column, desk, qtbot):
    row = column.current.row("crossover")
    row.box.setFocus()
    row.box.selectAll()
    qtbot.keyClicks(row.box, "6000 rad/s")
    qtbot.keyClick(row.box, RETURN)
    assert desk.sheet.aims.current.crossover == pytest.approx(6000.0)
    row.slider.setFocus()
    qtbot.keyClick(row.slider, Qt.Key.Key_Right)
    assert row.box.text() == "6060 rad/s"
    qtbot.keyClick(row.slider, Qt.Key.Key_Left, Qt.KeyboardModifier.ShiftModifier)
    assert row.box.text() == "6054 rad/s"
    qtbot.waitUntil(lambda: desk.can_undo and desk._gesture is None)
    desk.undo()
    assert row.box.text() == "6000 rad/s"


def test_escape_takes_a_drag_back(column, desk, qtbot):
    slider = column.speed.row("phase_margin").slider
    slider.setFocus()
    qtbot.mousePress(slider, LEFT_BUTTON, pos=QPoint(60, 9))
    assert column.speed.row("phase_margin").box.text() != "60 deg"
    qtbot.keyClick(slider, Qt.Key.Key_Escape)
    assert column.speed.row("phase_margin").box.text() == "60 deg"


def test_a_slider_stops_where_no_gains_meet_the_target(column, desk, qtbot):
    slider = column.speed.row("crossover").slider
    qtbot.mousePress(slider, LEFT_BUTTON, pos=QPoint(slider.width() - 1, 9))
    desk.compute_now()
    qtbot.mouseRelease(slider, LEFT_BUTTON, pos=QPoint(slider.width() - 1, 9))
    assert desk.assessment.speed.refusal is None
    assert slider.number == desk.sheet.aims.speed.crossover
    assert slider.value() < slider.maximum()


def test_a_refused_target_is_told(column, desk):
    desk.set_values({"aims.speed.crossover": "900 Hz"})
    desk.compute_now()
    assert column.speed.mark.level is Level.BREAKS
    assert column.speed.figures.text == "cannot be met"
    assert column.findings.shown[0].level is Level.BREAKS


def test_a_wrong_target_is_marked(column, desk, qtbot):
    row = column.speed.row("phase_margin")
    row.box.setFocus()
    row.box.selectAll()
    qtbot.keyClicks(row.box, "120 deg")
    qtbot.keyClick(row.box, RETURN)
    assert row.box.property("wrong") is True
    assert not row.reason.isHidden()
    assert "90 deg" in row.reason.text()


def test_the_findings_are_those_of_the_assessment(column, desk):
    assert column.findings.shown == desk.assessment.findings
    desk.set_values({"duty.reference_ramp": "20000 rpm/s"})
    desk.compute_now()
    assert column.findings.shown == desk.assessment.findings


def test_the_firmware_can_be_changed(column, desk):
    box = column.firmware.row("integrator").box
    box.setCurrentIndex(box.findData("trapezoid"))
    box.activated.emit(box.currentIndex())
    assert desk.sheet.aims.firmware.integrator is IntegratorRule.TRAPEZOID
    assert "trapezoid" in column.firmware.follows.text()
    feedforward = column.firmware.row("back_emf_feedforward").box
    feedforward.setCurrentIndex(feedforward.findData("true"))
    feedforward.activated.emit(feedforward.currentIndex())
    assert desk.sheet.aims.firmware.back_emf_feedforward is True


def test_a_unit_is_no_mark_up(column, desk):
    desk.set_values({"aims.firmware.speed_unit": "<b>"})
    assert not desk.valid
    assert not column.firmware.body.isHidden()


@pytest.mark.parametrize(
    ("loop", "kp", "ki", "factors"),
    [
        ("current", "2.66 V/A", "0.234 V/A", (1.0, 5e-5)),
        ("current", "2.66", "0.234", (1.0, 5e-5)),
        ("speed", "25 mN*m*s/rad", "57.6 A/rad", (0.052, 1.0)),
        ("speed", "0.48 A*s/rad", "1.5 mN*m*s/rad", (1.0, 0.052 * 5e-4)),
    ],
)
def test_the_ends_of_a_slider_are_in_what_was_typed(demo_texts, loop, kp, ki, factors):
    def ends(kp, ki):
        values = {"aims.firmware.ki_includes_period": True, f"aims.{loop}.method": "by-hand"}
        text = demo_texts["label-unwinder"]
        sheet = (
            parse_sheet(text, "x.bench.toml")
            .with_values({**values, f"aims.{loop}.kp": kp, f"aims.{loop}.ki": ki})
            .sheet
        )
        return {one.path.rpartition(".")[2]: one for one in targets(loop, sheet, plant=refer(sheet.rig))}

    plain = ends("2 V/A", "4000 V/(A*s)") if loop == "current" else ends("0.4 A*s/rad", "50 A/rad")
    typed = ends(kp, ki)
    for key, factor in zip(("kp", "ki"), factors, strict=True):
        assert typed[key].low == pytest.approx(plain[key].low * factor)
        assert typed[key].high == pytest.approx(plain[key].high * factor)
        assert typed[key].low < typed[key].high


def test_a_method_without_targets_has_none(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"], "x.bench.toml").with_value(
        "aims.current.method", DesignMethod.MAGNITUDE_OPTIMUM.value
    )
    assert targets("current", document.sheet, plant=refer(document.sheet.rig)) == ()


# The reach map of a card


def value_of(text):
    """The number of a quantity."""
    return float(text.partition(" ")[0])


def place(card, *, hertz, degrees):
    """Where a target is on the map."""
    at = card.map.place_of(MapPoint(crossover=math.tau * hertz, margin=math.radians(degrees)))
    return at.toPoint()


def test_the_point_is_what_is_asked_for(column, desk):
    view = column.speed.map.view
    assert view.point.crossover == desk.sheet.aims.speed.crossover
    assert view.point.margin == desk.sheet.aims.speed.phase_margin
    assert view.asked
    assert view.met
    assert "asked for: 60.0" in column.speed.map.accessibleDescription()


def test_dragging_the_point_is_live_and_one_step_of_undo(column, desk, qtbot):
    card = column.speed
    qtbot.mousePress(card.map, LEFT_BUTTON, pos=place(card, hertz=60.0, degrees=60.0))
    for hertz in (50.0, 40.0, 30.0):
        qtbot.mouseMove(card.map, place(card, hertz=hertz, degrees=70.0))
        desk.compute_now()
        figures = desk.assessment.speed.figures
        assert figures.crossover_hz == pytest.approx(hertz, rel=0.02)
        assert figures.phase_margin_deg == pytest.approx(70.0, abs=1.0)
    qtbot.mouseRelease(card.map, LEFT_BUTTON, pos=place(card, hertz=30.0, degrees=70.0))
    assert value_of(card.row("crossover").box.text()) == pytest.approx(30.0, rel=0.02)
    desk.undo()
    assert card.row("crossover").box.text() == "60 Hz"
    assert card.row("phase_margin").box.text() == "60 deg"
    assert not desk.can_undo


def test_the_point_stays_in_what_can_be_met(column, desk, qtbot):
    card = column.current
    qtbot.mousePress(card.map, LEFT_BUTTON, pos=place(card, hertz=1000.0, degrees=60.0))
    for hertz, degrees in ((2000.0, 85.0), (2200.0, 60.0), (150.0, 40.0)):
        qtbot.mouseMove(card.map, place(card, hertz=hertz, degrees=degrees))
        desk.compute_now()
        assert desk.assessment.current.refusal is None
        assert desk.assessment.current.figures.stable
        assert desk.sheet.aims.current.crossover != pytest.approx(math.tau * hertz, rel=1e-3)
    qtbot.mouseRelease(card.map, LEFT_BUTTON, pos=place(card, hertz=150.0, degrees=40.0))


def test_keys_move_the_point_and_escape_takes_it_back(column, desk, qtbot):
    card = column.speed
    qtbot.keyClick(card.map, Qt.Key.Key_Right)
    assert card.row("crossover").box.text() == "60.6 Hz"
    qtbot.keyClick(card.map, Qt.Key.Key_Up, Qt.KeyboardModifier.ShiftModifier)
    assert card.row("phase_margin").box.text() == "60.06 deg"
    assert card.row("crossover").box.text() == "60.6 Hz"
    qtbot.keyClick(card.map, Qt.Key.Key_Escape)
    assert card.row("crossover").box.text() == "60 Hz"
    assert card.row("phase_margin").box.text() == "60 deg"


def test_the_map_of_another_method_tells_where_its_gains_lead(column, desk, qtbot):
    choose(column.current, DesignMethod.MAGNITUDE_OPTIMUM)
    desk.compute_now()
    view = column.current.map.view
    assert not view.asked
    assert view.point.crossover == pytest.approx(math.tau * desk.assessment.current.figures.crossover_hz)
    before = desk.sheet
    qtbot.mousePress(column.current.map, LEFT_BUTTON, pos=place(column.current, hertz=500.0, degrees=60.0))
    qtbot.mouseRelease(column.current.map, LEFT_BUTTON, pos=place(column.current, hertz=500.0, degrees=60.0))
    qtbot.keyClick(column.current.map, Qt.Key.Key_Right)
    assert desk.sheet == before


@pytest.mark.parametrize(("loop", "hertz"), [("speed", 40.0), ("current", 700.0)])
def test_dragging_the_point_sets_a_bandwidth_where_one_is_asked_for(column, desk, qtbot, loop, hertz):
    card = getattr(column, loop)
    choose(card, DesignMethod.BANDWIDTH_MARGIN)
    desk.compute_now()
    before = getattr(desk.assessment, loop).figures
    typed = card.row("bandwidth").box.text()
    assert card.map.view.asked
    qtbot.mousePress(card.map, LEFT_BUTTON, pos=place(card, hertz=before.crossover_hz, degrees=60.0))
    for degrees in (55.0, 66.0):
        qtbot.mouseMove(card.map, place(card, hertz=hertz, degrees=degrees))
        desk.compute_now()
        figures = getattr(desk.assessment, loop).figures
        assert figures.crossover_hz == pytest.approx(hertz, rel=0.02)
        assert figures.phase_margin_deg == pytest.approx(degrees, abs=1.0)
    qtbot.mouseRelease(card.map, LEFT_BUTTON, pos=place(card, hertz=hertz, degrees=66.0))
    aims = getattr(desk.sheet.aims, loop)
    assert aims.method is DesignMethod.BANDWIDTH_MARGIN
    assert aims.bandwidth == pytest.approx(math.tau * figures.bandwidth_hz, rel=1e-6)
    assert card.map.view.point.crossover == pytest.approx(math.tau * figures.crossover_hz)
    assert "asked for: bandwidth" in card.map.accessibleDescription()
    desk.undo()
    assert card.row("bandwidth").box.text() == typed


def test_keys_on_the_map_move_the_bandwidth_by_a_percent(column, desk, qtbot):
    card = column.speed
    choose(card, DesignMethod.BANDWIDTH_MARGIN)
    desk.set_values({"aims.speed.bandwidth": "90 Hz"})
    desk.compute_now()
    # Two steps within one frame.
    qtbot.keyClick(card.map, Qt.Key.Key_Right)
    qtbot.keyClick(card.map, Qt.Key.Key_Right)
    assert card.row("bandwidth").box.text() == "91.81 Hz"
    qtbot.keyClick(card.map, Qt.Key.Key_Down, Qt.KeyboardModifier.ShiftModifier)
    assert card.row("phase_margin").box.text() == "59.94 deg"
    desk.compute_now()
    assert desk.assessment.speed.figures.bandwidth_hz == pytest.approx(91.81)
    qtbot.keyClick(card.map, Qt.Key.Key_Escape)
    assert card.row("bandwidth").box.text() == "90 Hz"


def test_keys_stop_at_the_edge_of_a_bandwidth(column, desk, qtbot):
    card = column.speed
    choose(card, DesignMethod.BANDWIDTH_MARGIN)
    desk.compute_now()
    for _ in range(20):
        qtbot.keyClick(card.map, Qt.Key.Key_PageUp)
        desk.compute_now()
        assert desk.assessment.speed.refusal is None
    card.map.movement.finish()


def test_a_bandwidth_that_cannot_be_met_can_be_dragged_back(column, desk, qtbot):
    card = column.speed
    choose(card, DesignMethod.BANDWIDTH_MARGIN)
    desk.set_values({"aims.speed.bandwidth": "900 Hz"})
    desk.compute_now()
    assert not card.map.view.met
    assert "bandwidth 900 Hz and 60.0°, which cannot be met" in plain(card.map.accessibleDescription())
    at = place(card, hertz=50.0, degrees=60.0)
    qtbot.mousePress(card.map, LEFT_BUTTON, pos=at)
    qtbot.mouseRelease(card.map, LEFT_BUTTON, pos=at)
    desk.compute_now()
    assert card.map.view.met
    assert desk.assessment.speed.figures.crossover_hz == pytest.approx(50.0, rel=0.02)


def test_a_refused_point_is_shown_as_refused(column, desk):
    desk.set_values({"aims.speed.crossover": "900 Hz"})
    desk.compute_now()
    assert not column.speed.map.view.met
    assert "cannot be met" in column.speed.map.accessibleDescription()


def test_until_all_is_compiled_there_is_no_map(qtbot, appearance, demo_texts):
    desk = Desk(parse_sheet(demo_texts["label-unwinder"], "x.bench.toml"), readiness=Readiness.LOOPS)
    column = WhatWeAsk(desk, appearance)
    qtbot.addWidget(column)
    desk.compute_now()
    assert column.speed.map.view is None
    desk.reach(Readiness.ALL)
    desk.compute_now()
    assert column.speed.map.view.areas


# Gains that stay


def test_gains_that_are_held_stay_while_the_plant_is_edited(column, desk, qtbot):
    gains, other = desk.assessment.speed.gains, desk.assessment.current.gains
    qtbot.mouseClick(column.speed.hold, LEFT_BUTTON)
    desk.set_values({"train.load_inertia": "7.2 kg*cm^2", "machine.inductance": "0.9 mH"})
    desk.compute_now()
    assert desk.assessment.speed.gains == gains
    assert desk.assessment.current.gains != other
    assert desk.sheet.aims.speed.method is DesignMethod.CROSSOVER_MARGIN
    assert desk.assessment.speed.figures.crossover_hz < 50.0
    assert not column.speed.map.view.asked
    assert not column.speed.row("crossover").slider.isEnabled()
    assert column.speed.row("reference_weight").slider.isEnabled()
    qtbot.mouseClick(column.speed.hold, LEFT_BUTTON)
    desk.compute_now()
    assert desk.assessment.speed.figures.crossover_hz == pytest.approx(60.0)
    assert column.speed.row("crossover").slider.isEnabled()


def test_one_press_makes_any_method_gains_by_hand(column, desk, qtbot):
    gains = desk.assessment.speed.gains
    qtbot.mouseClick(column.speed.by_hand, LEFT_BUTTON)
    desk.compute_now()
    assert desk.sheet.aims.speed.method is DesignMethod.BY_HAND
    assert desk.text("aims.speed.kp") == f"{gains.kp:.5g} A*s/rad"
    assert desk.assessment.speed.gains.kp == pytest.approx(gains.kp, rel=1e-4)
    assert desk.assessment.speed.gains.ki == pytest.approx(gains.ki, rel=1e-4)
    assert column.speed.target_keys == ("kp", "ki", "reference_weight")
    desk.undo()
    assert desk.sheet.aims.speed.method is DesignMethod.CROSSOVER_MARGIN


def test_what_moved_is_told_for_a_moment(column, desk, qtbot):
    assert not column.speed.gains.moved
    desk.move("aims.current.crossover", math.tau * 700.0)
    desk.compute_now()
    gains = desk.assessment.speed.gains
    assert column.speed.gains.moved == {f"{gains.kp:.4g}", f"{gains.ki:.4g}"}
    assert not column.speed.figures.moved
    qtbot.waitUntil(lambda: not column.speed.gains.moved)


# Findings lead there


def test_a_finding_leads_to_what_it_asks_to_move(column, desk, qtbot):
    with qtbot.waitExposed(column):
        column.show()
    column.activateWindow()
    desk.set_values({"aims.speed.phase_margin": "25 deg"})
    desk.compute_now()
    index = next(k for k, one in enumerate(column.findings.shown) if one.code == "speed-phase-margin-thin")
    row = column.findings.row(index)
    qtbot.mouseClick(row, LEFT_BUTTON)
    qtbot.mouseClick(row.way, LEFT_BUTTON)
    assert column.speed.map.hasFocus()
    row.setFocus()
    qtbot.keyClick(row, RETURN)
    assert column.speed.map.hasFocus()
    column.hide()


def test_a_finding_of_another_column_is_told(column, desk, qtbot):
    heard = []
    column.pointed_at.connect(heard.append)
    index = next(k for k, one in enumerate(column.findings.shown) if "speed_window" in one.advice)
    qtbot.keyClick(column.findings.row(index), RETURN)
    assert heard == ["stage.speed_window"]


def test_entries_of_the_firmware_can_be_pointed_at(column):
    assert column.firmware.body.isHidden()
    column.point_at("aims.firmware.windup")
    assert not column.firmware.body.isHidden()
