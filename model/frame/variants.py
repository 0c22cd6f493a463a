"""From one layout and columns of changed values to batches ready for the solver."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import partial

import numpy as np
from numpy.typing import NDArray

from model.errors import InputError
from model.frame.batch import Batch, Refusal
from model.frame.columns import Choice, Column, Values, known_paths
from model.frame.consistency import check_face, check_ring
from model.frame.generator import Scaffold, scaffold
from model.frame.layout import Layout
from model.frame.positions import position_slopes, positions
from model.frame.sizing import tube_columns
from model.frame.skeleton import F64
from model.frame.vocabulary import BRACING, FACES, MEETING

_MEETS = np.array([bracing in MEETING for bracing in BRACING])

__all__ = [
    "Choice",
    "Column",
    "brace_paths",
    "every_brace",
    "known_paths",
    "one",
    "position_slopes",
    "variants",
]


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
        ``height_low``, ``height_high``, ``outrigger``, ``ring``; ``hoop.NAME.`` and ``height``,
        ``width``, ``lean``; ``span.NAME.`` and ``bays``, ``floor``,
        ``top``, ``left``, ``right``, ``sides``; ``tube.GROUP.`` and the sizes of its shape,
        ``stock`` (choice of StockSize), ``material`` (choice of Material), ``rotation``,
        ``axial``.

    Returns
    -------
    batches
        One for each set of joints that occurs (bay counts, K and chevron faces).
    refused
        The rows that cannot be built, each with its first fault, by row.
    """
    values = Values(layout, columns, n)
    with np.errstate(over="ignore", invalid="ignore"):  # of rows that are refused anyway
        values.check_dimensions()
    sections = {group: tube_columns(values, group, tube) for group, tube in layout.tubes.items()}
    patterns, allowed = _patterns(values)
    bays = np.stack([values.whole(f"span.{s.name}.bays", s.bays) for s in layout.spans], axis=1)
    meeting = [path for path, may in allowed.items() if may & set(MEETING)]
    joints = np.stack(
        [*bays.T, *(np.where(_MEETS[patterns[p]], patterns[p], -1) for p in meeting)], axis=1
    )
    batches = []
    good = np.array([fault is None for fault in values.fault], dtype=bool)
    for code in np.unique(joints[good], axis=0):
        rows = np.flatnonzero(good & (joints == code).all(axis=1))
        counts, met = code[: len(layout.spans)].tolist(), code[len(layout.spans) :].tolist()
        mine = {path: may - set(MEETING) for path, may in allowed.items()}
        mine |= {p: frozenset((BRACING[k],)) for p, k in zip(meeting, met, strict=True) if k >= 0}
        batches.append(_fill(values, scaffold(layout, counts, mine), rows, sections, patterns))
    return batches, [fault for fault in values.fault if fault is not None]


def every_brace(layout: Layout) -> tuple[Batch, Scaffold]:
    """The layout with every diagonal that it could have: absent ones are not present.

    Faces that must stay clear, and faces whose group of braces has no tube, get none.
    """
    columns: dict[str, Column] = {}
    here = np.zeros(1, dtype=np.int64)
    for path, bracing in brace_paths(layout).items():
        options = (bracing,) if bracing in MEETING else (bracing, "cross")
        columns[path] = Choice(options, here)
    values = Values(layout, columns, 1)
    values.check_dimensions()
    sections = {group: tube_columns(values, group, tube) for group, tube in layout.tubes.items()}
    if values.fault[0] is not None:
        raise values.fault[0].as_error()
    patterns, allowed = _patterns(values)
    frame = scaffold(layout, [span.bays for span in layout.spans], allowed)
    return _fill(values, frame, here, sections, patterns), frame


def brace_paths(layout: Layout) -> dict[str, str]:
    """Present bracing of every face and ring that may be braced, by path."""

    def has_tube(group: str) -> bool:
        try:
            layout.tube_group(group)
        except InputError:
            return False
        return True

    found = {}
    for k, station in enumerate(layout.stations):
        if layout.tall(k) and not station.clear and has_tube("ring braces"):
            found[f"station.{station.name}.ring"] = station.ring
    for span in layout.spans:
        for face in FACES:
            group = "side braces" if face in ("left", "right") else f"{face} braces"
            there = face == "floor" or span.upper
            if there and face not in span.clear and has_tube(group):
                found[f"span.{span.name}.{face}"] = str(getattr(span, face))
    return found


def _patterns(values: Values) -> tuple[dict[str, NDArray[np.int64]], dict[str, frozenset[str]]]:
    """Bracing of every face as an index into BRACING, and what may occur on it."""
    layout = values.layout
    index: dict[str, NDArray[np.int64]] = {}
    allowed: dict[str, frozenset[str]] = {}

    def take(path: str, default: str, column_path: str, check: Callable[[str], None]) -> None:
        choice = values.choice(column_path, default)
        for option in choice.options:
            check(option)
        lookup = np.array([BRACING.index(option) for option in choice.options], dtype=np.int64)
        index[path] = lookup[choice.index]
        allowed[path] = frozenset(choice.options)

    for station in layout.stations:
        path = f"station.{station.name}.ring"
        take(path, station.ring, path, partial(check_ring, station))
    for span in layout.spans:
        both = f"span.{span.name}.sides"
        for face in FACES:
            path = f"span.{span.name}.{face}"
            linked = face in ("left", "right") and path not in values.columns
            column = both if linked and both in values.columns else path
            take(path, getattr(span, face), column, partial(check_face, span, face))
    return index, allowed


def _fill(
    values: Values,
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
    track = None
    if layout.entry == "linkage":
        track = np.stack(
            [
                values.number("track_front", layout.track_front)[rows],
                values.number("track_rear", layout.track_rear)[rows],
            ],
            axis=1,
        )
    return Batch(skeleton, rows, positions(values, frame, rows), rigidity, ends, line_mass,
                 present, track)  # fmt: skip
