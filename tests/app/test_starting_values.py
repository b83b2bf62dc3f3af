import pytest

from gainbench.assess import assess
from gainbench.model import CURRENT_METHODS, SPEED_METHODS, DesignMethod
from gainbench.sheetfile import parse_sheet
from gainbench_app.starting_values import starting_values

CASES = [("current", one) for one in CURRENT_METHODS] + [("speed", one) for one in SPEED_METHODS]
SMALL = 2e-3
"""The texts have four digits."""


@pytest.fixture(scope="module")
def document(demo_texts):
    return parse_sheet(demo_texts["label-unwinder"], "label-unwinder.bench.toml")


def loops(assessment):
    return {"current": assessment.current, "speed": assessment.speed}


def values_for(document, loop, method):
    found = assess(document.sheet)
    values = starting_values(document.sheet, loop, plant=found.plant, assessed=loops(found)[loop], method=method)
    return found, {f"aims.{loop}.method": method.value, **values}


@pytest.mark.parametrize(("loop", "method"), CASES)
def test_a_sheet_with_them_is_valid(document, loop, method):
    _, values = values_for(document, loop, method)
    assert document.with_values(values).sheet


@pytest.mark.parametrize("loop", ["current", "speed"])
@pytest.mark.parametrize("method", [DesignMethod.BY_HAND, DesignMethod.POLE_PLACEMENT, DesignMethod.BANDWIDTH_MARGIN])
def test_the_gains_stay_where_they_are(document, loop, method):
    found, values = values_for(document, loop, method)
    before = loops(found)[loop].gains
    after = loops(assess(document.with_values(values).sheet))[loop].gains
    assert after.kp == pytest.approx(before.kp, rel=SMALL)
    assert after.ki == pytest.approx(before.ki, rel=5.0 * SMALL)


def test_what_the_sheet_holds_is_left_alone(document):
    held = document.with_value("aims.current.bandwidth", "1.8 kHz")
    _, values = values_for(held, "current", DesignMethod.BANDWIDTH_MARGIN)
    assert "aims.current.bandwidth" not in values


def test_a_refused_loop_starts_from_its_rate(document):
    refused = document.with_value("aims.speed.crossover", "900 Hz")
    found, values = values_for(refused, "speed", DesignMethod.POLE_PLACEMENT)
    assert found.speed.refusal is not None
    assert values["aims.speed.natural_frequency"] == "100 Hz"
    _, by_hand = values_for(refused, "speed", DesignMethod.BY_HAND)
    assert by_hand == {"aims.speed.method": "by-hand"}
