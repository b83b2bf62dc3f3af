"""Winding resistance at another temperature: each convention by its own numbers, and against the others."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.temperature import WindingRule, resistance_ratio, winding_resistance
from quantities import assert_quantity

TEMPERATURES = st.floats(-60.0, 250.0)
RULES = st.sampled_from(WindingRule)
CLOSED_FORM = "the same quotient of two sums"
PRINTED = "digits printed in the source"


@pytest.mark.parametrize(
    ("rule", "known_at", "wanted_at", "ratio"),
    [
        # T2: k = 235 for copper, 225 for aluminium. Source: IEC 60034-1, temperature rise by resistance (from memory).
        (WindingRule.IEC_COPPER, 20.0, 120.0, 1.392157),
        (WindingRule.IEC_COPPER, 20.0, 75.0, 1.215686),
        (WindingRule.IEC_COPPER, 25.0, 155.0, 1.500000),
        # T3: k = 234.5. Source: test text of UL; IEEE 112, 113 and 117 (from memory).
        (WindingRule.US_COPPER, 20.0, 120.0, 1.392927),
        # T4: 20 to 155 degC in both conventions. Source: the identity.
        (WindingRule.IEC_COPPER, 20.0, 155.0, 1.52941),
        (WindingRule.US_COPPER, 20.0, 155.0, 1.53045),
        # T2, T3: aluminium is 225 in both, worked out here: (225 + 120)/(225 + 20).
        (WindingRule.ALUMINIUM, 20.0, 120.0, 345.0 / 245.0),
    ],
)
def test_published_ratios(rule, known_at, wanted_at, ratio):
    assert_quantity(resistance_ratio(known_at, wanted_at, rule=rule), ratio, atol=5e-6, unit="1", why=PRINTED)


@pytest.mark.parametrize(
    ("rule", "at_20", "at_25"),
    [
        # T4: k = 235 means alpha20 = 1/255 and alpha25 = 1/260, not 0.00393; k = 234.5 means 1/254.5. Source: identity.
        (WindingRule.IEC_COPPER, 1.0 / 255.0, 1.0 / 260.0),
        (WindingRule.US_COPPER, 1.0 / 254.5, 1.0 / 259.5),
        (WindingRule.ALUMINIUM, 1.0 / 245.0, 1.0 / 250.0),
    ],
)
def test_each_convention_has_its_own_coefficient(rule, at_20, at_25):
    tight = {"rtol": 1e-9, "unit": "1/K", "why": "a difference of two nearly equal ratios over 100 K"}
    for reference, coefficient in ((20.0, at_20), (25.0, at_25)):
        found = (resistance_ratio(reference, reference + 100.0, rule=rule) - 1.0) / 100.0
        assert_quantity(found, coefficient, **tight)


@given(st.floats(20.0, 155.0))
def test_the_conventions_for_copper_stay_within_a_tenth_of_a_percent(wanted_at):
    # T4: at most 0.08 % to 155 degC, annealed copper's 3.93e-3/K at 20 degC (T1) included. Source: IEC 60028:1925.
    ours = resistance_ratio(20.0, wanted_at, rule=WindingRule.IEC_COPPER)
    other = resistance_ratio(20.0, wanted_at, rule=WindingRule.US_COPPER)
    annealed = 1.0 + 3.93e-3 * (wanted_at - 20.0)
    assert_quantity([other, annealed], ours, rtol=1e-3, unit="1", why="the conventions themselves differ")


@given(first=TEMPERATURES, second=TEMPERATURES, third=TEMPERATURES, rule=RULES)
def test_ratios_chain_and_turn_round(first, second, third, rule):
    way = resistance_ratio(first, second, rule=rule) * resistance_ratio(second, third, rule=rule)
    tight = {"rtol": 1e-14, "unit": "1", "why": CLOSED_FORM}
    assert_quantity(way, resistance_ratio(first, third, rule=rule), **tight)
    assert_quantity(way * resistance_ratio(third, first, rule=rule), 1.0, **tight)
    assert resistance_ratio(first, first, rule=rule) == 1.0


@given(known_at=TEMPERATURES, rise=st.floats(0.001, 200.0), rule=RULES)
def test_warmer_is_more(known_at, rise, rule):
    assert winding_resistance(0.6, known_at, wanted_at=known_at + rise, rule=rule) > 0.6


def test_resistance_is_the_known_one_times_the_ratio():
    # T2: 25 to 155 degC is half as much again. Source: IEC 60034-1 (from memory).
    found = winding_resistance(0.6, 25.0, wanted_at=155.0, rule=WindingRule.IEC_COPPER)
    assert_quantity(found, 0.9, rtol=1e-15, unit="ohm", why=CLOSED_FORM)


@pytest.mark.parametrize("wrong", [-235.0, -300.0, math.nan])
@pytest.mark.parametrize("place", ["known", "wanted"])
def test_at_or_below_the_lines_zero_is_refused(wrong, place):
    known_at, wanted_at = (wrong, 20.0) if place == "known" else (20.0, wrong)
    with pytest.raises(ValueError, match="not above -235 degC"):
        resistance_ratio(known_at, wanted_at, rule=WindingRule.IEC_COPPER)
