"""The one path from sheet to assessment: pure, whole, and without a NaN anywhere."""

from __future__ import annotations

import dataclasses
import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.assess import _small_sheet, assess, is_compiled, warm_up
from gainbench.model import DesignMethod, HandGains, LoopAims, SpeedAims
from gainbench.results import Level
from gainbench.sheetfile import parse_sheet
from rigs import FIXED, fixed_sheet


def leaves(value, path=""):
    """Every number of an assessment with its path."""
    if dataclasses.is_dataclass(value):
        for field in dataclasses.fields(value):
            yield from leaves(getattr(value, field.name), f"{path}.{field.name}")
    elif isinstance(value, tuple):
        for index, one in enumerate(value):
            yield from leaves(one, f"{path}[{index}]")
    else:
        yield path, value


def same(first, second):
    for (path, one), (_, other) in zip(leaves(first), leaves(second), strict=True):
        assert np.array_equal(one, other), path


@pytest.mark.parametrize("name", FIXED)
def test_the_same_sheet_gives_an_equal_assessment(name):
    sheet = fixed_sheet(name)
    before = replace(sheet)
    first = assess(sheet)
    assert sheet == before
    same(first, assess(sheet))


def test_no_nan_and_nothing_that_can_be_written_to(demo_texts):
    for name, text in demo_texts.items():
        for path, value in leaves(assess(parse_sheet(text, name).sheet)):
            if isinstance(value, np.ndarray):
                assert not value.flags.writeable, path
                assert np.all(np.isfinite(value)), path
            elif isinstance(value, float):
                assert math.isfinite(value), path


def test_every_demo_holds_both_its_loops(demo_texts):
    assert len(demo_texts) >= 3
    for name, text in demo_texts.items():
        result = assess(parse_sheet(text, name).sheet)
        assert result.current.figures.stable, name
        assert result.speed.figures.stable, name
        assert result.response is not None
        assert not [one for one in result.findings if one.level is Level.BREAKS], name


def test_the_kept_tuning_of_the_demo_is_its_design(demo_texts):
    # The sheet's own comment-free example: kp 2.66 V/A, ki 4681 V/(A s), kp 0.481 A s/rad, ki 57.6 A/rad, three digits.
    sheet = parse_sheet(demo_texts["label-unwinder"], "label-unwinder").sheet
    result = assess(sheet)
    kept = sheet.kept[0]
    assert result.current.gains.kp == pytest.approx(kept.current.kp, rel=2e-3)
    assert result.current.gains.ki == pytest.approx(kept.current.ki, rel=2e-3)
    assert result.speed.gains.kp == pytest.approx(kept.speed.kp, rel=2e-3)
    assert result.speed.gains.ki == pytest.approx(kept.speed.ki, rel=2e-3)


def with_aims(sheet, **changes):
    return replace(sheet, aims=replace(sheet.aims, **changes))


def test_a_refused_current_loop_leaves_no_response_and_says_so_once_each():
    sheet = fixed_sheet("plain")
    aims = replace(sheet.aims.current, crossover=math.tau * 4000.0)
    result = assess(with_aims(sheet, current=aims))
    assert result.current.gains is None
    assert result.current.refusal is not None
    assert result.speed.gains is None
    assert result.response is None
    assert result.locked_step is None
    assert {one.subject for one in result.findings if one.level is Level.BREAKS} >= {"current", "speed"}


def test_unstable_gains_by_hand_keep_their_numbers_and_lose_their_figures():
    sheet = fixed_sheet("plain")
    aims = SpeedAims(method=DesignMethod.BY_HAND, hand=HandGains(kp=50.0, ki=1.0))
    result = assess(with_aims(sheet, speed=aims))
    assert result.speed.gains.kp == 50.0
    assert result.speed.figures.stable is False
    assert result.speed.figures.crossover_hz is None
    assert result.speed.curve is not None
    assert result.response is None
    assert result.locked_step is not None
    assert "unstable" in " ".join(one.code for one in result.findings)


def test_speed_gains_by_hand_are_told_where_the_current_loop_has_none():
    sheet = fixed_sheet("plain")
    refused = LoopAims(method=DesignMethod.POLE_PLACEMENT, natural_frequency=1.0, damping=0.1)
    hand = SpeedAims(method=DesignMethod.BY_HAND, hand=HandGains(kp=0.5, ki=1.0))
    result = assess(with_aims(sheet, current=refused, speed=hand))
    assert result.current.refusal is not None
    assert result.speed.gains.kp == 0.5
    assert result.speed.figures is None


def test_a_load_beyond_the_limits_breaks_without_a_response():
    sheet = fixed_sheet("gravity")
    heavy = replace(sheet.rig, train=replace(sheet.rig.train, load_torque=5.0))
    result = assess(replace(sheet, rig=heavy))
    assert result.response is None
    assert any(one.level is Level.BREAKS for one in result.findings)


def test_warm_up_leaves_its_code_on_disk(monkeypatch, tmp_path):
    warm_up()
    assert is_compiled()
    monkeypatch.setenv("NUMBA_CACHE_DIR", str(tmp_path))
    assert not is_compiled()


def test_the_sheet_to_warm_up_with_has_words_that_look_for_causes():
    for method in (DesignMethod.CROSSOVER_MARGIN, DesignMethod.BANDWIDTH_MARGIN):
        found = {one.code: one for one in assess(_small_sheet(method), simulated=False).findings}
        for name in ("current", "speed"):
            assert "takes most" in found[f"{name}-phase-margin-thin"].reason
