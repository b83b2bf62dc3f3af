"""Numbers from a parquet log: only the columns that are asked for."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from gainbench.errors import LogError
from gainbench.evidence.columns import FileColumn, Raw, refuse_too_large
from gainbench.evidence.guessing import split_name
from gainbench.evidence.text_table import raw_of

if TYPE_CHECKING:
    from polars import DataFrame, LazyFrame, Series

MAGIC = b"PAR1"
_FIRST = 5


class ParquetTable:
    """A parquet log whose columns are known."""

    __slots__ = ("_path", "columns", "period", "rows")

    def __init__(self, path: Path) -> None:
        import polars as pl

        self._path = path
        self.period: float | None = None
        lazy = pl.scan_parquet(path, glob=False)
        self.rows: int | None = int(self._collected(lazy.select(pl.len())).item())
        head = self._collected(lazy.head(_FIRST))
        self.columns: tuple[FileColumn, ...] = tuple(
            FileColumn(
                name=series.name,
                unit=split_name(series.name).unit,
                numeric=series.dtype.is_numeric() or series.dtype.is_temporal(),
                stamps=series.dtype.is_temporal(),
                first_values=tuple(str(value) for value in series.to_list()),
            )
            for series in head.get_columns()
        )

    def load(self, places: Sequence[int], *, time: int | None) -> list[Raw]:
        """Read columns by their places.

        Raises
        ------
        LogError
            If the file is too large or damaged.
        """
        import polars as pl

        wanted = sorted(set(places))
        refuse_too_large(self.rows or 0, len(wanted), name=self._path.name)
        # By place: a name that stands between ^ and $ would be taken for a pattern.
        frame = self._collected(pl.scan_parquet(self._path, glob=False).select(pl.nth(wanted)))
        return [_raw(frame.to_series(wanted.index(place)), place == time) for place in places]

    def _collected(self, lazy: LazyFrame) -> DataFrame:
        import polars as pl

        try:
            return lazy.collect(engine="streaming")
        except (pl.exceptions.PolarsError, pl.exceptions.PanicException, OSError) as error:
            first = str(error).partition("\n")[0]
            raise LogError(
                f"{self._path.name}: not a parquet file that can be read: {first}; export the log again"
            ) from None


def _raw(series: Series, is_time: bool) -> Raw:
    import polars as pl

    kind: Any = series.dtype
    if kind.is_temporal():
        if kind == pl.Date:
            series = series.cast(pl.Datetime("us"))
        step = {"ms": 1_000_000, "us": 1_000}.get(getattr(series.dtype, "time_unit", None) or "ns", 1)
        return raw_of(series.cast(pl.Int64) * step, stamps=True)
    if is_time and kind.is_integer():
        return raw_of(series.cast(pl.Int64, strict=False), stamps=False)
    return raw_of(series.cast(pl.Float64, strict=False), stamps=False)
