import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtWidgets import QWidget

from gainbench.model import Duty
from gainbench_app.what_it_does.duty_handles import SIDE_PX, DutyHandles, duty_times
from gainbench_app.widgets.scales import Range

LEFT_BUTTON = Qt.MouseButton.LeftButton
DUTY = Duty(reference_speed=100.0, length=1.0, reference_at=0.1, load_step=1.0, load_at=0.5, stop_at=0.8)


@pytest.fixture
def handles(qtbot, appearance):
    holder = QWidget()
    holder.resize(1000 + 2 * SIDE_PX, 40)
    qtbot.addWidget(holder)
    found = DutyHandles(appearance, holder)
    found.resize(1000 + 2 * SIDE_PX, found.sizeHint().height())
    found.show_times(duty_times(DUTY), Range(low=0.0, high=1.0, step=0.2))
    with qtbot.waitExposed(holder):
        holder.show()
    yield found
    holder.hide()


@pytest.fixture
def heard(handles):
    found = []
    handles.grabbed.connect(lambda path: found.append(("grabbed", path)))
    handles.moved.connect(lambda path, instant: found.append((path, instant)))
    handles.dropped.connect(lambda: found.append(("dropped", "")))
    handles.taken_back.connect(lambda: found.append(("taken back", "")))
    return found


def test_times_are_those_of_the_duty_within_its_rules():
    found = {one.path: one for one in duty_times(DUTY)}
    assert {path: one.at for path, one in found.items()} == {
        "duty.reference_at": 0.1,
        "duty.load_at": 0.5,
        "duty.stop_at": 0.8,
    }
    assert found["duty.reference_at"].latest == 0.8
    assert found["duty.stop_at"].earliest == 0.1
    assert found["duty.load_at"].latest == 1.0
    plain = duty_times(Duty(reference_speed=0.0, length=1.0, load_step=2.0))
    assert [(one.path, one.at) for one in plain] == [("duty.load_at", 0.5)]


def at(handles, seconds):
    return QPoint(round(SIDE_PX + 1000 * seconds), 12)


def test_a_handle_is_dragged(handles, heard, qtbot):
    qtbot.mousePress(handles, LEFT_BUTTON, pos=at(handles, 0.5) + QPoint(3, 0))
    qtbot.mouseMove(handles, at(handles, 0.62))
    qtbot.mouseRelease(handles, LEFT_BUTTON, pos=at(handles, 0.62))
    assert heard == [
        ("grabbed", "duty.load_at"),
        ("duty.load_at", pytest.approx(0.62, abs=0.002)),
        ("dropped", ""),
    ]


def test_a_handle_stays_within_the_rules(handles, heard, qtbot):
    qtbot.mousePress(handles, LEFT_BUTTON, pos=at(handles, 0.1))
    qtbot.mouseMove(handles, at(handles, 0.95))
    qtbot.mouseRelease(handles, LEFT_BUTTON, pos=at(handles, 0.95))
    assert heard[1] == ("duty.reference_at", 0.8)


def test_beside_the_handles_nothing_is_taken(handles, heard, qtbot):
    qtbot.mousePress(handles, LEFT_BUTTON, pos=at(handles, 0.3))
    qtbot.mouseMove(handles, at(handles, 0.4))
    qtbot.mouseRelease(handles, LEFT_BUTTON, pos=at(handles, 0.4))
    assert heard == []


def test_keys_choose_and_move(handles, heard, qtbot):
    assert handles.chosen.path == "duty.reference_at"
    qtbot.keyClick(handles, Qt.Key.Key_Down)
    assert handles.chosen.path == "duty.load_at"
    assert "load is chosen" in handles.accessibleDescription()
    qtbot.keyClick(handles, Qt.Key.Key_Right)
    qtbot.keyClick(handles, Qt.Key.Key_Left, Qt.KeyboardModifier.ShiftModifier)
    qtbot.keyClick(handles, Qt.Key.Key_Escape)
    assert heard == [
        ("grabbed", "duty.load_at"),
        ("duty.load_at", pytest.approx(0.51)),
        ("duty.load_at", pytest.approx(0.499)),
        ("taken back", ""),
    ]
    qtbot.keyClick(handles, Qt.Key.Key_Up)
    qtbot.keyClick(handles, Qt.Key.Key_Up)
    assert handles.chosen.path == "duty.stop_at"


def test_out_of_sight_they_cannot_be_taken(handles, heard, qtbot):
    handles.show_times(duty_times(DUTY), Range(low=0.4, high=0.6, step=0.05))
    qtbot.mousePress(handles, LEFT_BUTTON, pos=QPoint(SIDE_PX, 12))
    qtbot.mouseRelease(handles, LEFT_BUTTON, pos=QPoint(SIDE_PX, 12))
    assert heard == []
    qtbot.mousePress(handles, LEFT_BUTTON, pos=QPoint(SIDE_PX + 500, 12))
    assert heard == [("grabbed", "duty.load_at")]
    qtbot.mouseRelease(handles, LEFT_BUTTON, pos=QPoint(SIDE_PX + 500, 12))


def test_they_are_painted_and_told(handles):
    with_them = handles.grab().toImage()
    handles.show_times((), Range(low=0.0, high=1.0, step=0.2))
    assert handles.grab().toImage() != with_them
    assert handles.accessibleDescription() == ""
    assert handles.chosen is None
