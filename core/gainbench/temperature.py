"""Winding resistance at another temperature, by a rule whose convention is named.

A metal's resistance is taken as a straight line in temperature that would reach zero at ``-k``:

    R2/R1 = (k + t2)/(k + t1)

``k`` differs by standard, so that the same winding comes out up to 0.1 % apart: the rule is therefore always
an argument and never a default.
"""

from __future__ import annotations

from enum import Enum


class WindingRule(Enum):
    """Which straight line stands for the metal; the value is ``k`` [degC below zero where it meets zero]."""

    IEC_COPPER = 235.0
    """Copper by IEC 60034-1 (from memory)."""
    US_COPPER = 234.5
    """Copper by practice in the United States, IEEE 112 among others (from memory)."""
    ALUMINIUM = 225.0
    """Aluminium, the same in both (from memory)."""


def resistance_ratio(known_at: float, wanted_at: float, *, rule: WindingRule) -> float:
    """Resistance at one temperature over the resistance at another.

    ``R2/R1 = (k + t2)/(k + t1)`` with the rule's ``k``.

    Parameters
    ----------
    known_at : float
        t1 [degC], above ``-k``.
    wanted_at : float
        t2 [degC], above ``-k``.
    rule : WindingRule
        The metal and the convention.

    Returns
    -------
    float
        R2/R1.

    Raises
    ------
    ValueError
        If a temperature is at or below ``-k``, where the line has no meaning.

    References
    ----------
    IEC 60034-1, Rotating electrical machines, Part 1: Rating and performance, clause on temperature rise by the
    resistance method (from memory).

    Examples
    --------
    >>> round(resistance_ratio(25.0, 155.0, rule=WindingRule.IEC_COPPER), 6)
    1.5
    """
    k = rule.value
    for temperature in (known_at, wanted_at):
        if not temperature > -k:
            raise ValueError(f"a winding temperature of {temperature:g} degC is not above {-k:g} degC")
    return (k + wanted_at) / (k + known_at)


def winding_resistance(resistance: float, known_at: float, *, wanted_at: float, rule: WindingRule) -> float:
    """Winding resistance at another temperature: ``R2 = R1 (k + t2)/(k + t1)``.

    Parameters
    ----------
    resistance : float
        R1 [ohm].
    known_at : float
        Temperature of R1 [degC].
    wanted_at : float
        Temperature asked for [degC].
    rule : WindingRule
        The metal and the convention.

    Returns
    -------
    float
        R2 [ohm].

    Raises
    ------
    ValueError
        As :func:`resistance_ratio`.
    """
    return resistance * resistance_ratio(known_at, wanted_at, rule=rule)
