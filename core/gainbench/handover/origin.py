"""What a firmware file says of where it came from, and how it differs from what a sheet would give."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

from gainbench.errors import HandoverError
from gainbench.handover.comments import code_lines, comment_text
from gainbench.handover.header import DESIGNED, Header

MAX_BYTES = 1_000_000
"""The largest file that is looked into: a header has a hundredth of it."""
_ENTRY = re.compile(r"^ \*   (Digest|Prefix|Tuning|Sheet): {1,2}(.+)$", re.MULTILINE)
_DIGEST = re.compile(r"[0-9a-f]{64}")
_DEFINE = re.compile(r"#define (\w+) (\S.*)", re.ASCII)
_KEPT = "kept, "


@dataclass(frozen=True, slots=True, kw_only=True)
class Origin:
    """The origin that a firmware file carries."""

    digest: str
    """Of the sheet it was written from."""
    prefix: str
    tuning: str
    """As the file words it."""
    sheet_name: str
    """As the file words it."""
    values: dict[str, str]
    """Each macro without the prefix, and what stands behind it."""

    @property
    def designed(self) -> bool:
        """True for gains that the sheet's aims gave, False for a kept tuning."""
        return self.tuning == DESIGNED

    def is_kept(self, name: str) -> bool:
        """Whether a kept tuning of that name is the one."""
        return self.tuning == comment_text(f"{_KEPT}{name}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Difference:
    """One macro that is not the same in a file and in what a sheet gives."""

    name: str
    in_file: str | None
    """None where the file does not have it."""
    in_sheet: str | None
    """None where the sheet does not give it."""


def read_origin(path: str | Path) -> Origin:
    """Read where a firmware file came from.

    Parameters
    ----------
    path : str or Path
        A header as :func:`gainbench.handover.write_handover` writes it.

    Returns
    -------
    Origin
        What its head and its macros say.

    Raises
    ------
    HandoverError
        If it cannot be read, or does not tell its origin.
    """
    path = Path(path)
    name = path.name or str(path)
    try:
        if not path.is_file():
            what = "is not a file" if path.exists() else f"does not exist; check the path {str(path)!a}"
            raise HandoverError(f"{name}: {what}")
        with path.open("rb") as file:
            content = file.read(MAX_BYTES + 1)
    except OSError as error:
        raise HandoverError(f"{name}: cannot be read: {error.strerror or error}") from None
    except ValueError:
        raise HandoverError(f"{name!a}: this is not the name of a file") from None
    if len(content) > MAX_BYTES:
        raise HandoverError(f"{name}: has more than {MAX_BYTES} bytes; a header written by Gainbench is far smaller")
    # A version control system may have changed the line ends, an editor may have added other letters.
    text = content.decode("utf-8", errors="replace").replace("\r\n", "\n")
    found: dict[str, str] = {}
    for match in _ENTRY.finditer(text):
        found.setdefault(match[1], match[2])
    missing = [key for key in ("Digest", "Prefix", "Tuning", "Sheet") if key not in found]
    if missing or _DIGEST.fullmatch(found["Digest"]) is None:
        raise HandoverError(
            f"{name}: does not tell its origin: a header written by Gainbench has a line with its digest in its head"
        )
    start = f"{found['Prefix']}_"
    macros = (_DEFINE.fullmatch(line) for line in code_lines(text))
    return Origin(
        digest=found["Digest"],
        prefix=found["Prefix"],
        tuning=found["Tuning"],
        sheet_name=found["Sheet"],
        values={match[1].removeprefix(start): match[2] for match in macros if match is not None},
    )


def differences(origin: Origin, header: Header) -> tuple[Difference, ...]:
    """Hold a file's macros against those that a sheet gives.

    Parameters
    ----------
    origin : Origin
        Of the file.
    header : Header
        What the sheet gives.

    Returns
    -------
    tuple of Difference
        In the order of the header, then what only the file has; empty where they are the same.
    """
    names = [*header.values, *(name for name in origin.values if name not in header.values)]
    return tuple(
        Difference(name=name, in_file=origin.values.get(name), in_sheet=header.values.get(name))
        for name in names
        if origin.values.get(name) != header.values.get(name)
    )
