"""What the canvas is told, and what a drawing refuses."""

from __future__ import annotations

import json
import shutil
import subprocess

import numpy as np
import pytest
from streamlit.testing.v1 import AppTest

from explorer import theme, view3d
from explorer.drawing import (
    Ghost,
    Load,
    MemberKind,
    MemberValue,
    Station,
    Support,
    drawing_in_words,
    drawing_of,
)
from explorer.numbers import SPACE
from explorer.units import INCH_POUND
from explorer.view3d import canvas_data
from model.errors import InputError
from model.frame.skeleton import Skeleton
from tests.explorer.boxes import box


@pytest.mark.parametrize(
    ("changes", "field"),
    [
        ({"joints": np.zeros((8, 2))}, "joints"),
        ({"joints": np.full((8, 3), np.nan)}, "joints"),
        ({"members": np.full((14, 2), 8)}, "members"),
        ({"members": np.full((13, 2), 0)}, "members"),
        ({"names": ("same",) * 14}, "names"),
        ({"groups": ("rails",) * 3}, "groups"),
        ({"outside_mm": np.zeros(14)}, "outside_mm"),
        ({"sizes": ("25 x 1.5",)}, "sizes"),
        ({"present": np.ones(3, bool)}, "present"),
        ({"value": MemberValue("Share", np.zeros(3))}, "member values"),
        ({"kind": MemberKind("By", ("a",), np.zeros(3, int))}, "member values"),
        ({"pickups": (8,)}, "marks"),
        ({"loads": (Load(-1, (0, 0, 1)),)}, "marks"),
        ({"supports": (Support(99),)}, "marks"),
        ({"ghost": Ghost(np.zeros((3, 3)), "another frame")}, "ghost"),
        ({"ghost": Ghost(np.zeros((3, 3)), "a mode", np.array([[0, 1]]), swings=True)}, "ghost"),
    ],
)
def test_a_drawing_that_does_not_fit_together_is_refused_by_field(changes, field):
    with pytest.raises(InputError, match=field):
        box(**changes)


def test_values_and_kinds_are_checked_at_the_door():
    with pytest.raises(InputError, match="at least 0"):
        MemberValue("Share", np.array([0.1, -0.1]))
    with pytest.raises(InputError, match="from -1 to 0"):
        MemberKind("By", ("only",), np.array([1]))


def test_a_drawing_keeps_its_own_unchangeable_arrays():
    share = np.array([0.2] * 14)
    drawing = box(value=MemberValue("Share", share))
    share[0] = 9
    assert drawing.value is not None and drawing.value.highest == 0.2
    with pytest.raises(ValueError, match="read-only"):
        drawing.joints[0, 0] = 1


def test_legend_numbers_are_round_and_lie_on_the_ramp():
    ticks = MemberValue("Share", np.array([0.0, 0.0513])).ticks()
    assert [text for _, text in ticks] == ["0", "2", f"4{SPACE}%"]
    assert [place for place, _ in ticks] == pytest.approx([0, 2 / 5.13, 4 / 5.13], abs=1e-4)


def test_a_value_that_is_zero_everywhere_still_has_a_legend():
    value = MemberValue("Share", np.zeros(14))
    assert value.highest == 0
    assert value.ticks()[0] == (0, "0")
    assert max(canvas_data(box(value=value), key="k")["value"]["parts"]) == 0


def test_the_extent_and_the_wheelbase_are_those_of_members_present():
    low, high = box(present=np.arange(14) < 1).extent
    assert (high - low).tolist() == [2.0, 0.0, 0.0]
    assert box().wheelbase == 2.0
    assert box(axles=None).wheelbase is None
    assert box().lengths[0] == 2.0


def test_the_foot_of_a_station_is_its_lowest_joint_on_the_left():
    assert box().foot_of(Station("rear axle", 2.0)).tolist() == [2.0, -0.3, 0.1]


def test_words_say_size_groups_and_where_the_energy_is():
    words = drawing_in_words(box())
    assert f"13{SPACE}members in 3{SPACE}groups (rails, rings and side braces)" in words
    assert f"2,000{SPACE}mm long, 600{SPACE}mm wide, 400{SPACE}mm high" in words
    assert f"greatest in brace <left> (50{SPACE}%), rail 1 (4{SPACE}%)" in words
    assert "Mostly by: tension 1 and bending 12." in words
    assert f"78.7{SPACE}in long" in drawing_in_words(box(), INCH_POUND)


def test_the_canvas_is_told_plain_data():
    ghost = Ghost(box().joints + 0.01, "deformed", swings=True)
    drawing = box(
        ghost=ghost,
        loads=(Load(0, (0, 0, -5), "500 N"),),
        supports=(Support(4, "xyz"),),
        picked_out=("side braces",),
    )
    data = canvas_data(drawing, key="k", colour="kind")
    assert json.loads(json.dumps(data, allow_nan=False)) == data
    assert data["details"][0] == f"rails · 25 x 1.5 · 2,000{SPACE}mm long"
    assert data["shown"][13] is False
    assert data["picked_out"] == [False] * 12 + [True] * 2
    assert data["value"]["parts"][12] == 1
    assert data["value"]["texts"][12] == f"50{SPACE}%"
    assert data["loads"] == [[0, [0, 0, -1], "500 N"]]
    assert data["ghost"]["swings"] is True
    assert data["light"]["palette"] == list(theme.LIGHT.palette)
    assert data["words"] == drawing_in_words(drawing)


def test_unknown_values_reach_the_canvas_as_unknown():
    share = np.array([np.nan] + [0.1] * 13)
    value = canvas_data(box(value=MemberValue("Share", share)), key="k")["value"]
    assert value["parts"][0] is None
    assert value["texts"][0] == "–"


def test_inches_reach_the_canvas():
    data = canvas_data(box(sizes=()), key="k", units=INCH_POUND)
    assert data["details"][0] == f"rails · 0.984{SPACE}in outside · 78.7{SPACE}in long"
    assert data["ruler"]["unit"] == "in"
    assert data["ruler"]["per_metre"] == pytest.approx(39.37, abs=0.01)


def test_a_skeleton_becomes_a_drawing():
    two = np.array([0, 1], np.int32)
    skeleton = Skeleton(
        joints=("a", "b", "c"),
        members=np.array([[0, 1], [1, 2]], np.int32),
        group=np.array([1, 0], np.int32),
        groups=("rails", "braces"),
        up=np.tile([0.0, 0.0, 1.0], (2, 1)),
        member_names=("one", "two"),
        front=two,
        rear=two,
        rings=np.zeros((1, 2), np.int32),
        mirror_joint=np.arange(3, dtype=np.int32),
        mirror_member=np.arange(2, dtype=np.int32),
    )
    drawing = drawing_of(
        skeleton, np.eye(3), {"rails": 30.0, "braces": 20.0}, title="T", sizes={"rails": "30 x 2"}
    )
    assert drawing.groups == ("braces", "rails")
    assert drawing.outside_mm.tolist() == [20, 30]
    assert drawing.sizes == ("", "30 x 2")
    assert drawing.pickups == (0, 1, 0, 1)


def test_the_scripts_are_whole_and_ask_for_nothing_from_outside(tmp_path):
    parts = [view3d._asset(name) for name in view3d._SCRIPTS]
    whole = "\n".join([*parts, view3d._asset("view3d.css"), view3d._asset("view3d.html")])
    for word in ("http://", "https://", "import ", "fetch(", "XMLHttpRequest", "eval("):
        assert word not in whole
    node = shutil.which("node")
    if node:
        script = tmp_path / "view3d.mjs"
        script.write_text("\n".join(parts), encoding="utf-8")
        subprocess.run([node, "--check", script], check=True)


def test_the_view_runs_in_a_page_and_picks_nothing_by_itself():
    def page() -> None:
        import streamlit as st

        from explorer.view3d import frame_view
        from tests.explorer.boxes import box

        st.text(f"picked {frame_view(box(), key='frame', colour='value')}")
        st.text(f"shown {frame_view(box(), key='second', selected='rail 1')}")

    app = AppTest.from_function(page).run(timeout=30)
    assert not app.exception
    assert [text.value for text in app.text] == ["picked None", "shown None"]
