"""Calendar stamps and times of day, as loggers write them: 2024-05-03T12:34:56.789, 12:34:56,7."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from polars import Expr, Series

PATTERN = (
    r"^\s*(?:(?:(\d{4})[-/.](\d{1,2})[-/.](\d{1,2})|(\d{1,2})\.(\d{1,2})\.(\d{4})|\d{1,2}/\d{1,2}/\d{4})[T ,;]\s*)?"
    r"(\d{1,2}):(\d{2}):(\d{2})(?:[.,:](\d{1,9})\d*)?\s*([AaPp]\.?[Mm]\.?)?\s*(Z|[+-]\d{2}:?\d{2})?\s*$"
)
"""Year, month, day, or day, month, year with points between; hour, minute, second, its decimals; half of the day; zone.
Which of two numbers between slashes is the day nobody knows: such stamps count as times of day."""
_STAMP = re.compile(PATTERN, re.ASCII)
_SECOND = 1_000_000_000


def is_stamp(text: str) -> bool:
    """Whether a field is a calendar stamp or a time of day."""
    return _STAMP.match(text) is not None


def nanoseconds(texts: Series) -> Series:
    """Stamps as whole nanoseconds: from 1970 in UTC, or from midnight where there is no date.

    Parameters
    ----------
    texts : Series
        Texts.

    Returns
    -------
    Series
        64-bit whole numbers; null where a text is no stamp.
    """
    import polars as pl

    # Cut once, then only columns of short texts: the expression is by far the slowest part.
    parts = texts.str.extract_groups(PATTERN).struct.unnest()
    parts.columns = ["year", "month", "day", "own day", "own month", "own year", "hour", "minute", "second", "decimals",
                     "half", "zone"]  # fmt: skip
    year, month, day = (pl.coalesce(one, f"own {one}").cast(pl.Int64) for one in ("year", "month", "day"))
    hour, minute, second = (pl.col(one).cast(pl.Int64) for one in ("hour", "minute", "second"))
    half = pl.col("half").str.to_lowercase().str.slice(0, 1)
    hour = pl.when(half.is_null()).then(hour).otherwise(hour % 12 + pl.when(half == "p").then(12).otherwise(0))
    # A date that the calendar does not have stays null, and with it the stamp.
    days = pl.when(year.is_null()).then(0).otherwise(_days(year, month=month, day=day))
    zone = pl.col("zone").str.replace_all("[Z:]", "")
    minutes = zone.str.slice(1, 2).cast(pl.Int64, strict=False) * 60 + zone.str.slice(3, 2).cast(pl.Int64, strict=False)
    away = pl.when(zone.str.starts_with("-")).then(-minutes).otherwise(minutes).fill_null(0)
    decimals = pl.col("decimals").str.pad_end(9, "0").cast(pl.Int64).fill_null(0)
    seconds = ((days * 24 + hour) * 60 + minute - away) * 60 + second
    return parts.select(seconds * _SECOND + decimals).to_series()


def _days(year: Expr, *, month: Expr, day: Expr) -> Expr:
    """Days from 1970 to a date, null where there is no such date."""
    import polars as pl

    text = pl.format("{}-{}-{}", year.cast(pl.String).str.zfill(4), month, day)
    return text.str.to_date("%Y-%m-%d", strict=False).cast(pl.Int64)
