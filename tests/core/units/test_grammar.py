from __future__ import annotations

import re
import subprocess
import sys

import pytest

from gainbench.errors import UnitError
from gainbench.units import Dimension, unit_size
from gainbench.units.grammar import MAX_UNIT_LENGTH, amount


@pytest.mark.parametrize(
    ("unit", "dimension", "plain"),
    [
        ("Nm", Dimension.TORQUE, "N*m"),
        ("mNm", Dimension.TORQUE, "mN*m"),
        ("Ncm", Dimension.TORQUE, "N*cm"),
        ("N m", Dimension.TORQUE, "N*m"),
        ("N·m", Dimension.TORQUE, "N*m"),
        ("N⋅m", Dimension.TORQUE, "N*m"),
        ("N-m", Dimension.TORQUE, "N*m"),
        ("oz-in", Dimension.TORQUE, "ozf*in"),
        ("ozin", Dimension.TORQUE, "ozf*in"),
        ("lbft", Dimension.TORQUE, "lbf*ft"),
        ("ft-lb", Dimension.TORQUE, "lbf*ft"),
        ("in lb", Dimension.TORQUE, "lbf*in"),
        ("gcm2", Dimension.INERTIA, "g*cm^2"),
        ("g cm²", Dimension.INERTIA, "g*cm^2"),
        ("kgcm^2", Dimension.INERTIA, "kg*cm^2"),
        ("kg*m2", Dimension.INERTIA, "kg*m^2"),
        ("kg*m**2", Dimension.INERTIA, "kg*m^2"),
        ("Ohm", Dimension.RESISTANCE, "ohm"),
        ("mOhm", Dimension.RESISTANCE, "mohm"),
        ("\N{GREEK CAPITAL LETTER OMEGA}", Dimension.RESISTANCE, "ohm"),
        ("m\N{OHM SIGN}", Dimension.RESISTANCE, "mohm"),
        ("µH", Dimension.INDUCTANCE, "uH"),
        ("\N{GREEK SMALL LETTER MU}H", Dimension.INDUCTANCE, "uH"),
        ("Vs/rad", Dimension.BACK_EMF_CONSTANT, "V*s/rad"),
        ("mNm/A", Dimension.TORQUE_CONSTANT, "mN*m/A"),
        ("A/(rad/s)", Dimension.SPEED_KP, "A*s/rad"),
        ("V/A/s", Dimension.CURRENT_KI, "V/(A*s)"),
        ("V*A^-1*s⁻¹", Dimension.CURRENT_KI, "V/(A*s)"),
        ("rev/min", Dimension.SPEED, "rpm"),
        ("r/min", Dimension.SPEED, "rpm"),
        ("1/(V/rpm)", Dimension.SPEED_CONSTANT, "rpm/V"),
        ("Nm s / rad", Dimension.VISCOUS_FRICTION, "N*m*s/rad"),
        ("mN.m/A", Dimension.TORQUE_CONSTANT, "mN*m/A"),
        ("kg.m^2", Dimension.INERTIA, "kg*m^2"),
        ("Nms/rad", Dimension.VISCOUS_FRICTION, "N*m*s/rad"),
        ("mNms/rad", Dimension.VISCOUS_FRICTION, "mN*m*s/rad"),
        ("V A-1 s-1", Dimension.CURRENT_KI, "V/(A*s)"),
        ("oz-in-s2", Dimension.INERTIA, "ozf*in*s^2"),
        ("V/(kr/min)", Dimension.BACK_EMF_CONSTANT, "V/krpm"),
        ("msec", Dimension.TIME, "ms"),
        ("rps", Dimension.SPEED, "turn/s"),
        ("hertz", Dimension.FREQUENCY, "Hz"),
    ],
)
def test_trade_spelling(unit: str, dimension: Dimension, plain: str) -> None:
    assert unit_size(unit, dimension) == unit_size(plain, dimension)


def test_min_is_a_minute_and_not_a_milliinch() -> None:
    assert unit_size("min", Dimension.TIME) == 60.0


@pytest.mark.parametrize(
    ("unit", "expected"),
    [
        ("olm", "ohm is near"),
        ("v", "V is near"),
        ("NM", "Nm is near"),
        ("hz", "Hz is near"),
        ("C", "degC"),
        ("Arms", "current_values"),
        ("V^99", "power 99"),
        ("V^0", "power 0"),
        ("V**-9", "power -9"),
        ("((((V))))", "too many brackets"),
        ("(V", "not closed"),
        ("V)", "out of place"),
        ("V//A", "not complete"),
        ("*V", "not complete"),
        ("2*V", "number 2"),
        ("V;A", "does not belong"),
        ("V\tA", "does not belong"),
        ("__import__('os')", "does not belong"),
        ("V" * (MAX_UNIT_LENGTH + 1), "longer"),
        ("degC/s", "stands alone"),
        ("kg*m\N{ARABIC-INDIC DIGIT TWO}", "does not belong"),
        ("V^\n2", "does not belong"),
        ("V/1000rpm", "are krpm"),
        ("N..m", "not complete"),
        ("V.", "not complete"),
        ("-1", "not complete"),
        ("m^-9", "power -9"),
        ("m-9", "power -9"),
    ],
)
def test_refused(unit: str, expected: str) -> None:
    with pytest.raises(UnitError, match=re.escape(expected)):
        amount(unit)


def test_importing_the_package_leaves_pint_alone() -> None:
    code = "import sys, gainbench.units; sys.exit('pint' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
