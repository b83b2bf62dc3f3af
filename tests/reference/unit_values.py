"""Conversion factors from outside the project, each with its source, and products of the exact base definitions."""

from __future__ import annotations

import math
from dataclasses import dataclass

from gainbench.units import Dimension

INCH = 0.0254
"""[m], exact by definition (NIST SP 811, 2008, appendix B.8)."""
POUND = 0.45359237
"""[kg], exact by definition (NIST SP 811, 2008, appendix B.8)."""
GRAVITY = 9.80665
"""Standard acceleration of gravity [m/s^2], exact by definition (NIST SP 811, 2008, appendix B.8)."""

EXACT = 1e-12
"""Relative: a handful of roundings of a float."""
SEVEN_DIGITS = 1e-6
"""Relative: the tables give seven digits."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Published:
    """One of a unit in SI: the product of exact definitions, and the number a source gives."""

    unit: str
    dimension: Dimension
    exact: float
    published: float
    source: str

    def __post_init__(self) -> None:
        if not self.source.strip():
            raise ValueError(f"the value of {self.unit} needs its source")
        if not abs(self.exact / self.published - 1.0) < SEVEN_DIGITS:
            raise ValueError(f"the two values of {self.unit} differ")


_SP811 = "NIST SP 811, 2008, appendix B.8"
_TORQUE_TABLE = f"{_SP811}, from memory; read in the torque table of me-systeme.de"
_INERTIA_TABLE = f"{_SP811}, from memory; read in the inertia conversions of webtec and theunitconverter"
_OMEGA = "omega.nl, inertia conversion table, for the product; seven digits computed from NIST SP 811's definitions"
_MEMORY = f"{_SP811}, from memory"
_IDENTITY = "identity, needs no source"
_ARC = "NIST SP 811, 2008, table 6 (minute and second of angle), from memory"

FACTORS: tuple[Published, ...] = tuple(
    Published(unit=unit, dimension=dimension, exact=exact, published=published, source=source)
    for unit, dimension, exact, published, source in [
        # torques
        ("ozf*in", Dimension.TORQUE, POUND / 16.0 * GRAVITY * INCH, 7.061552e-3, _TORQUE_TABLE),
        ("lbf*in", Dimension.TORQUE, POUND * GRAVITY * INCH, 0.1129848, _TORQUE_TABLE),
        ("lbf*ft", Dimension.TORQUE, POUND * GRAVITY * 12.0 * INCH, 1.355818, _TORQUE_TABLE),
        # inertias, by mass and by force
        ("lb*ft^2", Dimension.INERTIA, POUND * (12.0 * INCH) ** 2, 4.214011e-2, _INERTIA_TABLE),
        ("lb*in^2", Dimension.INERTIA, POUND * INCH**2, 2.926397e-4, _INERTIA_TABLE),
        ("oz*in^2", Dimension.INERTIA, POUND / 16.0 * INCH**2, 1.828998e-5, _OMEGA),
        ("oz*in*s^2", Dimension.INERTIA, POUND / 16.0 * GRAVITY * INCH, 7.061552e-3, _OMEGA),
        ("lb*in*s^2", Dimension.INERTIA, POUND * GRAVITY * INCH, 0.1129848, _OMEGA),
        ("slug*ft^2", Dimension.INERTIA, POUND * GRAVITY * 12.0 * INCH, 1.355818, f"{_MEMORY} (slug = lbf*s^2/ft)"),
        # torques of the metric trade
        ("kgf*cm", Dimension.TORQUE, 0.0980665, 0.0980665, _MEMORY),
        ("gf*cm", Dimension.TORQUE, 9.80665e-5, 9.80665e-5, _MEMORY),
        ("dyn*cm", Dimension.TORQUE, 1e-7, 1e-7, _MEMORY),
        # powers
        ("hp", Dimension.POWER, 550.0 * 12.0 * INCH * POUND * GRAVITY, 745.6999, _MEMORY),
        ("hp_metric", Dimension.POWER, 735.49875, 735.4988, _MEMORY),
        ("hp_electric", Dimension.POWER, 746.0, 746.0, f"{_SP811}, from memory; 746 read in secondary tables"),
        # turns and angles
        ("rpm", Dimension.SPEED, math.pi / 30.0, 0.1047198, _MEMORY),
        ("arcmin", Dimension.ANGLE, math.pi / 10800.0, 2.908882e-4, _ARC),
        ("arcsec", Dimension.ANGLE, math.pi / 648000.0, 4.848137e-6, _ARC),
        ("V/krpm", Dimension.BACK_EMF_CONSTANT, 0.03 / math.pi, 9.549297e-3, _IDENTITY),
    ]
)
