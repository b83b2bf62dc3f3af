"""Which page of the guide speaks of the place where the focus is."""

from __future__ import annotations

from PySide6.QtWidgets import QWidget

from gainbench_app.guide.pages import FIRST, GUIDE
from gainbench_app.handover_dialog import HandoverDialog
from gainbench_app.keep_dialog import KeepDialog
from gainbench_app.on_bench.column import OnBench
from gainbench_app.paste_dialog import PasteDialog
from gainbench_app.shelf.panel import ShelfPanel
from gainbench_app.shortcuts import ShortcutList
from gainbench_app.top_bar import TopBar
from gainbench_app.what_it_does.bode import BodePlot
from gainbench_app.what_it_does.column import WhatItDoes
from gainbench_app.what_it_does.third_view import LEDGER, PLANE, SENSITIVITY, STEP, ThirdView
from gainbench_app.what_we_ask.column import WhatWeAsk
from gainbench_app.what_we_ask.findings import FindingsCard
from gainbench_app.what_we_ask.firmware_card import FirmwareCard
from gainbench_app.what_we_ask.loop_card import LoopCard
from gainbench_app.what_we_ask.target_row import TargetRow
from gainbench_app.widgets.reach_plot import ReachPlot
from gainbench_app.widgets.tolerance_box import ToleranceBox

PLACES: tuple[tuple[type[QWidget], str], ...] = (
    (HandoverDialog, "handover"),
    (KeepDialog, "shelf#keep"),
    (PasteDialog, "first-steps#2-put-in-your-motor"),
    (ShortcutList, "keys"),
    (ToleranceBox, "the-sheet#tolerance"),
    (ReachPlot, "asking#reach-map"),
    (TargetRow, "asking#sliders-and-boxes"),
    (LoopCard, "asking#methods"),
    (FirmwareCard, "asking#firmware-form"),
    (FindingsCard, "reading#findings"),
    (WhatWeAsk, "asking"),
    (BodePlot, "reading#bode"),
    (WhatItDoes, "reading#time-plots"),
    (OnBench, "the-sheet"),
    (ShelfPanel, "shelf"),
    (TopBar, FIRST),
)
"""By the kind of a widget that holds the focus, from the innermost one outwards."""

VIEWS = {
    LEDGER: "reading#ledger",
    PLANE: "reading#operating-plane",
    SENSITIVITY: "reading#sensitivity",
    STEP: "reading#locked-step",
}
"""By the view that is chosen."""


def place_for(widget: QWidget | None) -> str:
    """The place in the guide that speaks of a widget.

    Parameters
    ----------
    widget : QWidget or None
        What has the focus.

    Returns
    -------
    str
        ``page#section``, or a page alone; the first page where nothing speaks of it.
    """
    while widget is not None:
        place = widget.property(GUIDE)
        if isinstance(place, str) and place:
            return place
        if isinstance(widget, ThirdView):
            return VIEWS[widget.tabs.word]
        for kind, found in PLACES:
            if isinstance(widget, kind):
                return found
        widget = widget.parentWidget()
    return FIRST
