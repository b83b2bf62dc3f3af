from dataclasses import replace

import pytest

from gainbench.model import Experiment
from gainbench.sheetfile import parse_sheet, read_sheet
from gainbench_app.what_it_does import measured_logs
from gainbench_app.what_it_does.measured_logs import LogReader, Request, waiting


@pytest.fixture
def reads(monkeypatch):
    """Names of the logs that were read."""
    found = []
    genuine = measured_logs.read_log

    def counted(path, columns):
        found.append(path.name)
        return genuine(path, columns)

    monkeypatch.setattr(measured_logs, "read_log", counted)
    return found


def request_of(path, **aims):
    sheet = read_sheet(path).sheet
    return Request(sheet=replace(sheet, aims=replace(sheet.aims, **aims)), path=path, predicted=True)


def test_a_log_is_read_once_until_its_file_changes(bench, evidence, reads):
    request = request_of(bench(evidence["step"], evidence["closed"]))
    reader = LogReader()
    first = reader.read(request)
    speed = replace(request.sheet.aims.speed, crossover=300.0)
    second = reader.read(request_of(request.path, speed=speed))
    assert reads == ["label-unwinder-step.csv", "noise.csv"]
    assert second.responses[0].response is first.responses[0].response
    assert second.steps[0].check.predicted_figures != first.steps[0].check.predicted_figures
    assert second.steps[0].check.measured_figures == first.steps[0].check.measured_figures
    log = request.path.parent / "noise.csv"
    log.write_text(log.read_text(encoding="utf-8") + "2.0,0,0,0\n", encoding="utf-8")
    reader.read(request)
    assert reads == ["label-unwinder-step.csv", "noise.csv", "noise.csv"]


def test_a_log_that_gives_nothing_says_why_and_leaves_the_others(bench, evidence, reads):
    path = bench(evidence["step"], evidence["closed"].replace("noise.csv", "lost.csv"))
    found = LogReader().read(request_of(path))
    assert len(found.steps) == 1
    (lost,) = found.unread_of(Experiment.FREQUENCY_RESPONSE)
    assert lost.name == "lost.csv"
    assert "there is no such file" in lost.reason
    (path.parent / "lost.csv").write_text("not a log", encoding="utf-8")
    reader = LogReader()
    for _ in range(2):
        assert reader.read(request_of(path)).unread[0].reason
    assert reads.count("lost.csv") == 1


def test_a_sheet_without_a_file_finds_the_demo_log(bench, evidence, demo_texts, tmp_path_factory, monkeypatch):
    monkeypatch.chdir(tmp_path_factory.mktemp("elsewhere"))
    sheet = parse_sheet(demo_texts["label-unwinder"] + evidence["step"] + evidence["closed"], "x.bench.toml").sheet
    found = LogReader().read(Request(sheet=sheet, path=None, predicted=False))
    assert found.steps[0].check is None
    assert found.steps[0].step.time.size > 100
    assert [one.name for one in found.unread] == ["noise.csv"]


def test_only_what_lies_over_a_prediction_is_read(bench, evidence):
    path = bench(evidence["step"].replace("step-check", "driven"), evidence["closed"])
    assert [one.name for one in waiting(read_sheet(path).sheet).unread] == ["noise.csv"]
