"""How long the response rests on its limits, how far it overshoots them, and what it gives back."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from gainbench.findings import thresholds
from gainbench.findings.case import Case
from gainbench.findings.demand import Demand, current_at_voltage, sheet_amperes, top_speed
from gainbench.findings.numbers import acceleration, amount, digits, percent, speed
from gainbench.results import Finding, Level, Response, Words
from gainbench.simulate.duty import schedule


def headroom_findings(case: Case, states: tuple[Demand, ...], *, reachable: bool) -> Iterator[Finding]:
    """Clamped current and voltage, current beyond its limit, and energy given back on stopping.

    Parameters
    ----------
    case : Case
        What is judged.
    states : tuple of Demand
        The steady states of the duty.
    reachable : bool
        Whether the duty can be held at all once it is steady.

    Yields
    ------
    Finding
        All of level ``thin``; none without a response.
    """
    if case.response is None:
        return
    yield from _clamped_current(case, case.response, reachable=reachable)
    yield from _clamped_voltage(case, case.response)
    yield from _peak(case, case.response)
    yield from _returned(case, case.response, states)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Part:
    """A stretch of the duty by what it asks: a run-up, a load, a stop."""

    name: str
    first: int
    """Its first tick."""


def _parts(case: Case) -> tuple[_Part, ...]:
    duty = case.sheet.duty
    plan = schedule(duty, case.sheet.rig.stage)
    parts = [_Part(name="start", first=0), _Part(name="run-up", first=plan.reference)]
    if duty.load_step != 0.0:
        parts.append(_Part(name="load", first=plan.load))
    if duty.stop_at is not None:
        parts.append(_Part(name="stop", first=plan.stop))
    return tuple(sorted(parts, key=lambda part: part.first))


def _clamped_current(case: Case, response: Response, *, reachable: bool) -> Iterator[Finding]:
    limited = response.figures.current_limited_s
    if limited <= 0.0:
        return

    def words() -> Words:
        asks, advice = _what_clamps(case, _most_clamped(case, response))
        limit = sheet_amperes(case.plant.current_limit, case.sheet.rig.machine)
        return Words(
            title=f"The current sits on its limit for {amount(limited, 's')}",
            reason=f"{asks} for more than {limit}; for that time the limit sets the pace, not the gains",
            advice=advice if reachable else "First ask for a duty that can be held",
        )

    yield Finding.on("duty", "current-clamped", level=Level.THIN, words=words)


def _most_clamped(case: Case, response: Response) -> str:
    """The part of the duty that has most ticks on the current limit."""
    parts, clamped = _parts(case), response.trace.current_clamped
    ends = [part.first for part in parts[1:]] + [clamped.shape[0]]
    counts = [int(np.count_nonzero(clamped[part.first : end])) for part, end in zip(parts, ends, strict=True)]
    return parts[counts.index(max(counts))].name


def _what_clamps(case: Case, part: str) -> tuple[str, str]:
    duty = case.sheet.duty
    if part == "run-up":
        ramped = duty.reference_ramp > 0.0
        asks = f"the ramp of {acceleration(duty.reference_ramp)} asks" if ramped else "the step of the reference asks"
        return asks, _ramp_advice(case, "reference_ramp", case.sheet.rig.train.load_torque, stopping=False)
    if part == "stop":
        ramped = duty.stop_ramp > 0.0
        asks = f"the stop at {acceleration(duty.stop_ramp)} asks" if ramped else "the sudden stop asks"
        load = case.sheet.rig.train.load_torque
        if duty.stop_at is not None and duty.load_time < duty.stop_at:
            load += duty.load_step
        return asks, _ramp_advice(case, "stop_ramp", load, stopping=True)
    if part == "load":
        step = amount(abs(duty.load_step), "N*m")
        return f"the load step of {step} asks", "Lower the load step, or raise the limit where the machine bears it"
    return "holding the load before the reference comes asks", "Lower load_torque, or ask for a slower speed loop"


def _ramp_advice(case: Case, key: str, load: float, *, stopping: bool) -> str:
    """Name the ramp that leaves the speed loop some of the current to act with; friction and load help a stop.

    At the end of a run-up the voltage may let through less current than the limit does.
    """
    plant, reference = case.plant, top_speed(case.sheet.duty)
    current = plant.current_limit if stopping else min(plant.current_limit, current_at_voltage(plant, reference))
    drives = load * reference < 0.0
    against = abs(plant.driving_torque(load)) if drives else abs(plant.braking_torque(load))
    resisting = plant.coulomb + (-against if drives else against)
    if not stopping:
        resisting += plant.viscous * abs(reference)
    spare = plant.torque * current + (resisting if stopping else -resisting)
    if spare <= 0.0:
        return "Raise the limit where the machine bears it, or lower load, friction or speed"
    ramp = acceleration(thresholds.RAMP_SHARE * spare / plant.inertia)
    return f"A {key} of {ramp} or less would stay below it"


def _clamped_voltage(case: Case, response: Response) -> Iterator[Finding]:
    limited, trace = response.figures.voltage_limited_s, response.trace
    figures, stage = case.stable_figures("speed"), case.sheet.rig.stage
    if figures is None or figures.crossover_hz is None:
        patience = stage.speed_period
    else:
        patience = max(stage.speed_period, thresholds.VOLTAGE_LAG / (math.tau * figures.crossover_hz))
    if limited <= patience:
        return
    on_limit = np.flatnonzero(trace.voltage_clamped)
    off = np.abs(trace.current_reference[on_limit] - trace.current[on_limit])
    lagging = int(np.count_nonzero(off > thresholds.CURRENT_LAG * case.plant.current_limit)) * stage.current_period
    if lagging <= patience:
        return
    yield Finding.on(
        "duty",
        "voltage-clamped",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The voltage sits on its limit for {amount(limited, 's')}, "
            f"for {amount(lagging, 's')} with the current off its reference",
            reason="the speed PI is not told that the current it asks for does not come: its integrator winds up "
            "meanwhile, and the speed overshoots when the voltage comes free",
            advice="Lower reference_speed or give it a ramp, lower current_limit, or raise the bus",
        ),
    )


def _peak(case: Case, response: Response) -> Iterator[Finding]:
    peak, limit = response.figures.peak_current_a, case.plant.current_limit
    if peak <= thresholds.PEAK_OVER_LIMIT * limit:
        return
    machine, stage = case.sheet.rig.machine, case.sheet.rig.stage
    whose = "stage"
    if machine.peak_current is not None and machine.peak_current <= stage.current_limit:
        whose = "machine"
    yield Finding.on(
        whose,
        "current-peak-over-limit",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The current peaks at {sheet_amperes(peak, machine)}, {percent(peak / limit - 1.0)} above its limit",
            reason=f"the limit of {sheet_amperes(limit, machine)} is the {whose}'s and clamps the reference; "
            "the current loop overshoots it",
            advice=f"Set current_limit near {sheet_amperes(limit * limit / peak, machine)}, "
            "or ask for more margin in the current loop",
        ),
    )


def _returned(case: Case, response: Response, states: tuple[Demand, ...]) -> Iterator[Finding]:
    energy, duty = response.figures.returned_energy_j, case.sheet.duty
    driven = any(state.drives for state in states)
    if duty.stop_at is None and not driven:
        return
    stored = 0.5 * case.plant.inertia * duty.reference_speed**2
    if energy <= thresholds.RETURNED_SHARE * stored or energy <= 0.0:
        return
    bus = case.sheet.rig.stage.bus_voltage
    braking = f"braking from {speed(duty.reference_speed)} frees the {amount(stored, 'J')} that the train holds"
    room = 0.5 * bus**2 * ((1.0 + thresholds.BUS_RISE) ** 2 - 1.0)
    yield Finding.on(
        "stage",
        "energy-returned",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The machine gives {amount(energy, 'J')} back to the bus",
            reason=f"{'a load that drives works it as a generator' if driven else braking}; a bus whose supply takes "
            "nothing back rises, while this model keeps it at its voltage",
            advice=f"To keep the rise within {percent(thresholds.BUS_RISE)} takes {amount(energy / room, 'F')} on the "
            "bus or a brake resistor, or a slower stop; the trip must lie above "
            f"{digits(bus * (1.0 + thresholds.BUS_RISE))} V",
        ),
    )
