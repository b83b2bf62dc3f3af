"""Every error the library raises on purpose.

::

    GainbenchError
    +-- UnitError        a text that is not a quantity of the dimension asked for
    +-- SheetError       a bench sheet that cannot be read, or a value in it that is refused
    +-- HandoverError    firmware files that cannot be written, or whose origin cannot be told
    +-- LogError         a log of the bench that cannot be read or used

Wrong physics is not an error: it is a finding of level ``breaks`` in the assessment. A message says
where, what, why, and how to put it right; it is shown to the user as it stands.
"""

from __future__ import annotations

from dataclasses import dataclass


class GainbenchError(Exception):
    """Root of the tree; ``str(error)`` is the one message for the user."""


class UnitError(GainbenchError):
    """A text is not a number with a unit of the dimension asked for.

    Parameters
    ----------
    reason : str
        Why, and how to put it right where that is known.
    example : str
        A text that would do, empty where there is none; it ends the message.
    """

    def __init__(self, reason: str, *, example: str = "") -> None:
        super().__init__(f'{reason} (for example "{example}")' if example else reason)
        self.reason = reason
        self.example = example


@dataclass(frozen=True, slots=True, kw_only=True)
class SheetProblem:
    """One refused entry of a sheet: its key's full path, the value, why, and an example that works."""

    path: str
    value: str
    reason: str
    example: str = ""

    def __str__(self) -> str:
        shown = f" = {self.value}" if self.value else ""
        text = f"{self.path}{shown}: {self.reason}"
        return f"{text} (for example {self.example})" if self.example else text


class SheetError(GainbenchError):
    """A bench sheet was refused.

    Parameters
    ----------
    message : str
        The whole message, file name included.
    problems : tuple of SheetProblem
        The refused entries one by one, for a window that marks each box; empty when the file itself is at fault.
    """

    def __init__(self, message: str, *, problems: tuple[SheetProblem, ...] = ()) -> None:
        super().__init__(message)
        self.problems = problems


class HandoverError(GainbenchError):
    """Firmware files cannot be written, or an origin cannot be told."""


class LogError(GainbenchError):
    """A log cannot be read, or cannot be used for what is asked; the message names the file."""
