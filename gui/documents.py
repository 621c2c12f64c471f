"""Files of the window: open, save, recent, dropped, and the question before work is lost."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from importlib import resources
from pathlib import Path

from PySide6.QtCore import QObject, QSettings, Signal
from PySide6.QtGui import QCloseEvent
from PySide6.QtWidgets import QFileDialog, QMessageBox

from core import live
from core.directional.quantities import quantity
from core.errors import InputError
from core.files.bench import SUFFIX, write_bench
from core.files.opening import Opened, open_file, table_text
from core.files.specimen import write_specimen
from core.state import BenchState, OrientationChoice, Specimen
from gui.bench import Bench
from gui.window import Window

FIRST_DEMO = "two_cuts_lm7.tricline"
_FILTERS = (
    "Everything Tricline reads (*.tricline *.json *.txt *.csv *.dat *.tsv *.cif);;All files (*)"
)
CIF_SUFFIXES = (".cif", ".mcif", ".mmcif")
_BENCH_FILTER = f"Bench, with orientations and view (*{SUFFIX})"
_SPECIMEN_FILTER = "Specimen only (*.json)"
_MOST_RECENT = 8


def demo_files() -> list[tuple[str, str]]:
    """Return (file name, specimen name) of the demo materials."""
    folder = resources.files("demo_materials")
    names = sorted(
        entry.name for entry in folder.iterdir() if entry.name.endswith((".json", SUFFIX))
    )
    with resources.as_file(folder) as path:
        found = [(name, _demo_words(open_file(path / name))) for name in names]
    return sorted(found, key=lambda pair: pair[0] != FIRST_DEMO)


def _demo_words(opened: Opened) -> str:
    return opened.specimen.name + (", two cuts" if opened.bench is not None else "")


def open_demo(name: str) -> Opened:
    """Return one demo material."""
    with resources.as_file(resources.files("demo_materials") / name) as path:
        return open_file(path)


def first_state(opened: Opened) -> BenchState:
    """Return the bench that a file opens to; a bench file that cannot be shown is refused."""
    if opened.bench is None:
        return BenchState(opened.specimen)
    state = opened.bench
    quantity(state.quantity)
    for side in "AB":
        live.rotation(state.orientation_of(side), state.specimen_of(side))
    return state


class Documents(QObject):
    """Which file the bench came from and goes to.

    Signals
    -------
    named()
        The file's name or the list of recent files has changed.
    table_met(str, Path), other_met(str, Path)
        A file to be opened, or to be the other crystal, is a text that may be a table.
    cell_met(Path)
        A file to be opened is a CIF.
    """

    named = Signal()
    table_met = Signal(str, object)
    other_met = Signal(str, object)
    cell_met = Signal(object)

    def __init__(self, bench: Bench, window: Window, settings: QSettings) -> None:
        super().__init__(window)
        self._bench, self._window, self._settings = bench, window, settings
        self.path: Path | None = None
        self.open_otherwise: Callable[[Path], bool] = _leave
        window.files_dropped.connect(self._open_dropped)
        window.close_asked.connect(self._on_close)

    @property
    def recent(self) -> list[str]:
        """Paths of the files used last, the newest first."""
        stored = self._settings.value("recent", [])
        paths = [stored] if isinstance(stored, str) else list(stored or [])  # type: ignore[call-overload]
        return [str(path) for path in paths]

    # -------------------------------------------------------------- opening
    def ask_open(self) -> None:
        """Let the user choose a file, and open it."""
        path, _ = QFileDialog.getOpenFileName(self._window, "Open", self.folder(), _FILTERS)
        if path:
            self.open(Path(path))

    def open(self, path: Path) -> bool:
        """Open a file in place of what is on the bench; say so when it cannot be done.

        What `open_otherwise` knows what to do with, as readings, is left to it. A table of
        text is looked at first, in its dialog; a CIF gives the unit cell.
        """
        if self.open_otherwise(path):
            return True
        if path.suffix.lower() in CIF_SUFFIXES:
            self.cell_met.emit(path)
            return True
        try:
            text = table_text(path)
            if text is not None:
                self.table_met.emit(text, path)
                return True
            opened = open_file(path)
            state = first_state(opened)
        except InputError as error:
            self.complain("The file was not opened", str(error))
            return False
        if not self.may_discard():
            return False
        self._take(state, path)
        return True

    def open_demo(self, name: str) -> None:
        """Open a demo material; it has no file to be saved over."""
        if self.may_discard():
            self._take(first_state(open_demo(name)), None)

    def ask_other(self) -> None:
        """Let the user choose another crystal for B."""
        path, _ = QFileDialog.getOpenFileName(
            self._window, "Another crystal for B", self.folder(), _FILTERS
        )
        if path:
            try:
                text = table_text(Path(path))
                if text is not None:
                    self.other_met.emit(text, Path(path))
                    return
                self.use_other(open_file(Path(path)))
            except InputError as error:
                self.complain("The file was not opened", str(error))

    def take_table(self, specimen: Specimen, path: Path) -> None:
        """Open the specimen of a table; it has no file to be saved over."""
        if self.may_discard():
            self._take(BenchState(specimen), None)
            self._remember(path)
            self.named.emit()

    def use_other(self, opened: Opened) -> None:
        """Show another crystal in B, in its own crystal axes."""
        state = self._bench.state
        display = replace(state.display, layout="AB")
        self._bench.edit(
            "Show another crystal in B",
            replace(
                state, other=opened.specimen, orientation_b=OrientationChoice(), display=display
            ),
        )

    def _take(self, state: BenchState, path: Path | None) -> None:
        self.path = path
        self._bench.load(state)
        if path is not None:
            self._remember(path)
        self._window.show_message(f"Opened {state.specimen.name}")
        self.named.emit()

    def _open_dropped(self, paths: list[str]) -> None:
        self.open(Path(paths[0]))
        if len(paths) > 1:
            self._window.show_message("One file at a time: the first was opened.")

    # -------------------------------------------------------------- saving
    def save(self) -> bool:
        """Save to the file the bench came from, or ask for one."""
        if self.path is None or self.path.suffix not in (SUFFIX, ".json"):
            return self.ask_save()
        return self._write(self.path)

    def ask_save(self) -> bool:
        """Let the user choose where to save a bench or a specimen."""
        stem = self.path.stem if self.path else _file_stem(self._bench.state.specimen.name)
        path, kind = QFileDialog.getSaveFileName(
            self._window,
            "Save as",
            str(Path(self.folder()) / f"{stem}{SUFFIX}"),
            f"{_BENCH_FILTER};;{_SPECIMEN_FILTER}",
        )
        if not path:
            return False
        chosen = Path(path)
        if chosen.suffix not in (SUFFIX, ".json"):
            suffix = ".json" if kind == _SPECIMEN_FILTER else SUFFIX
            chosen = chosen.with_name(chosen.name + suffix)
        return self._write(chosen)

    def _write(self, path: Path) -> bool:
        state = self._bench.state
        try:
            if path.suffix == ".json":
                write_specimen(path, state.specimen)
            else:
                write_bench(path, state)
        except InputError as error:
            self.complain("The file was not saved", str(error))
            return False
        self.path = path
        self._bench.history.setClean()
        self._remember(path)
        part = (
            " (the specimen only; a bench file keeps orientations and view)"
            if (path.suffix == ".json" and state != BenchState(state.specimen))
            else ""
        )
        self._window.show_message(f"Saved {path.name}{part}")
        self.named.emit()
        return True

    # -------------------------------------------------------------- questions
    def may_discard(self) -> bool:
        """Return whether the present work may go: it is saved, or the user says so."""
        if self._bench.history.isClean():
            return True
        box = QMessageBox(self._window)
        box.setIcon(QMessageBox.Icon.Question)
        box.setWindowTitle("Tricline")
        box.setText(f"{self._bench.state.specimen.name} has changes that are not saved.")
        box.setInformativeText("Save them before going on?")
        buttons = QMessageBox.StandardButton
        box.setStandardButtons(buttons.Save | buttons.Discard | buttons.Cancel)
        box.setDefaultButton(buttons.Save)
        answer = box.exec()
        if answer == buttons.Save:
            return self.save()
        return bool(answer == buttons.Discard)

    def complain(self, title: str, message: str) -> None:
        """Show why a file could not be used; everything else stays as it was."""
        QMessageBox.warning(self._window, title, message)

    def _on_close(self, event: QCloseEvent) -> None:
        if self.may_discard():
            event.accept()
        else:
            event.ignore()

    def folder(self) -> str:
        """Return where files were last opened or saved."""
        return (
            str(self.path.parent)
            if self.path
            else str(self._settings.value("folder", str(Path.home())))
        )

    def _remember(self, path: Path) -> None:
        whole = str(path.resolve())
        others = [entry for entry in self.recent if entry != whole]
        self._settings.setValue("recent", [whole, *others][:_MOST_RECENT])
        self._settings.setValue("folder", str(path.resolve().parent))


def _leave(_path: Path) -> bool:
    """Leave a file to the usual ways of opening."""
    return False


def _file_stem(name: str) -> str:
    """Return a name that every file system takes."""
    kept = "".join(c if c.isalnum() or c in "-_" else "_" for c in name).strip("_")
    return kept or "bench"
