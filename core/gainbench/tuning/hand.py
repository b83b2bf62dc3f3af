"""Gains by hand: what someone typed, in the library's own terms."""

from __future__ import annotations

from gainbench.model import HandGains
from gainbench.results import Gains


def hand_gains(hand: HandGains, *, period: float, torque_constant: float) -> Gains:
    """Typed gains as Kp and Ki, SI.

    ``Ki = Kp/Ti``, ``Ki = Kp wi``, or as typed; divided by the period where the typed Ki holds it, and by Kt where a
    typed gain puts out torque.

    Parameters
    ----------
    hand : HandGains
        As typed, SI.
    period : float
        Of the loop: Ts for the current loop, Tw for the speed loop [s].
    torque_constant : float
        Kt at the motor shaft [N m/A].

    Returns
    -------
    Gains
        Current loop [V/A], [V/(A s)]; speed loop [A s/rad], [A/rad].

    Raises
    ------
    ValueError
        If none of ki, ti and wi is given; a sheet that was read has one.
    """
    kp = hand.kp / torque_constant if hand.kp_is_torque else hand.kp
    if hand.ki is not None:
        ki = hand.ki / torque_constant if hand.ki_is_torque else hand.ki
        return Gains(kp=kp, ki=ki / period if hand.ki_has_period else ki)
    if hand.ti is not None:
        return Gains(kp=kp, ki=kp / hand.ti)
    if hand.wi is not None:
        return Gains(kp=kp, ki=kp * hand.wi)
    raise ValueError("gains by hand need one of ki, ti and wi")
