"""Edits from the section, the hemisphere, the sweep and the reading."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from PySide6.QtCore import QObject

from core.errors import InputError
from core.numbers import parse_number
from core.state import BenchState
from gui.bench import Bench
from gui.intents.base import Intents
from gui.intents.stage import StageIntents
from gui.presenting import deck
from gui.window import Views


class DeckIntents(Intents):
    """Edits from the section, the hemisphere, the sweep and the reading."""

    def __init__(
        self, bench: Bench, views: Views, stage: StageIntents, parent: QObject | None = None
    ) -> None:
        super().__init__(bench, parent)
        self._views, self._stage = views, stage
        views.section.angle_picked.connect(self._pick_angle)
        views.section.plane_chosen.connect(stage.choose_plane)
        self._connect_deck()
        views.pin.direction_typed.connect(stage.type_pin)
        views.pin.quantity_chosen.connect(stage.choose_quantity)
        for linked in (views.extremes, views.waves, views.degenerate):
            linked.go.connect(stage.move_pin)
        views.cutting_error.edited.connect(self._set_cutting_error)

    def _connect_deck(self) -> None:
        plots = self._views.deck
        plots.face_chosen.connect(self._choose_face)
        plots.hemisphere.point_picked.connect(self._pick_point)
        plots.hemisphere.shown_chosen.connect(self._choose_hemisphere)
        plots.hemisphere.projection_chosen.connect(self._choose_projection)
        plots.hemisphere.sheet_chosen.connect(self._choose_sheet)
        plots.sweep.angle_picked.connect(self._pick_sweep)
        plots.sweep.axis_chosen.connect(self._choose_sweep_axis)
        plots.source.time_chosen.connect(self._choose_source_time)

    def _pick_angle(self, angle: float) -> None:
        self._stage.move_pin(deck.section_direction(self.bench.state, angle))

    def _pick_point(self, x: float, y: float) -> None:
        self._stage.move_pin(deck.disc_direction(self.bench.state, x, y))

    def _pick_sweep(self, degrees: float) -> None:
        self._stage.move_pin(deck.sweep_direction(self.bench.state, degrees))

    def _choose_face(self, face: str) -> None:
        self.show_choice(f"Show the {face}", deck=face)

    def _choose_hemisphere(self, key: str) -> None:
        self.show_choice("Change the hemisphere", hemisphere=key)

    def _choose_projection(self, key: str) -> None:
        self.show_choice("Change the projection", projection=key)

    def _choose_sheet(self, sheet: int) -> None:
        self.show_choice("Show another sheet on the hemisphere", hemisphere_sheet=sheet)

    def _choose_sweep_axis(self, key: str) -> None:
        self.show_choice("Sweep about another axis", sweep_about=deck.sweep_choice(key))

    def _choose_source_time(self, microseconds: float) -> None:
        state = self.bench.state
        display = replace(state.display, source_time_us=microseconds)
        label = "Change the time since the pulse"
        self.bench.edit(label, replace(state, display=display), merge="source time")

    def _set_cutting_error(self, _field: str, text: str) -> None:
        self.attempt(
            self._with_cutting_error(text),
            "Change the cutting error",
            lambda message: self._views.cutting_error.show_error("cutting_error", message),
        )

    @staticmethod
    def _with_cutting_error(text: str) -> Callable[[BenchState], BenchState]:
        def build(state: BenchState) -> BenchState:
            degrees = parse_number(text.replace("°", "").replace("±", ""), "cutting error")
            if not 0.0 < degrees <= 30.0:
                raise InputError(
                    "A cutting error lies above 0° and goes up to 30°.", where="cutting error"
                )
            return replace(state, cutting_error_deg=degrees)

        return build
