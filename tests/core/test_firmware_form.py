"""Gains in the firmware's form: values written out by hand, and read back through the sheet's own units."""

from __future__ import annotations

import math
from itertools import product

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.firmware_form import firmware_gains, is_si_form
from gainbench.model import Firmware, GainForm, SpeedOutput
from gainbench.results import Gains
from gainbench.units import Dimension, parse

RPM = math.pi / 30.0
KT = 0.052
TW = 5e-4

sizes = st.floats(min_value=1e-9, max_value=1e9)


def form(**keys):
    return Firmware(**keys)


def written(loop, gains, firmware, period=TW):
    return {
        one.name: (one.value, one.unit)
        for one in firmware_gains(loop, gains, firmware=firmware, period=period, torque_constant=KT)
    }


def test_default_form_is_si():
    assert written("current", Gains(kp=2.66, ki=4681.0), form()) == {"kp": (2.66, "V/A"), "ki": (4681.0, "V/(A*s)")}
    assert written("speed", Gains(kp=0.481, ki=57.6), form()) == {"kp": (0.481, "A*s/rad"), "ki": (57.6, "A/rad")}


def test_ti_is_kp_over_ki():
    found = written("current", Gains(kp=3.0, ki=1500.0), form(gain_form=GainForm.KP_TI))
    assert found == {"kp": (3.0, "V/A"), "ti": (0.002, "s")}


def test_wi_is_ki_over_kp_and_numerically_so():
    found = written("speed", Gains(kp=0.5, ki=60.0), form(gain_form=GainForm.KP_WI))
    assert found == {"kp": (0.5, "A*s/rad"), "wi": (120.0, "rad/s")}


def test_period_goes_into_ki_only():
    firmware = form(ki_includes_period=True)
    assert written("current", Gains(kp=2.0, ki=4000.0), firmware, 5e-5) == {
        "kp": (2.0, "V/A"),
        "ki": (pytest.approx(0.2), "V/A"),
    }
    assert written("speed", Gains(kp=0.5, ki=60.0), firmware) == {
        "kp": (0.5, "A*s/rad"),
        "ki": (pytest.approx(0.03), "A*s/rad"),
    }


@pytest.mark.parametrize(("kind", "name"), [(GainForm.KP_TI, "ti"), (GainForm.KP_WI, "wi")])
def test_period_does_not_touch_ti_and_wi(kind, name):
    gains = Gains(kp=0.5, ki=60.0)
    with_period = written("speed", gains, form(gain_form=kind, ki_includes_period=True))
    assert with_period[name] == written("speed", gains, form(gain_form=kind))[name]


def test_speed_in_rpm_leaves_the_current_loop_alone():
    firmware = form(speed_unit="rpm", speed_unit_size=RPM)
    gains = Gains(kp=0.5, ki=60.0)
    # 1 rpm is pi/30 rad/s, so a gain per rpm is smaller by that factor.
    assert written("speed", gains, firmware) == {
        "kp": (pytest.approx(0.5 * math.pi / 30.0), "A/rpm"),
        "ki": (pytest.approx(2.0 * math.pi), "A/(rpm*s)"),
    }
    assert written("current", gains, firmware) == written("current", gains, form())


def test_torque_output_goes_through_the_torque_constant():
    firmware = form(speed_output=SpeedOutput.TORQUE)
    assert written("speed", Gains(kp=0.5, ki=60.0), firmware) == {
        "kp": (pytest.approx(0.026), "N*m*s/rad"),
        "ki": (pytest.approx(3.12), "N*m/rad"),
    }


def test_no_integral_part_has_no_ti_but_a_wi_of_zero():
    gains = Gains(kp=1.0, ki=0.0)
    assert written("current", gains, form(gain_form=GainForm.KP_TI))["ti"] == (None, "s")
    assert written("current", gains, form(gain_form=GainForm.KP_WI))["wi"] == (0.0, "rad/s")


@pytest.mark.parametrize(("kind", "name"), [(GainForm.KP_TI, "ti"), (GainForm.KP_WI, "wi")])
def test_no_proportional_part_cannot_be_told_by_a_quotient(kind, name):
    assert written("current", Gains(kp=0.0, ki=5.0), form(gain_form=kind))[name][0] is None


@pytest.mark.parametrize("kind", list(GainForm))
def test_without_gains_names_and_units_stay(kind):
    gains = Gains(kp=0.5, ki=60.0)
    empty = written("speed", None, form(gain_form=kind))
    assert {name: unit for name, (_, unit) in empty.items()} == {
        name: unit for name, (_, unit) in written("speed", gains, form(gain_form=kind)).items()
    }
    assert all(value is None for value, _ in empty.values())


@given(kp=sizes, ki=sizes)
@pytest.mark.parametrize(("held", "output"), list(product([False, True], SpeedOutput)))
@pytest.mark.parametrize(
    ("unit", "size"), [("rad/s", 1.0), ("rad / s", 1.0), ("rpm", RPM), ("deg/s", math.pi / 180.0), ("Hz", math.tau)]
)
def test_units_read_back_to_the_gains(unit, size, held, output, kp, ki):
    firmware = form(speed_unit=unit, speed_unit_size=size, speed_output=output, ki_includes_period=held)
    torque = output is SpeedOutput.TORQUE
    scale = KT if torque else 1.0
    found = written("speed", Gains(kp=kp, ki=ki), firmware)
    kp_kind = Dimension.VISCOUS_FRICTION if torque else Dimension.SPEED_KP
    ki_kind = Dimension.STIFFNESS if torque else Dimension.SPEED_KI
    assert parse(f"{found['kp'][0]!r} {found['kp'][1]}", kp_kind) == pytest.approx(kp * scale, rel=1e-12)
    read = parse(f"{found['ki'][0]!r} {found['ki'][1]}", kp_kind if held else ki_kind)
    assert read == pytest.approx(ki * scale * (TW if held else 1.0), rel=1e-12)


def test_si_form_is_recognised():
    assert is_si_form("current", form())
    assert is_si_form("speed", form())
    assert not is_si_form("current", form(ki_includes_period=True))
    assert not is_si_form("speed", form(gain_form=GainForm.KP_TI))
    assert is_si_form("current", form(speed_unit="rpm", speed_unit_size=RPM))
    assert not is_si_form("speed", form(speed_unit="rpm", speed_unit_size=RPM))
    assert not is_si_form("speed", form(speed_output=SpeedOutput.TORQUE))
