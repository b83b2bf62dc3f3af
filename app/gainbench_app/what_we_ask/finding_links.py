"""Which entry of the sheet a finding asks to move."""

from __future__ import annotations

import re
from functools import cache

from gainbench.model import Sheet, TrainKind
from gainbench.results import Finding
from gainbench.sheetfile import quantity_paths
from gainbench_app.sheet_edits import METHOD_KEYS, integral_key, loop_aims

_LOOPS = ("current", "speed")
_COUNTS = (
    "stage.encoder_counts",
    "stage.speed_window",
    "stage.speed_delay",
    "stage.update_delay",
    "machine.pole_pairs",
    "aims.firmware.back_emf_feedforward",
    "aims.firmware.windup",
    "aims.firmware.integrator",
)
"""Entries that are no quantities."""
_PHRASES: tuple[tuple[str, str], ...] = (
    (r"faster speed loop|speed loop below", "aims.speed.crossover"),
    (r"faster current loop|current loop twice", "aims.current.crossover"),
    (r"phase margin|more margin", "phase_margin"),
    (r"crossover", "crossover"),
    (r"Ki\b", "ki"),
    (r"gains\b", "kp"),
    (r"a ramp|the ramps", "duty.reference_ramp"),
    (r"more time", "duty.length"),
    (r"slower stop", "duty.stop_ramp"),
    (r"pause", "duty.length"),
    (r"current limit", "stage.current_limit"),
    (r"encoder", "stage.encoder_counts"),
    (r"the bus\b", "stage.bus_voltage"),
    (r"shaft", "train.shaft_stiffness"),
    (r"ratio", "train.ratio"),
    (r"the load\b", "duty.load_step"),
)
"""What findings call entries in words; a key alone is of the loop that the finding is about."""
_KEY = re.compile(r"\b[a-z]+(?:_[a-z]+)+\b")


def what_to_move(finding: Finding, sheet: Sheet) -> str:
    """The entry that a finding's advice names first; without one, what its reason or its subject name.

    Parameters
    ----------
    finding : Finding
        Of an assessment.
    sheet : Sheet
        In force.

    Returns
    -------
    str
        A dotted path, ``stage.speed_window``; ``aims.speed.method`` where the loop's method does not ask for what is
        named; the name of a table, ``machine``, where nothing is named.
    """
    for text in (finding.advice, finding.reason):
        path = _first_named(text, finding.subject, sheet)
        if path:
            return path
    return f"aims.{finding.subject}.method" if finding.subject in _LOOPS else finding.subject


def _first_named(text: str, subject: str, sheet: Sheet) -> str:
    found: list[tuple[int, str]] = []
    known = _keys()
    for match in _KEY.finditer(text):
        if match[0] in known:
            found.append((match.start(), known[match[0]]))
        elif subject in _LOOPS and match[0] in {"phase_margin", "natural_frequency", "reference_weight"}:
            found.append((match.start(), f"aims.{subject}.{match[0]}"))
    for phrase, path in _PHRASES:
        for match in re.finditer(phrase, text):
            if "." in path:
                found.append((match.start(), path))
            elif subject in _LOOPS:
                found.append((match.start(), f"aims.{subject}.{path}"))
    for _, path in sorted(found):
        there = _there(path, sheet)
        if there:
            return there
    return ""


@cache
def _keys() -> dict[str, str]:
    """Paths of the entries that no other table has, by their last part."""
    return {path.rpartition(".")[2]: path for path in (*quantity_paths(), *_COUNTS) if not _of_a_loop(path)}


def _of_a_loop(path: str) -> bool:
    return path.startswith(("aims.current.", "aims.speed.")) and not path.endswith("reference_weight")


def _there(path: str, sheet: Sheet) -> str:
    """The path, or what stands for it; empty where the sheet has no such entry."""
    if path.startswith("train.shaft_"):
        return path if sheet.rig.train.kind is TrainKind.ELASTIC else ""
    if not _of_a_loop(path):
        return path
    _, loop, key = path.split(".")
    aims = loop_aims(sheet, loop)
    keys = METHOD_KEYS[aims.method]
    if "kp" in keys:
        return f"aims.{loop}.{'kp' if key == 'crossover' else integral_key(aims.hand) if key == 'ki' else 'kp'}"
    if key in {"crossover", "kp"}:
        key = next((one for one in ("crossover", "bandwidth", "natural_frequency", "spread") if one in keys), key)
    if key == "ki" and "phase_margin" in keys:
        # More integral part is less margin left.
        key = "phase_margin"
    return f"aims.{loop}.{key}" if key in keys else f"aims.{loop}.method"
