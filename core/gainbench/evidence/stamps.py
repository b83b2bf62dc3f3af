"""Calendar stamps and times of day, as loggers write them: 2024-05-03T12:34:56.789, 12:34:56,7."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from polars import Expr, Series

PATTERN = (
    r"^\s*(?:(\d{4})[-/.](\d{1,2})[-/.](\d{1,2})[T ]\s*)?"
    r"(\d{1,2}):(\d{2}):(\d{2})(?:[.,](\d{1,9})\d*)?\s*(Z|[+-]\d{2}:?\d{2})?\s*$"
)
"""Year, month, day; hour, minute, second, its decimals; zone. Other orders of a date say nothing for certain."""
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
    parts.columns = ["year", "month", "day", "hour", "minute", "second", "decimals", "zone"]
    year, month, day, hour, minute, second = (pl.col(name).cast(pl.Int64) for name in parts.columns[:6])
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
