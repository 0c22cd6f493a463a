"""The words of the trade that a layout is written in: bracings, faces, groups, ways of loading."""

from __future__ import annotations

import math
from collections.abc import Mapping

BRACING = ("open", "single", "parallel", "cross", "K", "chevron")
"""Ways to brace a face: none, one diagonal a bay (turning over from bay to bay), one diagonal a
bay (all the same way), both diagonals, and two half-diagonals that meet in the middle of a
member: K on the member at the rear edge of the bay, chevron on the member at the upper edge."""

MEETING = ("K", "chevron")
"""Bracings whose diagonals meet in the middle of a member, which needs a joint there."""

FACES = ("floor", "top", "left", "right")

RIGID = math.inf
"""End stiffness of a welded end."""

GROUPS = (
    "lower rails",
    "upper rails",
    "cross members",
    "top cross members",
    "uprights",
    "side braces",
    "floor braces",
    "top braces",
    "ring braces",
    "hoop",
    "hoop stays",
    "hoop braces",
    "outriggers",
    "sills",
)
"""Groups of members that share one tube size."""

FALLBACK: Mapping[str, str] = {
    "lower rails": "rails",
    "upper rails": "rails",
    "top cross members": "cross members",
    "cross members": "ring members",
    "uprights": "ring members",
    "side braces": "braces",
    "floor braces": "braces",
    "top braces": "braces",
    "ring braces": "braces",
    "hoop stays": "hoop",
    "hoop braces": "braces",
    "sills": "outriggers",
}
"""The group whose tube is used when a group has none of its own."""

ENTRIES = ("spring mounts", "linkage")
"""How the twist couple enters: as vertical forces at the spring mounts alone, or with the
sideways forces that wishbones add at the upper and lower pickups of the same ring."""


MOST_BAYS = 20
