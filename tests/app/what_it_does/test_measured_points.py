from dataclasses import replace

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.sheetfile import read_sheet
from gainbench_app.what_it_does.loop_marks import bode_curve
from gainbench_app.what_it_does.measured_logs import LogReader, Request
from gainbench_app.what_it_does.measured_points import LoopLog


def of(bench, entry):
    path = bench(entry)
    sheet = read_sheet(path).sheet
    found = LogReader().read(Request(sheet=sheet, path=path, predicted=False))
    return LoopLog(0, found.responses[0]), sheet


def beside(log, sheet):
    speed = assess(sheet, simulated=False).speed
    curve = bode_curve(speed.curve, speed.figures)
    return log.points(sheet, gains=speed.gains, curve=curve), curve


@pytest.mark.parametrize("what", ["closed", "plant"])
def test_points_lie_on_the_loop_that_was_simulated(bench, evidence, what):
    log, sheet = of(bench, evidence[what])
    points, curve = beside(log, sheet)
    sure = points.sure
    assert sure.sum() >= 15
    assert log.loop == "speed"
    told = [
        np.interp(points.frequency_hz[sure], curve.frequency_hz, one) for one in (curve.magnitude_db, curve.phase_deg)
    ]
    # Two seconds of noise, a hundredth of it from the sensor.
    np.testing.assert_allclose(points.magnitude_db[sure], told[0], atol=0.5)
    np.testing.assert_allclose(points.phase_deg[sure], told[1], atol=3.0)


def test_a_closed_loop_stays_and_a_plant_moves_with_the_gains(bench, evidence):
    faster = {}
    for what in ("closed", "plant"):
        log, sheet = of(bench, evidence[what])
        points, _ = beside(log, sheet)
        assert beside(log, sheet)[0] is points
        speed = replace(sheet.aims.speed, crossover=1.5 * sheet.aims.speed.crossover)
        moved, curve = beside(log, replace(sheet, aims=replace(sheet.aims, speed=speed)))
        faster[what] = moved is not points
        if what == "plant":
            told = np.interp(moved.frequency_hz[moved.sure], curve.frequency_hz, curve.magnitude_db)
            np.testing.assert_allclose(moved.magnitude_db[moved.sure], told, atol=0.5)
    assert faster == {"closed": False, "plant": True}


def test_what_would_not_be_exact_is_not_drawn(bench, evidence):
    log, sheet = of(bench, evidence["closed"])
    weighted = replace(sheet, aims=replace(sheet.aims, speed=replace(sheet.aims.speed, reference_weight=0.6)))
    assert beside(log, weighted)[0] is None
    assert "weight of 0.6" in log.refusal
    assert beside(log, sheet)[0] is not None
    assert log.refusal == ""
