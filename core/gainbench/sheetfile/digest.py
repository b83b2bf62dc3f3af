"""A sheet's digest: the same for the same content, however it is written."""

from __future__ import annotations

import hashlib
import json
from dataclasses import MISSING, Field, fields, is_dataclass, replace
from enum import Enum

from gainbench.model import Sheet
from gainbench.sheetfile.document import SheetDocument, parse_sheet


def digest(content: Sheet | SheetDocument | str) -> str:
    """SHA-256 of what a sheet says.

    Comments, blanks, the order of keys, the choice of units, the title and the evidence do not enter; values that
    are left out and values that repeat the default give the same digest.

    Parameters
    ----------
    content : Sheet, SheetDocument or str
        A sheet, or its text.

    Returns
    -------
    str
        64 hexadecimal digits.

    Raises
    ------
    SheetError
        If a text is no sheet.
    """
    return _hashed({key: value for key, value in _content(content).items() if key not in {"title", "evidence"}})


def assessed_digest(content: Sheet | SheetDocument | str) -> str:
    """SHA-256 of what an assessment follows from: the rig, the aims and the duty.

    Unlike :func:`digest` it stays the same when a tuning is kept or a tolerance is changed.

    Parameters
    ----------
    content : Sheet, SheetDocument or str
        A sheet, or its text.

    Returns
    -------
    str
        64 hexadecimal digits.

    Raises
    ------
    SheetError
        If a text is no sheet.
    """
    parts = _content(content)
    return _hashed({key: parts[key] for key in ("rig", "aims", "duty")})


def _content(content: Sheet | SheetDocument | str) -> dict[str, object]:
    if isinstance(content, str):
        content = parse_sheet(content, "sheet")
    sheet = content.sheet if isinstance(content, SheetDocument) else content
    duty = replace(sheet.duty, load_at=None) if sheet.duty.load_at == sheet.duty.length / 2.0 else sheet.duty
    return {one.name: _plain(getattr(replace(sheet, duty=duty), one.name)) for one in fields(sheet)}


def _hashed(value: object) -> str:
    text = json.dumps(value, sort_keys=True, ensure_ascii=True, separators=(",", ":"))
    return hashlib.sha256(text.encode("ascii")).hexdigest()


def _plain(value: object) -> object:
    """Plain values for JSON; fields at their default are left out, so that a later key does not change old digests."""
    if isinstance(value, Enum):
        return value.value
    if is_dataclass(value):
        pairs = ((one.name, getattr(value, one.name), _default(one)) for one in fields(value))
        return {name: _plain(own) for name, own, default in pairs if default is MISSING or own != default}
    if isinstance(value, tuple):
        return [_plain(one) for one in value]
    # 3 and 3.0 are one number in a sheet.
    if isinstance(value, int) and not isinstance(value, bool):
        return float(value)
    return value


def _default(one: Field[object]) -> object:
    return one.default_factory() if one.default_factory is not MISSING else one.default
