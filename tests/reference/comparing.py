"""How the library's results are held against the reference model's: one tolerance per quantity, with its reason."""

from __future__ import annotations

from dataclasses import fields

import numpy as np

from gainbench.assess import Assessment
from gainbench.model import Sheet
from gainbench.results import LockedStep, LoopAssessment, LoopFigures
from oracle_bench import Bench, read_bench
from oracle_design import Side
from oracle_figures import Figures, Step
from oracle_loops import PI
from oracle_response import History, outcome, respond
from quantities import assert_quantity

LOOPS = "two routes to the same loop"
SIGNALS = ("speed", "load_speed", "current", "current_reference", "voltage")
LOOP_TOLERANCES: tuple[tuple[str, float, float, str], ...] = (
    ("crossover_hz", 1e-6, 0.0, "Hz"),
    ("phase_margin_deg", 0.0, 1e-3, "deg"),
    ("delay_margin_s", 1e-5, 0.0, "s"),
    ("gain_margin_db", 0.0, 1e-3, "dB"),
    ("gain_reduction_db", 0.0, 1e-3, "dB"),
    ("peak_sensitivity", 1e-4, 0.0, "1"),
    ("bandwidth_hz", 1e-6, 0.0, "Hz"),
)
"""Name, relative and absolute tolerance, unit."""


def compare_loop(mine: LoopAssessment, other: Side) -> None:
    """Gains, stability and figures of one loop."""
    assert (mine.gains is None) == (other.gains is None)
    if mine.gains is None or other.gains is None:
        assert mine.refusal is not None
        return
    assert_quantity(mine.gains.kp, other.gains.kp, rtol=1e-6, unit="SI", why=LOOPS)
    assert_quantity(mine.gains.ki, other.gains.ki, rtol=1e-6, unit="SI", why=LOOPS)
    assert mine.figures is not None
    assert mine.figures.stable == other.stable
    if not other.stable:
        unsaid = [field.name for field in fields(mine.figures) if field.name != "stable"]
        assert all(getattr(mine.figures, name) is None for name in unsaid)
        return
    assert other.figures is not None
    compare_figures(mine.figures, other.figures)


def compare_figures(mine: LoopFigures, other: Figures) -> None:
    """The figures of a stable loop."""
    for name, rtol, atol, unit in LOOP_TOLERANCES:
        got, wanted = getattr(mine, name), getattr(other, name)
        assert (got is None) == (wanted is None), f"{name}: {got} against {wanted}"
        if wanted is not None:
            assert_quantity(got, wanted, rtol=rtol, atol=atol, unit=unit, why=f"{name}: {LOOPS}")


def compare_step(mine: LockedStep | None, other: Step | None) -> None:
    """The locked-rotor step."""
    assert (mine is None) == (other is None)
    if mine is None or other is None:
        return
    assert (mine.rise_s is None) == (other.rise_s is None)
    if mine.rise_s is not None and other.rise_s is not None:
        assert_quantity(mine.rise_s, other.rise_s, rtol=1e-6, unit="s", why="both are closed forms between ticks")
    assert mine.overshoot_percent is not None
    assert_quantity(
        mine.overshoot_percent, other.overshoot_percent, atol=1e-5, unit="%", why="when it is taken as settled"
    )


def starts(sheet: Sheet, bench: Bench) -> bool:
    """Whether the equilibrium that the duty starts from is within the limits."""
    current = bench.load_at_shaft(sheet.rig.train.load_torque, 0) / bench.Kt
    return abs(current) <= bench.current_limit and abs(bench.R * current) <= bench.voltage_limit


def answer(found: Assessment) -> tuple[Bench, History]:
    """The reference model's response with the library's gains."""
    sheet, bench = found.sheet, read_bench(found.sheet)
    assert found.current.gains is not None
    assert found.speed.gains is not None
    return bench, respond(
        bench,
        PI(kp=found.current.gains.kp, ki=found.current.gains.ki),
        PI(kp=found.speed.gains.kp, ki=found.speed.gains.ki),
        firmware=sheet.aims.firmware,
        duty=sheet.duty,
        load_torque=sheet.rig.train.load_torque,
        weight=sheet.aims.speed.reference_weight,
    )


def compare_response(found: Assessment) -> None:
    """Signal by signal and tick by tick, then the figures.

    Measured at 1e-11 of the largest value. An encoder that put one count into another tick would show at once; the
    chance of an angle within rounding of an edge is one in a million for all sheets together.
    """
    bench, history = answer(found)
    assert found.response is not None
    trace = found.response.trace
    assert_quantity(trace.time, history.time, atol=1e-12, unit="s", why="rounding")
    assert_quantity(trace.reference, history.reference, atol=1e-9, rtol=1e-9, unit="rad/s", why="rounding")
    for name in SIGNALS:
        mine, other = getattr(trace, name), getattr(history, name)
        # A body that balances at rest moves by rounding alone.
        still = 1e-11 * bench.voltage_limit / bench.Ke
        atol = 1e-8 * float(np.max(np.abs(other))) + still
        assert_quantity(mine, other, atol=atol, unit="SI", why=f"{name}: rounding over the duty")
    wanted, got = outcome(history, bench, found.sheet.duty), found.response.figures
    for field in fields(got):
        mine, other = getattr(got, field.name), getattr(wanted, field.name)
        assert (mine is None) == (other is None), f"{field.name}: {mine} against {other}"
        if other is not None:
            assert_quantity(mine, other, rtol=1e-6, atol=1e-9, unit="SI", why=f"{field.name}: rounding over the duty")
