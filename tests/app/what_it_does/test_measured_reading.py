import threading
from types import SimpleNamespace

import pytest
from PySide6.QtCore import Qt

from gainbench.sheetfile import remove_evidence
from gainbench_app.what_it_does.measured_logs import LogReader, Measurements
from gainbench_app.what_it_does.measured_reading import MeasuredReading


@pytest.fixture
def held(monkeypatch):
    """Readings that wait for the test, and the requests that were read."""

    found = SimpleNamespace(gate=threading.Event(), requests=[])
    genuine = LogReader.read

    def read(reader, request):
        found.requests.append(request)
        assert found.gate.wait(10.0)
        return genuine(reader, request)

    monkeypatch.setattr(LogReader, "read", read)
    yield found
    found.gate.set()


def test_without_evidence_nothing_runs(qapp, desk):
    reading = MeasuredReading(desk)
    desk.move("aims.speed.crossover", 300.0)
    desk.compute_now()
    assert not reading.busy
    assert reading.found == Measurements()


def test_reading_leaves_the_window_free_and_the_newest_evidence_wins(qtbot, desk, bench, evidence, held):
    desk.open_path(bench(evidence["step"], evidence["closed"]))
    reading = MeasuredReading(desk)
    assert [one.name for one in reading.found.unread] == ["label-unwinder-step.csv", "noise.csv"]
    assert not any(one.reason for one in reading.found.unread)
    desk.edit(lambda document: remove_evidence(document, 0))
    desk.edit(lambda document: remove_evidence(document, 0))
    desk.undo()
    assert [one.name for one in reading.found.unread] == ["noise.csv"]
    held.gate.set()
    qtbot.waitUntil(lambda: not reading.busy)
    assert len(held.requests) == 2
    assert not reading.found.steps
    assert len(reading.found.responses) == 1


def test_gains_are_held_against_the_log_when_the_hand_rests(qtbot, desk, bench, evidence, held):
    held.gate.set()
    desk.open_path(bench(evidence["step"]))
    reading = MeasuredReading(desk)
    qtbot.waitUntil(lambda: not reading.busy)
    before = reading.found.steps[0]
    desk.begin_gesture("aims.speed.crossover")
    for crossover in (300.0, 320.0, 340.0):
        desk.move("aims.speed.crossover", crossover)
        desk.compute_now()
        assert reading.found.steps[0] is before
    assert len(held.requests) == 1
    desk.end_gesture()
    qtbot.waitUntil(lambda: not reading.busy)
    assert len(held.requests) == 2
    assert reading.found.steps[0].check.predicted_figures != before.check.predicted_figures


def test_files_are_looked_at_again_when_the_user_comes_back(qtbot, qapp, desk, bench, evidence, held):
    held.gate.set()
    path = bench(evidence["step"].replace("label-unwinder-step", "later"))
    desk.open_path(path)
    reading = MeasuredReading(desk)
    qtbot.waitUntil(lambda: not reading.busy)
    assert "no such file" in reading.found.unread[0].reason
    (path.parent / "label-unwinder-step.csv").rename(path.parent / "later.csv")
    qapp.applicationStateChanged.emit(Qt.ApplicationState.ApplicationActive)
    qtbot.waitUntil(lambda: not reading.busy)
    assert reading.found.steps[0].name == "later.csv"


def test_another_sheet_takes_its_logs_along(qtbot, desk, bench, evidence, demo_texts, held):
    held.gate.set()
    desk.open_path(bench(evidence["step"]))
    reading = MeasuredReading(desk)
    qtbot.waitUntil(lambda: not reading.busy)
    desk.open_text(demo_texts["sieve-drum"], "sieve-drum.bench.toml")
    assert reading.found == Measurements()
