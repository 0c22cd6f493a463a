"""The charts in a real browser: a click on a mark comes back as a frame or an input."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

import pytest

from tests.browser.small_app import served

if TYPE_CHECKING:
    from playwright.sync_api import Page

SCRIPT = """
import numpy as np
import pandas as pd
import streamlit as st
from explorer import charts
from explorer.page_theme import page_is_dark, watch_theme

amount = int(st.query_params.get("frames", 200))
random = np.random.default_rng(1)
mass = random.uniform(40, 80, amount)
rows = pd.DataFrame({
    "frame": np.arange(amount), "mass_kg": mass,
    "twist_Nm_per_deg": 30 * mass + random.uniform(0, 700, amount),
})
rows.iloc[:6, 1] = mass = np.linspace(45, 75, 6)  # six that stand alone on the front
rows.iloc[:6, 2] = 30 * mass + 900
ordered = rows.sort_values(["mass_kg", "twist_Nm_per_deg"], ascending=[True, False])
best = ordered["twist_Nm_per_deg"].cummax().shift(fill_value=-1.0)
front = ordered[ordered["twist_Nm_per_deg"] > best]
picked = st.session_state.setdefault("picked", [])
event = st.altair_chart(
    charts.front_chart(rows, front, picked, target=2500.0, dark=page_is_dark()), theme=None,
    key="front", on_select="rerun", selection_mode=list(charts.MODES),
    alt=charts.front_in_words(rows, front),
)
clicked = charts.frames_clicked(event)
if clicked and clicked[0] not in picked:
    picked.append(clicked[0])
    st.rerun()
st.write(f"Picked {len(picked)}: {picked}")
table = pd.DataFrame({
    "input": ["wall", "width"], "label": ["Lower rails: wall", "Dash: width"],
    "first": [0.4, 0.2], "first_conf": [0.05, 0.04], "total": [0.6, 0.3], "total_conf": [0.1, 0.1],
})
event = st.altair_chart(charts.drivers_chart(table, dark=page_is_dark()), theme=None,
                        key="drivers", on_select="rerun", alt="drivers")
st.write(f"Input {charts.input_clicked(event)}")
watch_theme()
"""


@pytest.fixture(scope="module")
def address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """Address of a small app with two charts."""
    with served(SCRIPT, tmp_path_factory.mktemp("charts")) as url:
        yield url


@pytest.mark.parametrize("frames", [200, 6000])
def test_clicks_pick_frames_and_the_part_shown_stays(address: str, page: Page, frames: int) -> None:
    page.goto(f"{address}/?frames={frames}")
    page.locator("svg.marks path[aria-label^='Frame 2: 57 kg, 2,610 N·m/deg']").click()
    page.get_by_text("Picked 1: [2]").wait_for()
    page.get_by_text("A", exact=True).first.wait_for()
    ticks = page.locator("svg.marks .role-axis-label text")
    before = ticks.all_inner_texts()
    other = page.locator("svg.marks path[aria-label^='Frame 3:']")
    other.hover()
    page.keyboard.down("Control")
    page.mouse.wheel(0, -300)
    page.keyboard.up("Control")
    page.wait_for_timeout(1200)
    zoomed = ticks.all_inner_texts()
    assert zoomed != before
    other.click()
    page.get_by_text("Picked 2: [2, 3]").wait_for()
    page.wait_for_timeout(500)
    assert ticks.all_inner_texts() == zoomed


def test_a_click_on_a_bar_tells_the_input(address: str, page: Page) -> None:
    page.goto(address)
    page.locator("svg.marks path[aria-label^='Dash: width, with all']").click()
    page.get_by_text("Input width").wait_for()


def test_charts_turn_dark_with_the_page(address: str, page: Page) -> None:
    page.goto(address)
    title = page.locator("svg.marks .role-axis-title text").first
    title.wait_for()
    assert title.get_attribute("fill") == "#1C2126"
    page.emulate_media(color_scheme="dark")
    page.locator("svg.marks .role-axis-title text[fill='#E8EBEE']").first.wait_for()
