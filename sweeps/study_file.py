"""The study file: TOML that documents itself, read with errors that name key, value and remedy."""

from __future__ import annotations

import tomllib
from pathlib import Path

import numpy as np

from model.errors import InputError
from model.frame.layout import Hoop, Layout, Mass, Span, Station, Tube
from model.frame.variants import variants
from model.frame.vocabulary import FACES
from model.stock.sections import SHAPES
from sweeps import study_values as read
from sweeps.catalogue import Catalogue, catalogue
from sweeps.inputs import option_label
from sweeps.study import Study
from sweeps.study_values import Table
from sweeps.study_vary import read_groups, read_vary

_VEHICLE = ("name", "about", "wheelbase_mm", "track_front_mm", "track_rear_mm", "front_axle",
            "rear_axle", "front_mount", "rear_mount", "entry")  # fmt: skip
_STATION = ("name", "at", "width_low_mm", "width_high_mm", "height_low_mm", "height_high_mm",
            "ring", "bottom", "top", "uprights", "outrigger_mm",
            "clear")  # fmt: skip
_SPAN = ("name", "bays", *FACES, "sides", "clear", "upper", "tube")
_HOOP = ("name", "station", "height_mm", "width_mm", "lean_mm", "stays_to", "bracing")
_MASS = ("name", "kg", "x_mm", "y_mm", "z_mm")
_SWEEP = ("samples", "seed", "method")
_TOP = ("vehicle", "station", "span", "hoop", "tube", "mass", "sweep", "vary", "judge_together")


def read_study(source: str | Path) -> Study:
    """A study from a file, or from a starting vehicle by its id (``orchard-truck``).

    Raises
    ------
    InputError
        Names the file or the key, the value, and what would do.
    """
    shelf = catalogue()
    if isinstance(source, str) and source in shelf.vehicles:
        return parse_study(shelf.vehicles[source], shelf)
    path = Path(source)
    try:
        text = path.read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError, ValueError):
        known = ", ".join(shelf.vehicles)
        raise InputError(
            "STUDY", repr(str(source)), f"name a readable study file, or one of: {known}"
        ) from None
    return parse_study(text, shelf)


def parse_study(text: str, shelf: Catalogue | None = None) -> Study:
    """A study from TOML text."""
    shelf = shelf or catalogue()
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as fault:
        raise InputError("study file", "not TOML", str(fault)) from None
    read.known("", data, _TOP)
    layout = _layout(data, shelf)
    sweep = read.table(data, "sweep", required=False)
    read.known("sweep", sweep, _SWEEP)
    inputs, links = read_vary(layout, read.table(data, "vary", required=False), shelf)
    study = Study(
        about=read.text("vehicle", data["vehicle"], "about", ""),
        layout=layout,
        inputs=inputs,
        samples=read.whole("sweep", sweep, "samples", 1024),
        seed=read.whole("sweep", sweep, "seed", 1),
        method=read.text("sweep", sweep, "method", "sobol"),
        links=links,
        groups=read_groups(read.table(data, "judge_together", required=False)),
    )
    _check_corners(study)
    return study


def _layout(data: Table, shelf: Catalogue) -> Layout:
    vehicle = read.table(data, "vehicle")
    read.known("vehicle", vehicle, _VEHICLE)
    tubes = read.table(data, "tube")
    return Layout(
        name=read.text("vehicle", vehicle, "name"),
        wheelbase=read.mm("vehicle", vehicle, "wheelbase_mm"),
        track_front=read.mm("vehicle", vehicle, "track_front_mm"),
        track_rear=read.mm("vehicle", vehicle, "track_rear_mm"),
        stations=tuple(_station(row) for row in read.rows(data, "station")),
        spans=tuple(_span(row) for row in read.rows(data, "span")),
        tubes={group: _tube(group, tubes, shelf) for group in tubes},
        front_axle=read.text("vehicle", vehicle, "front_axle"),
        rear_axle=read.text("vehicle", vehicle, "rear_axle"),
        front_mount=read.text("vehicle", vehicle, "front_mount", "low"),
        rear_mount=read.text("vehicle", vehicle, "rear_mount", "low"),
        entry=read.text("vehicle", vehicle, "entry", "spring mounts"),
        masses=tuple(_mass(row) for row in read.rows(data, "mass", required=False)),
        hoops=tuple(_hoop(row) for row in read.rows(data, "hoop", required=False)),
    )


def _station(row: Table) -> Station:
    where = f"station.{read.text('station', row, 'name')}"
    read.known(where, row, _STATION)
    return Station(
        name=row["name"],
        at=read.number(where, row, "at"),
        width_low=read.mm(where, row, "width_low_mm"),
        height_low=read.mm(where, row, "height_low_mm"),
        width_high=read.mm(where, row, "width_high_mm", 0.0),
        height_high=read.mm(where, row, "height_high_mm", 0.0),
        ring=read.text(where, row, "ring", "open"),
        bottom=read.flag(where, row, "bottom"),
        top=read.flag(where, row, "top"),
        uprights=read.flag(where, row, "uprights"),
        outrigger=read.mm(where, row, "outrigger_mm", 0.0),
        clear=read.flag(where, row, "clear", False),
    )


def _span(row: Table) -> Span:
    where = f"span.{read.text('span', row, 'name')}"
    read.known(where, row, _SPAN)
    sides = read.text(where, row, "sides", "open")
    clear = row.get("clear", [])
    if not isinstance(clear, list) or not all(isinstance(c, str) for c in clear):
        raise InputError(f"{where}.clear", repr(clear), 'give a list of faces, such as ["top"]')
    return Span(
        name=row["name"],
        bays=read.whole(where, row, "bays", 1),
        floor=read.text(where, row, "floor", "open"),
        top=read.text(where, row, "top", "open"),
        left=read.text(where, row, "left", sides),
        right=read.text(where, row, "right", sides),
        upper=read.flag(where, row, "upper"),
        clear=tuple(clear),
        tube=read.text(where, row, "tube", ""),
    )


def _hoop(row: Table) -> Hoop:
    where = f"hoop.{read.text('hoop', row, 'name')}"
    read.known(where, row, _HOOP)
    return Hoop(
        name=row["name"],
        station=read.text(where, row, "station"),
        height=read.mm(where, row, "height_mm"),
        width=read.mm(where, row, "width_mm"),
        lean=read.mm(where, row, "lean_mm", 0.0),
        stays_to=read.text(where, row, "stays_to", ""),
        bracing=read.text(where, row, "bracing", "open"),
    )


def _mass(row: Table) -> Mass:
    where = f"mass.{read.text('mass', row, 'name')}"
    read.known(where, row, _MASS)
    kg = read.number(where, row, "kg")
    if kg < 0:
        raise InputError(f"{where}.kg", f"{kg:g}", "give 0 or more")
    x, y, z = (read.mm(where, row, f"{axis}_mm", 0.0) for axis in "xyz")
    return Mass(row["name"], kg, x, y, z)


def _tube(group: str, tubes: Table, shelf: Catalogue) -> Tube:
    where, row = f"tube.{group}", read.table(tubes, group)
    shape = row.get("shape", "")
    sizes = SHAPES[shape].sizes if isinstance(shape, str) and shape in SHAPES else ()
    allowed = ("material", "stock", "shape", *(f"{s}_mm" for s in sizes))
    if not sizes and "stock" not in row:
        raise InputError(f"{where}.shape", repr(shape), f"use one of: {', '.join(SHAPES)}")
    read.known(where, row, (*allowed, "rotation_Nm_per_rad", "axial_N_per_m"))
    material = shelf.material(f"{where}.material", read.text(where, row, "material"))
    rotation = read.stiffness(where, row, "rotation_Nm_per_rad")
    axial = read.stiffness(where, row, "axial_N_per_m")
    if "stock" in row:
        size = shelf.size(f"{where}.stock", read.text(where, row, "stock"))
        return Tube(size.shape, size.sizes, material, rotation, axial, option_label(size))
    given = {s: read.mm(where, row, f"{s}_mm") for s in sizes}
    return Tube(shape, given, material, rotation, axial)


def _check_corners(study: Study) -> None:
    """Refuse ranges of which not even the ends can be built."""
    if not study.inputs:
        variants_of = np.full((1, 0), 0.5)
    else:
        k = len(study.inputs)
        variants_of = np.full((2 * k + 1, k), 0.5)
        for n in range(k):
            variants_of[2 * n, n], variants_of[2 * n + 1, n] = 0.0, 1.0
    _, refused = variants(study.layout, {}, 1)
    if refused:
        raise refused[0].as_error()
    _, refused = variants(study.layout, study.columns(variants_of), len(variants_of))
    for fault in refused:
        number, end = divmod(fault.row, 2)
        if number < len(study.inputs):
            given = study.inputs[number]
            side = given.words if given.is_choice else f"{given.high if end else given.low:g}"
            raise InputError(f"vary.{given.path}", side, f"cannot be built: {fault}")
