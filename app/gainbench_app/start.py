"""The console script: a command goes to :mod:`gainbench.cli`, anything else is a sheet to open in the window."""

from __future__ import annotations

import sys
from collections.abc import Sequence
from pathlib import Path

from gainbench.errors import SheetError


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the program.

    Parameters
    ----------
    arguments : sequence of str, optional
        Without the program's name; by default those of the process.

    Returns
    -------
    int
        Exit status: 0 done and nothing breaks, 1 done but something breaks, 2 refused.
    """
    words = list(sys.argv[1:] if arguments is None else arguments)
    from gainbench import cli

    try:
        if words and words[0] != "--" and (words[0] in cli.COMMANDS or words[0].startswith("-")):
            return cli.run(words)
        return _open(words[1:] if words[:1] == ["--"] else words)
    except KeyboardInterrupt:
        return cli.INTERRUPTED


def _open(words: list[str]) -> int:
    """Open the window on a sheet, or print the assessment where there can be no window."""
    from gainbench import cli
    from gainbench.sheetfile import parse_sheet, read_sheet

    path = words[0] if words else None
    if path is not None and _is_no_sheet(path):
        commands = ", ".join(cli.COMMANDS)
        return cli.refuse(
            f"{path}: there is no such command and no such file; the commands are {commands}; a bench sheet is a "
            "file (for example motor.bench.toml)"
        )
    if len(words) > 1:
        return cli.refuse(f"{words[1]}: the window opens one sheet at a time; see gainbench --help")
    try:
        document = parse_sheet(*_demo()) if path is None else read_sheet(path)
    except SheetError as error:
        return cli.refuse(str(error))

    from gainbench_app.display import trouble

    reason = trouble()
    if not reason:
        from gainbench_app.session import open_window

        return open_window(path)
    sys.stderr.write(f"gainbench: no window can be opened: {reason}. Here is the assessment instead.\n")
    return cli.show_sheet(document)


def _is_no_sheet(word: str) -> bool:
    """Whether a word looks like a command that there is not."""
    return word.replace("-", "").isalnum() and not Path(word).exists()


def _demo() -> tuple[str, str]:
    """Text and file name of the sheet that opens without one."""
    from gainbench_resources import demo_sheet, demo_sheet_names

    file = demo_sheet(demo_sheet_names()[0])
    return file.read_text(encoding="utf-8"), file.name


if __name__ == "__main__":
    sys.exit(main())
