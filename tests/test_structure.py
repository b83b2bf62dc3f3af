"""The house rules that a script can see: floors, mirrors, sizes, words, and what an import brings with it."""

from __future__ import annotations

import ast
import re
import subprocess
import sys
import tomllib

import pytest

from source_tree import HOMES, TREE, Module, modules, own_files

LARGEST = 500
"""Lines in one file, above which it holds more than one idea."""

TOP_LEVEL = {
    "README.md", "DEVELOPERS.md", "CHANGELOG.md", "LICENSE", "pyproject.toml", "uv.lock",
    "core", "app", "resources", "tests",
}  # fmt: skip

MODULES = modules()

WITHOUT_OWN_TEST: dict[str, str] = {
    "gainbench.tuning.outcome": "one dataclass, checked field by field by the methods that return it",
}
"""Modules that no test file is named for, each with where it is tested."""

WITHOUT_OWN_MODULE = {
    "tests/test_documents.py": "README and DEVELOPERS",
    "tests/test_quantities.py": "the helper that compares numbers",
    "tests/test_signatures.py": "every public name",
    "tests/test_structure.py": "the tree itself",
    "tests/core/test_oracle.py": "the reference model of the loops, by itself",
    "tests/core/test_against_oracle.py": "the library against that model",
    "tests/core/test_outside_engines.py": "the library against other general engines",
    "tests/core/test_outside_loops.py": "published loops, through many rooms",
    "tests/core/evidence/test_foreign_logs.py": "logs of many writers, from the file to the estimates",
    "tests/core/test_outside_motors.py": "published machines, trains and conventions, through many rooms",
    "tests/core/test_outside_plant.py": "published holds, sums and warm windings, through many rooms",
    "tests/core/test_hard_sheets.py": "the library against that model where drives are awkward",
    "tests/core/test_properties.py": "what must hold for any drive",
    "tests/core/test_sine_injection.py": "open loops against the time response",
}
"""Test files that no module is named for, each with what they are about."""


def mirrors_of(module: Module) -> list[str]:
    """Paths of the test files that mirror a module; the parts of a window's room are pressed together, by its name."""
    folder = TREE / "tests" / module.home / module.inside.parent
    name = module.path.parent.name if module.path.name == "__init__.py" else module.path.stem
    found = [folder / f"test_{name}.py"]
    if module.home == "app" and len(module.inside.parts) > 1:
        found.append(TREE / "tests" / "app" / f"test_{module.inside.parts[0]}.py")
    return [path.relative_to(TREE).as_posix() for path in found]


def test_every_module_has_its_test_file_and_every_test_file_its_module():
    present = {path.relative_to(TREE).as_posix() for path in (TREE / "tests").rglob("test_*.py")}
    with_code = [
        one for one in MODULES if any(isinstance(node, ast.FunctionDef | ast.ClassDef) for node in one.tree.body)
    ]
    untested = {one.name for one in with_code if not present & set(mirrors_of(one))}
    orphans = present - {path for one in MODULES for path in mirrors_of(one)}
    assert untested == WITHOUT_OWN_TEST.keys()
    assert orphans == WITHOUT_OWN_MODULE.keys()
    assert all([*WITHOUT_OWN_TEST.values(), *WITHOUT_OWN_MODULE.values()])


def test_tests_are_no_package():
    assert not list((TREE / "tests").rglob("__init__.py"))


def test_every_package_is_typed():
    for home, package in HOMES.items():
        assert (TREE / home / package / "py.typed").is_file()


def test_only_known_names_at_the_top():
    found = {path.relative_to(TREE).parts[0] for path in own_files()}
    assert {name for name in found if not name.startswith(".")} <= TOP_LEVEL


def test_every_floor_is_named_in_the_import_contract():
    settings = tomllib.loads((TREE / "pyproject.toml").read_text(encoding="utf-8"))
    contracts = {one["id"]: one for one in settings["tool"]["importlinter"]["contracts"]}
    named = {word.strip(" ()") for floor in contracts["floors"]["layers"] for word in floor.split("|")}
    rooms = {".".join(one.name.split(".")[:2]) for one in MODULES if one.home == "core" and "." in one.name}
    assert named == rooms | {"gainbench_app", "gainbench_resources"}


def test_a_file_holds_one_idea():
    sizes = {
        path.relative_to(TREE).as_posix(): len(path.read_text(encoding="utf-8").splitlines())
        for path in own_files()
        if path.suffix == ".py"
    }
    assert not {name: size for name, size in sizes.items() if size > LARGEST}


def test_no_unfinished_work_and_no_words_of_anothers_machine():
    # Written backwards, so that this file does not contain what it looks for.
    unfinished = re.compile(rf"\b({'ODOT'[::-1]}|{'EMXIF'[::-1]}|{'X' * 3}|{'rorrEdetnemelpmItoN'[::-1]})\b")
    # The sockets of X servers stand where they stand on every machine.
    homes = [f"/{name}/" for name in ("work", "root", "home", r"tmp(?!/\.X11-unix)", "Users")]
    elsewhere = re.compile(r"(?<![\w.*<}])(" + "|".join(homes) + rf")|\b({'erutcel'[::-1]}|{'tpircsnart'[::-1]})\b")
    found = []
    for path in own_files():
        try:
            text = path.read_text(encoding="utf-8")
        except UnicodeDecodeError:
            continue
        for number, line in enumerate(text.splitlines(), start=1):
            if unfinished.search(line) or elsewhere.search(line):
                found.append(f"{path.relative_to(TREE)}:{number}: {line.strip()[:80]}")
    assert not found


def test_what_is_slow_or_of_another_floor_is_not_imported_at_the_top():
    kernels = compiled()
    assert kernels
    found = {}
    for module in MODULES:
        slow = {"control", "matplotlib", "pint", "jinja2", "polars"}
        if not module.name.startswith("gainbench.kernels."):
            slow |= {"numba", *kernels}
        if module.home != "app":
            slow |= {"PySide6", "pyqtgraph", "gainbench_app"}
        found[module.name] = {name for name in imported_at_the_top(module) if covers(slow, name)}
    assert not {name: brought for name, brought in found.items() if brought}


def covers(packages: set[str], name: str) -> bool:
    return any(f"{name}.".startswith(f"{one}.") for one in packages)


def compiled() -> set[str]:
    """The kernel modules that load numba when they are imported; the records they share do not."""
    kernels = {one.name: one for one in MODULES if one.name.startswith("gainbench.kernels.")}
    found = {name for name, one in kernels.items() if "numba" in imported_at_the_top(one)}
    while more := {name for name, one in kernels.items() if found & imported_at_the_top(one)} - found:
        found |= more
    return found


def imported_at_the_top(module: Module) -> set[str]:
    return {
        name
        for node in top_level(module.tree)
        for name in ([one.name for one in node.names] if isinstance(node, ast.Import) else [node.module or ""])
    }


def top_level(tree: ast.Module) -> list[ast.Import | ast.ImportFrom]:
    """Imports that run when the module is imported: those of ``if TYPE_CHECKING`` do not."""
    found: list[ast.Import | ast.ImportFrom] = []
    waiting: list[ast.stmt] = list(tree.body)
    while waiting:
        node = waiting.pop()
        if isinstance(node, ast.Import | ast.ImportFrom):
            found.append(node)
        elif isinstance(node, ast.If) and "TYPE_CHECKING" not in ast.unparse(node.test):
            waiting += [*node.body, *node.orelse]
        elif isinstance(node, ast.Try):
            waiting += [*node.body, *node.orelse, *node.finalbody]
    return found


def test_no_module_keeps_what_changes():
    assert not [one.name for one in MODULES if any(isinstance(node, ast.Global) for node in ast.walk(one.tree))]
    # An empty container at the top waits for someone to fill it: a registry or a cache by hand.
    empty = {"[]", "{}", "set()", "dict()", "list()", "defaultdict(list)", "defaultdict(dict)"}
    assert not [
        f"{one.name}: {ast.unparse(node)}"
        for one in MODULES
        for node in one.tree.body
        if isinstance(node, ast.Assign | ast.AnnAssign) and node.value and ast.unparse(node.value) in empty
    ]


@pytest.mark.parametrize(
    ("imported", "never"),
    [
        ("gainbench", {"numpy", "pint"}),
        ("gainbench.assess", {"numba", "pint", "tomlkit", "pydantic", "typer", "rich", "jinja2"}),
        ("gainbench.sheetfile", {"numba", "pint", "typer", "rich", "jinja2"}),
        ("gainbench.cli", {"numba"}),
        ("gainbench_app.start", {"numba", "numpy"}),
    ],
)
def test_what_an_import_brings_with_it(imported, never):
    never = never | {"PySide6", "pyqtgraph", "control", "matplotlib"}
    script = f"import sys, {imported}; print(*sorted({{name.split('.')[0] for name in sys.modules}}))"
    loaded = subprocess.run([sys.executable, "-c", script], check=True, capture_output=True, text=True).stdout.split()
    assert imported.split(".")[0] in loaded
    assert not never & set(loaded)
