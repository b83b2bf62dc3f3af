"""The records that cross into compiled code hold their order: kernels build them by position."""

from __future__ import annotations

from gainbench.kernels.loop_records import LoopNumbers, SampledPlant


def test_fields_stand_in_the_order_that_kernels_fill():
    assert SampledPlant._fields == (
        "m", "c", "b0", "b1", "bw", "d0", "d1", "dw", "period", "shift", "window", "scale", "filter_gain",
    )  # fmt: skip
    assert LoopNumbers._fields == (
        "crossover", "phase_margin", "delay_margin", "gain_margin", "gain_reduction", "peak_sensitivity", "bandwidth",
    )  # fmt: skip
