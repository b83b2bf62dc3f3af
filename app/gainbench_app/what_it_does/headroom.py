"""How far current and voltage stay from their limits, and how the speed behaves, in numbers."""

from __future__ import annotations

from gainbench.plant import Plant
from gainbench.results import ResponseFigures
from gainbench_app.widgets.scales import number_text, time_text
from gainbench_app.widgets.words import Piece

_GAP = "\N{NO-BREAK SPACE}"
_WORD_PX, _GROUP_PX = 4.0, 12.0


def headroom_line(
    figures: ResponseFigures | None, plant: Plant, *, speed_unit: str, speed_size: float
) -> tuple[Piece, ...]:
    """The line below the time plots; empty without a response."""
    if figures is None:
        return ()
    pieces = [Piece(text="headroom")]
    pieces += _room("voltage", figures.peak_voltage_v, plant.voltage_limit, figures.voltage_limited_s)
    pieces += _room("current", figures.peak_current_a, plant.current_limit, figures.current_limited_s)
    if figures.overshoot_percent is not None:
        pieces += _pair("overshoot", f"{figures.overshoot_percent:.1f}{_GAP}%")
    if figures.settling_time_s is not None:
        pieces += _pair("settled in", time_text(figures.settling_time_s))
    elif figures.overshoot_percent is not None:
        pieces.append(Piece(text="not settled", strong=True, gap=_GROUP_PX, breaks=True))
    if figures.load_dip_rad_s is not None:
        dip = figures.load_dip_rad_s / speed_size
        pieces += _pair("load dip", f"{number_text(dip, dip / 20.0 or 1.0)}{_GAP}{speed_unit}")
    return tuple(pieces)


def _pair(name: str, value: str, *, gap: float = _GROUP_PX) -> list[Piece]:
    return [Piece(text=name, gap=gap, breaks=gap >= _GROUP_PX), Piece(text=value, strong=True, gap=_WORD_PX)]


def _room(name: str, peak: float, limit: float, limited: float) -> list[Piece]:
    room = max(0.0, 100.0 * (1.0 - abs(peak) / limit)) if limit > 0.0 else 0.0
    pieces = _pair(name, f"{room:.0f}{_GAP}%")
    if limited > 0.0:
        pieces += _pair("limited", time_text(limited), gap=_WORD_PX + 2.0)
    return pieces
