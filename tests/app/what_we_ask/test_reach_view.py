import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.sheetfile import parse_sheet
from gainbench_app.what_we_ask.reach_view import KeptPoints, ReachKeeper, reached


def sheet_of(demo_texts, values=None, name="label-unwinder"):
    document = parse_sheet(demo_texts[name], f"{name}.bench.toml")
    return (document.with_values(values) if values else document).sheet


def view_of(keeper, sheet, **how):
    asked = how.get("asked", True)
    return keeper.view(
        assess(sheet, simulated=False), asked=asked, still=how.get("still", False), quick=how.get("quick", False)
    )


def moved(sheet, loop, hertz):
    aims = replace(getattr(sheet.aims, loop), crossover=math.tau * hertz)
    return replace(sheet, aims=replace(sheet.aims, **{loop: aims}))


@pytest.mark.parametrize("loop", ["current", "speed"])
@pytest.mark.parametrize("name", ["label-unwinder", "sieve-drum", "bottle-indexer"])
def test_all_points_are_in_sight(demo_texts, name, loop):
    view = view_of(ReachKeeper(loop, KeptPoints()), sheet_of(demo_texts, name=name))
    for point in (view.point, *view.kept):
        assert view.decades.low < math.log10(point.crossover / math.tau) < view.decades.high
        assert view.degrees.low < math.degrees(point.margin) < view.degrees.high
    assert view.met


def test_a_margin_below_30_degrees_is_in_sight(demo_texts):
    keeper = ReachKeeper("speed", KeptPoints())
    sheet = sheet_of(demo_texts)
    assert view_of(keeper, sheet).degrees.low == 30.0
    low = replace(sheet, aims=replace(sheet.aims, speed=replace(sheet.aims.speed, phase_margin=math.radians(20.0))))
    assert view_of(keeper, low).degrees.low == 0.0


def test_a_map_is_computed_anew_only_where_it_changes(demo_texts):
    current, speed = ReachKeeper("current", KeptPoints()), ReachKeeper("speed", KeptPoints())
    sheet = sheet_of(demo_texts)
    first, other = view_of(current, sheet), view_of(speed, sheet)
    faster = moved(sheet, "current", 900.0)
    assert view_of(current, faster).areas is first.areas
    # The current loop is inside the speed loop.
    assert view_of(speed, faster).areas is not other.areas
    slower = moved(faster, "speed", 40.0)
    kept = view_of(speed, faster)
    assert view_of(speed, slower).areas is kept.areas


def test_the_axes_stay_while_the_point_is_dragged(demo_texts):
    keeper = ReachKeeper("speed", KeptPoints())
    sheet = sheet_of(demo_texts)
    first = view_of(keeper, sheet)
    far = moved(sheet, "speed", 4.0)
    assert view_of(keeper, far, still=True).decades == first.decades
    assert view_of(keeper, far).decades != first.decades


def test_a_quick_map_is_the_same_in_sight(demo_texts):
    sheet = sheet_of(demo_texts)
    quick, whole = ReachKeeper("speed", KeptPoints()), ReachKeeper("speed", KeptPoints())
    view_of(quick, sheet)
    faster = moved(sheet, "current", 900.0)
    found, wanted = view_of(quick, faster, quick=True), view_of(whole, faster)
    assert not quick.whole
    assert whole.whole
    assert len(found.areas[0].crossover) < len(wanted.areas[0].crossover)
    inside = [w for w in wanted.areas[0].crossover if found.decades.low < math.log10(w / math.tau) < found.decades.high]
    for w in inside:
        margins = [float(np.interp(w, one.areas[0].crossover, one.areas[0].high)) for one in (found, wanted)]
        # Straight lines between crossovers 7 % apart lie below the edge by less than a pixel, 0.8 degrees.
        assert margins[0] == pytest.approx(margins[1], abs=math.radians(0.8))
    assert view_of(quick, faster).areas is not found.areas
    assert quick.whole


def test_kept_tunings_stand_where_their_gains_lead_now(demo_texts):
    sheet = sheet_of(demo_texts)
    kept = KeptPoints()
    (point,) = kept.of(assess(sheet, simulated=False), "speed")
    assert point.name == "first light"
    assert point.crossover / math.tau == pytest.approx(60.0, rel=0.01)
    heavy = sheet_of(demo_texts, {"train.load_inertia": "7.2 kg*cm^2"})
    (moved_point,) = kept.of(assess(heavy, simulated=False), "speed")
    assert moved_point.crossover < 0.8 * point.crossover
    unstable = sheet_of(demo_texts, {"stage.speed_filter": "20 ms"})
    assert kept.of(assess(unstable, simulated=False), "speed") == ()


def test_a_speed_loop_without_a_current_loop_has_no_map(demo_texts):
    sheet = sheet_of(demo_texts, {"aims.current.crossover": "9 kHz"})
    view = view_of(ReachKeeper("speed", KeptPoints()), sheet)
    assert view.areas == ()
    assert not view.met


def test_a_refused_loop_is_nowhere(demo_texts):
    refused = assess(sheet_of(demo_texts, {"aims.speed.crossover": "900 Hz"}), simulated=False)
    assert reached(refused.speed) is None


@pytest.mark.parametrize("quick", [False, True])
def test_where_a_bandwidth_is_asked_for_only_what_it_leads_to_is_filled(demo_texts, quick):
    keeper = ReachKeeper("speed", KeptPoints())
    sheet = sheet_of(demo_texts, name="sieve-drum")

    def last(areas):
        return max(float(one.crossover[-1]) for one in areas) / math.tau

    by_crossover = view_of(keeper, sheet)
    assert last(by_crossover.areas) > 300.0
    values = {"aims.speed.method": "bandwidth-margin", "aims.speed.bandwidth": "60 Hz"}
    asking = sheet_of(demo_texts, values, name="sieve-drum")
    # Behind the resonance the loop has crossed over before.
    assert last(view_of(keeper, asking, quick=quick).areas) < 110.0
    assert last(view_of(keeper, asking, asked=False).areas) > 300.0
