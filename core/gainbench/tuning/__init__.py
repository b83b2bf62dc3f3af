"""Design methods: from aims to gains, one module per family of methods."""

from gainbench.tuning.design import design_current, design_speed
from gainbench.tuning.hand import hand_gains
from gainbench.tuning.outcome import Design

__all__ = ["Design", "design_current", "design_speed", "hand_gains"]
