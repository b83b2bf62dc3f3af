"""Tunings side by side as text for people and as JSON for scripts."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from gainbench.contrast import Contrast, Figure, Subject, Tuning
from gainbench.report import assessment_json
from gainbench.results import Level
from gainbench.units import Dimension, show

if TYPE_CHECKING:
    from rich.console import Console

FORMAT = 1
"""Of the JSON; it changes where a script would have to."""
_LABEL, _COLUMN, _GUTTER = 27, 12, 9
"""Widths of a figure's name, of its value, and of the difference beside it."""
_MARKS = {Level.BREAKS: "x", Level.THIN: "!", Level.HOLDS: "="}
_HEADS: dict[Subject, str] = {"current": "Current loop", "speed": "Speed loop", "response": "Response to the duty"}
_WORDS = {
    ("current", "kp"): "Kp [V/A]",
    ("current", "ki"): "Ki [V/(A s)]",
    ("speed", "kp"): "Kp [A s/rad]",
    ("speed", "ki"): "Ki [A/rad]",
    ("current", "step_rise_s"): "rise, rotor locked",
    ("current", "step_overshoot_percent"): "overshoot, rotor locked",
    ("response", "rise_time_s"): "rise from 10 to 90 %",
    ("response", "settling_time_s"): "settling to 2 %",
    ("response", "load_dip_rad_s"): "dip under the load step",
    ("response", "recovery_time_s"): "recovery to 2 %",
    ("response", "current_limited_s"): "time on the current limit",
    ("response", "voltage_limited_s"): "time on the voltage limit",
    ("response", "returned_energy_j"): "energy given back",
}
"""Of the figures whose names are not words by themselves."""
_UNITS = ("_rad_s", "_percent", "_deg", "_hz", "_db", "_s", "_a", "_v", "_j")
_TENTH, _MANY = 0.0995, 9.995
"""Share of the reference from which a change is told in whole percent, and as a factor."""


def contrast_json(contrast: Contrast) -> dict[str, object]:
    """Tunings side by side as plain values for JSON.

    Parameters
    ----------
    contrast : Contrast
        Any.

    Returns
    -------
    dict
        ``format``, ``reference`` (an index) and ``tunings``, each with ``sheet``, ``tuning`` (None for what the aims
        give), ``worst`` (a level), all that the JSON of an assessment holds, and ``difference``: by ``current``,
        ``speed`` and ``response`` the figures less the reference's, None where either has none.
    """
    return {
        "format": FORMAT,
        "reference": contrast.reference,
        "tunings": [_tuning_json(contrast, row) for row in range(len(contrast.tunings))],
    }


def _tuning_json(contrast: Contrast, row: int) -> dict[str, object]:
    tuning = contrast.tunings[row]
    difference: dict[str, dict[str, float | None]] = {"current": {}, "speed": {}, "response": {}}
    for figure, value in zip(contrast.figures, contrast.differences[row], strict=True):
        difference[figure.subject][figure.name] = float(value) if math.isfinite(value) else None
    held = assessment_json(tuning.assessment)
    del held["format"]
    return {
        "sheet": tuning.sheet_name,
        "tuning": tuning.kept,
        "worst": tuning.level.value,
        **held,
        "difference": difference,
    }


def print_contrast(contrast: Contrast, console: Console) -> None:
    """Print tunings side by side: which they are, then one row for each figure, with its change from the reference.

    Parameters
    ----------
    contrast : Contrast
        Any.
    console : rich.console.Console
        Where to; as many tunings stand beside each other as its width holds.
    """
    from rich.text import Text

    console.print(Text("Tunings", style="bold"))
    for row, tuning in enumerate(contrast.tunings):
        judged = f"{_MARKS[tuning.level]} {tuning.level.value:<6}"
        console.print(Text(f"  {row + 1}  {judged}  {_named(tuning)}"), soft_wrap=True)
        if tuning.level is not Level.HOLDS:
            for finding in tuning.worst:
                console.print(Text(f"       {finding.title}"), soft_wrap=True)
    console.print(Text(f"  In brackets: the change from {contrast.reference + 1}."))
    others = [row for row in range(len(contrast.tunings)) if row != contrast.reference]
    beside = max(1, (console.width - _LABEL - _COLUMN - 2) // (_COLUMN + _GUTTER))
    for start in range(0, max(1, len(others)), beside):
        _print_block(contrast, others[start : start + beside], console)


def _named(tuning: Tuning) -> str:
    return f"{tuning.sheet_name}, as designed" if tuning.kept is None else f'{tuning.sheet_name}, kept "{tuning.kept}"'


def _print_block(contrast: Contrast, others: list[int], console: Console) -> None:
    from rich.text import Text

    reference = contrast.reference
    for subject, head in _HEADS.items():
        heads = "".join(f"{row + 1:>{_COLUMN}}{'':{_GUTTER}}" for row in others)
        console.print()
        console.print(Text(f"{head:<{_LABEL}}{reference + 1:>{_COLUMN}}{heads}".rstrip(), style="bold"), soft_wrap=True)
        for column, figure in enumerate(contrast.figures):
            if figure.subject == subject:
                base = float(contrast.values[reference, column])
                line = f"  {_label(figure):<{_LABEL - 2}}{_value(figure, base):>{_COLUMN}}"
                for row in others:
                    change = _change(figure, float(contrast.differences[row, column]), base)
                    line += f"{_value(figure, float(contrast.values[row, column])):>{_COLUMN}}{change:<{_GUTTER}}"
                console.print(Text(line.rstrip()), soft_wrap=True)


def _label(figure: Figure) -> str:
    words = _WORDS.get((figure.subject, figure.name))
    if words is not None:
        return words
    ending = next((one for one in _UNITS if figure.name.endswith(one)), "")
    return figure.name.removesuffix(ending).replace("_", " ")


def _value(figure: Figure, value: float) -> str:
    """A value with its unit; ``none`` where there is none."""
    if math.isnan(value):
        return "none"
    name = figure.name
    if name.endswith("_rad_s"):
        return show(value, Dimension.SPEED)
    if name.endswith("_hz"):
        return show(math.tau * value, Dimension.FREQUENCY)
    if name.endswith("_percent"):
        return f"{value:.1f} %"
    if name.endswith("_deg"):
        return f"{value:.2f} deg"
    if name.endswith("_db"):
        return f"{value:.2f} dB"
    dimensions = {"_s": Dimension.TIME, "_a": Dimension.CURRENT, "_v": Dimension.VOLTAGE, "_j": Dimension.ENERGY}
    dimension = next((one for ending, one in dimensions.items() if name.endswith(ending)), None)
    return f"{value:.4g}" if dimension is None else show(value, dimension)


def _change(figure: Figure, difference: float, reference: float) -> str:
    """A change in brackets: of angles, levels and shares by so much, of all else as a share of the reference."""
    if math.isnan(difference):
        return ""
    if figure.name.endswith(("_deg", "_db", "_percent")):
        text = f"{difference:+.1f}"
    elif reference == 0.0:
        return ""
    else:
        share = difference / abs(reference)
        if abs(share) >= _MANY:
            text = f"x{1.0 + difference / reference:.0f}"
        else:
            text = f"{100.0 * share:+.0f}%" if abs(share) >= _TENTH else f"{100.0 * share:+.1f}%"
    return "" if text.strip("+-%") == "0.0" else f" ({text})"
