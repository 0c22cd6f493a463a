"""Frames looked at closely, for tests of what is said and handed over about them."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

from explorer.report import Subject
from model.frame.layout import with_tube
from model.results.detail import Detail, examine
from tests.model.frame.layouts import box, ladder

SUBJECT = Subject(
    name="Check vehicle <A & B>",
    title="Frame 12",
    about='Invented vehicle: for "tests" only.',
    inputs=(("Wheelbase [mm]", "2400"), ("Side <bracing>", "single")),
    origin=(("Run", "a folder"), ("Seed", "7")),
)


@cache
def braced_box() -> Detail:
    """36 joints, 102 members of round tube."""
    return examine(box(8, "single"))


@cache
def plain_ladder() -> Detail:
    """10 joints, 13 members of rectangular tube."""
    return examine(ladder())


@cache
def springy_ladder() -> Detail:
    """The ladder with cross members whose ends give in bending and along."""
    return examine(with_tube(ladder(), "cross members", rotation=2e4, axial=3e8))


@cache
def awkward_box() -> Detail:
    """A box of a material whose name a spreadsheet and a browser would both take for code."""
    layout = box(2, "single")
    steel = layout.tubes["rails"].material
    strange = replace(steel, name="=1+1 <script>alert('x')</script>")
    return examine(with_tube(layout, "rails", material=strange))
