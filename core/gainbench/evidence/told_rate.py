"""The sampling period as a file tells it beside its rows: in the lines above them, or in a single number."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Mapping

_RATE_WORDS = r"sampl\w*[ _-]?(?:rate|freq\w*)|abtast(?:rate|frequenz)|fr[ée]quence d.[ée]chantillonnage|f_?s(?:ample)?"
_PERIOD_WORDS = (
    r"sampl\w*[ _-]?(?:interval|period|time|step)|time[ _-]?(?:step|increment|interval)|x[ _-]?inc\w*|increment|"
    r"abtast(?:zeit|intervall|periode)|p[ée]riode d.[ée]chantillonnage|d_?t|t_?s(?:ample)?|h"
)
_NUMBER = r"(?P<number>[+-]?\d+(?:[.,]\d+)?(?:e[+-]?\d+)?)"
_UNIT = r"[\s,;\"]*(?P<unit>[kM]?Hz|[kM]?S/s|[kM]?Sa/s|ns|[uµ]s|ms|s(?:ec)?)?(?![A-Za-z])"
_BETWEEN = r"\s*(?:\[(?P<square>[^\]]*)\]|\((?P<round>[^)]*)\))?[\s:=,;\"\t]+"
_RATE = re.compile(rf"(?<![A-Za-z])(?:{_RATE_WORDS}){_BETWEEN}{_NUMBER}{_UNIT}", re.IGNORECASE)
_PERIOD = re.compile(rf"(?<![A-Za-z])(?:{_PERIOD_WORDS}){_BETWEEN}{_NUMBER}{_UNIT}", re.IGNORECASE)
_RATES = {"": 1.0, "hz": 1.0, "khz": 1e3, "mhz": 1e6, "s/s": 1.0, "ks/s": 1e3, "ms/s": 1e6}
_RATES |= {"sa/s": 1.0, "ksa/s": 1e3, "msa/s": 1e6}
_PERIODS = {"": 1.0, "s": 1.0, "sec": 1.0, "ms": 1e-3, "us": 1e-6, "µs": 1e-6, "ns": 1e-9}
_COUNTERS = frozenset(
    ["sample", "samples", "index", "idx", "n", "nr", "no", "#", "count", "counter", "point", "points", "row", "line",
     "sequence", "seq", "tick", "ticks", "k", "nummer", "zeile", "messpunkt", "x", "échantillon", "sample number"]
)  # fmt: skip
_SCALARS = {"fs": True, "f_s": True, "rate": True, "samplerate": True, "sample_rate": True, "sampling_rate": True}
_SCALARS |= {"ts": False, "t_s": False, "dt": False, "h": False, "tsample": False, "period": False, "tinterval": False}
_SCALARS |= {"sample_time": False, "sampletime": False, "sampling_time": False, "length_of_step": False}


def period_in(lines: Iterable[str]) -> float | None:
    """The period that lines above the rows of a file speak of.

    Parameters
    ----------
    lines : iterable of str
        Above the first row of numbers.

    Returns
    -------
    float or None
        [s].
    """
    for line in lines:
        for pattern, units, rate in ((_RATE, _RATES, True), (_PERIOD, _PERIODS, False)):
            match = pattern.search(line)
            if match is None:
                continue
            unit = match["unit"] or match["square"] or match["round"] or ""
            factor = units.get(unit.strip().lower())
            number = float(match["number"].replace(",", ".")) * (factor or math.nan)
            period = 1.0 / number if rate and number > 0.0 else number
            if math.isfinite(period) and period > 0.0:
                return period
    return None


def period_of(scalars: Mapping[str, float]) -> float | None:
    """The period that a single number beside the columns gives, by its name: Ts, dt, fs.

    Parameters
    ----------
    scalars : mapping
        Numbers by their name.

    Returns
    -------
    float or None
        [s].
    """
    for name, value in scalars.items():
        is_rate = _SCALARS.get(name.rpartition(".")[2].lower())
        if is_rate is not None and math.isfinite(value) and value > 0.0:
            return 1.0 / value if is_rate else value
    return None


def is_counter(name: str) -> bool:
    """Whether a column's name is that of a counter of samples."""
    return name.strip().strip("[]()").strip().lower() in _COUNTERS
