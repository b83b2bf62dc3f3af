"""What one entry of a sheet may be: a quantity, a plain number, a count, a choice, a switch, a text, a gain.

Each kind of entry reads one plain TOML value, or raises :class:`EntryError`. The kinds stand in the annotations
of :mod:`gainbench.sheetfile.tables`, where pydantic calls them.
"""

from __future__ import annotations

import math
import re
import unicodedata
from dataclasses import dataclass, field
from difflib import get_close_matches
from enum import StrEnum
from typing import TYPE_CHECKING, Any, Protocol, runtime_checkable

from gainbench.errors import UnitError
from gainbench.units import Dimension, parse, show

if TYPE_CHECKING:
    from pydantic_core import CoreSchema

# Unicode's property Bidi_Control: they make a text read otherwise than it is.
_BIDIRECTIONAL = frozenset(map(chr, (*range(0x202A, 0x202F), *range(0x2066, 0x206A), 0x200E, 0x200F, 0x061C)))
_SHOWN_LENGTH = 60
_TOML_NUMBER = re.compile(r"[+-]?(?:0|[1-9](?:_?\d)*)(?:\.\d(?:_?\d)*)?(?:[eE][+-]?\d{1,4})?", re.ASCII)
_LOOSE_NUMBER = re.compile(r"[+-]?(?:\d{1,50}\.?\d{0,50}|\.\d{1,50})(?:[eE][+-]?\d{1,3})?", re.ASCII)


class EntryError(ValueError):
    """A value is refused; pydantic carries it to the list of problems."""

    def __init__(self, reason: str, *, example: str = "") -> None:
        super().__init__(reason)
        self.reason = reason
        self.example = example


@runtime_checkable
class Entry(Protocol):
    """A kind of entry."""

    @property
    def example(self) -> str:
        """A value that is taken, as TOML."""

    def read(self, value: object) -> object:
        """Turn a plain TOML value into the model's."""


class _PlainValidator:
    """Lets an entry stand in an annotation of a pydantic model."""

    __slots__ = ()

    def __get_pydantic_core_schema__(self, source: Any, handler: Any) -> CoreSchema:
        from pydantic_core import core_schema

        return core_schema.no_info_plain_validator_function(self.read)

    def read(self, value: object) -> object:
        """Turn a plain TOML value into the model's."""
        raise EntryError(f"{shown(value)} is not taken")


def shown(value: object) -> str:
    """A TOML value as it may be printed in a message: one line, bounded, without control characters."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        cut = value[:_SHOWN_LENGTH]
        text = "".join(c if not _is_control(c) else f"\\u{ord(c):04x}" for c in cut)
        return f'"{text}"' if cut == value else f'"{text}..."'
    if isinstance(value, dict):
        return "{...}" if value else "{}"
    if isinstance(value, list):
        return "[...]" if value else "[]"
    text = str(value) if not isinstance(value, int) or value.bit_length() < 200 else "a very long number"
    return text if len(text) <= _SHOWN_LENGTH else text[:_SHOWN_LENGTH] + "..."


def _is_control(character: str) -> bool:
    return unicodedata.category(character) in {"Cc", "Cs", "Zl", "Zp"} or character in _BIDIRECTIONAL


def _is_number(value: object) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def typed_number(text: str) -> str | None:
    """A number as typed into a box, as TOML spells it; None where the text is none."""
    plain = text.strip()
    if _TOML_NUMBER.fullmatch(plain):
        return plain
    if not _LOOSE_NUMBER.fullmatch(plain):
        return None
    return repr(float(plain)) if set(plain) & set(".eE") else str(int(plain))


def _finite(value: Any) -> float:
    """A TOML number as a finite float."""
    try:
        number = float(value)
    except OverflowError:
        number = math.inf
    if not math.isfinite(number):
        raise EntryError("the number must be finite")
    return number


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """Which values are taken; what is beyond is no machine, or no number that one can compute with."""

    low: float
    high: float
    zero: bool = False
    """True takes 0 as well, below ``low``."""
    signed: bool = False
    """True takes the same range with a minus as well."""
    above: bool = False
    """True refuses ``low`` itself."""

    def check(self, value: float, dimension: Dimension) -> float:
        """The value, or why it is refused."""
        size = abs(value) if self.signed else value
        if self.zero and size == 0.0:
            return value
        if size < 0.0 <= self.low:
            raise EntryError("must be at least 0" if self.zero or self.low == 0.0 else "must be above 0")
        if size == 0.0 < self.low and not self.above:
            raise EntryError("must not be 0" if self.signed else "must be above 0")
        if size < self.low or (self.above and size == self.low):
            word = "above" if self.above else "at least"
            raise EntryError(f"is too small: it must be {word} {_plain(self.low, dimension)}")
        if size > self.high:
            raise EntryError(f"is too large: it must be at most {_plain(self.high, dimension)}")
        return value


def _plain(value: float, dimension: Dimension) -> str:
    return f"{value:g}" if dimension is Dimension.NUMBER else show(value, dimension)


@dataclass(frozen=True, slots=True, kw_only=True)
class Quantity(_PlainValidator):
    """A number with a unit; a share may be a plain number as well."""

    dimension: Dimension
    limits: Limits
    sample: str = ""

    @property
    def example(self) -> str:
        return f'"{self.sample or self.dimension.example}"'

    def read(self, value: object) -> float:
        if isinstance(value, str):
            try:
                number = parse(value, self.dimension)
            except UnitError as error:
                raise EntryError(error.reason, example=self.example) from None
        elif _is_number(value):
            if self.dimension is not Dimension.SHARE:
                raise EntryError(
                    f"a plain number has no unit, {self.dimension.words} is meant: write it in quotes with its unit",
                    example=self.example,
                )
            number = _finite(value)
        else:
            raise EntryError(f"must be {self.dimension.words} in quotes", example=self.example)
        return _limited(number, self)


@dataclass(frozen=True, slots=True, kw_only=True)
class Number(_PlainValidator):
    """A pure number, written without quotes."""

    limits: Limits
    sample: str = "1.0"
    dimension: Dimension = Dimension.NUMBER

    @property
    def example(self) -> str:
        return self.sample

    def read(self, value: object) -> float:
        if not _is_number(value):
            raise EntryError("must be a plain number, without quotes and without a unit", example=self.example)
        return _limited(_finite(value), self)


def _limited(number: float, entry: Quantity | Number) -> float:
    try:
        return entry.limits.check(number + 0.0, entry.dimension)
    except EntryError as error:
        raise EntryError(error.reason, example=entry.example) from None


@dataclass(frozen=True, slots=True, kw_only=True)
class Count(_PlainValidator):
    """A whole number."""

    low: int
    high: int
    sample: int

    @property
    def example(self) -> str:
        return str(self.sample)

    def read(self, value: object) -> int:
        if not isinstance(value, int) or isinstance(value, bool):
            raise EntryError("must be a whole number, without quotes and without a decimal point", example=self.example)
        if value < self.low:
            raise EntryError(f"is too small: it must be at least {self.low}", example=self.example)
        if value > self.high:
            raise EntryError(f"is too large: it must be at most {self.high}", example=self.example)
        return value


@dataclass(frozen=True, slots=True, kw_only=True)
class Choice(_PlainValidator):
    """One of a few words."""

    words: type[StrEnum] | tuple[StrEnum, ...]

    @property
    def example(self) -> str:
        return f'"{next(iter(self.words)).value}"'

    def read(self, value: object) -> StrEnum:
        for word in self.words:
            if isinstance(value, str) and value == word.value:
                return word
        known = [word.value for word in self.words]
        near = get_close_matches(value[:100].lower(), known, n=1) if isinstance(value, str) else []
        hint = f"; {near[0]} is near" if near else ""
        raise EntryError(f"must be one of {', '.join(known)}{hint}", example=f'"{near[0]}"' if near else self.example)


@dataclass(frozen=True, slots=True, kw_only=True)
class Flag(_PlainValidator):
    """true or false."""

    @property
    def example(self) -> str:
        return "true"

    def read(self, value: object) -> bool:
        if not isinstance(value, bool):
            raise EntryError("must be true or false, without quotes", example=self.example)
        return value


@dataclass(frozen=True, slots=True, kw_only=True)
class Text(_PlainValidator):
    """One line of text."""

    sample: str
    longest: int = 200
    blank: bool = False
    """True takes an empty text as well."""

    @property
    def example(self) -> str:
        return f'"{self.sample}"'

    def read(self, value: object) -> str:
        if not isinstance(value, str):
            raise EntryError("must be a text in quotes", example=self.example)
        if any(_is_control(character) for character in value):
            raise EntryError("holds a control character: write one line of plain text", example=self.example)
        if not self.blank and not value.strip():
            raise EntryError("must not be empty", example=self.example)
        if len(value) > self.longest:
            raise EntryError(f"is longer than {self.longest} characters", example=self.example)
        return value


@dataclass(frozen=True, slots=True, kw_only=True)
class UnitName(_PlainValidator):
    """The name of a unit."""

    dimension: Dimension
    sample: str

    @property
    def example(self) -> str:
        return f'"{self.sample}"'

    def read(self, value: object) -> str:
        if not isinstance(value, str) or not value.strip():
            raise EntryError("must be a unit in quotes", example=self.example)
        try:
            parse(f"1 {value}", self.dimension)
        except UnitError as error:
            raise EntryError(error.reason, example=self.example) from None
        return value.strip()


@dataclass(frozen=True, slots=True, kw_only=True)
class GainValue:
    """A gain as typed, with what its unit told."""

    value: float
    """SI."""
    torque: bool = False
    """True where the unit was one of torque."""
    period: bool = False
    """True where the unit holds the loop's period."""
    plain: bool = False
    """True without a unit."""


@dataclass(frozen=True, slots=True, kw_only=True)
class GainUnit:
    """One kind of unit that a gain is taken in."""

    dimension: Dimension
    torque: bool = False
    period: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Gain(_PlainValidator):
    """A gain in any fitting unit, or a plain SI number."""

    units: tuple[GainUnit, ...]
    limits: Limits = field(default_factory=lambda: Limits(low=1e-15, high=1e15, zero=True))

    @property
    def dimension(self) -> Dimension:
        """The gain's own dimension."""
        return self.units[0].dimension

    @property
    def example(self) -> str:
        return f'"{self.dimension.example}"'

    def read(self, value: object) -> GainValue:
        if _is_number(value):
            number = _finite(value)
            return GainValue(value=self._checked(number), plain=True)
        if not isinstance(value, str):
            raise EntryError(f"must be {self.dimension.words} in quotes, or a plain number in SI", example=self.example)
        refused = ""
        for unit in self.units:
            try:
                number = parse(value, unit.dimension)
            except UnitError as error:
                refused = refused or error.reason
                continue
            return GainValue(value=self._checked(number), torque=unit.torque, period=unit.period)
        raise EntryError(refused, example=self.example)

    def _checked(self, number: float) -> float:
        try:
            return self.limits.check(number + 0.0, Dimension.NUMBER)
        except EntryError as error:
            raise EntryError(error.reason, example=self.example) from None
