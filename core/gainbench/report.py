"""An assessment as text for people and as JSON for scripts."""

from __future__ import annotations

import textwrap
from typing import TYPE_CHECKING, Any

from gainbench.firmware_form import FirmwareGain, LoopName, firmware_gains, is_si_form
from gainbench.handover import cautions
from gainbench.handover.bench import bench_procedure
from gainbench.handover.figures import Row, apart, joined, loop_rows, response_rows, step_rows
from gainbench.model import MachineKind
from gainbench.results import Finding, Level, LoopAssessment

if TYPE_CHECKING:
    from rich.console import Console

    from gainbench.assess import Assessment

FORMAT = 1
"""Of the JSON; it changes where a script would have to."""
_LOOP_FIGURES = (
    "crossover_hz",
    "phase_margin_deg",
    "delay_margin_s",
    "gain_margin_db",
    "gain_reduction_db",
    "peak_sensitivity",
    "bandwidth_hz",
)
_RESPONSE_FIGURES = (
    "overshoot_percent",
    "rise_time_s",
    "settling_time_s",
    "load_dip_rad_s",
    "recovery_time_s",
    "peak_current_a",
    "rms_current_a",
    "peak_voltage_v",
    "current_limited_s",
    "voltage_limited_s",
    "returned_energy_j",
)
_UNITS: dict[LoopName, dict[str, str]] = {
    "current": {"kp": "V/A", "ki": "V/(A*s)"},
    "speed": {"kp": "A*s/rad", "ki": "A/rad"},
}
_MARKS = {Level.BREAKS: ("x", "bold red"), Level.THIN: ("!", "yellow"), Level.HOLDS: ("=", "")}
_LABEL_WIDTH = 34


def breaks(assessment: Assessment) -> bool:
    """Whether any finding is that something breaks."""
    return any(finding.level is Level.BREAKS for finding in assessment.findings)


def assessment_json(assessment: Assessment) -> dict[str, object]:
    """An assessment as plain values for JSON.

    Parameters
    ----------
    assessment : Assessment
        Any.

    Returns
    -------
    dict
        ``format``, ``title``, ``current``, ``speed``, ``response`` and ``findings``; floats in full, SI as the names
        say, None for what there is not. A loop that is refused has None for gains, ``stable`` and every figure.
    """
    response = assessment.response
    return {
        "format": FORMAT,
        "title": assessment.sheet.title,
        "current": _loop_json(assessment, "current"),
        "speed": _loop_json(assessment, "speed"),
        "response": None
        if response is None
        else {name: _number(getattr(response.figures, name)) for name in _RESPONSE_FIGURES},
        "findings": [
            {"code": one.code, "level": one.level.value, "subject": one.subject, "text": one.text}
            for one in assessment.findings
        ],
    }


def _loop_json(assessment: Assessment, name: LoopName) -> dict[str, object]:
    loop = _loop(assessment, name)
    figures, gains = loop.figures, loop.gains
    found: dict[str, object] = {
        "kp": None if gains is None else float(gains.kp),
        "ki": None if gains is None else float(gains.ki),
        "stable": None if figures is None else bool(figures.stable),
    }
    known = figures is not None and figures.stable
    found |= {key: _number(getattr(figures, key)) if known else None for key in _LOOP_FIGURES}
    if name == "current":
        step = assessment.locked_step if known else None
        found["step_rise_s"] = None if step is None else _number(step.rise_s)
        found["step_overshoot_percent"] = None if step is None else _number(step.overshoot_percent)
    found["units"] = dict(_UNITS[name])
    found["firmware"] = {one.name: {"value": one.value, "unit": one.unit} for one in _in_firmware(assessment, name)}
    return found


def _number(value: Any) -> float | None:
    return None if value is None else float(value)


def _loop(assessment: Assessment, name: LoopName) -> LoopAssessment:
    return assessment.current if name == "current" else assessment.speed


def _in_firmware(assessment: Assessment, name: LoopName) -> tuple[FirmwareGain, FirmwareGain]:
    stage = assessment.sheet.rig.stage
    return firmware_gains(
        name,
        _loop(assessment, name).gains,
        firmware=assessment.sheet.aims.firmware,
        period=stage.current_period if name == "current" else stage.speed_period,
        torque_constant=assessment.plant.torque,
    )


def print_assessment(assessment: Assessment, console: Console) -> None:
    """Print an assessment for people: gains, figures, findings, what is not modelled, a bench procedure, cautions.

    Parameters
    ----------
    assessment : Assessment
        Any.
    console : rich.console.Console
        Where to.
    """
    from rich.text import Text

    console.print(Text(assessment.sheet.title, style="bold"))
    _print_loop(console, assessment, "current")
    _print_loop(console, assessment, "speed")
    _print_rows(console, "Response to the duty", response_rows(assessment), empty="none was computed, see the findings")
    console.print()
    console.print(Text("Findings", style="bold"))
    for finding in assessment.findings:
        _print_finding(console, finding)
    _print_list(console, "Not modelled", [f"{', '.join(cautions.NOT_MODELLED)}."])
    _print_list(console, "On the bench", bench_procedure(assessment), numbered=True)
    _print_list(console, "Cautions", [cautions.BUS_CONDITION, *cautions.CAUTIONS, cautions.ESTIMATE])


def _print_loop(console: Console, assessment: Assessment, name: LoopName) -> None:
    stage, aims = assessment.sheet.rig.stage, assessment.sheet.aims
    loop = _loop(assessment, name)
    rate = stage.current_rate if name == "current" else stage.speed_rate
    method = (aims.current if name == "current" else aims.speed).method
    rows: list[Row] = []
    if loop.gains is not None:
        units = _UNITS[name]
        rows.append(Row(label="Kp", value=f"{loop.gains.kp:.6g} {units['kp']}{_peak(assessment)}"))
        rows.append(Row(label="Ki", value=f"{loop.gains.ki:.6g} {units['ki']}{_peak(assessment)}"))
        rows += _firmware_rows(assessment, name)
        rows += loop_rows(loop)
        if name == "current":
            rows += step_rows(assessment)
    empty = "no gains" if loop.gains is None else "not stable"
    if loop.gains is not None and (loop.figures is None or not loop.figures.stable):
        rows.append(Row(label="loop", value=empty))
    _print_rows(console, f"{name.capitalize()} loop, {method.value}, at {rate:g} Hz", tuple(rows), empty=empty)


def _peak(assessment: Assessment) -> str:
    return ", peak amperes" if assessment.plant.kind is MachineKind.PM_SINE else ""


def _firmware_rows(assessment: Assessment, name: LoopName) -> list[Row]:
    """The gains as the firmware keeps them, where that is not how they were just shown."""
    if is_si_form(name, assessment.sheet.aims.firmware):
        return []
    words = {"kp": "Kp", "ki": "Ki", "ti": "Ti", "wi": "Ki/Kp"}
    held = " (times the period)" if assessment.sheet.aims.firmware.ki_includes_period else ""
    return [
        Row(
            label=f"{words[one.name]} in the firmware's form",
            value="no finite number"
            if one.value is None
            else f"{one.value:.6g} {one.unit}{held if one.name == 'ki' else ''}",
        )
        for one in _in_firmware(assessment, name)
    ]


def _print_rows(console: Console, title: str, rows: tuple[Row, ...], *, empty: str) -> None:
    from rich.text import Text

    console.print()
    console.print(Text(title, style="bold"))
    for row in rows or (Row(label=empty, value=""),):
        console.print(Text(f"  {row.label:<{_LABEL_WIDTH}}  {row.value}".rstrip()), soft_wrap=True)


def _print_finding(console: Console, finding: Finding) -> None:
    mark, style = _MARKS[finding.level]
    _print_hanging(console, f"  {mark} {finding.level.value:<6} ", finding.text, style=style)


def _print_list(console: Console, title: str, lines: list[str] | tuple[str, ...], *, numbered: bool = False) -> None:
    from rich.text import Text

    console.print()
    console.print(Text(title, style="bold"))
    for number, line in enumerate(lines, start=1):
        _print_hanging(console, f"  {number}. " if numbered else "  - ", line)


def _print_hanging(console: Console, start: str, text: str, *, style: str = "") -> None:
    """A paragraph whose further lines stand below its first word."""
    from rich.text import Text

    lines = textwrap.wrap(joined(text), width=max(20, console.width - len(start)), break_on_hyphens=False) or [""]
    console.print(Text(start, style=style).append(apart(lines[0]), style="none"), soft_wrap=True)
    for line in lines[1:]:
        console.print(Text(f"{' ' * len(start)}{apart(line)}"), soft_wrap=True)
