import math

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication

from gainbench.assess import assess
from gainbench.contrast import sheet_tunings
from gainbench.errors import SheetError
from gainbench.kept import with_kept
from gainbench.model import DesignMethod, Firmware, GainForm, SpeedOutput
from gainbench.results import Gains
from gainbench.sheetfile import parse_sheet
from gainbench_app.live import Readiness
from gainbench_app.shelf import edits
from gainbench_app.shelf.columns import as_table, columns, current_gains_text
from gainbench_app.shelf.model import CHANGE, FIRST, LINE, NAME
from gainbench_app.shelf.panel import ShelfPanel
from gainbench_app.shelf.summary import summary
from gainbench_app.shelf.tunings import LIVE, Key, Kind, Shelf

FIRST_LIGHT = Key(kind=Kind.KEPT, name="first light")
HEADS = [
    "current crossover",
    "speed crossover",
    "phase margin",
    "gain margin",
    "overshoot",
    "settled in",
    "load dip",
    "on current limit",
]


def plain(text):
    return text.replace("\N{NO-BREAK SPACE}", " ")


@pytest.fixture
def shelf(desk):
    found = Shelf(desk)
    found.compute_now()
    return found


@pytest.fixture
def panel(qtbot, shelf, appearance, answers):
    handed = []
    found = ShelfPanel(shelf, appearance, dialogs=answers, hand_over=handed.append)
    found.handed = handed
    qtbot.addWidget(found)
    found.resize(1380, 130)
    found.show()
    found.choose(FIRST_LIGHT)
    return found


@pytest.fixture
def drum(tmp_path, demo_texts):
    path = tmp_path / "drum.bench.toml"
    path.write_text(demo_texts["label-unwinder"].replace("Label unwinder", "Drum"), encoding="utf-8")
    return path


# Summary and columns


def test_figures_are_those_of_the_assessment(desk):
    found, of = summary(desk.assessment), desk.assessment
    assert found.speed == of.speed.gains
    assert found.phase_margin_deg == of.speed.figures.phase_margin_deg
    assert found.current_crossover_hz == of.current.figures.crossover_hz
    assert found.settling_time_s == of.response.figures.settling_time_s
    assert found.current_limited_s == of.response.figures.current_limited_s
    assert found.trouble == ""


def test_what_is_wrong_is_said(desk):
    desk.set_values({"aims.speed.method": "by-hand", "aims.speed.kp": "9 A*s/rad", "aims.speed.ki": "50 A/rad"})
    desk.compute_now()
    assert summary(desk.assessment).trouble == "speed loop unstable"
    desk.undo()
    desk.set_values({"aims.current.crossover": "9 kHz"})
    desk.compute_now()
    found = summary(desk.assessment)
    assert found.trouble == "the targets of the current loop cannot be met"
    assert found.phase_margin_deg is None


@pytest.mark.parametrize(
    ("firmware", "heads", "cells"),
    [
        (Firmware(), ("speed Kp, A·s/rad", "speed Ki, A/rad"), ("0.4814", "57.63")),
        # Kp/Ki = 0.4814/57.63 s = 8.35 ms, by hand.
        (Firmware(gain_form=GainForm.KP_TI), ("speed Kp, A·s/rad", "speed Ti"), ("0.4814", "8.35 ms")),
        # 0.48144 A s/rad times 2 pi/60 rad/s a rpm and 0.052 N m/A, by hand.
        (
            Firmware(speed_unit="rpm", speed_unit_size=math.tau / 60.0, speed_output=SpeedOutput.TORQUE),
            ("speed Kp, N·m/rpm", "speed Ki, N·m/(rpm·s)"),
            ("0.002622", "0.3138"),
        ),
    ],
)
def test_gains_are_in_the_firmwares_form(desk, firmware, heads, cells):
    found = columns(firmware, speed_unit="rpm", speed_size=math.tau / 60.0)
    assert tuple(one.head for one in found[:2]) == heads
    assert [one.head for one in found[2:]] == HEADS
    told = [plain(one.cell(summary(desk.assessment))) for one in found]
    assert told[0] == cells[0]
    assert told[1].startswith(cells[1][:4])
    assert told[2:5] == ["1.00 kHz", "60.0 Hz", "60.0°"]
    assert told[8].endswith("rpm")


def test_differences_are_told_by_so_much_or_as_a_share(desk):
    base = summary(desk.assessment)
    desk.set_values({"aims.speed.crossover": "30 Hz", "aims.speed.phase_margin": "66 deg"})
    desk.compute_now()
    other = summary(desk.assessment)
    found = {one.head: one for one in columns(Firmware(), speed_unit="rpm", speed_size=1.0)}
    assert plain(found["speed crossover"].change(other, base)) == "\N{MINUS SIGN}50 %"
    assert plain(found["speed crossover"].change(base, other)) == "+100 %"
    assert found["phase margin"].change(other, base) == "+6.0"
    assert found["current crossover"].change(other, base) == ""


def test_gains_of_the_current_loop_are_told_as_words(desk):
    assert current_gains_text(summary(desk.assessment), Firmware()) == "current Kp 2.659 V/A, Ki 4681 V/(A·s)"


def test_a_table_is_text_with_tabs_or_markdown():
    heads, rows = ["a", "b"], [["x|y", "1\N{NO-BREAK SPACE}Hz"], ["two\nlines", ""]]
    assert as_table(heads, rows, markdown=False) == "a\tb\nx|y\t1 Hz\ntwo lines\t\n"
    assert as_table(heads, rows, markdown=True) == "| a | b |\n| --- | ---: |\n| x\\|y | 1 Hz |\n| two lines |  |\n"


# Edits


def test_a_free_name_is_found(desk):
    document = desk.state.document
    assert edits.free_name(document) == "tuning 2"
    gains = Gains(kp=1.0, ki=1.0)
    document = edits.keeping("tuning 3", current=gains, speed=gains, note="")(document)
    assert edits.free_name(document) == "tuning 4"


def test_an_edit_of_what_is_not_there_is_refused(desk):
    for change in (edits.renaming("none", "x"), edits.noting("none", "x"), edits.removing("none")):
        with pytest.raises(SheetError, match='no tuning "none"'):
            change(desk.state.document)


def test_recalled_gains_are_spelled_as_on_the_shelf(desk):
    values = edits.recalled(desk.state.document, "first light")
    assert values["aims.current.kp"] == "2.66 V/A"
    assert values["aims.speed.ki"] == "57.6 A/rad"
    assert values["aims.speed.ti"] is None
    assert values["aims.current.method"] == "by-hand"


# Tunings


def test_a_kept_tuning_is_assessed_on_the_sheet_as_it_is(shelf, desk):
    live, kept = shelf.rows()
    assert (live.key, kept.key) == (LIVE, FIRST_LIGHT)
    (tuning,) = sheet_tunings(desk.sheet, "x")[1:]
    assert kept.known == summary(tuning.assessment)
    desk.set_values({"train.load_inertia": "9 kg*cm^2"})
    assert shelf.rows()[1].known is None
    assert shelf.busy
    shelf.compute_now()
    assert shelf.rows()[1].known == summary(assess(with_kept(desk.sheet, desk.sheet.kept[0])))


def test_a_drag_of_the_aims_leaves_the_shelf_alone(shelf, desk):
    before = shelf.rows()[1].known
    desk.begin_gesture("aims.speed.crossover")
    for hertz in (50.0, 40.0):
        desk.move("aims.speed.crossover", math.tau * hertz)
        desk.compute_now()
        assert not shelf.busy
        assert shelf.rows()[1].known is before
    assert shelf.rows()[0].known == summary(desk.assessment)
    desk.end_gesture()


def test_only_what_is_fresh_is_drawn(shelf, desk, qtbot):
    shelf.draw(FIRST_LIGHT, True)
    assert desk.shown_kept == ()
    qtbot.waitUntil(lambda: len(desk.shown_kept) == 1)
    (shown,) = desk.shown_kept
    assert shown.name == "first light"
    assert shown.assessment.speed.gains == Gains(kp=0.481, ki=57.6)
    desk.set_values({"train.load_inertia": "9 kg*cm^2"})
    assert desk.shown_kept == ()
    qtbot.waitUntil(lambda: len(desk.shown_kept) == 1)
    assert desk.shown_kept[0].assessment.sheet.rig == desk.sheet.rig
    shelf.draw(FIRST_LIGHT, False)
    assert desk.shown_kept == ()


def test_nothing_is_assessed_before_it_can_be(qapp, demo_texts):
    from gainbench_app.desk import Desk

    desk = Desk(parse_sheet(demo_texts["label-unwinder"], "x.bench.toml"), readiness=Readiness.NOTHING)
    shelf = Shelf(desk)
    shelf.compute_now()
    assert [row.known for row in shelf.rows()] == [None, None]
    desk.reach(Readiness.LOOPS)
    desk.compute_now()
    shelf.compute_now()
    assert shelf.rows()[1].known.phase_margin_deg is not None
    assert shelf.rows()[1].known.overshoot_percent is None
    desk.reach(Readiness.ALL)
    desk.compute_now()
    shelf.compute_now()
    assert shelf.rows()[1].known.overshoot_percent is not None


def test_keeping_is_one_step_of_undo_and_draws(shelf, desk):
    gains = desk.assessment.speed.gains
    shelf.keep("second", "why")
    shelf.compute_now()
    kept = desk.sheet.kept[1]
    assert (kept.name, kept.note, kept.speed.kp, kept.speed.ki) == ("second", "why", gains.kp, gains.ki)
    assert [one.name for one in desk.shown_kept] == ["second"]
    desk.undo()
    assert len(desk.sheet.kept) == 1
    assert desk.shown_kept == ()
    desk.redo()
    shelf.compute_now()
    assert [one.name for one in desk.shown_kept] == ["second"]


def test_gains_that_are_not_there_cannot_be_kept(shelf, desk):
    desk.set_values({"aims.speed.crossover": "900 Hz"})
    with pytest.raises(SheetError, match="no gains to keep"):
        shelf.keep("second")
    assert len(desk.sheet.kept) == 1


def test_recalling_puts_gains_in_force_by_hand(shelf, desk):
    desk.hold("speed", True)
    shelf.recall(FIRST_LIGHT)
    desk.compute_now()
    assert desk.sheet.aims.speed.method is DesignMethod.BY_HAND
    assert desk.assessment.speed.gains == Gains(kp=0.481, ki=57.6)
    assert desk.assessment.current.gains == Gains(kp=2.66, ki=4681.0)
    assert not desk.held("speed")
    assert desk.text("aims.speed.crossover") == "60 Hz"
    desk.undo()
    assert desk.sheet.aims.speed.method is DesignMethod.CROSSOVER_MARGIN


def test_renaming_keeps_what_is_drawn_and_known(shelf, desk):
    shelf.draw(FIRST_LIGHT, True)
    shelf.hold_against(FIRST_LIGHT)
    shelf.compute_now()
    shelf.rename(FIRST_LIGHT, " dawn ")
    shelf.compute_now()
    renamed = Key(kind=Kind.KEPT, name="dawn")
    assert shelf.reference == renamed
    assert [one.name for one in desk.shown_kept] == ["dawn"]
    shelf.keep("second")
    with pytest.raises(SheetError, match="name"):
        shelf.rename(renamed, "second")
    with pytest.raises(SheetError, match="empty"):
        shelf.rename(renamed, "  ")
    assert [one.name for one in desk.sheet.kept] == ["dawn", "second"]


def test_order_note_and_taking_off(shelf, desk):
    shelf.keep("second")
    shelf.move(Key(kind=Kind.KEPT, name="second"), -1)
    assert [row.name for row in shelf.rows()] == ["live", "second", "first light"]
    shelf.move(Key(kind=Kind.KEPT, name="second"), -1)
    assert [row.name for row in shelf.rows()] == ["live", "second", "first light"]
    shelf.note(FIRST_LIGHT, "before the belt")
    assert shelf.rows()[2].note == "before the belt"
    shelf.note(FIRST_LIGHT, "")
    assert desk.text("kept[1].note") is None
    shelf.hold_against(FIRST_LIGHT)
    shelf.take_off(FIRST_LIGHT)
    assert shelf.reference is None
    assert [one.name for one in desk.sheet.kept] == ["second"]


def test_other_sheets_lie_beside(shelf, desk, drum, tmp_path):
    shelf.open_beside(drum)
    shelf.compute_now()
    assert [row.name for row in shelf.rows()] == ["live", "first light", "Drum: as designed", "Drum: first light"]
    designed, kept = shelf.rows()[2:]
    assert designed.known == shelf.rows()[0].known
    shelf.draw(kept.key, True)
    shelf.compute_now()
    assert len(desk.shown_kept) == 1
    shelf.recall(kept.key)
    desk.compute_now()
    assert desk.assessment.speed.gains == Gains(kp=0.481, ki=57.6)
    shelf.take_off(designed.key)
    assert len(shelf.rows()) == 2
    assert desk.shown_kept == ()
    with pytest.raises(SheetError):
        shelf.open_beside(tmp_path / "none.bench.toml")


def test_another_sheet_has_another_shelf(shelf, desk, demo_texts, drum):
    shelf.draw(FIRST_LIGHT, True)
    shelf.open_beside(drum)
    desk.open_text(demo_texts["sieve-drum"], "sieve-drum.bench.toml")
    desk.compute_now()
    assert [row.name for row in shelf.rows()] == ["live"]
    assert desk.shown_kept == ()


# The table


def test_the_table_says_what_is_known(panel):
    model = panel.model
    cell = model.index(1, FIRST + 3)
    assert plain(model.data(cell)) == "60.0 Hz"
    assert model.data(cell, Qt.ItemDataRole.AccessibleTextRole).startswith("speed crossover")
    assert "Kp 2.66 V/A" in model.data(model.index(1, NAME), Qt.ItemDataRole.ToolTipRole)
    panel.shelf.hold_against(LIVE)
    assert plain(model.data(model.index(1, FIRST), CHANGE)) == "\N{MINUS SIGN}0.1 %"
    assert model.data(model.index(0, FIRST), CHANGE) == ""


def test_an_unstable_tuning_says_so(panel, desk):
    gains = Gains(kp=9.0, ki=50.0)
    desk.edit(edits.keeping("wild", current=Gains(kp=2.66, ki=4681.0), speed=gains, note=""))
    panel.shelf.compute_now()
    assert panel.model.data(panel.model.index(2, FIRST + 4)) == "unstable"
    assert panel.model.data(panel.model.index(2, FIRST + 4), Qt.ItemDataRole.ToolTipRole) == "speed loop unstable"


def test_space_and_a_click_draw(panel, qtbot, desk):
    panel.table.setFocus()
    qtbot.keyClick(panel.table, Qt.Key.Key_Space)
    panel.shelf.compute_now()
    assert len(desk.shown_kept) == 1
    line = panel.model.index(1, LINE)
    assert panel.model.data(line, Qt.ItemDataRole.CheckStateRole) is Qt.CheckState.Checked
    place = panel.table.visualRect(line).center()
    qtbot.mouseClick(panel.table.viewport(), Qt.MouseButton.LeftButton, pos=place)
    assert desk.shown_kept == ()


def test_a_name_is_edited_in_its_place(panel, qtbot, desk, answers):
    panel.table.setFocus()
    qtbot.keyClick(panel.table, Qt.Key.Key_F2)
    editor = panel.table.focusWidget() if panel.table.focusWidget() is not panel.table else None
    editor = editor or QGuiApplication.focusObject()
    editor.selectAll()
    qtbot.keyClicks(editor, "dawn")
    qtbot.keyClick(editor, Qt.Key.Key_Return)
    qtbot.waitUntil(lambda: desk.sheet.kept[0].name == "dawn")
    panel.shelf.keep("second")
    assert not panel.model.setData(panel.model.index(2, NAME), "dawn")
    assert "name" in answers.told[0][1]


def test_a_name_that_was_taken_is_not_lost_where_rows_change_at_once(panel, qtbot):
    panel.table.setFocus()
    qtbot.keyClick(panel.table, Qt.Key.Key_F2)
    editor = QGuiApplication.focusObject()
    editor.selectAll()
    qtbot.keyClicks(editor, "dusk")
    qtbot.keyClick(editor, Qt.Key.Key_Return)
    panel.shelf.keep("second")
    assert [row.name for row in panel.model.shelf_rows] == ["live", "dusk", "second"]


def test_what_can_be_done_depends_on_the_row(panel):
    panel.choose(LIVE)
    assert not panel.actions_of_row["recall"].isEnabled()
    assert panel.actions_of_row["hand over"].isEnabled()
    panel.choose(FIRST_LIGHT)
    assert panel.actions_of_row["recall"].isEnabled()
    assert not panel.actions_of_row["up"].isEnabled()


def test_every_button_does_what_it_says(panel, desk, answers, drum):
    act = {words: button.click for words, button in panel.actions_of_row.items()}
    act["recall"]()
    assert desk.sheet.aims.speed.method is DesignMethod.BY_HAND
    answers.noted = "a note"
    act["note"]()
    assert desk.sheet.kept[0].note == "a note"
    panel.shelf.compute_now()
    act["hand over"]()
    assert panel.handed == [FIRST_LIGHT]
    panel.shelf.keep("second")
    panel.choose(FIRST_LIGHT)
    act["down"]()
    assert [one.name for one in desk.sheet.kept] == ["second", "first light"]
    assert panel.row.key == FIRST_LIGHT
    act["reference"]()
    assert panel.shelf.reference == FIRST_LIGHT
    act["reference"]()
    assert panel.shelf.reference is None
    answers.open = drum
    act["beside..."]()
    assert panel.model.rowCount() == 5
    act["take off"]()
    assert [one.name for one in desk.sheet.kept] == ["second"]


def test_keys_act_on_the_chosen_row(panel, qtbot, desk):
    panel.table.setFocus()
    qtbot.keyClick(panel.table, Qt.Key.Key_Return)
    assert desk.sheet.aims.speed.method is DesignMethod.BY_HAND
    panel.shelf.keep("second")
    panel.choose(FIRST_LIGHT)
    qtbot.keyClick(panel.table, Qt.Key.Key_Down, Qt.KeyboardModifier.AltModifier)
    assert [one.name for one in desk.sheet.kept] == ["second", "first light"]
    qtbot.keyClick(panel.table, Qt.Key.Key_Delete)
    assert [one.name for one in desk.sheet.kept] == ["second"]


def test_the_table_is_copied(panel):
    panel.shelf.hold_against(LIVE)
    panel.copy_table(markdown=False)
    lines = QGuiApplication.clipboard().text().splitlines()
    assert lines[0].split("\t")[0] == "tuning"
    assert lines[2].startswith("first light\t0.481 (\N{MINUS SIGN}0.1 %)")
    panel.copy_table(markdown=True)
    assert QGuiApplication.clipboard().text().startswith("| tuning |")


def test_heads_and_figures_have_room(panel):
    for width in (1376, 1256):
        panel.resize(width, 130)
        head = panel.table.horizontalHeader()
        sizes = [head.sectionSize(number) for number in range(head.count())]
        assert sum(sizes) <= panel.table.viewport().width()
        for number, words in enumerate(panel.model.heads):
            assert head.fontMetrics().horizontalAdvance(words) < sizes[FIRST + number] + 8
    assert panel.grab().width() == 1256
