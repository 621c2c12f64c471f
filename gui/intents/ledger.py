"""Edits of the specimen and of the orientations, from the ledger."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from typing import Any

import numpy as np
from PySide6.QtCore import QObject, Signal

from core import live
from core.crystal.orientation import orientation_texts, parse_orientation
from core.editing import specimen as edits
from core.errors import InputError
from core.numbers import significant
from core.state import BenchState, OrientationChoice, Specimen, claimed_class
from core.tensor.symmetry import distance
from gui.bench import Bench
from gui.intents.base import Intents, check_orientations, with_orientation, with_specimen
from gui.presenting import ledger
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
_SEEN_CHANGE = 1e-6  # percent
_CELL_WORDS = {name: name for name in "abc"} | {"alpha": "α", "beta": "β", "gamma": "γ"}


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
        """Put a pasted block in; what cannot go in as it is goes to the dialog of tables."""
        face = self.bench.state.display.face
        if edits.belongs_in_dialog(face, text):
            self.table_asked.emit(text)
            return

        def build(state: BenchState) -> BenchState:
            before = self.specimen
            specimen = edits.set_block(before, face, row, column, text)
            words = "; ".join(edits.paste_words(before, specimen, face, text))
            self.said.emit(f"{words[:1].upper()}{words[1:]}")
            return with_specimen(state, specimen)

        self.attempt(build, "Paste constants", self._views.constants.show_refusal)

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
        state, before = self.bench.state, self.specimen
        off = 100 * distance(np.array(before.stiffness), claimed_class(before))
        self.bench.edit("Make the class exact", with_specimen(state, edits.make_exact(before)))
        if off > _SEEN_CHANGE:
            self.said.emit(f"The table has changed by {significant(off, 2)} %.")

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
