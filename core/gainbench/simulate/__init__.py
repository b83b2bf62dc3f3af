"""The time response: the duty run tick by tick on the sampled drive, and its figures.

``duty`` turns times into ticks, ``response`` runs the duty, ``response_figures`` reads the figures off the trace.
"""

from gainbench.simulate.duty import Schedule, schedule
from gainbench.simulate.response import simulate, start_breaks, warm_up_response
from gainbench.simulate.response_figures import speed_figures

__all__ = ["Schedule", "schedule", "simulate", "speed_figures", "start_breaks", "warm_up_response"]
