"""An identification as JSON and as text."""

from __future__ import annotations

import io
import json

from rich.console import Console

from gainbench.evidence.estimate import Estimate, EstimateName, Identification, RunReport
from gainbench.identify_report import identification_json, print_identification
from gainbench.model import Experiment

ONE = Estimate(value=0.6, low=0.59, high=0.61, run_low=0.57, run_high=0.63)
RUN = RunReport(log="a\x1b[2J.csv", experiment=Experiment.DRIVEN, fit_percent=98.5, remarks=("a remark",))
FOUND = Identification(estimates={EstimateName.RESISTANCE: ONE}, regression={EstimateName.RESISTANCE: ONE}, runs=(RUN,))


def test_the_shape_of_the_json_is_the_contracts():
    data = json.loads(json.dumps(identification_json(FOUND), allow_nan=False))
    assert data["format"] == 1
    assert set(data) == {"format", "estimates", "regression", "runs"}
    keys = {"value", "unit", "low", "high", "run_low", "run_high"}
    assert set(data["estimates"]["resistance"]) == keys == set(data["regression"]["resistance"])
    assert data["estimates"]["resistance"]["unit"] == "ohm"
    assert data["runs"] == [{"log": RUN.log, "experiment": "driven", "fit_percent": 98.5, "remarks": ["a remark"]}]


def printed(found: Identification) -> str:
    out = io.StringIO()
    print_identification(found, Console(file=out, width=100, highlight=False, markup=False))
    return out.getvalue()


def test_people_read_both_intervals_and_every_remark():
    text = printed(FOUND)
    assert "resistance" in text
    assert "+/- 0.01, between runs +/- 0.03" in text
    assert "a remark" in text
    assert "\x1b" not in text


def test_no_estimates_are_said():
    assert "none" in printed(Identification(estimates={}, regression={}, runs=(RUN,)))
