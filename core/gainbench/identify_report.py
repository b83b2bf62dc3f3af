"""An identification as text for people and as JSON for scripts."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from gainbench.evidence.estimate import Estimate, EstimateName, Identification

if TYPE_CHECKING:
    from rich.console import Console

FORMAT = 1
"""Of the JSON; it changes where a script would have to."""
_NAME_WIDTH = 26
_CAUTION = (
    "Intervals hold 95 % of confidence: the first for this fit with its coloured residuals, the second with the spread"
    " between runs. They know nothing of a sensor's gain or of a wrong column: try gains from them with a low current"
    " limit first."
)


def identification_json(found: Identification) -> dict[str, object]:
    """An identification as plain values for JSON.

    Parameters
    ----------
    found : Identification
        Any.

    Returns
    -------
    dict
        ``format``, ``estimates``, ``regression`` and ``runs``; floats in full, SI. What no log tells is absent.
    """
    return {
        "format": FORMAT,
        "estimates": _json(found.estimates),
        "regression": _json(found.regression),
        "runs": [
            {
                "log": run.log,
                "experiment": run.experiment.value,
                "fit_percent": None if run.fit_percent is None else float(run.fit_percent),
                "remarks": list(run.remarks),
            }
            for run in found.runs
        ],
    }


def _json(estimates: Mapping[EstimateName, Estimate]) -> dict[str, object]:
    return {
        name.value: {
            "value": float(one.value),
            "unit": name.si,
            "low": float(one.low),
            "high": float(one.high),
            "run_low": float(one.run_low),
            "run_high": float(one.run_high),
        }
        for name, one in estimates.items()
    }


def print_identification(found: Identification, console: Console) -> None:
    """Print an identification for people: every run with its remarks, then the estimates with both intervals.

    Parameters
    ----------
    found : Identification
        Any.
    console : rich.console.Console
        Where to.
    """
    from rich.text import Text

    for run in found.runs:
        fit = "" if run.fit_percent is None else f", fit {run.fit_percent:.1f} %"
        console.print(Text(f"{_plain(run.log)}, {run.experiment.value}{fit}", style="bold"))
        for remark in run.remarks:
            console.print(Text(f"  - {_plain(remark)}"), soft_wrap=True)
    console.print()
    console.print(Text("Estimates, at the motor shaft", style="bold"))
    if not found.estimates:
        console.print(Text("  none: the remarks above say why"))
        return
    for name, one in found.estimates.items():
        half, between = 0.5 * (one.high - one.low), 0.5 * (one.run_high - one.run_low)
        value = f"{name.words:<{_NAME_WIDTH}} {one.value:>11.5g} {name.si:<10}"
        line = f"  {value}  +/- {half:.2g}, between runs +/- {between:.2g}"
        console.print(Text(line), soft_wrap=True)
    console.print()
    console.print(Text(_CAUTION))


def _plain(text: str) -> str:
    """A text that cannot steer the terminal it is printed on."""
    return "".join(one if one.isprintable() else f"\\u{ord(one):04x}" for one in text)
