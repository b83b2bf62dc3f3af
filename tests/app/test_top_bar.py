import time

import pytest
from PySide6.QtWidgets import QMenu

from gainbench_app.top_bar import TopBar


@pytest.fixture
def bar(qtbot, desk):
    menu = QMenu()
    found = TopBar(desk, menu)
    qtbot.addWidget(found)
    qtbot.addWidget(menu)
    return found


def test_it_tells_since_when_there_is_unsaved_work(bar, desk, clock):
    assert bar.saved.text() == "demo sheet, not in a file"
    clock[0] += 3600.0
    desk.set_values({"machine.inductance": "0.9 mH"})
    assert bar.saved.text() == f"unsaved since {time.strftime('%H:%M', time.localtime(clock[0]))}"
    desk.undo()
    assert bar.saved.text() == "demo sheet, not in a file"


def test_a_title_that_is_refused_is_marked(bar, desk):
    desk.set_values({"title": "  "})
    assert bar.title.property("wrong") is True
    assert "empty" in bar.title.toolTip()


def test_one_button_leads_to_the_evidence_and_back(bar):
    assert bar.evidence.text() == "Evidence"
    bar.show_evidence(True)
    assert bar.evidence.text() == "Back to tuning"
    assert "Esc" in bar.evidence.toolTip()


def test_the_handover_is_shut_and_opened(bar):
    bar.show_handover("no handover: because")
    assert not bar.handover.isEnabled()
    assert bar.handover.accessibleDescription() == "no handover: because"
    bar.show_handover("")
    assert bar.handover.isEnabled()
    assert bar.reason.text() == ""
