"""Layouts for the tests: plain ladders and boxes, and random ones of every family."""

from __future__ import annotations

import numpy as np

from model.frame.layout import Hoop, Layout, Span, Station, Tube
from model.stock.materials import Material

STEEL = Material(
    name="steel of the checks",
    E=205e9,
    G=205e9 / 2.6,
    density=7850.0,
    yield_strength=235e6,
    welded_strength=None,
    price_per_kg=None,
    note="",
    source="E and G as the check frames state them",
)


def round_tube(outside_mm: float, wall_mm: float, material: Material = STEEL) -> Tube:
    return Tube("round tube", {"outside": outside_mm / 1e3, "wall": wall_mm / 1e3}, material)


def rectangular_tube(width_mm: float, depth_mm: float, wall_mm: float) -> Tube:
    sizes = {"width": width_mm / 1e3, "depth": depth_mm / 1e3, "wall": wall_mm / 1e3}
    return Tube("rectangular tube", sizes, STEEL)


def ladder(length: float = 3.0, width: float = 0.8, bays: int = 4) -> Layout:
    """A ladder with rails 50 x 100 x 3 and cross members 50 x 60 x 3 at equal spacing."""
    return Layout(
        name="ladder",
        wheelbase=length,
        track_front=1.4,
        track_rear=1.4,
        stations=(Station("front", 0, width, 0.4), Station("rear", 1, width, 0.4)),
        spans=(Span("middle", bays, upper=False),),
        tubes={
            "lower rails": rectangular_tube(50, 100, 3),
            "cross members": rectangular_tube(50, 60, 3),
        },
        front_axle="front",
        rear_axle="rear",
    )


def box(bays: int = 8, bracing: str = "open", ring: str = "single") -> Layout:
    """A box 2.4 x 0.7 x 0.5 m of round tube; rails 32 x 2, rings 25.4 x 1.6, braces 25.4 x 1.2."""
    return Layout(
        name="box",
        wheelbase=2.4,
        track_front=1.4,
        track_rear=1.4,
        stations=(
            Station("front", 0, 0.7, 0.0, 0.7, 0.5, ring=ring),
            Station("rear", 1, 0.7, 0.0, 0.7, 0.5, ring=ring),
        ),
        spans=(Span("middle", bays, bracing, bracing, bracing, bracing),),
        tubes={
            "rails": round_tube(32, 2),
            "ring members": round_tube(25.4, 1.6),
            "ring braces": round_tube(25.4, 1.6),
            "braces": round_tube(25.4, 1.2),
        },
        front_axle="front",
        rear_axle="rear",
    )


def random_layout(rng: np.random.Generator, *, symmetric: bool = False) -> Layout:
    """A buildable layout: two or four rails, three to six stations, any bracing.

    symmetric : braces of the right side follow those of the left one.
    """
    uppers = bool(rng.integers(2))
    outriggers = rng.random() < 0.2
    count = int(rng.integers(3, 7))
    inner = np.sort(rng.uniform(0.1, 0.9, count - 2)) + 0.03 * np.arange(count - 2)
    at = np.concatenate([[0.0], np.minimum(inner, 0.97), [1.0]])
    flat = ("open", "single", "parallel", "cross")

    def pick(there: bool, *meeting: str) -> str:
        return str(rng.choice((*flat, *meeting))) if there else "open"

    stations = tuple(
        Station(
            f"s{k}",
            float(x),
            float(rng.uniform(0.4, 1.0)),
            float(rng.uniform(0.1, 0.3)),
            float(rng.uniform(0.4, 1.0)) if uppers else 0.0,
            float(rng.uniform(0.5, 0.9)) if uppers else 0.0,
            ring=pick(uppers, "chevron"),
            outrigger=1.4 if outriggers else 0.0,
        )
        for k, x in enumerate(at)
    )
    sides = [(pick(uppers, "K", "chevron"), pick(uppers, "K", "chevron")) for _ in at]
    spans = tuple(
        Span(
            f"p{k}",
            int(rng.integers(1, 4)),
            floor=pick(True, "K"),
            top=pick(uppers, "K"),
            left=sides[k][0],
            right=sides[k][0 if symmetric else 1],
            upper=uppers,
        )
        for k in range(count - 1)
    )
    hoops: tuple[Hoop, ...] = ()
    if rng.random() < 0.3:
        bracing = str(rng.choice(("open", "single", "cross")))
        hoops = (Hoop("hoop", "s1", 1.3, 0.5, 0.05, "s2", bracing),)
    tubes = {
        "rails": round_tube(float(rng.uniform(25, 60)), float(rng.uniform(1, 4))),
        "ring members": rectangular_tube(
            float(rng.uniform(20, 50)), float(rng.uniform(20, 80)), float(rng.uniform(1, 4))
        ),
        "braces": round_tube(float(rng.uniform(15, 40)), float(rng.uniform(1, 3))),
        "hoop": round_tube(40, 2),
        "outriggers": round_tube(30, 2),
    }
    return Layout(
        name="random",
        wheelbase=float(rng.uniform(1.5, 3.0)),
        track_front=1.3,
        track_rear=1.3,
        stations=stations,
        spans=spans,
        tubes=tubes,
        front_axle="s0",
        rear_axle=f"s{count - 1}",
        hoops=hoops,
        entry="linkage" if uppers and rng.integers(2) else "spring mounts",
    )
