"""Surfaces with known shapes, for the tests of the stage."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from core.directional.sphere import sphere_mesh
from gui.viewdata import DirectionMark, PaneView, ScaleView, SheetView, Triad

PART = Triad(((1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)), ("X", "Y", "Z"), "part")


def radial_rows(level, radius, gradient, value=None):
    """Rows of the surface of radius r(n), with the gradient of r as a function of n."""
    n = sphere_mesh(level).vertices
    r, g = radius(n), gradient(n)
    normal = n * r - (g - (g * n).sum(axis=0) * n)
    values = r if value is None else value(n)
    return np.ascontiguousarray(np.vstack([n * r, normal, values[None]]), dtype=np.float32)


def ellipsoid(a, b, c, level=4, value=None):
    """The ellipsoid of half axes a, b, c."""
    weights = np.array([[a], [b], [c]], dtype=float) ** -2.0
    return radial_rows(
        level,
        lambda n: (weights * n * n).sum(axis=0) ** -0.5,
        lambda n: -weights * n * (weights * n * n).sum(axis=0) ** -1.5,
        value,
    )


def cubic_young(least, greatest, level=4):
    """1/E = p - q (x⁴ + y⁴ + z⁴): least along the axes, greatest along the cube's diagonals."""
    along_axis, along_diagonal = 1.0 / least, 1.0 / greatest
    q = (along_axis - along_diagonal) * 1.5
    p = along_axis - q

    def inverse(n):
        return p + q * (n**4).sum(axis=0)

    def gradient(n):
        return -4 * q * n**3 / inverse(n) ** 2

    return radial_rows(level, lambda n: 1 / inverse(n), gradient)


def sheet(rows, level=4, visible=True, opacity=1.0):
    return SheetView(rows, sphere_mesh(level).triangles, visible, opacity)


def scale_of(rows, diverging=False, title="Young's modulus E, GPa"):
    low, high = float(np.nanmin(rows[6])), float(np.nanmax(rows[6]))
    return ScaleView(low, high, f"{low:.1f}", f"{high:.1f}", title, diverging)


def pane_view(*sheets, **changes):
    """A pane with these sheets, part axes and a scale over all their values."""
    rows = np.concatenate([s.rows for s in sheets], axis=1)
    reach = np.nanmax(np.linalg.norm(rows[:3], axis=0))
    view = PaneView(
        side="A", title="Harrow Bay blank HB-7", sheets=tuple(sheets), radius=float(reach),
        scale=scale_of(rows), triads=(PART,), marks=(), section=None,
    )
    return replace(view, **changes)


def three_sheets(level=4):
    """Three nested sheets like slownesses: two outer ones near each other, one well inside."""
    return (
        sheet(ellipsoid(0.55, 0.5, 0.45, level), level),
        sheet(cubic_young(0.72, 0.86, level), level),
        sheet(ellipsoid(0.95, 1.0, 1.08, level), level),
    )


def example_marks():
    return (
        DirectionMark((0.48, -0.6, 0.64), "", "pin"),
        DirectionMark((1.0, 0.0, 0.0), "least", "least"),
        DirectionMark((0.57735, -0.57735, 0.57735), "greatest", "greatest"),
        DirectionMark((0.0, -0.7071, -0.7071), "", "axis"),
    )
