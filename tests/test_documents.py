"""The documents of the house say what is so: commands, example sheet, names, worked examples."""

from __future__ import annotations

import doctest
import importlib
import os
import re
import subprocess
import sys
import tomllib

import pytest

from gainbench.sheetfile import parse_sheet
from source_tree import TREE, modules

README = (TREE / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (TREE / "DEVELOPERS.md").read_text(encoding="utf-8")


def blocks(text: str, language: str) -> list[str]:
    return re.findall(rf"^```{language}\n(.*?)^```$", text, flags=re.MULTILINE | re.DOTALL)


def test_readme_has_one_line_to_run_it_and_one_to_test_it():
    lines = [line for block in blocks(README, "sh") for line in block.splitlines()]
    assert len(lines) == 2
    run, test = lines
    assert all(line.startswith("python3 -m venv .venv && ") for line in lines)
    assert run.endswith(".venv/bin/gainbench")
    assert "pytest" in test
    assert "pytest" not in run


def test_readmes_sheet_is_a_sheet():
    text, logs = blocks(README, "toml")
    assert parse_sheet(text, "readme").sheet.title == "Label unwinder"
    (log,) = parse_sheet(text + logs, "readme").sheet.evidence
    assert log.log == "run-07.csv"


def test_the_console_script_of_readme_is_the_projects():
    settings = tomllib.loads((TREE / "pyproject.toml").read_text(encoding="utf-8"))
    assert settings["project"]["scripts"] == {"gainbench": "gainbench_app.start:main"}
    assert {"test"} <= settings["project"]["optional-dependencies"].keys()


def test_the_commands_of_readme_are_the_commands_there_are():
    told = set(re.findall(r"^\| `gainbench (\w+) ", README, flags=re.MULTILINE))
    assert told
    script = "from gainbench_app.start import main; main()"
    helped = subprocess.run([sys.executable, "-c", script, "--help"], check=True, capture_output=True, text=True).stdout
    for command in told:
        assert re.search(rf"\b{command}\b", helped)


def test_ci_runs_readmes_own_line():
    script = TREE / ".ci" / "run"
    assert os.access(script, os.X_OK)
    text = script.read_text(encoding="utf-8")
    (pattern,) = re.findall(r"grep -E '([^']+)' README\.md", text)
    found = [line for line in README.splitlines() if re.search(pattern, line)]
    assert len(found) == 1
    assert found[0] in blocks(README, "sh")[1]
    assert "pip install" not in text
    assert "pytest" not in text.replace(pattern, "")


def test_local_links_lead_somewhere():
    for name, text in (("README.md", README), ("DEVELOPERS.md", DEVELOPERS)):
        for target in re.findall(r"\]\((?!https?:)([^)#]+)\)", text):
            assert (TREE / target).exists(), f"{name}: {target}"


def test_every_name_on_the_notation_page_is_a_name_in_the_code():
    section = DEVELOPERS.split("## Notation", 1)[1].split("\n## ", 1)[0]
    names = re.findall(r"`([A-Z]\w+)\.(\w+)`", section)
    assert len(names) > 25
    homes = [importlib.import_module(f"gainbench.{room}") for room in ("plant", "model", "results")]
    for owner, field in names:
        (found,) = {getattr(home, owner) for home in homes if hasattr(home, owner)}
        assert hasattr(found, field), f"{owner}.{field}"


def test_every_floor_on_the_map_exists_and_every_room_is_on_the_map():
    section = DEVELOPERS.split("## The house", 1)[1].split("\n## ", 1)[0]
    told = set()
    for row in re.findall(r"^\| (`.*?) \|", section, flags=re.MULTILINE):
        told |= {name.removeprefix("gainbench.") for name in re.findall(r"`([\w.]+)`", row)}
    rooms = {one.name.split(".")[1] for one in modules("core") if "." in one.name}
    assert told == rooms | {"gainbench_app"}


@pytest.mark.parametrize("path", sorted(set(re.findall(r"`(gainbench/[\w/]+(?:\.py)?)`", DEVELOPERS))))
def test_files_named_for_developers_exist(path):
    assert (TREE / "core" / path).exists()


def test_the_worked_examples_for_developers_come_out():
    results = doctest.testfile(os.fspath(TREE / "DEVELOPERS.md"), module_relative=False)
    assert results.attempted > 5
    assert results.failed == 0


WITH_EXAMPLES = [one for one in modules("core", "resources") if ">>>" in one.path.read_text(encoding="utf-8")]


@pytest.mark.parametrize("name", [one.name for one in WITH_EXAMPLES])
def test_the_examples_in_docstrings_come_out(name):
    results = doctest.testmod(importlib.import_module(name))
    assert results.attempted > 0
    assert results.failed == 0
