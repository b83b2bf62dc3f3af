"""The console script: what opens a window, what is a command, and what happens where there is no display."""

from __future__ import annotations

import sys
from types import ModuleType

import pytest

from command_line import assert_refused, run_program
from gainbench_app import display, start


@pytest.fixture
def bench(tmp_path, demo_texts):
    (tmp_path / "drive.bench.toml").write_text(demo_texts["label-unwinder"], encoding="utf-8")
    return tmp_path


@pytest.fixture
def opened(monkeypatch, bench):
    """What the window was opened on; the window itself is left out."""
    paths = []
    window = ModuleType("gainbench_app.session")
    window.open_window = lambda path: paths.append(path) or 0
    monkeypatch.setitem(sys.modules, "gainbench_app.session", window)
    monkeypatch.setattr(display, "trouble", lambda: "")
    monkeypatch.chdir(bench)
    return paths


def test_a_sheet_opens_the_window(opened):
    assert start.main(["drive.bench.toml"]) == 0
    assert start.main([]) == 0
    assert opened == ["drive.bench.toml", None]


@pytest.mark.parametrize("name", ["assess", "origin", "-odd"])
def test_a_sheet_named_like_a_command_or_an_option_opens_after_two_dashes(opened, bench, name):
    (bench / name).write_bytes((bench / "drive.bench.toml").read_bytes())
    assert start.main(["--", name]) == 0
    assert opened == [name]


def test_a_command_does_not_open_the_window(opened, capfd):
    assert start.main(["assess", "drive.bench.toml"]) == 0
    assert opened == []
    assert capfd.readouterr().out.startswith("Label unwinder")


@pytest.mark.parametrize(
    ("words", "says"),
    [
        (["none.bench.toml"], "no such file"),
        (["."], "folder"),
        (["identity"], "no such command"),
        (["drive.bench.toml", "drive.bench.toml"], "one sheet at a time"),
        (["--contrast"], "--contrast"),
    ],
)
def test_what_cannot_be_opened_is_refused_before_the_window(opened, capfd, words, says):
    assert start.main(words) == 2
    out, err = capfd.readouterr()
    assert (out, opened) == ("", [])
    assert err.startswith("gainbench: ")
    assert says in err


def test_a_wrong_sheet_is_refused_before_the_window(opened, bench, capfd):
    text = (bench / "drive.bench.toml").read_text(encoding="utf-8")
    (bench / "wrong.bench.toml").write_text(text.replace('"0.60 ohm"', '"0.60 H"'), encoding="utf-8")
    assert start.main(["wrong.bench.toml"]) == 2
    assert opened == []
    assert "machine.resistance" in capfd.readouterr().err


@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="a display is told by its variable on Linux")
@pytest.mark.parametrize("words", [[], ["drive.bench.toml"]])
def test_without_a_display_the_assessment_is_printed_instead(bench, words):
    done = run_program(*words, folder=bench)
    assert done.returncode == 0
    assert done.stdout.startswith("Label unwinder\n")
    assert done.stderr.startswith("gainbench: no window can be opened: there is no display")
    assert done.stderr.count("\n") == 1


def test_without_a_display_a_missing_sheet_is_still_refused(bench):
    assert_refused(run_program("none.bench.toml", folder=bench), says="no such file")


def test_an_interrupt_is_quiet(monkeypatch, opened):
    def interrupted():
        raise KeyboardInterrupt

    monkeypatch.setattr(display, "trouble", interrupted)
    assert start.main([]) == 130
