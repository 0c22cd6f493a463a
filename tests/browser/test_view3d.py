"""The frame canvas in a real browser: drag, wheel, keys and a click that reaches Python."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

import pytest

from tests.browser.small_app import served

if TYPE_CHECKING:
    from playwright.sync_api import Locator, Page

SCRIPT = """
import numpy as np
import streamlit as st
from explorer.view3d import FrameDrawing, MemberValue, frame_view

height = 0.3 + 0.05 * st.session_state.get("times", 0)
drawing = FrameDrawing(
    title="Plain box",
    joints=np.array([[x, y, z] for x in (0, 1, 2) for y in (-0.3, 0.3) for z in (0, height)]),
    members=np.array([[0, 4], [4, 8], [2, 6], [6, 10], [1, 5], [5, 9], [3, 7], [7, 11],
                      [0, 2], [1, 3], [8, 10], [9, 11], [0, 1], [2, 3], [8, 9], [10, 11], [4, 5]]),
    names=tuple(f"member {m}" for m in range(17)),
    groups=("rails",) * 8 + ("cross members",) * 4 + ("uprights",) * 5,
    outside_mm=np.full(17, 30.0),
    value=MemberValue("Share of strain energy", np.linspace(0, 0.2, 17)),
)
picked = frame_view(drawing, key="box", height=400, colour="value", view="side")
st.button("Higher", on_click=lambda: st.session_state.update(
    times=st.session_state.get("times", 0) + 1))
st.write(f"Picked: {picked}; times {st.session_state.get('times', 0)}.")
st.write("line\\n\\n" * 60)
"""


@pytest.fixture(scope="module")
def address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """Address of a small app that holds nothing but the canvas."""
    with served(SCRIPT, tmp_path_factory.mktemp("view3d")) as url:
        yield url


@pytest.fixture
def canvas(address: str, page: Page) -> Locator:
    """The canvas in a fresh page, once it is drawn."""
    page.goto(address)
    view = page.locator("canvas[role=application]")
    view.wait_for()
    page.wait_for_timeout(300)
    return view


def _picture(canvas: Locator) -> str:
    canvas.page.wait_for_timeout(120)
    picture: str = canvas.evaluate("canvas => canvas.toDataURL()")
    return picture


def _middle(canvas: Locator) -> tuple[float, float]:
    box = canvas.bounding_box()
    assert box is not None
    return box["x"] + box["width"] / 2, box["y"] + box["height"] / 2


def _upright(canvas: Locator) -> tuple[float, float]:
    """A point on the upright in the middle of the side view, found by its spoken fact."""
    x, y = _middle(canvas)
    tip = canvas.page.locator(".tip")
    for up in range(-60, 61, 10):
        canvas.page.mouse.move(x, y + up)
        if tip.is_visible() and "member 16" in tip.inner_text():
            return x, y + up
    raise AssertionError("the middle upright is not where the side view should show it")


def test_it_says_what_it_shows(canvas: Locator) -> None:
    label = canvas.get_attribute("aria-label") or ""
    assert label.startswith("Plain box: 17\u00a0members in 3\u00a0groups")
    assert "greatest in member 16 (20\u00a0%)" in label


def test_a_drag_turns_the_frame_and_fit_turns_it_back(canvas: Locator) -> None:
    before = _picture(canvas)
    x, y = _middle(canvas)
    mouse = canvas.page.mouse
    mouse.move(x, y + 90)
    mouse.down()
    mouse.move(x + 120, y + 60, steps=5)
    mouse.up()
    mouse.move(5, 5)
    assert _picture(canvas) != before
    assert canvas.page.get_by_role("button", name="Side").get_attribute("aria-pressed") == "false"
    canvas.page.get_by_role("button", name="Fit").click()
    canvas.page.mouse.move(5, 5)
    assert _picture(canvas) == before


@pytest.mark.parametrize("key", ["ArrowLeft", "ArrowUp", "+", "-", "Shift+ArrowLeft", "3", "n"])
def test_keys_move_the_picture(canvas: Locator, key: str) -> None:
    canvas.focus()
    before = _picture(canvas)
    canvas.press(key)
    assert _picture(canvas) != before


def test_pointing_tells_name_group_and_value(canvas: Locator) -> None:
    _upright(canvas)
    tip = canvas.page.locator(".tip").inner_text()
    assert "uprights" in tip
    assert "Share of strain energy: 20\u00a0%" in tip


def test_a_click_gives_the_member_to_python_and_an_empty_place_takes_it_back(
    canvas: Locator,
) -> None:
    page = canvas.page
    page.mouse.click(*_upright(canvas))
    page.get_by_text("Picked: member 16").wait_for()
    x, y = _middle(canvas)
    page.mouse.click(x + 60, y)
    page.get_by_text("Picked: None").wait_for()


def test_keys_alone_pick_a_member(canvas: Locator) -> None:
    canvas.focus()
    canvas.press("n")
    canvas.press("n")
    said = canvas.page.locator("[data-role=said]")
    assert said.inner_text().startswith("member 1, rails")
    canvas.press("Enter")
    canvas.page.get_by_text("Picked: member 1;").wait_for()
    canvas.press("Escape")
    canvas.page.get_by_text("Picked: None").wait_for()


def test_the_camera_and_the_pick_stay_when_the_frame_changes(canvas: Locator) -> None:
    page = canvas.page
    page.get_by_role("button", name="Plan").click()
    page.get_by_role("button", name="Zoom in").click()
    page.mouse.move(5, 5)
    plan = _picture(canvas)
    page.get_by_role("button", name="Higher").click()
    page.get_by_text("times 1").wait_for()
    page.mouse.move(5, 5)
    assert canvas.page.get_by_role("button", name="Plan").get_attribute("aria-pressed") == "true"
    assert _picture(canvas) == plan  # seen from above, a higher frame looks the same


def test_the_wheel_scrolls_the_page_until_the_frame_has_the_focus(canvas: Locator) -> None:
    page = canvas.page
    before = _picture(canvas)
    page.mouse.move(*_middle(canvas))
    page.mouse.move(_middle(canvas)[0] + 60, _middle(canvas)[1])
    page.mouse.wheel(0, 120)
    assert _picture(canvas) == before
    page.keyboard.down("Control")
    page.mouse.wheel(0, -120)
    page.keyboard.up("Control")
    page.mouse.move(5, 5)
    assert _picture(canvas) != before


def test_it_follows_the_width_of_its_place(canvas: Locator) -> None:
    canvas.page.set_viewport_size({"width": 420, "height": 700})
    canvas.page.wait_for_timeout(500)
    box = canvas.bounding_box()
    assert box is not None and box["width"] < 420
    assert canvas.evaluate("canvas => canvas.width") == round(box["width"])


def test_it_follows_the_colours_of_the_page(canvas: Locator) -> None:
    corner = "c => [...c.getContext('2d').getImageData(3, 3, 1, 1).data].slice(0, 3)"
    assert min(canvas.evaluate(corner)) > 200
    canvas.page.emulate_media(color_scheme="dark")
    canvas.page.wait_for_timeout(500)
    assert max(canvas.evaluate(corner)) < 60
