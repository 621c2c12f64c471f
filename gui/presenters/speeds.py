"""The presenter of the page of measured speeds: fits as the readings change, and shows them."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from PySide6.QtCore import QObject, Slot

from core import live
from core.editing.readings import for_specimen, understand
from core.errors import InputError
from core.numbers import parse_number
from core.state import BenchState, Matrix, MeasuredSpeeds, Vector3
from core.study.recovery.fit import Fit, FitOptions
from core.study.recovery.fitting import recover
from core.study.recovery.planning import (
    Criterion,
    Plan,
    Ranking,
    plan,
    rank_next,
    young_gradient,
)
from core.study.recovery.readings import Reading
from core.task import Ticker
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import crystal_class
from gui.bench import Bench
from gui.presenting import speeds as pages
from gui.presenting import speeds_plots as plots
from gui.presenting.ledger import ledger_specimen
from gui.presenting.speeds import Found
from gui.scheduler import Job, Scheduler
from gui.window import Window

FIT, NEXT, PLAN = "measured speeds", "next blank", "plan of blanks"
_KEPT_FITS = 12  # so that undo and redo need no new fit
_WATCHED = {"readings", "display", "specimen", "other", "orientation_a", "pin"}
STOPPED = "The fit was stopped. Any change of the readings starts it again."


@dataclass(frozen=True)
class FitRequest:
    """Everything that a fit depends on."""

    readings: tuple[Reading, ...]
    density: float
    density_sigma: float
    direction_sigma_deg: float
    robust: bool
    crystal_class: str
    unique_axis: str


def wanted_plain(wanted: FitRequest) -> FitRequest:
    """Return the request of a plain fit of the same readings."""
    return replace(wanted, robust=False)


@dataclass(frozen=True, eq=False)
class NextRequest:
    """A fit, and what the next blank is to make more certain."""

    fit: Fit
    criterion: Criterion
    pin: Vector3


@dataclass(frozen=True)
class PlanRequest:
    """A rough crystal, its symmetry, and how well will be measured."""

    stiffness: Matrix
    density: float
    crystal_class: str
    unique_axis: str
    relative_sigma: float
    largest_std: float | None


def speeds_of(state: BenchState) -> MeasuredSpeeds:
    """Return the readings on the page; where there are none, an empty table for the ledger."""
    return state.readings or for_specimen(ledger_specimen(state))


class SpeedsPresenter(QObject):
    """Keeps the page in step with the bench while it is seen.

    It has a scheduler of its own: a fit must not wait for what the bench still works out.
    """

    def __init__(
        self, bench: Bench, scheduler: Scheduler, window: Window, parent: QObject
    ) -> None:
        super().__init__(parent)
        self._bench, self._scheduler, self._window = bench, scheduler, window
        self._page = window.views.speeds
        self._fits: dict[FitRequest, Fit] = {}
        self._shown: Fit | None = None
        self._wanted: FitRequest | None = None
        self._asked: FitRequest | None = None
        self._given_up: tuple[FitRequest, str] | None = None  # and why
        self._ranking: tuple[NextRequest, Ranking] | None = None
        self._ranking_wanted: NextRequest | None = None
        self._plan: Plan | None = None
        bench.changed.connect(self._on_changed)
        scheduler.finished.connect(self._on_finished)
        scheduler.failed.connect(self._on_failed)
        scheduler.progress.connect(window.show_progress)
        scheduler.idle.connect(window.hide_progress)
        self._page.blanks.plan_asked.connect(self._ask_plan)

    # -------------------------------------------------------------- what others may ask
    @property
    def fit(self) -> Fit | None:
        """The fit of the readings as they are; None while it is being found."""
        return None if self._wanted is None else self._fits.get(self._wanted)

    @property
    def plan_directions(self) -> tuple[str, ...]:
        """The blanks of the plan, as text of the table."""
        if self._plan is None:
            return ()
        frame = speeds_of(self._bench.state).frame
        return tuple(
            pages.table_direction(vector, frame) for vector in self._plan.directions.T
        )

    def show_page(self) -> None:
        """Bring the page of the bench to the front; that of the readings is filled first."""
        page = self._bench.state.display.page
        self._show_if_seen()
        self._window.show_page(page)

    def show(self) -> None:
        """Show the readings as they are, and ask for the fit where it is not known."""
        state = self._bench.state
        speeds = speeds_of(state)
        self._wanted, notice = self._request(speeds)
        if self._wanted is None:
            self._shown = None
        elif self._wanted in self._fits:
            self._shown = self._fits[self._wanted]
            self._rank(state, speeds)
        elif self._given_up is not None and self._given_up[0] == self._wanted:
            notice = self._given_up[1]
        elif wanted_plain(self._wanted) in self._fits:  # the next best until the robust one
            self._shown = self._fits[wanted_plain(self._wanted)]
        self._draw(state, speeds, notice)
        if self._wanted is not None and not notice:
            self._ask_fit(self._wanted)

    def close(self) -> None:
        """Stop what runs."""
        self._scheduler.close()

    @Slot()
    def stop(self) -> None:
        """Stop what runs, as the user wants; the last results stay."""
        self._scheduler.cancel()
        if self._wanted is not None and self._wanted not in self._fits:
            self._given_up, self._asked = (self._wanted, STOPPED), None
            self.show()

    # -------------------------------------------------------------- inside
    def _ask_fit(self, wanted: FitRequest) -> None:
        """Ask for a fit once; the latest asked for wins."""
        if wanted in self._fits or wanted == self._asked:
            return
        self._asked, self._given_up = wanted, None
        words = "Robust fit of the speeds" if wanted.robust else "Fit of the speeds"
        self._scheduler.submit(Job(FIT, wanted, _fit, words))

    @Slot(object, object)
    def _on_changed(self, state: BenchState, names: frozenset[str]) -> None:
        if names & {"specimen", "other"}:
            self._plan = None
        if names & _WATCHED:
            self.show_page()

    def _request(self, speeds: MeasuredSpeeds) -> tuple[FitRequest | None, str]:
        known = understand(speeds)
        if known.wanting or known.density is None:
            return None, known.wanting
        return FitRequest(
            known.readings, known.density, known.density_sigma, known.direction_sigma_deg,
            speeds.robust, speeds.crystal_class, speeds.unique_axis,
        ), ""  # fmt: skip

    def _rank(self, state: BenchState, speeds: MeasuredSpeeds) -> None:
        """Ask for the next blank where it is not known for this fit and criterion."""
        fit = self.fit
        if fit is None:
            return
        is_free = speeds.criterion != "functional"
        pin = (0.0, 0.0, 1.0) if is_free else plots.pin_direction(state)
        wanted = NextRequest(fit, speeds.criterion, pin)  # type: ignore[arg-type]
        if self._ranking_wanted is not None and _alike(wanted, self._ranking_wanted):
            return
        self._ranking_wanted = wanted
        self._scheduler.submit(Job(NEXT, wanted, _rank_next, "Next blank"))

    def _found(self, notice: str) -> Found:
        pending = self._wanted is not None and self._wanted not in self._fits and not notice
        ranking = None if self._ranking is None or self._shown is None else self._ranking[1]
        is_fresh = self._ranking is not None and self._ranking[0] is self._ranking_wanted
        return Found(self._shown, ranking, pending, not is_fresh, notice)

    def _draw(self, state: BenchState, speeds: MeasuredSpeeds, notice: str) -> None:
        page, found = self._page, self._found(notice)
        page.readings.show_form(pages.form_view(speeds))
        page.readings.show_table(pages.table_view(speeds, found))
        page.result.show_view(pages.result_view(speeds, found))
        self._draw_plot(state, speeds, found)
        self._draw_blanks(state, speeds, found)
        page.blanks.show_plan(pages.plan_view(state, self._plan))

    def _draw_plot(self, state: BenchState, speeds: MeasuredSpeeds, found: Found) -> None:
        shown, face = self._page.plots, state.display.speeds_plot
        shown.show_face(face)
        if face == "residuals":
            shown.residuals.show_view(plots.residuals_view(speeds, found))
        elif face == "section":
            shown.section.show_view(plots.section_view(state, speeds, found))
        elif face == "spectrum":
            shown.spectrum.show_view(plots.singular_view(found))
        else:
            shown.correlation.show_view(plots.correlation_view(found))

    def _draw_blanks(self, state: BenchState, speeds: MeasuredSpeeds, found: Found) -> None:
        self._page.sphere.show_view(plots.sphere_view(state, speeds, found))
        self._page.blanks.show_blanks(pages.blanks_view(speeds, found))

    # -------------------------------------------------------------- results
    @Slot(str, object, object)
    def _on_finished(self, kind: str, request: Any, result: Any) -> None:
        if kind == FIT:
            while len(self._fits) >= _KEPT_FITS:
                self._fits.pop(next(iter(self._fits)))
            self._fits[request] = result
            self._show_if_seen()
        elif kind == NEXT:
            self._ranking = (request, result)
            self._show_if_seen()
        elif kind == PLAN:
            self._plan = result
            self._show_plan("" if result is not None else _NO_PLAN)

    @Slot(str, object, str)
    def _on_failed(self, kind: str, request: Any, message: str) -> None:
        if kind == PLAN:
            self._show_plan(message)
        elif kind == FIT:
            self._given_up, self._asked = (request, message), None
            self._show_if_seen()

    def _show_if_seen(self) -> None:
        if self._bench.state.display.page == "speeds":
            self.show()

    # -------------------------------------------------------------- plans
    def _ask_plan(self, sigma: str, largest: str) -> None:
        state = self._bench.state
        specimen, speeds = ledger_specimen(state), speeds_of(state)
        panel = self._page.blanks
        try:
            percent = _positive(sigma, "sigma")
        except InputError as error:
            panel.show_error("sigma", error.message)
            return
        try:
            most = _positive(largest, "largest") if largest.strip() else None
        except InputError as error:
            panel.show_error("largest", error.message)
            return
        if specimen.density is None:
            self._show_plan("The crystal in the ledger wants a density first.")
            return
        request = PlanRequest(
            specimen.stiffness, specimen.density, speeds.crystal_class, speeds.unique_axis,
            percent / 100.0, most,
        )  # fmt: skip
        self._plan = None
        self._scheduler.submit(Job(PLAN, request, _make_plan, "Plan of blanks"))

    def _show_plan(self, notice: str) -> None:
        self._page.blanks.show_plan(pages.plan_view(self._bench.state, self._plan, notice))


_NO_PLAN = "No set of up to thirty blanks does that. Measure better, or allow a larger σ."


def _positive(text: str, field: str) -> float:
    value = parse_number(text.replace("%", ""), field)
    if value <= 0:
        raise InputError(f"{text.strip()} is not above zero.", where=field)
    return value


def _alike(first: NextRequest, second: NextRequest) -> bool:
    return (first.fit is second.fit) and (first.criterion, first.pin) == (
        second.criterion, second.pin
    )  # fmt: skip


# ------------------------------------------------------------------ on the worker
def _fit(request: FitRequest, ticker: Ticker) -> Fit:
    options = FitOptions(request.density_sigma, request.direction_sigma_deg, request.robust)
    claimed = crystal_class(request.crystal_class, request.unique_axis)
    return recover(request.readings, request.density, claimed, options, ticker)


def _rank_next(request: NextRequest, _ticker: Ticker) -> Ranking:
    gradient = None
    if request.criterion == "functional":
        stiffness = Stiffness.from_voigt(request.fit.stiffness)
        gradient = young_gradient(stiffness, np.array(request.pin))
    return rank_next(request.fit, criterion=request.criterion, functional=gradient)


def _make_plan(request: PlanRequest, _ticker: Ticker) -> Plan | None:
    medium = live.crystal_medium(request.stiffness, request.density)
    claimed = crystal_class(request.crystal_class, request.unique_axis)
    return plan(
        medium,
        claimed,
        relative_sigma=request.relative_sigma,
        largest_std=request.largest_std,
    )
