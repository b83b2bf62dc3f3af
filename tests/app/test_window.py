import sys

import pytest
from PySide6.QtCore import QObject, QSettings, Qt, QTimer
from PySide6.QtGui import QCloseEvent
from PySide6.QtWidgets import QApplication, QWidget

from gainbench.sheetfile import read_sheet
from gainbench_app import window as window_module
from gainbench_app.live import Readiness
from gainbench_app.theme import DARK, LIGHT, Scheme
from gainbench_app.window import Themes, open_window

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


def test_themes_change_at_once(window, qapp, appearance):
    sheet, colours = qapp.styleSheet(), qapp.palette()
    themes = Themes(qapp, appearance, menu=window.menu_of_more, scheme=Scheme.DARK)
    assert appearance.theme is DARK
    assert DARK.paper in qapp.styleSheet()
    window.menu_of_more.schemes[Scheme.LIGHT].trigger()
    assert themes.scheme is Scheme.LIGHT
    assert appearance.theme is LIGHT
    qapp.setStyleSheet(sheet)
    qapp.setPalette(colours)


def test_a_demo_sheet_opens_from_the_menu(window, desk):
    names = [action.text() for action in window.menu_of_more.demos.actions()]
    assert names[0] == "Label unwinder"
    window.menu_of_more.demos.actions()[names.index("Bottle indexer")].trigger()
    desk.compute_now()
    assert desk.sheet.title == "Bottle indexer"
    assert window.what_it_does.plots.view.trace is desk.assessment.response.trace


@pytest.fixture
def opened(qapp, monkeypatch, tmp_path):
    """Runs open_window until its response is there, and gives the window's words at the end."""

    def run(path):
        seen = {}
        told = []
        monkeypatch.setattr(window_module.Dialogs, "tell", lambda self, parent, title, message: told.append(message))

        def look():
            shown = [one for one in QApplication.topLevelWidgets() if one.isVisible()]
            found = next((one for one in shown if isinstance(one, window_module.Window)), None)
            if found is not None and found.desk.assessment is not None and found.desk.assessment.response is not None:
                seen["title"], seen["words"] = found.desk.sheet.title, found.what_it_does.words.text()
                timer.stop()
                found.close()

        timer = QTimer()
        timer.timeout.connect(look)
        timer.start(20)
        assert open_window(path) == 0
        return seen, told

    QSettings.setPath(QSettings.Format.NativeFormat, QSettings.Scope.UserScope, str(tmp_path))
    sheet = qapp.styleSheet()
    yield run
    qapp.setStyleSheet(sheet)


def test_it_opens_on_the_demo_sheet(opened):
    seen, told = opened(None)
    assert seen == {"title": "Label unwinder", "words": "Both loops hold"}
    assert told == []


def test_it_opens_on_a_sheet_of_ones_own(opened, tmp_path, demo_texts):
    path = tmp_path / "drum.bench.toml"
    path.write_text(demo_texts["sieve-drum"], encoding="utf-8")
    seen, _ = opened(str(path))
    assert seen["title"] == "Sieve drum"


def test_a_sheet_that_cannot_be_read_is_told_over_the_demo(opened, tmp_path):
    seen, told = opened(str(tmp_path / "none.bench.toml"))
    assert seen["title"] == "Label unwinder"
    assert "no such file" in told[0]
