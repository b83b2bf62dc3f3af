"""Values from outside the project, each with where it is from and how it was seen.

Standing: ``read`` in the source named, ``second-hand`` in a copy of it, ``from memory`` of the source named, or an
``identity`` that follows from the statement itself and needs no source. A row without a source is refused.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

Standing = Literal["read", "second-hand", "from memory", "identity"]


@dataclass(frozen=True, kw_only=True)
class Published:
    """One row: what is stated, and by whom."""

    source: str
    standing: Standing
    values: Mapping[str, float]

    def __post_init__(self) -> None:
        if not self.source.strip() or not self.values:
            raise ValueError("an outside value needs a source and a number")

    def __getitem__(self, name: str) -> float:
        return self.values[name]


_KESSLER = (
    "C. Kessler, Das symmetrische Optimum, Regelungstechnik 6 (1958); W. Leonhard, Control of Electrical Drives, 2001"
)
_MODULUS = "W. Leonhard, Control of Electrical Drives, 3rd ed., 2001; Umland & Safiuddin, IEEE Trans. IA 26(3), 1990"
_CTMS = "Control Tutorials for Matlab and Simulink, DC Motor Speed (Michigan, Carnegie Mellon, Detroit Mercy)"
_ASTROM = "K. J. Astrom, B. Wittenmark, Computer-Controlled Systems, 3rd ed., 1997, table 2.1"
_SECOND_ORDER = "standard second-order system, closed form"

PUBLISHED: Mapping[str, Published] = {
    "M1": Published(
        source="exp(-pi) of the magnitude optimum", standing="identity", values={"overshoot_percent": 4.32139}
    ),
    "M2": Published(source=_MODULUS, standing="from memory", values={"first_reach": 4.71239, "peak": 6.28319}),
    "M3": Published(
        source="closed loop 1/(1 + 2Ts + 2T^2s^2)",
        standing="identity",
        values={"rise": 3.0378, "settling_2": 8.4324, "settling_5": 4.1435},
    ),
    "M4": Published(
        source="open loop 1/(2Ts(1 + Ts))",
        standing="identity",
        values={
            "margin_deg": 65.5302,
            "crossover": 0.455090,
            "sensitivity": 1.27202,
            "bandwidth": 0.70711,
            "delay_margin": 2.513,
        },
    ),
    "S1": Published(
        source=_KESSLER,
        standing="from memory",
        values={"overshoot_percent": 43.410, "first_reach": 3.0893, "settling_2": 16.551, "settling_5": 14.692},
    ),
    "S1 10-90": Published(
        source="closed loop of the symmetric optimum, a = 2", standing="identity", values={"rise": 2.11, "peak": 5.77}
    ),
    "S2": Published(
        source=_KESSLER,
        standing="from memory",
        values={
            "overshoot_percent": 8.1465,
            "first_reach": 7.5583,
            "settling_2": 13.275,
            "settling_5": 11.931,
            "rise": 4.58,
        },
    ),
    "S6": Published(
        source="open loop of the symmetric optimum, a = 2",
        standing="identity",
        values={"sensitivity": 1.6823, "delay_margin": 1.287},
    ),
    "S7": Published(
        source="load step on 1/(Js), symmetric optimum, a = 2", standing="identity", values={"dip": 1.770, "at": 3.09}
    ),
    "S8 margins": Published(
        source="symmetric optimum with T = 2 Ts on the real inner loop 1/(1 + 2Ts s + 2Ts^2 s^2), a = 2",
        standing="identity",
        values={"margin_deg": 32.75, "gain_margin": 3.0},
    ),
    "W1": Published(
        source="N. Mohan, Electric Machines and Drives, feedback-controller example",
        standing="from memory",
        values={"ki": 1050.0, "kp": 2.73},
    ),
    "W2": Published(
        source="N. Mohan, Electric Machines and Drives, feedback-controller example",
        standing="from memory",
        values={"ki": 299.7, "kp": 0.827},
    ),
    "W3": Published(
        source="Harnefors & Nee, IEEE Trans. Ind. Appl. 34(1):133-141, 1998",
        standing="from memory",
        values={"rise": 2.197225},
    ),
    "W5": Published(source="pole placement on R + L s", standing="identity", values={"kp": 44.206, "ki": 2.05288e5}),
    "D2": Published(
        source="K. Ogata, Discrete-Time Control Systems; Phillips & Nagle; Kuo",
        standing="from memory",
        values={"b1": 0.36787944, "b2": 0.26424112},
    ),
    "D3": Published(
        source="w = (2/h) atan(w h/2)", standing="identity", values={"tenth": -3.1078, "twentieth": -0.8105}
    ),
    "D6": Published(
        source="K h/(z (z - 1)) with K h = 1/3",
        standing="identity",
        values={"overshoot_percent": 3.7037, "margin_deg": 61.218, "gain_margin": 3.0},
    ),
    "E1": Published(source=_CTMS + ", System Analysis", standing="read", values={"gain": 0.1, "settling": 2.07}),
    "E2": Published(source=_CTMS + ", Digital", standing="second-hand", values={"slow": -2.003, "fast": -9.997}),
    "E3": Published(
        source=_CTMS + ", Digital",
        standing="second-hand",
        values={"gain": 0.0020586, "zero": -0.8189, "slow": 0.9047, "fast": 0.6066},
    ),
    "E4": Published(
        source="E3 multiplied out",
        standing="identity",
        values={"b1": 0.00205858, "b2": 0.00168576, "a1": -1.51133079, "a2": 0.54881164},
    ),
    "C5": Published(
        source="catalogue row of a 310 V brushless motor, quoted at thefreedictionary, torque constant",
        standing="read",
        values={"ratio": 0.994, "tau_e": 2.14e-3},
    ),
    "C6": Published(
        source="maker's catalogue, 24 V, 40 mm, 150 W brushed motor",
        standing="from memory",
        values={
            "stall_current": 80.2,
            "stall_torque": 2.420,
            "speed_constant_rpm": 317.0,
            "gradient_rpm_per_mnm": 3.14,
            "tau_m": 4.67e-3,
            "no_load_rpm": 7580.0,
        },
    ),
    "K1": Published(
        source="Zhang & Furusho, IEEE Trans. Ind. Electron. 47(3), 2000",
        standing="from memory",
        values={"antiresonance": 223.607, "resonance": 387.298},
    ),
    "K3": Published(
        source="two bodies on a damped shaft, closed form",
        standing="identity",
        values={"pole_real": -7.5, "pole_imag": 387.226, "zero_real": -2.5, "zero_imag": 223.593},
    ),
    "K4": Published(source="engineersedge, gear inertia", standing="read", values={"reflected": 4e-6}),
    "K7": Published(
        source="designworldonline, encoder speed measurement",
        standing="read",
        values={"lines_1000": 15.0, "lines_1024": 14.648, "lines_2500": 12.0},
    ),
    "P1": Published(
        source="Harnefors & Nee; R. Krishnan; N. Mohan: amplitude-invariant dq",
        standing="from memory",
        values={"per_peak": 0.3, "per_rms": 0.424264},
    ),
    "P2": Published(
        source="P1 with line-to-line rms volts",
        standing="identity",
        values={"rms_v_per_krpm": 25.65100, "peak_v_per_krpm": 36.27599},
    ),
    "P3": Published(source="P1 over P2", standing="identity", values={"ratio": 0.016539867}),
    "P5": Published(
        source="textbooks on space-vector modulation", standing="from memory", values={"phase_peak": 0.57735}
    ),
}
"""By the number of the row; the tests name the row they stand on."""

MARGIN_TABLE = Published(
    source="J. C. Daly, University of Rhode Island, phase margin, table I",
    standing="read",
    values={"tolerance_percent": 0.1, "tolerance_product": 0.01},
)
MARGIN_ROWS: tuple[tuple[float, float, float], ...] = (
    (55.0, 0.700, 13.3),
    (60.0, 0.580, 8.7),
    (65.0, 0.470, 4.7),
    (70.0, 0.360, 1.4),
    (75.0, 0.270, 0.008),
)
"""Phase margin [deg], crossover times second time constant, overshoot [%]: of :data:`MARGIN_TABLE`."""

DAMPING = Published(source=_SECOND_ORDER, standing="identity", values={"rows": 5})
DAMPING_ROWS: tuple[tuple[float, float, float], ...] = (
    (0.3, 37.233, 33.27),
    (0.5, 16.303, 51.83),
    (0.7, 4.599, 65.16),
    (0.70711, 4.321, 65.53),
)
"""Damping ratio, overshoot [%], phase margin [deg]: of :data:`DAMPING`."""

SYMMETRIC = Published(
    source=_KESSLER + "; Preitl & Precup, Automatica 35 (1999)", standing="from memory", values={"rows": 5}
)
SYMMETRIC_ROWS: tuple[tuple[float, float, float, float, float, float], ...] = (
    (2.0, 36.870, 43.41, 8.15, 16.55, 13.27),
    (2.41421, 45.000, 33.56, 1.40, 14.89, 11.69),
    (2.5, 46.397, 31.98, 0.77, 16.01, 12.95),
    (3.0, 53.130, 24.89, 0.0, 23.67, 22.55),
    (4.0, 61.928, 17.31, 0.0, 40.91, 47.65),
)
"""Spread a, phase margin [deg], overshoot raw and filtered [%], 2 % settling raw and filtered [T]."""

REAL_INNER = Published(
    source="symmetric optimum on the real inner loop, computed", standing="identity", values={"rows": 3}
)
REAL_INNER_ROWS: tuple[tuple[float, float, float], ...] = (
    (2.0, 32.75, 53.7),
    (2.4142, 42.68, 36.4),
    (3.0, 51.95, 23.9),
)
"""Spread a, phase margin [deg], overshoot [%] where T = 2 Ts stands for the inner magnitude optimum."""
