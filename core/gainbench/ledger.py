"""The phase ledger: how many degrees each contributor takes from the phase of a sampled loop at one frequency.

The entries are exact and add up to ``arg L``. With ``s = j w``, ``Ts`` and ``Tw`` the periods of the loops:

============================  ===========================================================================
current loop
``plant``                     ``arg P(s)``, ``P`` from voltage to current: winding and mechanics, continuous
``pi``                        ``arg C``, ``C`` the PI controller at ``exp(s Ts)``, its integrator's rule included
``update-delay``              ``-w update_delay Ts``
``current-filter``            ``arg 1/(1 + s current_filter)``
``hold``                      the rest of ``arg G``: ``-w Ts/2``, and what sampling folds back from above
speed loop
``plant``                     ``arg M(s)``, ``M`` from torque to motor speed: inertia, friction, shaft, continuous
``pi``                        ``arg C`` at ``exp(s Tw)``
``closed-current-loop``       ``arg T(s)``, ``T = P(s) exp(-s update_delay Ts) C/(1 + C G)`` of the current loop: the
                              fundamental of the current over that of its staircase of references
``feedforward``               ``arg G`` with the back-EMF feedforward less ``arg G`` without
``speed-delay``               ``-w speed_delay Ts``
``speed-window``              ``arg (1 - exp(-s m Tw))/s`` of the angle's difference over the window of m periods: half
                              of it, ``-w m Tw/2``, half a turn given back at each null; 0 with an ideal sensor
``speed-filter``              ``arg`` of the digital low-pass at ``exp(s Tw)``
``speed-hold``                the rest of ``arg G`` without feedforward: ``-w Tw/2``, and what sampling folds back
============================  ===========================================================================

``P`` and ``M`` are passive, so their angles lie within 90 degrees; every other angle is the one between -180 and 180.

References
----------
K. J. Astrom, B. Wittenmark, Computer-Controlled Systems, 3rd ed., 1997, section 7.3, for the folding (from memory).
"""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass, replace

import numpy as np

from gainbench.assessed import Assessed, LoopName, assessed_loop
from gainbench.margins import open_loop, plant_response
from gainbench.model import Firmware, SpeedSensor, Stage
from gainbench.plant import Plant
from gainbench.results import Gains, LoopAssessment, LoopCurve
from gainbench.sampling import CurrentLoop, Hardware, Loop, current_loop, hardware, speed_loop


@dataclass(frozen=True, slots=True, kw_only=True)
class LedgerEntry:
    """One contributor to the phase."""

    name: str
    """One of the names above."""
    degrees: float
    """Its part of the phase [deg], below 0 where it takes."""
    what: str
    """What it is, in a few words."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PhaseLedger:
    """The phase of a loop at one frequency, by contributor."""

    loop: LoopName
    frequency: float
    """[rad/s]."""
    entries: tuple[LedgerEntry, ...]
    """Always all of the loop's; that of the PI controller is missing where there are no gains."""

    @property
    def total(self) -> float:
        """The phase of the open loop, the sum of the entries [deg]."""
        return math.fsum(one.degrees for one in self.entries)

    @property
    def margin(self) -> float:
        """What is left to -180 degrees, -180 to 180 [deg]: at a crossover its phase margin, below 0 beyond."""
        return math.remainder(self.total + 180.0, 360.0)

    def entry(self, name: str) -> LedgerEntry:
        """The entry of that name; KeyError where there is none."""
        for one in self.entries:
            if one.name == name:
                return one
        raise KeyError(name)


def phase_ledger(assessed: Assessed, name: LoopName) -> PhaseLedger | None:
    """The ledger of an assessed loop at its crossover.

    Parameters
    ----------
    assessed : Assessed
        An assessment.
    name : str
        ``current`` or ``speed``.

    Returns
    -------
    PhaseLedger or None
        At the first fall of ``|L|`` through 1, of an unstable loop too. Without gains, at the crossover that was asked
        for, with what is left for a PI controller. None where there is neither, or no current loop inside.
    """
    own = assessed.current if name == "current" else assessed.speed
    stage, firmware, inner = assessed.sheet.rig.stage, assessed.sheet.aims.firmware, assessed.current.gains
    if name == "speed" and inner is None:
        return None
    period = stage.current_period if name == "current" else stage.speed_period
    frequency = _known_frequency(own, period)
    if frequency is None and own.gains is not None and own.curve is not None:
        loop = assessed_loop(assessed, name)
        frequency = None if loop is None else _first_fall(loop, own.gains, curve=own.curve)
    if frequency is None:
        return None
    if name == "current" or inner is None:
        return current_ledger(assessed.plant, stage, firmware=firmware, frequency=frequency, gains=own.gains)
    return speed_ledger(assessed.plant, stage, firmware=firmware, frequency=frequency, current=inner, gains=own.gains)


def current_ledger(
    plant: Plant, stage: Stage, *, firmware: Firmware, frequency: float, gains: Gains | None
) -> PhaseLedger:
    """The ledger of the current loop.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.
    stage : Stage
        Rates and delays.
    firmware : Firmware
        For its integrator rule.
    frequency : float
        Where [rad/s], above 0 and below the loop's Nyquist frequency.
    gains : Gains or None
        Of the current loop [V/A], [V/(A s)]; None leaves the PI controller out.

    Returns
    -------
    PhaseLedger
        Entries as the module's table says [deg].
    """
    w, period = frequency, stage.current_period
    inner = current_loop(hardware(plant, stage), firmware)
    continuous = _angle(_admittance(plant, w))
    delay = -w * stage.update_delay * period
    filtered = -math.atan(w * stage.current_filter)
    hold = _rest(_response(inner, w), continuous + delay + filtered, nominal=-0.5 * w * period)
    entries = [
        _entry("plant", continuous, "winding and mechanics"),
        *_controller(inner, gains, w=w),
        _entry("update-delay", delay, "from the sample to its voltage"),
        _entry("hold", hold, "half a current period, and what sampling folds back"),
        _entry("current-filter", filtered, "the analogue filter before the sampler"),
    ]
    return PhaseLedger(loop="current", frequency=w, entries=tuple(entries))


def speed_ledger(
    plant: Plant, stage: Stage, *, firmware: Firmware, frequency: float, current: Gains, gains: Gains | None
) -> PhaseLedger:
    """The ledger of the speed loop.

    Parameters
    ----------
    plant : Plant
        Values at the motor shaft.
    stage : Stage
        Rates, delays, sensor and filters.
    firmware : Firmware
        Integrator rule and feedforward.
    frequency : float
        Where [rad/s], above 0 and below the loop's Nyquist frequency.
    current : Gains
        Of the current loop inside [V/A], [V/(A s)].
    gains : Gains or None
        Of the speed loop [A s/rad], [A/rad]; None leaves the PI controller out.

    Returns
    -------
    PhaseLedger
        Entries as the module's table says [deg].
    """
    w, period = frequency, stage.speed_period
    own = hardware(plant, stage)
    plain = replace(firmware, back_emf_feedforward=False)
    outer = speed_loop(own, plant, stage=stage, firmware=plain, current=current)
    response = _response(outer, w)
    fed = 0.0
    if firmware.back_emf_feedforward:
        with_it = speed_loop(own, plant, stage=stage, firmware=firmware, current=current)
        fed = _angle(_response(with_it, w) / response)
    mechanics = _angle(_mobility(plant, w))
    inside = _closed_current(plant, current_loop(own, firmware), gains=current, w=w)
    delay = -w * stage.speed_delay * stage.current_period
    window = _window(stage, w)
    low_pass = speed_filter_angle(stage, w)
    known = mechanics + inside + delay + window + low_pass
    hold = _rest(response, known, nominal=-0.5 * w * period)
    entries = [
        _entry("plant", mechanics, "inertia, friction and shaft"),
        *_controller(outer, gains, w=w),
        _entry("closed-current-loop", inside, "from the current reference to the current"),
        _entry("feedforward", fed, "the back EMF fed forward, against none"),
        _entry("speed-delay", delay, "from the speed tick to its current reference"),
        _entry("speed-window", window, "half the window that the angle is differenced over"),
        _entry("speed-hold", hold, "half a speed period, and what sampling folds back"),
        _entry("speed-filter", low_pass, "the digital low-pass after the window"),
    ]
    return PhaseLedger(loop="speed", frequency=w, entries=tuple(entries))


def _entry(name: str, radians: float, what: str) -> LedgerEntry:
    # Adding zero turns a negative zero round.
    return LedgerEntry(name=name, degrees=math.degrees(radians) + 0.0, what=what)


def _controller(loop: Loop, gains: Gains | None, *, w: float) -> list[LedgerEntry]:
    if gains is None:
        return []
    return [_entry("pi", _angle(_pi(loop, gains, w=w)), "the integral part, its rule included")]


def _pi(loop: Loop, gains: Gains, *, w: float) -> complex:
    from gainbench.kernels.frequency import pi_at

    period = loop.plant.period
    return complex(pi_at(gains.kp, gains.ki * period, loop.rule, w, period))


def _response(loop: Loop, w: float) -> complex:
    return complex(plant_response(loop, np.array([w]))[0])


def _angle(value: complex) -> float:
    return cmath.phase(value)


def _rest(response: complex, known: float, *, nominal: float) -> float:
    """What an exact response turns beyond what is known: the nominal angle, and less than half a turn more or less."""
    return nominal + math.remainder(_angle(response) - known - nominal, math.tau)


def _mobility(plant: Plant, w: float) -> complex:
    """Motor speed over torque of the continuous train [rad/(s N m)]."""
    impedance = complex(plant.motor_viscous, w * plant.motor_inertia)
    if plant.elastic:
        load = complex(plant.load_viscous, w * plant.load_inertia)
        shaft = complex(plant.damping, -plant.stiffness / w)
        impedance += shaft * load / (shaft + load)
    return 1.0 / impedance


def _admittance(plant: Plant, w: float) -> complex:
    """Current over voltage, continuous, the back EMF counted [A/V]."""
    winding = complex(plant.resistance, w * plant.inductance)
    return 1.0 / (winding + plant.back_emf * plant.torque * _mobility(plant, w))


def _closed_current(plant: Plant, inner: CurrentLoop, *, gains: Gains, w: float) -> float:
    """Angle from the staircase of current references to the current [rad]."""
    own: Hardware = inner.hardware
    controller = _pi(inner, gains, w=w)
    returned = 1.0 + controller * _response(inner, w)
    delay = -w * (own.delay.held + own.delay.part) * own.period
    return math.remainder(_angle(_admittance(plant, w) * controller / returned) + delay, math.tau)


def _window(stage: Stage, w: float) -> float:
    if stage.speed_sensor is not SpeedSensor.ENCODER:
        return 0.0
    half = 0.5 * w * stage.speed_window * stage.speed_period
    return math.pi * math.floor(half / math.pi) - half


def speed_filter_angle(stage: Stage, frequency: float) -> float:
    """What the digital low-pass after the speed window turns.

    Parameters
    ----------
    stage : Stage
        Its speed rate and filter.
    frequency : float
        [rad/s].

    Returns
    -------
    float
        Of ``g/(1 - (1 - g) exp(-s Tw))`` with ``g = 1 - exp(-Tw/speed_filter)`` [rad], at most 0; 0 without a filter.
    """
    if stage.speed_filter <= 0.0:
        return 0.0
    kept = math.exp(-stage.speed_period / stage.speed_filter)
    return -_angle(1.0 - kept * cmath.exp(complex(0.0, -frequency * stage.speed_period)))


def _known_frequency(own: LoopAssessment, period: float) -> float | None:
    """The crossover of a stable loop, or, without gains, one asked for below the Nyquist frequency [rad/s]."""
    if own.figures is not None and own.figures.crossover_hz is not None:
        return math.tau * own.figures.crossover_hz
    asked = own.asked_crossover if own.gains is None else None
    return asked if asked is not None and asked * period < math.pi else None


def _first_fall(loop: Loop, gains: Gains, *, curve: LoopCurve) -> float | None:
    """Where the gain first falls through 1 [rad/s], refined between two points of the drawn curve."""
    above = np.abs(curve.open_loop) > 1.0
    falls = np.flatnonzero(above[:-1] & ~above[1:])
    if falls.size == 0:
        return None
    low, high = (float(curve.frequency_hz[k]) * math.tau for k in (falls[0], falls[0] + 1))
    while high - low > 1e-13 * high:
        middle = 0.5 * (low + high)
        if middle in (low, high):
            break
        if abs(open_loop(loop, gains, frequency=np.array([middle]))[0]) > 1.0:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)
