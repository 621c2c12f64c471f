"""What the handlers of all regions share: steps on the bench, and errors shown in place.

Every handler builds a new state from the present one; a text that cannot be used raises
`InputError`, which is shown where it was typed and changes nothing.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

from PySide6.QtCore import QObject, Signal

from core import live
from core.errors import InputError
from core.state import BenchState, OrientationChoice, Specimen
from gui.bench import Bench


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
