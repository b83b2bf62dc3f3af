"""The fit in its own process: it tells, it ends, it is stopped, and its failures are heard of."""

import io
import pickle

import pytest

from gainbench.model import Experiment
from gainbench_app.pages.evidence.fit_child import LENGTH_BYTES, write_message
from gainbench_app.pages.evidence.fit_job import FitJob
from gainbench_app.pages.evidence.fit_task import FitProgress, FitReport, FitRequest

PATIENCE_MS = 60_000


@pytest.fixture
def job(qapp):
    found = FitJob()
    yield found
    found.cancel()


def heard(job):
    told = []
    job.progressed.connect(lambda one: told.append(one))
    job.finished.connect(lambda one: told.append(one))
    job.failed.connect(lambda one: told.append(one))
    job.ended.connect(lambda: told.append("ended"))
    return told


def test_messages_say_how_long_they_are():
    out = io.BytesIO()
    write_message(out, {"a": 1})
    content = out.getvalue()
    assert int.from_bytes(content[:LENGTH_BYTES], "big") == len(content) - LENGTH_BYTES
    assert pickle.loads(content[LENGTH_BYTES:]) == {"a": 1}


def test_it_tells_its_steps_and_brings_its_report(qtbot, job, desk, driven_log, name_log):
    name_log(desk, driven_log, Experiment.DRIVEN)
    told = heard(job)
    with qtbot.waitSignal(job.finished, timeout=PATIENCE_MS):
        job.start(FitRequest(sheet=desk.sheet, files=(str(driven_log),), spans=(None,)))
        assert job.running
    assert not job.running
    progress = [one for one in told if isinstance(one, FitProgress)]
    assert [one.words.split()[0] for one in progress] == ["reading", "fitting", "putting", "laying"]
    report = told[-1]
    assert isinstance(report, FitReport)
    assert told[-2] == "ended"
    assert report.found.estimates


def test_a_stop_ends_it_at_once_and_nothing_more_is_heard(qtbot, job, desk, driven_log, name_log):
    name_log(desk, driven_log, Experiment.DRIVEN)
    told = heard(job)
    job.start(FitRequest(sheet=desk.sheet, files=(str(driven_log),), spans=(None,)))
    process = job._process
    qtbot.waitUntil(lambda: process.processId() > 0, timeout=PATIENCE_MS)
    job.cancel()
    assert not job.running
    assert told == ["ended"]
    assert process.state() is process.ProcessState.NotRunning
    job.cancel()
    assert told == ["ended"]


def test_what_breaks_it_is_heard_of(qtbot, job):
    told = heard(job)
    with qtbot.waitSignal(job.failed, timeout=PATIENCE_MS):
        job.start("no request")
    assert told[0] == "ended"
    assert told[1].startswith("the fit failed: AttributeError")


def test_an_interpreter_that_is_gone_is_heard_of(qtbot, job, monkeypatch):
    monkeypatch.setattr("sys.executable", "/nowhere/python")
    with qtbot.waitSignal(job.failed, timeout=PATIENCE_MS) as caught:
        job.start("no request")
    assert caught.args[0].startswith("the fit could not be started")
    assert not job.running
