"""Drive the real program on the demo specimens and save what it shows into assets/pictures."""

import os
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

FOLDER = Path(__file__).parents[2] / "assets" / "pictures"
SETTLE_MS = 1800


def main() -> int:
    """Draw every picture; needs a screen, a virtual one will do."""
    from PySide6.QtCore import QSettings, Qt
    from PySide6.QtWidgets import QApplication

    from gui.app import build
    from gui.documents import first_state, open_demo

    QApplication.setAttribute(Qt.ApplicationAttribute.AA_ShareOpenGLContexts)
    application = QApplication(["tricline"])
    application.setStyle("Fusion")
    FOLDER.mkdir(exist_ok=True)
    settings = QSettings(str(FOLDER / "none.ini"), QSettings.Format.IniFormat)
    built = build(application, first_state(open_demo("two_cuts_lm7.tricline")), settings)
    built.window.resize(1440, 900)
    built.window.show()
    for name, demo, theme, prepare in SCENES:
        built.bench.load(prepare(first_state(open_demo(demo))))
        built.dressing.theme = THEMES[theme]
        built.dressing.put_on()
        settle()
        built.window.grab().save(str(FOLDER / f"{name}.png"))
        print(f"{name}.png")
    built.close()
    return 0


def settle() -> None:
    """Let the program run for a moment, its workers too."""
    from PySide6.QtCore import QEventLoop, QTimer

    loop = QEventLoop()
    QTimer.singleShot(SETTLE_MS, loop.quit)
    loop.exec()


def shown(**changes):
    """Return a change of the state: its fields, and of its display what Display has."""
    from core.state import BenchState, Display

    def prepare(state: BenchState) -> BenchState:
        display = {k: v for k, v in changes.items() if hasattr(Display(), k)}
        fields = {k: v for k, v in changes.items() if k not in display}
        return replace(state, display=replace(state.display, **display), **fields)

    return prepare


from gui.theme import THEMES  # noqa: E402 - after the threads are set

Prepare = Callable[[object], object]
SCENES: tuple[tuple[str, str, str, Prepare], ...] = (
    ("window_light", "two_cuts_lm7.tricline", "light", shown()),
    ("window_night", "two_cuts_lm7.tricline", "night", shown(quantity="slowness")),
    (
        "slowness_cut_open",
        "seed_lm3_tetragonal.json",
        "light",
        shown(quantity="slowness", cut_away=True, ticks=True),
    ),
    (
        "wave_surface",
        "slab_lm18_hexagonal.json",
        "light",
        shown(quantity="wave", cut_away=True, deck="source"),
    ),
    (
        "focusing",
        "casting_lm40_cubic.json",
        "light",
        shown(quantity="focusing", marks=True, hemisphere_sheet=2),
    ),
)

if __name__ == "__main__":
    sys.exit(main())
