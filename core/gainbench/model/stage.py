"""The power stage with its sampling and sensors."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class SpeedSensor(StrEnum):
    """What the speed loop measures speed with."""

    ENCODER = "encoder"
    IDEAL = "ideal"


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage:
    """Voltage, current and time limits of the electronics, in SI units."""

    bus_voltage: float
    """[V], > 0."""
    current_limit: float
    """[A], > 0, in the ampere of ``machine.current_values`` (pm-sine)."""
    pwm_frequency: float
    """[Hz], > 0."""
    current_rate: float
    """Rate of the current loop [Hz]: twice the PWM frequency, or it over a whole number."""
    speed_rate: float
    """Rate of the speed loop [Hz]; divides ``current_rate``."""
    speed_sensor: SpeedSensor
    encoder_counts: int | None = None
    """Counts per motor turn after edge multiplication; required with an encoder."""
    voltage_use: float = 0.95
    """Share of the bus voltage that the modulation may use, above 0 to 1."""
    update_delay: float = 1.0
    """From sampling to the new voltage, in current periods, 0 to 2."""
    current_filter: float = 0.0
    """Time constant of the analogue filter before the current sampler [s], >= 0."""
    speed_delay: int = 0
    """Whole current periods from a speed tick to its current reference, 0 to below ``speed_divisor``."""
    speed_window: int = 1
    """Speed periods over which the angle is differenced, 1 to 1000."""
    speed_filter: float = 0.0
    """Time constant of the digital low-pass after the window [s], >= 0."""

    @property
    def current_period(self) -> float:
        """Ts = 1/current_rate [s]."""
        return 1.0 / self.current_rate

    @property
    def speed_divisor(self) -> int:
        """N = current_rate/speed_rate, a whole number of current ticks per speed tick."""
        return round(self.current_rate / self.speed_rate)

    @property
    def speed_period(self) -> float:
        """Tw = N Ts [s]."""
        return self.speed_divisor / self.current_rate
