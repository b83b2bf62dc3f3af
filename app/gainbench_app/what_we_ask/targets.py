"""Which targets each design method has, and between which ends their sliders move."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from gainbench.model import DesignMethod, HandGains, Sheet
from gainbench.plant import Plant
from gainbench_app.sheet_edits import METHOD_KEYS, integral_key, loop_aims

METHOD_NAMES: dict[DesignMethod, str] = {
    DesignMethod.CROSSOVER_MARGIN: "crossover and margin",
    DesignMethod.BANDWIDTH_MARGIN: "bandwidth and margin",
    DesignMethod.LAG_CANCELLATION: "lag cancellation",
    DesignMethod.MAGNITUDE_OPTIMUM: "magnitude optimum",
    DesignMethod.SYMMETRIC_OPTIMUM: "symmetric optimum",
    DesignMethod.POLE_PLACEMENT: "pole placement",
    DesignMethod.BY_HAND: "gains by hand",
}

_NAMES = {
    "crossover": "crossover",
    "phase_margin": "phase margin",
    "bandwidth": "bandwidth",
    "natural_frequency": "natural freq.",
    "damping": "damping",
    "spread": "spread",
    "reference_weight": "reference weight",
    "kp": "Kp",
    "ki": "Ki",
    "ti": "Ti",
    "wi": "Ki/Kp",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Target:
    """One number that is asked for."""

    path: str
    name: str
    low: float
    """Left end of the slider, in the model's unit."""
    high: float
    logarithmic: bool
    paired: bool = False
    """Whether it stands beside another one: crossover or bandwidth with a margin."""

    @property
    def key(self) -> str:
        """Last part of the path."""
        return self.path.rpartition(".")[2]


def targets(loop: str, sheet: Sheet, *, plant: Plant) -> tuple[Target, ...]:
    """The targets of a loop by its present method.

    Parameters
    ----------
    loop : str
        ``"current"`` or ``"speed"``.
    sheet : Sheet
        In force.
    plant : Plant
        Of that sheet; the ends of gains by hand follow from it.

    Returns
    -------
    tuple of Target
        In the order of the method's keys.
    """
    aims = loop_aims(sheet, loop)
    keys = list(METHOD_KEYS[aims.method])
    if aims.method is DesignMethod.BY_HAND:
        keys.append(integral_key(aims.hand))
    if loop == "speed":
        keys.append("reference_weight")
    found = (_target(loop, key, sheet=sheet, plant=plant) for key in keys)
    return tuple(replace(one, paired="phase_margin" in keys and one.key != "reference_weight") for one in found)


def _target(loop: str, key: str, *, sheet: Sheet, plant: Plant) -> Target:
    stage = sheet.rig.stage
    rate = stage.current_rate if loop == "current" else stage.speed_rate
    path = f"aims.{loop}.{key}"
    if key in {"crossover", "bandwidth", "natural_frequency"}:
        low, high, logarithmic = math.tau * rate / 2000.0, math.tau * rate / 2.0, True
    elif key == "phase_margin":
        low, high, logarithmic = 0.0, math.pi / 2.0, False
    elif key == "damping":
        low, high, logarithmic = 0.1, 10.0, True
    elif key == "spread":
        low, high, logarithmic = 1.05, 20.0, True
    elif key == "reference_weight":
        low, high, logarithmic = 0.0, 1.0, False
    else:
        low, high = _gain_ends(key, loop, plant=plant, rate=rate)
        size = _typed_size(key, loop_aims(sheet, loop).hand, plant=plant, period=1.0 / rate)
        low, high = low * size, high * size
        logarithmic = True
    return Target(path=path, name=_NAMES[key], low=low, high=high, logarithmic=logarithmic)


def _gain_ends(key: str, loop: str, *, plant: Plant, rate: float) -> tuple[float, float]:
    """From gains of a crossover of a thousandth of the rate to those of half of it, in SI."""
    store = plant.inductance if loop == "current" else plant.inertia / plant.torque
    slow, fast = math.tau * rate / 1000.0, math.tau * rate / 2.0
    if key == "kp":
        return slow * store, fast * store
    if key == "ki":
        return slow * store * slow / 10.0, fast * store * fast / 3.0
    return (1.0 / fast, 10.0 / slow) if key == "ti" else (slow / 10.0, fast)


def _typed_size(key: str, hand: HandGains | None, *, plant: Plant, period: float) -> float:
    """A gain as it was typed over the same gain in SI: a torque for an ampere, or times the loop's period."""
    size = 1.0
    if hand is not None and (hand.kp_is_torque if key == "kp" else hand.ki_is_torque and key == "ki"):
        size *= plant.torque
    if hand is not None and key == "ki" and hand.ki_has_period:
        size *= period
    return size
