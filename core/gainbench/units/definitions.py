"""Unit definitions and their spellings.

The definitions are read by pint into an empty registry: its own set takes the radian for a pure number, and with it
rad/s for Hz and joules for newton metres. ``pi_number`` stands for pi, so that every factor stays an exact fraction.

References
----------
NIST Special Publication 811, 2008 edition, appendix B.8: the inch, the pound, the standard acceleration of gravity
and the horsepowers are exact by definition.
"""

from __future__ import annotations

DEFINITIONS = """
meter = [length]
kilogram = [mass]
second = [time]
ampere = [current]
kelvin = [temperature]
radian = [angle]
pi_number = [pi]

percent = 1/100 * radian / radian
gram = 1/1000 * kilogram
pound = 0.45359237 * kilogram
ounce = 1/16 * pound
slug = pound * 9.80665 / 0.3048
inch = 0.0254 * meter
foot = 12 * inch
minute = 60 * second
hour = 60 * minute
turn = 2 * pi_number * radian
kiloturn = 1000 * turn
degree = 1/360 * turn
arcminute = 1/60 * degree
arcsecond = 1/60 * arcminute
hertz = turn / second
rpm = turn / minute
rps = turn / second

newton = kilogram * meter / second ** 2
gravity = 9.80665 * meter / second ** 2
kilogram_force = kilogram * gravity
gram_force = gram * gravity
pound_force = pound * gravity
ounce_force = ounce * gravity
dyne = 1/100000 * newton

joule = newton * meter * radian
watt = joule / second
volt = watt / ampere
ohm = volt / ampere
henry = volt * second / ampere
horsepower = 550 * foot * radian * pound_force / second
metric_horsepower = 75 * kilogram_force * meter * radian / second
electric_horsepower = 746 * watt
"""
"""In pint's notation. A power is energy per time, and energy has the dimension of torque times angle."""

SPELLINGS: dict[str, str] = {
    "m": "meter",
    "meter": "meter",
    "metre": "meter",
    "in": "inch",
    "inch": "inch",
    "ft": "foot",
    "foot": "foot",
    "g": "gram",
    "gram": "gram",
    "lb": "pound",
    "lbm": "pound",
    "oz": "ounce",
    "slug": "slug",
    "s": "second",
    "sec": "second",
    "second": "second",
    "min": "minute",
    "h": "hour",
    "A": "ampere",
    "amp": "ampere",
    "ampere": "ampere",
    "V": "volt",
    "volt": "volt",
    "ohm": "ohm",
    "Ohm": "ohm",
    "OHM": "ohm",
    "ohms": "ohm",
    "\N{GREEK CAPITAL LETTER OMEGA}": "ohm",
    "\N{OHM SIGN}": "ohm",
    "H": "henry",
    "henry": "henry",
    "N": "newton",
    "newton": "newton",
    "kgf": "kilogram_force",
    "gf": "gram_force",
    "lbf": "pound_force",
    "ozf": "ounce_force",
    "dyn": "dyne",
    "dyne": "dyne",
    "J": "joule",
    "joule": "joule",
    "W": "watt",
    "watt": "watt",
    "hp": "horsepower",
    "hp_metric": "metric_horsepower",
    "PS": "metric_horsepower",
    "hp_electric": "electric_horsepower",
    "rad": "radian",
    "radian": "radian",
    "deg": "degree",
    "degree": "degree",
    "°": "degree",
    "turn": "turn",
    "turns": "turn",
    "rev": "turn",
    "revs": "turn",
    "r": "turn",
    "kr": "kiloturn",
    "arcmin": "arcminute",
    "arcsec": "arcsecond",
    "Hz": "hertz",
    "hertz": "hertz",
    "rpm": "rpm",
    "RPM": "rpm",
    "rps": "rps",
    "K": "kelvin",
    "%": "percent",
}
"""What a user may write, and the definition it means."""

PREFIXES: dict[str, int] = {
    "G": 9,
    "M": 6,
    "k": 3,
    "da": 1,
    "d": -1,
    "c": -2,
    "m": -3,
    "u": -6,
    "\N{MICRO SIGN}": -6,
    "\N{GREEK SMALL LETTER MU}": -6,
    "n": -9,
    "p": -12,
}
"""Powers of ten."""

PREFIXED: frozenset[str] = frozenset(
    [
        *("m", "g", "s", "sec", "A", "V", "H", "N", "J", "W", "Hz", "rad", "rpm", "K"),
        *("ohm", "Ohm", "\N{GREEK CAPITAL LETTER OMEGA}", "\N{OHM SIGN}"),
    ]
)
"""Spellings that take a prefix."""

FORCE_OF_MASS: dict[str, str] = {"pound": "pound_force", "ounce": "ounce_force"}
"""Units of mass whose name the trade also gives to the force."""

RUN_TOGETHER: tuple[tuple[frozenset[str], frozenset[str]], ...] = (
    (
        frozenset(["newton", "kilogram_force", "gram_force", "pound_force", "ounce_force"])
        | frozenset(["dyne", "gram", "pound", "ounce"]),
        frozenset(["meter", "inch", "foot"]),
    ),
    (frozenset(["inch", "foot"]), frozenset(["pound", "ounce", "pound_force", "ounce_force"])),
    (frozenset(["volt", "ampere"]), frozenset(["second"])),
)
"""Pairs that are written without a sign between them: Nm, gcm2, ozin, ftlb, Vs; a torque also with seconds, Nms."""

TEMPERATURES: dict[str, str] = {"degC": "degC", "°C": "degC", "℃": "degC", "degF": "degF", "°F": "degF", "K": "K"}
"""Scales of temperature, and their plain names."""

HINTS: dict[str, str] = {
    "C": "write degC for a temperature",
    "F": "write degF for a temperature",
    "Arms": "write A: machine.current_values says whether it is rms or peak",
    "Apk": "write A: machine.current_values says whether it is rms or peak",
    "A_rms": "write A: machine.current_values says whether it is rms or peak",
    "A_pk": "write A: machine.current_values says whether it is rms or peak",
    "Vrms": "write V: machine.back_emf_values says which volt it is",
    "V_rms": "write V: machine.back_emf_values says which volt it is",
    "Vpk": "write V: machine.back_emf_values says which volt it is",
    "VDC": "write V",
    "Vdc": "write V",
    "cps": "write Hz",
    "kp": "write kgf",
    "U": "write rpm for turns per minute",
    "degK": "write K",
}
"""What to write in place of spellings that are seen and not taken."""
