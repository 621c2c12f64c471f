"""Files of measured speeds: opened onto the page, saved from it, and what the menus offer."""

from __future__ import annotations

from functools import partial
from importlib import resources
from pathlib import Path

from PySide6.QtWidgets import QFileDialog

from core.editing import readings as measured
from core.errors import InputError
from core.files.speeds import SpeedTable, read_speeds, write_speeds
from gui.actions import Entry
from gui.bench import Bench
from gui.documents import Documents
from gui.intents.speeds import SpeedsIntents
from gui.pages import PAGES
from gui.presenters.speeds import speeds_of
from gui.presenting.ledger import ledger_specimen
from gui.window import Window

DEMOS = (
    ("speeds_lm7_determined.csv", "Speeds of blank LM-7: 21 constants, one slip"),
    ("speeds_lm26_blind.csv", "Speeds of plate LM-26: three constants unseen"),
)
_FILTER = "Measured speeds (*.csv *.tsv *.txt);;All files (*)"


def is_speeds_file(path: Path) -> bool:
    """Tell whether a file looks like a table of measured speeds, by its header."""
    try:
        with path.open(encoding="utf-8", errors="replace") as stream:
            text = stream.read(4096)
    except OSError:
        return False
    lines = [line for line in text.splitlines() if line.strip() and not line.startswith("#")]
    return bool(lines) and ("speed_m_s" in lines[0] or "transit_us" in lines[0])


class SpeedFiles:
    """Opens and saves the readings."""

    def __init__(
        self, bench: Bench, window: Window, documents: Documents, intents: SpeedsIntents
    ) -> None:
        self._bench, self._window = bench, window
        self._documents, self.intents = documents, intents
        documents.open_otherwise = self.offer
        intents.said.connect(window.show_message)
        panel = window.views.speeds.readings
        panel.open_wanted.connect(self.ask_open)
        panel.save_wanted.connect(self.ask_save)

    # -------------------------------------------------------------- menus
    def entries(self) -> tuple[Entry, ...]:
        """Return the lines of the File menu."""
        return (
            Entry("Open measured s&peeds…", self.ask_open, "Ctrl+Alt+O",
                  "Open a CSV file of wave speeds on their page"),
            Entry("Save measured speeds…", self.ask_save, "Ctrl+Alt+S",
                  "Save the readings of that page as a CSV file"),
        )  # fmt: skip

    def page_entries(self) -> tuple[Entry, ...]:
        """Return the lines of the View menu that change the page."""
        return tuple(
            Entry(
                words.replace("Measured", "&Measured").replace("Bench", "B&ench"),
                partial(self.intents.choose_page, key),
                keys,
                tip,
                group="page",
                is_on=partial(self._is_seen, key),
            )
            for key, words, keys, tip in PAGES
        )

    def _is_seen(self, key: str) -> bool:
        return self._bench.state.display.page == key

    # -------------------------------------------------------------- opening
    def ask_open(self) -> None:
        """Let the user choose a file, and open it."""
        path, _ = QFileDialog.getOpenFileName(
            self._window, "Open measured speeds", self._documents.folder(), _FILTER
        )
        if path:
            self.open(Path(path))

    def open(self, path: Path) -> bool:
        """Put the readings of a file on the page; say so when it cannot be done."""
        try:
            self._take(read_speeds(path), path.name)
        except InputError as error:
            self._documents.complain("The speeds were not opened", str(error))
            return False
        return True

    def offer(self, path: Path) -> bool:
        """Open a file if it holds measured speeds, and tell whether it does."""
        if is_speeds_file(path):
            self.open(path)
            return True
        return False

    def open_demo(self, name: str) -> None:
        """Put invented readings on the page."""
        with resources.as_file(resources.files("demo_materials") / name) as path:
            self._take(read_speeds(path), name)

    def _take(self, table: SpeedTable, name: str) -> None:
        self.intents.take_table(table, name)
        said = "; ".join(table.guesses)
        self._window.show_message(f"Read with guesses: {said}" if said else f"Opened {name}")

    # -------------------------------------------------------------- saving
    def ask_save(self) -> None:
        """Let the user choose where to save the readings."""
        stem = ledger_specimen(self._bench.state).name.replace(" ", "_")
        path, _ = QFileDialog.getSaveFileName(
            self._window,
            "Save measured speeds",
            str(Path(self._documents.folder()) / f"{stem}_speeds.csv"),
            _FILTER,
        )
        if path:
            self.save(Path(path))

    def save(self, path: Path) -> bool:
        """Save the readings; rows with a fault are left out, and that is said."""
        target = path if path.suffix else path.with_name(path.name + ".csv")
        speeds = speeds_of(self._bench.state)
        try:
            write_speeds(target, measured.to_table(speeds))
        except InputError as error:
            self._documents.complain("The speeds were not saved", str(error))
            return False
        faulty = len({fault.row for fault in measured.understand(speeds).faults})
        left = f"; {faulty} row{'s' if faulty > 1 else ''} with faults left out"
        self._window.show_message(f"Saved {target.name}{left if faulty else ''}")
        return True
