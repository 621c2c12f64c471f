"""Curves of rays, parted where the sheet that they belong to crosses another along a line."""

from __future__ import annotations

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray


def parted(along: FloatArray, gaps: IntArray) -> FloatArray:
    """Return what runs along a closed curve, (..., N), with three more places in every gap.

    A gap lies between the places i and i + 1. Either end goes on by half a step, and between
    the two nothing is defined.
    """
    if not gaps.size:
        return along
    steps = along.shape[-1] - 1  # the last place is the first again
    before, after = along[..., gaps], along[..., gaps + 1]
    end = before + 0.5 * (before - along[..., (gaps - 1) % steps])
    start = after - 0.5 * (along[..., (gaps + 2) % steps] - after)
    values = np.stack([end, np.full_like(end, np.nan), start], axis=-1)
    places = np.repeat(gaps + 1, 3)
    return np.insert(along, places, values.reshape(*along.shape[:-1], -1), axis=-1)


def parted_flags(flags: BoolArray, gaps: IntArray) -> BoolArray:
    """Return flags along a curve, (N,), for the places that `parted` makes."""
    values = np.stack([flags[gaps], flags[gaps], flags[gaps + 1]], axis=-1)
    return np.insert(flags, np.repeat(gaps + 1, 3), values.ravel())
