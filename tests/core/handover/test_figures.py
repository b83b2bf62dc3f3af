"""Figures as rows of words and numbers."""

from __future__ import annotations

from dataclasses import replace

from hypothesis import given
from hypothesis import strategies as st

from gainbench.handover.figures import Row, apart, as_sentence, joined, loop_rows, response_rows, step_rows
from gainbench.results import LoopAssessment, LoopFigures


def by_label(rows):
    return {row.label: row.value for row in rows}


def loop(**figures):
    return LoopAssessment(gains=None, curve=None, figures=LoopFigures(**figures))


def test_loop_figures_are_shown_in_handy_units():
    rows = by_label(
        loop_rows(
            loop(
                stable=True,
                crossover_hz=1000.0,
                phase_margin_deg=60.0,
                delay_margin_s=1.6667e-4,
                gain_margin_db=10.126,
                gain_reduction_db=None,
                peak_sensitivity=1.5641,
                bandwidth_hz=2216.0,
            )
        )
    )
    assert rows == {
        "crossover": "1 kHz",
        "phase margin": "60.00 deg",
        "delay margin": "166.7 us",
        "gain margin": "10.13 dB",
        "gain reduction": "none",
        "peak sensitivity": "1.564",
        "bandwidth": "2.216 kHz",
    }


def test_a_loop_without_figures_has_no_rows():
    assert loop_rows(LoopAssessment(gains=None, curve=None, figures=None)) == ()
    assert loop_rows(loop(stable=False)) == ()


def test_response_and_step_follow_the_assessment(demos):
    assessment = demos["label-unwinder"]
    figures = assessment.response.figures
    rows = by_label(response_rows(assessment))
    assert len(rows) == 11
    assert rows["overshoot"] == f"{figures.overshoot_percent:.1f} %"
    assert rows["peak current"] == f"{figures.peak_current_a:.4g} A"
    assert len(step_rows(assessment)) == 2
    empty = replace(assessment, response=None, locked_step=None)
    assert response_rows(empty) == step_rows(empty) == ()


def test_what_the_duty_does_not_have_reads_none(unwinder):
    rows = by_label(response_rows(unwinder({"duty.load_step": "0 N*m"})))
    assert rows["dip under the load step"] == rows["recovery to 2 %"] == "none"


def test_sentence():
    assert as_sentence((Row(label="a", value="1 A"), Row(label="b", value="2 V"))) == "a: 1 A; b: 2 V"


def test_numbers_are_tied_to_their_units():
    assert " " not in joined("45.6 V").replace("\N{NO-BREAK SPACE}", "")
    assert joined("take 2 steps") == "take 2 steps"
    assert joined("2 Vans") == "2 Vans"


@given(st.text(alphabet=st.characters(max_codepoint=126)))
def test_apart_takes_the_tie_back(text):
    assert apart(joined(text)) == text
