import math
from dataclasses import replace

import pytest

from gainbench.assess import assess
from gainbench.sheetfile import parse_sheet
from gainbench_app.desk_state import State, moved
from gainbench_app.edge_stop import loop_of, stopped_at_edge

CROSSOVER = "aims.speed.crossover"
MARGIN = "aims.speed.phase_margin"


def assessed(sheet):
    return assess(sheet, simulated=False)


@pytest.fixture(scope="module")
def good(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"], "label-unwinder.bench.toml")
    return State(document=document, sheet=document.sheet)


def stop(path, state, good):
    return stopped_at_edge(
        path, state, assessed(state.assessed_sheet), good=good, before=assessed(good.assessed_sheet), assess=assessed
    )


def test_what_can_be_met_does_not_stop(good):
    assert stop(CROSSOVER, moved(good, CROSSOVER, math.tau * 70.0), good) is None


def test_it_stops_a_hair_inside_the_nearest_that_can_be_met(good):
    state = moved(good, CROSSOVER, math.tau * 900.0)
    nearest = assessed(state.assessed_sheet).speed.refusal.nearest_crossover
    stopped = stop(CROSSOVER, state, good)
    assert stopped.assessment.speed.refusal is None
    assert stopped.state.sheet.aims.speed.crossover == pytest.approx(nearest, rel=2e-3)
    assert stopped.state.sheet.aims.speed.crossover < nearest
    assert stopped.assessment.sheet == stopped.state.sheet


def test_in_a_map_the_margin_gives_way_first(good):
    state = moved(moved(good, CROSSOVER, math.tau * 80.0), MARGIN, math.radians(85.0))
    stopped = stop("aims.speed", state, good)
    assert stopped.state.sheet.aims.speed.crossover == pytest.approx(math.tau * 80.0)
    assert stopped.state.sheet.aims.speed.phase_margin < math.radians(85.0)


def test_where_nothing_near_can_be_met_it_stays_where_it_was(good):
    state = moved(good, CROSSOVER, math.tau * 900.0)
    refused = assessed(state.assessed_sheet)
    far = replace(refused.speed.refusal, nearest_crossover=None)
    refused = replace(refused, speed=replace(refused.speed, refusal=far))
    stopped = stopped_at_edge(
        CROSSOVER, state, refused, good=good, before=assessed(good.assessed_sheet), assess=assessed
    )
    assert stopped.state is good


def test_from_a_target_that_cannot_be_met_it_moves_freely(good):
    refused = moved(good, CROSSOVER, math.tau * 900.0)
    assert stop(CROSSOVER, moved(good, CROSSOVER, math.tau * 800.0), refused) is None


def test_only_targets_stop(good):
    refused = moved(good, CROSSOVER, math.tau * 900.0)
    assert stop("duty.load_at", refused, good) is None


def test_a_loop_is_found_by_its_name(good):
    found = assessed(good.assessed_sheet)
    assert loop_of(found, "current") is found.current
    assert loop_of(found, "speed") is found.speed
