"""The one result with behaviour: a finding as sentences."""

from __future__ import annotations

import pytest

from gainbench.results import Finding, Level


@pytest.mark.parametrize(
    ("advice", "text"),
    [
        ("lower the crossover", "Speed loop unstable. A pole lies at 1.02. Lower the crossover."),
        ("", "Speed loop unstable. A pole lies at 1.02."),
    ],
)
def test_a_finding_reads_as_sentences(advice, text):
    finding = Finding(
        code="speed-unstable",
        level=Level.BREAKS,
        subject="speed",
        title="speed loop unstable",
        reason="a pole lies at 1.02",
        advice=advice,
    )
    assert finding.text == text


def test_levels_are_the_words_of_the_findings():
    assert tuple(Level) == ("holds", "thin", "breaks")
