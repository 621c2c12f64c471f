"""How fine to draw: the coarse mesh while something moves, the fine one once it rests."""

from __future__ import annotations

import time

from PySide6.QtCore import QObject, QTimer, Signal

REST_MS = 150
FOLLOW_MS = 80.0  # panels of numbers follow a movement about this often
FRAME_BUDGET_MS = 16.0
_MEMORY = 0.7  # weight of the past in the running mean of frame times


class Pace(QObject):
    """Decides the mesh level from what the last frames took, not from a setting.

    Signals
    -------
    rested()
        Nothing has moved for a moment: time for the fine mesh.
    """

    rested = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._fine_frame_ms: float | None = None
        self._moving = False
        self._followed = 0.0
        self._timer = QTimer(self, singleShot=True, interval=REST_MS)
        self._timer.timeout.connect(self._rest)

    @property
    def is_fine(self) -> bool:
        """Whether to use the fine mesh now."""
        fast = self._fine_frame_ms is not None and self._fine_frame_ms < FRAME_BUDGET_MS
        return not self._moving or fast

    @property
    def is_moving(self) -> bool:
        """Whether a change came within the last moment."""
        return self._moving

    def may_follow(self) -> bool:
        """Return whether what need not be seen in every frame should be shown now."""
        now = 1e3 * time.perf_counter()
        if now - self._followed < FOLLOW_MS:
            return False
        self._followed = now
        return True

    def move(self) -> None:
        """Note that something changes right now."""
        self._moving = True
        self._timer.start()

    def frame(self, milliseconds: float, fine: bool) -> None:
        """Learn what a frame took, from the state's change to the painted picture."""
        if not fine:
            return
        past = self._fine_frame_ms
        self._fine_frame_ms = (
            milliseconds if past is None else (_MEMORY * past + (1 - _MEMORY) * milliseconds)
        )

    def stop(self) -> None:
        """Let no timer run on."""
        self._timer.stop()

    def _rest(self) -> None:
        self._moving = False
        self.rested.emit()
