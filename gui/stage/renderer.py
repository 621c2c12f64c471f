"""Which renderer this machine gets: OpenGL where it works, numpy where it does not."""

from __future__ import annotations

import os

from gui.stage.composition import Renderer
from gui.stage.flat_scene import FlatRenderer
from gui.stage.gl_probe import GlReport, probe

REQUIRE_VARIABLE = "TRICLINE_REQUIRE_OPENGL"


def make_renderer(report: GlReport | None = None) -> Renderer:
    """Return the one renderer that all the panes share.

    Parameters
    ----------
    report : GlReport or None
        What the probe found, if it was asked already.

    Raises
    ------
    RuntimeError
        If OpenGL does not work although the environment variable TRICLINE_REQUIRE_OPENGL is
        "1", as it is where the program is tested.
    """
    found = probe() if report is None else report
    if found.ok:
        # Imported here because the bindings themselves may be missing where the probe fails.
        from gui.stage.scene import SceneRenderer

        return SceneRenderer()
    if os.environ.get(REQUIRE_VARIABLE) == "1":
        raise RuntimeError(f"OpenGL is required but does not work here: {found.reason}")
    return FlatRenderer()
