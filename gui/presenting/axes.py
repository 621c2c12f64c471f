"""Acoustic axes for the views: found once a crystal, turned with the part.

Finding them takes some 15 ms, more than a live edit may. Views that follow an edit are given
what is known by then (`AxesOf`); figures and files, which wait for nothing, use `axes_now`.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import lru_cache

import numpy as np

from core import live
from core.directional.acoustic_axes import AcousticAxis, acoustic_axes
from core.state import BenchState, Matrix, Specimen, as_matrix

Axes = tuple[AcousticAxis, ...]
AxesOf = Callable[[Specimen], Axes]
CrystalKey = tuple[Matrix, float | None]


def crystal_key(specimen: Specimen) -> CrystalKey:
    """Return all that the axes of a crystal depend on."""
    return specimen.stiffness, specimen.density


def axes_now(specimen: Specimen) -> Axes:
    """Return the acoustic axes in crystal axes, none without a density."""
    return () if specimen.density is None else _found(*crystal_key(specimen))


@lru_cache(maxsize=8)
def _found(stiffness: Matrix, density: float | None) -> Axes:
    return acoustic_axes(live.crystal_medium(stiffness, density))


def axes_in_part(state: BenchState, side: str, axes_of: AxesOf) -> Axes:
    """Return the acoustic axes of a side in part axes; the same object for the same turn."""
    specimen = state.specimen_of(side)
    turn = live.rotation(state.orientation_of(side), specimen)
    return _turned(axes_of(specimen), as_matrix(turn))


@lru_cache(maxsize=8)
def _turned(axes: Axes, turn: Matrix) -> Axes:
    matrix = np.array(turn)
    return tuple(
        replace(
            axis,
            direction=matrix @ axis.direction,
            curve=None if axis.curve is None else matrix @ axis.curve,
        )
        for axis in axes
    )


def single_directions(axes: Axes) -> Axes:
    """Return those that are one direction each: cones and touching sheets."""
    return tuple(axis for axis in axes if axis.kind in ("conical", "tangential"))
