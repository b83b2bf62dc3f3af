"""What was measured over what the estimates say, and what is left between them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from gainbench.model import SIGNAL_DIMENSIONS, LogColumn, SignalName
from gainbench.units import pretty, unit_size
from gainbench_app.pages.evidence.fit_task import ShownTrace
from gainbench_app.pages.evidence.guesses import SIGNALS
from gainbench_app.pages.evidence.stacked import Curve, Panel, StackedFigure, hue_of
from gainbench_app.widgets.appearance import Appearance

_PANEL_PX, _RESIDUAL_PX = 104, 62
_UNITS: Mapping[SignalName, str] = {
    SignalName.SPEED: "rpm",
    SignalName.CURRENT: "A",
    SignalName.TORQUE: "N*m",
    SignalName.VOLTAGE: "V",
}


class ResidualPlots(StackedFigure):
    """Two panels: both lines of a signal, and their difference."""

    def __init__(self, appearance: Appearance) -> None:
        super().__init__(appearance)
        self.setAccessibleName("measured over fitted, and the residual")
        self.setFixedHeight(_PANEL_PX + _RESIDUAL_PX + 50)

    def show_trace(self, trace: ShownTrace, columns: Sequence[LogColumn]) -> None:
        """Show another trace, in the unit of the mapping."""
        signal = trace.signal
        unit = next((one.unit for one in columns if one.signal is signal), _UNITS[signal])
        size = unit_size(unit, SIGNAL_DIMENSIONS[signal])
        hue = hue_of(signal)
        both = (Curve(envelope=trace.measured, hue=hue), Curve(envelope=trace.fitted, hue="ink", dashed=True))
        rest = (Curve(envelope=trace.residual, hue=hue),)
        panels = (
            Panel(name=SIGNALS[signal], unit=pretty(unit), size=size, curves=both, about_zero=True, share=1.7),
            Panel(name="residual", unit=pretty(unit), size=size, curves=rest, about_zero=True),
        )
        self.show_panels(panels, length=float(trace.measured.x[-1]))
        self.setAccessibleDescription(f"{SIGNALS[signal]}: {trace.fit_percent:.2f} % explained")
