"""What the columns of a log may hold, guessed from their names and units; a guess is shown, never used unseen."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from gainbench.errors import UnitError
from gainbench.model import SIGNAL_DIMENSIONS, LogColumn, SignalName
from gainbench.units import Dimension, unit_size

_UNIT_WORDS = {
    "volt": "V", "volts": "V", "millivolt": "mV", "millivolts": "mV",
    "amp": "A", "amps": "A", "ampere": "A", "amperes": "A", "milliamp": "mA", "milliamps": "mA",
    "sec": "s", "secs": "s", "second": "s", "seconds": "s", "sekunden": "s", "sekunde": "s",
    "msec": "ms", "millisecond": "ms", "milliseconds": "ms", "usec": "us", "microseconds": "us",
    "u/min": "rpm", "1/min": "rpm", "min-1": "rpm", "min^-1": "rpm", "r/min": "rpm", "rev/min": "rpm",
    "rpm": "rpm", "upm": "rpm", "radian": "rad", "radians": "rad", "degrees": "deg", "grad": "deg",
    "nm": "N*m", "newtonmeter": "N*m", "mnm": "mN*m", "rads": "rad/s", "radps": "rad/s",
}  # fmt: skip
"""Units as loggers spell them, in small letters, and as a sheet does."""
_UNIT_LIKE = frozenset(["", "-", "1", "%", "ticks", "tick", "counts", "count", "cnt", "inc", "incr", "lsb", "digits"])
COUNTED = frozenset(["%", "ticks", "tick", "counts", "count", "cnt", "inc", "incr", "lsb", "digits"])
"""What a column counts that holds no physical unit."""
_COUNTED_WORDS = frozenset(["duty", "dutycycle", "pwm", "adc", "raw", "lsb", "counts", "ticks", "tastgrad"])
_OTHER_WORDS = frozenset(
    [
        "bus",
        "vbus",
        "ubus",
        "dc",
        "vdc",
        "udc",
        "link",
        "supply",
        "battery",
        "batt",
        "zwischenkreis",
        "versorgung",
        "id",
    ]
)
"""Words of a name that speak of a voltage or a current beside the machine's own."""
_UNIT_DIMENSIONS = tuple(one for one in Dimension if one not in {Dimension.NUMBER, Dimension.TEMPERATURE})
_IN_BRACKETS = re.compile(r"^(?P<name>.*?)\s*(?:\[(?P<square>[^\]]*)\]|\((?P<round>[^)]*)\))\s*$")
_BEHIND_A_MARK = re.compile(r"^(?P<name>[^/]+?)\s*(?:/|,|\s+in\s+)\s*(?P<unit>\S+)$")
_BEHIND_A_LINE = re.compile(r"^(?P<name>.+)_(?P<unit>[A-Za-zµ%°]+)$")
_WORD = re.compile(r"[A-Z]?[a-zäöü]+|[A-Z]+(?![a-zäöü])|[a-zäöü]+|\d+")

_WORDS: dict[SignalName, frozenset[str]] = {
    SignalName.TIME: frozenset(["t", "time", "zeit", "timestamp", "stamp", "seconds", "second", "sekunden"]),
    SignalName.VOLTAGE: frozenset(
        ["u", "v", "uq", "vq", "ua", "va", "voltage", "volt", "volts", "spannung", "vm", "umot", "vmot", "vmotor"]
    ),
    SignalName.CURRENT: frozenset(
        ["i", "iq", "ia", "cur", "curr", "current", "strom", "amps", "amp", "amperes", "imot", "imotor"]
    ),
    SignalName.TORQUE: frozenset(["torque", "tau", "trq", "moment", "drehmoment", "tq"]),
    SignalName.SPEED: frozenset(
        [
            "w",
            "n",
            "omega",
            "speed",
            "vel",
            "velocity",
            "drehzahl",
            "geschwindigkeit",
            "rpm",
            "spd",
            "dq",
            "dqm",
            "wm",
            "nist",
        ]
    ),
    SignalName.ANGLE: frozenset(
        ["pos", "position", "angle", "theta", "phi", "winkel", "encoder", "lage", "q", "qm", "enc"]
    ),
}
"""Words that a column's name holds, by what it then may hold."""
_REFERENCE = frozenset(
    [
        "ref",
        "reference",
        "set",
        "setpoint",
        "cmd",
        "command",
        "commanded",
        "target",
        "desired",
        "demand",
        "soll",
        "sollwert",
        "wanted",
        "sp",
    ]
)
_REFERENCES = {
    SignalName.SPEED: SignalName.SPEED_REFERENCE,
    SignalName.CURRENT: SignalName.CURRENT_REFERENCE,
}
_IN_FRONT = ("soll", "ist", "set", "ref", "cmd")
"""Words that are written together with the one behind them."""
_LETTERS = frozenset(["t", "u", "v", "i", "w", "n", "q"])
"""Words that say something only where nothing else does."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ColumnName:
    """A column's name, and the unit that stands with it."""

    name: str
    unit: str
    """As the file spells it; empty where there is none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ColumnGuess:
    """What a column may hold."""

    signal: SignalName
    unit: str
    """As a sheet spells it; empty where the file gives none that fits, so that the user has to."""


@dataclass(frozen=True, slots=True, kw_only=True)
class HeaderRows:
    """Header rows sorted by what they hold."""

    names: tuple[ColumnName, ...]
    others: tuple[tuple[str, ...], ...]
    """For each column what other header rows call it."""


def read_header(rows: Sequence[Sequence[str]], columns: int) -> HeaderRows:
    """Sort header rows into names, units and other names.

    Parameters
    ----------
    rows : sequence of sequences of str
        From top to bottom, each with a text for every column.
    columns : int
        How many columns there are.

    Returns
    -------
    HeaderRows
        Columns without a name are called ``column 1``, ``column 2``, by their place.
    """
    shares = [_unit_share(row) for row in rows]
    best = max(range(len(rows)), key=lambda index: shares[index], default=0)
    unit_row = best if len(rows) > 1 and shares[best] > 0.6 and best > 0 else None
    named = [index for index in range(len(rows)) if index != unit_row]
    # The names stand above their units; other rows above them may be anything that was written there.
    chosen = (unit_row - 1 if unit_row is not None else len(rows) - 1) if named else None
    names, others = [], []
    for column in range(columns):
        text = rows[chosen][column].strip() if chosen is not None else ""
        found = split_name(text)
        unit = rows[unit_row][column].strip().strip("[]()").strip() if unit_row is not None else found.unit
        names.append(ColumnName(name=text or f"column {column + 1}", unit=unit or found.unit))
        rest = (rows[index][column].strip() for index in named if index != chosen)
        others.append(tuple(one for one in (found.name if found.name != text else "", *rest) if one))
    return HeaderRows(names=tuple(names), others=tuple(others))


def _unit_share(row: Sequence[str]) -> float:
    """Share of a row's filled fields that are units; a row without a single true unit has none."""
    fields = [field.strip().strip("[]()").strip() for field in row]
    filled = [field for field in fields if field]
    if not any(spelled(field) for field in filled):
        return 0.0
    return sum(bool(spelled(field)) or field.lower() in _UNIT_LIKE for field in filled) / len(filled)


def spelled(unit: str) -> str:
    """A unit as a sheet spells it.

    Parameters
    ----------
    unit : str
        As the file spells it.

    Returns
    -------
    str
        Empty where it is no unit that is known.
    """
    text = unit.strip()
    known = _UNIT_WORDS.get(text.lower().replace(" ", ""), text)
    # Small letters alone must not make a unit of a name: S for s, a for A.
    return known if known and any(_fits(known, dimension) for dimension in _UNIT_DIMENSIONS) else ""


def _fits(unit: str, dimension: Dimension) -> bool:
    try:
        unit_size(unit, dimension)
    except UnitError:
        return False
    return True


def split_name(text: str) -> ColumnName:
    """Cut a header such as ``speed [rpm]``, ``I / A`` or ``t_ms`` into name and unit.

    Parameters
    ----------
    text : str
        A column's header.

    Returns
    -------
    ColumnName
        The whole text as the name where no unit stands with it.
    """
    match = _IN_BRACKETS.match(text)
    if match is not None:
        return ColumnName(name=match["name"].strip(), unit=(match["square"] or match["round"] or "").strip())
    for pattern in (_BEHIND_A_MARK, _BEHIND_A_LINE):
        match = pattern.match(text)
        if match is not None and spelled(match["unit"]):
            return ColumnName(name=match["name"].strip(), unit=match["unit"].strip())
    return ColumnName(name=text, unit="")


def guess_column(name: str, found: str, *, others: Sequence[str] = ()) -> ColumnGuess | None:
    """Guess what a column holds.

    Parameters
    ----------
    name : str
        Its header.
    found : str
        Its unit as the file spells it; empty where there is none.
    others : sequence of str
        What other header rows call it.

    Returns
    -------
    ColumnGuess or None
        None where neither name nor unit says anything, or they contradict each other.
    """
    unit = spelled(found)
    words = [_words(text) for text in (split_name(name).name, *others)]
    signal = next((one for one in map(_by_words, words) if one is not None), None)
    fitting = [one for one, dimension in SIGNAL_DIMENSIONS.items() if unit and _fits(unit, dimension)]
    reference = any(word in _REFERENCE for group in words for word in group)
    if any(word in _OTHER_WORDS or word in _COUNTED_WORDS for group in words for word in group):
        return None
    if signal is None and fitting:
        signal = fitting[0]
    if signal is None or (fitting and signal not in fitting):
        return None
    if unit and not fitting:
        return None
    if reference:
        if signal not in _REFERENCES:
            return None
        signal = _REFERENCES[signal]
    return ColumnGuess(signal=signal, unit=unit)


def counted_word(name: str) -> str:
    """The word of a column's name that says that it holds a duty or counts; empty where none does."""
    return next((word for word in _words(name) if word in _COUNTED_WORDS), "")


def _words(text: str) -> list[str]:
    """The words of a name, in small letters; setvel and Sollstrom are two words each."""
    found: list[str] = []
    for word in _WORD.findall(text.replace("µ", "u")):
        small = word.lower()
        front = next((one for one in _IN_FRONT if small.startswith(one) and len(small) > len(one) + 1), "")
        found += [front, small.removeprefix(front)] if front and small not in _REFERENCE else [small]
    return found


def _by_words(words: Sequence[str]) -> SignalName | None:
    """The signal that the words of a name speak of; a single letter only where no whole word does."""
    for letters in (False, True):
        for word in words:
            if (word in _LETTERS) is not letters or (letters and len(words) > 2):
                continue
            found = next((signal for signal, known in _WORDS.items() if word in known), None)
            if found is not None:
                return found
    return None


def suggested(names: Sequence[str], guesses: Sequence[ColumnGuess | None]) -> tuple[LogColumn, ...]:
    """A mapping to start from: for each signal the first column that is guessed to hold it in a known unit.

    Parameters
    ----------
    names : sequence of str
        The columns' headers.
    guesses : sequence of ColumnGuess or None
        What they may hold, in the same order.

    Returns
    -------
    tuple of LogColumn
        In the order of the signals.
    """
    found: dict[SignalName, LogColumn] = {}
    for name, guess in zip(names, guesses, strict=True):
        if guess is not None and guess.unit and guess.signal not in found:
            found[guess.signal] = LogColumn(signal=guess.signal, column=name, unit=guess.unit)
    return tuple(found[signal] for signal in SignalName if signal in found)
