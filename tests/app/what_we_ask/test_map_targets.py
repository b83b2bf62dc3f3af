import math
from dataclasses import replace

import pytest
from PySide6.QtCore import Qt

from gainbench.assess import assess
from gainbench.assessed import assessed_loop
from gainbench.model import DesignMethod
from gainbench.sheetfile import parse_sheet
from gainbench_app.desk import Desk
from gainbench_app.what_we_ask.column import WhatWeAsk
from gainbench_app.what_we_ask.map_targets import asked_point, asks_for_a_point, targets_at
from gainbench_app.widgets.map_view import MapPoint

CROSSOVER, BANDWIDTH = DesignMethod.CROSSOVER_MARGIN, DesignMethod.BANDWIDTH_MARGIN
SIXTY = math.radians(60.0)
DAMPED = {"train.shaft_damping": "720 mN*m*s/rad", "aims.speed.phase_margin": "25 deg"}
"""A belt that swings less: behind the gap a bandwidth leads to a second area."""
LEFT_BUTTON = Qt.MouseButton.LeftButton


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


def test_a_place_behind_others_without_a_bandwidth_is_come_up_to(demo_texts):
    document = parse_sheet(demo_texts["sieve-drum"], "sieve-drum.bench.toml").with_values(DAMPED)
    sampled = assessed_loop(assess(document.sheet, simulated=False), "speed")
    here = MapPoint(crossover=math.tau * 60.0, margin=math.radians(25.0), bandwidth=math.tau * 88.0)
    # Beyond the area behind the gap: its edge is nearer than the one before the gap.
    found = targets_at(BANDWIDTH, sampled, crossover=math.tau * 420.0, margin=math.radians(40.0), here=here)
    figures = assess(asking(document.sheet, "speed", **found), simulated=False).speed.figures
    assert figures.crossover_hz > 200.0
    assert math.radians(25.0) < found["phase_margin"] < math.radians(40.0)


# Dragged on the elastic demo sheet


@pytest.fixture
def dragged(qtbot, demo_texts, appearance):
    """Drags the speed loop's point from where it is over places of the map, and tells where it was at each."""

    def drag(places, **values):
        desk = Desk(parse_sheet(demo_texts["sieve-drum"], "sieve-drum.bench.toml"))
        desk.set_values({path.replace("__", "."): value for path, value in values.items()})
        desk.compute_now()
        column = WhatWeAsk(desk, appearance)
        qtbot.addWidget(column)
        column.resize(320, 900)
        column.grab()
        plot, at = column.speed.map, None
        qtbot.mousePress(plot, LEFT_BUTTON, pos=plot.place_of(plot.view.point).toPoint())
        for hertz, degrees in places:
            at = plot.place_of(MapPoint(crossover=math.tau * hertz, margin=math.radians(degrees))).toPoint()
            qtbot.mouseMove(plot, at)
            desk.compute_now()
            assert desk.assessment.speed.refusal is None
            assert desk.assessment.speed.figures.stable
            point = plot.view.point
            yield point.crossover / math.tau, math.degrees(point.margin)
        qtbot.mouseRelease(plot, LEFT_BUTTON, pos=at)
        assert desk.can_undo

    return drag


def test_a_crossover_jumps_over_the_gap_with_the_hand(dragged):
    places = [(60.0, 60.0), (130.0, 60.0), (230.0, 50.0), (150.0, 85.0), (40.0, 70.0)]
    there, before, behind, edge, back = dragged(places)
    assert there == pytest.approx((60.0, 60.0), rel=0.02)
    assert before[0] < 107.0
    assert behind == pytest.approx((230.0, 50.0), rel=0.02)
    assert 170.0 < edge[0] < 190.0
    assert back == pytest.approx((40.0, 70.0), rel=0.02)


def test_a_bandwidth_jumps_over_the_gap_with_the_hand(dragged):
    values = {path.replace(".", "__"): value for path, value in DAMPED.items()}
    places = [(60.0, 40.0), (330.0, 24.0), (160.0, 15.0), (300.0, 30.0), (40.0, 60.0)]
    found = list(dragged(places, **values, aims__speed__method="bandwidth-margin", aims__speed__bandwidth="40 Hz"))
    for number in (0, 1, 3, 4):
        assert found[number] == pytest.approx(places[number], rel=0.04)
    assert 200.0 < found[2][0] < 240.0


def test_a_bandwidth_waits_at_the_edge_where_nothing_behind_the_resonance_has_one(dragged):
    places = [(60.0, 60.0), (230.0, 50.0), (300.0, 40.0), (50.0, 50.0)]
    there, first, second, back = dragged(places, aims__speed__method="bandwidth-margin", aims__speed__bandwidth="40 Hz")
    assert there == pytest.approx((60.0, 60.0), rel=0.02)
    # As near to the hand as it can be: its margin, at the edge.
    assert 103.0 < first[0] < 107.0
    assert second == (pytest.approx(106.0, abs=1.0), pytest.approx(40.0, abs=2.0))
    assert back == pytest.approx((50.0, 50.0), rel=0.02)


def test_the_slider_of_a_bandwidth_jumps_over_what_cannot_be_met(demo_texts):
    desk = Desk(parse_sheet(demo_texts["sieve-drum"], "sieve-drum.bench.toml"))
    desk.set_values(DAMPED | {"aims.speed.method": "bandwidth-margin", "aims.speed.bandwidth": "60 Hz"})
    desk.compute_now()
    desk.begin_gesture("aims.speed.bandwidth")
    reached = []
    for hertz in (90.0, 560.0, 1500.0, 70.0):
        desk.move("aims.speed.bandwidth", math.tau * hertz)
        desk.compute_now()
        assert desk.assessment.speed.refusal is None
        reached.append(desk.assessment.speed.figures.bandwidth_hz)
    desk.end_gesture()
    assert reached[:2] == pytest.approx([90.0, 560.0])
    assert 560.0 < reached[2] < 700.0
    assert reached[3] == pytest.approx(70.0)
