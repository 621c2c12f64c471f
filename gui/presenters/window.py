"""The presenter: whenever the state changes, the views that draw a changed name are shown anew.

A table says which region of the window draws which fields of the state. While something moves
the stage follows in every frame, on the coarse mesh; tables follow several times a second and
the costly ones once it rests.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from PySide6.QtCore import QObject, Slot

from core import live
from core.directional.extremes import extremes
from core.directional.medium import Medium
from core.directional.quantities import quantity
from core.state import BenchState
from core.task import Ticker
from gui.bench import Bench
from gui.pace import Pace
from gui.presenters.trust import TrustDetails
from gui.presenters.waves import WaveDetails
from gui.presenting import deck, ledger, reading, spread, stage
from gui.presenting.reading import Extremes
from gui.scheduler import Job, Scheduler
from gui.window import Window

_CRYSTALS = {"specimen", "other"}
_PARTS = _CRYSTALS | {"orientation_a", "orientation_b"}
_PIN = {"pin"}
_EXTREMES = "extremes"


@dataclass(frozen=True)
class Region:
    """One region of the window.

    Attributes
    ----------
    watches : set of str
        Fields of the state that it draws.
    show : callable
        Draws it; takes the state and whether to draw finely.
    follows : "always", "often" or "at rest"
        How closely it follows while something moves.
    """

    watches: frozenset[str]
    show: Callable[[BenchState, bool], None]
    follows: str


class Presenter(QObject):
    """Keeps the window in step with the bench."""

    def __init__(
        self,
        bench: Bench,
        scheduler: Scheduler,
        pace: Pace,
        window: Window,
        parent: QObject | None = None,
    ) -> None:
        super().__init__(parent)
        self._bench, self._scheduler, self._pace, self._window = bench, scheduler, pace, window
        self._views = window.views
        self._details = WaveDetails(bench, scheduler, window.views, self)
        self.trust = TrustDetails(bench, scheduler, window.views, self)
        self._linked = True
        self._stale: set[int] = set()
        self._extremes: dict[Any, Extremes] = {}
        self._started = 0.0
        self._regions = self._table()
        bench.changed.connect(self._on_changed)
        pace.rested.connect(self._on_rested)
        scheduler.finished.connect(self._on_finished)
        self._details.axes_found.connect(self._on_axes_found)
        self.trust.pin_found.connect(self._on_pin_found)
        self.trust.tables_found.connect(self._on_tables_found)
        scheduler.failed.connect(self._on_failed)
        scheduler.progress.connect(window.show_progress)
        scheduler.idle.connect(window.hide_progress)
        for pane in self._views.panes.values():
            pane.frame_painted.connect(self._on_frame)

    def _table(self) -> tuple[Region, ...]:
        """Return which region draws what."""
        stage_names = _PARTS | {"pin", "section", "quantity", "display"}
        table = (
            (_CRYSTALS | {"display"}, self.trust.show_verdict, "always"),
            (_CRYSTALS | {"display"}, self._show_ledger, "always"),
            (_PARTS | {"display"}, self._show_orientations, "always"),
            (_CRYSTALS | {"quantity", "section", "display"}, self._show_toolbar, "always"),
            (stage_names, self._show_panes, "always"),
            (stage_names, self._show_section, "always"),
            (stage_names | {"cutting_error_deg"}, self._show_deck, "often"),
            (_PARTS | {"pin", "display"}, self._show_reading, "often"),
            (_PARTS | {"pin", "display"}, self._details.show_waves, "often"),
            (stage_names, self._show_bands, "at rest"),
            (stage_names, self.trust.show_sheet, "at rest"),
            (_PARTS | {"pin", "display"}, self.trust.ask_pin, "at rest"),
            (_PARTS | {"pin", "display"}, self._details.show_arrivals, "at rest"),
            (_PARTS | {"display"}, self._details.show_axes, "at rest"),
            (
                _PARTS | {"pin", "quantity", "display", "cutting_error_deg"},
                self._show_cutting_error,
                "at rest",
            ),
            (_PARTS | {"display"}, self._show_tables, "at rest"),
            (_PARTS | {"display"}, self.trust.ask_tables, "at rest"),
            (_PARTS | {"display"}, self._show_extremes, "at rest"),
        )
        return tuple(Region(frozenset(names), show, follows) for names, show, follows in table)

    # -------------------------------------------------------------- when to show
    def show_all(self) -> None:
        """Show every region finely."""
        for region in self._regions:
            region.show(self._bench.state, True)
        self._stale.clear()

    def set_linked(self, linked: bool) -> None:
        """Note whether the cameras turn together, for the tool bar."""
        self._linked = linked
        self._show_toolbar(self._bench.state, True)

    @Slot(object, object)
    def _on_changed(self, state: BenchState, names: frozenset[str]) -> None:
        self._started = time.perf_counter()
        first = not self._pace.is_moving
        self._pace.move()
        now = {"always": True, "often": self._pace.may_follow() or first, "at rest": False}
        for number, region in enumerate(self._regions):
            if not names & region.watches:
                continue
            # Behind a moved pin the fine picture stays: it is at hand once it was drawn.
            fine = self._pace.is_fine or (names == _PIN and number not in self._stale)
            if now[region.follows]:
                region.show(state, fine)
            if not (now[region.follows] and fine):
                self._stale.add(number)

    @Slot()
    def _on_rested(self) -> None:
        stale, self._stale = self._stale, set()
        for number in sorted(stale):
            self._regions[number].show(self._bench.state, True)

    @Slot(float)
    def _on_frame(self, _milliseconds: float) -> None:
        if self._started:
            elapsed = 1e3 * (time.perf_counter() - self._started)
            self._pace.frame(elapsed, self._pace.is_fine and self._pace.is_moving)
            self._started = 0.0

    # -------------------------------------------------------------- the regions
    def _show_ledger(self, state: BenchState, _fine: bool) -> None:
        views, specimen = self._views, ledger.ledger_specimen(state)
        views.constants.show_view(ledger.constants_view(specimen, state.display.face))
        views.spectrum.show_view(ledger.spectrum_view(specimen))
        views.specimen.show_view(ledger.specimen_view(state))
        views.cell.show_view(ledger.cell_form_view(specimen))

    def _show_orientations(self, state: BenchState, _fine: bool) -> None:
        for side, form in self._views.orientations.items():
            form.show_view(ledger.orientation_view(state, side))

    def _show_toolbar(self, state: BenchState, _fine: bool) -> None:
        self._views.toolbar.show_view(stage.toolbar_view(state, self._linked))
        self._window.show_panes(state.display.layout)

    def _show_panes(self, state: BenchState, fine: bool) -> None:
        for side, view in stage.pane_views(state, fine, self._details.known_axes).items():
            self._views.panes[side].show_view(view)

    def _show_section(self, state: BenchState, _fine: bool) -> None:
        self._views.section.show_view(deck.section_view(state, is_live=True))

    def _show_bands(self, state: BenchState, _fine: bool) -> None:
        """Add the bands of uncertainty that cannot follow every edit."""
        if state.quantity not in spread.LIVE_KEYS:
            self._views.section.show_view(deck.section_view(state))

    def _show_deck(self, state: BenchState, fine: bool) -> None:
        plots, face = self._views.deck, state.display.deck
        plots.show_face(face)
        if face == "hemisphere":
            view = deck.hemisphere_view(state, fine, self._details.known_axes)
            plots.hemisphere.show_view(view)
        elif face == "sweep":
            plots.sweep.show_view(deck.sweep_view(state))
        else:
            plots.source.show_view(deck.source_view(state))

    def _show_reading(self, state: BenchState, _fine: bool) -> None:
        self._views.pin.show_view(reading.reading_view(state, self.trust.pin_spread(state)))

    def _show_cutting_error(self, state: BenchState, _fine: bool) -> None:
        self._views.cutting_error.show_half_angle(f"{state.cutting_error_deg:g}")
        self._views.cutting_error.show_view(reading.cutting_error_view(state))

    def _show_tables(self, state: BenchState, _fine: bool) -> None:
        known = self.trust.table_spread(state)
        specimen = ledger.ledger_specimen(state)
        aggregate = reading.aggregate_view(specimen, known, reading.whose(state))
        self._views.aggregate.show_view(aggregate)
        self._views.part.show_view(reading.part_view(state, known))

    @Slot()
    def _on_axes_found(self) -> None:
        """Draw marks and mended meshes, at once or with the rest when all has come to rest."""
        if quantity(self._bench.state.quantity).wave and not self._pace.is_moving:
            self._show_panes(self._bench.state, True)
            self._show_deck(self._bench.state, True)

    # -------------------------------------------------------------- uncertainties, likewise
    @Slot()
    def _on_pin_found(self) -> None:
        self._show_reading(self._bench.state, True)

    @Slot()
    def _on_tables_found(self) -> None:
        self._show_tables(self._bench.state, True)

    # -------------------------------------------------------------- extremes, on the worker
    def _extremes_key(self, state: BenchState) -> tuple[Any, float | None]:
        specimen = ledger.ledger_specimen(state)
        return specimen.stiffness, specimen.density

    def _show_extremes(self, state: BenchState, _fine: bool) -> None:
        key = self._extremes_key(state)
        specimen = ledger.ledger_specimen(state)
        side = state.display.ledger if state.other is not None else state.display.layout[0]
        turn = live.rotation(state.orientation_of(side), specimen)
        found = self._extremes.get(key)
        shown = found if found is not None else next(iter(self._extremes.values()), None)
        self._views.extremes.show_view(
            reading.extremes_view(
                specimen, turn, shown, pending=found is None, whose=reading.whose(state)
            )
        )
        if found is None:
            medium = live.crystal_medium(*key)
            self._scheduler.submit(
                Job(_EXTREMES, (key, medium), _find_extremes, "Extremes over all directions")
            )

    @Slot(str, object, object)
    def _on_finished(self, kind: str, request: Any, result: Any) -> None:
        if kind == _EXTREMES:
            self._extremes = {request[0]: result}
            if request[0] == self._extremes_key(self._bench.state):
                self._show_extremes(self._bench.state, True)

    @Slot(str, object, str)
    def _on_failed(self, _kind: str, _request: Any, message: str) -> None:
        self._window.show_message(message, is_error=True)


def _find_extremes(request: tuple[Any, Medium], ticker: Ticker) -> Extremes:
    return extremes(request[1], ticker)
