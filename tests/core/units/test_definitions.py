"""Conversion factors against published ones.

Sources: NIST SP 811 (2008), appendix B.8, factors rounded to seven digits; omega.nl inertia conversion table; U7 to
U9 of SP 811 from memory; identities where no source is named. Oracles: pint's own registry and scipy.constants.
"""

from __future__ import annotations

import math

import pint
import pytest
from scipy import constants

from gainbench.units import Dimension, parse, unit_size

INCH, POUND, GRAVITY = 0.0254, 0.45359237, 9.80665
EXACT = 1e-12
SEVEN_DIGITS = 1e-6


@pytest.mark.parametrize(
    ("unit", "dimension", "exact", "published"),
    [
        # U1 to U3: torques
        ("ozf*in", Dimension.TORQUE, POUND / 16 * GRAVITY * INCH, 7.061552e-3),
        ("lbf*in", Dimension.TORQUE, POUND * GRAVITY * INCH, 0.1129848),
        ("lbf*ft", Dimension.TORQUE, POUND * GRAVITY * 12 * INCH, 1.355818),
        # U4 to U6: inertias
        ("lb*ft^2", Dimension.INERTIA, POUND * (12 * INCH) ** 2, 4.214011e-2),
        ("lb*in^2", Dimension.INERTIA, POUND * INCH**2, 2.926397e-4),
        ("oz*in^2", Dimension.INERTIA, POUND / 16 * INCH**2, 1.828998e-5),
        ("oz*in*s^2", Dimension.INERTIA, POUND / 16 * GRAVITY * INCH, 7.061552e-3),
        ("lb*in*s^2", Dimension.INERTIA, POUND * GRAVITY * INCH, 0.1129848),
        # U7, from memory
        ("kgf*cm", Dimension.TORQUE, 0.0980665, 0.0980665),
        ("gf*cm", Dimension.TORQUE, 9.80665e-5, 9.80665e-5),
        ("dyn*cm", Dimension.TORQUE, 1e-7, 1e-7),
        # U8, from memory
        ("hp", Dimension.POWER, 550 * 12 * INCH * POUND * GRAVITY, 745.6999),
        ("hp_metric", Dimension.POWER, 735.49875, 735.4988),
        ("hp_electric", Dimension.POWER, 746.0, 746.0),
        # U9, from memory
        ("rpm", Dimension.SPEED, math.pi / 30.0, 0.1047198),
        # U10
        ("V/krpm", Dimension.BACK_EMF_CONSTANT, 0.03 / math.pi, 9.549297e-3),
    ],
)
def test_factor_is_the_published_one(unit: str, dimension: Dimension, exact: float, published: float) -> None:
    size = unit_size(unit, dimension)
    assert size == pytest.approx(exact, rel=EXACT)
    assert size == pytest.approx(published, rel=SEVEN_DIGITS)


@pytest.mark.parametrize(
    ("unit", "dimension", "oracle"),
    [
        ("ozf*in", Dimension.TORQUE, "ounce_force * inch"),
        ("lbf*in", Dimension.TORQUE, "pound_force * inch"),
        ("lbf*ft", Dimension.TORQUE, "pound_force * foot"),
        ("lb*ft^2", Dimension.INERTIA, "pound * foot ** 2"),
        ("oz*in^2", Dimension.INERTIA, "ounce * inch ** 2"),
        ("lb*in*s^2", Dimension.INERTIA, "pound_force * inch * second ** 2"),
        ("kgf*cm", Dimension.TORQUE, "kilogram_force * centimeter"),
        ("hp", Dimension.POWER, "horsepower"),
        ("hp_metric", Dimension.POWER, "metric_horsepower"),
        ("hp_electric", Dimension.POWER, "electrical_horsepower"),
        ("V/krpm", Dimension.BACK_EMF_CONSTANT, "volt / (1000 rpm)"),
        ("g*cm^2", Dimension.INERTIA, "gram * centimeter ** 2"),
        ("mN*m/A", Dimension.TORQUE_CONSTANT, "millinewton * meter / ampere"),
    ],
)
def test_factor_is_that_of_another_library(unit: str, dimension: Dimension, oracle: str) -> None:
    registry = pint.UnitRegistry()
    assert unit_size(unit, dimension) == pytest.approx(registry(oracle).to_base_units().magnitude, rel=EXACT)


def test_horsepower_is_that_of_scipy() -> None:
    assert unit_size("hp", Dimension.POWER) == pytest.approx(constants.hp, rel=EXACT)


def test_inverse_torques() -> None:
    # U1, SP 811 B.8: 1 N m = 141.6119 ozf in; U4: 1 kg m2 = 23.73036 lb ft2
    assert 1.0 / unit_size("ozf*in", Dimension.TORQUE) == pytest.approx(141.6119, rel=SEVEN_DIGITS)
    assert 1.0 / unit_size("lb*ft^2", Dimension.INERTIA) == pytest.approx(23.73036, rel=SEVEN_DIGITS)


def test_machine_constants_agree_between_trades() -> None:
    # U10, identities of U1, U2 and U9
    volt = unit_size("V/krpm", Dimension.BACK_EMF_CONSTANT)
    assert volt == unit_size("V/krpm", Dimension.TORQUE_CONSTANT)
    assert volt / unit_size("ozf*in/A", Dimension.TORQUE_CONSTANT) == pytest.approx(1.352294, rel=SEVEN_DIGITS)
    assert unit_size("oz*in/A", Dimension.TORQUE_CONSTANT) / volt == pytest.approx(0.739484, rel=SEVEN_DIGITS)
    assert unit_size("lb*in/A", Dimension.TORQUE_CONSTANT) / volt == pytest.approx(11.83174, rel=SEVEN_DIGITS)


def test_power_torque_speed_identities() -> None:
    # U11
    constant = unit_size("mN*m/A", Dimension.TORQUE_CONSTANT) * unit_size("rpm/V", Dimension.SPEED_CONSTANT)
    assert 1.0 / constant == pytest.approx(30000.0 / math.pi, rel=EXACT)
    watt_per_rpm = unit_size("kW", Dimension.POWER) / unit_size("rpm", Dimension.SPEED)
    assert watt_per_rpm == pytest.approx(9549.297, rel=SEVEN_DIGITS)
    horse_per_rpm = unit_size("hp", Dimension.POWER) / unit_size("rpm", Dimension.SPEED)
    assert horse_per_rpm / unit_size("lbf*ft", Dimension.TORQUE) == pytest.approx(5252.113, rel=SEVEN_DIGITS)


def test_ounce_is_a_mass_or_a_force() -> None:
    # U12, omega.nl inertia conversion table: 1 ozf in s2 = 386.088 oz in2
    ratio = unit_size("oz*in*s^2", Dimension.INERTIA) / unit_size("oz*in^2", Dimension.INERTIA)
    assert ratio == pytest.approx(386.088, abs=2e-3)
    assert ratio == pytest.approx(GRAVITY / INCH, rel=EXACT)
    assert parse("1 oz*in", Dimension.TORQUE) == parse("1 ozf*in", Dimension.TORQUE)
    assert parse("1 lb", Dimension.MASS) == POUND


def test_angle_is_a_dimension() -> None:
    assert unit_size("Hz", Dimension.FREQUENCY) == unit_size("turn/s", Dimension.FREQUENCY) == 2.0 * math.pi
    assert unit_size("J/rad", Dimension.TORQUE) == 1.0
    assert unit_size("V*s/rad", Dimension.TORQUE_CONSTANT) == 1.0
    assert unit_size("deg", Dimension.ANGLE) == pytest.approx(math.pi / 180.0, rel=EXACT)
