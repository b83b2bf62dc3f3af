"""One step of a PI controller with clamp, for both loops: parameters, state and inputs in, state and output out."""

from __future__ import annotations

from gainbench.kernels.compiled import inlined
from gainbench.kernels.response_records import BACKWARD, FORWARD, PiInputs, PiLaw, PiOutput, PiState


@inlined
def pi_step(law: PiLaw, state: PiState, inputs: PiInputs) -> tuple[PiState, PiOutput]:
    """Advance a PI controller by one of its ticks.

    ``e = r - y``, ``p = Kp (weight r - y)``; backward ``s' = s + Ki T e, u = p + s'``, forward ``u = p + s``,
    trapezoid ``s' = s + Ki T (e + e_old)/2, u = p + s'``; the addend is added to u, the output is u clamped. While the
    clamp acts the integrator is held where ``e u > 0``, or relieved by ``min(1, T Ki/Kp) (output - u)``.

    Parameters
    ----------
    law : PiLaw
        Gains and rules.
    state : PiState
        Integrator and error after the previous tick.
    inputs : PiInputs
        Reference, measured value, addend and limit at this tick.

    Returns
    -------
    state : PiState
        After this tick.
    output : PiOutput
        The clamped value, and whether the clamp acted.
    """
    error = inputs.reference - inputs.measured
    proportional = law.kp * (law.weight * inputs.reference - inputs.measured)
    if law.rule == BACKWARD:
        integral = state.integral + law.ki_period * error
        total = proportional + integral
    elif law.rule == FORWARD:
        integral = state.integral + law.ki_period * error
        total = proportional + state.integral
    else:
        integral = state.integral + law.ki_period * (error + state.error) * 0.5
        total = proportional + integral
    total += inputs.addend
    value = total
    if value > inputs.limit:
        value = inputs.limit
    if value < -inputs.limit:
        value = -inputs.limit
    clamped = value != total
    if clamped:
        if law.hold:
            if error * total > 0.0:
                integral = state.integral
        else:
            integral += law.relief * (value - total)
    return PiState(integral, error), PiOutput(value, clamped)
