import sys

import pytest
from PySide6.QtCore import QMimeData, QObject, QPointF, Qt, QUrl
from PySide6.QtGui import QCloseEvent, QDragEnterEvent, QDropEvent, QGuiApplication
from PySide6.QtWidgets import QApplication, QLabel, QWidget

from gainbench.sheetfile import read_sheet
from gainbench_app.habits import with_recent
from gainbench_app.live import Readiness
from gainbench_app.pictures import picture

RETURN = Qt.Key.Key_Return
LEFT_BUTTON = Qt.MouseButton.LeftButton
CONTROL = Qt.KeyboardModifier.ControlModifier


def type_into(qtbot, box, text, *, enter=True):
    box.setFocus()
    box.selectAll()
    qtbot.keyClicks(box, text)
    if enter:
        qtbot.keyClick(box, RETURN)


def closes(window):
    event = QCloseEvent()
    window.closeEvent(event)
    return event.isAccepted()


def test_none_keeps_its_references():
    # PySide6 6.12.0 on Python 3.11 loses one at each call that returns None, until the interpreter aborts.
    owner = QObject()
    before = sys.getrefcount(None)
    for _ in range(1000):
        owner.parent()
    assert sys.getrefcount(None) > before - 500


def test_it_is_laid_out_at_its_smallest_and_at_its_usual_size(window):
    for width, height in ((1280, 720), (1400, 900)):
        window.resize(width, height)
        QApplication.processEvents()
        assert (window.width(), window.height()) == (width, height)
        for column in (window.left, window.middle, window.right):
            assert column.isVisible()
        assert window.what_it_does.plots.height() >= 230
        assert window.what_it_does.bode.height() >= 150
        for row in (window.on_bench.row("machine.viscous_friction"), window.on_bench.row("train.ratio")):
            box = row.box
            assert box.fontMetrics().horizontalAdvance(box.text()) <= box.width() - 6
        for label in window.on_bench.findChildren(QLabel):
            if label.isVisible() and label.buddy() is not None:
                assert label.fontMetrics().horizontalAdvance(label.text()) <= label.width(), label.text()


def test_typing_a_value_redraws_everything(window, qtbot, desk):
    trace = window.what_it_does.plots.view.trace
    box = window.on_bench.row("train.load_inertia").box
    type_into(qtbot, box, "7.2 kg*cm^2")
    desk.compute_now()
    assert box.text() == "7.2 kg*cm^2"
    assert window.what_it_does.plots.view.trace is not trace
    assert window.what_we_ask.findings.shown == desk.assessment.findings
    assert "unsaved since" in window.top.saved.text()
    assert window.isWindowModified()


def test_undo_and_redo_from_the_keyboard(window, qtbot, desk):
    box = window.on_bench.row("machine.inductance").box
    type_into(qtbot, box, "0.9 mH")
    qtbot.keyClick(box, Qt.Key.Key_Z, CONTROL)
    assert box.text() == "0.45 mH"
    assert not window.menu_of_more.undo.isEnabled()
    qtbot.keyClick(box, Qt.Key.Key_Y, CONTROL)
    assert box.text() == "0.9 mH"


def test_undo_within_a_box_is_the_boxs_own_while_typing(window, qtbot, desk):
    type_into(qtbot, window.on_bench.row("machine.inductance").box, "0.9 mH")
    box = window.on_bench.row("machine.resistance").box
    type_into(qtbot, box, "0.7", enter=False)
    qtbot.keyClick(box, Qt.Key.Key_Z, CONTROL)
    assert desk.text("machine.inductance") == "0.9 mH"
    assert box.text() != "0.7"
    qtbot.keyClick(box, Qt.Key.Key_Escape)


def test_open(window, qtbot, answers, tmp_path, demo_texts):
    path = tmp_path / "drum.bench.toml"
    path.write_text(demo_texts["sieve-drum"], encoding="utf-8")
    answers.open = path
    qtbot.mouseClick(window.top.open, LEFT_BUTTON)
    assert window.desk.sheet.title == "Sieve drum"
    assert window.top.title.text() == "Sieve drum"
    assert window.top.saved.text() == "drum.bench.toml"
    assert answers.asked == ["open"]


def test_a_sheet_that_cannot_be_read_is_told_and_the_open_one_stays(window, qtbot, answers, tmp_path):
    path = tmp_path / "bad.bench.toml"
    path.write_text("format = 1\n[machine]\n", encoding="utf-8")
    answers.open = path
    qtbot.mouseClick(window.top.open, LEFT_BUTTON)
    assert window.desk.sheet.title == "Label unwinder"
    ((title, message),) = answers.told
    assert "cannot be opened" in title
    assert message.startswith("bad.bench.toml: ")


def test_opening_over_unsaved_work_asks(window, qtbot, desk, answers, tmp_path, demo_texts):
    path = tmp_path / "drum.bench.toml"
    path.write_text(demo_texts["sieve-drum"], encoding="utf-8")
    answers.open = path
    type_into(qtbot, window.on_bench.row("machine.inductance").box, "0.9 mH")
    answers.leave = "cancel"
    window.open()
    assert answers.asked == ["unsaved Label unwinder"]
    assert desk.sheet.title == "Label unwinder"
    answers.leave = "discard"
    window.open()
    assert desk.sheet.title == "Sieve drum"


def test_save_asks_for_a_file_once(window, qtbot, desk, answers, tmp_path):
    path = tmp_path / "mine.bench.toml"
    answers.save = path
    type_into(qtbot, window.on_bench.row("machine.inductance").box, "0.9 mH")
    qtbot.mouseClick(window.top.save, LEFT_BUTTON)
    assert read_sheet(path).typed("machine.inductance") == "0.9 mH"
    assert window.top.saved.text() == "mine.bench.toml"
    assert not window.isWindowModified()
    type_into(qtbot, window.on_bench.row("machine.inductance").box, "0.8 mH", enter=False)
    qtbot.keyClick(window, Qt.Key.Key_S, CONTROL)
    assert read_sheet(path).typed("machine.inductance") == "0.8 mH"
    assert answers.asked == ["save as label-unwinder.bench.toml"]


def test_what_is_not_valid_is_not_saved(window, qtbot, answers, tmp_path):
    answers.save = tmp_path / "mine.bench.toml"
    type_into(qtbot, window.on_bench.row("machine.resistance").box, "0.6 kg")
    assert not window.save()
    assert not answers.save.exists()
    assert "machine.resistance" in answers.told[0][1]


def test_closing_asks_only_about_unsaved_work(window, qtbot, answers, tmp_path):
    assert closes(window)
    assert answers.asked == []
    type_into(qtbot, window.on_bench.row("machine.inductance").box, "0.9 mH", enter=False)
    answers.leave = "cancel"
    assert not closes(window)
    assert answers.asked == ["unsaved Label unwinder"]
    answers.leave, answers.save = "save", tmp_path / "mine.bench.toml"
    assert closes(window)
    assert read_sheet(answers.save).typed("machine.inductance") == "0.9 mH"


def test_closing_stays_where_saving_fails(window, qtbot, answers):
    type_into(qtbot, window.on_bench.row("machine.inductance").box, "0.9 mH")
    answers.leave, answers.save = "save", None
    assert not closes(window)


@pytest.mark.parametrize(
    ("values", "says"),
    [
        ({"machine.resistance": "0.6 kg"}, "the sheet is not valid"),
        ({"aims.speed.crossover": "900 Hz"}, "the targets of the speed loop cannot be met"),
        (
            {"aims.speed.method": "by-hand", "aims.speed.kp": "9 A*s/rad", "aims.speed.ki": "50 A/rad"},
            "the speed loop is unstable",
        ),
    ],
)
def test_handover_is_shut_with_its_reason(window, desk, answers, values, says):
    assert window.top.handover.isEnabled()
    desk.set_values(values)
    desk.compute_now()
    assert not window.top.handover.isEnabled()
    assert window.top.reason.text() == f"no handover: {says}"
    assert window.top.handover.toolTip() == window.top.reason.text()
    window.handover()
    assert answers.requests == []
    desk.undo()
    desk.compute_now()
    assert window.top.handover.isEnabled()
    assert window.top.reason.text() == ""


def test_handover_waits_for_the_response(window, desk):
    desk.reach(Readiness.LOOPS)
    desk.compute_now()
    assert window.top.reason.text() == "no handover yet: the response is being prepared"
    desk.reach(Readiness.ALL)
    desk.compute_now()
    assert window.top.handover.isEnabled()


def test_everything_that_takes_input_has_a_name(window):
    nameless = [
        type(one).__name__
        for one in window.findChildren(QWidget)
        if one.focusPolicy() & Qt.FocusPolicy.TabFocus
        and not (one.accessibleName() or getattr(one, "text", lambda: "")())
        and one.isVisible()
    ]
    assert nameless == []


def test_all_controls_are_reached_with_the_tab_key(window, qtbot):
    boxes = {window.on_bench.row("machine.resistance").box, window.what_we_ask.speed.row("crossover").slider}
    window.top.open.setFocus()
    seen = set()
    for _ in range(250):
        qtbot.keyClick(QApplication.focusWidget(), Qt.Key.Key_Tab)
        seen.add(QApplication.focusWidget())
    assert boxes <= seen


def test_shortcuts_go_to_the_columns(window, qtbot):
    qtbot.keyClick(window, Qt.Key.Key_3, CONTROL)
    assert window.what_we_ask.speed.method.hasFocus()
    qtbot.keyClick(window, Qt.Key.Key_1, CONTROL)
    assert window.on_bench.machine.head.hasFocus()


def test_the_title_can_be_changed(window, qtbot, desk):
    type_into(qtbot, window.top.title, "Label unwinder 2")
    assert desk.sheet.title == "Label unwinder 2"
    assert window.windowTitle().startswith("Label unwinder 2")


def test_a_demo_sheet_opens_from_the_menu(window, desk):
    names = [action.text() for action in window.menu_of_more.demos.actions()]
    assert names[0] == "Label unwinder"
    window.menu_of_more.demos.actions()[names.index("Bottle indexer")].trigger()
    desk.compute_now()
    assert desk.sheet.title == "Bottle indexer"
    assert window.what_it_does.plots.view.trace is desk.assessment.response.trace


def dropped(window, paths):
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(path)) for path in paths])
    action, buttons = Qt.DropAction.CopyAction, Qt.MouseButton.LeftButton
    enter = QDragEnterEvent(QPointF(9, 9).toPoint(), action, data, buttons, Qt.KeyboardModifier.NoModifier)
    enter.setAccepted(False)
    window.dragEnterEvent(enter)
    if enter.isAccepted():
        window.dropEvent(QDropEvent(QPointF(9, 9), action, data, buttons, Qt.KeyboardModifier.NoModifier))
    return enter.isAccepted()


def test_a_sheet_can_be_dropped_on_the_window(window, desk, answers, tmp_path, demo_texts):
    path = tmp_path / "drum.bench.toml"
    path.write_text(demo_texts["sieve-drum"], encoding="utf-8")
    assert not dropped(window, [tmp_path / "notes.txt"])
    assert not dropped(window, [path, path])
    desk.set_values({"machine.inductance": "0.9 mH"})
    assert dropped(window, [path])
    assert answers.asked == ["unsaved Label unwinder"]
    assert desk.sheet.title == "Label unwinder"
    answers.leave = "discard"
    assert dropped(window, [path])
    assert desk.sheet.title == "Sieve drum"


def test_sheets_that_were_open_are_remembered(window, desk, answers, tmp_path, demo_texts):
    path = tmp_path / "drum.bench.toml"
    path.write_text(demo_texts["sieve-drum"], encoding="utf-8")
    window.open_path(path)
    window.menu_of_more.aboutToShow.emit()
    first = window.menu_of_more.recent.actions()[0]
    assert first.text() == "drum.bench.toml"
    window.open_demo("label-unwinder")
    first.trigger()
    assert desk.sheet.title == "Sieve drum"
    gone = tmp_path / "gone.bench.toml"
    window.memory.change(lambda habits: with_recent(habits, gone))
    window.open_recent(gone)
    assert "no such file" in answers.told[-1][1]
    assert str(gone) not in window.memory.habits().recent


def test_keeping_from_the_keyboard_and_recalling(window, qtbot, desk, answers):
    answers.named = ("second", "a note")
    qtbot.keyClick(window, Qt.Key.Key_K, CONTROL)
    assert [one.name for one in desk.sheet.kept] == ["first light", "second"]
    assert desk.sheet.kept[1].note == "a note"
    assert window.shelf.row.name == "second"
    answers.named = ("second", "")
    qtbot.mouseClick(window.top.keep, LEFT_BUTTON)
    assert "second" in answers.told[-1][1]
    desk.set_values({"aims.speed.crossover": "900 Hz"})
    desk.compute_now()
    assert not window.top.keep.isEnabled()


def test_a_kept_tuning_is_handed_over(window, desk, answers, tmp_path):
    from gainbench_app.handover_dialog import HandoverChoice

    answers.choice = HandoverChoice(folder=tmp_path, prefix=None)
    window.shelf.shelf.compute_now()
    window.shelf.choose(window.shelf.model.shelf_rows[1].key)
    window.shelf.actions_of_row["hand over"].click()
    assert "first light" in answers.requests[0].title
    (header,) = tmp_path.glob("*.h")
    text = header.read_text(encoding="ascii")
    assert "first light" in text
    assert "2.66" in text
    desk.set_values({"machine.resistance": "0.6 kg"})
    window.shelf.hand_over()
    assert len(answers.requests) == 1
    assert "not valid" in answers.told[-1][1]


def test_pictures_are_copied_and_saved(window, qtbot, answers, tmp_path):
    qtbot.keyClick(window, Qt.Key.Key_C, CONTROL | Qt.KeyboardModifier.ShiftModifier)
    image = QGuiApplication.clipboard().image()
    assert image.width() == picture(window.figures()).width()
    answers.picture = tmp_path / "plots.svg"
    window.menu_of_more.save_picture.trigger()
    assert answers.picture.read_bytes().startswith(b"<?xml")
    answers.picture = tmp_path / "plots.bmp"
    window.menu_of_more.save_picture.trigger()
    assert "saved as .png or .svg" in answers.told[-1][1]


def test_what_is_printed_is_what_is_shown(window, desk):
    window.shelf.shelf.compute_now()
    page = window.printed()
    assert page.title == "Label unwinder"
    assert page.rows[0][0] == "live"
    assert page.rows[1][0] == "first light"
    assert len(page.heads) == len(page.rows[0]) - 1
    assert page.findings == desk.assessment.findings


def test_pasted_rows_are_set_once_confirmed(window, desk, answers):
    answers.rows = {"machine.resistance": "0.207 ohm", "machine.inductance": "0.169 mH"}
    window.menu_of_more.paste_rows.trigger()
    assert desk.text("machine.resistance") == "0.207 ohm"
    desk.undo()
    assert desk.text("machine.resistance") == "0.60 ohm"
    assert desk.text("machine.inductance") == "0.45 mH"


def test_another_size_is_remembered_and_taken_up_at_once_if_that_is_wanted(window, desk, answers):
    heard = []
    window.restart_wanted.connect(lambda: heard.append(True))
    desk.hold("speed", True)
    window.menu_of_more.scales[150].trigger()
    assert window.memory.habits().scale == 150
    assert "150 %" in answers.restarts[-1]
    assert "gains that are held" in answers.restarts[-1]
    assert heard == []
    answers.restart = True
    window.menu_of_more.scales[200].trigger()
    assert heard == [True]
    window.menu_of_more.scales[100].trigger()
    assert len(answers.restarts) == 2
    assert window.memory.habits().scale == 100


def test_a_size_that_is_set_outside_goes_first(window, answers, monkeypatch):
    monkeypatch.setenv("QT_SCALE_FACTOR", "1")
    window.menu_of_more.scales[150].trigger()
    assert answers.restarts == []
    assert "QT_SCALE_FACTOR" in answers.told[-1][1]
    window.menu_of_more.scales[100].trigger()


def test_the_list_of_shortcuts_is_shown(window, qtbot, answers):
    qtbot.keyClick(window, Qt.Key.Key_Slash, CONTROL)
    assert [type(one).__name__ for one in answers.shown] == ["ShortcutList"]
    answers.shown[0].close()


def test_a_low_window_has_a_low_shelf(window, desk):
    for name in ("two", "three", "four"):
        window.shelf.shelf.keep(name)
    window.resize(1400, 900)
    QApplication.processEvents()
    high = window.shelf.table.height()
    window.resize(1280, 720)
    QApplication.processEvents()
    assert window.shelf.table.height() == high - 24


def test_a_finding_leads_to_an_entry_of_the_bench(window, qtbot):
    findings = window.what_we_ask.findings
    index = next(k for k, one in enumerate(findings.shown) if "speed_window" in one.advice)
    row = window.on_bench.row("stage.speed_window")
    assert row.isHidden()
    findings.row(index).setFocus()
    qtbot.keyClick(findings.row(index), Qt.Key.Key_Return)
    assert row.isVisible()
    assert row.box.hasFocus()
    assert not row.box.visibleRegion().isEmpty()


def test_gains_that_are_held_are_not_handed_over(window, desk, qtbot):
    assert window.handover_refusal() == ""
    qtbot.mouseClick(window.what_we_ask.speed.hold, Qt.MouseButton.LeftButton)
    desk.compute_now()
    assert "held" in window.handover_refusal()
    assert not window.top.handover.isEnabled()
    desk.undo()
    desk.compute_now()
    assert window.handover_refusal() == ""


def test_the_verdict_leads_to_the_findings(window, qtbot):
    window.resize(1280, 720)
    row = window.what_we_ask.findings.row(0)
    assert row.visibleRegion().isEmpty()
    qtbot.mouseClick(window.what_it_does.more, Qt.MouseButton.LeftButton)
    assert row.hasFocus()
    assert not row.visibleRegion().isEmpty()
