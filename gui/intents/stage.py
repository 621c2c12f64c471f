"""Edits from the tool bar and the panes."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from PySide6.QtCore import QObject

from core import live
from core.crystal.directions import parse_direction
from core.state import BenchState, Vector3
from gui.bench import Bench
from gui.intents.base import Intents
from gui.presenting import deck
from gui.presenting.stage import unit_vector
from gui.window import Views


class StageIntents(Intents):
    """Edits from the tool bar and the panes."""

    def __init__(self, bench: Bench, views: Views, parent: QObject | None = None) -> None:
        super().__init__(bench, parent)
        self._views = views
        bar = views.toolbar
        bar.quantity_chosen.connect(self.choose_quantity)
        bar.layout_chosen.connect(self.choose_layout)
        bar.sheet_toggled.connect(self._toggle_sheet)
        bar.plane_chosen.connect(self.choose_plane)
        bar.option_toggled.connect(self.toggle)
        bar.colour_chosen.connect(self._colour_by)
        for pane in views.panes.values():
            pane.pin_requested.connect(self.move_pin)

    def choose_quantity(self, key: str) -> None:
        """Put another quantity on the stage."""
        from core.directional.quantities import quantity

        self.bench.edit(f"Show {quantity(key).name}", replace(self.bench.state, quantity=key))

    def choose_layout(self, layout: str) -> None:
        """Show pane A, B or both."""
        words = {"A": "Show A", "B": "Show B", "AB": "Show A and B"}[layout]
        self.show_choice(words, layout=layout)

    def toggle(self, name: str, on: bool) -> None:
        """Turn a display option on or off; see `core.state.Display`."""
        self.show_choice(
            f"{'Turn on' if on else 'Turn off'} {name.replace('_', ' ')}", **{name: on}
        )

    def _toggle_sheet(self, sheet: int, on: bool) -> None:
        sheets = list(self.bench.state.display.sheets)
        sheets[sheet] = on
        self.show_choice(
            "Show a sheet" if on else "Hide a sheet", sheets=(sheets[0], sheets[1], sheets[2])
        )

    def _colour_by(self, key: str) -> None:
        self.show_choice("Colour by another value", colour_by=key)

    def choose_plane(self, text: str) -> None:
        """Cut by a listed plane or by the plane whose normal is typed."""
        self.attempt(
            lambda state: self._with_plane(state, text),
            "Move the section plane",
            self._refuse_plane,
        )

    def _with_plane(self, state: BenchState, text: str) -> BenchState:
        normal = deck.plane_normal(state, text) or self.part_direction(state, text)
        return replace(state, section=normal)

    def _refuse_plane(self, message: str) -> None:
        self._views.section.show_error(message)

    def move_pin(self, direction: Vector3) -> None:
        """Put the pin on another direction, part axes."""
        pin = unit_vector(np.array(direction))
        self.bench.edit("Move the pin", replace(self.bench.state, pin=pin), merge="pin")

    def type_pin(self, text: str) -> None:
        """Put the pin on a direction said in the crystal's words (of A, or the one shown)."""
        self.attempt(
            lambda state: replace(state, pin=self.part_direction(state, text)),
            "Move the pin",
            lambda message: self._views.pin.show_error("direction", message),
        )

    @staticmethod
    def part_direction(state: BenchState, text: str) -> Vector3:
        """Return a direction said in crystal words as a unit vector in part axes."""
        side = state.display.layout[0]
        specimen = state.specimen_of(side)
        vector = np.array(parse_direction(text, specimen.frame).vector)
        return unit_vector(live.rotation(state.orientation_of(side), specimen) @ vector)
