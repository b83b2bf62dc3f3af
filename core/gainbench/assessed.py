"""What is drawn from an assessment needs of it: sheet, plant, both loops, and the sampled loop behind one of them."""

from __future__ import annotations

from typing import Literal, Protocol

from gainbench.model import Sheet
from gainbench.plant import Plant
from gainbench.results import LoopAssessment
from gainbench.sampling import Loop, current_loop, hardware, speed_loop

LoopName = Literal["current", "speed"]
"""The two loops."""


class Assessed(Protocol):
    """An assessment, or what findings judge before it is one."""

    @property
    def sheet(self) -> Sheet:
        """The sheet."""

    @property
    def plant(self) -> Plant:
        """Its plant."""

    @property
    def current(self) -> LoopAssessment:
        """Its current loop."""

    @property
    def speed(self) -> LoopAssessment:
        """Its speed loop."""


def assessed_loop(assessed: Assessed, name: LoopName) -> Loop | None:
    """The sampled loop that an assessment's gains are for.

    Parameters
    ----------
    assessed : Assessed
        An assessment.
    name : str
        ``current`` or ``speed``.

    Returns
    -------
    Loop or None
        None for the speed loop where the current loop inside has no gains.
    """
    stage, firmware = assessed.sheet.rig.stage, assessed.sheet.aims.firmware
    own = hardware(assessed.plant, stage)
    if name == "current":
        return current_loop(own, firmware)
    inner = assessed.current.gains
    if inner is None:
        return None
    return speed_loop(own, assessed.plant, stage=stage, firmware=firmware, current=inner)
