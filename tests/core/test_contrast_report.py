"""Tunings side by side as text and JSON."""

from __future__ import annotations

import io
import json
import re

import pytest
from rich.console import Console

from gainbench.contrast import contrast, sheet_tunings
from gainbench.contrast_report import contrast_json, print_contrast
from gainbench.report import assessment_json
from gainbench.sheetfile import parse_sheet


@pytest.fixture(scope="module")
def found(demo_texts):
    return contrast(
        [
            one
            for name in ("label-unwinder", "bottle-indexer", "sieve-drum")
            for one in sheet_tunings(parse_sheet(demo_texts[name], name).sheet, f"{name}.bench.toml")
        ]
    )


def printed(found, width=100):
    stream = io.StringIO()
    print_contrast(found, Console(file=stream, width=width, highlight=False, markup=False, emoji=False))
    return stream.getvalue()


def test_json_holds_each_assessment_whole_and_its_differences(found):
    told = contrast_json(found)
    assert json.loads(json.dumps(told, allow_nan=False)) == told
    assert list(told) == ["format", "reference", "tunings"]
    assert (told["format"], told["reference"]) == (1, 0)
    for tuning, one in zip(found.tunings, told["tunings"], strict=True):
        assert (one["sheet"], one["tuning"], one["worst"]) == (tuning.sheet_name, tuning.kept, tuning.level.value)
        whole = assessment_json(tuning.assessment)
        assert {key: one[key] for key in whole if key != "format"} == {
            key: value for key, value in whole.items() if key != "format"
        }
    first, second = told["tunings"][:2]
    assert second["difference"]["speed"]["kp"] == second["speed"]["kp"] - first["speed"]["kp"]
    assert second["difference"]["current"]["gain_reduction_db"] is None
    assert first["difference"]["response"]["overshoot_percent"] == 0.0
    shown = {(subject, name) for subject, group in second["difference"].items() for name in group}
    assert ("current", "step_rise_s") in shown
    assert all(name in second[subject] for subject, name in shown)


@pytest.mark.parametrize("width", [80, 100, 140])
def test_text_is_aligned_and_within_the_width(found, width):
    lines = printed(found, width).splitlines()
    assert all(len(line) <= width and line == line.rstrip() for line in lines)
    margins = [line for line in lines if line.startswith("  phase margin")]
    ends = {match.end() for line in margins for match in re.finditer(r"\d deg", line)}
    # The reference and as many beside it as there is room for, in each block at the same places.
    assert len(ends) == 1 + min(4, max(1, (width - 41) // 21))


def test_text_names_the_tunings_and_what_is_not_right(found):
    text = printed(found)
    assert "1  ! thin    label-unwinder.bench.toml, as designed" in text
    assert '2  ! thin    label-unwinder.bench.toml, kept "first light"' in text
    for finding in found.tunings[1].worst:
        assert finding.title in text
    assert "In brackets: the change from 1." in text
    for head in ("Current loop", "Speed loop", "Response to the duty"):
        assert head in text


def test_changes_are_shares_or_differences(found):
    line = next(one for one in printed(found).splitlines() if one.startswith("  Kp [A s/rad]"))
    assert re.fullmatch(r"  Kp \[A s/rad\] +0\.4814 +0\.481 \(-0\.1%\) +0\.3127 \(-35%\)", line)
    line = next(one for one in printed(found).splitlines() if one.startswith("  gain margin"))
    assert re.fullmatch(r"  gain margin +10\.13 dB +10\.13 dB +10\.07 dB \(-0\.1\)", line)
    assert "(x11)" in printed(found)


def test_one_tuning_stands_alone(found):
    text = printed(contrast(found.tunings[:1]))
    assert "0.4814" in text
    assert "(" not in text.replace("Ki [V/(A s)]", "").replace("In brackets", "")


def test_what_breaks_is_marked(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"], "x").with_value("aims.speed.crossover", "900 Hz")
    text = printed(contrast(sheet_tunings(document.sheet, "x")))
    assert "x breaks  x, as designed" in text
    assert re.search(r"^  Kp \[A s/rad\] +none +0\.481$", text, re.MULTILINE)
    assert "The speed loop cannot be had with a crossover of 900 Hz" in text


def test_a_name_is_not_taken_for_markup(found):
    from dataclasses import replace

    named = replace(found.tunings[0], sheet_name="[red]x[/red] :smile:")
    assert "[red]x[/red] :smile:, as designed" in printed(contrast([named]))
