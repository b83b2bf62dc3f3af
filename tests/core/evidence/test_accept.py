"""Accepting: what goes back into the sheet gives the estimates again."""

from __future__ import annotations

import pytest

from gainbench.evidence.accept import accept
from gainbench.evidence.estimate import Estimate, EstimateName, Identification
from gainbench.plant import refer
from gainbench.sheetfile import parse_sheet
from quantities import assert_quantity

EVIDENCE = """
[[evidence]]
log = "a.csv"
experiment = "driven"
note = "cold motor"
[evidence.columns]
time = { column = "t", unit = "s" }
"""
VALUES = {
    EstimateName.RESISTANCE: 0.7,
    EstimateName.INDUCTANCE: 5e-4,
    EstimateName.BACK_EMF_CONSTANT: 0.04,
    EstimateName.TORQUE_CONSTANT: 0.04,
    EstimateName.INERTIA: 1.3e-4,
    EstimateName.VISCOUS_FRICTION: 5e-5,
    EstimateName.COULOMB_FRICTION: 2e-2,
    EstimateName.TORQUE_OFFSET: -4e-3,
    EstimateName.COULOMB_FRICTION_FORWARD: 1.6e-2,
}


def identification(values=VALUES, *, factor: float = 1.0) -> Identification:
    found = {
        name: Estimate(
            value=one, low=0.99 * one, high=1.01 * one, run_low=one - 0.05 * abs(one), run_high=one + 0.05 * abs(one)
        )
        for name, one in values.items()
    }
    if factor != 1.0:
        one = found[EstimateName.BACK_EMF_CONSTANT]
        found[EstimateName.TORQUE_CONSTANT] = Estimate(
            value=factor * one.value, low=one.low, high=one.high, run_low=one.run_low, run_high=one.run_high
        )
    return Identification(estimates=found, regression={}, runs=())


@pytest.fixture(params=["label-unwinder", "bottle-indexer", "sieve-drum"])
def document(request, demo_texts):
    return parse_sheet(demo_texts[request.param] + EVIDENCE, "x.bench.toml")


def test_the_plant_of_the_accepted_sheet_is_what_was_estimated(document):
    accepted = accept(document.sheet, identification(), typed=document.typed)
    plant = refer(document.with_values(accepted.values).sheet.rig)
    why = "four digits are written, of each side of the train"
    assert_quantity(plant.resistance, 0.7, rtol=5e-4, unit="ohm", why=why)
    assert_quantity(plant.inductance, 5e-4, rtol=5e-4, unit="H", why=why)
    assert_quantity(plant.back_emf, 0.04, rtol=5e-4, unit="V*s/rad", why=why)
    assert_quantity(plant.inertia, 1.3e-4, rtol=1e-3, unit="kg*m^2", why=why)
    assert_quantity(plant.viscous, 5e-5, rtol=5e-4, unit="N*m*s/rad", why=why)
    assert_quantity(plant.coulomb, 2e-2, rtol=5e-4, unit="N*m", why=why)


def test_tolerances_are_the_runs_and_notes_say_where_from(document):
    accepted = accept(document.sheet, identification(), typed=document.typed)
    assert accepted.values['tolerance."machine.resistance"'] == "5 %"
    note = accepted.values["evidence[0].note"]
    assert note.startswith("cold motor; accepted: ")
    assert "resistance" in note
    again = document.with_values(accepted.values)
    twice = accept(again.sheet, identification(), typed=again.typed)
    assert twice.values["evidence[0].note"] == note
    assert accepted.left_out == (EstimateName.TORQUE_CONSTANT, EstimateName.COULOMB_FRICTION_FORWARD)


def test_what_was_accepted_before_stays_in_the_note(document):
    parts = ({EstimateName.RESISTANCE: 0.7}, {EstimateName.INDUCTANCE: 5e-4}, {EstimateName.RESISTANCE: 0.8})
    for values in parts:
        found = accept(document.sheet, identification(values), typed=document.typed)
        document = document.with_values(found.values)
    assert document.sheet.evidence[0].note == "cold motor; accepted: resistance, inductance"


def test_units_stay_as_the_user_has_them(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"] + EVIDENCE, "x.bench.toml")
    values = accept(document.sheet, identification(), typed=document.typed).values
    assert values["machine.inductance"] == "0.5 mH"
    assert values["machine.torque_constant"] == "40 mN*m/A"
    assert values["train.load_inertia"].endswith("kg*cm^2")


def test_an_inertia_below_the_rotors_takes_both_down(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"] + EVIDENCE, "x.bench.toml")
    small = identification({EstimateName.INERTIA: 1e-5})
    plant = refer(document.with_values(accept(document.sheet, small, typed=document.typed).values).sheet.rig)
    assert_quantity(plant.inertia, 1e-5, rtol=1e-3, unit="kg*m^2", why="five digits are written")


def test_nothing_told_changes_nothing(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"] + EVIDENCE, "x.bench.toml")
    assert accept(document.sheet, identification({}), typed=document.typed).values == {}
