"""Measured frequency responses as points of an open loop, where a log tells it exactly."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from gainbench.errors import LogError
from gainbench.evidence.frequency_response import MeasuredResponse
from gainbench.evidence.measured_loop import CLOSED, LOOP_OF, MeasuredLoop, closed_to_open, plant_to_open
from gainbench.model import Sheet
from gainbench.results import Gains
from gainbench_app.what_it_does.loop_marks import Array, BodeCurve
from gainbench_app.what_it_does.measured_logs import MeasuredFrequencies


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LoopPoints:
    """An open loop as it was measured, as a Bode plot draws it."""

    log: int
    """Place of the log among those of the sheet."""
    frequency_hz: Array
    magnitude_db: Array
    phase_deg: Array
    """In the turn of the curve beside it."""
    sure: np.ndarray[tuple[int], np.dtype[np.bool_]]
    """Which points are well known."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Of:
    """What a conversion was made of."""

    response: MeasuredResponse
    reference_weight: float
    feedforward: bool


class LoopLog:
    """The open loop behind one log. That of a closed loop is found once, that of a plant with every new gain."""

    def __init__(self, place: int, measured: MeasuredFrequencies) -> None:
        self.place = place
        self.measured = measured
        self._of: _Of | None = None
        self._closed: MeasuredLoop | None = None
        self._points: LoopPoints | None = None
        self.refusal = ""
        """Why it is not drawn."""

    @property
    def loop(self) -> str:
        """``speed`` or ``current``."""
        return LOOP_OF[self.measured.response.path]

    @property
    def short(self) -> str:
        """What is drawn, in a few words."""
        return "as T/(1 − T)" if self.measured.response.path in CLOSED else "plant times PI"

    @property
    def what(self) -> str:
        """What is drawn."""
        path = self.measured.response.path
        if path in CLOSED:
            return f"L = T/(1 − T), T measured from {path}, with the gains of the bench"
        return f"L = G C, G measured from {path}, C the PI that this sheet asks for now"

    def points(self, sheet: Sheet, *, gains: Gains | None, curve: BodeCurve) -> LoopPoints | None:
        """The points beside a curve.

        Parameters
        ----------
        sheet : Sheet
            Of the assessment that is shown.
        gains : Gains, optional
            Of the loop; without them a plant alone makes no open loop.
        curve : BodeCurve
            The predicted loop: phases are drawn in its turn.

        Returns
        -------
        LoopPoints or None
            The same object as before where no point has moved; None where the conversion would not be exact.
        """
        loop = self._open(sheet, gains)
        if loop is None:
            return None
        magnitude = 20.0 * np.log10(np.maximum(np.abs(loop.open_loop), 1e-300))
        phase = np.degrees(np.angle(loop.open_loop))
        beside = np.interp(np.log(loop.frequency_hz), np.log(curve.frequency_hz), curve.phase_deg)
        phase += 360.0 * np.round((beside - phase) / 360.0)
        before = self._points
        if before is None or not (
            np.array_equal(before.phase_deg, phase) and np.array_equal(before.magnitude_db, magnitude)
        ):
            self._points = LoopPoints(
                log=self.place,
                frequency_hz=loop.frequency_hz,
                magnitude_db=magnitude,
                phase_deg=phase,
                sure=loop.sure,
            )
        return self._points

    def _open(self, sheet: Sheet, gains: Gains | None) -> MeasuredLoop | None:
        response = self.measured.response
        if response.path not in CLOSED:
            return plant_to_open(response, sheet, gains=gains) if gains is not None else None
        of = _Of(
            response=response,
            reference_weight=sheet.aims.speed.reference_weight,
            feedforward=sheet.aims.firmware.back_emf_feedforward,
        )
        if of != self._of:
            self._of, self._closed, self.refusal = of, None, ""
            try:
                self._closed = closed_to_open(response, sheet)
            except LogError as error:
                self.refusal = str(error)
        return self._closed
