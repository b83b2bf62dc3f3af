"""Where the findings draw their lines, each with its source.

"Common practice" is a rule of the trade without a source that could be named; such a line is a convention, and a
value just beyond it is thin, not wrong.
"""

from __future__ import annotations

PHASE_MARGIN_DEG = 45.0
"""Thin below [deg]. Common practice for drives; K. J. Astrom, R. M. Murray, Feedback Systems, name 30 to 60 (from
memory)."""

GAIN_MARGIN_DB = 6.0
"""Thin below, for a gain that rises as for one that falls [dB]. Feedback Systems: a factor of 2 to 5 (from memory)."""

PEAK_SENSITIVITY = 2.0
"""Thin above. K. J. Astrom, T. Hagglund, PID Controllers, 2nd ed., 1995: reasonable values are 1.3 to 2 (from
memory)."""

DELAY_MARGIN_PERIODS = 1.0
"""Thin below, in periods of the loop. Common practice: one period of delay that nobody counted is the usual slip."""

LOOP_SEPARATION = 4.0
"""Thin below, inner over outer crossover and bandwidth. Common practice asks for 5 to 10 where the outer loop is
designed on a stand-in for the inner one; here the margins hold the inner loop exactly, so that a little less does."""

TICKS_PER_CROSSOVER = 10.0
"""Thin below, rate over crossover. Common practice: 10 to 20."""

INTEGRAL_SHARE = 1.0 / 50.0
"""Thin below, Ki/Kp over the crossover [rad/s over rad/s]. Common practice: a third to a tenth; a fiftieth costs one
degree of phase, so that there is next to nothing to be gained by going lower."""

CROSSOVER_ACCURACY = 1e-3
"""How far the first crossover may lie from the asked one, as a share, before they are two. The design is exact."""

LATER_CROSSING = 1.02
"""How far beyond the first crossover another one must lie to be told from it, as a factor: the spacing of drawn
curves."""

OVERSHOOT_PERCENT = 30.0
"""Thin above, of a step of current or of the duty's speed [%]. Common practice: what a phase margin of 45 deg comes to
with an integral in the loop."""

PEAK_OVER_LIMIT = 1.10
"""Thin above, peak current over the current limit. Common practice: the clamp acts on the reference, the loop's own
overshoot lies on top of it, and an overcurrent trip sits at least a tenth above the limit."""

VOLTAGE_LAG = 0.25
"""Thin above, time on the voltage limit with the current off its reference, in 1/crossover of the speed loop. Common
practice: any step of current rests on the voltage limit for a moment; in a quarter of that time little winds up."""

CURRENT_LAG = 0.05
"""How far the current must be from its reference to count as lagging, over the current limit. Common practice."""

VOLTAGE_NEED = 0.90
"""Thin above, steady voltage over the usable voltage. Common practice: a tenth is left for the current loop."""

RAMP_SHARE = 0.70
"""Of the acceleration that the current limit allows, what is advised for a ramp. Common practice: the speed PI
overshoots its steady current at the start of a ramp by up to about 40 %."""

CONSTANT_GAP = 0.05
"""Thin above, of one machine constant against another. Common practice: data sheets round and spread by a few percent,
while the slip between two conventions is never below 22 %."""

COUNT_CURRENT_SHARE = 0.10
"""Thin above, current asked for by one encoder count over rated current. Common practice: it is heard and it heats."""

DELAY_ANGLE_DEG = 10.0
"""Thin above, electrical angle turned between sample and voltage [deg]. Common practice: the axes are then coupled by
more than a sixth, sin(10 deg)."""

TICKS_PER_TURN = 8.0
"""Breaks below, current ticks per electrical turn. Common practice: the steps are then no rotating field."""

EFFICIENCY = 0.85
"""Thin below; fixed by the contract, since inertia torque is not reduced by efficiency."""

RESONANCE_DISTANCE = 3.0
"""Thin below, antiresonance over speed crossover. Common practice: a third of the antiresonance at most."""

RETURNED_SHARE = 0.20
"""Thin above, energy given back over the energy that the train holds at the reference speed. Common practice: below it
the winding burns most of what braking frees."""

BUS_RISE = 0.10
"""Rise of the bus voltage for which the capacitance is named. Common practice: trips sit 10 to 20 % above nominal."""

SETTLED_SHARE = 0.02
"""The band of settling and recovery, of the reference speed; fixed by the contract."""

RESIDUAL_DIP = 0.10
"""Thin above, deviation left at the end over the load dip, without a reference to measure by. Common practice."""
