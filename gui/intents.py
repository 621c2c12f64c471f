"""What the user does, turned into named steps on the bench.

One class a region of the window. Every handler builds a new state from the present one; a text
that cannot be used raises `InputError`, which is shown where it was typed and changes nothing.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import replace
from typing import Any

import numpy as np
from PySide6.QtCore import QObject, Signal

from core import edits, live
from core.crystal.directions import parse_direction
from core.crystal.orientation import orientation_texts, parse_orientation
from core.errors import InputError
from core.numbers import parse_number
from core.state import BenchState, OrientationChoice, Specimen, Vector3
from gui.bench import Bench
from gui.presenting import deck, ledger
from gui.presenting.stage import unit_vector
from gui.window import Views

_FIELD_WORDS = {
    "crystal_class": "crystal class",
    "unique_axis": "unique axis",
    "density": "density",
    "temperature": "temperature",
    "name": "name",
    "source": "source",
    "notes": "notes",
}
_CELL_WORDS = {name: name for name in "abc"} | {"alpha": "α", "beta": "β", "gamma": "γ"}


def with_specimen(state: BenchState, specimen: Specimen) -> BenchState:
    """Return the state with the ledger's crystal replaced."""
    if state.display.ledger == "B" and state.other is not None:
        return replace(state, other=specimen)
    return replace(state, specimen=specimen)


def with_orientation(state: BenchState, side: str, choice: OrientationChoice) -> BenchState:
    """Return the state with the orientation of one side replaced."""
    if side == "A":
        return replace(state, orientation_a=choice)
    return replace(state, orientation_b=choice)


def check_orientations(state: BenchState) -> None:
    """Refuse a state in which an orientation can no longer be read, as without its cell.

    Raises
    ------
    InputError
    """
    for side in "AB":
        choice = state.orientation_of(side)
        try:
            live.rotation(choice, state.specimen_of(side))
        except InputError as error:
            raise InputError(
                f"Orientation {side}, “{choice.text}”, could not be read any more. "
                f"{error.message}",
                "Say it by angles or as a matrix first.",
            ) from None


class Intents(QObject):
    """What every region shares: the bench, and errors shown in place.

    Signals
    -------
    said(str)
        A sentence about what has just been done.
    """

    said = Signal(str)

    def __init__(self, bench: Bench, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.bench = bench

    def attempt(
        self,
        build: Callable[[BenchState], BenchState],
        label: str,
        refuse: Callable[[str], None],
        merge: str = "",
    ) -> None:
        """Edit the bench; an input that cannot be used is refused in place."""
        try:
            state = build(self.bench.state)
            check_orientations(state)
        except InputError as error:
            refuse(str(error))
        else:
            self.bench.edit(label, state, merge)

    def show_choice(self, label: str, **choices: Any) -> None:
        """Change how the bench is looked at."""
        state = self.bench.state
        self.bench.edit(label, replace(state, display=replace(state.display, **choices)))


class LedgerIntents(Intents):
    """Edits of the specimen and of the orientations.

    Signals
    -------
    table_asked(str)
        A pasted table cannot be used before something is answered.
    """

    table_asked = Signal(str)

    def __init__(self, bench: Bench, views: Views, parent: QObject | None = None) -> None:
        super().__init__(bench, parent)
        self._views = views
        self._drag = 0
        views.constants.constant_edited.connect(self._set_constant)
        views.constants.block_pasted.connect(self._paste)
        views.constants.face_chosen.connect(self._choose_face)
        views.specimen.edited.connect(self._set_field)
        views.cell.edited.connect(self._set_cell)
        views.cell.axes_changed.connect(self._set_axes)
        for side, form in views.orientations.items():
            _OrientationIntents(self.bench, side, form, self)
        views.orientation_buttons.swap_requested.connect(self.swap)
        views.orientation_buttons.copy_requested.connect(self.copy_from)

    @property
    def specimen(self) -> Specimen:
        """The crystal that the ledger shows."""
        return ledger.ledger_specimen(self.bench.state)

    def _set_constant(self, row: int, column: int, text: str) -> None:
        face = self.bench.state.display.face
        self.attempt(
            lambda state: with_specimen(
                state, edits.set_constant(self.specimen, face, row, column, text)
            ),
            ledger.edit_label(face, row, column),
            lambda message: self._views.constants.show_error(row, column, message),
        )

    def _paste(self, row: int, column: int, text: str) -> None:
        """Put a pasted block in; a table that leaves something to ask goes to its dialog."""
        face = self.bench.state.display.face
        if edits.is_open_table(face, text):
            self.table_asked.emit(text)
            return

        def build(state: BenchState) -> BenchState:
            specimen = edits.set_block(self.specimen, face, row, column, text)
            guesses = edits.paste_guesses(face, text)
            self.said.emit("; ".join(guess.partition(":")[0] for guess in guesses))
            return with_specimen(state, specimen)

        self.attempt(
            build,
            "Paste constants",
            lambda message: self._views.constants.show_error(row, column, message),
        )

    def _choose_face(self, face: str) -> None:
        self.show_choice(f"Show {ledger.NAMES[face].lower()}", face=face)

    def _set_field(self, field: str, text: str) -> None:
        if field == "chosen":
            self.show_choice(f"Show the crystal of {text}", ledger=text)
            return
        self.attempt(
            lambda state: with_specimen(state, edits.set_field(self.specimen, field, text)),
            f"Change the {_FIELD_WORDS[field]}",
            lambda message: self._views.specimen.show_error(field, message),
        )

    def _set_cell(self, field: str, text: str) -> None:
        """Take the cell as it stands in its six fields; one half filled in has to wait."""
        form, texts = self._views.cell, self._views.cell.texts()
        wanting = [_CELL_WORDS[name] for name in edits.CELL_FIELDS if not texts[name].strip()]
        if 0 < len(wanting) < len(texts):
            missing = ", ".join(wanting)
            form.show_error(field, f"A cell has six numbers; {missing} still wanted.")
            return
        for name in texts:
            form.clear_error(name)
        self.attempt(
            lambda state: with_specimen(state, edits.set_cell(self.specimen, texts)),
            "Change the unit cell",
            lambda message: form.show_error(_field_of(message, texts, field), message),
        )

    def _set_axes(self, axes: str, re_express: bool) -> None:
        self.attempt(
            lambda state: with_specimen(state, edits.set_axes(self.specimen, axes, re_express)),
            "Turn the numbers into other axes" if re_express else "Rename the crystal axes",
            lambda message: self._views.cell.show_error("axes", message),
        )

    def make_exact(self) -> None:
        """Replace the table by the nearest one of its class."""
        state = self.bench.state
        self.bench.edit(
            "Make the class exact", with_specimen(state, edits.make_exact(self.specimen))
        )

    def swap(self) -> None:
        """Exchange A and B, crystals included."""
        state = self.bench.state
        swapped = replace(
            state, orientation_a=state.orientation_b, orientation_b=state.orientation_a
        )
        if state.other is not None:
            swapped = replace(swapped, specimen=state.other, other=state.specimen)
        self.bench.edit("Swap A and B", swapped)

    def copy_from(self, side: str) -> None:
        """Give the other side the orientation of this one."""
        state = self.bench.state
        target = "B" if side == "A" else "A"
        self.attempt(
            lambda s: with_orientation(s, target, self._carried(state, side, target)),
            f"Copy the orientation of {side} to {target}",
            lambda message: self._views.orientations[target].show_error("text", message),
        )

    def _carried(self, state: BenchState, side: str, target: str) -> OrientationChoice:
        """Return the orientation of a side in words that the other side's crystal can read."""
        choice = state.orientation_of(side)
        if state.other is None:
            return choice
        turn = live.rotation(choice, state.specimen_of(side))
        return OrientationChoice(
            orientation_texts(turn, state.specimen_of(target).frame)["matrix"]
        )

    def one_crystal(self) -> None:
        """Let B show the crystal of A again; words that A cannot read become a matrix."""
        state = self.bench.state
        display = replace(state.display, ledger="A")
        one = replace(state, other=None, display=display)
        try:
            check_orientations(one)
        except InputError:
            one = replace(one, orientation_b=self._carried(state, "B", "A"))
        self.bench.edit("Show one crystal", one)

    def reset_orientations(self) -> None:
        """Put both parts back along the crystal axes."""
        state = self.bench.state
        self.bench.edit(
            "Reset the orientations",
            replace(
                state, orientation_a=OrientationChoice(), orientation_b=OrientationChoice()
            ),
        )


def _field_of(message: str, fields: Iterable[str], edited: str) -> str:
    """Return the field that a refusal names, or else the one that was edited."""
    return next((name for name in fields if message.startswith(f"{name}: ")), edited)


class _OrientationIntents(Intents):
    """Edits of one orientation form."""

    def __init__(self, bench: Bench, side: str, form: Any, parent: QObject) -> None:
        super().__init__(bench, parent)
        self._side, self._form = side, form
        self._drag = 0
        form.edited.connect(self._set_text)
        form.way_chosen.connect(self._say_otherwise)
        form.turn_edited.connect(self._turn)
        form.turn_finished.connect(self._end_drag)

    @property
    def _choice(self) -> OrientationChoice:
        return self.bench.state.orientation_of(self._side)

    def _set_text(self, _field: str, text: str) -> None:
        frame = self.bench.state.specimen_of(self._side).frame
        self.attempt(
            lambda state: with_orientation(
                state,
                self._side,
                replace(self._choice, text=parse_orientation(text, frame).text),
            ),
            f"Orient {self._side}",
            lambda message: self._form.show_error("text", message),
        )

    def _say_otherwise(self, way: str) -> None:
        """Say the same orientation, turns included, in another way."""
        specimen = self.bench.state.specimen_of(self._side)
        turned = live.rotation(self._choice, specimen)
        text = orientation_texts(turned, specimen.frame).get(way)
        if way == "identity":
            text = "identity"
        if text is None:
            return
        self.bench.edit(
            f"Say {self._side} in another way",
            with_orientation(self.bench.state, self._side, OrientationChoice(text)),
        )

    def _turn(self, axis: int, degrees: float) -> None:
        turn = list(self._choice.turn)
        turn[axis] = degrees
        choice = replace(self._choice, turn=(turn[0], turn[1], turn[2]))
        self.bench.edit(
            f"Turn {self._side} about part {'XYZ'[axis]}",
            with_orientation(self.bench.state, self._side, choice),
            merge=f"turn {self._side} {axis} {self._drag}",
        )

    def _end_drag(self) -> None:
        self._drag += 1


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
