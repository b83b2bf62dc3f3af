"""Make the pictures of the README: ``python tests/pictures.py`` writes them to ``resources/pictures``.

The window opens off screen on the demo sheet, in a settings folder of its own, once in each theme.
"""

from __future__ import annotations

import os
import tempfile
import time
from pathlib import Path

FOLDER = Path(__file__).resolve().parents[1] / "resources" / "pictures"
SIZE = (1400, 900)
SETTLED_S = 1.0
"""Text and shelf follow the response after the hand has rested."""


def main() -> None:
    """Write one picture for each theme."""
    with tempfile.TemporaryDirectory() as home:
        # Before Qt is imported, which reads them once.
        os.environ.update(QT_QPA_PLATFORM="offscreen", XDG_CONFIG_HOME=home, XDG_STATE_HOME=home)
        from PySide6.QtWidgets import QApplication

        from gainbench.assess import warm_up
        from gainbench.sheetfile import parse_sheet
        from gainbench_app.desk import Desk
        from gainbench_app.habits import Memory
        from gainbench_app.live import Readiness
        from gainbench_app.theme import Scheme, body_font
        from gainbench_app.themes import Themes
        from gainbench_app.warming import warm_up_window
        from gainbench_app.widgets.appearance import Appearance
        from gainbench_app.window import Window
        from gainbench_resources import demo_sheet

        warm_up()
        warm_up_window()
        application = QApplication([])
        application.setStyle("Fusion")
        application.setFont(body_font())
        document = parse_sheet(demo_sheet("label-unwinder").read_text(encoding="utf-8"), "label-unwinder.bench.toml")
        appearance = Appearance()
        themes = Themes(application, appearance, scheme=Scheme.LIGHT)
        desk = Desk(document, path=None, readiness=Readiness.ALL)
        window = Window(desk, appearance=appearance, memory=Memory(Path(home) / "window.json"))
        window.resize(*SIZE)
        window.show()
        FOLDER.mkdir(exist_ok=True)
        for scheme in (Scheme.LIGHT, Scheme.DARK):
            themes.choose(scheme)
            end = time.monotonic() + SETTLED_S
            while time.monotonic() < end:
                application.processEvents()
            window.grab().save(str(FOLDER / f"window-{scheme}.png"))
        window.hide()


if __name__ == "__main__":
    main()
