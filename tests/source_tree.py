"""The project's own files, as the tests of its structure read them: parsed, never imported."""

from __future__ import annotations

import ast
import subprocess
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from pathlib import Path

TREE = Path(__file__).resolve().parents[1]
HOMES = {"core": "gainbench", "app": "gainbench_app", "resources": "gainbench_resources"}
"""Folder of the tree and the package it holds."""

CACHES = (".pytest_cache", ".mypy_cache", ".ruff_cache", ".hypothesis", ".import_linter_cache")


@dataclass(frozen=True, slots=True, kw_only=True)
class Module:
    """One Python file of a package."""

    path: Path
    home: str
    """``core``, ``app`` or ``resources``."""
    name: str
    """Dotted, ``gainbench.model.aims``; a package's own file has the package's name."""

    @property
    def tree(self) -> ast.Module:
        return parsed(self.path)

    @property
    def inside(self) -> Path:
        """Its place inside its package, ``model/aims.py``."""
        return self.path.relative_to(TREE / self.home / HOMES[self.home])


@dataclass(frozen=True, slots=True, kw_only=True)
class Function:
    """One function or method of a module, with the class it stands in."""

    module: Module
    owner: str
    """Name of the class, empty for a function of the module."""
    node: ast.FunctionDef | ast.AsyncFunctionDef

    @property
    def label(self) -> str:
        """Where it is, for a message."""
        return ".".join(part for part in (self.module.name, self.owner, self.node.name) if part)

    @property
    def decorators(self) -> set[str]:
        return {ast.unparse(one) for one in self.node.decorator_list}

    @property
    def is_command(self) -> bool:
        """Whether people call it from a shell, where arguments have a form of their own."""
        return any(".command(" in one for one in self.decorators)

    @property
    def positional(self) -> list[ast.arg]:
        """Arguments that may be given by place, ``self`` and ``cls`` left out."""
        given = [*self.node.args.posonlyargs, *self.node.args.args]
        bound = bool(self.owner) and "staticmethod" not in self.decorators
        return given[1:] if bound else given

    @property
    def arguments(self) -> list[ast.arg]:
        return [*self.positional, *self.node.args.kwonlyargs]


@cache
def parsed(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"), filename=str(path))


def modules(*homes: str) -> list[Module]:
    """Every Python file of the packages in those folders, in order."""
    found = []
    for home in homes or tuple(HOMES):
        root = TREE / home / HOMES[home]
        for path in sorted(root.rglob("*.py")):
            parts = [HOMES[home], *path.relative_to(root).with_suffix("").parts]
            name = ".".join(parts[:-1] if parts[-1] == "__init__" else parts)
            found.append(Module(path=path, home=home, name=name))
    return found


def functions(module: Module) -> Iterator[Function]:
    """The functions of a module and the methods of its classes, nested ones left out."""
    for node in module.tree.body:
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            yield Function(module=module, owner="", node=node)
        elif isinstance(node, ast.ClassDef):
            for inner in node.body:
                if isinstance(inner, ast.FunctionDef | ast.AsyncFunctionDef):
                    yield Function(module=module, owner=node.name, node=inner)


def front_door(package: Module) -> frozenset[str]:
    """The names in the ``__all__`` of a package's own file; none where it has none."""
    for node in package.tree.body:
        if isinstance(node, ast.Assign) and ast.unparse(node.targets[0]) == "__all__":
            return frozenset(ast.literal_eval(node.value))
    return frozenset()


def public_functions(home: str) -> Iterator[Function]:
    """What others may call: all named functions and methods of a plain module, of a room those at its front door."""
    found = modules(home)
    doors = {one.name: front_door(one) for one in found if one.path.name == "__init__.py"}
    for module in found:
        room = ".".join(module.name.split(".")[:2])
        for one in functions(module):
            name = one.owner or one.node.name
            shut = room in doors and name not in doors[room]
            if not (shut or name.startswith("_") or one.node.name.startswith("_")):
                yield one


@cache
def own_files() -> tuple[Path, ...]:
    """Every file that belongs to the project: what git tracks and what it would add, ignored ones left out."""
    listing = subprocess.run(
        ["git", "-C", str(TREE), "ls-files", "-z", "--cached", "--others", "--exclude-standard"],
        check=False,
        capture_output=True,
        text=True,
    )
    if listing.returncode == 0:
        return tuple(path for name in listing.stdout.split("\0") if name and (path := TREE / name).is_file())
    # An archive without its history, or a clone that git does not trust on this machine.
    passed = {".git", ".venv", "__pycache__", "build", "dist", *CACHES}
    found = (path for path in sorted(TREE.rglob("*")) if path.is_file())
    return tuple(path for path in found if not passed & set(path.relative_to(TREE).parts))
