"""Names of estimates: the words and units that the contract fixes."""

from __future__ import annotations

from gainbench.evidence.estimate import EstimateName
from gainbench.units import Dimension, unit_size

DIMENSIONS = {
    EstimateName.RESISTANCE: Dimension.RESISTANCE,
    EstimateName.INDUCTANCE: Dimension.INDUCTANCE,
    EstimateName.TORQUE_CONSTANT: Dimension.TORQUE_CONSTANT,
    EstimateName.BACK_EMF_CONSTANT: Dimension.BACK_EMF_CONSTANT,
    EstimateName.INERTIA: Dimension.INERTIA,
}


def test_every_name_has_its_si_unit():
    for name in EstimateName:
        friction = Dimension.VISCOUS_FRICTION if "viscous" in name.value else Dimension.TORQUE
        assert unit_size(name.si, DIMENSIONS.get(name, friction)) == 1.0


def test_frictions_are_there_by_direction():
    values = {name.value for name in EstimateName}
    for kind in ("viscous_friction", "coulomb_friction"):
        assert {kind, f"{kind}_forward", f"{kind}_backward"} <= values


def test_words_read_as_prose():
    assert EstimateName.COULOMB_FRICTION_FORWARD.words == "Coulomb friction forward"
    assert EstimateName.BACK_EMF_CONSTANT.words == "back-EMF constant"
