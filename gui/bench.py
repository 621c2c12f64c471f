"""The bench: the only mutable thing. One frozen state, one undo stack, one signal."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QUndoCommand, QUndoStack

from core.state import BenchState

_SNAPSHOT_ID = 1


class Bench(QObject):
    """Holds the `BenchState` and its history.

    Emits `changed(state, names)` after every real change, `names` being the set of the fields
    of the state that differ from before.
    """

    changed = Signal(object, object)

    def __init__(self, state: BenchState, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._state = state
        self.history = QUndoStack(self)

    @property
    def state(self) -> BenchState:
        """The present state."""
        return self._state

    def edit(self, label: str, state: BenchState, merge: str = "") -> None:
        """Go to another state, as one named step that can be undone.

        Steps with the same non-empty `merge` key that follow each other become one, as while
        dragging. A state equal to the present one is no step.
        """
        if state != self._state:
            self.history.push(_Snapshot(self._apply, self._state, state, label, merge))

    def load(self, state: BenchState) -> None:
        """Start anew from a state, with an empty history."""
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
        self._old, self._new = old, new
        self._merge = merge

    def redo(self) -> None:
        """Go to the state after."""
        self._apply(self._new)

    def undo(self) -> None:
        """Go back to the state before."""
        self._apply(self._old)

    def id(self) -> int:
        """Let Qt offer neighbouring steps for merging; -1 keeps a step by itself."""
        return _SNAPSHOT_ID if self._merge else -1

    def mergeWith(self, other: QUndoCommand) -> bool:
        """Take the newer step of one drag into this one; a drag back home leaves no step."""
        if not isinstance(other, _Snapshot) or other._merge != self._merge:
            return False
        self._new = other._new
        self.setObsolete(self._new == self._old)
        return True
