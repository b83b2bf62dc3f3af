"""The list without its widgets: what is in the sheet, what is only here, and what is said of each."""

from pathlib import Path

import pytest

from gainbench.model import Experiment, LogColumn, SignalName
from gainbench_app.pages.evidence.logs import Logs
from gainbench_app.what_it_does.spans import Span


@pytest.fixture
def logs(qtbot, desk):
    found = Logs(desk)
    found.look_again()
    yield found
    found.close()


def settle(qtbot, logs):
    qtbot.waitUntil(lambda: not logs.reading, timeout=20_000)


def added(qtbot, logs, path):
    logs.add(path)
    settle(qtbot, logs)


def test_a_log_comes_into_the_sheet_with_what_is_guessed(qtbot, desk, logs, driven_log):
    added(qtbot, logs, driven_log)
    (one,) = desk.sheet.evidence
    assert one.experiment is Experiment.DRIVEN
    assert [column.signal for column in one.columns] == [
        SignalName.TIME,
        SignalName.VOLTAGE,
        SignalName.CURRENT,
        SignalName.SPEED,
    ]
    entry = logs.chosen
    assert entry.index == 0
    assert logs.overview(entry).rows == 1000
    assert logs.problem(entry) == ""
    desk.undo()
    assert logs.entries == ()
    desk.redo()
    assert len(logs.entries) == 1


def test_a_log_is_added_once(qtbot, desk, logs, driven_log):
    said = []
    logs.refused.connect(said.append)
    added(qtbot, logs, driven_log)
    added(qtbot, logs, driven_log)
    assert len(desk.sheet.evidence) == 1
    assert said == ["run-07.csv is in the list already"]


def test_columns_that_say_nothing_wait_beside_the_sheet(qtbot, desk, logs, tmp_path):
    path = tmp_path / "odd.csv"
    rows = "\n".join(f"{k},{k * k},{k % 7}" for k in range(100))
    path.write_text(f"aa,bb,cc\n{rows}\n", encoding="utf-8")
    added(qtbot, logs, path)
    entry = logs.chosen
    assert entry.index is None
    assert desk.sheet.evidence == ()
    assert logs.problem(entry).startswith("not in the sheet yet")
    logs.choose_experiment(entry, Experiment.COAST_DOWN)
    columns = logs.survey(logs.chosen).columns
    assert "mass" in logs.map_column(logs.chosen, columns[0], signal=SignalName.TIME, unit="kg", scale=1.0)
    assert logs.chosen.index is None
    assert logs.map_column(logs.chosen, columns[0], signal=SignalName.TIME, unit="ms", scale=1.0) == ""
    (one,) = desk.sheet.evidence
    assert one.experiment is Experiment.COAST_DOWN
    assert one.columns == (LogColumn(signal=SignalName.TIME, column="aa", unit="ms"),)
    assert logs.chosen.index == 0
    assert "last" not in logs.unmap_column(logs.chosen, columns[1])
    assert "remove the log" in logs.unmap_column(logs.chosen, columns[0])


def test_a_draft_can_be_removed(qtbot, desk, logs, tmp_path):
    path = tmp_path / "odd.csv"
    path.write_text("aa,bb\n" + "\n".join(f"{k},{k % 7}" for k in range(100)), encoding="utf-8")
    added(qtbot, logs, path)
    logs.remove(logs.chosen)
    assert logs.entries == ()


@pytest.mark.parametrize(
    ("name", "content", "why"),
    [
        ("picture.csv", b"\x89PNG\r\n", "this is a picture"),
        ("empty.csv", b"", "the file is empty"),
        ("gone.csv", None, "no such file"),
    ],
)
def test_what_is_no_log_is_refused_and_the_rest_stays(qtbot, desk, logs, driven_log, tmp_path, name, content, why):
    added(qtbot, logs, driven_log)
    said = []
    logs.refused.connect(said.append)
    path = tmp_path / name
    if content is not None:
        path.write_bytes(content)
    added(qtbot, logs, path)
    assert len(said) == 1
    assert said[0].startswith("nothing was added: ")
    assert why in said[0]
    assert len(desk.sheet.evidence) == len(logs.entries) == 1


def test_a_file_that_goes_and_comes_back_is_noticed(qtbot, logs, driven_log):
    added(qtbot, logs, driven_log)
    content = driven_log.read_bytes()
    driven_log.unlink()
    logs.look_again()
    settle(qtbot, logs)
    assert "no such file" in logs.problem(logs.chosen)
    driven_log.write_bytes(content.rpartition(b"\n0.4")[0] + b"\n")
    logs.look_again()
    settle(qtbot, logs)
    assert logs.problem(logs.chosen) == ""
    assert 700 < logs.overview(logs.chosen).rows < 1000


def test_spans_are_of_this_window_and_go_with_the_sheet(qtbot, desk, logs, driven_log, demo_texts):
    added(qtbot, logs, driven_log)
    before = desk.state.document.text()
    logs.choose_span(logs.chosen, Span(start=0.1, stop=0.3))
    assert logs.span(logs.chosen) == Span(start=0.1, stop=0.3)
    assert desk.state.document.text() == before
    logs.choose_span(logs.chosen, Span(start=0.0, stop=9.0))
    assert logs.span(logs.chosen) is None
    logs.choose_span(logs.chosen, Span(start=0.1, stop=0.3))
    desk.open_text(demo_texts["sieve-drum"], "drum.bench.toml")
    assert logs.entries == ()
    added(qtbot, logs, driven_log)
    assert logs.span(logs.chosen) is None


def test_paths_are_relative_to_a_sheet_that_has_a_file(qtbot, desk, logs, driven_log, tmp_path):
    desk.save(tmp_path / "motor.bench.toml")
    added(qtbot, logs, driven_log)
    assert desk.sheet.evidence[0].log == "run-07.csv"
    assert logs.chosen.file == Path(tmp_path / "run-07.csv")
    assert logs.overview(logs.chosen) is not None


def test_moving_a_slider_does_not_rebuild_the_list(qtbot, desk, logs, driven_log):
    added(qtbot, logs, driven_log)
    entries = logs.entries
    desk.move("aims.speed.crossover", 300.0)
    assert logs.entries is entries
