"""From one layout and columns of changed values to batches ready for the solver."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from model.errors import InputError
from model.frame.batch import PINNED, Batch, Refusal
from model.frame.generator import ALWAYS, Scaffold, scaffold
from model.frame.layout import BRACING, FACES, Layout, Station, Tube, check_face
from model.frame.skeleton import F64
from model.stock.materials import Material
from model.stock.sections import SHAPES, SectionValues, section_values
from model.stock.tubes import StockSize


@dataclass(frozen=True, eq=False)
class Choice:
    """A column of choices: ``options[index[row]]`` is what frame ``row`` has."""

    options: tuple[Any, ...]
    index: NDArray[np.int64]


Column = ArrayLike | Choice
"""One value a frame: numbers in SI for a dimension, a ``Choice`` for anything else."""


def one(layout: Layout) -> Batch:
    """The layout itself as a batch of one.

    Raises
    ------
    InputError
        A dimension with which no frame can be built; names the field, value and remedy.
    """
    built, refused = variants(layout, {}, 1)
    if refused:
        raise refused[0].as_error()
    return built[0]


def variants(
    layout: Layout, columns: Mapping[str, Column], n: int
) -> tuple[list[Batch], list[Refusal]]:
    """Build ``n`` variants of a layout.

    Parameters
    ----------
    layout : what the variants start from.
    columns : values by path, ``n`` of each. Paths: ``wheelbase``, ``track_front``,
        ``track_rear``; ``station.NAME.`` and ``at``, ``width_low``, ``width_high``,
        ``height_low``, ``height_high``, ``ring``; ``span.NAME.`` and ``bays``, ``floor``,
        ``top``, ``left``, ``right``, ``sides``; ``tube.GROUP.`` and the sizes of its shape,
        ``stock`` (choice of StockSize), ``material`` (choice of Material), ``rotation``,
        ``axial``.

    Returns
    -------
    batches
        One for each set of bay counts that occurs, in order of first occurrence.
    refused
        The rows that cannot be built, each with its first fault, by row.
    """
    values = _Values(layout, columns, n)
    values.check_dimensions()
    sections = {group: _tube_columns(values, group, tube) for group, tube in layout.tubes.items()}
    patterns, allowed = _patterns(values)
    bays = np.stack([values.whole(f"span.{s.name}.bays", s.bays) for s in layout.spans], axis=1)
    batches = []
    good = np.array([fault is None for fault in values.fault], dtype=bool)
    for counts in _distinct(bays[good]):
        rows = np.flatnonzero(good & (bays == counts).all(axis=1))
        batches.append(_fill(values, scaffold(layout, counts, allowed), rows, sections, patterns))
    return batches, [fault for fault in values.fault if fault is not None]


class _Values:
    """The columns of ``n`` frames by path, and the first fault found in each frame."""

    def __init__(self, layout: Layout, columns: Mapping[str, Column], n: int) -> None:
        self.layout, self.n = layout, n
        self.columns = dict(columns)
        self.fault: list[Refusal | None] = [None] * n
        known = known_paths(layout)
        for path, column in columns.items():
            if path not in known:
                raise InputError("path", repr(path), f"use one of: {', '.join(sorted(known))}")
            length = len(column.index) if isinstance(column, Choice) else np.size(column)
            if length != n:
                raise InputError(path, f"{length} values", f"give {n}, one a frame")

    def number(self, path: str, default: float) -> F64:
        """(n,) float64 of a dimension."""
        column = self.columns.get(path, default)
        if isinstance(column, Choice):
            options = np.array([float(o) for o in column.options])
            return options[column.index]
        return np.broadcast_to(np.asarray(column, dtype=np.float64), (self.n,))

    def whole(self, path: str, default: int) -> NDArray[np.int64]:
        """(n,) whole numbers of a count."""
        return np.rint(self.number(path, default)).astype(np.int64)

    def choice(self, path: str, default: Any) -> Choice:
        """The choice at a path, or the layout's own as the only option."""
        column = self.columns.get(path)
        if column is None:
            return Choice((default,), np.zeros(self.n, dtype=np.int64))
        if not isinstance(column, Choice):
            raise InputError(path, "numbers", "give a choice among named options")
        return column

    def refuse(self, bad: NDArray[np.bool_], field: str, given: F64, unit: str, do: str) -> None:
        """Note a fault in the rows where ``bad`` and no earlier fault stands."""
        scale = {"mm": 1e3}.get(unit, 1.0)
        name = f"{field}_{unit}" if unit else field
        for row in np.flatnonzero(bad):
            if self.fault[row] is None:
                text = f"{given[row] * scale:.6g}"
                self.fault[row] = Refusal(int(row), name, text, do)

    def check_dimensions(self) -> None:
        """Refuse rows whose dimensions leave no room for a frame."""
        layout = self.layout
        wheelbase = self.number("wheelbase", layout.wheelbase)
        self.refuse(~((wheelbase >= 0.2) & (wheelbase <= 20)), "wheelbase", wheelbase, "mm",
                    "use 200 to 20000")  # fmt: skip
        for end, track in (("front", layout.track_front), ("rear", layout.track_rear)):
            t = self.number(f"track_{end}", track)
            self.refuse(~((t >= 0.1) & (t <= 5)), f"track_{end}", t, "mm", "use 100 to 5000")
        uppers = [False, *(span.upper for span in layout.spans), False]
        previous: F64 | None = None
        for k, station in enumerate(layout.stations):
            path = f"station.{station.name}"
            at = self.number(f"{path}.at", station.at)
            if previous is not None:
                before = layout.stations[k - 1].name
                gap = (at - previous) * wheelbase
                self.refuse(~(gap >= 0.02), f"{path}.at", at, "",
                            f"place it at least 20 mm behind station {before}")  # fmt: skip
            if station.name in (layout.front_axle, layout.rear_axle):
                self.refuse(at != station.at, f"{path}.at", at, "", "an axle station stays put")
            previous = at
            tall = uppers[k] or uppers[k + 1]
            self._check_station(station, path, tall)
        for span in layout.spans:
            bays = self.number(f"span.{span.name}.bays", span.bays)
            whole = (bays >= 1) & (bays <= 20) & (np.rint(bays) == bays)
            self.refuse(~whole, f"span.{span.name}.bays", bays, "", "use a whole number, 1 to 20")

    def _check_station(self, station: Station, path: str, tall: bool) -> None:
        names = ("width_low", "width_high") if tall else ("width_low",)
        for name in names:
            width = self.number(f"{path}.{name}", getattr(station, name))
            self.refuse(~((width >= 0.02) & (width <= 5)), f"{path}.{name}", width, "mm",
                        "use 20 to 5000")  # fmt: skip
        low = self.number(f"{path}.height_low", station.height_low)
        self.refuse(~(np.abs(low) <= 5), f"{path}.height_low", low, "mm", "use -5000 to 5000")
        if tall:
            high = self.number(f"{path}.height_high", station.height_high)
            self.refuse(~(high - low >= 0.02), f"{path}.height_high", high, "mm",
                        "keep the upper rail at least 20 mm above the lower one")  # fmt: skip
            self.refuse(~(high <= 6), f"{path}.height_high", high, "mm", "use at most 6000")


def every_brace(layout: Layout) -> tuple[Batch, Scaffold]:
    """The layout with every diagonal that it could have: absent ones are not present.

    Faces that must stay clear, and faces whose group of braces has no tube, get none.
    """
    columns: dict[str, Column] = {}
    here = np.zeros(1, dtype=np.int64)
    for path, bracing in brace_paths(layout).items():
        columns[path] = Choice((bracing, "cross"), here)
    values = _Values(layout, columns, 1)
    values.check_dimensions()
    sections = {group: _tube_columns(values, group, tube) for group, tube in layout.tubes.items()}
    if values.fault[0] is not None:
        raise values.fault[0].as_error()
    patterns, allowed = _patterns(values)
    frame = scaffold(layout, [span.bays for span in layout.spans], allowed)
    return _fill(values, frame, here, sections, patterns), frame


def brace_paths(layout: Layout) -> dict[str, str]:
    """Present bracing of every face and ring that may be braced, by path."""
    uppers = [False, *(span.upper for span in layout.spans), False]

    def has_tube(group: str) -> bool:
        try:
            layout.tube_group(group)
        except InputError:
            return False
        return True

    found = {}
    for k, station in enumerate(layout.stations):
        if (uppers[k] or uppers[k + 1]) and has_tube("ring braces"):
            found[f"station.{station.name}.ring"] = station.ring
    for span in layout.spans:
        for face in FACES:
            group = "side braces" if face in ("left", "right") else f"{face} braces"
            there = face == "floor" or span.upper
            if there and face not in span.clear and has_tube(group):
                found[f"span.{span.name}.{face}"] = str(getattr(span, face))
    return found


def position_slopes(layout: Layout) -> dict[str, tuple[float, F64]]:
    """How the joints of a layout move with each of its dimensions.

    Returns
    -------
    dict
        By path: the present value, and the slope of the joint positions (joints, 3), which is
        exact because positions are linear in each dimension. The tracks move no joint.
    """
    uppers = [False, *(span.upper for span in layout.spans), False]
    present = {
        "wheelbase": layout.wheelbase,
        "track_front": layout.track_front,
        "track_rear": layout.track_rear,
    }
    for k, station in enumerate(layout.stations):
        names = ["width_low", "height_low"]
        if uppers[k] or uppers[k + 1]:
            names += ["width_high", "height_high"]
        if station.name not in (layout.front_axle, layout.rear_axle):
            names.append("at")
        for name in names:
            present[f"station.{station.name}.{name}"] = float(getattr(station, name))
    count = len(present) + 1
    columns: dict[str, Column] = {}
    for row, (path, value) in enumerate(present.items(), start=1):
        columns[path] = np.where(np.arange(count) == row, value + 1.0, value)
    values = _Values(layout, columns, count)
    bays = [span.bays for span in layout.spans]
    xyz = _positions(values, scaffold(layout, bays), np.arange(count))
    return {
        path: (value, xyz[row] - xyz[0])
        for row, (path, value) in enumerate(present.items(), start=1)
    }


def known_paths(layout: Layout) -> frozenset[str]:
    """Every path that a variant of this layout may change."""
    paths = {"wheelbase", "track_front", "track_rear"}
    for station in layout.stations:
        paths |= {
            f"station.{station.name}.{f}"
            for f in ("at", "width_low", "width_high", "height_low", "height_high", "ring")
        }
    for span in layout.spans:
        paths |= {f"span.{span.name}.{f}" for f in ("bays", "sides", *FACES)}
    for group, tube in layout.tubes.items():
        paths |= {
            f"tube.{group}.{f}"
            for f in ("stock", "material", "rotation", "axial", *SHAPES[tube.shape].sizes)
        }
    return frozenset(paths)


def _distinct(rows: NDArray[np.int64]) -> list[tuple[int, ...]]:
    return list(dict.fromkeys(tuple(int(v) for v in row) for row in np.unique(rows, axis=0)))


def _patterns(values: _Values) -> tuple[dict[str, NDArray[np.int64]], dict[str, frozenset[str]]]:
    """Bracing of every face as an index into BRACING, and what may occur on it."""
    layout = values.layout
    index: dict[str, NDArray[np.int64]] = {}
    allowed: dict[str, frozenset[str]] = {}

    def take(path: str, default: str, column_path: str) -> Choice:
        choice = values.choice(column_path, default)
        lookup = np.array([BRACING.index(option) for option in choice.options], dtype=np.int64)
        index[path] = lookup[choice.index]
        allowed[path] = frozenset(choice.options)
        return choice

    for station in layout.stations:
        path = f"station.{station.name}.ring"
        take(path, station.ring, path)
    for span in layout.spans:
        for face in FACES:
            path = f"span.{span.name}.{face}"
            both = f"span.{span.name}.sides"
            linked = face in ("left", "right") and path not in values.columns
            choice = take(path, getattr(span, face), both if both in values.columns and linked
                          else path)  # fmt: skip
            for option in choice.options:
                check_face(span, face, option)
    return index, allowed


def _tube_columns(values: _Values, group: str, tube: Tube) -> tuple[F64, F64, F64]:
    """Rigidity (n, 6), end flexibility (n, 6) and line mass (n,) of one group; n may be 1."""
    path = f"tube.{group}"
    material = values.choice(f"{path}.material", tube.material)
    options: tuple[Material, ...] = material.options
    e, g, density = (
        np.array([getattr(m, name) for m in options])[material.index]
        for name in ("E", "G", "density")
    )
    s = _sections(values, path, tube)
    rigidity = np.stack(
        [e * s.A, e * s.Iy, e * s.Iz, g * s.J, 1 / (g * s.Asy), 1 / (g * s.Asz)], axis=-1
    )
    rotation = values.number(f"{path}.rotation", tube.rotation)
    axial = values.number(f"{path}.axial", tube.axial)
    values.refuse(~(rotation >= 0), f"{path}.rotation", rotation, "", "use 0 or more N·m/rad")
    values.refuse(~(axial > 0), f"{path}.axial", axial, "", "use more than 0 N/m")
    with np.errstate(divide="ignore"):
        turn = np.minimum(1 / np.maximum(rotation, 0.0), PINNED)
        pull = np.minimum(2 / np.maximum(axial, 0.0), PINNED)
    zero = np.zeros_like(turn)
    return rigidity, np.stack([pull, zero, turn, turn, turn, turn], axis=-1), density * s.A


def _sections(values: _Values, path: str, tube: Tube) -> SectionValues:
    stock = values.columns.get(f"{path}.stock")
    if isinstance(stock, Choice):
        sizes: tuple[StockSize, ...] = stock.options
        table = [section_values(size.shape, size.sizes) for size in sizes]
        return SectionValues(
            *(
                np.array([float(getattr(s, f)) for s in table])[stock.index]
                for f in ("A", "Iy", "Iz", "J", "Asy", "Asz")
            )
        )
    names = SHAPES[tube.shape].sizes
    given = {name: values.number(f"{path}.{name}", tube.sizes[name]) for name in names}
    safe = dict(given)
    sound = np.ones(values.n, dtype=bool)
    for name in names:
        bad = ~((given[name] > 1e-4) & (given[name] <= 1.0))
        values.refuse(bad, f"{path}.{name}", given[name], "mm", "use 0.1 to 1000")
        sound &= ~bad
    if "wall" in given:
        across = np.minimum.reduce([given[n] for n in names if n != "wall"])
        bad = sound & ~(given["wall"] < across / 2)
        values.refuse(bad, f"{path}.wall", given["wall"], "mm",
                      "keep it below half the outside size")  # fmt: skip
        sound &= ~bad
    for name in names:
        safe[name] = np.where(sound, given[name], 0.1 if name != "wall" else 0.01)
    return section_values(tube.shape, safe)


def _fill(
    values: _Values,
    frame: Scaffold,
    rows: NDArray[np.int64],
    sections: Mapping[str, tuple[F64, F64, F64]],
    patterns: Mapping[str, NDArray[np.int64]],
) -> Batch:
    layout, skeleton = values.layout, frame.skeleton
    parts = [sections[group] for group in skeleton.groups]
    rigidity, ends = (np.stack([p[k][rows] for p in parts], axis=1) for k in (0, 1))
    line_mass = np.stack([np.broadcast_to(p[2], (values.n,))[rows] for p in parts], axis=1)
    present = np.ones((len(rows), len(skeleton.members)), dtype=bool)
    for k, path in enumerate(frame.faces):
        mine = np.flatnonzero(frame.face == k)
        if mine.size:
            present[:, mine] = frame.patterns[mine].T[patterns[path][rows]]
    assert frame.face.min(initial=ALWAYS) >= ALWAYS
    track = None
    if layout.entry == "linkage":
        track = np.stack(
            [
                values.number("track_front", layout.track_front)[rows],
                values.number("track_rear", layout.track_rear)[rows],
            ],
            axis=1,
        )
    return Batch(skeleton, rows, _positions(values, frame, rows), rigidity, ends, line_mass,
                 present, track)  # fmt: skip


def _positions(values: _Values, frame: Scaffold, rows: NDArray[np.int64]) -> F64:
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
    return xyz.reshape(len(rows), -1, 3)
