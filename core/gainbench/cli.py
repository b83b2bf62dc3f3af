"""The commands: ``assess``, ``contrast``, ``handover``, ``identify`` and ``origin``.

Exit status: 0 done and nothing breaks; 1 done, something breaks; 2 refused, with one message on standard error and
nothing written.
"""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Sequence
from importlib.metadata import version
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from gainbench.contrast_report import contrast_json, print_contrast
from gainbench.errors import GainbenchError, HandoverError
from gainbench.handover import (
    Header,
    Origin,
    Source,
    differences,
    kept_sheet,
    read_origin,
    write_handover,
    write_header,
)
from gainbench.identify_report import identification_json, print_identification
from gainbench.report import assessment_json, breaks, print_assessment
from gainbench.results import Level
from gainbench.sheetfile import SheetDocument, digest, read_sheet, write_sheet

if TYPE_CHECKING:
    from rich.console import Console

FLOAT = "float"
COMMANDS = ("assess", "contrast", "handover", "identify", "origin")
DONE, BREAKS, REFUSED, INTERRUPTED = 0, 1, 2, 130
_PLAIN_WIDTH = 100
"""Of text that goes to a file or another program."""
_MOST_DIFFERENCES = 12
# Newer versions of typer carry a click of their own, so the root of its errors is found from a class that both export.
_COMMAND_LINE_ERROR: type[Exception] = next(
    one for one in typer.BadParameter.__mro__ if issubclass(one, Exception) and one.__name__ == "ClickException"
)


_HELP = """Current and speed loop gains for DC and permanent-magnet drives, checked on the sampled loops that run them.

gainbench [SHEET] opens the window on a bench sheet, without one on a demo. A bench sheet is one TOML file,
NAME.bench.toml: the motor, the load, the power stage, what is asked of both loops, and a test to compute.

Exit status: 0 done and nothing breaks, 1 done but something breaks, 2 refused."""

app = typer.Typer(
    name="gainbench",
    help=_HELP,
    add_completion=False,
    rich_markup_mode="markdown",
    no_args_is_help=True,
    pretty_exceptions_enable=False,
    context_settings={"help_option_names": ["-h", "--help"]},
)

SheetArgument = Annotated[
    str, typer.Argument(metavar="SHEET", help="A bench sheet, NAME.bench.toml.", show_default=False)
]


def _version(wanted: bool) -> None:
    if wanted:
        sys.stdout.write(f"gainbench {version('gainbench')}\n")
        raise typer.Exit


@app.callback()
def _root(
    _: Annotated[
        bool, typer.Option("--version", help="Say which version this is.", callback=_version, is_eager=True)
    ] = False,
) -> None:
    return


@app.command("assess")
def assess_command(
    sheet: SheetArgument,
    as_json: Annotated[
        bool,
        typer.Option("--json", help="Print JSON for scripts: SI units, full precision, null for what there is not."),
    ] = False,
) -> int:
    """Print gains, margins, response and findings of a sheet, and how to try them on the bench.

    Gains are designed for the sampled loops with their delays, so the margins printed are those of the firmware's own
    loops. Findings say what holds, what is thin and what breaks, why, and what to try next.
    """
    return show_sheet(read_sheet(sheet), as_json=as_json)


@app.command("contrast")
def contrast_command(
    sheets: Annotated[list[str], typer.Argument(metavar="SHEET...", help="Bench sheets.", show_default=False)],
    as_json: Annotated[
        bool,
        typer.Option("--json", help="Print JSON for scripts: each tuning's assessment, and its differences."),
    ] = False,
) -> int:
    """Lay tunings side by side: what each sheet's aims give, and what lies on its shelf.

    Every kept tuning is assessed as gains by hand on its own sheet. All figures are held against the first tuning, the
    one that the first sheet's aims give. Exit status: 1 where something breaks with any of them.
    """
    documents = [read_sheet(one) for one in sheets]
    from gainbench.contrast import contrast, sheet_tunings

    names = [one.name for one in documents]
    found = contrast(
        [
            tuning
            for path, document in zip(sheets, documents, strict=True)
            # Sheets of one name in two folders are told apart by their paths.
            for tuning in sheet_tunings(
                document.sheet, document.name if names.count(document.name) == 1 else _printable(path)
            )
        ]
    )
    if as_json:
        sys.stdout.write(json.dumps(contrast_json(found), indent=2, allow_nan=False) + "\n")
    else:
        print_contrast(found, _console())
    return BREAKS if found.breaks else DONE


@app.command("handover")
def handover_command(
    sheet: SheetArgument,
    to: Annotated[
        str,
        typer.Option("--to", metavar="DIR", help="Folder for the files. It is created if its parent is there."),
    ],
    arithmetic: Annotated[
        str, typer.Option(metavar="float", help="What the firmware computes in: float, single precision.")
    ] = FLOAT,
    prefix: Annotated[
        str | None,
        typer.Option(
            metavar="NAME", help="Before every macro, as AXIS1 in AXIS1_CURRENT_KP. By default from the title."
        ),
    ] = None,
    kept: Annotated[
        str | None,
        typer.Option(metavar="NAME", help="Write the kept tuning of that name instead of what the aims give."),
    ] = None,
    replace: Annotated[bool, typer.Option("--replace", help="Replace files that are there already.")] = False,
) -> int:
    """Write the C header of a sheet's gains.

    The header holds the gains that were assessed, the rates, limits and rules they hold for, the figures, a bench
    procedure and the cautions: read them before the first run. Nothing is written while a target cannot be met or a
    loop is unstable. An existing file is left alone unless --replace is given.
    """
    if arithmetic != FLOAT:
        raise HandoverError(f"--arithmetic {arithmetic}: this is not known; firmware files are written for {FLOAT}")
    document = read_sheet(sheet)
    from gainbench.assess import assess

    try:
        assessment = assess(document.sheet if kept is None else kept_sheet(document.sheet, kept))
    except HandoverError as error:
        raise HandoverError(f"{document.name}: {error}") from None
    source = Source(sheet_name=document.name, digest=digest(document), tuning=kept)
    path = write_handover(assessment, to, source=source, prefix=prefix, replace=replace)
    lines = [f"written: {path}"]
    lines += [f"breaks: {one.text}" for one in assessment.findings if one.level is Level.BREAKS]
    lines.append("Read the head of the file before the first run: it holds a bench procedure and the cautions.")
    _say(lines)
    return BREAKS if breaks(assessment) else DONE


@app.command("identify")
def identify_command(
    sheet: SheetArgument,
    as_json: Annotated[
        bool, typer.Option("--json", help="Print JSON for scripts: SI units, full precision, absent where not told.")
    ] = False,
    accept: Annotated[
        bool, typer.Option("--accept", help="Write the estimates with their tolerances back into the sheet.")
    ] = False,
) -> int:
    """Identify motor and load from the logs that a sheet names under [[evidence]].

    Every log is fitted by its experiment, and what they tell is put together. Each estimate has two intervals: of this
    fit, with its coloured residuals, and with the spread between runs. What a log cannot tell is left out and named.
    Logs are only read. Exit status: 1 where nothing at all could be told.
    """
    from gainbench.evidence.accept import accept as accepted
    from gainbench.evidence.identify import identify
    from gainbench.evidence.reading import read_log

    document = read_sheet(sheet)
    folder = Path(sheet).parent
    found = identify(document.sheet, [read_log(folder / one.log, one.columns) for one in document.sheet.evidence])
    if as_json:
        sys.stdout.write(json.dumps(identification_json(found), indent=2, allow_nan=False) + "\n")
    else:
        print_identification(found, _console())
    if accept and found.estimates:
        values = accepted(document.sheet, found, typed=document.typed).values
        write_sheet(document.with_values(values), sheet)
        if not as_json:
            _say(["", f"written into {document.name}:", *(f"  {path} = {text}" for path, text in values.items())])
    told = bool(found.estimates) or any(one.fit_percent is not None for one in found.runs)
    return DONE if told else BREAKS


@app.command("origin")
def origin_command(
    file: Annotated[str, typer.Argument(metavar="FILE", help="A header that Gainbench wrote.", show_default=False)],
    sheets: Annotated[
        list[str], typer.Argument(metavar="SHEET...", help="Bench sheets it may have come from.", show_default=False)
    ],
) -> int:
    """Tell which sheet and which tuning a header came from.

    A header carries a digest of all that its sheet said. Where a sheet still says the same, it is named, with the
    tuning, and every number in the file is held against it. Where none does, the numbers that differ are listed.
    Exit status: 0 where the file is exactly what one of the sheets gives, 1 where not.
    """
    origin = read_origin(file)
    documents = [read_sheet(one) for one in sheets]
    _say([f"{os.path.basename(file)} was written from {origin.sheet_name}, tuning {origin.tuning}."])
    same = [one for one in documents if digest(one) == origin.digest]
    if not same:
        _say(["No sheet given here says the same as that one did."])
    found = [_compare(origin, document, same=bool(same)) for document in same or documents]
    return DONE if same and any(found) else BREAKS


def _compare(origin: Origin, document: SheetDocument, *, same: bool) -> bool:
    """Say how a file differs from what a sheet gives; True where it does not."""
    try:
        gaps = differences(origin, _header_as(origin, document))
    except HandoverError as error:
        _say([f"{document.name}: gives no such file now: {str(error).removeprefix(f'{document.name}: ')}."])
        return False
    if not gaps:
        words = "is where it came from, and every number is as written" if same else "gives the same numbers"
        _say([f"{document.name}: {words}."])
        return True
    start = "is where it came from, but the file was changed since" if same else "gives other numbers"
    _say([f"{document.name}: {start}:"])
    _say(
        [
            f"  {one.name}: {one.in_file or 'missing'} in the file, {one.in_sheet or 'none'} from the sheet"
            for one in gaps[:_MOST_DIFFERENCES]
        ]
    )
    if len(gaps) > _MOST_DIFFERENCES:
        _say([f"  and {len(gaps) - _MOST_DIFFERENCES} more"])
    return False


def _header_as(origin: Origin, document: SheetDocument) -> Header:
    """The header that a sheet gives for the tuning that a file came from."""
    from gainbench.assess import assess

    sheet, name = document.sheet, None
    if not origin.designed:
        name = next((one.name for one in sheet.kept if origin.is_kept(one.name)), None)
        if name is None:
            raise HandoverError("its shelf does not hold that tuning")
        sheet = kept_sheet(sheet, name)
    source = Source(sheet_name=document.name, digest=digest(document), tuning=name)
    return write_header(assess(sheet), source, prefix=origin.prefix)


def show_sheet(document: SheetDocument, *, as_json: bool = False) -> int:
    """Print the assessment of a sheet on standard output.

    Parameters
    ----------
    document : SheetDocument
        The sheet.
    as_json : bool
        True prints JSON.

    Returns
    -------
    int
        Exit status: 1 where something breaks, else 0.
    """
    from gainbench.assess import assess

    assessment = assess(document.sheet)
    if as_json:
        sys.stdout.write(json.dumps(assessment_json(assessment), indent=2, allow_nan=False) + "\n")
    else:
        print_assessment(assessment, _console())
    return BREAKS if breaks(assessment) else DONE


def refuse(message: str) -> int:
    """Say on standard error why nothing is done, and give the exit status for it."""
    sys.stderr.write(f"gainbench: {_printable(message)}\n")
    return REFUSED


def run(arguments: Sequence[str]) -> int:
    """Run one command line.

    Parameters
    ----------
    arguments : sequence of str
        Without the program's name.

    Returns
    -------
    int
        Exit status: 0, 1 or 2 as above; 130 where it was interrupted.
    """
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(errors="backslashreplace")
    _say_if_slow(arguments)
    try:
        status = typer.main.get_command(app).main(list(arguments), prog_name="gainbench", standalone_mode=False)
        sys.stdout.flush()
    except typer.Abort:
        return INTERRUPTED
    except GainbenchError as error:
        return refuse(str(error))
    except _COMMAND_LINE_ERROR as error:
        message = str(getattr(error, "format_message", error.__str__)())
        return refuse(f"{message.rstrip('.')}; see gainbench --help")
    except BrokenPipeError:
        # The reader has gone; what is left in the buffer has nowhere to go either.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return BREAKS
    return status if isinstance(status, int) else DONE


def _say_if_slow(arguments: Sequence[str]) -> None:
    """Tell someone who waits at a terminal what for, once per installation."""
    if not sys.stderr.isatty() or {"-h", "--help", "--version"} & set(arguments):
        return
    if arguments[:1] == ["identify"]:
        from gainbench.evidence.identify import is_compiled
    else:
        from gainbench.assess import is_compiled
    if not is_compiled():
        sys.stderr.write("gainbench: compiling for this machine, once: about a minute\n")


def _console() -> Console:
    from rich.console import Console

    console = Console(highlight=False, markup=False, emoji=False)
    if not console.is_terminal:
        console.width = _PLAIN_WIDTH
    return console


def _say(lines: Sequence[str]) -> None:
    for line in lines:
        sys.stdout.write(f"{_printable(line)}\n")


def _printable(text: str) -> str:
    """A text that cannot steer the terminal it is printed on."""
    return "".join(one if one.isprintable() or one == "\n" else f"\\u{ord(one):04x}" for one in text)
