"""The C header of an assessment, as text."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from importlib.metadata import version
from typing import TYPE_CHECKING

from gainbench.errors import HandoverError
from gainbench.handover import cautions
from gainbench.handover.bench import bench_procedure
from gainbench.handover.comments import WIDTH, comment_lines, comment_text, strange_code
from gainbench.handover.figures import Row, as_sentence, loop_rows, response_rows, step_rows
from gainbench.handover.names import checked_prefix, header_name, require_distinct, title_prefix
from gainbench.handover.symbols import Group, Symbol, groups
from gainbench.model import MachineKind
from gainbench.results import Finding, Level

if TYPE_CHECKING:
    from gainbench.assess import Assessment

DESIGNED = "designed by the aims of the sheet"
"""What stands for the tuning where it is not a kept one."""
_TEMPLATE = "gains.h.j2"


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """Where a header's gains come from."""

    sheet_name: str
    """The sheet's file name."""
    digest: str
    """Of all that the sheet says, as :func:`gainbench.sheetfile.digest`."""
    tuning: str | None = None
    """Name of the kept tuning; None for the gains that the sheet's aims give."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Header:
    """A header, before it is a file."""

    name: str
    """``label_unwinder_gains.h``."""
    prefix: str
    text: str
    """ASCII, lines ending in a line feed."""
    values: dict[str, str]
    """Each macro without its prefix, and its literal."""


def refusal(assessment: Assessment) -> str:
    """Why nothing is exported from an assessment.

    Parameters
    ----------
    assessment : Assessment
        Any.

    Returns
    -------
    str
        A sentence without a full stop; empty where both loops have gains and are stable.
    """
    name = _loop_at_fault(assessment)
    if not name:
        return ""
    finding = _finding_on(assessment, name)
    what = f"the {name} loop has no stable gains" if finding is None else finding.title
    return f"nothing is exported: {what[0].lower()}{what[1:]}"


def _loop_at_fault(assessment: Assessment) -> str:
    """The first loop without gains or not stable; empty where both are well."""
    for name, loop in (("current", assessment.current), ("speed", assessment.speed)):
        if loop.gains is None or loop.figures is None or not loop.figures.stable:
            return name
    return ""


def _finding_on(assessment: Assessment, name: str) -> Finding | None:
    """The finding that says why a loop is at fault."""
    breaking = (one for one in assessment.findings if one.level is Level.BREAKS)
    return next((one for one in breaking if one.subject == name), None)


def write_header(assessment: Assessment, source: Source, *, prefix: str | None = None) -> Header:
    """Write a header in single-precision floats (C99).

    Parameters
    ----------
    assessment : Assessment
        Its gains are the ones that are written, rounded to single precision.
    source : Source
        Told in the head of the file.
    prefix : str, optional
        Of the macros; by default from the sheet's title.

    Returns
    -------
    Header
        Name and text of the file.

    Raises
    ------
    HandoverError
        If a loop is refused or unstable, a value does not fit single precision, or the prefix will not do.
    """
    reason = refusal(assessment)
    if reason:
        finding = _finding_on(assessment, _loop_at_fault(assessment))
        more = "" if finding is None else f". {finding.reason[0].upper()}{finding.reason[1:]}. {finding.advice}"
        raise HandoverError(f"{source.sheet_name}: {reason}{more}")
    title, stand_in = assessment.sheet.title, source.sheet_name.partition(".")[0]
    prefix = title_prefix(title, stand_in=stand_in) if prefix is None else checked_prefix(prefix)
    found = groups(assessment)
    values = {symbol.name: symbol.literal for group in found for symbol in group.symbols}
    require_distinct([*(f"{prefix}_{name}" for name in values), f"{prefix}_GAINS_H"])
    text = _rendered(prefix, tuple(_head(assessment, source, prefix)), found)
    strange = strange_code(text)
    if strange is not None or not text.isascii():
        raise HandoverError(
            f"{source.sheet_name}: the header would hold strange code ({strange!a}); nothing was written"
        )
    return Header(name=header_name(title, stand_in=stand_in), prefix=prefix, text=text, values=values)


def _rendered(prefix: str, head: tuple[str, ...], found: tuple[Group, ...]) -> str:
    from jinja2 import Environment, StrictUndefined

    from gainbench_resources import template

    # No escaping for a page: every text was made fit for a comment before.
    environment = Environment(
        autoescape=False, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True, keep_trailing_newline=True
    )
    commented = [
        {
            "title": group.title,
            "symbols": [
                {"name": symbol.name, "literal": symbol.literal, "comment": _symbol_comment(symbol)}
                for symbol in group.symbols
            ],
        }
        for group in found
    ]
    source = template(_TEMPLATE).read_text(encoding="utf-8")
    return environment.from_string(source).render(prefix=prefix, head=head, groups=commented)


def _symbol_comment(symbol: Symbol) -> list[str]:
    text = f"{symbol.meaning} Unit: {symbol.unit}. Range: {symbol.range}."
    if len(comment_text(text)) + 6 <= WIDTH:
        return [f"/* {comment_text(text)} */"]
    lines = list(comment_lines(text, first="/* ", rest="   "))
    lines[-1] += " */"
    return lines


def _head(assessment: Assessment, source: Source, prefix: str) -> Iterator[str]:
    """The head of the file, line by line, each beginning with a blank or empty."""
    yield from _paragraph("Gains of the current loop and the speed loop, in single-precision floats (C99).")
    yield from _paragraph(
        f"Written by Gainbench {version('gainbench')}. Do not edit: change the bench sheet and write it again."
    )
    yield ""
    # The origin is read back: one line each, and what the user named comes last.
    tuning = DESIGNED if source.tuning is None else f"kept, {source.tuning}"
    yield " ORIGIN"
    yield f"   Digest: {comment_text(source.digest)}"
    yield f"   Prefix: {prefix}"
    yield f"   Tuning: {comment_text(tuning)}"
    yield f"   Sheet:  {comment_text(source.sheet_name)}"
    yield f"   Title:  {comment_text(assessment.sheet.title)}"
    yield from _section("ASSESSED WITH", _assessed(assessment))
    worse = [finding for finding in assessment.findings if finding.level is not Level.HOLDS]
    if worse:
        yield from _section("FINDINGS", [f"{finding.level.value}: {finding.text}" for finding in worse])
    yield from _section("NOT MODELLED", [", ".join(cautions.NOT_MODELLED) + "."])
    yield from _section("SIGNS AND SCALING", _scaling(assessment))
    steps = enumerate(bench_procedure(assessment), start=1)
    yield from _section("ON THE BENCH", [f"{number}. {step}" for number, step in steps])
    yield from _section("CAUTIONS", [*cautions.CAUTIONS, cautions.ESTIMATE])


def _assessed(assessment: Assessment) -> list[str]:
    stage = assessment.sheet.rig.stage
    lines = [
        f"Current loop at {stage.current_rate:g} Hz. {_quoted(loop_rows(assessment.current) + step_rows(assessment))}",
        f"Speed loop at {stage.speed_rate:g} Hz. {_quoted(loop_rows(assessment.speed))}",
    ]
    response = response_rows(assessment)
    lines.append(f"Duty. {_quoted(response)}" if response else "Duty: no response was computed, see the findings.")
    if stage.current_filter > 0.0:
        lines.append(f"Current filter before the sampler: {stage.current_filter:g} s.")
    return lines


def _quoted(rows: tuple[Row, ...]) -> str:
    text = as_sentence(rows)
    return f"{text[0].upper()}{text[1:]}."


def _scaling(assessment: Assessment) -> list[str]:
    lines = [cautions.SIGN_CONVENTION, cautions.BUS_CONDITION]
    if assessment.plant.kind is MachineKind.PM_SINE:
        lines.append(
            "Every ampere is the peak of a phase current and every volt the peak of a phase voltage, on the q axis of "
            "an amplitude-invariant transformation; the current of the d axis is held at 0."
        )
    elif assessment.plant.kind is MachineKind.PM_BLOCK:
        lines.append("Every ampere is that of the conducting pair, every volt is between its two terminals.")
    return lines


def _section(title: str, paragraphs: list[str]) -> Iterator[str]:
    yield ""
    yield f" {title}"
    for text in paragraphs:
        yield from _paragraph(text, indent=2)


def _paragraph(text: str, *, indent: int = 0) -> tuple[str, ...]:
    return comment_lines(text, first=" " * (indent + 1), rest=" " * (indent + 3))
