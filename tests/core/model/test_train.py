"""The train's words and defaults, as format 1 gives them."""

from __future__ import annotations

from gainbench.model import Train, TrainKind


def test_words_of_format_1():
    assert tuple(TrainKind) == ("rigid", "elastic")


def test_defaults():
    train = Train(kind=TrainKind.RIGID, load_inertia=1e-4)
    assert (train.ratio, train.efficiency, train.coupling_inertia) == (1.0, 1.0, 0.0)
    assert (train.load_viscous_friction, train.load_coulomb_friction, train.load_torque) == (0.0, 0.0, 0.0)
    assert (train.shaft_stiffness, train.shaft_damping) == (None, None)
