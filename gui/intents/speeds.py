"""What the user does on the page of measured speeds, turned into named steps on the bench."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from PySide6.QtCore import QObject

from core import live
from core.crystal.orientation import orientation_texts
from core.editing import readings as measured
from core.errors import InputError
from core.files.speeds import SpeedTable
from core.state import BenchState, MeasuredSpeeds, OrientationChoice, Specimen
from gui.bench import Bench
from gui.intents.base import Intents, with_orientation, with_specimen
from gui.presenters.speeds import SpeedsPresenter, speeds_of
from gui.presenting import speeds_plots as plots
from gui.presenting.ledger import ledger_specimen
from gui.presenting.speeds import typed_columns
from gui.speeds.page import SpeedsPage

_FIELD_WORDS = {
    "density": "Change the density of the readings",
    "crystal_class": "Change the symmetry of the readings",
    "unique_axis": "Change the unique axis of the readings",
    "direction_sigma": "Change the uncertainty of the directions",
    "robust": "Change how outliers count",
    "entered": "Show other columns of the readings",
    "criterion": "Change what the next blank is for",
}
_COLUMN_WORDS = {
    "direction": "direction", "sheet": "sheet", "polarisation": "polarisation", "kind": "kind",
    "speed_m_s": "speed", "sigma_m_s": "σ", "thickness_mm": "thickness",
    "transit_us": "transit time", "sigma_us": "σ", "path": "path", "delay_ns": "delay",
    "sigma_mm": "σ of the thickness",
}  # fmt: skip
_PAGE_WORDS = {"bench": "Go to the bench", "speeds": "Go to the measured speeds"}
Change = Callable[[MeasuredSpeeds], MeasuredSpeeds]


def said_without_cell(before: BenchState, after: BenchState) -> BenchState:
    """Return a state whose orientations need no cell: the same turns, said by angles."""
    for side in "AB":
        choice, old = before.orientation_of(side), before.specimen_of(side)
        if after.specimen_of(side) != old and uses_cell(choice, after.specimen_of(side)):
            turn = live.rotation(replace(choice, turn=(0.0, 0.0, 0.0)), old)
            text = orientation_texts(turn, old.frame)["bunge"]
            after = with_orientation(after, side, replace(choice, text=text))
    return after


def uses_cell(choice: OrientationChoice, specimen: Specimen) -> bool:
    """Tell whether an orientation cannot be read with what is known of a specimen."""
    try:
        live.rotation(choice, specimen)
    except InputError:
        return True
    return False


def _handed_over(old: Specimen, new: Specimen, is_same: bool, unseen: str) -> str:
    """Return what of the ledger's crystal was kept, as a sentence or two."""
    facts = [
        words
        for words, value in (("cell", old.cell), ("temperature", old.temperature_c))
        if value is not None
    ]
    names = " and ".join(", ".join(["name", *facts]).rsplit(", ", 1))
    verb = "were" if facts else "was"
    kept = (
        f"The constants are in the ledger; the {names} of {old.name} {verb} kept."
        if is_same
        else f"{new.name}: the {names} of {old.name} {verb} not kept."
    )
    return f"{kept} {unseen}".strip()


class SpeedsIntents(Intents):
    """Edits of the readings, and what is done with their fit."""

    def __init__(
        self,
        bench: Bench,
        page: SpeedsPage,
        presenter: SpeedsPresenter,
        parent: QObject | None = None,
    ) -> None:
        super().__init__(bench, parent)
        self._page, self._presenter = page, presenter
        readings, blanks = page.readings, page.blanks
        readings.edited.connect(self._set_field)
        readings.cell_edited.connect(self._set_cell)
        readings.pasted.connect(self._paste)
        readings.cleared.connect(self._clear)
        readings.removed.connect(self._remove)
        readings.inserted.connect(self._insert)
        readings.facts_wanted.connect(self._take_facts)
        page.plots.face_chosen.connect(self._choose_plot)
        page.plots.section.plane_chosen.connect(self._choose_plane)
        page.sphere.projection_chosen.connect(self._choose_projection)
        page.sphere.point_picked.connect(self._pick_point)
        page.result.use_wanted.connect(self.use_constants)
        blanks.criterion_chosen.connect(self._set_field)
        blanks.blank_wanted.connect(self._plan_blank)
        blanks.plan_wanted.connect(self._place_plan)

    # -------------------------------------------------------------- the page
    def choose_page(self, key: str) -> None:
        """Go to a page of the window; there and back again is no step."""
        state = self.bench.state
        display = replace(state.display, page=key)
        self.bench.edit(_PAGE_WORDS[key], replace(state, display=display), merge="page")

    def take_table(self, table: SpeedTable, name: str) -> None:
        """Put the readings of a file on the page and go there."""
        state = self.bench.state
        speeds = measured.from_table(table, ledger_specimen(state))
        speeds = replace(speeds, name=name.rpartition(".")[0] or name)
        display = replace(state.display, page="speeds")
        self.bench.edit(f"Open {name}", replace(state, readings=speeds, display=display))

    def use_constants(self) -> None:
        """Hand the fitted constants to the ledger and go back to the bench."""
        fit = self._presenter.fit
        if fit is None:
            return

        before = self.bench.state
        old, speeds = ledger_specimen(before), speeds_of(before)
        specimen = measured.with_constants(old, fit, speeds)

        def build(state: BenchState) -> BenchState:
            display = replace(state.display, page="bench", face="stiffness")
            new = replace(with_specimen(state, specimen), display=display)
            return said_without_cell(state, new) if specimen.cell is None else new

        self.attempt(build, "Use the fitted constants", self._refuse)
        if self.bench.state is not before:
            is_same = measured.is_same_crystal(old, fit, speeds)
            self.said.emit(_handed_over(old, specimen, is_same, measured.unseen_note(fit)))

    # -------------------------------------------------------------- the readings
    def _edit(self, change: Change, label: str, refuse: Callable[[str], None]) -> None:
        self.attempt(
            lambda state: replace(state, readings=change(speeds_of(state))), label, refuse
        )

    def _refuse(self, message: str) -> None:
        self._page.readings.show_error("table", message)

    def _set_field(self, field: str, text: str) -> None:
        self._edit(
            lambda speeds: measured.set_field(speeds, field, text),
            _FIELD_WORDS[field],
            lambda message: self._page.readings.show_error(field, message),
        )

    def _set_cell(self, row: int, column: str, text: str) -> None:
        self._edit(
            lambda speeds: measured.set_cell(speeds, row, column, text),
            f"Change the {_COLUMN_WORDS[column]} of row {row + 1}",
            self._refuse,
        )

    def _paste(self, row: int, column: int, text: str) -> None:
        columns = typed_columns(speeds_of(self.bench.state), column)
        self._edit(
            lambda speeds: measured.with_block(speeds, row, columns, text),
            "Paste readings",
            self._refuse,
        )

    def _clear(self, places: tuple[tuple[int, int], ...]) -> None:
        columns = self._columns()

        def change(speeds: MeasuredSpeeds) -> MeasuredSpeeds:
            for row, column in places:
                speeds = measured.set_cell(speeds, row, columns[column], "")
            return speeds

        self._edit(change, "Empty cells of the readings", self._refuse)

    def _columns(self) -> tuple[str, ...]:
        view = self._page.readings.readings.view
        return () if view is None else tuple(column.key for column in view.columns)

    def _remove(self, rows: tuple[int, ...]) -> None:
        words = f"row {rows[0] + 1}" if len(rows) == 1 else f"{len(rows)} rows"
        self._edit(
            lambda speeds: measured.without_rows(speeds, rows), f"Remove {words}", self._refuse
        )

    def _insert(self, row: int) -> None:
        self._edit(
            lambda speeds: measured.with_row_before(speeds, row), "Add a row", self._refuse
        )

    def _take_facts(self) -> None:
        specimen = ledger_specimen(self.bench.state)
        self._edit(
            lambda speeds: measured.with_facts_of(speeds, specimen),
            "Take density and symmetry from the ledger",
            self._refuse,
        )

    # -------------------------------------------------------------- plots and blanks
    def _choose_plot(self, face: str) -> None:
        self.show_choice("Plot something else of the fit", speeds_plot=face)

    def _choose_plane(self, text: str) -> None:
        self.attempt(
            lambda state: replace(
                state,
                display=replace(
                    state.display, speeds_plane=plots.plane_normal(speeds_of(state), text)
                ),
            ),
            "Change the plane of the fitted speeds",
            self._page.plots.section.show_error,
        )

    def _choose_projection(self, key: str) -> None:
        self.show_choice("Change the projection", projection=key)

    def _pick_point(self, x: float, y: float) -> None:
        state = self.bench.state
        row = plots.measured_at(state, speeds_of(state), x, y)
        if row is not None:
            self._page.readings.select_row(row)

    def _plan_blank(self, direction: str) -> None:
        self._edit(
            lambda speeds: measured.with_planned(speeds, [direction]),
            f"Plan a blank along {direction}",
            self._refuse,
        )

    def _place_plan(self) -> None:
        wanted = self._presenter.plan_directions
        self._edit(
            lambda speeds: measured.with_planned(speeds, wanted),
            "Put planned blanks into the table",
            self._refuse,
        )
