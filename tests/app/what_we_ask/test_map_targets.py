import math
from dataclasses import replace

import pytest

from gainbench.assess import assess
from gainbench.assessed import assessed_loop
from gainbench.model import DesignMethod
from gainbench.sheetfile import parse_sheet
from gainbench_app.what_we_ask.map_targets import asked_point, asks_for_a_point, targets_at
from gainbench_app.widgets.map_view import MapPoint

CROSSOVER, BANDWIDTH = DesignMethod.CROSSOVER_MARGIN, DesignMethod.BANDWIDTH_MARGIN
SIXTY = math.radians(60.0)


def sheet_of(demo_texts, name="label-unwinder"):
    return parse_sheet(demo_texts[name], f"{name}.bench.toml").sheet


def asking(sheet, loop, **keys):
    """The sheet with bandwidth and margin asked of a loop."""
    aims = replace(getattr(sheet.aims, loop), method=BANDWIDTH, **keys)
    return replace(sheet, aims=replace(sheet.aims, **{loop: aims}))


def test_two_methods_ask_for_a_point():
    assert [one for one in DesignMethod if asks_for_a_point(one)] == [CROSSOVER, BANDWIDTH]


@pytest.mark.parametrize("name", ["label-unwinder", "bottle-indexer", "sieve-drum"])
@pytest.mark.parametrize(("loop", "hertz"), [("current", 700.0), ("speed", 12.0), ("speed", 35.0)])
def test_the_bandwidth_of_a_place_leads_back_to_it(demo_texts, name, loop, hertz):
    sheet = sheet_of(demo_texts, name)
    sampled = assessed_loop(assess(sheet, simulated=False), loop)
    found = targets_at(BANDWIDTH, sampled, crossover=math.tau * hertz, margin=math.radians(50.0), here=None)
    assert found["phase_margin"] == math.radians(50.0)
    figures = getattr(assess(asking(sheet, loop, **found), simulated=False), loop).figures
    assert figures.crossover_hz == pytest.approx(hertz, rel=1e-6)
    assert figures.bandwidth_hz * math.tau == pytest.approx(found["bandwidth"], rel=1e-6)


def test_a_crossover_is_asked_for_as_it_stands(demo_texts):
    sampled = assessed_loop(assess(sheet_of(demo_texts), simulated=False), "speed")
    found = targets_at(CROSSOVER, sampled, crossover=300.0, margin=1.0, here=None)
    assert found == {"crossover": 300.0, "phase_margin": 1.0}


def test_a_place_without_a_bandwidth_of_its_own_is_come_up_to(demo_texts):
    sampled = assessed_loop(assess(sheet_of(demo_texts, "sieve-drum"), simulated=False), "speed")
    here = MapPoint(crossover=math.tau * 90.0, margin=SIXTY, bandwidth=math.tau * 130.0)
    # Behind the resonance the loop has crossed over before.
    beyond = {"crossover": math.tau * 230.0, "margin": math.radians(40.0)}
    found = targets_at(BANDWIDTH, sampled, here=here, **beyond)
    assert math.radians(40.0) < found["phase_margin"] < SIXTY
    assert targets_at(BANDWIDTH, sampled, here=None, **beyond) == {}


def test_a_bandwidth_that_cannot_be_met_is_shown_as_far_off_as_the_last_one(demo_texts):
    sheet = asking(sheet_of(demo_texts), "speed", bandwidth=math.tau * 90.0)
    met = asked_point(sheet.aims.speed, assess(sheet, simulated=False).speed)
    assert met.bandwidth == math.tau * 90.0
    far = asking(sheet, "speed", bandwidth=math.tau * 900.0)
    refused = assess(far, simulated=False).speed
    assert refused.refusal is not None
    point = asked_point(far.aims.speed, refused, before=met)
    assert point.crossover == pytest.approx(10.0 * met.crossover)
    assert asked_point(far.aims.speed, refused).crossover == pytest.approx(math.tau * 600.0)


def test_without_both_targets_there_is_no_point(demo_texts):
    sheet = sheet_of(demo_texts)
    loop = assess(sheet, simulated=False).speed
    assert asked_point(replace(sheet.aims.speed, phase_margin=None), loop) is None
    assert asked_point(replace(sheet.aims.speed, crossover=None), loop) is None
    assert asked_point(replace(sheet.aims.speed, method=BANDWIDTH, bandwidth=None), loop) is None
