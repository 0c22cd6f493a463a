"""SVG views are valid, say what they show and carry the right dimensions."""

from __future__ import annotations

import re
import xml.etree.ElementTree as ET

import numpy as np
import pytest

from explorer import theme
from explorer.drawing import drawing_in_words
from explorer.units import INCH_POUND
from explorer.views_svg import VIEWS, sheet_svg, view_svg
from tests.explorer.boxes import box

SVG = "{http://www.w3.org/2000/svg}"


def part(root: ET.Element, name: str) -> ET.Element:
    found = root.find(f"{SVG}{name}")
    assert found is not None
    return found


def texts(picture: str) -> list[str]:
    return [element.text or "" for element in ET.fromstring(picture).iter(f"{SVG}text")]


@pytest.mark.parametrize("view", VIEWS)
@pytest.mark.parametrize("colour", ["plain", "value", "kind"])
@pytest.mark.parametrize("dark", [False, True])
def test_every_view_is_valid_and_described(view, colour, dark):
    root = ET.fromstring(view_svg(box(), view, colour=colour, dark=dark, ident="a"))
    ids = root.attrib["aria-labelledby"].split()
    assert [part(root, name).attrib["id"] for name in ("title", "desc")] == ids
    assert part(root, "title").text == f"Invented box & braces: {VIEWS[view]}"
    assert part(root, "desc").text == drawing_in_words(box())
    assert part(root, "rect").attrib["fill"] == theme.colours(dark).background


def test_ids_differ_between_pictures_of_one_page():
    pictures = [view_svg(box(), view, ident=f"f{i}") for i, view in enumerate(VIEWS)]
    ids = re.findall(r' id="([^"]+)"', "".join([*pictures, sheet_svg(box())]))
    assert len(ids) == len(set(ids)) == 10


def test_members_are_named_and_those_left_out_are_not_drawn():
    root = ET.fromstring(view_svg(box(), "3d", colour="kind"))
    names = [title.text for group in root.iter(f"{SVG}g") for title in group.iter(f"{SVG}title")]
    assert len(names) == 13
    assert "brace <left>, side braces, 50\u00a0%, tension" in names
    assert not any("right" in name for name in names if name)


def test_dimensions_are_those_between_joint_centres():
    assert {"wheelbase 2,000", "2,000", "400"} <= set(texts(view_svg(box(), "side")))
    assert {"600", "400"} <= set(texts(view_svg(box(), "front")))
    plan = texts(view_svg(box(), "plan"))
    assert {"600", "front axle", "rear axle", "0", "2,000"} <= set(plan)
    assert "Dimensions between joint centres, in mm" in plan


def test_dimensions_in_inches():
    said = texts(view_svg(box(), "side", units=INCH_POUND))
    assert {"wheelbase 78.74", "15.75"} <= set(said)
    assert any(text.endswith("in inches") for text in said)


def test_dimensions_can_be_left_out():
    said = texts(view_svg(box(), "side", dimensions=False))
    assert said == ["Left side"]


def test_the_length_drawn_is_true_to_scale():
    root = ET.fromstring(view_svg(box(), "side", dimensions=False))
    paths = {
        part(group, "title").text: part(group, "path").attrib["d"] for group in root.iter(f"{SVG}g")
    }

    def ends(name: str) -> np.ndarray:
        return np.array(re.findall(r"[-\d.]+", paths[name]), float).reshape(2, 2)

    rail = ends("rail 1, rails")
    upright = ends("ring 3, rings")
    long, high = np.ptp(rail[:, 0]), np.ptp(upright[:, 1])
    assert long / high == pytest.approx(2.0 / 0.4, rel=2e-3)
    assert rail[0, 1] > upright[:, 1].min()  # the lower rail lies lower on the paper


def test_the_front_of_the_vehicle_is_on_the_left_and_its_left_side_on_the_right_from_ahead():
    drawing = box(present=np.arange(14) == 6)  # the upright at the front left
    across = texts(view_svg(box(), "plan"))
    assert across.index("front axle") < across.index("rear axle")
    root = ET.fromstring(view_svg(box(pickups=(0,)), "front", dimensions=False))
    corners = part(root, "polygon").attrib["points"].split()
    x = float(corners[0].split(",")[0])
    assert x > float(root.attrib["width"]) / 2
    assert ET.fromstring(view_svg(drawing, "front")) is not None  # a frame without width


def test_the_sheet_shows_all_views_and_its_unit_once():
    said = texts(sheet_svg(box(), colour="value"))
    assert set(VIEWS.values()) <= set(said)
    assert said.count("Dimensions between joint centres, in mm") == 1
    assert "Share of strain energy" in said
    root = ET.fromstring(sheet_svg(box(axles=None, stations=(), pickups=())))
    assert root.attrib["viewBox"] == "0 0 1188 840"


def test_nothing_in_the_text_leads_elsewhere():
    text = sheet_svg(box(), colour="kind")
    assert "href" not in text and "<script" not in text and "url(" not in text
