"""Findings about a table and uncertainties: asked for on the worker, kept, and shown.

The band above everything, the sheet under it, and whoever shows a number with its uncertainty
ask here for what is known. What has been found of a crystal is kept while it is on the bench.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from PySide6.QtCore import QObject, Signal, Slot

from core.state import BenchState, Specimen
from core.study.trust.findings import Findings
from core.study.uncertainty.draws import MonteCarlo
from gui.bench import Bench
from gui.presenting import ledger, spread, trust
from gui.presenting.spread import PinSpread, Request, TableRequest, TableSpread
from gui.presenting.trust import TrustRequest
from gui.scheduler import Job, Scheduler
from gui.window import Views

_TRUST, _PIN, _TABLES, _DRAWS = "trust", "spread at pin", "spread of tables", "draws"


class TrustDetails(QObject):
    """Fills the verdict band and the trust sheet, and keeps uncertainties.

    Signals
    -------
    pin_found(), tables_found()
        The uncertainties at the pin, or of the tables, are known.
    """

    pin_found = Signal()
    tables_found = Signal()

    def __init__(
        self, bench: Bench, scheduler: Scheduler, views: Views, parent: QObject | None = None
    ) -> None:
        super().__init__(parent)
        self._bench, self._scheduler = bench, scheduler
        self._band, self._sheet = views.verdict, views.trust
        self._findings: dict[TrustRequest, Findings] = {}
        self._drawn: tuple[TrustRequest, MonteCarlo] | None = None
        self._pin: tuple[Request, PinSpread] | None = None
        self._tables: tuple[TableRequest, TableSpread] | None = None
        scheduler.finished.connect(self._on_finished)
        self._sheet.shown.connect(self._on_shown)

    # -------------------------------------------------------------- what is known
    def findings(self, specimen: Specimen) -> Findings | None:
        """Return what has been found out about a crystal; None while it is being found."""
        return self._findings.get(trust.trust_request(specimen))

    def pin_spread(self, state: BenchState) -> PinSpread | None:
        """Return all uncertainties at the pin, None while they are unknown."""
        known = self._pin
        return known[1] if known and known[0] == spread.pin_request(state) else None

    def table_spread(self, state: BenchState) -> TableSpread | None:
        """Return the uncertainties of aggregates and of the part, None while unknown."""
        known, own = self._tables, ledger.ledger_specimen(state)
        return known[1] if known and known[0] == spread.table_request(state, own) else None

    # -------------------------------------------------------------- the regions
    def show_verdict(self, state: BenchState, _fine: bool) -> None:
        """Show the band, with what is known so far."""
        specimen = ledger.ledger_specimen(state)
        view = ledger.verdict_view(specimen, self.findings(specimen))
        if state.display.page != "bench":  # whose numbers are not those of the page
            view = replace(view, headline=f"{specimen.name}, on the bench: {view.headline}")
        self._band.show_view(view)

    def show_sheet(self, state: BenchState, _fine: bool) -> None:
        """Show the sheet if it can be seen, and ask for what is not known yet."""
        specimen = ledger.ledger_specimen(state)
        asked = trust.trust_request(specimen)
        found = self._findings.get(asked)
        if self._sheet.isVisible():
            self._sheet.show_view(
                trust.trust_view(state, found, self.pin_spread(state), self._draws_of(asked))
            )
        if found is None:
            self._submit(_TRUST, (asked, specimen), trust.find)
        is_uncertain = spread.crystal_factor(specimen) is not None
        if self._sheet.isVisible() and is_uncertain and self._draws_of(asked) is None:
            self._submit(_DRAWS, (asked, specimen), trust.draw_everywhere)

    def ask_pin(self, state: BenchState, _fine: bool) -> None:
        """Ask for the uncertainties at the pin where they are not known yet."""
        request = spread.pin_request(state)
        if request is not None and self.pin_spread(state) is None:
            self._submit(_PIN, request, spread.spread_at_pin)

    def ask_tables(self, state: BenchState, _fine: bool) -> None:
        """Ask for the uncertainties of the tables where they are not known yet."""
        request = spread.table_request(state, ledger.ledger_specimen(state))
        if request is not None and self.table_spread(state) is None:
            self._submit(_TABLES, request, spread.spread_of_tables)

    def _submit(self, kind: str, request: Any, run: Any) -> None:
        self._scheduler.submit(Job(kind, request, run, _WORDS[kind]))

    def _draws_of(self, asked: TrustRequest) -> MonteCarlo | None:
        return self._drawn[1] if self._drawn and self._drawn[0] == asked else None

    # -------------------------------------------------------------- what comes back
    @Slot()
    def _on_shown(self) -> None:
        self.show_sheet(self._bench.state, True)

    @Slot(str, object, object)
    def _on_finished(self, kind: str, request: Any, result: Any) -> None:
        state = self._bench.state
        if kind == _TRUST:
            self._keep(request[0], result)
            self.show_verdict(state, True)
        elif kind == _DRAWS:
            self._drawn = (request[0], result)
        elif kind == _PIN:
            self._pin = (request, result)
            self.pin_found.emit()
        elif kind == _TABLES:
            self._tables = (request, result)
            self.tables_found.emit()
            return
        else:
            return
        if self._sheet.isVisible():
            self.show_sheet(state, True)

    def _keep(self, request: TrustRequest, found: Findings) -> None:
        """Keep what is on the bench and what has just been found."""
        on_bench = {trust.trust_request(self._bench.state.specimen_of(side)) for side in "AB"}
        kept = {key: one for key, one in self._findings.items() if key in on_bench}
        self._findings = kept | {request: found}


_WORDS = {
    _TRUST: "Symmetry of the table",
    _PIN: "Uncertainties at the pin",
    _TABLES: "Uncertainties of averages",
    _DRAWS: "1,000 draws over all directions",
}
