"""Logs from files: measured ones from outside, every form, and every kind of wrong input."""

from __future__ import annotations

import os

import numpy as np
import polars as pl
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from scipy.io import savemat

from gainbench.errors import LogError
from gainbench.evidence.log import Log
from gainbench.evidence.reading import read_log, survey_log
from gainbench.model import EvidenceLog, Experiment, LogColumn, SignalName
from gainbench.sheetfile import add_evidence, parse_sheet
from quantities import assert_quantity


def column(signal: str, name: str, unit: str, scale: float = 1.0) -> LogColumn:
    return LogColumn(signal=SignalName(signal), column=name, unit=unit, scale=scale)


def test_the_gearmotors_with_three_header_rows(outside_data):
    # research-wheel-slippage by BrOleg5, Apache-2.0: 2291 rows of about 31 ms, header rows of names, units and keys.
    path = outside_data / "gearmotors" / "data_for_identification_without_integral.csv"
    survey = survey_log(path)
    assert survey.form == "text"
    assert survey.layout is not None
    assert (survey.layout.separator, survey.layout.decimal_mark, survey.layout.head_lines) == (";", ".", 3)
    assert survey.rows == 2291
    assert (survey.columns[7].name, survey.columns[7].others, survey.columns[7].unit) == (
        "1st motor velocity",
        ("m1vel",),
        "rad/s",
    )
    assert survey.suggestion == (
        column("time", "Time", "ms"),
        column("current", "1st motor current", "A"),
        column("speed", "1st motor velocity", "rad/s"),
        column("speed_reference", "1st motor set speed", "rad/s"),
    )
    log = read_log(
        path, [column("time", "t", "ms"), column("speed", "m3vel", "rad/s"), column("current", "m3cur", "A")]
    )
    same = read_log(path, [column("time", "Time", "ms"), column("speed", "3rd motor velocity", "rad/s")])
    assert np.array_equal(log.signals[SignalName.SPEED], same.signals[SignalName.SPEED])
    assert log.time.size == 2291
    assert not log.is_regular
    assert len(log.pieces) == 1
    assert_quantity(log.period, 31e-3, rtol=0.05, unit="s", why="the data's own description says about 31 ms")
    assert_quantity(log.time[:3], [0.0, 26.5992e-3, 57.7217e-3], atol=1e-12, unit="s", why="rounding of a difference")


def test_the_positioning_axis_from_a_mat_file(outside_data):
    # A. Janot, M. Gautier, M. Brunot, Data Set and Reference Models of EMPS, Eindhoven, 2019: 24 841 samples, 1 kHz.
    path = outside_data / "emps" / "DATA_EMPS.mat"
    survey = survey_log(path)
    assert survey.form == "matlab"
    assert [one.name for one in survey.columns] == ["qg", "qm", "t", "vir"]
    assert survey.rows == 24_841
    # The axis is linear: metre and newton are read as radian and newton metre.
    log = read_log(
        path, [column("time", "t", "s"), column("angle", "qm", "rad"), column("torque", "vir", "N*m", 35.15065188)]
    )
    assert log.time.size == 24_841
    assert log.is_regular
    assert log.remarks == ()
    assert_quantity(log.rate, 1000.0, rtol=1e-3, unit="Hz", why="stamps in the file are rounded")


@pytest.mark.parametrize("form", ["csv", "tsv", "txt", "mat", "parquet", "no suffix"])
def test_one_run_in_every_form(tmp_path, run, as_text, columns, form):
    path = tmp_path / ("run" if form == "no suffix" else f"run.{form}")
    if form == "mat":
        savemat(path, dict(zip("tiw", run.T, strict=True)))
    elif form in {"parquet", "no suffix"}:
        pl.DataFrame(dict(zip("tiw", run.T, strict=True))).write_parquet(path)
    else:
        separator = {"csv": ";", "tsv": "\t", "txt": "  "}[form]
        path.write_text(as_text(run, header=separator.join("tiw"), separator=separator, mark=","), encoding="utf-8")
    before = path.read_bytes()
    path.chmod(0o444)
    log = read_log(path, columns)
    assert survey_log(path).name == log.name == path.name
    assert np.array_equal(log.time, run[:, 0])
    assert np.array_equal(log.signals[SignalName.CURRENT], run[:, 1])
    assert np.array_equal(log.signals[SignalName.SPEED], run[:, 2])
    assert path.read_bytes() == before
    assert os.listdir(tmp_path) == [path.name]


def test_units_become_si_and_scale_comes_before_the_unit(written, as_text, run):
    path = written(as_text(run))
    log = read_log(path, [column("time", "t", "ms"), column("speed", "w", "rpm", -2.0), column("angle", "i", "turn")])
    turn = 2.0 * np.pi
    why = "rounding of a product"
    assert_quantity(log.time, run[:, 0] * 1e-3, rtol=1e-14, unit="s", why=why)
    assert_quantity(log.signals[SignalName.SPEED], -2.0 * run[:, 2] * turn / 60.0, rtol=1e-14, unit="rad/s", why=why)
    assert_quantity(log.signals[SignalName.ANGLE], run[:, 1] * turn, rtol=1e-14, unit="rad", why=why)


@pytest.mark.parametrize(
    "stamp",
    ["2024-05-03T12:34:{:06.3f}", "2024/05/03 12:34:{:06.3f}Z", "12:34:{:06.3f}"],
)
def test_calendar_stamps_are_seconds_from_the_first(written, run, columns, stamp):
    rows = [f"{stamp.format(20.0 + t)};{i};{w}" for t, i, w in run]
    path = written("\n".join(["t;i;w", *rows]))
    assert survey_log(path).columns[0].guess is not None
    assert np.array_equal(read_log(path, columns).time, np.arange(40) * 1_000_000 * 1e-9)


def test_a_sample_counter_will_do_for_time(written, as_text, run):
    rows = np.column_stack([np.arange(40), run[:, 1:]])
    log = read_log(written(as_text(rows)), [column("time", "t", "s", 5e-5), column("speed", "w", "rad/s")])
    assert_quantity(log.rate, 20e3, rtol=1e-9, unit="Hz", why="rounding of products")


def test_a_unit_that_is_not_the_files_is_told(written, as_text, run):
    path = written(as_text(run, header="t [ms];i [mA];w [rpm]"))
    told = read_log(
        path, [column("time", "t", "ms"), column("current", "i", "A", 2.0), column("speed", "w [rpm]", "rad/s", 0.5)]
    ).remarks
    assert told == (
        'current: the file gives column "i" in mA, the mapping takes one as 2 A',
        'speed: the file gives column "w [rpm]" in rpm, the mapping takes one as 0.5 rad/s',
    )
    fitting = [column("time", "t", "ms"), column("current", "i", "A", 1e-3), column("speed", "w", "rpm", -1.0)]
    assert read_log(path, fitting).remarks == ()
    assert "the file gives" in read_log(path, [column("time", "t", "ms"), column("angle", "i", "rad")]).remarks[0]


def test_another_unit_without_a_scale_is_refused_but_by_place(written, as_text, run, log_refusal):
    path = written(as_text(run, header="t [ms];i [mA];w [rpm]"))
    message = log_refusal(path, [column("time", "t", "ms"), column("current", "i", "A")])
    assert 'write unit = "mA"' in message
    told = read_log(path, [column("time", "t", "ms"), column("current", "column 2", "A")]).remarks
    assert told == ('current: the file gives column "column 2" in mA, the mapping takes one as A',)


def test_the_number_of_the_row_will_do_for_time(written, as_text, run, log_refusal):
    path = written("# Sample rate: 2 kHz\n" + as_text(run, header="n;i;w"))
    log = read_log(path, [column("time", "row", "s", 5e-4), column("speed", "w", "rad/s")])
    assert_quantity(log.rate, 2e3, rtol=1e-9, unit="Hz", why="rounding of products")
    assert "scale = 0.0005" in log_refusal(path, [column("time", "row", "s"), column("speed", "w", "rad/s")])
    assert "scale = 0.0005" in log_refusal(path, [column("speed", "w", "rad/s")])
    named = written(as_text(run, header="row;i;w"), "named.csv")
    assert np.array_equal(
        read_log(named, [column("time", "row", "s"), column("speed", "w", "rad/s")]).time, run[:, 0] - run[0, 0]
    )


def test_the_suggestion_can_be_saved_and_read_with(written, as_text, run, demo_texts):
    path = written(as_text(run, header="t [ms];Strom [mA];Drehzahl [U/min]"))
    log = EvidenceLog(log=path.name, experiment=Experiment.DRIVEN, columns=survey_log(path).suggestion)
    document = add_evidence(parse_sheet(demo_texts["label-unwinder"], "x"), log)
    (saved,) = parse_sheet(document.text(), "x").sheet.evidence
    assert saved == log
    assert set(read_log(path, saved.columns).signals) == {SignalName.CURRENT, SignalName.SPEED}


def test_columns_of_one_name_are_suggested_by_their_place(written, as_text, run):
    path = written(as_text(run, header="t [s];speed [rpm];speed [rpm]"))
    survey = survey_log(path)
    assert [one.mapped_as for one in survey.columns] == ["t [s]", "column 2", "column 3"]
    assert survey.suggestion == (column("time", "t [s]", "s"), column("speed", "column 2", "rpm"))
    assert read_log(path, survey.suggestion).time.size == len(run)


# How the exports of oscilloscopes and loggers are commonly laid out; invented numbers.
EXPORTS = {
    "preamble": (
        "Model,X100\nRecord Length,2000\nSample Interval,1e-3\n\nTIME,CH1,CH2\ns,V,A\n",
        "{t:.6e},0.{k},1.5{k}",
        [("time", "TIME", "s"), ("voltage", "CH1", "V"), ("current", "CH2", "A")],
        [("time", "TIME", "s"), ("current", "CH2", "A")],
    ),
    "sample counter with its period above": (
        "X,CH1,Start,Increment\nSequence,Volt,0.0,1e-06\n",
        "{k},0.{k},,",
        [],
        [("time", "X", "s", 1e-6), ("voltage", "CH1", "V")],
    ),
    "settings beside the data": (
        "",
        ",,,{t:.6e},0.{k},",
        [],
        [("time", "column 4", "s"), ("voltage", "column 5", "V")],
    ),
    "German": (
        "Log;Anlage 7\nDatum;03.05.2024\n\nZeit;Drehzahl Ist;Drehzahl Soll\n[ms];[1/min];[1/min]\n",
        "{k},0;15,{k};0,5",
        [("time", "Zeit", "ms"), ("speed", "Drehzahl Ist", "rpm"), ("speed_reference", "Drehzahl Soll", "rpm")],
        [("time", "Zeit", "ms"), ("speed", "Drehzahl Ist", "rpm")],
    ),
}


@pytest.mark.parametrize("kind", EXPORTS)
def test_exports_as_they_commonly_are(written, kind):
    head, row, suggestion, mapping = EXPORTS[kind]
    rows = "\n".join(row.format(k=k, t=-0.02 + k * 1e-3) for k in range(40))
    path = written(f"{head}{rows}\n", encoding="cp1252")
    survey = survey_log(path)
    assert survey.rows == 40
    assert survey.suggestion == tuple(column(*one) for one in suggestion)
    log = read_log(path, [column(*one) for one in mapping])
    assert log.time.size == 40
    assert log.is_regular
    assert log.remarks == ()


# Wrong input.


@pytest.mark.parametrize(
    ("content", "name", "reason"),
    [
        (b"", "run.csv", "the file is empty"),
        (b"PK\x03\x04" + bytes(100), "run.xlsx", "not a log: this is a spreadsheet or a zip archive; export"),
        (b"%PDF-1.7\n1 0 obj\n", "run.csv", "not a log: this is a PDF"),
        (b"\x89PNG\r\n\x1a\n" + bytes(50), "run.png", "this is a picture"),
        (bytes(range(256)) * 20, "run.bin", "bytes that are no text"),
        (b"Dear engineer,\nplease find attached\n", "run.txt", "no rows of numbers"),
        (b"PAR1" + bytes(100), "run.parquet", "not a parquet file"),
        (b"x" * 200, "run.mat", "not a .mat file"),
        (b"MATLAB 7.3 MAT-file", "run.mat", "version 7.3"),
    ],
)
def test_not_a_log(written, log_refusal, content, name, reason):
    assert reason in log_refusal(written(content, name))


def test_no_such_file_and_no_file(tmp_path, log_refusal):
    assert "there is no such file; check the path" in log_refusal(tmp_path / "away.csv")
    assert "this is a folder" in log_refusal(tmp_path)
    assert "not the name of a file" in log_refusal(tmp_path / "a\0b.csv")
    os.mkfifo(tmp_path / "pipe.csv")
    assert "not a regular file" in log_refusal(tmp_path / "pipe.csv")


@pytest.mark.skipif(os.geteuid() == 0, reason="root may read every file")
def test_a_file_that_may_not_be_read(written, as_text, run, log_refusal):
    path = written(as_text(run))
    path.chmod(0)
    assert "cannot be read" in log_refusal(path)


@pytest.mark.parametrize(
    ("columns", "reason"),
    [
        ([], "no column is mapped to time (for example time ="),
        ([column("speed", "w", "rad/s")], "no column is mapped to time"),
        ([column("time", "t", "s")], "no column but the time is mapped"),
        ([column("time", "t", "s"), *[column("speed", "w", "rad/s")] * 2], "speed is mapped to more than one column"),
        ([column("time", "t", "s"), column("speed", "v", "rad/s")], 'there is no column "v"'),
        ([column("time", "t", "s"), column("speed", "w", "V")], 'unit "V" of speed (column "w"): this is a voltage'),
        ([column("time", "t", "s"), column("speed", "w", "1/s")], "write Hz, rpm or rad/s"),
        ([column("time", "t", "rpm"), column("speed", "w", "rpm")], 'unit "rpm" of time (column "t")'),
        ([column("time", "t", "s"), column("speed", "w", "")], "the unit is missing"),
        ([column("time", "t", "s"), column("speed", "w", "rpm", 0.0)], "scale 0.0 of speed"),
        ([column("time", "t", "s"), column("speed", "w", "rpm", np.inf)], "must be finite and not 0"),
        ([column("time", "t", "s"), column("speed", "state", "rpm")], "holds no numbers: it starts with RUN, RUN"),
        ([column("time", "state", "s"), column("speed", "w", "rpm")], "holds no numbers"),
        (
            [column("time", "t", "s"), column("speed", "when", "rpm")],
            "holds time stamps (12:00:00, 12:00:01, 12:00:02)",
        ),
        ([column("time", "when", "s", 2.0), column("speed", "w", "rpm")], "take no scale"),
        ([column("time", "w", "s"), column("speed", "w", "rpm")], "time runs backwards"),
        ([column("time", "t", "s"), column("speed", "spare", "rpm")], "holds no numbers: it is empty"),
    ],
)
def test_wrong_mappings(written, run, log_refusal, columns, reason):
    rows = [f"{t};{i};{w};RUN;12:00:{k:02d};" for k, (t, i, w) in enumerate(run)]
    assert reason in log_refusal(written("\n".join(["t;i;w;state;when;spare", *rows])), columns)


def test_constant_signals(written, as_text, run, log_refusal):
    rows = np.column_stack([run[:, 0], np.zeros(40), np.full(40, 7.0)])
    assert "every signal is constant" in log_refusal(written(as_text(rows)))


def test_clipped_signals_are_told(written, as_text, columns):
    time = np.arange(2000) / 1000.0
    wave = np.round(10.0 * np.sin(20.0 * time) + 0.1 * np.cos(777.0 * time), 3)
    log = read_log(written(as_text(np.column_stack([time, np.clip(wave, -20.0, 8.0), wave]))), columns)
    assert len(log.remarks) == 1
    assert log.remarks[0].startswith("current sits on its largest value, 8 A, for ")


def test_too_short(written, as_text, run, log_refusal):
    assert "too short: 6 rows" in log_refusal(written(as_text(run[:6])))


def test_columns_of_different_length(written, as_text, run, columns, tmp_path, log_refusal):
    lines = as_text(run).split("\n")
    text = "\n".join([*lines[:31], *(line.rpartition(";")[0] for line in lines[31:])])
    log = read_log(written(text), columns)
    assert log.time.size == 30
    assert log.remarks[0].startswith("speed ends 10 rows before the log does")
    path = tmp_path / "run.mat"
    savemat(path, {"t": run[:, 0], "i": run[:, 1], "w": run[:-1, 2]})
    assert "columns of different length: t has 40 values, i has 40 values, w has 39" in log_refusal(path)


def test_time_running_backwards(written, as_text, run, log_refusal):
    message = log_refusal(written(as_text(np.vstack([run, run]))))
    assert "time runs backwards at data row 41: 0 s come after 0.039 s" in message
    assert "cut the log there" in message


def test_thousands_separators_and_commas_for_everything(written, run, log_refusal):
    rows = "\n".join(f"{1000 + k}.5;1,234.5;{k}" for k in range(20))
    assert "thousands separators" in log_refusal(written(f"t;i;w\n{rows}"))
    rows = "\n".join(f"0,{k:02d},1,5,2,5" for k in range(20))
    assert "decimal commas and separators at once" in log_refusal(written(f"t,i,w\n{rows}"))


@pytest.mark.parametrize("name", ["run.csv", "run.mat", "run.parquet"])
def test_ten_gigabytes_are_refused_at_once(tmp_path, as_text, run, log_refusal, name):
    path = tmp_path / name
    if name == "run.mat":
        savemat(path, dict(zip("tiw", run.T, strict=True)))
    elif name == "run.parquet":
        pl.DataFrame(dict(zip("tiw", run.T, strict=True))).write_parquet(path)
    else:
        path.write_text(as_text(run), encoding="utf-8")
    # A sparse file: ten gigabytes that the disk does not hold.
    os.truncate(path, 10_000_000_000)
    assert log_refusal(path)


def test_ten_gigabytes_of_rows_are_refused_before_they_are_read(tmp_path, as_text, run, log_refusal, monkeypatch):
    path = tmp_path / "run.csv"
    path.write_text(as_text(np.tile(run, (200, 1))), encoding="utf-8")
    monkeypatch.setattr("gainbench.evidence.columns.MOST_VALUES", 3000)
    message = log_refusal(path)
    assert "too large: about " in message
    assert "cut the log to the part that matters, or record it at a lower rate" in message


# Whatever is in a file, it is a log or it is refused in words.

MARKS = (b"t", b"i", b";", b",", b"\t", b" ", b"\n", b"\r\n", b"\r", b'"', b"#", b".", b"\0", b"\xff", b"\xff\xfe")
NUMBERS = (b"1", b"-2.5", b"0,5", b"1e999", b"nan", b"9" * 25, b"12:00:01", b"2024-02-30T00:00:00Z")
BYTES = st.binary(max_size=400) | st.lists(st.sampled_from(MARKS + NUMBERS), max_size=200).map(b"".join)


@given(content=BYTES, name=st.sampled_from(["run.csv", "run.tsv", "run"]))
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=150)
def test_any_bytes_are_a_log_or_refused(written, content, name):
    by_place = [column("time", "column 1", "s"), column("speed", "column 2", "rpm")]
    assert_log_or_refused(written(content, name), by_place)


@given(data=st.data(), form=st.sampled_from(["csv", "mat", "packed.mat"]))
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=150)
def test_any_damage_gives_a_log_or_is_refused(tmp_path, run, as_text, columns, data, form):
    path = tmp_path / f"run.{form}"
    if form == "csv":
        path.write_text(as_text(run), encoding="utf-8")
    else:
        savemat(path, dict(zip("tiw", run.T, strict=True)), do_compression=form != "mat")
    content = bytearray(path.read_bytes())
    for _ in range(data.draw(st.integers(min_value=1, max_value=6))):
        place = data.draw(st.integers(min_value=0, max_value=len(content) - 1))
        content[place] = data.draw(st.integers(min_value=0, max_value=255))
    cut = data.draw(st.integers(min_value=1, max_value=len(content)) | st.none())
    path.write_bytes(bytes(content[:cut]))
    assert_log_or_refused(path, columns)


def assert_log_or_refused(path, columns) -> None:
    for act in (lambda: survey_log(path), lambda: read_log(path, columns)):
        try:
            result = act()
        except LogError as error:
            assert str(error).startswith(f"{path.name}: ")  # noqa: PT017
            assert "\n" not in str(error)  # noqa: PT017
        else:
            assert result.name == path.name
            assert not isinstance(result, Log) or np.all(np.diff(result.time) > 0.0)
