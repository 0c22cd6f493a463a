"""From a frame looked at closely to its drawing, with what its members do to be seen on it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from explorer.drawing import FrameDrawing, MemberKind, MemberValue, Station, drawing_of
from model.frame.layout import Tube
from model.results.detail import Detail, own_tubes

KINDS = ("tension and compression", "bending", "torsion", "shear", "give of the joints")
"""The ways a member stores strain energy, in the order of ``Detail.energy``."""


def drawing_of_detail(detail: Detail, title: str) -> FrameDrawing:
    """The frame with each member's share of the twist energy, and how it mostly carries it."""
    layout, batch = detail.layout, detail.batch
    skeleton, xyz = batch.skeleton, batch.xyz[0]
    tubes = own_tubes(layout, batch)
    plain = drawing_of(
        skeleton,
        xyz,
        {group: outside_mm(tube) for group, tube in tubes.items()},
        title=title,
        present=batch.present[0],
        sizes={group: tube.label for group, tube in tubes.items()},
        stations=[Station(s.name, s.at * layout.wheelbase) for s in layout.stations],
        axles=(float(xyz[skeleton.front[0], 0]), float(xyz[skeleton.rear[0], 0])),
    )
    share = np.clip(detail.share, 0.0, None)
    mostly = np.where(share > 0, detail.energy.argmax(axis=1), -1).astype(np.int32)
    return replace(
        plain,
        value=MemberValue("Share of the strain energy under twist", share),
        kind=MemberKind("Carries the twist mostly by", KINDS, mostly),
    )


def outside_mm(tube: Tube) -> float:
    """The greatest outside size of a tube [mm]."""
    outer = (size for name, size in tube.sizes.items() if name not in ("wall", "corner_radius"))
    return float(max(outer)) * 1e3
