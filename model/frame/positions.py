"""Where the joints of every variant lie."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from model.frame.columns import Column, Values
from model.frame.generator import Extra, Scaffold, scaffold
from model.frame.layout import Layout
from model.frame.skeleton import F64


def position_slopes(layout: Layout) -> dict[str, tuple[float, F64]]:
    """How the joints of a layout move with each of its dimensions.

    Returns
    -------
    dict
        By path: the present value, and the slope of the joint positions (joints, 3), which is
        exact because positions are linear in each dimension. The tracks move no joint.
    """
    present = {
        "wheelbase": layout.wheelbase,
        "track_front": layout.track_front,
        "track_rear": layout.track_rear,
    }
    for k, station in enumerate(layout.stations):
        names = ["width_low", "height_low"]
        if layout.tall(k):
            names += ["width_high", "height_high"]
        if station.outrigger > 0:
            names.append("outrigger")
        if station.name not in (layout.front_axle, layout.rear_axle):
            names.append("at")
        for name in names:
            present[f"station.{station.name}.{name}"] = float(getattr(station, name))
    for hoop in layout.hoops:
        for name in ("height", "width", "lean"):
            present[f"hoop.{hoop.name}.{name}"] = float(getattr(hoop, name))
    count = len(present) + 1
    columns: dict[str, Column] = {}
    for row, (path, value) in enumerate(present.items(), start=1):
        columns[path] = np.where(np.arange(count) == row, value + 1.0, value)
    values = Values(layout, columns, count)
    bays = [span.bays for span in layout.spans]
    xyz = positions(values, scaffold(layout, bays), np.arange(count))
    return {
        path: (value, xyz[row] - xyz[0])
        for row, (path, value) in enumerate(present.items(), start=1)
    }


def positions(values: Values, frame: Scaffold, rows: NDArray[np.int64]) -> F64:
    """(rows, joints, 3) joint positions: straight rails between the key stations."""
    layout = values.layout
    wheelbase = values.number("wheelbase", layout.wheelbase)[rows]
    after = np.minimum(frame.before + 1, len(layout.stations) - 1)

    def at_rings(name: str) -> F64:
        table = np.stack(
            [
                values.number(f"station.{s.name}.{name}", getattr(s, name))[rows]
                for s in layout.stations
            ],
            axis=1,
        )
        near, far = table[:, frame.before], table[:, after]
        return near + (far - near) * frame.along

    x = at_rings("at") * wheelbase[:, None]
    half_low, z_low = at_rings("width_low") / 2, at_rings("height_low")
    corners = frame.skeleton.rings.shape[1]
    xyz = np.empty((len(rows), len(x[0]), corners, 3))
    xyz[..., 0] = x[..., None]
    xyz[:, :, 0, 1], xyz[:, :, 1, 1] = -half_low, half_low
    xyz[:, :, :2, 2] = z_low[..., None]
    if corners == 4:
        half_high = at_rings("width_high") / 2
        xyz[:, :, 2, 1], xyz[:, :, 3, 1] = half_high, -half_high
        xyz[:, :, 2:, 2] = at_rings("height_high")[..., None]
    rings = xyz.reshape(len(rows), -1, 3)
    if not frame.extra:
        return rings
    beside = [_extra(values, frame, extra, rows, rings) for extra in frame.extra]
    return np.concatenate([rings, np.stack(beside, axis=1)], axis=1)


def _extra(
    values: Values, frame: Scaffold, extra: Extra, rows: NDArray[np.int64], rings: F64
) -> F64:
    """(rows, 3) position of a joint beside those of the rings."""
    layout = values.layout
    if extra.rule == "middle":
        middle: F64 = (rings[:, extra.i] + rings[:, extra.j]) / 2
        return middle
    corners = frame.skeleton.rings.shape[1]
    if extra.rule == "outrigger":
        station = layout.stations[extra.i]
        place = rings[:, _ring_of(frame, extra.i) * corners].copy()
        outer = values.number(f"station.{station.name}.outrigger", station.outrigger)
        place[:, 1] = extra.j * outer[rows] / 2
        return place
    hoop = layout.hoops[extra.i]
    base = [s.name for s in layout.stations].index(hoop.station)
    place = rings[:, _ring_of(frame, base) * corners].copy()
    path = f"hoop.{hoop.name}"
    place[:, 0] += values.number(f"{path}.lean", hoop.lean)[rows]
    place[:, 1] = extra.j * values.number(f"{path}.width", hoop.width)[rows] / 2
    place[:, 2] = values.number(f"{path}.height", hoop.height)[rows]
    return place


def _ring_of(frame: Scaffold, station: int) -> int:
    """Ring number of a key station."""
    return int(np.flatnonzero((frame.before == station) & (frame.along == 0.0))[0])
