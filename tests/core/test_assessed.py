"""The sampled loop behind an assessment is the one its figures were read from."""

from __future__ import annotations

from dataclasses import replace

from gainbench.assess import assess
from gainbench.assessed import assessed_loop
from gainbench.margins import read_loop
from gainbench.model import DesignMethod
from rigs import fixed_sheet


def test_figures_are_those_of_the_loop():
    assessment = assess(fixed_sheet("sine"))
    for name, own in (("current", assessment.current), ("speed", assessment.speed)):
        assert read_loop(assessed_loop(assessment, name), own.gains).figures == own.figures


def test_there_is_no_speed_loop_around_nothing():
    sheet = fixed_sheet("plain")
    current = replace(sheet.aims.current, method=DesignMethod.CROSSOVER_MARGIN, crossover=3e4)
    assessment = assess(replace(sheet, aims=replace(sheet.aims, current=current)))
    assert assessed_loop(assessment, "speed") is None
    assert assessed_loop(assessment, "current") is not None
