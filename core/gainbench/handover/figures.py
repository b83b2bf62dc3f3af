"""The figures that an assessment is quoted with, as short rows of words and numbers."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

from gainbench.results import LoopAssessment
from gainbench.units import Dimension, show

if TYPE_CHECKING:
    from gainbench.assess import Assessment

NONE = "none"
_TIE = "\N{NO-BREAK SPACE}"
_BEFORE_UNIT = re.compile(
    r"(?<=\d) (?=(?:%|deg|dB|rpm|[kmuM]?(?:N\*m|A|V|W|J|s|Hz|ohm|H))(?![A-Za-z])|[AV] s/)"
    r"|(?<=\b[AV]) (?=s/)|(?<=\bN) (?=m\b)"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """A figure and what it is."""

    label: str
    value: str


def loop_rows(loop: LoopAssessment) -> tuple[Row, ...]:
    """A loop's figures.

    Parameters
    ----------
    loop : LoopAssessment
        Either loop.

    Returns
    -------
    tuple of Row
        Empty where the loop has none: without gains, or unstable.
    """
    figures = loop.figures
    if figures is None or not figures.stable:
        return ()
    return (
        Row(label="crossover", value=_frequency(figures.crossover_hz)),
        Row(label="phase margin", value=_degrees(figures.phase_margin_deg)),
        Row(label="delay margin", value=_time(figures.delay_margin_s)),
        Row(label="gain margin", value=_decibels(figures.gain_margin_db)),
        Row(label="gain reduction", value=_decibels(figures.gain_reduction_db)),
        Row(label="peak sensitivity", value=_plain(figures.peak_sensitivity)),
        Row(label="bandwidth", value=_frequency(figures.bandwidth_hz)),
    )


def step_rows(assessment: Assessment) -> tuple[Row, ...]:
    """The current loop's step with the rotor locked; empty where there is none."""
    step = assessment.locked_step
    if step is None:
        return ()
    return (
        Row(label="rise 10 to 90 %, rotor locked", value=_time(step.rise_s)),
        Row(label="overshoot, rotor locked", value=_percent(step.overshoot_percent)),
    )


def response_rows(assessment: Assessment) -> tuple[Row, ...]:
    """The figures of the duty's response; empty where there is none.

    Parameters
    ----------
    assessment : Assessment
        Any.

    Returns
    -------
    tuple of Row
        A figure that the duty does not have, or that is not reached within it, reads ``none``.
    """
    if assessment.response is None:
        return ()
    figures = assessment.response.figures
    return (
        Row(label="overshoot", value=_percent(figures.overshoot_percent)),
        Row(label="rise from 10 to 90 %", value=_time(figures.rise_time_s)),
        Row(label="settling to 2 %", value=_time(figures.settling_time_s)),
        Row(label="dip under the load step", value=_speed(figures.load_dip_rad_s)),
        Row(label="recovery to 2 %", value=_time(figures.recovery_time_s)),
        Row(label="peak current", value=show(figures.peak_current_a, Dimension.CURRENT)),
        Row(label="rms current", value=show(figures.rms_current_a, Dimension.CURRENT)),
        Row(label="peak voltage", value=show(figures.peak_voltage_v, Dimension.VOLTAGE)),
        Row(label="time on the current limit", value=show(figures.current_limited_s, Dimension.TIME)),
        Row(label="time on the voltage limit", value=show(figures.voltage_limited_s, Dimension.TIME)),
        Row(label="energy given back", value=show(figures.returned_energy_j, Dimension.ENERGY)),
    )


def as_sentence(rows: tuple[Row, ...]) -> str:
    """Rows as one line of text."""
    return "; ".join(f"{row.label}: {row.value}" for row in rows)


def joined(text: str) -> str:
    """A text whose numbers and units are not torn apart where it is wrapped; :func:`apart` takes that back."""
    return _BEFORE_UNIT.sub(_TIE, text)


def apart(text: str) -> str:
    """A wrapped text with plain blanks."""
    return text.replace(_TIE, " ")


def _frequency(hertz: float | None) -> str:
    return NONE if hertz is None else show(math.tau * hertz, Dimension.FREQUENCY)


def _time(seconds: float | None) -> str:
    return NONE if seconds is None else show(seconds, Dimension.TIME)


def _speed(value: float | None) -> str:
    return NONE if value is None else show(value, Dimension.SPEED)


def _degrees(value: float | None) -> str:
    return NONE if value is None else f"{value:.2f} deg"


def _decibels(value: float | None) -> str:
    return NONE if value is None else f"{value:.2f} dB"


def _percent(value: float | None) -> str:
    return NONE if value is None else f"{value:.1f} %"


def _plain(value: float | None) -> str:
    return NONE if value is None else f"{value:.3f}"
