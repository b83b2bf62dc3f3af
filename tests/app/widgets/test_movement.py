import pytest
from PySide6.QtCore import QObject

from gainbench_app.widgets.movement import REST_MS, Movement


@pytest.fixture
def told(qapp):
    """A movement, and what it tells."""
    owner = QObject()
    movement = Movement(owner)
    heard = []
    for name in ("grabbed", "dropped", "taken_back"):
        getattr(movement, name).connect(lambda name=name: heard.append(name))
    return owner, movement, heard


def test_a_press_and_its_release_are_one_movement(told):
    _, movement, heard = told
    movement.press()
    assert movement.by_hand
    assert movement.under_way
    movement.release()
    movement.release()
    assert heard == ["grabbed", "dropped"]
    assert not movement.under_way


def test_keys_that_follow_each_other_are_one_movement(told, qtbot):
    _, movement, heard = told
    for _ in range(3):
        movement.nudge()
    assert heard == ["grabbed"]
    qtbot.waitUntil(lambda: heard == ["grabbed", "dropped"], timeout=10 * REST_MS)


def test_a_press_ends_what_keys_began(told):
    _, movement, heard = told
    movement.nudge()
    movement.press()
    assert heard == ["grabbed", "dropped", "grabbed"]
    movement.finish()
    assert not movement.by_hand


def test_it_can_be_taken_back_once(told):
    _, movement, heard = told
    assert not movement.take_back()
    movement.press()
    assert movement.take_back()
    assert not movement.take_back()
    movement.release()
    assert heard == ["grabbed", "taken_back"]
