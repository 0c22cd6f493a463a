"""Area, second moments, torsion constant and shear areas of the shapes that frames are made of."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from model.errors import InputError

F64 = NDArray[np.float64]


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
    """Names of the sizes of a shape, and the function of the sizes and Poisson's ratio."""

    sizes: tuple[str, ...]
    function: Callable[..., SectionValues]


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


def rectangular_tube(width: F64, depth: F64, wall: F64, poisson: float) -> SectionValues:
    """Square corners; torsion after Bredt on the mid-line; shear on the walls along the force."""
    bi, hi = width - 2 * wall, depth - 2 * wall
    b, h = width - wall, depth - wall
    area = width * depth - bi * hi
    iy = (width * depth * depth * depth - bi * hi * hi * hi) / 12
    iz = (depth * width * width * width - hi * bi * bi * bi) / 12
    j = 2 * b * b * h * h * wall / (b + h)
    return SectionValues(area, iy, iz, j, 2 * b * wall, 2 * h * wall)


def square_tube(outside: F64, wall: F64, poisson: float) -> SectionValues:
    """A rectangular tube with equal sides."""
    return rectangular_tube(outside, outside, wall, poisson)


SHAPES: dict[str, Shape] = {
    "round tube": Shape(("outside", "wall"), round_tube),
    "square tube": Shape(("outside", "wall"), square_tube),
    "rectangular tube": Shape(("width", "depth", "wall"), rectangular_tube),
}


def section_values(
    shape: str, sizes: Mapping[str, ArrayLike], poisson: float = 0.3
) -> SectionValues:
    """Section values of a shape; sizes [m] broadcast together.

    Raises InputError for an unknown shape, a missing size or an impossible one.
    """
    names = SHAPES[shape].sizes
    arrays = np.broadcast_arrays(*(np.asarray(sizes[n], dtype=np.float64) for n in names))
    given = dict(zip(names, arrays, strict=True))
    for name, value in given.items():
        if not (value > 0).all():
            raise InputError(name, f"{value.min() * 1e3:g} mm", "stay above 0")
    if "wall" in given:
        across = np.minimum.reduce([v for n, v in given.items() if n != "wall"])
        if (given["wall"] > across / 2).any():
            raise InputError("wall", "too thick", "keep it at most half the outside size")
    return SHAPES[shape].function(*arrays, poisson)


def section_slopes(
    shape: str, sizes: Mapping[str, float], poisson: float = 0.3
) -> dict[str, SectionValues]:
    """Slope of every section value with each size, by the complex step (exact to rounding)."""
    names = SHAPES[shape].sizes
    found = {}
    for name in names:
        stepped = [np.asarray(sizes[n] + 1j * 1e-30 * (n == name)) for n in names]
        values = SHAPES[shape].function(*stepped, poisson)
        found[name] = SectionValues(
            *(getattr(values, f).imag / 1e-30 for f in ("A", "Iy", "Iz", "J", "Asy", "Asz"))
        )
    return found
