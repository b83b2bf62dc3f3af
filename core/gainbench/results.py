"""What an assessment is made of: gains, figures, curves, traces. Named values, no computation."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Gains:
    """A PI controller's gains, SI, peak amperes; ``ki`` without the period.

    Current loop: kp [V/A], ki [V/(A s)]. Speed loop: kp [A s/rad], ki [A/rad].
    """

    kp: float
    ki: float


@dataclass(frozen=True, slots=True, kw_only=True)
class LoopFigures:
    """The figures of one sampled loop. None: there is none (no crossing, or the loop is unstable)."""

    stable: bool
    crossover_hz: float | None = None
    """First frequency where \\|L\\| falls through 1 [Hz]."""
    phase_margin_deg: float | None = None
    delay_margin_s: float | None = None
    gain_margin_db: float | None = None
    gain_reduction_db: float | None = None
    peak_sensitivity: float | None = None
    bandwidth_hz: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class LockedStep:
    """The current loop's step with the rotor locked and no clamp; true current, not whole ticks."""

    rise_s: float | None
    """10 to 90 % of the reference [s]; None where 90 % is not reached."""
    overshoot_percent: float | None
    """Largest excess over the reference, at least 0 [%]."""
    time: NDArray[np.float64]
    """Instants of the drawn curve [s], shape (n,)."""
    current: NDArray[np.float64]
    """Current over the reference, shape (n,)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LoopCurve:
    """The open loop over frequency, for drawing."""

    frequency_hz: NDArray[np.float64]
    """Above 0 to the loop's Nyquist frequency, that one included [Hz], shape (n,), rising."""
    open_loop: NDArray[np.complex128]
    """L, shape (n,)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Refusal:
    """Why the targets of a loop are not met, and what is nearest to them."""

    reason: str
    """What limits them, as a sentence without a full stop."""
    nearest_crossover: float | None = None
    """The closest crossover that can be met with the same margin [rad/s]; None where there is none."""
    nearest_bandwidth: float | None = None
    """The same for a bandwidth [rad/s]."""
    largest_margin: float | None = None
    """The largest phase margin that can be met at the asked crossover [rad]; None where there is none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LoopAssessment:
    """One loop: its gains, its figures, and why there are none where there are none."""

    gains: Gains | None
    figures: LoopFigures | None
    """None without gains."""
    curve: LoopCurve | None
    """None without gains."""
    refusal: Refusal | None = None
    """Set where the design method found no gains."""
    asked_crossover: float | None = None
    """The crossover the gains were designed for [rad/s], where the method has one that is exact."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ResponseFigures:
    """The figures of the duty, signed by the reference; None where the contract says null."""

    overshoot_percent: float | None
    rise_time_s: float | None
    settling_time_s: float | None
    load_dip_rad_s: float | None
    recovery_time_s: float | None
    peak_current_a: float
    rms_current_a: float
    peak_voltage_v: float
    current_limited_s: float
    voltage_limited_s: float
    returned_energy_j: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Trace:
    """The response at the ticks; all arrays read-only, shape (n_ticks,)."""

    time: NDArray[np.float64]
    """t_k = k Ts [s]."""
    reference: NDArray[np.float64]
    """The speed reference in force [rad/s]."""
    speed: NDArray[np.float64]
    """True motor speed [rad/s]."""
    load_speed: NDArray[np.float64]
    """True speed of the load body, at the motor shaft [rad/s]; the motor's where rigid."""
    current: NDArray[np.float64]
    """True current [A]."""
    current_reference: NDArray[np.float64]
    """The current reference in force [A]."""
    voltage: NDArray[np.float64]
    """The voltage commanded at the tick, after the clamp [V]."""
    current_clamped: NDArray[np.bool_]
    """True through the speed period whose clamp acted."""
    voltage_clamped: NDArray[np.bool_]
    """True at each tick whose clamp acted."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Response:
    """The duty's response: what is drawn, and its figures."""

    trace: Trace
    figures: ResponseFigures


class Level(StrEnum):
    """How a finding judges."""

    HOLDS = "holds"
    THIN = "thin"
    BREAKS = "breaks"


class Words(NamedTuple):
    """What a finding says."""

    title: str
    """The statement, with its number, as one short sentence without a full stop."""
    reason: str
    """Why, with its numbers, without a full stop."""
    advice: str = ""
    """The next thing to try; empty where nothing is to be done."""


class _Unsaid:
    """Room for what makes the words of a finding, until one of them is read."""

    __slots__ = ("_words",)


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding(_Unsaid):
    """One judged statement about an assessment."""

    code: str
    """Stable name for scripts, kebab-case, ``loop-unstable``."""
    level: Level
    subject: str
    """What it speaks of: ``machine``, ``train``, ``stage``, ``current``, ``speed``, ``duty``."""
    title: str
    """As :class:`Words`."""
    reason: str
    """As :class:`Words`."""
    advice: str = ""
    """As :class:`Words`."""

    @classmethod
    def on(cls, subject: str, code: str, *, level: Level, words: Callable[[], Words]) -> Finding:
        """A finding whose words are made when one of them is first read: most are judged by their level alone.

        Parameters
        ----------
        subject : str
            As the field.
        code : str
            As the field.
        level : Level
            As the field.
        words : callable
            Makes the words, of values that no longer change.

        Returns
        -------
        Finding
            Equal to one that was made with the words themselves.
        """
        finding = object.__new__(cls)
        put = object.__setattr__
        put(finding, "code", code)
        put(finding, "level", level)
        put(finding, "subject", subject)
        put(finding, "_words", words)
        return finding

    if not TYPE_CHECKING:  # To a type checker every name would be an attribute.

        def __getattr__(self, name: str) -> str:
            """Make the words, when one of them is read that is not there yet."""
            if name not in Words._fields:
                raise AttributeError(f"a finding has no {name!r}")
            words, put = self._words, object.__setattr__
            # None where another thread has made them since.
            if words is not None:
                for field, said in zip(Words._fields, words(), strict=True):
                    put(self, field, said)
                put(self, "_words", None)
            return object.__getattribute__(self, name)

    @property
    def text(self) -> str:
        """The whole finding as sentences."""
        return " ".join(f"{part[0].upper()}{part[1:]}." for part in (self.title, self.reason, self.advice) if part)
