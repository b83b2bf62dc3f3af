"""The findings: statements in sight, reasons one press away, and the way to what they ask to move."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtWidgets import QPushButton, QScrollArea

from gainbench.results import Level
from gainbench_app.what_we_ask.findings import FindingsCard
from gainbench_resources import demo_sheet_names

LEFT_BUTTON = Qt.MouseButton.LeftButton
SPACE = Qt.Key.Key_Space


@pytest.fixture
def card(qtbot, desk, appearance):
    found = FindingsCard(desk, appearance)
    qtbot.addWidget(found)
    found.resize(288, 400)
    with qtbot.waitExposed(found):
        found.show()
    yield found
    found.hide()


def index_of(card, words):
    return next(number for number, one in enumerate(card.shown) if words in one.title)


@pytest.mark.parametrize("name", demo_sheet_names())
def test_all_statements_of_a_demo_are_in_sight_in_the_usual_window(window, desk, demo_texts, qapp, name):
    desk.open_text(demo_texts[name], f"{name}.bench.toml")
    desk.compute_now()
    window.resize(1400, 900)
    area = window.right.findChild(QScrollArea)
    card = window.what_we_ask.findings
    for _ in range(3):
        qapp.sendPostedEvents()
        qapp.processEvents()
    assert len(card.shown) == len(desk.assessment.findings) >= 2
    for number in range(len(card.shown)):
        title = card.row(number).title
        bottom = title.mapTo(area.viewport(), QPoint(0, title.height())).y()
        assert title.height() >= 15
        assert bottom <= area.viewport().height(), title.text()
        # Nothing is cut: the row is as high as its statement.
        assert card.row(number).height() >= title.height()


def test_the_space_bar_and_a_click_open_and_close(card, qtbot):
    row = card.row(0)
    assert row.reason.isHidden()
    assert row.accessibleName().endswith("closed")
    row.setFocus()
    qtbot.keyClick(row, SPACE)
    assert row.reason.isVisible()
    # All rows stand in the same column, open or not.
    assert (row.title.x(), row.title.width()) == (card.row(1).title.x(), card.row(1).title.width())
    assert row.way.isVisible()
    assert row.accessibleName().endswith("open")
    assert row.finding.advice.rstrip(".") in row.accessibleDescription()
    qtbot.mouseClick(row, LEFT_BUTTON)
    assert row.reason.isHidden()


def test_the_reason_is_told_to_a_screen_reader_while_it_is_closed(card):
    row = card.row(0)
    assert not row.is_open
    assert row.finding.title in row.accessibleName()
    assert row.accessibleName().startswith("thin: ")
    assert row.finding.reason[1:] in row.accessibleDescription()
    assert "Return goes to the duty's reference ramp" in row.accessibleDescription()


def test_return_and_the_way_lead_there(card, qtbot):
    heard = []
    card.followed.connect(heard.append)
    row = card.row(index_of(card, "encoder count"))
    row.setFocus()
    qtbot.keyClick(row, Qt.Key.Key_Return)
    assert not row.is_open
    qtbot.keyClick(row, SPACE)
    assert row.way.text() == "go to the stage's speed window"
    qtbot.mouseClick(row.way, LEFT_BUTTON)
    assert heard == ["stage.speed_window"] * 2
    assert row.is_open


def test_what_is_open_stays_open_while_others_come_and_go(card, desk, qtbot):
    number = index_of(card, "encoder count")
    qtbot.mouseClick(card.row(number), LEFT_BUTTON)
    # The finding above it goes.
    desk.set_values({"duty.reference_ramp": "20000 rpm/s"})
    desk.compute_now()
    moved = index_of(card, "encoder count")
    assert moved < number
    assert [card.row(k).is_open for k in range(len(card.shown))] == [k == moved for k in range(len(card.shown))]


def test_what_breaks_is_open_until_it_is_closed(card, desk, qtbot):
    desk.set_values({"aims.speed.crossover": "900 Hz"})
    desk.compute_now()
    row = card.row(0)
    assert row.finding.level is Level.BREAKS
    assert row.is_open
    qtbot.mouseClick(row, LEFT_BUTTON)
    desk.set_values({"aims.speed.crossover": "901 Hz"})
    desk.compute_now()
    assert not row.is_open


def test_all_can_be_opened_and_closed_at_once(card, desk, qtbot, demo_texts):
    qtbot.mouseClick(card.all, LEFT_BUTTON)
    assert all(card.row(k).is_open for k in range(len(card.shown)))
    assert card.all.text() == "close all"
    qtbot.mouseClick(card.row(0), LEFT_BUTTON)
    assert card.all.text() == "open all"
    qtbot.mouseClick(card.row(0), LEFT_BUTTON)
    qtbot.mouseClick(card.all, LEFT_BUTTON)
    assert not any(card.row(k).is_open for k in range(len(card.shown)))
    qtbot.mouseClick(card.all, LEFT_BUTTON)
    desk.open_text(demo_texts["sieve-drum"], "drum.bench.toml")
    desk.compute_now()
    assert not any(card.row(k).is_open for k in range(len(card.shown)))


def test_a_key_brings_them_into_sight_in_a_low_window(window, qtbot):
    window.resize(1280, 720)
    row = window.what_we_ask.findings.row(0)
    qtbot.keyClick(window, Qt.Key.Key_5, Qt.KeyboardModifier.ControlModifier)
    assert row.hasFocus()
    assert not row.title.visibleRegion().isEmpty()


def test_numbers_stand_as_they_are_written(card):
    title = card.row(index_of(card, "current loop holds")).title.text()
    assert "60.0\N{DEGREE SIGN} of phase margin" in title
    assert "1.00\N{NO-BREAK SPACE}kHz" in title


def test_everything_can_be_reached_and_has_a_name(card):
    for one in card.findChildren(QPushButton):
        assert one.accessibleName() or not one.text()
        assert one.focusPolicy() & Qt.FocusPolicy.TabFocus
    assert card.row(0).focusPolicy() & Qt.FocusPolicy.TabFocus
