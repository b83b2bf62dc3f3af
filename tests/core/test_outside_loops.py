"""The sampled engine against textbook loops, each value with its source in ``published``.

A continuous loop is realised by a sheet of thousands of ticks per time constant, so that the numbers come through
the sampled loops and the sampled response themselves. Half a percent is what the ticks that are left may cost; where
a row prints fewer digits, its last digit is the tolerance.
"""

from __future__ import annotations

import math
from functools import cache

import numpy as np
import pytest

from gainbench.assess import Assessment, assess
from gainbench.model import DesignMethod, LoopAims, Sheet, SpeedAims
from gainbench.results import LockedStep, LoopFigures, ResponseFigures, Trace
from lab import FAINT, LAG, OPTIMUM, J, K, R, T, by_hand, lab_sheet, speed_by_hand
from published import (
    DAMPING,
    DAMPING_ROWS,
    MARGIN_ROWS,
    MARGIN_TABLE,
    PUBLISHED,
    REAL_INNER,
    REAL_INNER_ROWS,
    SYMMETRIC,
    SYMMETRIC_ROWS,
    Published,
)
from quantities import assert_quantity

FINE = 0.005
TICKS = "thousands of ticks per time constant"
DIGITS = "the digits of the row"


@cache
def _lab(sheet: Sheet) -> Assessment:
    return assess(sheet)


def _current(sheet: Sheet) -> tuple[LoopFigures, LockedStep]:
    found = _lab(sheet)
    assert found.current.figures is not None
    assert found.locked_step is not None
    return found.current.figures, found.locked_step


def _speed(sheet: Sheet) -> tuple[LoopFigures, Trace, ResponseFigures]:
    found = _lab(sheet)
    assert found.speed.figures is not None
    assert found.response is not None
    assert found.response.figures.current_limited_s == found.response.figures.voltage_limited_s == 0.0
    return found.speed.figures, found.response.trace, found.response.figures


def _factor(figures: LoopFigures) -> float:
    assert figures.gain_margin_db is not None
    return 10.0 ** (figures.gain_margin_db / 20.0)


def _close(actual: float | None, wanted: float, *, unit: str, rtol: float = FINE, atol: float = 0.0) -> None:
    assert actual is not None
    assert_quantity(actual, wanted, rtol=rtol, atol=atol, unit=unit, why=TICKS if rtol == FINE else DIGITS)


def test_a_value_without_a_source_is_refused() -> None:
    with pytest.raises(ValueError, match="source"):
        Published(source=" ", standing="read", values={"one": 1.0})
    with pytest.raises(ValueError, match="number"):
        Published(source="a book", standing="read", values={})


def _settled(time: np.ndarray, off: np.ndarray, band: float) -> float:
    return float(time[np.flatnonzero(np.abs(off) > band)[-1]])


# --- Magnitude optimum: L = 1/(2Ts(1 + Ts)) --------------------------------------------------------------------------


def test_magnitude_optimum_step() -> None:
    """M1 and M3 on the current with the rotor locked."""
    _, step = _current(lab_sheet(OPTIMUM))
    _close(step.overshoot_percent, PUBLISHED["M1"]["overshoot_percent"], unit="%")
    _close(step.rise_s, PUBLISHED["M3"]["rise"] * T, unit="s")


def test_magnitude_optimum_in_time() -> None:
    """M1 to M3 on a speed loop of the same form: a loop gain of 1/(2T) on an integrator behind the lag."""
    _, trace, response = _speed(_second_order(0.5 / T))
    _close(response.overshoot_percent, PUBLISHED["M1"]["overshoot_percent"], unit="%")
    _close(response.rise_time_s, PUBLISHED["M3"]["rise"] * T, unit="s")
    _close(response.settling_time_s, PUBLISHED["M3"]["settling_2"] * T, unit="s")
    _close(_settled(trace.time, trace.speed - 1.0, 0.05), PUBLISHED["M3"]["settling_5"] * T, unit="s")
    _close(float(trace.time[np.argmax(trace.speed >= 1.0)]), PUBLISHED["M2"]["first_reach"] * T, unit="s")
    _close(float(trace.time[np.argmax(trace.speed)]), PUBLISHED["M2"]["peak"] * T, unit="s")


def test_magnitude_optimum_margins() -> None:
    """M4; its gain margin is infinite, that of the sampled loop is only large."""
    figures, _ = _current(lab_sheet(OPTIMUM))
    row = PUBLISHED["M4"]
    _close(figures.phase_margin_deg, row["margin_deg"], unit="deg")
    _close(figures.crossover_hz, row["crossover"] / (math.tau * T), unit="Hz")
    _close(figures.peak_sensitivity, row["sensitivity"], unit="1")
    _close(figures.bandwidth_hz, row["bandwidth"] / (math.tau * T), unit="Hz")
    _close(figures.delay_margin_s, row["delay_margin"] * T, unit="s")
    assert figures.gain_reduction_db is None
    assert figures.gain_margin_db is None or figures.gain_margin_db > 60.0


def test_magnitude_optimum_gains() -> None:
    """M5: Kp = L/(2T), Ti = L/R, Ki = R/(2T), with the sampler's T = (update_delay + 1/2) Ts (from memory)."""
    rate, inductance = 8000.0, 3e-3
    found = _lab(
        lab_sheet(LoopAims(method=DesignMethod.MAGNITUDE_OPTIMUM), rate=rate, update_delay=1.2, inductance=inductance)
    )
    assert found.current.gains is not None
    total = 1.7 / rate
    _close(found.current.gains.kp, inductance / (2.0 * total), unit="V/A", rtol=1e-12)
    _close(found.current.gains.ki, R / (2.0 * total), unit="V/(A*s)", rtol=1e-12)


# --- Symmetric optimum: L = (1 + a^2 Ts)/(a^3 T^2 s^2 (1 + Ts)) ------------------------------------------------------


def _symmetric(spread: float, *, weight: float = 1.0, load_step: float = 0.0) -> Sheet:
    aims = SpeedAims(method=DesignMethod.SYMMETRIC_OPTIMUM, spread=spread, reference_weight=weight)
    return lab_sheet(LAG, aims, duration=120.0, load_step=load_step)


@pytest.mark.parametrize(("spread", "margin", "raw", "filtered", "settling", "settling_filtered"), SYMMETRIC_ROWS)
def test_symmetric_optimum(
    spread: float, margin: float, raw: float, filtered: float, settling: float, settling_filtered: float
) -> None:
    """S3 to S5; a reference weight of 0 is the filter 1/(1 + a^2 T s) on the reference."""
    assert SYMMETRIC.source
    figures, _, response = _speed(_symmetric(spread))
    _close(figures.phase_margin_deg, margin, unit="deg")
    _close(figures.crossover_hz, 1.0 / (spread * T * math.tau), unit="Hz")
    _close(response.overshoot_percent, raw, unit="%")
    _close(response.settling_time_s, settling * T, unit="s")
    _, _, quiet = _speed(_symmetric(spread, weight=0.0))
    _close(quiet.overshoot_percent, filtered, unit="%", atol=0.01)
    _close(quiet.settling_time_s, settling_filtered * T, unit="s")


def test_symmetric_optimum_gains() -> None:
    """Kp = J/(a Kt T), Ti = a^2 T, wc = 1/(a T) on the lag of the current loop (S3 from memory)."""
    gains = _lab(_symmetric(3.0)).speed.gains
    assert gains is not None
    _close(gains.kp, J / (3.0 * K * T), unit="A*s/rad")
    _close(gains.kp / gains.ki, 9.0 * T, unit="s")


@pytest.mark.parametrize(("row", "weight"), [("S1", 1.0), ("S2", 0.0)])
def test_symmetric_optimum_step_in_full(row: str, weight: float) -> None:
    figures, trace, response = _speed(_symmetric(2.0, weight=weight))
    wanted = PUBLISHED[row]
    _close(response.overshoot_percent, wanted["overshoot_percent"], unit="%")
    _close(response.settling_time_s, wanted["settling_2"] * T, unit="s")
    _close(_settled(trace.time, trace.speed - 1.0, 0.05), wanted["settling_5"] * T, unit="s")
    _close(float(trace.time[np.argmax(trace.speed >= 1.0)]), wanted["first_reach"] * T, unit="s")
    more = PUBLISHED["S1 10-90"] if row == "S1" else wanted
    _close(response.rise_time_s, more["rise"] * T, unit="s")
    if row == "S1":
        _close(float(trace.time[np.argmax(trace.speed)]), more["peak"] * T, unit="s")
    _close(figures.peak_sensitivity, PUBLISHED["S6"]["sensitivity"], unit="1")
    _close(figures.delay_margin_s, PUBLISHED["S6"]["delay_margin"] * T, unit="s")


def test_symmetric_optimum_under_load() -> None:
    """S7: 1.770 T d/J at 3.09 T."""
    load = 5.0
    _, trace, response = _speed(_symmetric(2.0, load_step=load))
    _close(response.load_dip_rad_s, PUBLISHED["S7"]["dip"] * T * load / J, unit="rad/s")
    _close(float(trace.time[np.argmin(trace.speed)]), PUBLISHED["S7"]["at"] * T, unit="s")
    assert abs(trace.speed[-1]) < 1e-6 * PUBLISHED["S7"]["dip"] * T * load / J


def _on_real_inner(spread: float, *, weight: float = 1.0) -> Sheet:
    """The PI of the symmetric optimum for a lag of 2T, on the magnitude optimum itself."""
    kp = J / (spread * K * 2.0 * T)
    return lab_sheet(OPTIMUM, speed_by_hand(kp, kp / (spread**2 * 2.0 * T), weight=weight), duration=120.0)


@pytest.mark.parametrize(("spread", "margin", "overshoot"), REAL_INNER_ROWS)
def test_symmetric_optimum_on_the_real_inner_loop(spread: float, margin: float, overshoot: float) -> None:
    """S8: the cascade, not the lag that stands for it."""
    assert REAL_INNER.source
    figures, _, response = _speed(_on_real_inner(spread))
    _close(figures.phase_margin_deg, margin, unit="deg")
    _close(response.overshoot_percent, overshoot, unit="%")
    if spread == 2.0:
        _close(_factor(figures), PUBLISHED["S8 margins"]["gain_margin"], unit="1")
        _, _, quiet = _speed(_on_real_inner(spread, weight=0.0))
        _close(quiet.overshoot_percent, 6.24, unit="%")


# --- Second order: L = K/(s (1 + Ts)) --------------------------------------------------------------------------------


def _second_order(gain: float) -> Sheet:
    """A proportional speed loop on the lag: loop gain [1/s]."""
    return lab_sheet(LAG, speed_by_hand(gain * J / K, 0.0), duration=60.0)


@pytest.mark.parametrize(("margin", "product", "overshoot"), MARGIN_ROWS)
def test_overshoot_by_phase_margin(margin: float, product: float, overshoot: float) -> None:
    """R1: crossover times T and overshoot, to 0.1 % and 0.01."""
    exact = math.tan(math.radians(90.0 - margin))
    figures, _, response = _speed(_second_order(exact / T * math.hypot(1.0, exact)))
    _close(figures.phase_margin_deg, margin, unit="deg")
    assert figures.crossover_hz is not None
    table = MARGIN_TABLE
    _close(figures.crossover_hz * math.tau * T, product, unit="1", rtol=0.0, atol=table["tolerance_product"])
    _close(response.overshoot_percent, overshoot, unit="%", rtol=0.0, atol=table["tolerance_percent"])


@pytest.mark.parametrize(("zeta", "overshoot", "margin"), DAMPING_ROWS)
def test_overshoot_by_damping(zeta: float, overshoot: float, margin: float) -> None:
    """R2 and R3: T = 1/(2 zeta wn), loop gain wn/(2 zeta)."""
    assert DAMPING.standing == "identity"
    natural = 1.0 / (2.0 * zeta * T)
    figures, _, response = _speed(_second_order(natural / (2.0 * zeta)))
    _close(figures.phase_margin_deg, margin, unit="deg")
    _close(response.overshoot_percent, overshoot, unit="%")


# --- Worked examples of design ---------------------------------------------------------------------------------------

W_R, W_L, W_J, W_K, W_AMPLIFIER = 2.0, 5.2e-3, 152e-6, 0.1, 12.0


def _example(current: LoopAims, speed: SpeedAims = FAINT) -> Assessment:
    return _lab(
        lab_sheet(current, speed, rate=1e6, resistance=W_R, inductance=W_L, inertia=W_J, constant=W_K, duration=0.5)
    )


def test_current_loop_of_the_book() -> None:
    """W1, within the 0.3 % the book rounds by; its gains stand before an amplifier of 12."""
    found = _example(LoopAims(method=DesignMethod.LAG_CANCELLATION, crossover=math.tau * 1000.0))
    gains = found.current.gains
    assert gains is not None
    _close(gains.kp / W_AMPLIFIER, PUBLISHED["W1"]["kp"], unit="1", rtol=0.003)
    _close(gains.ki / W_AMPLIFIER, PUBLISHED["W1"]["ki"], unit="1/s", rtol=0.003)


def test_speed_loop_of_the_book() -> None:
    """W2: 100 Hz and 60 degrees around a current loop so fast that it counts as 1."""
    aims = SpeedAims(method=DesignMethod.CROSSOVER_MARGIN, crossover=math.tau * 100.0, phase_margin=math.radians(60.0))
    gains = _example(LoopAims(method=DesignMethod.LAG_CANCELLATION, crossover=math.tau * 1e5), aims).speed.gains
    assert gains is not None
    _close(gains.kp, PUBLISHED["W2"]["kp"], unit="A*s/rad")
    _close(gains.ki, PUBLISHED["W2"]["ki"], unit="A/rad")


def test_rise_of_internal_model_control() -> None:
    """W3: Kp = alpha L, Ki = alpha R, 10 to 90 % in ln 9/alpha."""
    alpha = 1.0 / T
    found = _lab(lab_sheet(LoopAims(method=DesignMethod.LAG_CANCELLATION, crossover=alpha), inductance=3e-3))
    assert found.current.gains is not None
    assert found.locked_step is not None
    _close(found.current.gains.kp, alpha * 3e-3, unit="V/A", rtol=1e-12)
    _close(found.current.gains.ki, alpha * R, unit="V/(A*s)", rtol=1e-12)
    _close(found.locked_step.rise_s, PUBLISHED["W3"]["rise"] / alpha, unit="s")
    _close(found.locked_step.overshoot_percent, 0.0, unit="%", rtol=0.0, atol=0.05)


def test_pole_placement() -> None:
    """W5."""
    aims = LoopAims(method=DesignMethod.POLE_PLACEMENT, natural_frequency=math.tau * 1000.0, damping=math.sqrt(0.5))
    gains = _example(aims).current.gains
    assert gains is not None
    _close(gains.kp, PUBLISHED["W5"]["kp"], unit="V/A", rtol=1e-5)
    _close(gains.ki, PUBLISHED["W5"]["ki"], unit="V/(A*s)", rtol=1e-5)


# --- Loops that are sampled in earnest -------------------------------------------------------------------------------

RATE, INDUCTANCE = 10e3, 2e-3


def _delayed(aims: LoopAims, *, update_delay: float = 1.0) -> Sheet:
    """K h/(z (z - 1)): a winding without resistance, a hold, and one sample of delay."""
    return lab_sheet(aims, rate=RATE, update_delay=update_delay, resistance=1e-7, inductance=INDUCTANCE, inertia=1e6)


@pytest.mark.parametrize(("parts", "margin"), [(10, 36.0), (12, 45.0), (15, 54.0), (18, 60.0), (20, 63.0)])
def test_delay_of_one_and_a_half_samples(parts: int, margin: float) -> None:
    """D4, D5, D9 (identities): 540 fc/fs degrees, wc h = 2 asin(Kh/2); no rational stand-in for the delay."""
    kh = 2.0 * math.sin(math.pi / parts)
    figures, _ = _current(_delayed(by_hand(kh * INDUCTANCE * RATE, 0.0)))
    _close(figures.crossover_hz, RATE / parts, unit="Hz", rtol=1e-5)
    _close(figures.phase_margin_deg, margin, unit="deg", rtol=0.0, atol=1e-3)
    _close(_factor(figures), 1.0 / kh, unit="1", rtol=1e-5)


@pytest.mark.parametrize(("kh", "stable"), [(0.25, True), (0.999, True), (1.001, False), (1.4, False)])
def test_stability_of_the_delayed_integrator(kh: float, stable: bool) -> None:
    """D5: stable if and only if K h < 1 (derived)."""
    figures = _lab(_delayed(by_hand(kh * INDUCTANCE * RATE, 0.0))).current.figures
    assert figures is not None
    assert figures.stable is stable


def test_magnitude_optimum_as_it_is_sampled() -> None:
    """D6: K h = 1/3 overshoots by 1/27, not by the 4.32 % of the lag that stands for the delay (derived)."""
    figures, step = _current(_delayed(LoopAims(method=DesignMethod.MAGNITUDE_OPTIMUM)))
    row = PUBLISHED["D6"]
    _close(step.overshoot_percent, row["overshoot_percent"], unit="%", rtol=1e-4)
    _close(figures.phase_margin_deg, row["margin_deg"], unit="deg", rtol=1e-5)
    _close(_factor(figures), row["gain_margin"], unit="1", rtol=1e-5)


def test_ringing_of_a_pole_pair() -> None:
    """R4: the pair +-0.5j is a damping ratio of 0.4037 and settles in 4/0.6931 = 5.77 samples (read: course quiz).

    A winding without resistance and delay: z^2 + (Kp' + Ki' - 2) z + 1 - Kp' with Kp' = 3/4 and Ki' = 5/4.
    """
    scale = INDUCTANCE * RATE
    _, step = _current(_delayed(by_hand(0.75 * scale, 1.25 * scale * RATE), update_delay=0.0))
    off = np.interp(np.arange(13) / RATE, step.time, step.current) - 1.0
    decay = -0.5 * math.log(abs(off[6] / off[4]))
    turn = math.pi / 2.0
    assert off[4] * off[6] < 0.0 < off[4] * off[8]
    _close(decay / math.hypot(decay, turn), 0.4037, unit="1", rtol=0.0, atol=1e-4)
    _close(4.0 / decay, 5.77, unit="samples", rtol=0.0, atol=0.005)
