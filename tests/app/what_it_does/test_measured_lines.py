import numpy as np
import pytest

from gainbench.model import SignalName
from gainbench.sheetfile import read_sheet
from gainbench_app.what_it_does.measured_lines import measured_lines, value_at
from gainbench_app.what_it_does.measured_logs import LogReader, Request
from gainbench_app.what_it_does.spans import Span


@pytest.fixture
def step(bench, evidence):
    path = bench(evidence["step"])
    sheet = read_sheet(path).sheet
    return LogReader().read(Request(sheet=sheet, path=path, predicted=False)).steps[0], sheet.duty


def lines_of(step, duty, *, span, columns=600):
    return measured_lines((step,), duty=duty, span=span, speed_size=2.0, columns=columns, bead=14.0)


def test_lines_are_the_log_in_the_units_of_the_axes_where_its_step_begins_with_the_dutys(step):
    from dataclasses import replace

    measured, duty = step
    later = replace(duty, reference_at=duty.reference_at + 0.03)
    lines = lines_of(measured, later, span=Span(start=0.04, stop=0.09))
    assert [len(one) for one in lines] == [1, 1, 1]
    for (line,), signal, size in zip(lines, ("speed", "current", "voltage"), (2.0, 1.0, 1.0), strict=True):
        values = measured.step.signals[SignalName(signal)] / size
        np.testing.assert_allclose(line.y, np.interp(line.x - 0.03, measured.step.time, values), rtol=1e-9, atol=1e-9)
        np.testing.assert_allclose(line.bead_y, np.interp(line.bead_x, line.x, line.y), rtol=1e-9, atol=1e-9)
        assert line.lowest == line.y.min()
        assert line.highest == line.y.max()
    (speed,), *_ = lines
    moved = speed.x[np.flatnonzero(speed.y > 0.1 * speed.y.max())[0]]
    assert moved == pytest.approx(later.reference_at, abs=3e-3)


def test_no_peak_is_lost_in_few_columns_and_beads_keep_apart(step):
    measured, duty = step
    whole = Span(start=0.0, stop=0.45)
    *_, (voltage,) = lines_of(measured, duty, span=whole, columns=60)
    assert voltage.x.size <= 2 * 60 + 2
    assert voltage.highest == measured.step.signals[SignalName.VOLTAGE].max()
    assert np.diff(voltage.bead_x).min() > 0.45 * 14.0 / 60 - 1e-3


def test_outside_the_log_there_is_no_line_and_no_value(step):
    measured, duty = step
    assert lines_of(measured, duty, span=Span(start=0.3, stop=0.4)) == ((), (), ())
    assert value_at(measured, SignalName.SPEED, 0.3, duty=duty) is None
    assert value_at(measured, SignalName.TORQUE, 0.1, duty=duty) is None
    assert value_at(measured, SignalName.SPEED, 0.2, duty=duty) == pytest.approx(157.1, abs=2.0)
