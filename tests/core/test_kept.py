"""A kept tuning on a sheet: its gains by hand, and nothing else changed."""

from __future__ import annotations

from gainbench.assess import assess
from gainbench.kept import with_kept
from gainbench.model import DesignMethod, HandGains, KeptTuning
from rigs import fixed_sheet


def test_gains_are_those_kept_and_all_else_stays():
    sheet = fixed_sheet("plain")
    kept = KeptTuning(name="soft", current=HandGains(kp=2.0, ki=900.0), speed=HandGains(kp=0.1, wi=15.0))
    tried = with_kept(sheet, kept)
    assert tried.aims.current.method is tried.aims.speed.method is DesignMethod.BY_HAND
    assert (tried.rig, tried.duty, tried.aims.firmware) == (sheet.rig, sheet.duty, sheet.aims.firmware)
    assert tried.aims.speed.reference_weight == sheet.aims.speed.reference_weight
    assert sheet.aims.current.method is DesignMethod.CROSSOVER_MARGIN
    gains = assess(tried).speed.gains
    assert (gains.kp, gains.ki) == (0.1, 1.5)
