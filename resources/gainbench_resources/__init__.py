"""Demo sheets and logs, the guide, templates and icons, as package data."""

from __future__ import annotations

from importlib.resources import files
from importlib.resources.abc import Traversable

_SUFFIX = ".bench.toml"
_PAGE = ".md"


def demo_sheet_names() -> tuple[str, ...]:
    """Names of the demo sheets, without ``.bench.toml``; the one that opens by default comes first."""
    names = sorted(one.name.removesuffix(_SUFFIX) for one in _sheets().iterdir() if one.name.endswith(_SUFFIX))
    return tuple(sorted(names, key=lambda name: name != "label-unwinder"))


def demo_sheet(name: str) -> Traversable:
    """The file of a demo sheet.

    Parameters
    ----------
    name : str
        One of :func:`demo_sheet_names`.

    Returns
    -------
    Traversable
        Its place in the package; ``read_text(encoding="utf-8")`` gives its text.

    Raises
    ------
    KeyError
        If there is no demo sheet of that name.
    """
    if name not in demo_sheet_names():
        raise KeyError(name)
    return _sheets() / f"{name}{_SUFFIX}"


def demo_log(name: str) -> Traversable:
    """The file of a demo log, ``label-unwinder-driven.csv``; invented data."""
    return files(__name__) / "logs" / name


def guide_pages() -> tuple[str, ...]:
    """Names of the guide's pages, without ``.md``, in no particular order."""
    return tuple(sorted(one.name.removesuffix(_PAGE) for one in _guide().iterdir() if one.name.endswith(_PAGE)))


def guide_page(name: str) -> Traversable:
    """A page of the guide as markdown.

    Parameters
    ----------
    name : str
        One of :func:`guide_pages`.

    Returns
    -------
    Traversable
        Its place in the package.

    Raises
    ------
    KeyError
        If there is no page of that name.
    """
    if name not in guide_pages():
        raise KeyError(name)
    return _guide() / f"{name}{_PAGE}"


def recipe(experiment: str) -> Traversable:
    """The guide's recipe for an experiment as markdown, by the word that the sheet has for it, ``locked-rotor``."""
    return _guide() / f"{experiment}{_PAGE}"


def template(name: str) -> Traversable:
    """The file of a template; ``read_text(encoding="utf-8")`` gives its text."""
    return files(__name__) / "templates" / name


def _guide() -> Traversable:
    return files(__name__) / "guide"


def _sheets() -> Traversable:
    return files(__name__) / "sheets"
