"""A small invented frame to draw: two rings, four rails and two braces."""

from __future__ import annotations

from typing import Any

import numpy as np

from explorer.drawing import FrameDrawing, MemberKind, MemberValue, Station

NAMES = (
    *(f"rail {i}" for i in range(1, 5)),
    *(f"ring {i}" for i in range(1, 9)),
    "brace <left>",
    'brace "right"',
)


def box(**changes: Any) -> FrameDrawing:
    """A box 2 m long, 0.6 m wide and 0.4 m high; the brace on the right is left out."""
    share = np.array([0.04] * 4 + [0.0] * 8 + [0.5, 0.34])
    settings: dict[str, Any] = {
        "title": "Invented box & braces",
        "joints": np.array([[x, y, z] for x in (0, 2) for y in (-0.3, 0.3) for z in (0.1, 0.5)]),
        "members": np.array(
            [
                *([0, 4], [1, 5], [2, 6], [3, 7], [0, 2], [1, 3], [0, 1], [2, 3]),
                *([4, 6], [5, 7], [4, 5], [6, 7], [0, 5], [2, 7]),
            ]
        ),
        "names": NAMES,
        "groups": ("rails",) * 4 + ("rings",) * 8 + ("side braces",) * 2,
        "outside_mm": np.full(14, 25.0),
        "sizes": ("25 x 1.5",) * 14,
        "present": np.arange(14) != 13,
        "value": MemberValue("Share of strain energy", share),
        "kind": MemberKind("Mostly by", ("tension", "bending"), np.array([1] * 12 + [0, -1])),
        "pickups": (0, 2),
        "stations": (Station("front axle", 0.0), Station("rear axle", 2.0)),
        "axles": (0.0, 2.0),
    }
    return FrameDrawing(**(settings | changes))
