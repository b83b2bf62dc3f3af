"""Rows copied from a data sheet: which entry each of them would set, and with what. Nothing is set here.

A row is a name, a unit and a number in any order, with tabs, bars, semicolons or wide gaps between, or none. What is
not certain is said to be not recognised rather than guessed; a value that the sheet would refuse is told with its why.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass

from gainbench.errors import SheetError
from gainbench.sheetfile import read_entry

_NAMES: tuple[tuple[str, str], ...] = (
    ("machine.winding_temperature", r"winding temperature"),
    ("machine.speed_constant", r"speed constant|\bkn\b|\bkv\b|velocity constant"),
    ("machine.back_emf_constant", r"back[- ]?emf( constant)?|voltage constant|generator constant|\bke\b"),
    ("machine.torque_constant", r"torque constant|\bkt\b|\bkm\b"),
    ("machine.resistance", r"resistance|\br\b|\bra\b|\brt\b"),
    ("machine.inductance", r"inductance|\bl\b|\bla\b|\blq\b"),
    ("machine.pole_pairs", r"pole[- ]?pairs|number of pole pairs"),
    ("train.load_inertia", r"load inertia|inertia of the load"),
    ("train.coupling_inertia", r"coupling inertia"),
    (
        "machine.rotor_inertia",
        r"(rotor|motor|armature)( mass)?( moment of)? inertia|moment of inertia|inertia|\bj\b|\bjm\b",
    ),
    ("machine.viscous_friction", r"viscous (friction|damping)|damping constant"),
    ("machine.coulomb_friction", r"(coulomb|static|dry) friction|friction torque"),
    ("machine.rated_voltage", r"(nominal|rated|supply) voltage|\bun\b"),
    ("machine.peak_current", r"(peak|max(imum|\.)?|stall|demagneti[sz]ation)( permissible)?( peak)? current"),
    ("machine.rated_current", r"(rated|nominal|continuous|max(imum|\.)? continuous)( continuous)? current|\bin\b"),
    ("machine.max_speed", r"(max(imum|\.)?|highest|limiting|permissible)( permissible)? speed|speed limit"),
    ("train.ratio", r"(gear|transmission|reduction)( ratio)?|\bratio\b"),
    ("train.efficiency", r"(gear )?efficiency"),
    ("train.shaft_stiffness", r"(shaft|torsional) stiffness"),
    ("stage.encoder_counts", r"counts per (turn|revolution)|encoder counts"),
    ("stage.bus_voltage", r"bus voltage|dc[- ]link voltage"),
    ("stage.pwm_frequency", r"(pwm|switching) frequency"),
)
"""Names in data sheets, in English (common practice), as patterns; the first that fits counts."""

_NOT_THESE = re.compile(
    r"no[- ]?load|thermal|ambient|storage|tolerance|speed/torque|gradient|mechanical time|electrical time|weight|"
    r"stall torque"
)
"""Rows that resemble others and mean something else."""
_STALL = re.compile(r"\bstall current|\bstarting current")
_CONTINUOUS = re.compile(r"continuous|nominal|rated")
_NUMBER = re.compile(
    r"(?<![\w.,])[+\-\N{MINUS SIGN}]?\d+(?:[ '\u2019\u202f\u00a0]\d{3})*(?:[.,]\d+)*(?:[eE][+-]?\d+)?(?![\w.,]*\d)"
)
_UNIT = re.compile(
    r"(?<![\w/*])("
    r"m?[\u03a9\u2126]|[mk]?ohms?|[mu\u00b5\u03bc]?H|[mk]?V|m?A(?:rms|pk)?|"
    r"[mu\u00b5\u03bc]?N\s?[*\u00b7.]?\s?m(?:/(?:A|rad|krpm)(?:rms)?)?|oz[-*\s]?in(?:/A)?|"
    r"[mu\u00b5\u03bc]?N\s?[*\u00b7]?\s?m\s?[*\u00b7]?\s?s(?:/rad)?|"
    r"rpm/V|min-1/V|\(rad/s\)/V|V/krpm|V/1000\s?rpm|m?V/rpm|m?V\s?[*\u00b7]?\s?s(?:/rad)?|V/\(rad/s\)|"
    r"k?g\s?[*\u00b7]?\s?[cm]?m(?:\^?2|\u00b2)|oz[-*\s]?in[-*\s]?s(?:\^?2|\u00b2)|"
    r"rpm|min-1|1/min|r/min|rad/s|k?Hz|\u00b0C|degC|%"
    r")(?![\w/*\u00b7^])"
)
_MEASURED = {
    "line-to-line": re.compile(r"phase[- ]to[- ]phase|line[- ]to[- ]line|terminal to terminal|\bl-l\b"),
    "phase": re.compile(r"per phase|phase to neutral|line to neutral|\bl-n\b"),
}
_AMPERES = {"rms": re.compile(r"rms|eff"), "peak": re.compile(r"apk|a peak|amplitude|\(peak\)|\[apk\]")}
_SPELLINGS = (
    (re.compile(r"[\u03a9\u2126]"), "ohm"),
    (re.compile(r"ohms"), "ohm"),
    (re.compile(r"[\u00b5\u03bc]"), "u"),
    (re.compile(r"\u00b7|\s"), "*"),
    (re.compile(r"\u00b2|(?<=m)2$|(?<=s)2$"), "^2"),
    (re.compile(r"min-1|1/min|r/min"), "rpm"),
    (re.compile(r"1000\*?rpm"), "krpm"),
    (re.compile(r"\u00b0C"), "degC"),
    (re.compile(r"(?<=A)(rms|pk)"), ""),
    (re.compile(r"oz-?in"), "oz*in"),
)
_COUNTS = frozenset(["machine.pole_pairs", "stage.encoder_counts"])
_WITH_AMPERES = ("machine.torque_constant", "machine.rated_current", "machine.peak_current")
_MOST_LINES = 200
_GAPS = re.compile(r"\t|\||;|\s{2,}")


@dataclass(frozen=True, slots=True, kw_only=True)
class PastedRow:
    """One row, and what was made of it."""

    row: str
    path: str = ""
    """Of the entry; empty where the row was not recognised."""
    value: str = ""
    """As it would be typed into the entry's box."""
    reason: str = ""
    """Why it was not recognised or is refused; empty where it can be set."""

    @property
    def usable(self) -> bool:
        """Whether it can be set."""
        return bool(self.path) and not self.reason


def recognised(
    text: str, *, winding_values: str | None = None, current_values: str | None = None
) -> tuple[PastedRow, ...]:
    """Read rows of a data sheet.

    Parameters
    ----------
    text : str
        As copied; one row in each line.
    winding_values : str, optional
        The sheet's: a row that says otherwise of its resistance or inductance is not usable.
    current_values : str, optional
        The sheet's: a row that says otherwise of its amperes is not usable.

    Returns
    -------
    tuple of PastedRow
        One for each line that is not empty. Of two that would set the same entry only the first is usable.
    """
    found: list[PastedRow] = []
    taken: set[str] = set()
    for line in _lines(text):
        one = _consistent(_row(line), winding_values=winding_values, current_values=current_values)
        if one.usable and one.path in taken:
            one = PastedRow(row=line, path=one.path, value=one.value, reason="a row above sets the same entry")
        if one.usable:
            taken.add(one.path)
        found.append(one)
    return tuple(found)


def _consistent(one: PastedRow, *, winding_values: str | None, current_values: str | None) -> PastedRow:
    """The row, refused where it speaks of another convention than the sheet: such a slip is a factor in every gain."""
    name = one.row.lower()
    for key, said, patterns, paths in (
        ("winding_values", winding_values, _MEASURED, ("machine.resistance", "machine.inductance")),
        ("current_values", current_values, _AMPERES, _WITH_AMPERES),
    ):
        for word, pattern in patterns.items():
            if one.usable and said is not None and word != said and one.path in paths and pattern.search(name):
                reason = f"the row says {word}, and machine.{key} is {said}"
                return PastedRow(row=one.row, path=one.path, value=one.value, reason=reason)
    return one


def _lines(text: str) -> Iterator[str]:
    for line in text.splitlines()[:_MOST_LINES]:
        clean = " ".join(part.strip() for part in _GAPS.split(line) if part.strip())
        if clean:
            yield clean[:300]


def _row(line: str) -> PastedRow:
    name = line.lower()
    path = "" if _NOT_THESE.search(name) else _path(name)
    if not path:
        return PastedRow(row=line, reason="not recognised")
    bare = line
    unit = ""
    matches = list(_UNIT.finditer(line))
    if matches and path not in _COUNTS and path != "train.ratio":
        fitting = [(one, _plain_unit(one[1])) for one in matches]
        known = [(one, unit) for one, unit in fitting if _fits(path, unit)]
        if not known:
            units = ", ".join(unit for _, unit in fitting)
            return PastedRow(row=line, path=path, reason=f"{units} is no unit of this entry")
        match, unit = known[-1]
        bare = line[: match.start()] + " " + line[match.end() :]
    elif path not in _COUNTS and path != "train.ratio":
        return PastedRow(row=line, path=path, reason="no unit was found in the row")
    numbers = [one.group() for one in _NUMBER.finditer(bare)]
    if len(numbers) != 1:
        why = "no number was found in the row" if not numbers else f"several numbers: {', '.join(numbers)}; leave one"
        return PastedRow(row=line, path=path, reason=why)
    number = _plain_number(numbers[0])
    if number is None:
        return PastedRow(row=line, path=path, reason=f"{numbers[0]}: which mark is the decimal one cannot be told")
    value = f"{number} {unit}".strip()
    try:
        read_entry(path, value)
    except SheetError as error:
        return PastedRow(row=line, path=path, value=value, reason=error.problems[0].reason if error.problems else "")
    return PastedRow(row=line, path=path, value=value)


def _path(name: str) -> str:
    if _STALL.search(name):
        return ""
    for path, pattern in _NAMES:
        if re.search(pattern, name):
            # "Max. continuous current" is a rated one, "max. current" a peak one.
            if path == "machine.peak_current" and _CONTINUOUS.search(name):
                return "machine.rated_current"
            return path
    return ""


def _plain_unit(unit: str) -> str:
    for pattern, plain in _SPELLINGS:
        unit = pattern.sub(plain, unit)
    return re.sub(r"(?<=g)(?=[cm]?m\^2)", "*", unit.replace("**", "*").replace("*^", "^"))


def _fits(path: str, unit: str) -> bool:
    """Whether a unit is one of the entry's; its name may hold letters that look like units."""
    try:
        read_entry(path, f"1 {unit}")
    except SheetError as error:
        return (
            bool(error.problems)
            and "unit" not in error.problems[0].reason
            and " is meant" not in error.problems[0].reason
        )
    return True


def _plain_number(text: str) -> str | None:
    """A number with a decimal point; None where a mark may be either kind."""
    plain = text.replace("\N{MINUS SIGN}", "-")
    plain = re.sub(r"(?<=\d)[ '\u2019\u202f\u00a0](?=\d{3})", "", plain)
    points, commas = plain.count("."), plain.count(",")
    if points and commas:
        decimal = "." if plain.rfind(".") > plain.rfind(",") else ","
        plain = plain.replace("," if decimal == "." else ".", "")
        return plain.replace(",", ".") if plain.count(decimal) == 1 else None
    if commas:
        if commas > 1:
            return plain.replace(",", "") if re.fullmatch(r"-?\d{1,3}(,\d{3})+", plain) else None
        whole, _, rest = plain.partition(",")
        if len(rest) == 3 and 1 <= len(whole.lstrip("-")) <= 3 and whole.lstrip("-") != "0":
            return None
        return plain.replace(",", ".")
    return plain if points <= 1 else None
