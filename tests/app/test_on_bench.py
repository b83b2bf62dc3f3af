import math
from dataclasses import fields

import pytest
from PySide6.QtCore import Qt

from gainbench.derived import derived_constants
from gainbench.model import Duty, Machine, MachineKind, Stage, Train
from gainbench.plant import refer
from gainbench.sheetfile import parse_sheet, quantity_paths
from gainbench_app.desk import Desk
from gainbench_app.on_bench import entries, follows
from gainbench_app.on_bench.column import OnBench
from gainbench_app.on_bench.meanings import MEANINGS
from gainbench_app.theme import strong

RETURN = Qt.Key.Key_Return
LEFT_BUTTON = Qt.MouseButton.LeftButton


@pytest.fixture
def column(qtbot, desk, appearance):
    found = OnBench(desk, appearance)
    qtbot.addWidget(found)
    return found


def type_into(qtbot, row, text):
    row.box.setFocus()
    row.box.selectAll()
    qtbot.keyClicks(row.box, text)
    qtbot.keyClick(row.box, RETURN)


def all_entries():
    found = [*entries.duty_entries()]
    for kind, _ in entries.MACHINE_KINDS:
        found += entries.machine_entries(kind)
    for kind, _ in entries.TRAIN_KINDS:
        found += entries.train_entries(kind)
    for sensor in ("encoder", "ideal"):
        found += entries.stage_entries(sensor)
    return found


def test_every_quantity_of_the_bench_has_a_box():
    shown = {entry.path for entry in all_entries()}
    tables = ("machine.", "train.", "stage.", "duty.")
    assert {path for path in quantity_paths() if path.startswith(tables)} <= shown


def test_every_key_of_the_bench_has_a_box_and_a_meaning():
    shown = {entry.path for entry in all_entries()}
    kinds = {"machine.kind", "train.kind"}
    for table, model in (("machine", Machine), ("train", Train), ("stage", Stage), ("duty", Duty)):
        keys = {f"{table}.{one.name}" for one in fields(model)}
        assert keys <= shown | kinds
        assert keys <= MEANINGS.keys()
    assert shown | kinds == MEANINGS.keys()


def test_each_kind_shows_the_keys_it_uses():
    brushed, sine, block = ({one.path for one in entries.machine_entries(kind)} for kind, _ in entries.MACHINE_KINDS)
    assert "machine.speed_constant" in brushed
    assert not {"machine.pole_pairs", "machine.current_values"} & brushed
    assert {"machine.pole_pairs", "machine.winding_values", "machine.current_values", "machine.back_emf_values"} <= sine
    assert "machine.speed_constant" not in sine
    assert {"machine.pole_pairs", "machine.winding_values", "machine.speed_constant"} <= block
    assert "machine.current_values" not in block
    rigid, elastic = ({one.path for one in entries.train_entries(kind)} for kind, _ in entries.TRAIN_KINDS)
    assert elastic - rigid == {"train.shaft_stiffness", "train.shaft_damping"}


def test_what_it_means_is_told_when_it_is_pointed_at(column):
    row = column.row("stage.update_delay")
    assert "in current periods" in row.box.toolTip()
    assert "stage.update_delay" in row.box.toolTip()
    assert "machine.kind" in column.machine.kind.toolTip()


def test_a_tolerance_is_typed_and_taken_out(column, desk, qtbot):
    box = column.row("machine.inductance").tolerance
    box.setFocus()
    qtbot.keyClicks(box, "15 %")
    qtbot.keyClick(box, RETURN)
    assert desk.text('tolerance."machine.inductance"') == "15 %"
    assert box.text() == "±15 %"
    assert desk.sheet.tolerances[-1].relative == pytest.approx(0.15)
    box.selectAll()
    qtbot.keyClicks(box, "± 0.01 mH")
    qtbot.keyClick(box, RETURN)
    assert desk.sheet.tolerances[-1].absolute == pytest.approx(1e-5)
    box.selectAll()
    qtbot.keyClick(box, Qt.Key.Key_Delete)
    qtbot.keyClick(box, RETURN)
    assert desk.text('tolerance."machine.inductance"') is None


def test_a_tolerance_that_is_refused_is_marked_and_says_why(column, desk, qtbot):
    row = column.row("machine.inductance")
    row.tolerance.setFocus()
    qtbot.keyClicks(row.tolerance, "200 %")
    qtbot.keyClick(row.tolerance, RETURN)
    assert row.tolerance.property("wrong") is True
    assert row.tolerance.text() == "±200 %"
    assert "tolerance: " in row.reason.text()
    assert not row.reason.isHidden()
    assert row.box.property("wrong") is not True
    assert not desk.valid


def test_only_quantities_have_a_tolerance():
    without = {one.path for one in all_entries() if not one.spread}
    assert {"stage.encoder_counts", "machine.pole_pairs", "stage.speed_sensor", "duty.length"} <= without
    assert "machine.resistance" not in without


def test_the_delays_of_both_loops_are_told(demo_texts):
    sheet = parse_sheet(demo_texts["label-unwinder"], "x.bench.toml").sheet
    # One period of 20 kHz and half a hold; half a period of 2 kHz for the hold and half for the window: by hand.
    budget = follows.delay_budget(sheet.rig.stage)
    current, speed = budget.splitlines()
    assert current == "current loop: update delay 50 µs, half a hold 25 µs"
    assert speed == "speed loop: half a hold 250 µs, speed window 250 µs"
    line = follows.stage_line(derived_constants(sheet.rig), refer(sheet.rig), sheet).replace("\N{NO-BREAK SPACE}", " ")
    assert "current loop delay " + strong("75 µs") in line
    assert "speed loop delay " + strong("500 µs") in line


def test_typing_a_value_is_taken_as_typed(column, desk, qtbot):
    type_into(qtbot, column.row("machine.inductance"), "900 uH")
    assert desk.sheet.rig.machine.inductance == pytest.approx(0.9e-3)
    assert column.row("machine.inductance").box.text() == "900 uH"
    assert "1.5\N{NO-BREAK SPACE}ms" in column.machine.follows.text()


def test_a_wrong_entry_keeps_its_text_and_says_why(column, desk, qtbot):
    row = column.row("machine.resistance")
    type_into(qtbot, row, "0.6 kg")
    assert row.box.text() == "0.6 kg"
    assert row.box.property("wrong") is True
    assert "a resistance is meant" in row.reason.text()
    assert not row.reason.isHidden()
    assert desk.sheet.rig.machine.resistance == pytest.approx(0.6)
    type_into(qtbot, row, "700 mohm")
    assert row.box.property("wrong") is False
    assert row.reason.isHidden()
    assert desk.sheet.rig.machine.resistance == pytest.approx(0.7)


def test_a_rule_between_entries_marks_the_entry_it_is_about(column, qtbot):
    type_into(qtbot, column.row("stage.pwm_frequency"), "19 kHz")
    assert column.row("stage.pwm_frequency").box.text() == "19 kHz"
    assert "pwm_frequency" in column.row("stage.current_rate").reason.text()
    type_into(qtbot, column.row("stage.pwm_frequency"), "20 kHz")
    assert column.row("stage.current_rate").reason.isHidden()


def test_an_optional_entry_can_be_taken_out_and_a_needed_one_cannot(column, desk, qtbot):
    row = column.row("machine.max_speed")
    row.box.setFocus()
    row.box.selectAll()
    qtbot.keyClick(row.box, Qt.Key.Key_Delete)
    qtbot.keyClick(row.box, RETURN)
    assert desk.sheet.rig.machine.max_speed is None
    needed = column.row("machine.rotor_inertia")
    needed.box.selectAll()
    qtbot.keyClick(needed.box, Qt.Key.Key_Delete)
    qtbot.keyClick(needed.box, RETURN)
    assert "is missing" in needed.reason.text()
    assert not desk.valid


def test_another_kind_of_machine_asks_for_its_entries(column, desk, qtbot):
    column.machine.kind.setCurrentIndex(1)
    column.machine.kind.activated.emit(1)
    assert not desk.valid
    pole_pairs = column.row("machine.pole_pairs")
    assert "is missing" in pole_pairs.reason.text()
    type_into(qtbot, pole_pairs, "4")
    for path, word in (("machine.winding_values", "phase"), ("machine.current_values", "peak")):
        box = column.row(path).box
        box.setCurrentIndex(box.findData(word))
        box.activated.emit(box.currentIndex())
    assert desk.valid
    assert desk.sheet.rig.machine.kind is MachineKind.PM_SINE
    assert desk.sheet.rig.machine.pole_pairs == 4
    desk.undo()
    desk.undo()
    desk.undo()
    desk.undo()
    assert desk.valid
    assert desk.sheet.rig.machine.kind is MachineKind.BRUSHED_DC
    with pytest.raises(KeyError):
        column.row("machine.pole_pairs")


def test_what_says_no_more_than_its_default_is_behind_more(column, qtbot):
    row = column.row("stage.speed_filter")
    assert row.isHidden()
    assert not column.row("stage.bus_voltage").isHidden()
    more = column.stage._more
    assert "more" in more.text()
    qtbot.mouseClick(more, LEFT_BUTTON)
    assert not row.isHidden()
    assert more.text() == "less"


def test_an_entry_behind_more_comes_out_where_it_is_wrong(column, qtbot):
    row = column.row("stage.speed_filter")
    row.edited.emit("stage.speed_filter", "much")
    assert not row.isHidden()


def test_tolerances_stand_beside_their_boxes(column):
    assert column.row("machine.resistance").tolerance.text() == "±10 %"
    assert column.row("machine.inductance").tolerance.text() == ""
    assert column.row("machine.resistance").tolerance.accessibleName() == "tolerance of resistance"


@pytest.mark.parametrize("name", ["label-unwinder", "sieve-drum", "bottle-indexer"])
def test_every_demo_sheet_shows_all_its_values(qtbot, qapp, appearance, demo_texts, name):
    desk = Desk(parse_sheet(demo_texts[name], f"{name}.bench.toml"))
    column = OnBench(desk, appearance)
    qtbot.addWidget(column)
    for path in [one for one in quantity_paths() if one.startswith(("machine.", "train.", "stage.", "duty."))]:
        text = desk.text(path)
        if text is not None:
            assert column.row(path).box.text() == text
    assert all(card.follows.text() for card in column.cards)


def test_what_follows_is_what_the_library_derives(demo_texts):
    sheet = parse_sheet(demo_texts["sieve-drum"], "x.bench.toml").sheet
    derived, plant = derived_constants(sheet.rig), refer(sheet.rig)
    line = follows.train_line(derived).replace("\N{NO-BREAK SPACE}", " ")
    assert strong(f"{derived.resonance / math.tau:.0f} Hz") in line
    assert "29.3" not in follows.stage_line(derived, plant, sheet)
    assert "25 A" in follows.stage_line(derived, plant, sheet).replace("\N{NO-BREAK SPACE}", " ")
    # 0.8 N m and 90 mN m at the load over 4 and 96 %, 4 mN m s/rad over 16, and the motor's own friction.
    speed = 1200.0 * math.tau / 60.0
    torque = (0.8 + 0.09) / (4.0 * 0.96) + 15e-3 + (30e-6 + 4e-3 / 16.0) * speed
    current = float(follows.duty_line(sheet, plant).split(">")[1].split("\N{NO-BREAK SPACE}")[0])
    assert current == pytest.approx(torque / 85e-3, rel=5e-3)


def test_a_duty_at_rest_says_nothing_of_running(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"], "x.bench.toml").with_value("duty.reference_speed", "0 rpm")
    assert follows.duty_line(document.sheet, refer(document.sheet.rig)) == ""


def test_thousands_are_set_apart():
    assert follows.spaced("8750 rpm") == "8\N{NO-BREAK SPACE}750\N{NO-BREAK SPACE}rpm"
    assert follows.spaced("-1200 rpm") == "-1\N{NO-BREAK SPACE}200\N{NO-BREAK SPACE}rpm"
    assert follows.spaced("0.75 ms") == "0.75\N{NO-BREAK SPACE}ms"
