"""The kept tuning of a name, on its sheet."""

from __future__ import annotations

from gainbench.errors import HandoverError
from gainbench.kept import with_kept
from gainbench.model import Sheet


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
    return with_kept(sheet, kept)
