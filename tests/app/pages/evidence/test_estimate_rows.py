from dataclasses import replace

import pytest

from gainbench.evidence.estimate import Estimate, EstimateName, Identification
from gainbench.plant import refer
from gainbench.sheetfile import parse_sheet
from gainbench_app.pages.evidence.estimate_rows import estimate_rows


def estimate(value, share=0.01):
    half = share * abs(value)
    return Estimate(
        value=value, low=value - half, high=value + half, run_low=value - 5.0 * half, run_high=value + 5.0 * half
    )


def rows_of(document, **values):
    found = {EstimateName(name): estimate(value) for name, value in values.items()}
    linear = {name: replace(one, value=1.1 * one.value) for name, one in found.items()}
    identified = Identification(estimates=found, regression=linear, runs=())
    return {row.name.value: row for row in estimate_rows(document.sheet, identified, typed=document.typed)}


@pytest.fixture
def document(demo_texts):
    return parse_sheet(demo_texts["label-unwinder"], "x.bench.toml")


def test_numbers_stand_in_the_users_units_beside_the_sheets(document):
    rows = rows_of(document, resistance=0.66, inductance=0.5e-3, inertia=8e-5, coulomb_friction=0.012)
    row = rows["resistance"]
    assert (row.value, row.unit, row.sheet, row.difference) == ("0.660", "Ω", "0.600", "+10.0 %")
    assert row.fit == "0.653 … 0.667"
    assert row.linear == "0.726"
    assert row.outside
    assert "machine.resistance = 0.66 ohm" in row.target
    assert (rows["inductance"].value, rows["inductance"].unit) == ("0.500", "mH")
    total = refer(document.sheet.rig).inertia
    assert (rows["inertia"].unit, rows["inertia"].sheet) == ("g·cm²", f"{total * 1e7:.0f}")
    assert "train.load_inertia" in rows["inertia"].target
    assert rows["coulomb_friction"].difference == "0 %"
    assert not rows["coulomb_friction"].outside


def test_what_the_sheet_has_no_place_for_says_so(document):
    rows = rows_of(document, torque_constant=0.05, coulomb_friction_forward=0.016, torque_offset=2e-3)
    assert rows["torque_constant"].refused == "follows from the back-EMF constant"
    assert "both directions" in rows["coulomb_friction_forward"].refused
    assert rows["coulomb_friction_forward"].sheet == ""
    assert rows["torque_offset"].difference == "from 0"
    assert not rows["torque_offset"].refused


def test_a_speed_constant_runs_the_other_way(document):
    changed = document.with_values({"machine.torque_constant": None, "machine.speed_constant": "180 rpm/V"})
    row = rows_of(changed, back_emf_constant=0.052)["back_emf_constant"]
    assert row.unit == "rpm/V"
    low, high = (float(one) for one in row.fit.split(" … "))
    assert low < float(row.value) < high


def test_windings_are_shown_as_the_sheet_has_them(demo_texts):
    sine = parse_sheet(demo_texts["bottle-indexer"], "x.bench.toml")
    plant = refer(sine.sheet.rig)
    row = rows_of(sine, resistance=plant.resistance, back_emf_constant=plant.back_emf)["resistance"]
    assert row.difference == "0 %"
    assert float(row.value) == pytest.approx(float(sine.typed("machine.resistance").split()[0]), rel=1e-2)


def test_an_unhandy_unit_gives_way(document):
    row = rows_of(document, viscous_friction=3.0)["viscous_friction"]
    assert row.unit != "µN·m·s/rad"
