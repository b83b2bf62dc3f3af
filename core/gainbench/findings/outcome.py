"""What comes out of the duty: whether the speed settles, comes back after the load, and how far it overshoots."""

from __future__ import annotations

from collections.abc import Iterator

from gainbench.findings import thresholds
from gainbench.findings.case import Case
from gainbench.findings.numbers import amount, digits, percent, speed
from gainbench.results import Finding, Level, Response, Words
from gainbench.simulate.duty import first_tick


def step_findings(case: Case) -> Iterator[Finding]:
    """The overshoot of the current with the rotor locked.

    Parameters
    ----------
    case : Case
        What is judged.

    Yields
    ------
    Finding
        One of level ``thin``, or none.
    """
    overshoot = case.locked_step.overshoot_percent if case.locked_step is not None else None
    if overshoot is None or overshoot <= thresholds.OVERSHOOT_PERCENT:
        return
    yield Finding.on(
        "current",
        "current-overshoot",
        level=Level.THIN,
        words=lambda: Words(
            title=f"A step of the current overshoots by {digits(overshoot)} %",
            reason="with the rotor locked and no clamp; torque and overcurrent trip see that peak at every step",
            advice="Ask for more margin or a lower crossover, or lower Ki",
        ),
    )


def outcome_findings(case: Case) -> Iterator[Finding]:
    """Overshoot, settling and recovery of the speed, and what is left of the error at the end.

    Parameters
    ----------
    case : Case
        What is judged.

    Yields
    ------
    Finding
        All of level ``thin``; none without a response.
    """
    response, duty = case.response, case.sheet.duty
    if response is None:
        return
    figures = response.figures
    judged = duty.reference_speed != 0.0 and figures.overshoot_percent is not None
    if figures.overshoot_percent is not None and figures.overshoot_percent > thresholds.OVERSHOOT_PERCENT:
        yield _overshoot(case, figures.overshoot_percent)
    if judged and figures.settling_time_s is None:
        yield _not_settled(case, response)
    if duty.reference_speed != 0.0 and figures.load_dip_rad_s is not None and figures.recovery_time_s is None:
        yield _not_recovered(case, response)
    elif not judged:
        yield from _off_at_end(case, response)


def _overshoot(case: Case, overshoot: float) -> Finding:
    weighted = case.sheet.aims.speed.reference_weight > 0.0
    return Finding.on(
        "speed",
        "speed-overshoot",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The speed overshoots by {digits(overshoot)} %",
            reason=f"it reaches {speed(case.sheet.duty.reference_speed * (1.0 + overshoot / 100.0))} "
            f"on a reference of {speed(case.sheet.duty.reference_speed)}",
            advice=("Lower reference_weight, which touches no margin, or give" if weighted else "Give")
            + " the reference a ramp, or ask for more phase margin",
        ),
    )


def _error_before(case: Case, response: Response, instant: float) -> float:
    """Distance from the reference at the last tick before an instant [rad/s]."""
    trace = response.trace
    last = first_tick(instant, case.sheet.rig.stage) - 1
    last = min(max(last, 0), trace.speed.shape[0] - 1)
    return abs(float(trace.reference[last]) - float(trace.speed[last]))


def _after_reference(case: Case) -> float:
    """When the stretch from the reference on ends: with the load step, the stop or the duty [s]."""
    duty = case.sheet.duty
    end = duty.length if duty.stop_at is None else min(duty.stop_at, duty.length)
    return min(end, duty.load_time) if duty.load_step != 0.0 else end


def _after_load(case: Case) -> float:
    duty = case.sheet.duty
    return duty.length if duty.stop_at is None else min(duty.stop_at, duty.length)


def _not_settled(case: Case, response: Response) -> Finding:
    duty = case.sheet.duty
    end = _after_reference(case)
    window = end - duty.reference_at
    error = _error_before(case, response, end)
    reference = abs(duty.reference_speed)
    ramp_time = reference / duty.reference_ramp if duty.reference_ramp > 0.0 else 0.0
    if ramp_time >= window:
        why = f"the ramp alone takes {amount(ramp_time, 's')}"
    elif 2.0 * response.figures.current_limited_s > window:
        why = f"the current sits on its limit for {amount(response.figures.current_limited_s, 's')}"
    else:
        why = _slow_integral(case, window)
    return Finding.on(
        "speed",
        "speed-not-settled",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The speed does not settle within the {amount(window, 's')} it is given",
            reason=f"at their end it is {speed(error)} off, {percent(error / reference)} of the reference, and "
            f"{percent(thresholds.SETTLED_SHARE)} are the band{'; ' if why else ''}{why}",
            advice="Give the duty more time, or ask for a faster speed loop",
        ),
    )


def _not_recovered(case: Case, response: Response) -> Finding:
    duty = case.sheet.duty
    end = _after_load(case)
    window = end - duty.load_time
    error = _error_before(case, response, end)
    why = _slow_integral(case, window)
    return Finding.on(
        "speed",
        "load-not-recovered",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The speed does not come back within {amount(window, 's')} of the load step",
            reason=f"at their end it is {speed(error)} off, {percent(error / abs(duty.reference_speed))} of the "
            f"reference, and {percent(thresholds.SETTLED_SHARE)} are the band{'; ' if why else ''}{why}",
            advice="Raise Ki, by a lower phase margin or a higher crossover" if why else "Ask for a faster speed loop",
        ),
    )


def _off_at_end(case: Case, response: Response) -> Iterator[Finding]:
    """An error left over where the figures of settling and recovery do not exist."""
    duty, figures = case.sheet.duty, response.figures
    dip = figures.load_dip_rad_s
    band = thresholds.SETTLED_SHARE * abs(duty.reference_speed)
    if duty.reference_speed == 0.0:
        if dip is None:
            return
        band = thresholds.RESIDUAL_DIP * dip
    end = _after_load(case)
    error = _error_before(case, response, end)
    if error <= band or end <= duty.reference_at:
        return
    why = _slow_integral(case, end - (duty.load_time if duty.load_step != 0.0 else duty.reference_at))
    yield Finding.on(
        "speed",
        "speed-off-at-end",
        level=Level.THIN,
        words=lambda: Words(
            title=f"The speed is still {speed(error)} off at {amount(end, 's')}",
            reason=(why or f"that is more than {speed(band)}, which would count as settled"),
            advice="Give the duty more time, raise Ki, or ask for a faster speed loop",
        ),
    )


def _slow_integral(case: Case, window: float) -> str:
    """Name the integral where it is what takes the time: four of its time constants do not fit."""
    gains = case.speed.gains
    if gains is None:
        return ""
    if gains.ki == 0.0:
        return "the speed loop has no integral to make it up"
    slow = gains.kp / gains.ki
    if 4.0 * slow <= window:
        return ""
    return f"the integral makes it up with a time constant near Kp/Ki = {amount(slow, 's')}"
