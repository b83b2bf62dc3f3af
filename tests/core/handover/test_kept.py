"""A kept tuning is assessed as gains by hand on the same sheet."""

from __future__ import annotations

import pytest

from gainbench.assess import assess
from gainbench.errors import HandoverError
from gainbench.handover import kept_sheet
from gainbench.model import DesignMethod


def test_gains_are_those_of_the_shelf(demos):
    sheet = demos["label-unwinder"].sheet
    kept = kept_sheet(sheet, "first light")
    assert kept.aims.current.method is kept.aims.speed.method is DesignMethod.BY_HAND
    assert (kept.rig, kept.duty, kept.aims.firmware) == (sheet.rig, sheet.duty, sheet.aims.firmware)
    assert kept.aims.speed.reference_weight == sheet.aims.speed.reference_weight
    assessment = assess(kept)
    assert (assessment.current.gains.kp, assessment.current.gains.ki) == (2.66, 4681.0)
    assert (assessment.speed.gains.kp, assessment.speed.gains.ki) == (0.481, 57.6)


def test_an_unknown_name_is_told_what_there_is(demos):
    with pytest.raises(HandoverError, match=r'no tuning "second"; it holds "first light"$'):
        kept_sheet(demos["label-unwinder"].sheet, "second")
    with pytest.raises(HandoverError, match="it is empty"):
        kept_sheet(demos["sieve-drum"].sheet, "first light")
