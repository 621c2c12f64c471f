"""Filling triangles with numpy: every pixel of every triangle in a few array operations."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.arrays import Float32Array, FloatArray, IntArray

_LEAST_AREA = 1e-3  # of twice a triangle, in pixels: thinner ones cover no pixel's middle


@dataclass(frozen=True, eq=False)
class Fragments:
    """The pixels that triangles cover, one entry per triangle and pixel.

    Attributes
    ----------
    pixel : (F,) array
        Index into the flattened picture.
    values : (K, F) float32 array
        The corner values, interpolated.
    """

    pixel: IntArray
    values: Float32Array


def rasterise(corners: FloatArray, values: FloatArray, width: int, height: int) -> Fragments:
    """Return the pixels whose middles lie inside triangles.

    A pixel on the edge between two triangles belongs to exactly one of them.

    Parameters
    ----------
    corners : (M, 3, 2) array
        Corners in pixels, x to the right and y down; either winding.
    values : (M, 3, K) array
        Values at the corners, interpolated along straight lines.
    width, height : int
    """
    first = corners[:, 0]
    one, two = corners[:, 1] - first, corners[:, 2] - first
    area = one[:, 0] * two[:, 1] - one[:, 1] * two[:, 0]
    keep = np.flatnonzero(np.abs(area) > _LEAST_AREA)
    corners, values, area = corners[keep], values[keep], area[keep]
    one, two, first = one[keep], two[keep], first[keep]
    step_one, step_two = values[:, 1] - values[:, 0], values[:, 2] - values[:, 0]
    along_x = (step_one * two[:, 1:] - step_two * one[:, 1:]) / area[:, None]
    along_y = (step_two * one[:, :1] - step_one * two[:, :1]) / area[:, None]
    owner, y = _rows(corners[..., 1], height)
    start, length = _spans(corners, owner, y, width)
    shift_x = (start + 0.5 - first[owner, 0]).astype(np.float32)
    shift_y = (y + 0.5 - first[owner, 1]).astype(np.float32)
    pixel = np.repeat(y * width + start, length)
    offset = places_in_run(length)
    pixel += offset
    steps = offset.astype(np.float32)
    result = np.empty((values.shape[2], len(pixel)), dtype=np.float32)
    for k, row in enumerate(result):
        slope = along_x[:, k].astype(np.float32)[owner]
        at_start = (
            values[:, 0, k].astype(np.float32)[owner]
            + slope * shift_x
            + along_y[:, k].astype(np.float32)[owner] * shift_y
        )
        np.multiply(np.repeat(slope, length), steps, out=row)
        row += np.repeat(at_start, length)
    return Fragments(pixel, result)


def _rows(y: FloatArray, height: int) -> tuple[IntArray, IntArray]:
    """Return every row of pixels that a triangle meets: its triangle and its number."""
    top = np.clip(np.ceil(y.min(axis=1) - 0.5), 0, height).astype(np.intp)
    end = np.clip(np.ceil(y.max(axis=1) - 0.5), 0, height).astype(np.intp)
    count = end - top
    return np.repeat(np.arange(len(y)), count), np.repeat(top, count) + places_in_run(count)


def _spans(
    corners: FloatArray, owner: IntArray, y: IntArray, width: int
) -> tuple[IntArray, IntArray]:
    """Return the first pixel and the number of pixels inside the triangle on each row."""
    left = np.full(y.shape, np.inf)
    right = np.full(y.shape, -np.inf)
    middle = y + 0.5
    for p, q in ((0, 1), (1, 2), (2, 0)):
        (px, py), (qx, qy) = corners[:, p].T, corners[:, q].T
        with np.errstate(divide="ignore", invalid="ignore"):
            slope = (qx - px) / (qy - py)
        low, high = np.minimum(py, qy)[owner], np.maximum(py, qy)[owner]
        crosses = (low <= middle) & (middle < high)
        x = px[owner] + (middle - py[owner]) * np.where(crosses, slope[owner], 0.0)
        left = np.where(crosses, np.minimum(left, x), left)
        right = np.where(crosses, np.maximum(right, x), right)
    crossed = np.isfinite(left)
    start = np.clip(np.ceil(np.where(crossed, left, 0.0) - 0.5), 0, width).astype(np.intp)
    end = np.clip(np.ceil(np.where(crossed, right, 0.0) - 0.5), 0, width).astype(np.intp)
    return start, np.maximum(end - start, 0)


def places_in_run(lengths: IntArray) -> IntArray:
    """Return 0, 1, 2, 0, 1, 0 … for runs of the lengths 3, 2, 1 …."""
    place = np.arange(int(lengths.sum()), dtype=np.intp)
    place -= np.repeat(np.cumsum(lengths) - lengths, lengths)
    return place
