"""How much a front dominates: one number by which fronts are compared."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from model.errors import InputError

F64 = NDArray[np.float64]


def hypervolume(costs: ArrayLike, reference: Sequence[float]) -> float:
    """Area or volume between a reference point and the rows that beat it, exact.

    costs : (n, 2) or (n, 3), less is better; rows that do not beat the reference in every column
        count nothing. reference : what every point is measured from.

    Source: E. Zitzler & L. Thiele, IEEE Transactions on Evolutionary Computation 3 (1999); three
    columns in slices along the last one (L. While et al., ibid. 10, 2006).
    """
    points = np.asarray(costs, dtype=np.float64)
    corner = np.asarray(reference, dtype=np.float64)
    if points.ndim != 2 or points.shape[1] not in (2, 3) or corner.shape != points.shape[1:]:
        raise InputError("costs", f"shape {points.shape}", "give 2 or 3 columns, as the reference")
    points = points[(points < corner).all(axis=1)]
    if not len(points):
        return 0.0
    if points.shape[1] == 2:
        return _area(points, corner)
    points = points[np.argsort(points[:, 2], kind="stable")]
    ends = np.append(points[1:, 2], corner[2])
    depth = ends - points[:, 2]
    volume = 0.0
    layer = points[:0, :2]
    for k in range(len(points)):
        layer = _stairs(np.concatenate([layer, points[k : k + 1, :2]]))
        if depth[k] > 0:
            volume += depth[k] * _area(layer, corner[:2])
    return volume


def _stairs(points: F64) -> F64:
    """The points that no other beats, by the first column."""
    points = points[np.lexsort((points[:, 1], points[:, 0]))]
    best = np.minimum.accumulate(points[:, 1])
    first: NDArray[np.bool_] = np.append(True, points[1:, 1] < best[:-1])
    return points[first]


def _area(points: F64, corner: F64) -> float:
    stairs = _stairs(points)
    right = np.append(stairs[1:, 0], corner[0])
    return float((right - stairs[:, 0]) @ (corner[1] - stairs[:, 1]))
