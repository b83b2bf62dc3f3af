"""Can the duty be done at all: its start, its speed against the voltage, its torque against the current limit."""

from __future__ import annotations

from collections.abc import Iterator

from gainbench.derived import voltage_ceiling
from gainbench.findings import thresholds
from gainbench.findings.case import Case
from gainbench.findings.demand import Demand, sheet_amperes
from gainbench.findings.numbers import amount, percent, speed
from gainbench.model import MachineKind
from gainbench.results import Finding, Level, Words


def start_findings(case: Case) -> Iterator[Finding]:
    """A start over a limit, for which there is no response.

    Parameters
    ----------
    case : Case
        What is judged.

    Yields
    ------
    Finding
        One of level ``breaks``, or none.
    """
    problem = case.start_problem
    if problem is None:
        return
    yield Finding.on(
        "duty",
        "start-over-limit",
        level=Level.BREAKS,
        words=lambda: Words(
            title="The drive cannot hold its load at rest, so there is no response",
            reason=problem.removesuffix(".") + _terms(case),
            advice="Lower load_torque, or choose another ratio or a larger stage or machine",
        ),
    )


def reach_findings(case: Case, states: tuple[Demand, ...]) -> Iterator[Finding]:
    """Speed and load of the duty against what voltage and current allow once all is steady.

    Parameters
    ----------
    case : Case
        What is judged.
    states : tuple of Demand
        The steady states of the duty.

    Yields
    ------
    Finding
        ``breaks`` where the duty cannot be held, ``thin`` where little voltage is left.
    """
    plant, machine = case.plant, case.sheet.rig.machine
    if case.start_problem is not None:
        return
    strongest = max(states, key=lambda state: abs(state.current))
    current_breaks = abs(strongest.current) > plant.current_limit
    if current_breaks:
        yield Finding.on(
            "duty",
            "duty-over-current-limit",
            level=Level.BREAKS,
            words=lambda: Words(
                title=f"Holding the duty's {'load' if strongest.loaded else 'speed'} takes "
                f"{sheet_amperes(abs(strongest.current), machine)}, "
                f"the limit is {sheet_amperes(plant.current_limit, machine)}",
                reason=f"friction and load at {speed(strongest.speed)} need more torque than the limit lets through, "
                "so the speed does not stay at its reference",
                advice="Lower the load, raise the limit where the machine bears it, or choose another ratio",
            ),
        )
    highest = max(states, key=lambda state: state.voltage)
    share = highest.voltage / plant.voltage_limit
    if share > 1.0 and not (current_breaks and highest is strongest):
        yield _over_voltage(case, highest)
    elif thresholds.VOLTAGE_NEED < share <= 1.0:
        yield Finding.on(
            "duty",
            "voltage-headroom-thin",
            level=Level.THIN,
            words=lambda: Words(
                title=f"Holding {speed(highest.speed)} takes {percent(share)} of the voltage",
                reason=f"{amount(highest.voltage, 'V')} of {amount(plant.voltage_limit, 'V')}{_terms(case)} are used "
                "up in steady state; with what is left the current loop is slow, and a bus that sags takes it",
                advice="Lower reference_speed, or raise bus_voltage or voltage_use",
            ),
        )


def _terms(case: Case) -> str:
    """Which volt and ampere the plant's equations speak of, where that is not plain."""
    return ", as phase peak values" if case.plant.kind is MachineKind.PM_SINE else ""


def _over_voltage(case: Case, state: Demand) -> Finding:
    plant = case.plant
    ceiling = voltage_ceiling(plant, plant.voltage_limit)
    if abs(state.speed) > ceiling.no_load_speed:
        limit = f"without any load the machine tops out at {speed(ceiling.no_load_speed)}"
    elif abs(state.speed) > ceiling.running_speed:
        limit = f"against friction alone it tops out at {speed(ceiling.running_speed)}"
    else:
        limit = "friction alone it could turn, with the load it cannot"
    return Finding.on(
        "duty",
        "duty-over-voltage",
        level=Level.BREAKS,
        words=lambda: Words(
            title=f"Holding {speed(state.speed)} takes {amount(state.voltage, 'V')}, "
            f"the stage gives {amount(plant.voltage_limit, 'V')}{_terms(case)}",
            reason=f"{limit}; the speed stays below its reference, and the speed integrator winds up meanwhile",
            advice="Lower reference_speed, raise bus_voltage, or choose a winding or a ratio for a higher speed",
        ),
    )
