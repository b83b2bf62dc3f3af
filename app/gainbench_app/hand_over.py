"""From the button to the header: what is asked, and what is written."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtWidgets import QWidget

from gainbench.assess import assess
from gainbench.handover import Source, kept_sheet, write_handover, write_header
from gainbench.results import Level
from gainbench.sheetfile import digest
from gainbench_app.desk import Desk
from gainbench_app.dialogs import Dialogs
from gainbench_app.handover_dialog import HandoverRequest


def hand_over(window: QWidget, desk: Desk, dialogs: Dialogs, *, tuning: str | None = None) -> None:
    """Ask for a folder, show the cautions, and write the header of the assessment that is shown.

    Parameters
    ----------
    window : QWidget
        Over which to ask.
    desk : Desk
        Valid, and with an assessment.
    dialogs : Dialogs
        Who asks.
    tuning : str, optional
        Name of a kept tuning; by default what is handed over is the assessment that is shown.

    Raises
    ------
    GainbenchError
        If nothing can be exported or the file cannot be written; nothing was written then.
    """
    document = desk.settled_document()
    assessment = desk.assessment if tuning is None else assess(kept_sheet(document.sheet, tuning))
    if assessment is None:
        return
    source = Source(sheet_name=document.name, digest=digest(document), tuning=tuning)
    suggested = write_header(assessment, source)
    remarks = [f"Breaks: {one.text}" for one in assessment.findings if one.level is Level.BREAKS]
    if desk.unsaved_since is not None or desk.path is None:
        remarks.append(
            "The sheet is not saved: a header can tell its origin only while the sheet it came from is kept."
        )
    choice = dialogs.handover(
        window,
        HandoverRequest(
            title=document.sheet.title if tuning is None else f"{document.sheet.title}, kept tuning {tuning}",
            folder=desk.path.parent if desk.path is not None else Path.home(),
            prefix=suggested.prefix,
            remarks=tuple(remarks),
        ),
    )
    if choice is None:
        return
    target = choice.folder / write_header(assessment, source, prefix=choice.prefix).name
    replace = target.exists()
    if replace and not dialogs.replace_file(window, target):
        return
    written = write_handover(assessment, choice.folder, source=source, prefix=choice.prefix, replace=replace)
    dialogs.tell(window, "Handed over", f"Written: {written}\n\nRead its head before the first run.")
