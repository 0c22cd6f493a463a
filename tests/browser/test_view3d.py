"""The frame canvas in a real browser: drag, wheel, keys and a click that reaches Python."""

from __future__ import annotations

import os
import shutil
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

REPOSITORY = Path(__file__).resolve().parents[2]
SCRIPT = """
import sys
sys.path.insert(0, {repository!r})
import numpy as np
import streamlit as st
from explorer.view3d import FrameDrawing, MemberValue, frame_view

height = 0.3 + 0.05 * st.session_state.get("times", 0)
drawing = FrameDrawing(
    title="Plain box",
    joints=np.array([[x, y, z] for x in (0, 1, 2) for y in (-0.3, 0.3) for z in (0, height)]),
    members=np.array([[0, 4], [4, 8], [2, 6], [6, 10], [1, 5], [5, 9], [3, 7], [7, 11],
                      [0, 2], [1, 3], [8, 10], [9, 11], [0, 1], [2, 3], [8, 9], [10, 11], [4, 5]]),
    names=tuple(f"member {{m}}" for m in range(17)),
    groups=("rails",) * 8 + ("cross members",) * 4 + ("uprights",) * 5,
    outside_mm=np.full(17, 30.0),
    value=MemberValue("Share of strain energy", np.linspace(0, 0.2, 17)),
)
picked = frame_view(drawing, key="box", height=400, colour="value", view="side")
st.button("Higher", on_click=lambda: st.session_state.update(
    times=st.session_state.get("times", 0) + 1))
st.write(f"Picked: {{picked}}; times {{st.session_state.get('times', 0)}}.")
st.write("line\\n\\n" * 60)
"""


def _browser() -> str:
    found = (
        os.environ.get("CHROMIUM") or shutil.which("chromium") or shutil.which("chromium-browser")
    )
    if found:
        return found
    advice = "no Chromium found: install the package chromium, or set CHROMIUM to its path"
    if os.environ.get("CI"):
        pytest.fail(advice)
    pytest.skip(advice)


@pytest.fixture(scope="module")
def address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """Address of a small app that holds nothing but the canvas."""
    script = tmp_path_factory.mktemp("view3d") / "app.py"
    script.write_text(SCRIPT.format(repository=str(REPOSITORY)), encoding="utf-8")
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        port = free.getsockname()[1]
    options = {
        "server.headless": "true",
        "server.address": "127.0.0.1",
        "server.port": str(port),
        "server.fileWatcherType": "none",
        "browser.gatherUsageStats": "false",
    }
    command = [sys.executable, "-m", "streamlit", "run", str(script)]
    command += [f"--{name}={value}" for name, value in options.items()]
    server = subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    url = f"http://127.0.0.1:{port}"
    try:
        for _ in range(150):
            try:
                urllib.request.urlopen(f"{url}/_stcore/health", timeout=1)
                break
            except (urllib.error.URLError, OSError):
                time.sleep(0.2)
        yield url
    finally:
        server.terminate()
        server.wait(timeout=20)


@pytest.fixture
def canvas(address: str) -> Iterator[Any]:
    """The canvas in a fresh page; no request may leave the machine, no error be logged."""
    playwright = pytest.importorskip("playwright.sync_api")
    with playwright.sync_playwright() as started:
        arguments = ["--no-sandbox", "--disable-gpu", "--disable-background-networking"]
        browser = started.chromium.launch(executable_path=_browser(), args=arguments)
        page = browser.new_page(viewport={"width": 1000, "height": 700}, reduced_motion="reduce")
        trouble: list[str] = []
        page.on("pageerror", lambda error: trouble.append(str(error)))
        page.on("request", lambda sent: _note_foreign(sent.url, address, trouble))
        page.goto(address)
        view = page.locator("canvas[role=application]")
        view.wait_for()
        page.wait_for_timeout(300)
        yield view
        browser.close()
        assert trouble == []


def _note_foreign(url: str, address: str, trouble: list[str]) -> None:
    if not url.startswith((address, "data:", "blob:")):
        trouble.append(f"asked for {url}")


def _picture(canvas: Any) -> str:
    canvas.page.wait_for_timeout(120)
    picture: str = canvas.evaluate("canvas => canvas.toDataURL()")
    return picture


def _middle(canvas: Any) -> tuple[float, float]:
    box = canvas.bounding_box()
    return box["x"] + box["width"] / 2, box["y"] + box["height"] / 2


def _upright(canvas: Any) -> tuple[float, float]:
    """A point on the upright in the middle of the side view, found by its spoken fact."""
    x, y = _middle(canvas)
    tip = canvas.page.locator(".tip")
    for up in range(-60, 61, 10):
        canvas.page.mouse.move(x, y + up)
        if tip.is_visible() and "member 16" in tip.inner_text():
            return x, y + up
    raise AssertionError("the middle upright is not where the side view should show it")


def test_it_says_what_it_shows(canvas: Any) -> None:
    label = canvas.get_attribute("aria-label")
    assert label.startswith("Plain box: 17\u00a0members in 3\u00a0groups")
    assert "greatest in member 16 (20\u00a0%)" in label


def test_a_drag_turns_the_frame_and_fit_turns_it_back(canvas: Any) -> None:
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
def test_keys_move_the_picture(canvas: Any, key: str) -> None:
    canvas.focus()
    before = _picture(canvas)
    canvas.press(key)
    assert _picture(canvas) != before


def test_pointing_tells_name_group_and_value(canvas: Any) -> None:
    _upright(canvas)
    tip = canvas.page.locator(".tip").inner_text()
    assert "uprights" in tip
    assert "Share of strain energy: 20\u00a0%" in tip


def test_a_click_gives_the_member_to_python_and_an_empty_place_takes_it_back(canvas: Any) -> None:
    page = canvas.page
    page.mouse.click(*_upright(canvas))
    page.get_by_text("Picked: member 16").wait_for()
    x, y = _middle(canvas)
    page.mouse.click(x + 60, y)
    page.get_by_text("Picked: None").wait_for()


def test_keys_alone_pick_a_member(canvas: Any) -> None:
    canvas.focus()
    canvas.press("n")
    canvas.press("n")
    said = canvas.page.locator("[data-role=said]")
    assert said.inner_text().startswith("member 1, rails")
    canvas.press("Enter")
    canvas.page.get_by_text("Picked: member 1;").wait_for()
    canvas.press("Escape")
    canvas.page.get_by_text("Picked: None").wait_for()


def test_the_camera_and_the_pick_stay_when_the_frame_changes(canvas: Any) -> None:
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


def test_the_wheel_scrolls_the_page_until_the_frame_has_the_focus(canvas: Any) -> None:
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


def test_it_follows_the_width_of_its_place(canvas: Any) -> None:
    canvas.page.set_viewport_size({"width": 420, "height": 700})
    canvas.page.wait_for_timeout(500)
    assert canvas.bounding_box()["width"] < 420
    assert canvas.evaluate("canvas => canvas.width") == round(canvas.bounding_box()["width"])
