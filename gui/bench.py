"""The bench: the only mutable thing. One frozen state, one undo stack, one signal."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QUndoCommand, QUndoStack

from core.state import BenchState


class Bench(QObject):
    """Holds the `BenchState` and its history.

    Emits `changed(state, names)` after every real change, `names` being the set of the fields
    of the state that differ from before.
    """

    changed = Signal(object, object)

    def __init__(self, state: BenchState, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._state = state
        self._newest: _Snapshot | None = None
        self.history = QUndoStack(self)

    @property
    def state(self) -> BenchState:
        """The present state."""
        return self._state

    def edit(self, label: str, state: BenchState, merge: str = "") -> None:
        """Go to another state, as one named step that can be undone.

        Steps with the same non-empty `merge` key that follow each other become one, as while
        dragging; one that comes back to its start is no step. Nor is a state equal to the
        present one.
        """
        if state == self._state:
            return
        if self._continues(merge):
            self._extend(state)
        else:
            self._newest = _Snapshot(self._apply, self._state, state, label, merge)
            self.history.push(self._newest)

    def _continues(self, merge: str) -> bool:
        """Return whether a step goes on with the newest one, which must not be saved yet."""
        history, newest = self.history, self._newest
        at_the_end = history.index() == history.count() > 0
        return bool(
            newest and merge and newest.merge == merge and at_the_end and not history.isClean()
        )

    def _extend(self, state: BenchState) -> None:
        """Let the newest step lead to another state.

        Not by pushing a step for Qt to merge: every step that Qt takes and drops stays in
        memory with its two states, and a drag makes hundreds.
        """
        newest = self._newest
        if newest is None:
            raise ValueError("there is no step to go on with")
        newest.new = state
        self._apply(state)
        if newest.new == newest.old:
            newest.setObsolete(True)
            self._newest = None
            self.history.undo()

    def load(self, state: BenchState) -> None:
        """Start anew from a state, with an empty history."""
        self._newest = None
        self.history.clear()
        self._apply(state)

    def _apply(self, state: BenchState) -> None:
        old, self._state = self._state, state
        names = frozenset(
            field.name
            for field in fields(BenchState)
            if getattr(old, field.name) != getattr(state, field.name)
        )
        if names:
            self.changed.emit(state, names)


class _Snapshot(QUndoCommand):
    """One step: the state before, the state after."""

    def __init__(
        self,
        apply: Callable[[BenchState], None],
        old: BenchState,
        new: BenchState,
        label: str,
        merge: str,
    ) -> None:
        super().__init__(label)
        self._apply = apply
        self.old, self.new = old, new
        self.merge = merge

    def redo(self) -> None:
        """Go to the state after."""
        self._apply(self.new)

    def undo(self) -> None:
        """Go back to the state before."""
        self._apply(self.old)
