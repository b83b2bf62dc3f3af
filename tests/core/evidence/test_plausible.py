"""Estimates far off the sheet, and what would make them so."""

from __future__ import annotations

import math

import pytest

from gainbench.evidence.estimate import Estimate, EstimateName
from gainbench.evidence.plausible import off_the_sheet
from gainbench.plant import refer
from rigs import fixed_sheet

NAMES = (
    EstimateName.RESISTANCE,
    EstimateName.INDUCTANCE,
    EstimateName.BACK_EMF_CONSTANT,
    EstimateName.INERTIA,
)


def said(sheet, *factors: float) -> str:
    plant = refer(sheet.rig)
    believed = (plant.resistance, plant.inductance, plant.back_emf, plant.inertia)
    found = {
        name: Estimate(value=value * factor, low=0.0, high=0.0, run_low=0.0, run_high=0.0)
        for name, value, factor in zip(NAMES, believed, factors, strict=True)
    }
    return " | ".join(off_the_sheet(found, sheet, plant))


@pytest.mark.parametrize(
    ("factors", "cause"),
    [
        ((1.2, 900.0, 0.8, 1300.0), "the time"),
        ((0.05, 0.04, 0.03, 0.05), "the voltage"),
        ((1e-3, 1.3e-3, 1.1, 800.0), "the current"),
        ((0.9, 1.0, 0.1, 0.011), "speed or angle"),
    ],
)
def test_one_cause_that_explains_all(factors, cause):
    assert f"the unit or scale of {cause}" in said(fixed_sheet("plain"), *factors)


def test_no_one_cause():
    assert "look at the units and scales of the columns" in said(fixed_sheet("plain"), 10.0, 1.0, 0.1, 50.0)


def test_half_off_is_what_sheets_are():
    assert said(fixed_sheet("plain"), 1.5, 0.5, 1.5, 0.5) == ""


@pytest.mark.parametrize(
    ("factor", "words"), [(math.sqrt(2.0), "rms"), (1.0 / math.sqrt(3.0), "two lines"), (1.5, "3/2"), (1.1, "")]
)
def test_terms_of_a_sine_machine(factor, words):
    found = said(fixed_sheet("sine"), 1.0, 1.0, factor, 1.0)
    assert (words in found) if words else found == ""
