"""Waves at the pin, arrivals along it and degenerate directions: shown when they are in sight.

The acoustic axes and the arrivals are found on the worker. What has been found of a crystal is
kept for as long as it is on the bench; the stage and the hemisphere ask here for what is known.
"""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal, Slot

from core import live
from core.directional.acoustic_axes import acoustic_axes
from core.directional.medium import Medium
from core.state import BenchState, Specimen
from core.task import Ticker
from gui.bench import Bench
from gui.presenting import ledger, waves
from gui.presenting.axes import Axes, CrystalKey, crystal_key
from gui.presenting.stage import sides
from gui.presenting.waves import ArrivalsRequest, FoundArrivals
from gui.scheduler import Job, Scheduler
from gui.window import Views

_ARRIVALS, _AXES = "arrivals", "acoustic axes"
AxesRequest = tuple[tuple[CrystalKey, Medium], ...]


class WaveDetails(QObject):
    """Fills the waves panel and the list of degenerate directions.

    Signals
    -------
    axes_found()
        More is known than before: marks and mended meshes can be drawn.
    """

    axes_found = Signal()

    def __init__(
        self, bench: Bench, scheduler: Scheduler, views: Views, parent: QObject | None = None
    ) -> None:
        super().__init__(parent)
        self._bench, self._scheduler = bench, scheduler
        self._panel, self._list = views.waves, views.degenerate
        self._axes: dict[CrystalKey, Axes] = {}
        self._arrivals: tuple[ArrivalsRequest, FoundArrivals] | None = None
        scheduler.finished.connect(self._on_finished)
        self._panel.shown.connect(self._on_panel_shown)
        self._panel.arrivals.shown.connect(self._on_arrivals_shown)

    def known_axes(self, specimen: Specimen) -> Axes:
        """Return the acoustic axes of a crystal in crystal axes, none while they are sought."""
        return self._axes.get(crystal_key(specimen), ())

    # -------------------------------------------------------------- the regions
    def show_waves(self, state: BenchState, _fine: bool) -> None:
        """Show the waves along the pin, if they can be seen."""
        if self._panel.isVisible():
            self._panel.show_view(waves.waves_view(state))

    def show_arrivals(self, state: BenchState, _fine: bool) -> None:
        """Show what arrives along the pin and ask for it where it is not known yet."""
        if not self._panel.arrivals.isVisible():
            return
        request = waves.arrivals_request(state)
        known = self._arrivals
        is_new = known is None or known[0] != request
        pending = is_new and bool(request.media)
        found = known[1] if known is not None and request.media else None
        ray = known[0].ray if known is not None else state.pin
        self._panel.arrivals.show_view(waves.arrivals_view(found, ray, pending))
        if pending:
            self._scheduler.submit(
                Job(_ARRIVALS, request, waves.find_arrivals, "Arrivals along the pin")
            )

    def show_axes(self, state: BenchState, _fine: bool) -> None:
        """Show the degenerate directions and ask for those that are not known yet."""
        specimen = ledger.ledger_specimen(state)
        side = state.display.ledger if state.other is not None else sides(state)[0]
        turn = live.rotation(state.orientation_of(side), specimen)
        found = self._axes.get(crystal_key(specimen))
        self._list.show_view(waves.axes_view(specimen, turn, found, pending=found is None))
        missing = self._missing(state)
        if missing:
            self._scheduler.submit(Job(_AXES, missing, _find_axes, "Degenerate directions"))

    def _missing(self, state: BenchState) -> AxesRequest:
        """Return the crystals on the bench whose axes are not known."""
        crystals = [state.specimen_of(side) for side in "AB"]
        keys = {crystal_key(one) for one in crystals if one.density is not None}
        return tuple((key, live.crystal_medium(*key)) for key in keys - self._axes.keys())

    # -------------------------------------------------------------- what comes back
    @Slot()
    def _on_panel_shown(self) -> None:
        self.show_waves(self._bench.state, True)

    @Slot()
    def _on_arrivals_shown(self) -> None:
        self.show_arrivals(self._bench.state, True)

    @Slot(str, object, object)
    def _on_finished(self, kind: str, request: object, result: object) -> None:
        if kind == _ARRIVALS:
            self._arrivals = (request, result)  # type: ignore[assignment]
            self.show_arrivals(self._bench.state, True)
        elif kind == _AXES:
            self._keep(result)  # type: ignore[arg-type]
            self.show_axes(self._bench.state, True)
            self.axes_found.emit()

    def _keep(self, found: dict[CrystalKey, Axes]) -> None:
        """Keep what is on the bench and what has just been found."""
        on_bench = {crystal_key(self._bench.state.specimen_of(side)) for side in "AB"}
        kept = {key: axes for key, axes in self._axes.items() if key in on_bench}
        self._axes = kept | found


def _find_axes(request: AxesRequest, ticker: Ticker) -> dict[CrystalKey, Axes]:
    found = {}
    for number, (key, medium) in enumerate(request):
        ticker.tick(number / len(request))
        found[key] = acoustic_axes(medium)
    return found
