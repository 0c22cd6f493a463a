"""The frame file: one frame from joints and members as JSON, and its answer as plain data.

SI units throughout. ::

    {"nodes": {"A": [0, 0, 0], "B": [1, 0, 0]},
     "materials": {"steel": {"E": 205e9, "G": 80e9, "density": 7850, "yield": 235e6}},
     "sections": {"t": {"shape": "round tube", "outside": 0.0254, "wall": 0.0016},
                  "p": {"A": 1e-3, "Iy": 1e-7, "Iz": 1e-7, "J": 2e-7, "shear_y": null}},
     "members": [{"name": "m1", "from": "A", "to": "B", "section": "t", "material": "steel",
                  "group": "rail", "up": [0, 0, 1], "ends": ["rigid", "pinned"]}],
     "supports": {"A": ["x", "y", "z", "rx", "ry", "rz"]},
     "masses": {"B": 12.5},
     "cases": {"tip": {"node_loads": {"B": [0, 0, -100, 0, 0, 0]}}}}

Members
    Local x runs from ``from`` to ``to``; the local x-z plane contains ``up`` (global z when it
    is left out, global y for upright members). Where ``up`` lies along a member whose section
    bends alike both ways, the same rule chooses for it; otherwise it is refused.
Sections
    ``Iy`` bends in the local x-z plane, ``Iz`` in x-y; ``shear_y`` and ``shear_z`` are effective
    shear areas, null or absent for no shear deformation. Named shapes deform in shear unless
    ``"shear": false``; Poisson's ratio 0.3 serves for their shear areas. ``"rotary": false``
    takes the rotary inertia of tilting cross-sections away, as classical beam theory does.
Ends
    ``"rigid"``; ``"pinned"``, free to turn about all three axes; a stiffness [N·m/rad] of the
    joint in bending, both planes, with torsion passed on as by a rigid joint; or an object with
    any of ``x`` [N/m], ``rx``, ``ry``, ``rz`` [N·m/rad] about the local axes, each a number,
    ``"rigid"`` or ``"pinned"``. A joint rotation that no member end holds is left out.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from model.errors import InputError
from model.frame.batch import PINNED
from model.frame.skeleton import F64
from model.solver import beam, general, vibration
from model.solver.entries import Entry, read_json
from model.solver.structure import DIRECTIONS, BoolArray, Frame
from model.stock.sections import SHAPES, section_values

UPRIGHT = 0.99
"""Cosine to the vertical from which a member counts as upright."""

SAME_PLACE = 1e-9
"""Ends nearer than this part of the frame's size leave a member without length."""

_TOP = ("nodes", "materials", "sections", "members", "supports", "masses", "cases", "name", "about")
_MEMBER = ("name", "from", "to", "section", "material", "group", "up", "ends")
_GIVEN = ("A", "Iy", "Iz", "J")


def solve_file(source: str | Mapping[str, Any], modes: int = 0) -> dict[str, Any]:
    """Solve a frame file; the answer is plain data, ready for JSON.

    source : text of the file, or the same as nested dictionaries.
    modes : natural frequencies wanted; with any, ``frequencies_Hz`` and ``mode_shapes`` (unit
        modal mass) join the answer. A file without cases may then leave supports out.

    Raises
    ------
    InputError, LooseFrame
        One line naming the entry, or the joint that moves freely, and the remedy.
    """
    if isinstance(modes, bool) or not isinstance(modes, int) or modes < 0:
        raise InputError("modes", str(modes), "use a whole number, 0 or more")
    frame = parse(source)
    if frame.cases or not modes:
        answer = general.result(general.solve(frame))
    else:
        answer = {"mass_kg": frame.mass, "cases": {}}
    if modes:
        found = vibration.modes(frame, modes)
        answer["frequencies_Hz"] = [float(f) for f in found.frequency]
        answer["mode_shapes"] = [
            {name: [float(v) for v in shape[j]] for j, name in enumerate(frame.joints)}
            for shape in found.shape
        ]
    return answer


def parse(source: str | Mapping[str, Any]) -> Frame:
    """The frame that a file describes, every entry checked."""
    top = Entry("", read_json(source) if isinstance(source, str) else source)
    top.known(*_TOP)
    nodes = {name: entry.vector(3) for name, entry in top["nodes"].items()}
    if len(nodes) < 2:
        raise InputError("nodes", f"{len(nodes)} joints", "give at least two")
    materials = {name: _material(entry) for name, entry in top["materials"].items()}
    sections = {name: _section(entry) for name, entry in top["sections"].items()}
    members = _Members(nodes, materials, sections)
    for k, entry in enumerate(top["members"].sequence()):
        members.add(k, entry)
    members.finish()
    joints = tuple(nodes)
    place = {name: j for j, name in enumerate(joints)}
    cases, loads = _cases(top, place)
    return Frame(
        joints=joints,
        xyz=np.array(list(nodes.values())),
        member_names=tuple(members.names),
        members=np.array(members.ends_at, dtype=np.int32),
        groups=tuple(members.groups),
        up=np.array(members.up),
        rigidity=np.array(members.rigidity),
        ends=np.array(members.ends),
        line_mass=np.array(members.line_mass),
        rotary=np.array(members.rotary, dtype=bool),
        held=_held(top, place),
        lumps=_lumps(top, place),
        cases=cases,
        loads=loads,
    )


class _Members:
    """Collects the members one by one; lives for one call of ``parse``."""

    def __init__(
        self,
        nodes: Mapping[str, F64],
        materials: Mapping[str, tuple[float, float, float]],
        sections: Mapping[str, tuple[F64, bool]],
    ) -> None:
        self.nodes, self.materials, self.sections = nodes, materials, sections
        self.place = {name: j for j, name in enumerate(nodes)}
        self.size = float(np.ptp(np.array(list(nodes.values())), axis=0).max())
        self.names: dict[str, int] = {}
        self.between: dict[frozenset[str], str] = {}
        self.ends_at: list[tuple[int, int]] = []
        self.groups: list[str] = []
        self.up: list[F64] = []
        self.rigidity: list[F64] = []
        self.ends: list[F64] = []
        self.line_mass: list[float] = []
        self.rotary: list[bool] = []

    def add(self, number: int, entry: Entry) -> None:
        entry.known(*_MEMBER)
        start, end = (entry[key].one_of(self.nodes, "nodes") for key in ("from", "to"))
        name = entry["name"].text() if "name" in entry else f"{start}-{end}"
        entry = Entry(f"members.{name}", entry.value)
        if name in self.names:
            raise InputError(entry.path, "twice", "give every member its own name")
        self.names[name] = number
        along = self.nodes[end] - self.nodes[start]
        if not float(np.linalg.norm(along)) > SAME_PLACE * self.size:
            raise InputError(
                entry.path, f"{start} to {end}, no length", "join two joints at different places"
            )
        twin = self.between.setdefault(frozenset((start, end)), name)
        if twin != name:
            raise InputError(
                entry.path, f"{start} to {end}", f"{twin} joins them already; leave one out"
            )
        e, g, density = self.materials[entry["material"].one_of(self.materials, "materials")]
        section, rotary = self.sections[entry["section"].one_of(self.sections, "sections")]
        area, iy, iz, j, shear_y, shear_z = section
        self.ends_at.append((self.place[start], self.place[end]))
        self.groups.append(entry["group"].text() if "group" in entry else "")
        alike = bool(np.isclose(iy, iz) and np.isclose(shear_y, shear_z))
        self.up.append(_up(entry, along, alike))
        self.rigidity.append(
            np.array([e * area, e * iy, e * iz, g * j, 1 / (g * shear_y), 1 / (g * shear_z)])
        )
        self.ends.append(_ends(entry))
        self.line_mass.append(density * area)
        self.rotary.append(rotary)

    def finish(self) -> None:
        if not self.names:
            raise InputError("members", "none", "join the nodes with at least one member")
        met = {j for pair in self.ends_at for j in pair}
        for name, j in self.place.items():
            if j not in met:
                given = [float(v) for v in self.nodes[name]]
                raise InputError(
                    f"nodes.{name}", str(given), "no member ends here; join it or leave it out"
                )


def _material(entry: Entry) -> tuple[float, float, float]:
    entry.known("E", "G", "density", "yield")
    if "yield" in entry:
        entry["yield"].positive("Pa")
    density = entry["density"].number("a density in kg/m³")
    if density < 0:
        raise InputError(entry["density"].path, f"{density:g}", "use 0 or more kg/m³")
    return entry["E"].positive("Pa"), entry["G"].positive("Pa"), density


def _section(entry: Entry) -> tuple[F64, bool]:
    """A, Iy, Iz, J and the two shear areas (infinite where shear does not deform); rotary."""
    rotary = entry["rotary"].flag() if "rotary" in entry else True
    if "shape" not in entry:
        entry.known(*_GIVEN, "shear_y", "shear_z", "rotary")
        values = [entry[key].positive("m²" if key == "A" else "m⁴") for key in _GIVEN]
        for key in ("shear_y", "shear_z"):
            given = key in entry and entry[key].value is not None
            values.append(entry[key].positive("m²") if given else np.inf)
        return np.array(values), rotary
    shape = entry["shape"].one_of(SHAPES, "shapes")
    sizes = SHAPES[shape].sizes
    entry.known("shape", *sizes, "corner_radius", "shear", "rotary")
    size = {key: entry[key].positive("m") for key in sizes}
    if "corner_radius" in entry:
        size["corner_radius"] = entry["corner_radius"].number("a radius in m")
    try:
        of_shape = section_values(shape, size)
    except InputError as error:
        raise InputError(f"{entry.path}.{error.field}", error.given, error.remedy) from None
    parts = (of_shape.A, of_shape.Iy, of_shape.Iz, of_shape.J, of_shape.Asy, of_shape.Asz)
    array = np.array([float(part) for part in parts])
    if "shear" in entry and not entry["shear"].flag():
        array[4:] = np.inf
    return array, rotary


def _up(entry: Entry, along: F64, alike: bool) -> F64:
    upright = abs(along[2]) > UPRIGHT * float(np.linalg.norm(along))
    usual = np.array([0.0, 1.0, 0.0] if upright else [0.0, 0.0, 1.0])
    if "up" not in entry:
        return usual
    up = entry["up"].vector(3)
    size = float(np.linalg.norm(up))
    if not size > 0:
        raise InputError(entry["up"].path, "[0, 0, 0]", "give a direction, such as [0, 0, 1]")
    sine = float(np.linalg.norm(np.cross(up, along))) / size / float(np.linalg.norm(along))
    if sine > beam.PARALLEL:
        return up
    if alike:
        return usual
    raise InputError(
        entry["up"].path,
        str([float(v) for v in up]),
        f"it lies along the member; give a direction across it, such as {usual.tolist()}",
    )


def _ends(entry: Entry) -> F64:
    """(6,) end flexibilities as ``beam`` takes them."""
    flexibility = np.zeros(6)
    if "ends" not in entry:
        return flexibility
    both = entry["ends"].sequence()
    if len(both) != 2:
        raise InputError(entry["ends"].path, str(len(both)), "give two ends: at from and at to")
    for k, end in enumerate(both):
        axial, torsion, about_y, about_z = _end(end)
        flexibility[:2] += axial, torsion
        flexibility[2 + k], flexibility[4 + k] = about_y, about_z
    return np.minimum(flexibility, PINNED)


def _end(entry: Entry) -> tuple[float, float, float, float]:
    """Flexibility of one end along x, about x, y, z."""
    if isinstance(entry.value, Mapping):
        entry.known("x", "rx", "ry", "rz")
        x, rx, ry, rz = (
            _flexibility(entry[key], pinned=key != "x") if key in entry else 0.0
            for key in ("x", "rx", "ry", "rz")
        )
        return x, rx, ry, rz
    bending = _flexibility(entry, pinned=True)
    return 0.0, PINNED if entry.value == "pinned" else 0.0, bending, bending


def _flexibility(entry: Entry, pinned: bool) -> float:
    choices = '"rigid", "pinned"' if pinned else '"rigid"'
    if entry.value == "rigid":
        return 0.0
    if entry.value == "pinned" and pinned:
        return PINNED
    stiffness = entry.number(f"{choices} or a stiffness")
    if stiffness < 0 or (stiffness == 0 and not pinned):
        raise InputError(entry.path, f"{stiffness:g}", f"use {choices} or a stiffness above 0")
    return min(1 / stiffness, PINNED) if stiffness > 0 else PINNED


def _held(top: Entry, place: Mapping[str, int]) -> BoolArray:
    held = np.zeros((len(place), 6), dtype=bool)
    for name, entry in top.get("supports").items():
        node = place[entry.name_in(place, "nodes", name)]
        for direction in entry.sequence():
            held[node, DIRECTIONS.index(direction.one_of(DIRECTIONS, "directions"))] = True
    return held


def _lumps(top: Entry, place: Mapping[str, int]) -> F64:
    lumps = np.zeros(len(place))
    for name, entry in top.get("masses").items():
        node = place[entry.name_in(place, "nodes", name)]
        kg = entry.number("a mass in kg")
        if kg < 0:
            raise InputError(entry.path, f"{kg:g}", "use 0 kg or more")
        lumps[node] = kg
    return lumps


def _cases(top: Entry, place: Mapping[str, int]) -> tuple[tuple[str, ...], F64]:
    cases = top.get("cases").items()
    loads = np.zeros((len(cases), len(place), 6))
    for c, (_, case) in enumerate(cases):
        case.known("node_loads")
        for name, entry in case.get("node_loads").items():
            loads[c, place[entry.name_in(place, "nodes", name)]] = entry.vector(6)
    return tuple(name for name, _ in cases), loads
