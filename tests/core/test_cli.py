"""The commands, run as processes: what they print, what they write, and how they refuse."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys

import pytest

from command_line import assert_refused, run_program
from demo_log import EVIDENCE, LOG
from gainbench import cli
from gainbench.assess import assess
from gainbench.handover import read_origin
from gainbench.sheetfile import digest, parse_sheet
from gainbench_resources import demo_log

HEADER = "label_unwinder_gains.h"


@pytest.fixture
def bench(tmp_path, demo_texts):
    """A folder with the demo sheets in it."""
    for name, text in demo_texts.items():
        (tmp_path / f"{name}.bench.toml").write_text(text, encoding="utf-8")
    return tmp_path


@pytest.fixture
def call(bench, monkeypatch, capfd):
    """Run a command line in this process, in the folder of the demo sheets."""

    def called(*words):
        monkeypatch.chdir(bench)
        status = cli.run(words)
        out, err = capfd.readouterr()
        return status, out, err

    return called


def edited(folder, name, old, new):
    """A copy of a demo sheet with one text changed."""
    text = (folder / "label-unwinder.bench.toml").read_text(encoding="utf-8")
    assert old in text
    (folder / name).write_text(text.replace(old, new), encoding="utf-8")
    return name


def test_assess_prints_for_people(bench):
    done = run_program("assess", "label-unwinder.bench.toml", folder=bench)
    assert (done.returncode, done.stderr) == (0, "")
    lines = done.stdout.splitlines()
    assert lines[0] == "Label unwinder"
    assert not [line for line in lines if line != line.rstrip()]
    assert re.search(r"^  phase margin +60\.00 deg$", done.stdout, re.MULTILINE)
    for part in (
        "Current loop, crossover-margin",
        "Speed loop",
        "Response",
        "Findings",
        "Not modelled",
        "On the bench",
    ):
        assert part in done.stdout
    assert "run-away" not in done.stdout
    assert "runs away at full torque" in done.stdout


def test_assess_json_is_the_assessment_in_full_precision(bench):
    done = run_program("assess", "bottle-indexer.bench.toml", "--json", folder=bench)
    assert (done.returncode, done.stderr) == (0, "")
    found = json.loads(done.stdout)
    text = (bench / "bottle-indexer.bench.toml").read_text(encoding="utf-8")
    assessment = assess(parse_sheet(text, "bottle-indexer.bench.toml").sheet)
    assert found["title"] == "Bottle indexer"
    assert found["current"]["kp"] == assessment.current.gains.kp
    assert found["speed"]["phase_margin_deg"] == assessment.speed.figures.phase_margin_deg
    assert found["response"]["peak_current_a"] == assessment.response.figures.peak_current_a


def test_something_that_breaks_is_status_one(call, bench):
    name = edited(bench, "fast.bench.toml", '"1500 rpm"', '"9000 rpm"')
    status, out, _ = call("assess", name)
    assert status == 1
    assert " breaks " in out
    status, out, _ = call("handover", name, "--to", "out")
    assert status == 1
    assert "breaks: " in out
    assert (bench / "out" / HEADER).is_file()


def test_refused_targets_are_assessed_and_not_handed_over(call, bench):
    name = edited(bench, "greedy.bench.toml", '"60 Hz"', '"900 Hz"')
    status, out, _ = call("assess", name, "--json")
    assert status == 1
    assert json.loads(out)["speed"]["kp"] is None
    status, out, _ = call("assess", name)
    assert status == 1
    assert "no gains" in out
    status, out, err = call("handover", name, "--to", "out")
    assert (status, out) == (2, "")
    assert err.startswith("gainbench: greedy.bench.toml: nothing is exported")
    assert not (bench / "out").exists()


def test_contrast_lays_sheets_and_shelves_side_by_side(bench):
    names = ("label-unwinder.bench.toml", "sieve-drum.bench.toml")
    done = run_program("contrast", *names, folder=bench)
    assert (done.returncode, done.stderr) == (0, "")
    lines = done.stdout.splitlines()
    assert not [line for line in lines if line != line.rstrip() or len(line) > 100]
    for name in ("label-unwinder.bench.toml, as designed", 'label-unwinder.bench.toml, kept "first light"'):
        assert name in done.stdout
    assert re.search(r"^  phase margin +60\.00 deg +59\.99 deg +60\.00 deg$", done.stdout, re.MULTILINE)
    done = run_program("contrast", *names, "--json", folder=bench)
    assert (done.returncode, done.stderr) == (0, "")
    told = json.loads(done.stdout)
    assert (told["format"], told["reference"]) == (1, 0)
    assert [(one["sheet"], one["tuning"]) for one in told["tunings"]] == [
        (names[0], None),
        (names[0], "first light"),
        (names[1], None),
    ]
    assert told["tunings"][1]["speed"]["kp"] == 0.481
    assert told["tunings"][0]["difference"]["speed"]["kp"] == 0.0


def test_contrast_is_status_one_where_any_tuning_breaks(call, bench):
    name = edited(bench, "wild.bench.toml", 'kp = "0.481 A*s/rad"', 'kp = "48.1 A*s/rad"')
    status, out, err = call("contrast", "label-unwinder.bench.toml", name)
    assert (status, err) == (1, "")
    assert 'x breaks  wild.bench.toml, kept "first light"' in out
    assert call("contrast", "label-unwinder.bench.toml")[0] == 0


def test_contrast_tells_sheets_of_one_name_apart(call, bench):
    (bench / "old").mkdir()
    name = "label-unwinder.bench.toml"
    (bench / "old" / name).write_text((bench / name).read_text(encoding="utf-8"), encoding="utf-8")
    status, out, _ = call("contrast", name, f"old/{name}", "--json")
    assert status == 0
    assert [one["sheet"] for one in json.loads(out)["tunings"]] == [name, name, f"old/{name}", f"old/{name}"]


def test_handover_writes_one_header(bench):
    done = run_program("handover", "label-unwinder.bench.toml", "--to", "out", "--arithmetic", "float", folder=bench)
    assert (done.returncode, done.stderr) == (0, "")
    assert HEADER in done.stdout
    assert os.listdir(bench / "out") == [HEADER]
    text = (bench / "label-unwinder.bench.toml").read_text(encoding="utf-8")
    assert read_origin(bench / "out" / HEADER).digest == digest(text)


def test_handover_keeps_what_is_there_unless_told(call, bench):
    (bench / HEADER).write_text("mine")
    status, _, err = call("handover", "label-unwinder.bench.toml", "--to", ".")
    assert status == 2
    assert "--replace" in err
    assert (bench / HEADER).read_text() == "mine"
    assert call("handover", "label-unwinder.bench.toml", "--to", ".", "--replace", "--prefix", "AXIS1")[0] == 0
    assert "#define AXIS1_CURRENT_KP " in (bench / HEADER).read_text()


def test_handover_of_a_kept_tuning(call, bench):
    assert call("handover", "label-unwinder.bench.toml", "--to", ".", "--kept", "first light")[0] == 0
    origin = read_origin(bench / HEADER)
    assert origin.is_kept("first light")
    assert origin.values["CURRENT_KP"] == "2.66F"
    status, out, _ = call("origin", HEADER, "label-unwinder.bench.toml")
    assert status == 0
    assert "kept, first light" in out
    status, _, err = call("handover", "label-unwinder.bench.toml", "--to", ".", "--kept", "other")
    assert status == 2
    assert 'no tuning "other"; it holds "first light"' in err


def test_origin_names_the_sheet(call, bench):
    call("handover", "label-unwinder.bench.toml", "--to", ".")
    status, out, _ = call("origin", HEADER, "sieve-drum.bench.toml", "label-unwinder.bench.toml")
    assert status == 0
    assert "label-unwinder.bench.toml: is where it came from, and every number is as written." in out
    assert "sieve-drum.bench.toml" not in out


def test_origin_sees_through_a_new_name_title_and_comment(call, bench):
    call("handover", "label-unwinder.bench.toml", "--to", ".")
    name = edited(bench, "renamed.bench.toml", 'title = "Label unwinder"', 'title = "Other"  # renamed')
    assert call("origin", HEADER, name)[0] == 0


def test_origin_says_what_differs(call, bench):
    call("handover", "label-unwinder.bench.toml", "--to", ".")
    name = edited(bench, "later.bench.toml", '"60 Hz"', '"61 Hz"')
    status, out, _ = call("origin", HEADER, name)
    assert status == 1
    assert "No sheet given here says the same" in out
    assert re.search(r"SPEED_KP: \S+F in the file, \S+F from the sheet", out)
    assert "CURRENT_KP" not in out


def test_origin_tells_the_same_numbers_from_the_same_sheet(call, bench):
    call("handover", "label-unwinder.bench.toml", "--to", ".")
    name = edited(bench, "longer.bench.toml", 'length = "450 ms"', 'length = "460 ms"')
    status, out, _ = call("origin", HEADER, name)
    assert status == 1
    assert "gives the same numbers" in out


def test_origin_sees_a_number_changed_by_hand(call, bench):
    call("handover", "label-unwinder.bench.toml", "--to", ".")
    text = (bench / HEADER).read_text()
    (bench / HEADER).write_text(text.replace("CURRENT_LIMIT_A 20.0F", "CURRENT_LIMIT_A 40.0F"))
    status, out, _ = call("origin", HEADER, "label-unwinder.bench.toml")
    assert status == 1
    assert "CURRENT_LIMIT_A: 40.0F in the file, 20.0F from the sheet" in out


def test_origin_of_a_tuning_that_is_gone(call, bench):
    call("handover", "label-unwinder.bench.toml", "--to", ".", "--kept", "first light")
    name = edited(bench, "other.bench.toml", 'name = "first light"', 'name = "second light"')
    status, out, _ = call("origin", HEADER, name)
    assert status == 1
    assert "its shelf does not hold that tuning" in out


@pytest.mark.parametrize(
    ("old", "new", "says"),
    [
        ('"0.60 ohm"', '"0.60 mH"', "machine.resistance"),
        ('"0.60 ohm"', '"0 ohm"', "machine.resistance"),
        ('"0.60 ohm"', '"-1 ohm"', "machine.resistance"),
        ('"0.60 ohm"', '"nan ohm"', "finite"),
        ('"0.60 ohm"', '"1e999 ohm"', "machine.resistance"),
        ('"0.60 ohm"', "\"__import__('os')\"", "machine.resistance"),
        ('"0.60 ohm"', '"1 ohm^99999999"', "machine.resistance"),
        ('"12 mN*m"', '"12 mJ"', "energy is not torque"),
        ('crossover = "60 Hz"', 'crossover = "377 1/s"', "aims.speed.crossover"),
        ("ratio = 3.0", "ratoi = 3.0", "train.ratoi"),
        ("ratio = 3.0", 'ratio = "three"', "train.ratio"),
        ('speed_rate = "2 kHz"', 'speed_rate = "3 kHz"', "stage.speed_rate"),
        ('length = "450 ms"', 'length = "1000000 s"', "duty.length"),
        ('load_at = "250 ms"', 'load_at = "500 ms"', "duty.load_at"),
        ('kind = "rigid"', 'kind = "elastic"', "train.shaft_stiffness"),
        ("encoder_counts = 4096", "encoder_counts = 4096.5", "stage.encoder_counts"),
        ('title = "Label unwinder"', 'title = "a\\u001b[31mb"', "title"),
        ("format = 1", "format = 2", "format"),
        ("format = 1", "format = 1\nformat = 1", "TOML"),
        ('rotor_inertia = "310 g*cm^2"', "", "machine.rotor_inertia"),
    ],
)
def test_wrong_sheets_are_refused_by_every_command(call, bench, old, new, says):
    name = edited(bench, "wrong.bench.toml", old, new)
    before = sorted(os.listdir(bench))
    good = "label-unwinder.bench.toml"
    for words in (
        ("assess", name),
        ("assess", name, "--json"),
        ("contrast", good, name),
        ("handover", name, "--to", "out"),
    ):
        status, out, err = call(*words)
        assert (status, out) == (2, "")
        assert err.startswith("gainbench: wrong.bench.toml: ")
        assert says in err
        assert "Traceback" not in err
    assert sorted(os.listdir(bench)) == before


@pytest.mark.parametrize(
    ("content", "says"),
    [
        (b"", "empty"),
        (b"\x00\x01\x02", "binary"),
        ("format = 1".encode("utf-16"), "UTF-16"),
        (b'title = "\xe4"', "UTF-8"),
        (b"#" * 2_000_000, "bytes"),
        (b"[" * 5000, "TOML"),
        (b"format = 1", "machine"),
    ],
)
def test_files_that_are_no_sheets_are_refused(call, bench, content, says):
    (bench / "odd.bench.toml").write_bytes(content)
    status, out, err = call("assess", "odd.bench.toml")
    assert (status, out) == (2, "")
    assert err.startswith("gainbench: odd.bench.toml: ")
    assert says in err or "nested" in err


@pytest.mark.parametrize(
    ("words", "says"),
    [
        (("assess", "none.bench.toml"), "no such file"),
        (("assess", "."), "folder"),
        (("assess",), "SHEET"),
        (("assess", "a", "b"), "b"),
        (("assess", "label-unwinder.bench.toml", "--xml"), "--xml"),
        (("contrast",), "SHEET"),
        (("contrast", "label-unwinder.bench.toml", "none.bench.toml"), "no such file"),
        (("contrast", "label-unwinder.bench.toml", "--xml"), "--xml"),
        (("handover", "label-unwinder.bench.toml"), "--to"),
        (("handover", "label-unwinder.bench.toml", "--to", "no/such"), "no folder"),
        (("handover", "label-unwinder.bench.toml", "--to", ""), "folder"),
        (("handover", "label-unwinder.bench.toml", "--to", "label-unwinder.bench.toml"), "not a folder"),
        (("handover", "label-unwinder.bench.toml", "--to", "out", "--arithmetic", "fixed"), "fixed"),
        (("handover", "label-unwinder.bench.toml", "--to", "out", "--prefix", "_X"), "prefix"),
        (("handover", "label-unwinder.bench.toml", "--to", "out", "--prefix", "a */ b"), "prefix"),
        (("identify",), "SHEET"),
        (("identify", "label-unwinder.bench.toml"), "no evidence"),
        (("identify", "label-unwinder.bench.toml", "--xml"), "--xml"),
        (("origin", "label-unwinder.bench.toml"), "SHEET"),
        (("origin", "label-unwinder.bench.toml", "label-unwinder.bench.toml"), "does not tell its origin"),
        (("origin", "none.h", "label-unwinder.bench.toml"), "does not exist"),
        (("--wrong",), "--wrong"),
    ],
)
def test_wrong_words_are_refused(bench, words, says):
    before = sorted(os.listdir(bench))
    assert_refused(run_program(*words, folder=bench), says=says)
    assert sorted(os.listdir(bench)) == before


@pytest.fixture
def with_evidence(bench):
    sheet = bench / "evident.bench.toml"
    text = (bench / "label-unwinder.bench.toml").read_text(encoding="utf-8")
    sheet.write_text(text + EVIDENCE, encoding="utf-8")
    (bench / LOG).write_text(demo_log(LOG).read_text(encoding="utf-8"), encoding="utf-8")
    return sheet


def test_identify_prints_json_and_touches_nothing(call, with_evidence):
    before = {one.name: one.read_bytes() for one in with_evidence.parent.iterdir() if one.is_file()}
    status, out, _ = call("identify", str(with_evidence), "--json")
    data = json.loads(out)
    assert status == 0
    assert data["format"] == 1
    assert 0.6 < data["estimates"]["resistance"]["value"] < 0.7
    assert data["runs"][0]["log"] == LOG
    assert {one.name: one.read_bytes() for one in with_evidence.parent.iterdir() if one.is_file()} == before


def test_identify_accepts_into_the_sheet_and_says_so(call, with_evidence):
    log = (with_evidence.parent / LOG).read_bytes()
    status, out, _ = call("identify", str(with_evidence), "--accept")
    text = with_evidence.read_text(encoding="utf-8")
    assert status == 0
    assert "written into evident.bench.toml" in out
    assert 'note = "accepted: ' in text
    assert "# brushed: terminal to terminal" in text, "comments survive"
    assert parse_sheet(text, "x").sheet.rig.machine.resistance > 0.62
    assert (with_evidence.parent / LOG).read_bytes() == log


def test_identify_refuses_a_log_that_is_not_there(call, with_evidence):
    (with_evidence.parent / LOG).unlink()
    status, out, err = call("identify", str(with_evidence))
    assert (status, out) == (2, "")
    assert LOG in err


def test_a_file_name_cannot_steer_the_terminal(call):
    status, _, err = call("assess", "\x1b[2Jnone.bench.toml")
    assert status == 2
    assert "\x1b" not in err


def test_a_title_of_other_letters_is_printed_where_it_cannot_be_shown(bench):
    name = edited(bench, "title.bench.toml", '"Label unwinder"', '"巻出し [bold]"')
    done = run_program("assess", name, folder=bench, PYTHONIOENCODING="ascii")
    assert done.returncode == 0
    assert done.stdout.splitlines()[0] == "\\u5dfb\\u51fa\\u3057 [bold]"


def test_help_teaches_the_commands(call):
    status, out, _ = call("--help")
    assert status == 0
    for word in ("assess", "contrast", "handover", "identify", "origin", "NAME.bench.toml", "Exit status"):
        assert word in out
    assert "fixed" not in out
    assert "bench procedure" in " ".join(call("handover", "--help")[1].split())


def test_version(call):
    status, out, _ = call("--version")
    assert status == 0
    assert re.fullmatch(r"gainbench \d+\.\d+\.\d+\n", out)


def test_a_reader_that_goes_away_is_no_error(bench):
    command = f"{sys.executable} -m gainbench_app.start assess label-unwinder.bench.toml | true"
    done = subprocess.run(["sh", "-c", command], cwd=bench, capture_output=True, text=True, check=False)
    assert done.stderr == ""
