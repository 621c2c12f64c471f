"""The two cameras: turned together unless unlinked, and pointed along part axes on demand."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import QObject, Slot

from gui.stage.camera import Camera
from gui.stage.pane import StagePane

_AXES = {"X": (1.0, 0.0, 0.0), "Y": (0.0, 1.0, 0.0), "Z": (0.0, 0.0, 1.0)}


class Cameras(QObject):
    """Keeps the panes' cameras in step."""

    def __init__(self, panes: dict[str, StagePane], parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._panes = panes
        self.linked = True
        for side, pane in panes.items():
            pane.camera_changed.connect(partial(self._follow, side))

    @Slot(str)
    def look_from(self, axis: str) -> None:
        """Look along part X, Y or Z, or from the first view ("home"), in both panes."""
        camera = Camera() if axis == "home" else Camera().looking_along(_AXES[axis])
        for pane in self._panes.values():
            pane.set_camera(camera)

    def set_linked(self, linked: bool) -> None:
        """Let the cameras turn together or each by itself; B takes A's view when linked."""
        self.linked = linked
        if linked:
            self._panes["B"].set_camera(self._panes["A"].camera)

    def _follow(self, side: str, camera: Camera) -> None:
        if self.linked:
            self._panes["B" if side == "A" else "A"].set_camera(camera)
