"""All findings on one case, worst first."""

from __future__ import annotations

from gainbench.findings.cascade import cascade_findings
from gainbench.findings.case import Case
from gainbench.findings.crossover import crossover_findings
from gainbench.findings.demand import demands
from gainbench.findings.duty import reach_findings, start_findings
from gainbench.findings.headroom import headroom_findings
from gainbench.findings.loops import loop_findings
from gainbench.findings.machine import constant_findings, rating_findings
from gainbench.findings.outcome import outcome_findings, step_findings
from gainbench.findings.stage import angle_findings, count_findings
from gainbench.findings.train import driving_findings, efficiency_findings, resonance_findings
from gainbench.results import Finding, Level

_WORST_FIRST = (Level.BREAKS, Level.THIN, Level.HOLDS)


def judge(case: Case) -> tuple[Finding, ...]:
    """Judge a case.

    What contradicts the sheet itself comes before what rests on it: constants, loops, sampling, train, duty. Where
    the duty cannot be held at all, what its response lacks is not told again. Unknown ratings are not judged.

    Parameters
    ----------
    case : Case
        One sheet with all that was computed from it.

    Returns
    -------
    tuple of Finding
        ``breaks`` first, then ``thin``, then ``holds``; never empty, and no code twice.
    """
    states = demands(case)
    reach = tuple(reach_findings(case, states))
    reachable = not any(one.level is Level.BREAKS for one in reach)
    found = [
        *constant_findings(case),
        *loop_findings(case, "current"),
        *loop_findings(case, "speed"),
        *crossover_findings(case, "current"),
        *crossover_findings(case, "speed"),
        *cascade_findings(case),
        *angle_findings(case, states),
        *resonance_findings(case),
        *start_findings(case),
        *reach,
        *rating_findings(case, states),
        *step_findings(case),
        *headroom_findings(case, states, reachable=reachable),
        *driving_findings(case, states),
        *count_findings(case),
        *efficiency_findings(case),
    ]
    if reachable:
        found += outcome_findings(case)
    return tuple(one for level in _WORST_FIRST for one in found if one.level is level)
