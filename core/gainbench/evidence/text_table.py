"""Numbers from a text log: only the columns that are asked for, by polars, which reads a file in pieces."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from gainbench.errors import LogError
from gainbench.evidence.columns import FileColumn, Raw, most_rows, refuse_too_large
from gainbench.evidence.guessing import read_header
from gainbench.evidence.stamps import nanoseconds
from gainbench.evidence.text_layout import BLANKS, TextLayout, find_layout
from gainbench.evidence.text_source import TextSample, as_table_text, sample_text
from gainbench.evidence.told_rate import period_in

if TYPE_CHECKING:
    from polars import DataType, Series

_AROUND = ' \t\r"'
"""What may stand around a number that is read as a text: a quote stays where blanks stand before it."""
_LONG_COUNTER = 15
"""Digits above which a whole number no longer fits a float."""


class TextTable:
    """A text log whose layout was found out."""

    __slots__ = ("_path", "_sample", "columns", "layout", "period", "rows")

    def __init__(self, path: Path) -> None:
        self._path = path
        self._sample: TextSample = sample_text(path)
        self.layout: TextLayout = find_layout(self._sample, path.name)
        self.columns: tuple[FileColumn, ...] = _columns(self.layout)
        self.period: float | None = period_in(self._sample.lines[: self.layout.head_lines])
        """As the lines above the rows tell it [s]; None where they do not."""
        self.rows: int | None = None
        """How many rows there are; None where that takes reading them."""
        if self._sample.whole:
            told = self._sample.lines[self.layout.head_lines :]
            comment = self.layout.comment
            self.rows = sum(bool(line.strip()) and not (comment and line.startswith(comment)) for line in told)

    def load(self, places: Sequence[int], *, time: int | None) -> list[Raw]:
        """Read columns by their places; the one of the time keeps long counters exact.

        Raises
        ------
        LogError
            If the file is too large, or is no table after all.
        OSError
            If it cannot be read.
        """
        import polars as pl

        name, layout = self._path.name, self.layout
        wanted = sorted(set(places))
        size = self._path.stat().st_size
        # Only the cap below binds; this one is a guess that spares reading what will be refused.
        refuse_too_large(size / (1.5 * self._sample.line_bytes), len(wanted), name=name)
        most = most_rows(len(wanted))
        kinds = {place: self._kind(place, place == time) for place in wanted}
        try:
            frame = (
                pl.scan_csv(
                    as_table_text(self._path, self._sample, blanks=layout.separator == BLANKS),
                    has_header=False,
                    schema={f"c{place}": kinds.get(place, pl.String()) for place in range(layout.columns)},
                    separator=layout.separator,
                    decimal_comma=layout.decimal_mark == "," and layout.separator != ",",
                    quote_char='"' if layout.quoted else None,
                    comment_prefix=layout.comment or None,
                    skip_lines=layout.head_lines,
                    ignore_errors=True,
                    truncate_ragged_lines=True,
                    encoding="utf8-lossy",
                    n_rows=most + 1,
                )
                .select(f"c{place}" for place in wanted)
                .collect(engine="streaming")
            )
        except (pl.exceptions.PolarsError, pl.exceptions.PanicException) as error:
            first = str(error).partition("\n")[0]
            raise LogError(f"{name}: cannot be read as a table: {first}; export it as csv again") from None
        refuse_too_large(frame.height, len(wanted), name=name)
        return [self._raw(frame[f"c{place}"], place) for place in places]

    def _kind(self, place: int, is_time: bool) -> DataType:
        """The type that a column is read as; as text where the table reader would not take every number in it."""
        import polars as pl

        layout = self.layout
        if layout.stamps[place] or layout.padded or (layout.separator == "," and layout.decimal_mark == ","):
            return pl.String()
        firsts = [row[place] for row in layout.first_rows if place < len(row) and row[place]]
        long = firsts and all(text.lstrip("+-").isdigit() for text in firsts)
        if is_time and long and max(map(len, firsts)) > _LONG_COUNTER:
            return pl.Int64()
        return pl.Float64()

    def _raw(self, series: Series, place: int) -> Raw:
        import polars as pl

        stamps = self.layout.stamps[place]
        if stamps:
            series = nanoseconds(series)
        elif series.dtype == pl.String:
            text = series.str.strip_chars(_AROUND)
            if self.layout.decimal_mark == ",":
                text = text.str.replace(",", ".", literal=True)
            series = text.cast(pl.Float64, strict=False)
        return raw_of(series, stamps=stamps)


def raw_of(series: Series, *, stamps: bool) -> Raw:
    """A column of numbers as arrays; what is null or not finite is missing."""
    missing = series.is_null().to_numpy()
    values = series.fill_null(0).to_numpy() if series.null_count() else series.to_numpy()
    if values.dtype.kind == "f":
        values = values.astype(np.float64, copy=False)
        missing = missing | ~np.isfinite(values)
    return Raw(values=values, missing=missing, stamps=stamps)


def _columns(layout: TextLayout) -> tuple[FileColumn, ...]:
    header = read_header(layout.header, layout.columns)
    return tuple(
        FileColumn(
            name=name.name,
            others=others,
            unit=name.unit,
            numeric=number or stamp,
            stamps=stamp,
            first_values=tuple(row[place] for row in layout.first_rows if place < len(row)),
        )
        for place, (name, others, number, stamp) in enumerate(
            zip(header.names, header.others, layout.numbers, layout.stamps, strict=True)
        )
    )
