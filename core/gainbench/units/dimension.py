"""The kinds of quantity that a bench sheet speaks of."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum


@dataclass(frozen=True, slots=True, kw_only=True)
class Kind:
    """What a dimension is called, and the units it is written in."""

    words: str
    """With its article, for messages."""
    unit: str
    """The unit of the library's floats."""
    example: str
    """A text that is taken."""
    people: tuple[str, ...]
    """Units to show it in, from small to large."""


def _kind(words: str, unit: str, example: str, *people: str) -> Kind:
    return Kind(words=words, unit=unit, example=example, people=people or (unit,))


class Dimension(Enum):
    """A kind of quantity; two of them may have the same physical dimension.

    Floats are SI with angles in rad. Design frequencies and speeds are rad/s; ``RATE`` alone, the rate of a sampled
    loop or of the modulation, counts in Hz; ``TEMPERATURE`` is in degC.
    """

    NUMBER = _kind("a plain number", "", "1.5")
    SHARE = _kind("a share", "", "95 %", "%")
    RESISTANCE = _kind("a resistance", "ohm", "0.60 ohm", "mohm", "ohm", "kohm")
    INDUCTANCE = _kind("an inductance", "H", "0.45 mH", "uH", "mH", "H")
    VOLTAGE = _kind("a voltage", "V", "48 V", "mV", "V", "kV")
    CURRENT = _kind("a current", "A", "6.5 A", "mA", "A", "kA")
    TORQUE = _kind("a torque", "N*m", "12 mN*m", "uN*m", "mN*m", "N*m", "kN*m")
    TORQUE_CONSTANT = _kind("a torque constant", "N*m/A", "52 mN*m/A", "uN*m/A", "mN*m/A", "N*m/A")
    BACK_EMF_CONSTANT = _kind("a back-EMF constant", "V*s/rad", "5.4 V/krpm", "mV*s/rad", "V*s/rad")
    SPEED_CONSTANT = _kind("a speed constant", "rad/(s*V)", "184 rpm/V", "rpm/V")
    INERTIA = _kind("an inertia", "kg*m^2", "310 g*cm^2", "g*cm^2", "kg*cm^2", "kg*m^2")
    VISCOUS_FRICTION = _kind(
        "a viscous friction", "N*m*s/rad", "20 uN*m*s/rad", "uN*m*s/rad", "mN*m*s/rad", "N*m*s/rad"
    )
    STIFFNESS = _kind("a stiffness", "N*m/rad", "45 N*m/rad", "mN*m/rad", "N*m/rad", "kN*m/rad")
    TEMPERATURE = _kind("a temperature", "degC", "25 degC")
    TEMPERATURE_DIFFERENCE = _kind("a temperature difference", "K", "40 K")
    TIME = _kind("a time", "s", "20 ms", "us", "ms", "s")
    ANGLE = _kind("an angle", "rad", "60 deg", "deg")
    SPEED = _kind("a speed of rotation", "rad/s", "1500 rpm", "rpm")
    FREQUENCY = _kind("a frequency", "rad/s", "60 Hz", "mHz", "Hz", "kHz", "MHz")
    RATE = _kind("a rate", "Hz", "20 kHz", "Hz", "kHz", "MHz")
    ACCELERATION = _kind("an angular acceleration", "rad/s^2", "20000 rpm/s", "rpm/s")
    CURRENT_KP = _kind("a proportional gain of the current loop", "V/A", "2.66 V/A")
    CURRENT_KI = _kind("an integral gain of the current loop", "V/(A*s)", "4681 V/(A*s)")
    SPEED_KP = _kind("a proportional gain of the speed loop", "A*s/rad", "0.481 A*s/rad")
    SPEED_KI = _kind("an integral gain of the speed loop", "A/rad", "57.6 A/rad")
    POWER = _kind("a power", "W", "150 W", "mW", "W", "kW")
    ENERGY = _kind("an energy", "J", "2.5 J", "mJ", "J", "kJ")
    MASS = _kind("a mass", "kg", "2 kg")
    LENGTH = _kind("a length", "m", "15 mm")
    FORCE = _kind("a force", "N", "12 N")
    RECIPROCAL_TIME = _kind("a number per time", "1/s", "10 1/s")

    @property
    def words(self) -> str:
        """Its name with an article, for messages."""
        return self.value.words

    @property
    def unit(self) -> str:
        """The unit of the library's floats."""
        return self.value.unit

    @property
    def example(self) -> str:
        """A text that is taken."""
        return self.value.example

    @property
    def people(self) -> tuple[str, ...]:
        """The units that people read it in, from small to large."""
        return self.value.people
