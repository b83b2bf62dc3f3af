"""Bench sheets, format 1: text <-> model.

The only room that knows tomlkit and pydantic; neither their types nor their exceptions leave it.
"""

from gainbench.sheetfile.digest import assessed_digest, digest
from gainbench.sheetfile.document import (
    EntryValue,
    SheetDocument,
    add_evidence,
    add_kept,
    move_kept,
    parse_sheet,
    read_sheet,
    remove_evidence,
    remove_kept,
)
from gainbench.sheetfile.editing import split_path
from gainbench.sheetfile.fields import quantity_paths, read_entry
from gainbench.sheetfile.reading import MAX_BYTES, SUFFIX
from gainbench.sheetfile.writing import replace_file, write_sheet

__all__ = [
    "MAX_BYTES",
    "SUFFIX",
    "EntryValue",
    "SheetDocument",
    "add_evidence",
    "add_kept",
    "assessed_digest",
    "digest",
    "move_kept",
    "parse_sheet",
    "quantity_paths",
    "read_entry",
    "read_sheet",
    "remove_evidence",
    "remove_kept",
    "replace_file",
    "split_path",
    "write_sheet",
]
