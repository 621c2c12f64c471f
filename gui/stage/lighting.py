"""The light on the stage: two soft lamps fixed to the camera, a matte surface.

The same numbers go into the shader and into the drawing without OpenGL. Shading only ever
darkens a colour a little: the colour is the reading, the shade is the shape.
"""

from __future__ import annotations

import numpy as np

from core.arrays import FloatArray

# Directions towards the lamps: right, up, towards the viewer.
KEY = np.array([-0.42, 0.62, 0.66]) / np.linalg.norm([-0.42, 0.62, 0.66])
FILL = np.array([0.80, -0.25, 0.55]) / np.linalg.norm([0.80, -0.25, 0.55])
AMBIENT, KEY_POWER, FILL_POWER = 0.52, 0.44, 0.14
WRAP = 0.35  # how far the key light reaches round the shoulder
SHEEN = 0.07
RIM = 0.20  # darkening at the outline
GLASS = 0.55  # how much more a translucent sheet covers at its outline
BACK_TINT = np.array([0.74, 0.75, 0.80])  # the inside of an opened sheet


def lit(normals: FloatArray, towards: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return the factor on the colour, the sheen added to it, and |cos| of the view angle.

    Parameters
    ----------
    normals, towards : (3, N) arrays
        Unit vectors: surface normals and directions to the eye, in camera axes.
    """
    facing = np.einsum("in,in->n", normals, towards)
    n = np.where(facing < 0.0, -normals, normals)
    facing = np.abs(facing)
    key = np.maximum((KEY @ n + WRAP) / (1.0 + WRAP), 0.0)
    fill = np.maximum(FILL @ n, 0.0)
    half = KEY[:, None] + towards
    half = half / np.sqrt((half * half).sum(axis=0))
    sheen = SHEEN * np.maximum((n * half).sum(axis=0), 0.0) ** 16
    rim = 1.0 - RIM * (1.0 - facing) ** 3
    return (AMBIENT + KEY_POWER * key + FILL_POWER * fill) * rim, sheen, facing


def covered(opacity: float, facing: FloatArray) -> FloatArray:
    """Return the opacity of a sheet where it is seen at a cosine: glass is thicker aslant."""
    if opacity >= 1.0:
        return np.ones_like(facing)
    fuller = min(1.0, opacity + GLASS)
    return np.asarray(opacity + (fuller - opacity) * (1.0 - facing) ** 2)
