"""Numbers with units: reading them, writing them, and showing them to people."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache

from gainbench.errors import UnitError
from gainbench.units.definitions import TEMPERATURES
from gainbench.units.dimension import Dimension
from gainbench.units.grammar import Amount, amount, has_mass_name

MAX_TEXT_LENGTH = 80
_SPACES = " \u00a0\u2009\u202f"
_NUMBER = re.compile(r"[+\-\N{MINUS SIGN}]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d{1,3}(?!\d))?", re.ASCII)
_NOT_FINITE = re.compile(r"[+-]?(?:nan|inf|infinity)\b", re.IGNORECASE)
_ZERO_CELSIUS = Fraction("273.15")
_ZERO_FAHRENHEIT = Fraction("459.67")
_FAHRENHEIT_STEP = Fraction(5, 9)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Size:
    """One of a unit in the dimension's own: ``factor * pi**pi_power``."""

    factor: Fraction
    pi_power: int

    def apply(self, number: Fraction) -> float:
        """That many of it, rounded once where pi is not in it."""
        return float(number * self.factor) * math.pi**self.pi_power


def parse(text: str, dimension: Dimension) -> float:
    """Read a number with a unit.

    Parameters
    ----------
    text : str
        ``"0.45 mH"``: a decimal number with a point, a space or none, a unit.
    dimension : Dimension
        What is meant.

    Returns
    -------
    float
        In ``dimension.unit``; finite.

    Raises
    ------
    UnitError
        If the text is not a finite number with a unit of that dimension; the message says why.

    Examples
    --------
    >>> parse("1500 rpm", Dimension.SPEED)
    157.07963267948966
    """
    number, unit = _split(text, dimension)
    try:
        if dimension is Dimension.TEMPERATURE:
            value = float(_celsius(number, unit))
        else:
            value = _size(unit, dimension).apply(number)
    except OverflowError:
        value = math.inf
    if not math.isfinite(value):
        raise UnitError("the number is too large", example=dimension.example)
    if value == 0.0 and number != 0 and dimension is not Dimension.TEMPERATURE:
        raise UnitError("the number is too small", example=dimension.example)
    return value + 0.0


def parse_difference(text: str, dimension: Dimension) -> float:
    """Read a plus-or-minus of a quantity: in its own unit, of a temperature in K.

    Parameters
    ----------
    text : str
        ``"5 mohm"``.
    dimension : Dimension
        Of the quantity.

    Returns
    -------
    float
        In ``dimension.unit``, K for a temperature.

    Raises
    ------
    UnitError
        As :func:`parse`.
    """
    difference = Dimension.TEMPERATURE_DIFFERENCE if dimension is Dimension.TEMPERATURE else dimension
    return parse(text, difference)


def unit_size(unit: str, dimension: Dimension) -> float:
    """One of a unit in the dimension's own unit.

    Parameters
    ----------
    unit : str
        ``"rpm"``.
    dimension : Dimension
        What is meant; not a temperature, whose scales differ by more than a factor.

    Returns
    -------
    float
        ``0.10471975511965977`` for rpm as a speed.

    Raises
    ------
    UnitError
        If the text is no unit of that dimension.
    """
    if dimension is Dimension.TEMPERATURE:
        raise UnitError("the scales of temperature differ by more than a factor")
    return _size(unit.strip(_SPACES), dimension).apply(Fraction(1))


def format_quantity(value: float, unit: str, dimension: Dimension, *, digits: int | None = None) -> str:
    """Write a value in a unit.

    Parameters
    ----------
    value : float
        In ``dimension.unit``; finite.
    unit : str
        The unit to write it in, kept as it is spelled.
    dimension : Dimension
        What the value is.
    digits : int, optional
        Significant digits; by default as few as give the same float when read again.

    Returns
    -------
    str
        ``"0.45 mH"``.

    Raises
    ------
    UnitError
        If the unit is not of that dimension, or the value not finite.
    """
    if not math.isfinite(value):
        raise UnitError("only a finite number can be written")
    unit = unit.strip(_SPACES)
    if dimension is Dimension.TEMPERATURE:
        scaled = _in_scale(value, unit)
    else:
        scaled = value / _size(unit, dimension).apply(Fraction(1))
    joint = " " if unit else ""
    if digits is not None:
        return f"{_rounded(scaled, digits)}{joint}{unit}"
    for count in range(1, 18):
        text = f"{float(f'{scaled:.{count}g}')!r}".removesuffix(".0") + joint + unit
        if parse(text, dimension) == value:
            return text
    return f"{scaled!r}{joint}{unit}"


def show(value: float, dimension: Dimension, *, digits: int = 4) -> str:
    """Write a value for people, in the unit that gives it a handy size.

    Parameters
    ----------
    value : float
        In ``dimension.unit``.
    dimension : Dimension
        What it is.
    digits : int
        Significant digits; whole numbers keep all of theirs.

    Returns
    -------
    str
        ``"0.45 ohm"``, ``"1500 rpm"``.
    """
    if not math.isfinite(value):
        return f"{value}"
    units = dimension.people
    chosen = next((unit for unit in reversed(units) if abs(value) >= 0.9995 * _one(unit, dimension)), units[0])
    if value == 0.0:
        chosen = min(units, key=lambda unit: abs(math.log10(_one(unit, dimension))))
    return format_quantity(value, chosen, dimension, digits=digits)


def pretty(text: str) -> str:
    """Typeset a unit: raised dots, powers, the ohm and the micro sign; the result can be read again."""
    for plain, set_ in (("*", "·"), ("^2", "²"), ("^3", "³"), ("degC", "°C"), ("degF", "°F")):
        text = text.replace(plain, set_)
    text = re.sub(r"(?<![A-Za-z])([GMkmu]?)ohm", "\\1\N{GREEK CAPITAL LETTER OMEGA}", text)
    return re.sub(r"(?<![A-Za-z])u(?=[A-Z\N{GREEK CAPITAL LETTER OMEGA}s])", "\N{MICRO SIGN}", text)


def _one(unit: str, dimension: Dimension) -> float:
    return 1.0 if dimension is Dimension.TEMPERATURE else unit_size(unit, dimension)


def _rounded(number: float, digits: int) -> str:
    """That many significant digits, without an exponent where people would not write one."""
    if number == 0.0:
        return "0"
    if abs(number) >= 10.0**digits and abs(number) < 1e9:
        return f"{number:.0f}"
    return f"{number:.{digits}g}"


def _split(text: str, dimension: Dimension) -> tuple[Fraction, str]:
    """Cut a text into its number and its unit, and say what is wrong with the number."""
    example = dimension.example
    if len(text) > MAX_TEXT_LENGTH:
        raise UnitError(f"the text is longer than {MAX_TEXT_LENGTH} characters", example=example)
    body = text.strip(_SPACES)
    if not body:
        raise UnitError(f"{dimension.words} is missing", example=example)
    if _NOT_FINITE.match(body):
        raise UnitError("the number must be finite", example=example)
    match = _NUMBER.match(body)
    if match is None:
        raise UnitError("a number must come first, then the unit", example=example)
    rest = body[match.end() :]
    unit = rest.strip(_SPACES)
    if rest[:1] in {",", "'", "_", "’"} and rest[1:2].isdigit():
        raise UnitError(_separator_hint(body), example=example)
    if unit[:1].isdigit() and not re.match(r"1\s*/", unit):
        raise UnitError("the number has a gap: write it without thousands separators", example=example)
    if unit[:1] in {".", ",", "+"} or re.match(r"[eE][+-]?\d", unit):
        raise UnitError("the number is not a plain decimal number", example=example)
    return Fraction(match.group().replace("\N{MINUS SIGN}", "-")), unit


def _separator_hint(body: str) -> str:
    if "," in body and not re.match(r"[+-]?\d{1,3}(,\d{3})+(\D|$)", body):
        return "write the decimal point as a point, not as a comma"
    return "write the number without thousands separators, and a decimal point as a point"


@lru_cache(maxsize=1024)
def _size(unit: str, dimension: Dimension) -> _Size:
    """One of a unit in the dimension's own, or why it is none."""
    own = amount(dimension.unit)
    try:
        given = _reading(unit, own)
    except UnitError as error:
        raise UnitError(error.reason, example=dimension.example) from None
    if given.roots != own.roots:
        raise UnitError(_mismatch(unit, given, dimension), example=dimension.example)
    return _Size(factor=given.factor / own.factor, pi_power=given.pi_power - own.pi_power)


def _reading(unit: str, own: Amount) -> Amount:
    """The unit with oz and lb as masses; as forces where only that is of the right dimension."""
    if unit in TEMPERATURES and unit != "K":
        raise UnitError(f"{unit} is a point on a scale of temperature; a difference is in K")
    given = amount(unit)
    if given.roots != own.roots and unit and has_mass_name(unit):
        forced = amount(unit, force=True)
        if forced.roots == own.roots:
            return forced
    return given


def _mismatch(unit: str, given: Amount, dimension: Dimension) -> str:
    """Say what the unit is of, what is meant, and what is often behind it."""
    own = dict(amount(dimension.unit).roots)
    got = dict(given.roots)
    gap = {root: own.get(root, 0) - got.get(root, 0) for root in own.keys() | got.keys()}
    gap = {root: power for root, power in gap.items() if power}
    if not unit:
        return f"the unit is missing, {dimension.words} is meant"
    if dimension in {Dimension.NUMBER, Dimension.SHARE}:
        return f"this is {_words(given)}, {dimension.words} is meant"
    if got == {"second": -1} and gap == {"radian": 1}:
        return f"{unit} does not say what is counted: write Hz, rpm or rad/s"
    if got == {"second": -2} and gap == {"radian": 1}:
        return f"{unit} does not say what is counted: write rpm/s or rad/s^2"
    if dimension is Dimension.TORQUE and gap == {"radian": -1}:
        return "energy is not torque: write N*m"
    if dimension is Dimension.ENERGY and gap == {"radian": 1}:
        return "torque is not energy: write J"
    if set(gap) == {"radian"}:
        return f"{unit} and {dimension.unit} differ by an angle: {dimension.words} is in {dimension.unit}"
    if gap == {"meter": 1, "second": -2}:
        return f"{unit} is made of a mass, {dimension.words} is made of a force: write kgf, gf, lbf or ozf"
    return f"this is {_words(given)}, {dimension.words} is meant"


def _words(given: Amount) -> str:
    """What a unit is of, as far as there is a word for it."""
    if not given.roots:
        return "a pure number"
    known = (one for one in Dimension if one is not Dimension.TEMPERATURE)
    return next((one.words for one in known if amount(one.unit).roots == given.roots), "another kind of quantity")


def _celsius(number: Fraction, unit: str) -> Fraction:
    """A point on one of the scales as degC."""
    scale = TEMPERATURES.get(unit)
    if scale == "degC":
        return number
    if scale == "K":
        return number - _ZERO_CELSIUS
    if scale == "degF":
        return (number + _ZERO_FAHRENHEIT) * _FAHRENHEIT_STEP - _ZERO_CELSIUS
    if unit and (given := amount(unit)).roots != amount("K").roots:
        raise UnitError(f"this is {_words(given)}, a temperature is meant", example=Dimension.TEMPERATURE.example)
    raise UnitError("write the temperature in degC, degF or K", example=Dimension.TEMPERATURE.example)


def _in_scale(value: float, unit: str) -> float:
    """A temperature in degC on another scale."""
    scale = TEMPERATURES.get(unit)
    exact = Fraction(value)
    if scale == "degC":
        return value
    if scale == "K":
        return float(exact + _ZERO_CELSIUS)
    if scale == "degF":
        return float((exact + _ZERO_CELSIUS) / _FAHRENHEIT_STEP - _ZERO_FAHRENHEIT)
    raise UnitError("write the temperature in degC, degF or K", example=Dimension.TEMPERATURE.example)
