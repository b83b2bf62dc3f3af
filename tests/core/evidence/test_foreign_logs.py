"""Logs as instruments and loggers of all kinds write them: identified within the bounds, or refused in words."""

from __future__ import annotations

import io
from contextlib import redirect_stderr, redirect_stdout
from datetime import datetime, timedelta
from json import loads
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from scipy.io import savemat

from bench_logs import counted, noisy
from gainbench.cli import run as command
from gainbench.evidence.reading import survey_log
from identified import TRUE, some_motion

STEP = 5e-4
COUNT = 2.0 * np.pi / 4096
HELD = ("resistance", "back_emf_constant", "inertia")
MACHINE = """
resistance = "0.75 ohm"
inductance = "0.7 mH"
torque_constant = "60 mN*m/A"
rotor_inertia = "2 kg*cm^2"
"""
SHEET = f"""format = 1
[machine]
kind = "brushed-dc"{MACHINE}
[train]
kind = "rigid"
load_inertia = "0 kg*cm^2"
[stage]
bus_voltage = "24 V"
current_limit = "40 A"
pwm_frequency = "20 kHz"
current_rate = "20 kHz"
speed_rate = "2 kHz"
speed_sensor = "ideal"
[aims.current]
method = "crossover-margin"
crossover = "1 kHz"
phase_margin = "60 deg"
[aims.speed]
method = "crossover-margin"
crossover = "40 Hz"
phase_margin = "60 deg"
[duty]
reference_speed = "1000 rpm"
length = "400 ms"
"""
PLAIN = {"time": "t s", "voltage": "u V", "current": "i A", "speed": "w rad/s"}
TURNED = {name: text for name, text in PLAIN.items() if name != "speed"}


@pytest.fixture(scope="module")
def motion() -> dict[str, np.ndarray]:
    """A run as the instruments see it: t, u, i, w and the angle q."""
    made = some_motion(2.0, seed=5)
    rng = np.random.default_rng(8)
    noise = {name: noisy(getattr(made, long), 46.0, rng)[0] for name, long in
             (("u", "voltage"), ("i", "current"), ("w", "speed"))}  # fmt: skip
    return {"t": made.time, "q": counted(made.angle[0], 4096)} | noise


def rows(*columns, header: str = "t,u,i,w", separator: str = ",", mark: str = ".", tail: str = "") -> str:
    texts = [[one if isinstance(one, str) else f"{one:.9g}".replace(".", mark) for one in column] for column in columns]
    return "\n".join([header, *(separator.join(row) for row in zip(*texts, strict=True)), tail])


def stamps(t: np.ndarray, form: str) -> list[str]:
    start = datetime(2026, 3, 1, 23, 59, 59)
    return [(start + timedelta(microseconds=round(1e6 * one))).strftime(form) for one in t]


def whole(values: np.ndarray) -> list[str]:
    return [str(int(one)) for one in values]


def identified(folder: Path, name: str, columns: dict[str, str], *, experiment: str = "driven"):
    """Exit status, what the command prints as JSON, and what it refuses with."""
    lines = []
    for signal, text in columns.items():
        column, unit, *scale = text.rsplit(" ", text.count(" ") if text.count(" ") < 3 else 2)
        more = f", scale = {scale[0]}" if scale else ""
        lines.append(f'{signal} = {{ column = "{column.replace("~", " ")}", unit = "{unit}"{more} }}')
    sheet = folder / "x.bench.toml"
    log = f'\n[[evidence]]\nlog = "{name}"\nexperiment = "{experiment}"\n[evidence.columns]\n'
    sheet.write_text(SHEET + log + "\n".join(lines) + "\n", encoding="utf-8")
    out, refused = io.StringIO(), io.StringIO()
    with redirect_stdout(out), redirect_stderr(refused):
        status = command(["identify", str(sheet), "--json"])
    return status, loads(out.getvalue()) if out.getvalue() else None, refused.getvalue()


def right(found, names=HELD) -> None:
    for name in names:
        one = found["estimates"][name]
        assert one["run_low"] <= TRUE[name] <= one["run_high"], name
        assert abs(one["value"] / TRUE[name] - 1.0) < 0.03, name


def remarks(found) -> str:
    return " | ".join(found["runs"][0]["remarks"])


# Each: the file's bytes, its name, the mapping as "column unit scale" (a tilde stands for a blank).
GOOD = {
    "decimal commas and a units row": lambda m: (
        rows(m["t"], m["u"], m["i"], m["w"] * 30 / np.pi, separator=";", mark=",",
             header="Zeit;Ankerspannung;Ankerstrom;Drehzahl\ns;V;A;1/min").encode(),
        "a.csv", {"time": "Zeit s", "voltage": "Ankerspannung V", "current": "Ankerstrom A", "speed": "Drehzahl rpm"}),
    "units in brackets": lambda m: (
        rows(m["t"], m["u"], m["i"] * 1e3, m["w"] * 30 / np.pi, header="Time (s),U (V),I (mA),n (RPM)").encode(),
        "a.csv", {"time": "Time s", "voltage": "U V", "current": "I mA", "speed": "n RPM"}),
    "units behind a slash, old encoding": lambda m: (
        rows(m["t"] * 1e3, m["u"], m["i"], np.degrees(m["w"]), separator=";", mark=",",
             header="temps/ms;tension/V;courant/A;vitesse/(°/s)").encode("latin-1"),
        "a.csv", {"time": "temps ms", "voltage": "tension V", "current": "courant A", "speed": "vitesse/(°/s) deg/s"}),
    "UTF-16, tabs, microseconds": lambda m: (
        rows(m["t"] * 1e6, m["u"], m["i"], m["w"], separator="\t", header="time [us]\tu [V]\ti [A]\tw [rad/s]")
        .replace("\n", "\r\n").encode("utf-16"), "a.tsv", PLAIN | {"time": "time us"}),
    "calendar stamps across midnight": lambda m: (
        rows(stamps(m["t"], "%Y-%m-%dT%H:%M:%S.%fZ"), m["u"], m["i"], m["w"]).encode(), "a.csv", PLAIN),
    "days, then months, with points": lambda m: (
        rows(stamps(m["t"], "%d.%m.%Y %H:%M:%S,%f"), m["u"], m["i"], m["w"], separator=";", header="t;u;i;w").encode(),
        "a.csv", PLAIN),
    "halves of a day": lambda m: (
        rows(stamps(m["t"], "%m/%d/%Y %I:%M:%S.%f %p"), m["u"], m["i"], m["w"]).encode(), "a.csv", PLAIN),
    "epoch": lambda m: (
        rows([f"{1772409598 + one:.4f}" for one in m["t"]], m["u"], m["i"], m["w"]).encode(), "a.csv", PLAIN),
    "a counter and its rate above": lambda m: (
        rows(whole(np.arange(m["t"].size)), m["u"], m["i"], m["w"],
             header="# Sample rate: 2000 Hz\nSample,u [V],i [A],w [rad/s]").encode(),
        "a.csv", PLAIN | {"time": "Sample s 5e-4"}),
    "no time at all": lambda m: (rows(m["u"], m["i"], m["w"], header="u,i,w").encode(), "a.csv",
                                 PLAIN | {"time": "row s 5e-4"}),
    "a scope's lines above": lambda m: (
        rows(whole(np.arange(m["t"].size)), m["u"], m["i"], m["w"],
             header="Model,DSO\nRecord Length,4000\nSample Interval,5.000E-4,s\nX,CH1,CH2,CH3").encode(),
        "a.csv", {"time": "X s 5e-4", "voltage": "CH1 V", "current": "CH2 A", "speed": "CH3 rad/s"}),
    "two speeds": lambda m: (
        rows(m["t"], m["u"], m["i"], np.round(m["w"], -1), m["w"], header="t,u,i,n_soll,n_ist").encode(),
        "a.csv", PLAIN | {"speed": "n_ist rad/s", "speed_reference": "n_soll rad/s"}),
    "a mark, comments, lines below": lambda m: (
        b"\xef\xbb\xbf" + rows(m["t"], m["u"], m["i"], m["w"], header="# bench 2\n# run 7\nt [s],u [V],i [A],w [rad/s]",
                               tail="\nMax,23.1,30.2,400\nEnd of file").encode(), "a.csv", PLAIN),
    "counts": lambda m: (rows(m["t"], m["u"], m["i"], whole(np.round(m["q"] / COUNT)), header="t,u,i,enc").encode(),
                         "a.csv", TURNED | {"angle": f"enc rad {COUNT!r}"}),
}  # fmt: skip


@pytest.mark.parametrize("kind", GOOD)
def test_forms_of_text(tmp_path, motion, kind):
    content, name, columns = GOOD[kind](motion)
    (tmp_path / name).write_bytes(content)
    status, found, _ = identified(tmp_path, name, columns)
    assert status == 0
    right(found)


@pytest.mark.parametrize("form", ["structure", "matrix", "step", "stamps", "nanoseconds"])
def test_forms_that_are_no_text(tmp_path, motion, form):
    four = {name: motion[name] for name in "tuiw"}
    name, columns = "a.mat", PLAIN
    if form == "structure":
        savemat(tmp_path / name, {"run": four, "note": "x"})
        columns = {signal: f"run.{text}" for signal, text in PLAIN.items()}
    elif form == "matrix":
        savemat(tmp_path / name, {"data": np.array(list(four.values()))})
        places = ["data(1,:) s", "data(2,:) V", "data(3,:) A", "data(4,:) rad/s"]
        columns = dict(zip(PLAIN, places, strict=True))
    elif form == "step":
        savemat(tmp_path / name, four | {"t": STEP, "Ts": STEP})
        status, _, refused = identified(tmp_path, name, PLAIN | {"time": "row s"})
        assert status == 2
        assert "scale = 0.0005" in refused
        columns = PLAIN | {"time": f"row s {STEP}"}
    else:
        name = "a.parquet"
        start = datetime(2026, 3, 1, 23, 59, 59)
        times = [start + timedelta(microseconds=round(1e6 * one)) for one in motion["t"]]
        nano = np.round(motion["t"] * 1e9).astype(np.int64) + 1772409598000000000
        pl.DataFrame(four | {"t": times if form == "stamps" else nano}).write_parquet(tmp_path / name)
        columns = PLAIN if form == "stamps" else PLAIN | {"time": "t ns"}
    status, found, _ = identified(tmp_path, name, columns)
    assert status == 0
    right(found)


def spoiled(m: dict[str, np.ndarray], what: str) -> dict[str, np.ndarray]:
    found = dict(m)
    if what == "lag":
        found = {name: values[3:] for name, values in m.items()} | {"i": m["i"][:-3]}
    elif what == "clipped":
        limit = np.percentile(np.abs(m["i"]), 97.0)
        found["i"] = np.clip(m["i"], -limit, limit)
    elif what == "offset":
        found["i"] = m["i"] + 0.8
    elif what == "ripple":
        found["u"] = m["u"] + 3.0 * (-1.0) ** np.arange(m["u"].size)
    return found


@pytest.mark.parametrize(
    ("what", "said"),
    [("lag", "dead time"), ("clipped", "limit of the measurement"), ("offset", "off against"), ("ripple", "")],
)
def test_spoiled_signals_do_no_harm_and_are_said(tmp_path, motion, what, said):
    m = spoiled(motion, what)
    (tmp_path / "a.csv").write_text(rows(m["t"], m["u"], m["i"], m["w"]), encoding="utf-8")
    status, found, _ = identified(tmp_path, "a.csv", PLAIN)
    assert status == 0
    right(found)
    assert said in remarks(found)
    assert what != "offset" or "torque_offset" not in found["estimates"]


@pytest.mark.parametrize(
    ("what", "said"), [("turn", "wraps"), ("degrees", "wraps"), ("16 bits", "wraps"), ("reset", "was reset once")]
)
def test_angles_that_begin_anew(tmp_path, motion, what, said):
    q, unit = motion["q"], "rad"
    if what == "turn":
        q = np.mod(q, 2.0 * np.pi)
    elif what == "degrees":
        q, unit = np.degrees(np.mod(q + np.pi, 2.0 * np.pi) - np.pi), "deg"
    elif what == "16 bits":
        q, unit = np.mod(np.round(q / COUNT), 65536), f"rad {COUNT!r}"
    else:
        q = q - np.where(np.arange(q.size) > 2000, q[2000], 0.0)
    (tmp_path / "a.csv").write_text(rows(motion["t"], motion["u"], motion["i"], q, header="t,u,i,q"), encoding="utf-8")
    status, found, _ = identified(tmp_path, "a.csv", TURNED | {"angle": f"q {unit}"})
    assert status == 0
    right(found)
    assert said in remarks(found)


REFUSED = {
    "current with the other sign": (lambda m: (m["u"], -m["i"], m["w"]), PLAIN, "the current has the wrong sign"),
    "speed with the other sign": (lambda m: (m["u"], m["i"], -m["w"]), PLAIN, "the speed or angle has the wrong sign"),
    "voltage with the other sign": (lambda m: (-m["u"], m["i"], m["w"]), PLAIN, "the voltage has the wrong sign"),
    "no voltage, one sign wrong": (
        lambda m: (m["u"], -m["i"], m["w"]),
        {name: text for name, text in PLAIN.items() if name != "voltage"},
        "the current or the motion has the wrong sign",
    ),
}


@pytest.mark.parametrize("kind", REFUSED)
def test_wrong_signs_are_refused_with_the_column(tmp_path, motion, kind):
    made, columns, said = REFUSED[kind]
    (tmp_path / "a.csv").write_text(rows(motion["t"], *made(motion)), encoding="utf-8")
    status, found, refused = identified(tmp_path, "a.csv", columns)
    assert (status, found) == (2, None)
    assert said in refused
    assert "scale = -1" in refused


@pytest.mark.parametrize(
    ("header", "columns", "said"),
    [
        ("t,duty [%],i,w", PLAIN | {"voltage": "duty V"}, "holds %"),
        ("t,pwm,i,w", PLAIN | {"voltage": "pwm V"}, "holds pwm"),
        ("t,u,i_adc,w", PLAIN | {"current": "i_adc A"}, "holds adc"),
        ("t,u [V],i [mA],w", PLAIN, 'write unit = "mA"'),
        ("CH1,CH2,CH3,CH4", {"voltage": "CH2 V", "current": "CH3 A"}, "does not follow from their names"),
        ("t [s],u [V],i [A],w [rad/s]", {"voltage": "u V"}, 'current = { column = "i [A]", unit = "A" }'),
    ],
)
def test_what_means_something_else_is_asked_for(tmp_path, motion, header, columns, said):
    m = {name: values[:200] for name, values in motion.items()}
    (tmp_path / "a.csv").write_text(rows(m["t"], m["u"], m["i"], m["w"], header=header), encoding="utf-8")
    status, _, refused = identified(tmp_path, "a.csv", columns)
    assert status == 2
    assert said in refused


@pytest.mark.parametrize(
    ("factors", "cause"),
    [
        ((1e3, 1, 1, 1), "the time"),
        ((1, 1 / 24, 1, 1), "the voltage"),
        ((1, 1, 1e3, 1), "the current"),
        ((1, 1, 1, 30 / np.pi), "speed or angle"),
    ],
)
def test_a_wrong_unit_shows_in_the_estimates(tmp_path, motion, factors, cause):
    columns = [motion[name] * factor for name, factor in zip("tuiw", factors, strict=True)]
    (tmp_path / "a.csv").write_text(rows(*columns), encoding="utf-8")
    _, found, _ = identified(tmp_path, "a.csv", PLAIN)
    assert f"the unit or scale of {cause}" in remarks(found)


def test_a_slow_logger_is_told_which_rate_it_takes(tmp_path):
    made = some_motion(8.0, seed=5)
    slow = [getattr(made, name)[..., ::20].ravel() for name in ("time", "voltage", "current", "speed")]
    (tmp_path / "a.csv").write_text(rows(*slow), encoding="utf-8")
    _, found, _ = identified(tmp_path, "a.csv", PLAIN)
    assert "inductance" not in found["estimates"]
    assert "too slow for the inductance: the log has 100 rows a second" in remarks(found)
    right(found, ("resistance", "back_emf_constant"))


def test_a_current_without_sign_in_a_run_that_brakes_tells_nothing(tmp_path, motion):
    (tmp_path / "a.csv").write_text(rows(motion["t"], motion["u"], np.abs(motion["i"]), motion["w"]), encoding="utf-8")
    _, found, _ = identified(tmp_path, "a.csv", PLAIN)
    assert found["estimates"] == {}
    assert "log the current with its sign" in remarks(found)


@pytest.mark.parametrize("header", ["CH1,CH2,CH3", "u_bus [V],id [A],duty [%]", "Vdc [V],battery [A],pwm"])
def test_names_that_say_nothing_of_the_machine_are_not_guessed(tmp_path, motion, header):
    m = {name: values[:50] for name, values in motion.items()}
    (tmp_path / "a.csv").write_text(rows(m["u"], m["i"], m["w"], header=header), encoding="utf-8")
    assert survey_log(tmp_path / "a.csv").suggestion == ()
