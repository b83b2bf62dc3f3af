"""Conversion factors against published ones; oracles: pint's own registry and scipy.constants."""

from __future__ import annotations

import math

import pint
import pytest
from scipy import constants

from gainbench.units import Dimension, parse, unit_size
from unit_values import EXACT, FACTORS, GRAVITY, INCH, POUND, SEVEN_DIGITS, Published


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    return pint.UnitRegistry()


@pytest.mark.parametrize("value", FACTORS, ids=lambda value: value.unit)
def test_factor_is_the_published_one(value: Published) -> None:
    size = unit_size(value.unit, value.dimension)
    assert size == pytest.approx(value.exact, rel=EXACT)
    assert size == pytest.approx(value.published, rel=SEVEN_DIGITS)


def test_a_value_without_its_source_is_refused() -> None:
    with pytest.raises(ValueError, match="needs its source"):
        Published(unit="rpm", dimension=Dimension.SPEED, exact=1.0, published=1.0, source=" ")
    with pytest.raises(ValueError, match="differ"):
        Published(unit="rpm", dimension=Dimension.SPEED, exact=1.0, published=1.1, source="x")


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
        ("slug*ft^2", Dimension.INERTIA, "slug * foot ** 2"),
        ("arcmin", Dimension.ANGLE, "arcminute"),
        ("arcsec", Dimension.ANGLE, "arcsecond"),
        ("rps", Dimension.SPEED, "revolutions_per_second"),
        ("V/krpm", Dimension.BACK_EMF_CONSTANT, "volt / (1000 rpm)"),
        ("g*cm^2", Dimension.INERTIA, "gram * centimeter ** 2"),
        ("mN*m/A", Dimension.TORQUE_CONSTANT, "millinewton * meter / ampere"),
    ],
)
def test_factor_is_that_of_pint(registry: pint.UnitRegistry, unit: str, dimension: Dimension, oracle: str) -> None:
    assert unit_size(unit, dimension) == pytest.approx(registry(oracle).to_base_units().magnitude, rel=EXACT)


@pytest.mark.parametrize(
    ("unit", "dimension", "oracle"),
    [
        ("hp", Dimension.POWER, constants.hp),
        ("lb", Dimension.MASS, constants.lb),
        ("oz", Dimension.MASS, constants.oz),
        ("slug", Dimension.MASS, constants.slug),
        ("lbf", Dimension.FORCE, constants.lbf),
        ("kgf", Dimension.FORCE, constants.kgf),
        ("dyn", Dimension.FORCE, constants.dyn),
        ("in", Dimension.LENGTH, constants.inch),
        ("ft", Dimension.LENGTH, constants.foot),
        ("min", Dimension.TIME, constants.minute),
        ("h", Dimension.TIME, constants.hour),
        ("deg", Dimension.ANGLE, constants.degree),
        ("arcmin", Dimension.ANGLE, constants.arcmin),
        ("arcsec", Dimension.ANGLE, constants.arcsec),
    ],
)
def test_factor_is_that_of_scipy(unit: str, dimension: Dimension, oracle: float) -> None:
    assert unit_size(unit, dimension) == pytest.approx(oracle, rel=EXACT)


def test_inverse_torques() -> None:
    # NIST SP 811, 2008, appendix B.8, from memory: 1 N m = 141.6119 ozf in (read in the torque table of me-systeme.de),
    # 1 kg m2 = 23.73036 lb ft2 (read in the inertia conversions of webtec)
    assert 1.0 / unit_size("ozf*in", Dimension.TORQUE) == pytest.approx(141.6119, rel=SEVEN_DIGITS)
    assert 1.0 / unit_size("lb*ft^2", Dimension.INERTIA) == pytest.approx(23.73036, rel=SEVEN_DIGITS)


def test_machine_constants_agree_between_trades() -> None:
    # Identities of the torques and the rpm above.
    volt = unit_size("V/krpm", Dimension.BACK_EMF_CONSTANT)
    assert volt == unit_size("V/krpm", Dimension.TORQUE_CONSTANT)
    assert volt / unit_size("ozf*in/A", Dimension.TORQUE_CONSTANT) == pytest.approx(1.352294, rel=SEVEN_DIGITS)
    assert unit_size("oz*in/A", Dimension.TORQUE_CONSTANT) / volt == pytest.approx(0.739484, rel=SEVEN_DIGITS)
    assert unit_size("lb*in/A", Dimension.TORQUE_CONSTANT) / volt == pytest.approx(11.83174, rel=SEVEN_DIGITS)


def test_power_torque_speed_identities() -> None:
    # Identities: 30000/pi, and one horsepower or kilowatt over one rpm.
    constant = unit_size("mN*m/A", Dimension.TORQUE_CONSTANT) * unit_size("rpm/V", Dimension.SPEED_CONSTANT)
    assert 1.0 / constant == pytest.approx(30000.0 / math.pi, rel=EXACT)
    watt_per_rpm = unit_size("kW", Dimension.POWER) / unit_size("rpm", Dimension.SPEED)
    assert watt_per_rpm == pytest.approx(9549.297, rel=SEVEN_DIGITS)
    horse_per_rpm = unit_size("hp", Dimension.POWER) / unit_size("rpm", Dimension.SPEED)
    assert horse_per_rpm / unit_size("lbf*ft", Dimension.TORQUE) == pytest.approx(5252.113, rel=SEVEN_DIGITS)


def test_ounce_is_a_mass_or_a_force() -> None:
    # omega.nl, inertia conversion table: 1 ozf in s2 = 386.088 oz in2
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
