"""Frequency responses of a simulated closed loop over the predicted ones."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from gainbench.errors import LogError
from gainbench.evidence.frequency_response import COHERENT, Path, check_frequency_response
from gainbench.evidence.log import Log
from gainbench.model import Sheet, SignalName
from gainbench.sheetfile import parse_sheet
from gainbench_resources import demo_sheet
from loop_logs import closed_loop, excitation
from quantities import assert_quantity

MADE_OF = {
    Path.SPEED_LOOP: ("speed_reference", "speed"),
    Path.SPEED_PLANT: ("speed_reference", "current_reference", "speed"),
}


@pytest.fixture(scope="module")
def sheet() -> Sheet:
    text = demo_sheet("label-unwinder").read_text(encoding="utf-8")
    found = parse_sheet(text, "label-unwinder.bench.toml").sheet
    # Without Coulomb friction: a frequency response is that of something linear.
    return replace(found, rig=replace(found.rig, machine=replace(found.rig.machine, coulomb_friction=0.0)))


def log_of(columns: dict[str, np.ndarray], only: tuple[str, ...]) -> Log:
    return Log(name="f.csv", time=columns["time"], signals={SignalName(name): columns[name] for name in only})


@pytest.mark.parametrize("kind", ["chirp", "multisine", "noise"])
@pytest.mark.parametrize("noise", [0.0, 0.03])
def test_where_it_is_coherent_it_is_what_was_predicted(sheet, kind, noise):
    rate = sheet.rig.stage.speed_rate
    columns = closed_loop(sheet, excitation(kind, rate), noise=noise)
    for path, only in MADE_OF.items():
        found = check_frequency_response(sheet, log_of(columns, only))
        assert found.path is path
        sure = found.coherence > COHERENT
        assert sure.sum() >= 10
        ratio = found.measured[sure] / found.predicted[sure]
        assert_quantity(20.0 * np.log10(np.abs(ratio)), 0.0, atol=0.2, unit="dB", why="what is promised")
        assert_quantity(np.degrees(np.angle(ratio)), 0.0, atol=2.0, unit="deg", why="what is promised")
        assert found.frequency_hz[sure][-1] > 10.0 * found.frequency_hz[sure][0]


def test_the_log_may_be_faster_than_the_loop(sheet):
    columns = closed_loop(sheet, excitation("noise", sheet.rig.stage.speed_rate), noise=0.0)
    # Every value held four times, as a logger at four times the rate has it.
    fine = {name: np.repeat(values, 4) for name, values in columns.items()}
    fine["time"] = np.arange(fine["speed"].size) / (4.0 * sheet.rig.stage.speed_rate)
    found = check_frequency_response(sheet, log_of(fine, MADE_OF[Path.SPEED_LOOP]))
    ratio = found.measured / found.predicted
    assert_quantity(20.0 * np.log10(np.abs(ratio)), 0.0, atol=0.05, unit="dB", why="the same rows, picked again")


def test_another_inertia_shows(sheet):
    columns = closed_loop(sheet, excitation("noise", sheet.rig.stage.speed_rate), noise=0.0)
    machine = replace(sheet.rig.machine, rotor_inertia=2.0 * sheet.rig.machine.rotor_inertia)
    other = replace(sheet, rig=replace(sheet.rig, machine=machine))
    found = check_frequency_response(other, log_of(columns, MADE_OF[Path.SPEED_PLANT]))
    assert np.abs(20.0 * np.log10(np.abs(found.measured / found.predicted))).max() > 1.0


def test_what_cannot_be_told_is_refused(sheet):
    time = np.arange(4000) * 1e-3
    flat = {SignalName.SPEED: np.zeros(4000), SignalName.SPEED_REFERENCE: np.zeros(4000)}
    with pytest.raises(LogError, match="excited"):
        check_frequency_response(sheet, Log(name="flat.csv", time=time, signals=flat))
    with pytest.raises(LogError, match="map a pair"):
        check_frequency_response(sheet, Log(name="one.csv", time=time, signals={SignalName.SPEED: time}))
