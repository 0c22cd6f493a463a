"""Area, second moments, torsion constant and shear areas of the shapes that frames are made of.

The shapes' formulas are written as plain products, so that they take complex sizes too (exact
slopes) and give one size the same bits alone as among a million others.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from model.errors import InputError

F64 = NDArray[np.float64]
Sizes = Mapping[str, ArrayLike]

VALUES = ("A", "Iy", "Iz", "J", "Asy", "Asz")


@dataclass(frozen=True, eq=False)
class SectionValues:
    """Section values of one shape, all (...): A [m²], Iy, Iz, J [m⁴], Asy, Asz [m²].

    Iy bends in the local x-z plane (z is ``up``) and goes with the shear area Asz.
    """

    A: F64
    Iy: F64
    Iz: F64
    J: F64
    Asy: F64
    Asz: F64


@dataclass(frozen=True)
class Shape:
    """Names of the sizes of a shape, and what follows from them.

    function : section values of the sizes in that order and Poisson's ratio.
    reach : distances (cy, cz) from the centroid to the outermost fibre, of the sizes.
    optional : further sizes with the value they have when left out; by name to ``function``.
    """

    sizes: tuple[str, ...]
    function: Callable[..., SectionValues]
    reach: Callable[..., tuple[F64, F64]]
    optional: Mapping[str, float] = field(default_factory=dict)


# --- the shapes -----------------------------------------------------------------------------


def round_tube(outside: F64, wall: F64, poisson: float) -> SectionValues:
    """Exact for concentric circles; shear coefficient: Cowper, J. Appl. Mech. 33 (1966)."""
    inner = outside - 2 * wall
    o2, i2 = outside * outside, inner * inner
    second = np.pi / 64 * (o2 * o2 - i2 * i2)
    area = np.pi / 4 * (o2 - i2)
    m2 = i2 / o2
    sq = (1 + m2) * (1 + m2)
    k = 6 * (1 + poisson) * sq / ((7 + 6 * poisson) * sq + (20 + 12 * poisson) * m2)
    return SectionValues(area, second, second, 2 * second, k * area, k * area)


def solid_round(outside: F64, poisson: float) -> SectionValues:
    """Exact for a circle; shear coefficient 6(1 + ν)/(7 + 6ν): Cowper, J. Appl. Mech. 33 (1966)."""
    o2 = outside * outside
    area, second = np.pi / 4 * o2, np.pi / 64 * (o2 * o2)
    k = 6 * (1 + poisson) / (7 + 6 * poisson)
    return SectionValues(area, second, second, 2 * second, k * area, k * area)


def rectangular_tube(
    width: F64,
    depth: F64,
    wall: F64,
    poisson: float,
    corner_radius: Any = 0.0,
    inner_radius: Any = None,
) -> SectionValues:
    """Square corners unless a radius is given; shear on the walls along the force.

    Square corners: torsion after Bredt on the mid-line. With an outside ``corner_radius``: area
    and second moments exact, torsion after EN 10219-2:2006, Annex B (its term for the wall's own
    twisting included, which Bredt leaves out: up to 1 % more for thick walls). ``inner_radius``:
    corners run round one centre when it is not given, as EN 10219-2 has them (r = 2 t outside,
    t inside); EN 10210-2 has 1.5 t and t. Shear area: the walls along the force between
    mid-lines, A h/(b + h) of EN 1993-1-1:2005, 6.2.6(3) with A on the mid-line.
    """
    bi, hi = width - 2 * wall, depth - 2 * wall
    b, h = width - wall, depth - wall
    ro = np.asarray(corner_radius)
    ri = np.where((ro - wall).real > 0, ro - wall, 0.0) if inner_radius is None else inner_radius
    cut, hollow = _Corner(ro), _Corner(np.asarray(ri))
    area = width * depth - bi * hi - cut.area + hollow.area
    iy = (width * depth * depth * depth - bi * hi * hi * hi) / 12
    iz = (depth * width * width * width - hi * bi * bi * bi) / 12
    iy = iy - cut.second(depth) + hollow.second(hi)
    iz = iz - cut.second(width) + hollow.second(bi)
    mean = (ro + ri) / 2
    enclosed = b * h - (4 - np.pi) * (mean * mean)
    round_it = 2 * (b + h) - 2 * (4 - np.pi) * mean
    own = np.where(ro.real > 0, round_it * wall * wall * wall / 3, 0.0)
    j = 4 * enclosed * enclosed * wall / round_it + own
    return SectionValues(area, iy, iz, j, 2 * b * wall, 2 * h * wall)


class _Corner:
    """What four corners of a rectangle lose when they are rounded to one radius, exactly."""

    def __init__(self, radius: Any) -> None:
        self.radius = radius
        self.area = (4 - np.pi) * (radius * radius)

    def second(self, size: Any) -> Any:
        """Second moment of the four pieces about the axis at half of ``size`` [m⁴]."""
        r = self.radius
        own = (1 / 3 - np.pi / 16 - 1 / (3 * (12 - 3 * np.pi))) * (r * r * r * r)
        arm = size / 2 - (10 - 3 * np.pi) / (12 - 3 * np.pi) * r
        return 4 * own + self.area * (arm * arm)


def square_tube(outside: F64, wall: F64, poisson: float, corner_radius: Any = 0.0) -> SectionValues:
    """A rectangular tube with equal sides."""
    return rectangular_tube(outside, outside, wall, poisson, corner_radius)


def solid_rectangle(width: F64, depth: F64, poisson: float) -> SectionValues:
    """Exact; torsion: Saint-Venant's series (Timoshenko & Goodier, Theory of Elasticity, §109).

    Shear coefficient 10(1 + ν)/(12 + 11ν): Cowper, J. Appl. Mech. 33 (1966). The series
    sum tanh(nπ long/2 short)/n⁵ over odd n is summed as its limit for a thin strip,
    (31/32) ζ(5), less terms that fade as exp(-nπ); six leave less than rounding does.
    """
    area = width * depth
    slim = (width - depth).real < 0
    short, long = np.where(slim, width, depth), np.where(slim, depth, width)
    ratio = long / short
    total = 31 / 32 * 1.0369277551433699 + 0 * ratio
    for n in (1, 3, 5, 7, 9, 11):
        fade = np.exp(-np.pi * n * ratio)
        total = total - 2 * fade / (1 + fade) / n**5
    strip = long * short * short * short / 3
    j = strip * (1 - 192 / np.pi**5 * total / ratio)
    iy, iz = area * depth * depth / 12, area * width * width / 12
    k = 10 * (1 + poisson) / (12 + 11 * poisson)
    return SectionValues(area, iy, iz, j, k * area, k * area)


def channel(flange: F64, depth: F64, wall: F64, poisson: float) -> SectionValues:
    """One wall thickness and square corners; outside dimensions, web upright (along local z).

    Area and second moments exact, torsion constant on the mid-line (Timoshenko & Gere, Theory
    of Elastic Stability): 0.2 % above an exact one for thin walls, roots without fillets. It is
    that of free ends; ``held_warping_torsion`` gives the other limit. Loads are taken through
    the shear centre. Shear areas: web between flange mid-lines, both flanges (EN 1993-1-1:2005,
    6.2.6(3), used here as effective areas; common practice).
    """
    b, h = flange - wall / 2, depth - wall
    area = (2 * b + h) * wall
    inside, lip = depth - 2 * wall, flange - wall
    iy = (flange * depth * depth * depth - lip * inside * inside * inside) / 12
    out = _channel_centroid(flange, depth, wall)
    web_arm, flange_arm = out - wall / 2, (flange + wall) / 2 - out
    web = depth * wall * (wall * wall / 12 + web_arm * web_arm)
    flanges = 2 * lip * wall * (lip * lip / 12 + flange_arm * flange_arm)
    j = (2 * b + h) * wall * wall * wall / 3
    return SectionValues(area, iy, web + flanges, j, 2 * flange * wall, h * wall)


def _channel_centroid(flange: F64, depth: F64, wall: F64) -> F64:
    """Distance of the centroid from the outer face of the web [m]."""
    lip = flange - wall
    out: F64 = (depth * wall / 2 + lip * (flange + wall)) / (depth + 2 * lip)
    return out


def _round_reach(outside: F64, wall: F64 | None = None) -> tuple[F64, F64]:
    return outside / 2, outside / 2


def _rectangle_reach(width: F64, depth: F64, wall: F64 | None = None) -> tuple[F64, F64]:
    return width / 2, depth / 2


def _channel_reach(flange: F64, depth: F64, wall: F64) -> tuple[F64, F64]:
    out = _channel_centroid(flange, depth, wall)
    return np.maximum(out, flange - out), depth / 2


SHAPES: dict[str, Shape] = {
    "round tube": Shape(("outside", "wall"), round_tube, _round_reach),
    "square tube": Shape(("outside", "wall"), square_tube, _round_reach, {"corner_radius": 0.0}),
    "rectangular tube": Shape(
        ("width", "depth", "wall"), rectangular_tube, _rectangle_reach, {"corner_radius": 0.0}
    ),
    "solid round": Shape(("outside",), solid_round, _round_reach),
    "solid rectangle": Shape(("width", "depth"), solid_rectangle, _rectangle_reach),
    "channel": Shape(("flange", "depth", "wall"), channel, _channel_reach),
}


# --- what is asked of them ------------------------------------------------------------------


def section_values(shape: str, sizes: Sizes, poisson: float = 0.3) -> SectionValues:
    """Section values of a shape; sizes [m] broadcast together.

    Raises
    ------
    InputError
        An unknown shape, a size that is missing, not one of the shape's or impossible (the first
        bad entry, in mm), or a Poisson's ratio that no isotropic material has.
    """
    given = _checked(shape, sizes, poisson)
    return SHAPES[shape].function(*_of(shape, given), poisson, **_more(shape, given))


def section_slopes(shape: str, sizes: Sizes, poisson: float = 0.3) -> dict[str, SectionValues]:
    """Slope of every section value with each size, by the complex step (exact to rounding).

    By size: values per metre of it [m, m³], shaped as the sizes [m] broadcast together. An
    optional size (``corner_radius``) stays as it is given and has no slope of its own. Checked
    as ``section_values`` checks; the last bit may differ between one size and many.
    """
    given = _checked(shape, sizes, poisson)
    names, more = SHAPES[shape].sizes, _more(shape, given)
    found = {}
    for name in names:
        stepped = [np.asarray(given[n] + 1j * 1e-30 * (n == name)) for n in names]
        values = SHAPES[shape].function(*stepped, poisson, **more)
        found[name] = SectionValues(*(getattr(values, f).imag / 1e-30 for f in VALUES))
    return found


def section_reach(shape: str, sizes: Sizes) -> tuple[F64, F64]:
    """Distances (cy, cz) [m] from the centroid to the outermost fibre along local y and z.

    For shapes that are not symmetric, the farther side. Checked as ``section_values`` checks.
    """
    return SHAPES[shape].reach(*_of(shape, _checked(shape, sizes)))


def _of(shape: str, given: Mapping[str, F64]) -> list[F64]:
    return [given[name] for name in SHAPES[shape].sizes]


def _more(shape: str, given: Mapping[str, F64]) -> dict[str, F64]:
    return {name: given[name] for name in SHAPES[shape].optional}


def _checked(shape: str, sizes: Sizes, poisson: float = 0.3) -> dict[str, F64]:
    """Every size of the shape as arrays of one shape, each possible."""
    if shape not in SHAPES:
        raise InputError("shape", repr(shape), f"use one of: {', '.join(SHAPES)}")
    about = SHAPES[shape]
    for name in about.sizes:
        if name not in sizes:
            raise InputError(name, "not given", f"a {shape} needs {', '.join(about.sizes)} in m")
    for name in sizes:
        if name not in about.sizes and name not in about.optional:
            known = ", ".join((*about.sizes, *about.optional))
            raise InputError(name, str(sizes[name]), f"leave it out: a {shape} has {known}")
    if not -1 < poisson <= 0.5:
        raise InputError("poisson", f"{poisson:g}", "stay above -1 and at most 0.5; metals: 0.3")
    every = {**about.optional, **{n: sizes[n] for n in sizes if n in about.optional}}
    every |= {name: sizes[name] for name in about.sizes}
    arrays = np.broadcast_arrays(*(np.asarray(v, dtype=np.float64) for v in every.values()))
    given = dict(zip(every, arrays, strict=True))
    for name in about.sizes:
        good = (given[name] > 0) & (given[name] < np.inf)
        _refuse(name, given[name], ~good, lambda i: "stay above 0, and finite")
    most = np.minimum.reduce([given[n] for n in about.sizes if n != "wall"]) / 2
    if "wall" in given:
        half = "keep it at most half the outside size"
        # a rounding of the last digit must not turn a solid bar into a fault
        thick = ~(given["wall"] <= most * (1 + 1e-12))
        _refuse("wall", given["wall"], thick, lambda i: f"{half}, {most.flat[i] * 1e3:g} mm")
    for name in about.optional:
        good = (given[name] >= 0) & (given[name] <= most)
        _refuse(name, given[name], ~good, lambda i: f"stay between 0 and {most.flat[i] * 1e3:g} mm")
    return given


def _refuse(name: str, values: F64, bad: Any, remedy: Callable[[int], str]) -> None:
    if bad.any():
        i = int(np.flatnonzero(bad)[0])
        which = f" (entry {i})" if values.size > 1 else ""
        raise InputError(name, f"{values.flat[i] * 1e3:g} mm{which}", remedy(i))
