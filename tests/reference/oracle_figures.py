"""The reference model's figures of a sampled loop, by dense grids with roots polished between their points."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq, minimize_scalar

from gainbench.model import IntegratorRule
from oracle_bench import Array, Bench, continuous
from oracle_loops import PI, Complex, Loop, OpenLoop

LOWEST = 1e-7
"""Where the grid begins, as a share of the Nyquist frequency."""


@dataclass(frozen=True, kw_only=True)
class Figures:
    """As the loops' figures are defined; frequencies in Hz."""

    crossover_hz: float | None
    phase_margin_deg: float | None
    delay_margin_s: float | None
    gain_margin_db: float | None
    gain_reduction_db: float | None
    peak_sensitivity: float
    bandwidth_hz: float | None


def grid(loop: Loop, poles: Complex | None = None, *, points: int = 1500) -> Array:
    """Frequencies [rad/s] up to the Nyquist frequency, that one included, denser around lightly damped poles."""
    top = loop.nyquist
    parts = [np.geomspace(LOWEST * top, top, points), np.linspace(0.01 * top, top, points // 2)]
    for pole in loop.plant.poles() if poles is None else np.concatenate([loop.plant.poles(), poles]):
        angle, size = abs(np.angle(pole)) / loop.T, abs(pole)
        if angle > 0.0 and size > 0.5:
            width = max(abs(math.log(size)) / loop.T, 1e-9 * angle)
            near = np.concatenate([[0.0], width * np.geomspace(0.01, 100.0, 40)])
            parts += [angle - near, angle + near]
    omega = np.unique(np.concatenate(parts))
    omega = omega[(omega >= LOWEST * top) & (omega < top * (1.0 - 1e-12))]
    return np.append(omega, top)


def _roots(
    function: Callable[[Array], Array], omega: Array, values: Array, *, falling: bool | None = None
) -> list[float]:
    """All sign changes of a function sampled on the grid, polished; ``falling`` keeps one direction."""
    found = []
    for k in range(len(omega) - 1):
        a, b = values[k], values[k + 1]
        if (a > 0.0) == (b > 0.0) or (falling is not None and (a > 0.0) != falling):
            continue
        low, high = float(omega[k]), float(omega[k + 1])
        found.append(
            float(brentq(lambda w: float(function(np.array([w]))[0]), low, high, xtol=1e-13 * high, rtol=1e-13))
        )
    return found


def loop_figures(loop: Loop, gains: PI, *, poles: Complex | None = None) -> Figures:
    """The figures of a stable loop; ``poles`` of the closed loop sharpen the grid where they ring."""
    response = loop.open(gains)
    omega = grid(loop, poles)
    L = response(omega)
    size = np.log(np.abs(L))

    def level(w: Array) -> Array:
        return np.asarray(np.log(np.abs(response(w))))

    falls = _roots(level, omega, size, falling=True)
    rises = _roots(level, omega, size, falling=False)
    crossings = falls + rises
    from_minus_one = [math.degrees(float(np.angle(-response(np.array([w]))[0]))) for w in crossings]
    delays = [math.radians(angle % 360.0) / w for angle, w in zip(from_minus_one, crossings, strict=True)]

    up, down = _factors(response, omega, L)
    closed = np.log(np.abs(L / (1.0 + L))) + 0.5 * math.log(2.0)
    bandwidths = _roots(
        lambda w: np.asarray(np.log(np.abs(1.0 / (1.0 + 1.0 / response(w)))) + 0.5 * math.log(2.0)),
        omega,
        closed,
        falling=True,
    )
    return Figures(
        crossover_hz=min(falls) / math.tau if falls else None,
        phase_margin_deg=min(abs(angle) for angle in from_minus_one) if crossings else None,
        delay_margin_s=min(delays) if delays else None,
        gain_margin_db=20.0 * math.log10(min(up)) if up else None,
        gain_reduction_db=20.0 * math.log10(max(down)) if down else None,
        peak_sensitivity=_peak(response, omega, L),
        bandwidth_hz=min(bandwidths) / math.tau if bandwidths else None,
    )


def _factors(response: OpenLoop, omega: Array, L: Complex) -> tuple[list[float], list[float]]:
    """Factors on L, above 1 and below 1, that put -1 on the curve."""
    turn = np.imag(L[:-1]) / np.abs(L[:-1])
    roots = _roots(
        lambda w: np.asarray(np.imag(response(w)) / np.abs(response(w))),
        omega[:-1],
        np.where(turn == 0.0, 1e-300, turn),
    )
    on_axis = [response(np.array([w]))[0] for w in roots] + [L[-1]]
    factors = [1.0 / abs(value) for value in on_axis if value.real < 0.0]
    return [f for f in factors if f > 1.0], [f for f in factors if f < 1.0]


def _peak(response: OpenLoop, omega: Array, L: Complex) -> float:
    sensitivity = np.abs(1.0 / (1.0 + L))
    best = float(np.max(sensitivity))
    for k in np.argsort(sensitivity)[-5:]:
        low, high = omega[max(k - 1, 0)], omega[min(k + 1, len(omega) - 1)]
        found = minimize_scalar(
            lambda w: -float(np.abs(1.0 / (1.0 + response(np.array([w]))[0]))),
            bounds=(low, high),
            method="bounded",
            options={"xatol": 1e-9 * high},
        )
        best = max(best, -float(found.fun))
    return best


@dataclass(frozen=True, kw_only=True)
class Step:
    """The locked-rotor current step."""

    rise_s: float | None
    overshoot_percent: float


def locked_step(bench: Bench, gains: PI, *, rule: IntegratorRule, settled: float = 1e-9, most: int = 60_000) -> Step:
    """Reference 0 to 1 with the rotor locked and no clamp.

    Under a held voltage the current is one exponential, so that its extremes lie where the voltage changes and each
    crossing has a closed form.
    """
    plant = continuous(bench, electric_only=True)
    whole = math.floor(bench.delay)
    part = bench.delay - whole
    pieces = [(whole + 1, part), (whole, 1.0 - part)] if part > 0.0 else [(whole, 1.0)]
    steps = [(back, share * bench.Ts, *plant.step(share * bench.Ts)) for back, share in pieces]
    x = np.zeros(len(plant.names))
    past = [0.0] * 4
    integral = error = time = peak = 0.0
    crossed: dict[float, float] = {}
    quiet = 0
    for _ in range(most):
        e = 1.0 - float(x[-1])
        if rule is IntegratorRule.BACKWARD:
            integral += gains.ki * bench.Ts * e
            u = gains.kp * e + integral
        elif rule is IntegratorRule.FORWARD:
            u = gains.kp * e + integral
            integral += gains.ki * bench.Ts * e
        else:
            integral += gains.ki * bench.Ts * (e + error) / 2.0
            u = gains.kp * e + integral
        error = e
        past = [u, *past[:3]]
        for back, h, F, G in steps:
            i, end = float(x[0]), past[back] / bench.R
            x = F @ x + G[:, 0] * past[back]
            for level in (0.1, 0.9):
                if level not in crossed and float(x[0]) >= level > i:
                    crossed[level] = time - bench.L / bench.R * math.log((end - level) / (end - i))
            peak = max(peak, float(x[0]))
            time += h
        quiet = quiet + 1 if abs(e) < settled and abs(x[0] - 1.0) < settled else 0
        if quiet > 20:
            break
    rise = crossed[0.9] - crossed[0.1] if len(crossed) == 2 else None
    return Step(rise_s=rise, overshoot_percent=100.0 * max(0.0, peak - 1.0))
