"""Text <-> SI: the only place that knows a conversion factor.

Angle is a dimension of its own: 1 Hz = 1 turn/s = 2 pi rad/s, torque is energy per angle (N m = J/rad), and
``1/s`` is neither a frequency nor a speed of rotation. Factors are carried as exact fractions and powers of pi,
so that ``"0.45 mH"`` is the float 0.00045 and ``"20 kHz"`` is 20000.0 without a last digit astray.

Examples
--------
>>> from gainbench.units import Dimension, parse
>>> parse("0.45 mH", Dimension.INDUCTANCE)
0.00045
>>> parse("60 Hz", Dimension.FREQUENCY)
376.99111843077515
"""

from gainbench.units.dimension import Dimension
from gainbench.units.quantity import format_quantity, parse, parse_difference, pretty, show, unit_size

__all__ = ["Dimension", "format_quantity", "parse", "parse_difference", "pretty", "show", "unit_size"]
