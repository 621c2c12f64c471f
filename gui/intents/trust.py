"""What is done about the symmetry of a table: turn to its axes, make it exact."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal, Slot

from core.crystal.cell import AXES_CONVENTIONS, cell_mismatch
from core.editing.symmetry import claim_exactly, kept_part, turn_to
from core.state import BenchState, Specimen
from core.tensor.hidden_axes import HiddenAxes
from core.tensor.symmetry import crystal_class
from gui.bench import Bench
from gui.intents.base import Intents, with_orientation, with_specimen
from gui.presenters.trust import TrustDetails
from gui.presenting.ledger import ledger_specimen
from gui.window import Views

NO_CELL = "Without a cell the axes keep their name."
ARE_OF_CELL = "If these are along the cell: choose its axes, keep the numbers."


class TrustIntents(Intents):
    """The actions of the trust sheet, each one named step.

    Signals
    -------
    refused(str)
        Why an action could not be carried out.
    """

    refused = Signal(str)

    def __init__(
        self, bench: Bench, views: Views, details: TrustDetails, parent: QObject | None = None
    ) -> None:
        super().__init__(bench, parent)
        self._details = details
        views.trust.asked.connect(self.act)

    @Slot(str, str)
    def act(self, action: str, key: str) -> None:
        """Carry out "turn", "both" or "exact" for a class."""
        specimen = ledger_specimen(self.bench.state)
        found = self._details.findings(specimen)
        if found is None:
            return
        if action == "exact":
            entered = found.entered_of(key).claimed
            self._make_exact(key, entered.unique_axis or specimen.unique_axis)
        else:
            self._turn(found.hidden_of(key), action == "both")

    def _make_exact(self, key: str, axis: str) -> None:
        name, before = _name(key), ledger_specimen(self.bench.state)
        self.attempt(
            lambda state: with_specimen(state, claim_exactly(before, key, axis)),
            f"Make the table {name}",
            self.refused.emit,
        )
        if ledger_specimen(self.bench.state) != before:
            self.said.emit(f"The constants are the nearest {name} ones about the same axes.")

    def _turn(self, axes: HiddenAxes, is_exact: bool) -> None:
        name, before = _name(axes.class_key), ledger_specimen(self.bench.state)

        def build(state: BenchState) -> BenchState:
            turned = turn_to(before, axes.rotation, axes.class_key, axes.unique_axis)
            if is_exact:
                turned = claim_exactly(turned, axes.class_key, axes.unique_axis)
            return _with_parts(with_specimen(state, turned), state, before, turned, axes)

        exact = " and make them exact" if is_exact else ""
        self.attempt(build, f"Turn to {name} axes{exact}", self.refused.emit)
        after = ledger_specimen(self.bench.state)
        if after != before:
            self.said.emit(_words(name, axes, after))


def _with_parts(
    new: BenchState, old: BenchState, before: Specimen, turned: Specimen, axes: HiddenAxes
) -> BenchState:
    """Return the state with the orientations of the turned crystal said so that parts stay."""
    for side in "AB":
        if old.specimen_of(side) == before and new.specimen_of(side) == turned:
            choice = kept_part(old.orientation_of(side), before, turned, axes.rotation)
            new = with_orientation(new, side, choice)
    return new


def _words(name: str, axes: HiddenAxes, turned: Specimen) -> str:
    """Return what has been done, and what to think of when the new axes are odd.

    What the axes are now stands in the form of the cell.
    """
    done = f"Turned {axes.turn_deg:.1f}° to the {name} axes."
    if turned.cell is None:
        return f"{done} {NO_CELL}"
    fits = axes.class_key != "triclinic" and not cell_mismatch(
        turned.cell, axes.class_key, axes.unique_axis
    )
    is_odd = turned.crystal_axes not in AXES_CONVENTIONS and "." in turned.crystal_axes
    return f"{done} {ARE_OF_CELL}" if fits and is_odd else done


def _name(key: str) -> str:
    return crystal_class(key).name.split(",")[0]
