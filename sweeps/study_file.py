"""The study file: TOML that documents itself, read with errors that name key, value and remedy."""

from __future__ import annotations

import difflib
import math
import tomllib
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

import numpy as np

from model.errors import InputError
from model.frame.columns import known_paths
from model.frame.layout import Hoop, Layout, Mass, Span, Station, Tube
from model.frame.variants import variants
from model.frame.vocabulary import FACES, RIGID
from model.stock.sections import SHAPES
from sweeps.catalogue import Catalogue, catalogue
from sweeps.inputs import UNITS, Input, option_label, strip_unit, unit_of
from sweeps.study import Study, field, fields

Table = Mapping[str, Any]

_VEHICLE = ("name", "about", "wheelbase_mm", "track_front_mm", "track_rear_mm", "front_axle",
            "rear_axle", "front_mount", "rear_mount", "entry")  # fmt: skip
_STATION = ("name", "at", "width_low_mm", "width_high_mm", "height_low_mm", "height_high_mm",
            "ring", "bottom", "top", "uprights", "outrigger_mm")  # fmt: skip
_SPAN = ("name", "bays", *FACES, "sides", "clear", "upper", "tube")
_HOOP = ("name", "station", "height_mm", "width_mm", "lean_mm", "stays_to", "bracing")
_MASS = ("name", "kg", "x_mm", "y_mm", "z_mm")
_SWEEP = ("samples", "seed", "method")
_TOP = ("vehicle", "station", "span", "hoop", "tube", "mass", "sweep", "vary")


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
    _known("", data, _TOP)
    layout = _layout(data, shelf)
    sweep = _table(data, "sweep", required=False)
    _known("sweep", sweep, _SWEEP)
    vary = _table(data, "vary", required=False)
    inputs = tuple(_input(layout, path, given, shelf) for path, given in vary.items())
    study = Study(
        about=_text("vehicle", data["vehicle"], "about", ""),
        layout=layout,
        inputs=inputs,
        samples=_whole("sweep", sweep, "samples", 1024),
        seed=_whole("sweep", sweep, "seed", 1),
        method=_text("sweep", sweep, "method", "sobol"),
    )
    _check_corners(study)
    return study


def _layout(data: Table, shelf: Catalogue) -> Layout:
    vehicle = _table(data, "vehicle")
    _known("vehicle", vehicle, _VEHICLE)
    tubes = _table(data, "tube")
    return Layout(
        name=_text("vehicle", vehicle, "name"),
        wheelbase=_mm("vehicle", vehicle, "wheelbase_mm"),
        track_front=_mm("vehicle", vehicle, "track_front_mm"),
        track_rear=_mm("vehicle", vehicle, "track_rear_mm"),
        stations=tuple(_station(row) for row in _rows(data, "station")),
        spans=tuple(_span(row) for row in _rows(data, "span")),
        tubes={group: _tube(group, tubes, shelf) for group in tubes},
        front_axle=_text("vehicle", vehicle, "front_axle"),
        rear_axle=_text("vehicle", vehicle, "rear_axle"),
        front_mount=_text("vehicle", vehicle, "front_mount", "low"),
        rear_mount=_text("vehicle", vehicle, "rear_mount", "low"),
        entry=_text("vehicle", vehicle, "entry", "spring mounts"),
        masses=tuple(_mass(row) for row in _rows(data, "mass", required=False)),
        hoops=tuple(_hoop(row) for row in _rows(data, "hoop", required=False)),
    )


def _station(row: Table) -> Station:
    where = f"station.{_text('station', row, 'name')}"
    _known(where, row, _STATION)
    return Station(
        name=row["name"],
        at=_number(where, row, "at"),
        width_low=_mm(where, row, "width_low_mm"),
        height_low=_mm(where, row, "height_low_mm"),
        width_high=_mm(where, row, "width_high_mm", 0.0),
        height_high=_mm(where, row, "height_high_mm", 0.0),
        ring=_text(where, row, "ring", "open"),
        bottom=_flag(where, row, "bottom"),
        top=_flag(where, row, "top"),
        uprights=_flag(where, row, "uprights"),
        outrigger=_mm(where, row, "outrigger_mm", 0.0),
    )


def _span(row: Table) -> Span:
    where = f"span.{_text('span', row, 'name')}"
    _known(where, row, _SPAN)
    sides = _text(where, row, "sides", "open")
    clear = row.get("clear", [])
    if not isinstance(clear, list) or not all(isinstance(c, str) for c in clear):
        raise InputError(f"{where}.clear", repr(clear), 'give a list of faces, such as ["top"]')
    return Span(
        name=row["name"],
        bays=_whole(where, row, "bays", 1),
        floor=_text(where, row, "floor", "open"),
        top=_text(where, row, "top", "open"),
        left=_text(where, row, "left", sides),
        right=_text(where, row, "right", sides),
        upper=_flag(where, row, "upper"),
        clear=tuple(clear),
        tube=_text(where, row, "tube", ""),
    )


def _hoop(row: Table) -> Hoop:
    where = f"hoop.{_text('hoop', row, 'name')}"
    _known(where, row, _HOOP)
    return Hoop(
        name=row["name"],
        station=_text(where, row, "station"),
        height=_mm(where, row, "height_mm"),
        width=_mm(where, row, "width_mm"),
        lean=_mm(where, row, "lean_mm", 0.0),
        stays_to=_text(where, row, "stays_to", ""),
        bracing=_text(where, row, "bracing", "open"),
    )


def _mass(row: Table) -> Mass:
    where = f"mass.{_text('mass', row, 'name')}"
    _known(where, row, _MASS)
    kg = _number(where, row, "kg")
    if kg < 0:
        raise InputError(f"{where}.kg", f"{kg:g}", "give 0 or more")
    x, y, z = (_mm(where, row, f"{axis}_mm", 0.0) for axis in "xyz")
    return Mass(row["name"], kg, x, y, z)


def _tube(group: str, tubes: Table, shelf: Catalogue) -> Tube:
    where, row = f"tube.{group}", _table(tubes, group)
    shape = row.get("shape", "")
    sizes = SHAPES[shape].sizes if isinstance(shape, str) and shape in SHAPES else ()
    allowed = ("material", "stock", "shape", *(f"{s}_mm" for s in sizes))
    if not sizes and "stock" not in row:
        raise InputError(f"{where}.shape", repr(shape), f"use one of: {', '.join(SHAPES)}")
    _known(where, row, (*allowed, "rotation_Nm_per_rad", "axial_N_per_m"))
    material = shelf.material(f"{where}.material", _text(where, row, "material"))
    rotation = _stiffness(where, row, "rotation_Nm_per_rad")
    axial = _stiffness(where, row, "axial_N_per_m")
    if "stock" in row:
        size = shelf.size(f"{where}.stock", _text(where, row, "stock"))
        return Tube(size.shape, size.sizes, material, rotation, axial, option_label(size))
    given = {s: _mm(where, row, f"{s}_mm") for s in sizes}
    return Tube(shape, given, material, rotation, axial)


def _input(layout: Layout, path: str, given: Any, shelf: Catalogue) -> Input:
    paths = [f.path for f in fields(layout)]
    if path not in paths:
        inner = strip_unit(path)
        if inner in known_paths(layout) and unit_of(path) == "" and f"{path}_mm" in paths:
            raise InputError(f"vary.{path}", "no unit", f"write {path}_mm")
        near = difflib.get_close_matches(path, paths, 1, 0.5)
        raise InputError("vary", repr(path), f"write {near[0]}" if near else "no such field")
    if not isinstance(given, dict):
        raise InputError(
            f"vary.{path}", repr(given), "write { from = 1, to = 2 } or { choices = [...] }"
        )
    about = field(layout, path)
    if about.kind == "stock":
        return Input(path, about.label, "", options=_stock_options(path, given, shelf))
    _known(f"vary.{path}", given, ("from", "to", "choices"))
    if "choices" in given:
        options = given["choices"]
        if not isinstance(options, list) or not options:
            raise InputError(f"vary.{path}.choices", repr(options), "give a list of options")
        if about.kind == "material":
            options = [shelf.material(f"vary.{path}", str(o)) for o in options]
        elif about.kind in ("number", "count"):
            for option in options:
                if not isinstance(option, int | float) or isinstance(option, bool):
                    raise InputError(f"vary.{path}.choices", repr(option), "give numbers")
        return Input(path, about.label, about.unit, options=tuple(options))
    if about.kind != "number":
        raise InputError(f"vary.{path}", "no choices", "write { choices = [...] }")
    where = f"vary.{path}"
    return Input(path, about.label, about.unit, _number(where, given, "from"),
                 _number(where, given, "to"))  # fmt: skip


def _stock_options(path: str, given: Table, shelf: Catalogue) -> tuple[Any, ...]:
    where = f"vary.{path}"
    _known(where, given, ("list", "from", "to", "sizes"))
    stock = shelf.stock_list(f"{where}.list", _text(where, given, "list"))

    def size(label: Any) -> Any:
        return shelf.size(where, f"{stock.name}/{label}")

    if "sizes" in given:
        if not isinstance(given["sizes"], list) or not given["sizes"]:
            raise InputError(f"{where}.sizes", repr(given["sizes"]), "give a list of sizes")
        return tuple(sorted((size(label) for label in given["sizes"]), key=lambda s: s.area))
    low = size(_text(where, given, "from")).area
    high = size(_text(where, given, "to")).area
    return tuple(s for s in stock.sizes if low <= s.area <= high)


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


# --- reading single values -----------------------------------------------------------------


def _known(where: str, row: Table, allowed: Iterable[str]) -> None:
    allowed = tuple(allowed)
    for key in row:
        if key in allowed:
            continue
        name = f"{where}.{key}" if where else key
        base = strip_unit(key).removesuffix("_in").removesuffix("_m").removesuffix("_cm")
        if f"{base}_mm" in allowed:
            raise InputError(name, str(row[key]), f"write {base}_mm, in millimetres")
        near = difflib.get_close_matches(key, allowed, 1, 0.5)
        hint = f"did you mean {near[0]}?" if near else f"use one of: {', '.join(allowed)}"
        raise InputError(name, "unknown key", hint)


def _table(data: Table, key: str, required: bool = True) -> Table:
    if key not in data:
        if required:
            raise InputError(key, "missing", f"give a table [{key}]")
        return {}
    if not isinstance(data[key], dict):
        raise InputError(key, repr(data[key]), f"give a table [{key}]")
    found: Table = data[key]
    return found


def _rows(data: Table, key: str, required: bool = True) -> list[Table]:
    rows = data.get(key, [])
    if not isinstance(rows, list) or not all(isinstance(r, dict) for r in rows):
        raise InputError(key, repr(rows), f"give tables [[{key}]]")
    if required and not rows:
        raise InputError(key, "missing", f"give tables [[{key}]]")
    return rows


_MISSING = object()


def _value(where: str, row: Table, key: str, default: Any) -> Any:
    if key in row:
        return row[key]
    if default is _MISSING:
        raise InputError(f"{where}.{key}", "missing", "give a value")
    return default


def _text(where: str, row: Table, key: str, default: Any = _MISSING) -> str:
    value = _value(where, row, key, default)
    if not isinstance(value, str):
        raise InputError(f"{where}.{key}", repr(value), "give a text in quotes")
    return value


def _number(where: str, row: Table, key: str, default: Any = _MISSING) -> float:
    value = _value(where, row, key, default)
    if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
        raise InputError(f"{where}.{key}", repr(value), "give a number")
    return float(value)


def _mm(where: str, row: Table, key: str, default: Any = _MISSING) -> float:
    return _number(where, row, key, default) * UNITS["mm"]


def _whole(where: str, row: Table, key: str, default: int) -> int:
    value = _value(where, row, key, default)
    if isinstance(value, bool) or not isinstance(value, int):
        raise InputError(f"{where}.{key}", repr(value), "give a whole number")
    return value


def _flag(where: str, row: Table, key: str) -> bool:
    value = row.get(key, True)
    if not isinstance(value, bool):
        raise InputError(f"{where}.{key}", repr(value), "write true or false")
    return value


def _stiffness(where: str, row: Table, key: str) -> float:
    value = row.get(key, "rigid")
    if value == "rigid":
        return RIGID
    if value == "pinned" and key.startswith("rotation"):
        return 0.0
    if isinstance(value, bool) or not isinstance(value, int | float) or not value > 0:
        raise InputError(f"{where}.{key}", repr(value), 'write "rigid" or a number above 0')
    return float(value)
