"""The commands of the window: what every menu entry does, in one table."""

from __future__ import annotations

from dataclasses import dataclass
from functools import partial
from pathlib import Path

from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QMenu

from gui.actions import LINE, Entry, Menus
from gui.bench import Bench
from gui.cameras import Cameras
from gui.documents import Documents, demo_files, open_demo
from gui.dressing import Dressing
from gui.figures.exports import Exports
from gui.intake import Intake
from gui.intents.ledger import LedgerIntents
from gui.intents.stage import StageIntents
from gui.pictures import stage_picture
from gui.speeds_files import DEMOS, SpeedFiles
from gui.window import Window


@dataclass(frozen=True, eq=False)
class Commands:
    """What the menus can do, with the parts they act on."""

    bench: Bench
    window: Window
    documents: Documents
    intake: Intake
    exports: Exports
    speeds: SpeedFiles
    ledger: LedgerIntents
    stage: StageIntents
    cameras: Cameras
    dressing: Dressing

    def menus(self, help_entries: tuple[Entry, ...]) -> Menus:
        """Return the whole menu table."""
        return (
            ("&File", self._file_menu()),
            ("&Edit", self._edit_menu()),
            ("&Specimen", self._specimen_menu()),
            ("&Orientation", self._orientation_menu()),
            ("&View", self._view_menu()),
            ("&Help", help_entries),
        )

    def _file_menu(self) -> tuple[Entry, ...]:
        documents = self.documents
        return (
            Entry(
                "&Open…", documents.ask_open, "Ctrl+O", "Open a specimen, a bench or a table"
            ),
            Entry("Open re&cent", submenu=self._fill_recent),
            Entry("Open a &demo", submenu=self._fill_demos),
            LINE,
            Entry("&Save", documents.save, "Ctrl+S", "Save to the file it came from"),
            Entry(
                "Save &as…",
                documents.ask_save,
                "Ctrl+Shift+S",
                "Save a bench with its view, or the specimen alone",
            ),
            LINE,
            *self.exports.entries(),
            LINE,
            *self.speeds.entries(),
            LINE,
            Entry("&Quit", self.window.close, "Ctrl+Q", "Close the window"),
        )

    def _edit_menu(self) -> tuple[Entry, ...]:
        views, history = self.window.views, self.bench.history
        return (
            Entry("&Undo", history.undo, "Ctrl+Z", "Take the last change back"),
            Entry("&Redo", history.redo, "Ctrl+Shift+Z", "Make it again"),
            LINE,
            Entry(
                "Copy the &matrix",
                views.constants.table.copy_matrix,
                "Ctrl+M",
                "Copy the shown face of the 6×6, tab-separated, at full precision",
            ),
            Entry(
                "Copy the r&eading",
                views.pin.table.copy_table,
                "Ctrl+R",
                "Copy the table at the pin",
            ),
            Entry(
                "Copy s&tage picture",
                self.copy_picture,
                "Ctrl+Shift+C",
                "Copy what the stage shows",
            ),
            Entry(
                "&Paste constants",
                views.constants.table.paste,
                "Ctrl+Shift+V",
                "Put a pasted 6×6, triangle or list into the grid",
            ),
        )

    def _specimen_menu(self) -> tuple[Entry, ...]:
        documents, ledger = self.documents, self.ledger
        return (
            Entry(
                "&Take in a table…",
                self.intake.take_in,
                "Ctrl+I",
                "Read a 6×6 in any usual form, look how it is understood, and use it",
            ),
            Entry(
                "&Unit cell from a CIF file…",
                self.intake.ask_cell,
                "",
                "Read the unit cell of a CIF file",
            ),
            LINE,
            Entry(
                "Make the class &exact",
                ledger.make_exact,
                "",
                "Replace the table by the nearest one of its class",
            ),
            LINE,
            Entry(
                "&Another crystal in B…",
                documents.ask_other,
                "",
                "Compare with a second specimen",
            ),
            Entry("Another crystal in B, from the &demos", submenu=self._fill_other),
            Entry(
                "&One crystal for A and B",
                ledger.one_crystal,
                "",
                "Let B show the crystal of A again",
            ),
        )

    def _orientation_menu(self) -> tuple[Entry, ...]:
        ledger = self.ledger
        return (
            Entry("&Swap A and B", ledger.swap, "Ctrl+T", "Exchange the two sides"),
            Entry(
                "Copy A to &B",
                partial(ledger.copy_from, "A"),
                "",
                "Give B the orientation of A",
            ),
            Entry(
                "Copy B to &A",
                partial(ledger.copy_from, "B"),
                "",
                "Give A the orientation of B",
            ),
            Entry(
                "&Reset both", ledger.reset_orientations, "", "Part axes along the crystal axes"
            ),
        )

    def _view_menu(self) -> tuple[Entry, ...]:
        look = self.cameras.look_from
        layouts = tuple(
            Entry(
                words,
                partial(self.stage.choose_layout, layout),
                keys,
                group="layout",
                is_on=partial(self._has_layout, layout),
            )
            for words, layout, keys in (
                ("Pane &A", "A", "Ctrl+1"),
                ("&Panes A and B", "AB", "Ctrl+2"),
                ("Pane &B", "B", "Ctrl+3"),
            )
        )
        looks = tuple(
            Entry(f"Look along part &{axis}", partial(look, axis), f"Ctrl+Shift+{axis}")
            for axis in "XY"
        ) + (Entry("Look along part &Z", partial(look, "Z"), "Ctrl+Alt+Z"),)
        return (
            *self.speeds.page_entries(),
            LINE,
            *layouts,
            LINE,
            *looks,
            Entry("&First view", partial(look, "home"), "Home"),
            LINE,
            *self._theme_entries(),
            LINE,
            *self._panel_entries(),
        )

    def _theme_entries(self) -> tuple[Entry, ...]:
        """Return one line a theme."""
        return tuple(
            Entry(
                words,
                partial(self.dressing.choose, name),
                group="theme",
                is_on=partial(self.dressing.is_chosen, name),
            )
            for words, name in (("&Light theme", "light"), ("&Night theme", "night"))
        )

    def _panel_entries(self) -> tuple[Entry, ...]:
        """Return the lines that show and hide parts of the window."""
        return (
            Entry(
                "Can this table be &trusted?",
                self.window.toggle_sheet,
                "F7",
                "Show or hide symmetry, stability, notes and uncertainties of the table",
                is_on=self._is_sheet_open,
            ),
            Entry(
                "Le&dger",
                self._toggle_ledger,
                "F8",
                "Show or hide the ledger",
                is_on=self.window.ledger_panel.isVisible,
            ),
            Entry(
                "&Reading",
                self._toggle_reading,
                "F9",
                "Show or hide the reading",
                is_on=self.window.reading_panel.isVisible,
            ),
        )

    def _has_layout(self, layout: str) -> bool:
        return self.bench.state.display.layout == layout

    def _is_sheet_open(self) -> bool:
        return self.window.views.trust.isVisibleTo(self.window)

    def _toggle_ledger(self) -> None:
        panel = self.window.ledger_panel
        panel.setVisible(not panel.isVisible())

    def _toggle_reading(self) -> None:
        panel = self.window.reading_panel
        panel.setVisible(not panel.isVisible())

    # -------------------------------------------------------------- submenus
    def _fill_recent(self, menu: QMenu) -> None:
        for path in self.documents.recent:
            action = menu.addAction(Path(path).name)
            action.setToolTip(path)
            action.triggered.connect(partial(self._open_path, path))
        menu.setEnabled(True)
        if menu.isEmpty():
            menu.addAction("nothing opened yet").setEnabled(False)

    def _fill_demos(self, menu: QMenu) -> None:
        for file_name, words in demo_files():
            menu.addAction(words).triggered.connect(partial(self._open_demo, file_name))
        menu.addSeparator()
        for file_name, words in DEMOS:
            menu.addAction(words).triggered.connect(partial(self._open_speeds, file_name))

    def _fill_other(self, menu: QMenu) -> None:
        for file_name, words in demo_files():
            menu.addAction(words).triggered.connect(partial(self._use_demo, file_name))

    def _open_path(self, path: str, _checked: bool = False) -> None:
        self.documents.open(Path(path))

    def _open_demo(self, name: str, _checked: bool = False) -> None:
        self.documents.open_demo(name)

    def _open_speeds(self, name: str, _checked: bool = False) -> None:
        self.speeds.open_demo(name)

    def _use_demo(self, name: str, _checked: bool = False) -> None:
        self.documents.use_other(open_demo(name))

    # -------------------------------------------------------------- pictures
    def copy_picture(self) -> None:
        """Put what the stage shows on the clipboard."""
        QGuiApplication.clipboard().setImage(
            stage_picture(self.window.views, self.bench.state)
        )
        self.window.show_message("Picture of the stage copied")
