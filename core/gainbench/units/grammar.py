"""Unit texts: a strict little grammar, and what a text amounts to in base units.

::

    unit    = factor { ("*" | "." | "-" | " " | "/") factor }      read from left to right
    factor  = ( NAME | "1" | "(" unit ")" ) [ power ]
    power   = ("^" | "**") [ "-" ] DIGIT | [ "-" ] DIGIT | superscript

The dot is the raised one as well. A minus between names is a hyphen, ``oz-in``; before a digit it is the sign of a
power, ``min-1``. Nothing is evaluated; length, depth and powers are bounded.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from difflib import get_close_matches
from fractions import Fraction
from functools import cache, lru_cache
from typing import TYPE_CHECKING, Any

from gainbench.errors import UnitError
from gainbench.units.definitions import (
    DEFINITIONS,
    FORCE_OF_MASS,
    HINTS,
    PREFIXED,
    PREFIXES,
    RUN_TOGETHER,
    SPELLINGS,
    TEMPERATURES,
)

if TYPE_CHECKING:
    from pint import UnitRegistry

MAX_UNIT_LENGTH = 40
_MAX_POWER = 4
_MAX_DEPTH = 2
_NAME = r"[A-Za-z_%°℃µ\N{GREEK SMALL LETTER MU}\N{GREEK CAPITAL LETTER OMEGA}\N{OHM SIGN}]+"
_SUPERSCRIPT = str.maketrans("⁻¹²³⁴", "-1234")
_TOKEN = re.compile(
    rf"(?P<name>{_NAME})"
    r"|(?P<power>(?:\^|\*\*) ?-?[0-9]+|-[0-9]+)"
    r"|(?P<superscript>⁻?[¹²³⁴])"
    r"|(?P<digits>[0-9]+)"
    r"|(?P<sign>[*/().·⋅\-])"
    r"|(?P<space>[ \u00a0\u2009\u202f]+)"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Amount:
    """One of a unit in base units: ``factor * pi**pi_power`` of ``roots``."""

    factor: Fraction
    pi_power: int
    roots: tuple[tuple[str, int], ...]
    """Base units with their powers, sorted; angle among them, pi not."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Factor:
    """A named unit to a power."""

    unit: str
    ten: int
    power: int


@cache
def _registry() -> UnitRegistry[Any]:
    """The registry of our own definitions; built at the first use, since pint takes a third of a second to import."""
    from pint import UnitRegistry

    registry: UnitRegistry[Any] = UnitRegistry(None, non_int_type=Fraction)
    for line in DEFINITIONS.splitlines():
        if line:
            registry.define(line)
    return registry


@lru_cache(maxsize=1024)
def amount(text: str, *, force: bool = False) -> Amount:
    """What one of a unit is in base units.

    Parameters
    ----------
    text : str
        The unit, ``mN*m/A``; empty for a pure number.
    force : bool
        True reads ``oz`` and ``lb`` as forces, else they are masses.

    Returns
    -------
    Amount
        Exact factor and base units.

    Raises
    ------
    UnitError
        If the text is no unit.
    """
    total, pi_power, ten = Fraction(1), 0, 0
    powers: dict[str, int] = {}
    for factor in _factors(text or "1"):
        name = FORCE_OF_MASS.get(factor.unit, factor.unit) if force else factor.unit
        size, pi_count, roots = _base(name)
        total *= size**factor.power
        pi_power += pi_count * factor.power
        ten += factor.ten * factor.power
        for root, power in roots:
            powers[root] = powers.get(root, 0) + power * factor.power
    roots = tuple(sorted((root, power) for root, power in powers.items() if power))
    return Amount(factor=total * Fraction(10) ** ten, pi_power=pi_power, roots=roots)


@cache
def _base(name: str) -> tuple[Fraction, int, tuple[tuple[str, int], ...]]:
    """Factor, power of pi and base units of one definition."""
    factor, unit = _registry().get_root_units(_registry().UnitsContainer({name: 1}))
    powers = {root: int(str(power)) for root, power in unit._units.items()}
    pi_power = powers.pop("pi_number", 0)
    return Fraction(str(factor)), pi_power, tuple(sorted(powers.items()))


def has_mass_name(text: str) -> bool:
    """Whether a unit holds a name that the trade gives to a mass and to a force."""
    return any(factor.unit in FORCE_OF_MASS for factor in _factors(text))


@lru_cache(maxsize=1024)
def _factors(text: str) -> tuple[_Factor, ...]:
    """Read a unit text into its factors."""
    if len(text) > MAX_UNIT_LENGTH:
        raise UnitError(f"the unit is longer than {MAX_UNIT_LENGTH} characters")
    reader = _Reader(tokens=_tokens(text), text=text)
    found = reader.product(depth=0)
    if reader.position < len(reader.tokens):
        raise UnitError(f'"{reader.tokens[reader.position][1]}" is out of place in the unit "{text}"')
    return tuple(found)


def _tokens(text: str) -> list[tuple[str, str]]:
    """Cut a unit text into tokens; spaces stay only where they multiply."""
    tokens: list[tuple[str, str]] = []
    position = 0
    while position < len(text):
        match = _TOKEN.match(text, position)
        if match is None:
            raise UnitError(f"{text[position]!a} does not belong in a unit")
        tokens.append((str(match.lastgroup), match.group()))
        position = match.end()
    kept: list[tuple[str, str]] = []
    for index, token in enumerate(tokens):
        if token[0] != "space":
            kept.append(token)
            continue
        before = kept[-1] if kept else ("sign", "(")
        after = tokens[index + 1] if index + 1 < len(tokens) else ("sign", ")")
        ends = before[0] != "sign" or before[1] == ")"
        if ends and (after[0] in {"name", "digits"} or after[1] == "("):
            kept.append(("sign", "*"))
    return kept


@dataclass(slots=True, kw_only=True)
class _Reader:
    """A place in a list of tokens."""

    tokens: list[tuple[str, str]]
    text: str
    position: int = 0

    def take(self, *kinds: str) -> str | None:
        """The next token if it is of one of these kinds."""
        if self.position < len(self.tokens) and self.tokens[self.position][0] in kinds:
            self.position += 1
            return self.tokens[self.position - 1][1]
        return None

    def take_sign(self, signs: str) -> str | None:
        """The next token if it is one of these signs."""
        if self.position < len(self.tokens):
            kind, text = self.tokens[self.position]
            if kind == "sign" and text in signs:
                self.position += 1
                return text
        return None

    def product(self, *, depth: int) -> list[_Factor]:
        found = self.factor(depth=depth)
        while (sign := self.take_sign("*.·⋅-/")) is not None:
            following = self.factor(depth=depth)
            found += _raised(following, -1) if sign == "/" else following
        return found

    def factor(self, *, depth: int) -> list[_Factor]:
        if self.take_sign("(") is not None:
            if depth == _MAX_DEPTH:
                raise UnitError(f'the unit "{self.text}" has too many brackets')
            found = self.product(depth=depth + 1)
            if self.take_sign(")") is None:
                raise UnitError(f'a bracket of the unit "{self.text}" is not closed')
            return _raised(found, self.power())
        digits = self.take("digits")
        if digits == "1":
            return []
        if digits is not None:
            hint = "; a thousand turns per minute are krpm" if digits == "1000" else ""
            raise UnitError(f'the number {digits} is out of place in the unit "{self.text}"{hint}')
        name = self.take("name")
        if name is None:
            raise UnitError(f'the unit "{self.text}" is not complete')
        found = _named(name)
        return [*found[:-1], *_raised(found[-1:], self.power())]

    def power(self) -> int:
        """The power that follows, 1 where there is none."""
        text = self.take("power", "superscript", "digits")
        if text is None:
            return 1
        power = int(text.lstrip("^*").translate(_SUPERSCRIPT))
        if not 1 <= abs(power) <= _MAX_POWER:
            raise UnitError(f'the power {power} in the unit "{self.text}" is not among 1 to {_MAX_POWER}')
        return power


def _raised(factors: list[_Factor], power: int) -> list[_Factor]:
    return [_Factor(unit=one.unit, ten=one.ten, power=one.power * power) for one in factors]


@lru_cache(maxsize=256)
def _single(name: str) -> _Factor | None:
    """A spelling with or without a prefix; a whole spelling wins, so that ``min`` is a minute."""
    if name in SPELLINGS:
        return _Factor(unit=SPELLINGS[name], ten=0, power=1)
    for length in (1, 2):
        prefix, rest = name[:length], name[length:]
        if prefix in PREFIXES and rest in PREFIXED:
            return _Factor(unit=SPELLINGS[rest], ten=PREFIXES[prefix], power=1)
    return None


def _named(name: str) -> list[_Factor]:
    """A name as one factor, or as some that are written together."""
    single = _single(name)
    if single is not None:
        return [single]
    pair = _pair(name)
    if pair is not None:
        return pair
    # Nms is N*m*s and no N*ms: a force over a time is in no unit of a drive.
    pair = _pair(name[:-1]) if name.endswith("s") else None
    if pair is not None and all(one.unit != "second" for one in pair):
        return [*pair, _Factor(unit="second", ten=0, power=1)]
    if name in TEMPERATURES:
        raise UnitError(f"{name} is a temperature and stands alone; a difference of temperature is in K")
    raise UnitError(f'the unit "{name}" is not known{_suggestion(name)}')


def _pair(name: str) -> list[_Factor] | None:
    """Two factors that are written together."""
    for cut in range(1, len(name)):
        left, right = _single(name[:cut]), _single(name[cut:])
        if left is None or right is None:
            continue
        if any(left.unit in first and right.unit in second for first, second in RUN_TOGETHER):
            return [left, right]
    return None


def _suggestion(name: str) -> str:
    """What may have been meant."""
    if name in HINTS:
        return f": {HINTS[name]}"
    known = _vocabulary()
    lower = [word for word in known if word.lower() == name.lower()]
    near = lower or get_close_matches(name, known, n=1, cutoff=0.6)
    return f"; {' or '.join(sorted(lower)) if lower else near[0]} is near" if near else ""


@cache
def _vocabulary() -> tuple[str, ...]:
    """Words to suggest: plain ASCII spellings with the prefixes in use, and torques."""
    plain = [word for word in SPELLINGS if word.isascii()]
    prefixed = [prefix + word for word in PREFIXED if word.isascii() for prefix in ("u", "m", "k", "c")]
    return (*plain, *prefixed, "Nm", "mNm", "Ncm", "degC", "degF")
