"""The sheet that a kept tuning is assessed on: its gains by hand, all else as it is."""

from __future__ import annotations

from dataclasses import replace

from gainbench.model import DesignMethod, KeptTuning, Sheet


def with_kept(sheet: Sheet, kept: KeptTuning) -> Sheet:
    """A sheet with the gains of a kept tuning as gains by hand.

    Parameters
    ----------
    sheet : Sheet
        Whose rig, firmware and duty the tuning is tried on.
    kept : KeptTuning
        From its shelf, or from another one.

    Returns
    -------
    Sheet
        Both loops by hand; the rig, the firmware's arithmetic, the duty and the shelf stay.
    """
    aims = replace(
        sheet.aims,
        current=replace(sheet.aims.current, method=DesignMethod.BY_HAND, hand=kept.current),
        speed=replace(sheet.aims.speed, method=DesignMethod.BY_HAND, hand=kept.speed),
    )
    return replace(sheet, aims=aims)
