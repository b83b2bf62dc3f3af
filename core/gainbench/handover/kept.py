"""The sheet that a kept tuning is assessed on: its gains by hand, all else as it is."""

from __future__ import annotations

from dataclasses import replace

from gainbench.errors import HandoverError
from gainbench.model import DesignMethod, Sheet


def kept_sheet(sheet: Sheet, name: str) -> Sheet:
    """A sheet with the gains of one of its kept tunings as gains by hand.

    Parameters
    ----------
    sheet : Sheet
        With a shelf.
    name : str
        The kept tuning's name.

    Returns
    -------
    Sheet
        Both loops by hand; the rig, the firmware's arithmetic and the duty stay.

    Raises
    ------
    HandoverError
        If the shelf holds no tuning of that name; the message names those it holds.
    """
    kept = next((one for one in sheet.kept if one.name.strip() == name.strip()), None)
    if kept is None:
        names = ", ".join(f'"{one.name}"' for one in sheet.kept)
        held = f"it holds {names}" if names else "it is empty"
        raise HandoverError(f'the shelf holds no tuning "{name}"; {held}')
    aims = replace(
        sheet.aims,
        current=replace(sheet.aims.current, method=DesignMethod.BY_HAND, hand=kept.current),
        speed=replace(sheet.aims.speed, method=DesignMethod.BY_HAND, hand=kept.speed),
    )
    return replace(sheet, aims=aims)
