"""The columns of the shelf: their heads, and their cells as text and as differences to a reference."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from gainbench.firmware_form import FirmwareGain, firmware_gains
from gainbench.model import Firmware
from gainbench.units import Dimension, pretty, show
from gainbench_app.shelf.summary import Summary
from gainbench_app.widgets.scales import frequency_text, number_text, time_text

_GAP = "\N{NO-BREAK SPACE}"
_NONE = "\N{EN DASH}"
_GAIN_NAMES = {"kp": "Kp", "ki": "Ki", "ti": "Ti", "wi": "Ki/Kp"}
_TENTH, _MANY = 0.0995, 9.995
"""Share of the reference from which a change is told in whole percent, and as a factor."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column."""

    head: str
    meaning: str
    value: Callable[[Summary], float | None]
    """Of a tuning; only its text knows the unit."""
    text: Callable[[float], str]
    absolute: bool = False
    """Whether a difference is told by so much, else as a share of the reference."""

    def cell(self, of: Summary) -> str:
        """A tuning's cell."""
        value = self.value(of)
        return _NONE if value is None else self.text(value)

    def change(self, of: Summary, reference: Summary) -> str:
        """The difference to a reference; empty where there is none to tell."""
        value, base = self.value(of), self.value(reference)
        if value is None or base is None:
            return ""
        if self.absolute:
            text = f"{value - base:+.1f}"
        elif base == 0.0:
            return ""
        else:
            share = value / base - 1.0
            if abs(share) >= _MANY:
                return f"x{share + 1.0:.0f}"
            text = f"{100.0 * share:+.0f}{_GAP}%" if abs(share) >= _TENTH else f"{100.0 * share:+.1f}{_GAP}%"
        return "" if text.strip(f"+-{_GAP}%") == "0.0" else text.replace("-", "\N{MINUS SIGN}")


def columns(firmware: Firmware, *, speed_unit: str, speed_size: float) -> tuple[Column, ...]:
    """The columns for a firmware's form of gains and the duty's unit of speed.

    Parameters
    ----------
    firmware : Firmware
        Whose form the gains are shown in.
    speed_unit : str
        Of the load dip.
    speed_size : float
        One of that unit [rad/s].

    Returns
    -------
    tuple of Column
        From left to right.
    """
    kp, other = firmware_gains("speed", None, firmware=firmware, period=1.0, torque_constant=1.0)

    def gain(index: int) -> Callable[[Summary], float | None]:
        return lambda of: speed_gains(of, firmware)[index].value

    return (
        Column(head=_gain_head(kp), meaning="proportional gain of the speed loop", value=gain(0), text=_gain_text(kp)),
        Column(
            head=_gain_head(other), meaning="integral part of the speed loop", value=gain(1), text=_gain_text(other)
        ),
        Column(
            head="current crossover",
            meaning="first frequency where the open current loop falls through 1",
            value=lambda of: of.current_crossover_hz,
            text=frequency_text,
        ),
        Column(
            head="speed crossover",
            meaning="first frequency where the open speed loop falls through 1",
            value=lambda of: of.speed_crossover_hz,
            text=frequency_text,
        ),
        Column(
            head="phase margin",
            meaning="phase margin of the speed loop",
            value=lambda of: of.phase_margin_deg,
            text=lambda value: f"{value:.1f}°",
            absolute=True,
        ),
        Column(
            head="gain margin",
            meaning="gain margin of the speed loop",
            value=lambda of: of.gain_margin_db,
            text=lambda value: f"{value:.1f}{_GAP}dB",
            absolute=True,
        ),
        Column(
            head="overshoot",
            meaning="largest excess of the speed over its reference",
            value=lambda of: of.overshoot_percent,
            text=lambda value: f"{value:.1f}{_GAP}%",
            absolute=True,
        ),
        Column(
            head="settled in",
            meaning="time until the speed stays within 2 % of its reference",
            value=lambda of: of.settling_time_s,
            text=time_text,
        ),
        Column(
            head="load dip",
            meaning="largest distance from the reference after the load step",
            value=lambda of: of.load_dip_rad_s,
            text=lambda value: f"{number_text(value / speed_size, value / speed_size / 20.0 or 1.0)}{_GAP}{speed_unit}",
        ),
        Column(
            head="on current limit",
            meaning="time for which the speed PI's output is clamped",
            value=lambda of: of.current_limited_s,
            text=time_text,
        ),
    )


def speed_gains(of: Summary, firmware: Firmware) -> tuple[FirmwareGain, FirmwareGain]:
    """The speed loop's gains of a tuning in a firmware's form."""
    return firmware_gains(
        "speed", of.speed, firmware=firmware, period=of.speed_period, torque_constant=of.torque_constant
    )


def current_gains_text(of: Summary, firmware: Firmware) -> str:
    """The current loop's gains of a tuning in a firmware's form, as words."""
    pair = firmware_gains(
        "current", of.current, firmware=firmware, period=of.current_period, torque_constant=of.torque_constant
    )
    parts = [
        f"{_GAIN_NAMES[one.name]} {_gain_text(one)(one.value)}" + ("" if one.name == "ti" else f" {pretty(one.unit)}")
        for one in pair
        if one.value is not None
    ]
    return f"current {', '.join(parts)}" if parts else ""


def _gain_head(gain: FirmwareGain) -> str:
    unit = "" if gain.name == "ti" else f", {pretty(gain.unit)}"
    return f"speed {_GAIN_NAMES[gain.name]}{unit}"


def _gain_text(gain: FirmwareGain) -> Callable[[float], str]:
    if gain.name == "ti":
        return lambda value: pretty(show(value, Dimension.TIME)).replace(" ", _GAP)
    return lambda value: f"{value:.4g}"


def as_table(heads: list[str], rows: list[list[str]], *, markdown: bool) -> str:
    """Cells as text for a document or a sheet of numbers.

    Parameters
    ----------
    heads : list of str
        One for each column.
    rows : list of list of str
        Cells.
    markdown : bool
        True for a Markdown table, else lines of cells with tabs between.

    Returns
    -------
    str
        With a line end behind the last line.
    """
    plain = [[one.replace(_GAP, " ") for one in row] for row in [heads, *rows]]
    if not markdown:
        clean = [[" ".join(one.split()) for one in row] for row in plain]
        return "".join("\t".join(row) + "\n" for row in clean)
    safe = [[" ".join(one.replace("|", "\\|").split()) for one in row] for row in plain]
    rule = ["---", *(["---:"] * (len(heads) - 1))]
    return "".join(f"| {' | '.join(row)} |\n" for row in [safe[0], rule, *safe[1:]])
