"""The whole job as a person does it, in a real browser: from the start page to the cut list."""

from __future__ import annotations

import csv
import io
import json
import re
import zipfile
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

VEHICLES = {
    "Hill-climb single-seater": "hill-climb-single-seater",
    "Open sports car": "open-sports-car",
    "Orchard truck": "orchard-truck",
}
STEPS = ("Frame", "Sweep", "Drivers", "Front", "Candidate")
SECONDS = 1000


def still(page: Page, wait: int = 60 * SECONDS) -> None:
    """Wait until the page has come to rest."""
    page.wait_for_timeout(120)
    page.locator("[data-testid=stApp][data-test-script-state=notRunning]").wait_for(timeout=wait)
    page.wait_for_timeout(250)


def opened(page: Page, url: str) -> None:
    page.goto(url)
    page.locator("h1").wait_for(timeout=90 * SECONDS)
    still(page)


def choose(page: Page, label: str, option: str) -> None:
    """Choose in a list, by typing a part of what is wanted."""
    page.get_by_label(label, exact=True).first.click()
    page.keyboard.type(option)
    page.get_by_role("option", name=option, exact=True).first.click()
    still(page)


def press(page: Page, label: str | re.Pattern[str]) -> None:
    page.get_by_role("button", name=label).click()
    still(page)


def number_shown(page: Page, label: str) -> float:
    """The value of one of the key numbers."""
    card = page.get_by_test_id("stMetric").filter(has_text=label)
    return float(card.get_by_test_id("stMetricValue").inner_text().replace(",", "").rstrip("%"))


def type_number(page: Page, label: str, value: str) -> None:
    field = page.get_by_label(label)
    field.fill(value)
    field.press("Enter")
    still(page)


def samples(page: Page, steps: int) -> None:
    """Move the slider of the base samples; less is to the left."""
    page.get_by_role("slider").focus()
    for _ in range(abs(steps)):
        page.keyboard.press("ArrowRight" if steps > 0 else "ArrowLeft")
    still(page)


def taken(page: Page, label: str) -> tuple[str, bytes]:
    """Name and content of a file that a button hands over."""
    with page.expect_download() as waiting:
        page.get_by_role("button", name=label).click()
    found = waiting.value
    return found.suggested_filename, Path(found.path()).read_bytes()


def pictured(page: Page, folder: Path, name: str) -> None:
    page.screenshot(path=folder / f"{name}.png")


def sweep(page: Page) -> None:
    press(page, "Run the sweep")
    page.get_by_text("the sweep is complete").wait_for(timeout=120 * SECONDS)
    still(page)


@pytest.mark.parametrize("vehicle", VEHICLES)
def test_the_whole_job(
    page: Page, workbench: str, screenshots: Path, vehicle: str, browser: Browser
):
    short = VEHICLES[vehicle]
    opened(page, workbench)
    if vehicle != "Hill-climb single-seater":
        choose(page, "Vehicle", vehicle)
    assert page.get_by_text("Invented vehicle").is_visible()
    start = number_shown(page, "Twist stiffness")
    type_number(page, "Wheelbase [mm]", "2150")
    assert number_shown(page, "Twist stiffness") != start
    assert page.get_by_text("1 change from the starting vehicle").is_visible()
    pictured(page, screenshots, f"{short}-frame")

    press(page, "Sweep this frame")
    samples(page, -2)
    sweep(page)
    pictured(page, screenshots, f"{short}-sweep")

    press(page, "See what drives it")
    assert page.get_by_text(re.compile("explains .* of the variation in twist stiffness")).count()
    bar = page.locator('[aria-label*="with all interactions"]').nth(1)
    label = (bar.get_attribute("aria-label") or "").split(", with all")[0]
    bar.click()
    still(page)
    assert (
        page.get_by_label("Along the input").input_value() == label
        or page.get_by_text(label).count()
    )
    pictured(page, screenshots, f"{short}-drivers")

    press(page, "See mass against twist stiffness")
    point = page.locator('path[aria-label^="Frame "]').last  # drawn last, so nothing covers it
    spoken = point.get_attribute("aria-label") or ""
    frame = int(re.sub(r"\D", "", spoken.split(":")[0]))
    point.click()
    still(page)
    assert f"frame={frame}" in page.url
    pictured(page, screenshots, f"{short}-front")

    press(page, f"Detail frame {frame:,}")
    mass = number_shown(page, "Mass [kg]")
    assert f"{mass:g} kg" in spoken.replace("\u00a0", " ")
    assert page.locator("canvas[role=application]").is_visible()
    pictured(page, screenshots, f"{short}-candidate")

    name, data = taken(page, "Cut list (CSV)")
    assert name == f"{short}-frame-{frame}-cut-list.csv"
    rows = list(csv.DictReader(io.StringIO(data.decode("utf-8"))))
    total = sum(float(row["mass_kg"]) for row in rows)
    assert total == pytest.approx(mass, rel=5e-3)  # three figures are shown
    assert all(int(row["quantity"]) == len(row["end_joints"].split("; ")) for row in rows)
    _, report = taken(page, "Report (HTML)")
    assert_stands_alone(browser, report.decode("utf-8"), f"Frame {frame}")
    _, packed = taken(page, "Everything (ZIP)")
    with zipfile.ZipFile(io.BytesIO(packed)) as files:
        names = {Path(entry).name for entry in files.namelist()}
        assert {"cut-list.csv", "frame.json", "centre-lines.dxf", "report.html"} <= names
        inner = next(entry for entry in files.namelist() if entry.endswith("frame.json"))
        assert json.loads(files.read(inner))["members"]


def assert_stands_alone(browser: Browser, html: str, title: str) -> None:
    """The report opens without a network."""
    context = browser.new_context(offline=True)
    asked: list[str] = []
    page = context.new_page()
    page.on("request", lambda request: asked.append(request.url))
    page.set_content(html)
    assert page.locator("h1").inner_text().startswith(title)
    assert asked == []
    context.close()


@pytest.fixture
def small_sweep(page: Page, workbench: str) -> str:
    """The address of a bench with a small sweep on it, the page on Sweep."""
    opened(page, f"{workbench}/sweep?study=orchard-truck")
    samples(page, -3)
    sweep(page)
    return page.url


def test_units_change_every_page_and_no_frame(page: Page, small_sweep: str, screenshots: Path):
    page.get_by_role("radio", name="Inch-pound").click()
    still(page)
    assert "units=inch" in page.url
    for title in STEPS:
        page.get_by_role("link", name=title, exact=True).click()
        still(page)
        if title == "Front":
            press(page, re.compile("Take frame"))
        assert page.locator("h1").inner_text() == title
        words = page.get_by_test_id("stMain").inner_text()
        assert not re.search(r"\d\s(kg|N·m/deg)\b|\[(kg|N·m/deg)\]", words), title
        pictured(page, screenshots, f"inch-{title.lower()}")
    assert number_shown(page, "Mass [lb]") > 0
    study = re.findall(r"study=[^&]+", small_sweep)
    assert re.findall(r"study=[^&]+", page.url) == study  # nothing was changed, no draft made


def test_a_sweep_is_watched_reloaded_stopped_and_resumed(
    page: Page, workbench: str, screenshots: Path
):
    opened(page, f"{workbench}/sweep")
    samples(page, 3)
    press(page, "Run the sweep")
    page.get_by_role("button", name="Cancel").wait_for()
    page.reload()
    page.get_by_role("button", name="Cancel").wait_for()
    page.wait_for_timeout(700)
    pictured(page, screenshots, "sweep-under-way")
    other = page.context.new_page()  # a second tab sees the same sweep
    other.goto(page.url)
    other.get_by_role("button", name="Cancel").wait_for()
    page.get_by_role("button", name="Cancel").click()
    page.get_by_text("the sweep was stopped").wait_for(timeout=30 * SECONDS)
    other.get_by_text("the sweep was stopped").wait_for(timeout=30 * SECONDS)
    other.close()
    still(page)
    pictured(page, screenshots, "sweep-stopped")
    done = share_solved(page)
    press(page, "Resume the sweep")
    page.get_by_role("button", name="Cancel").click()
    page.get_by_text("the sweep was stopped").wait_for(timeout=30 * SECONDS)
    still(page)
    assert share_solved(page) >= done


def share_solved(page: Page) -> float:
    said = page.get_by_text(re.compile("was stopped at")).inner_text()
    return float(re.findall(r"at\s([\d.]+)", said.replace("\u00a0", " "))[0])


def test_back_and_forward_go_through_the_work(page: Page, small_sweep: str):
    press(page, "See what drives it")
    press(page, "See mass against twist stiffness")
    press(page, re.compile("Take frame"))
    frame = re.findall(r"frame=\d+", page.url)[0]
    for _ in range(5):
        if page.locator("h1").inner_text() == "Drivers":
            break
        page.go_back()
        still(page)
    assert page.locator("h1").inner_text() == "Drivers"
    assert frame in page.url  # the way back is through the pages; what is picked stays picked
    page.reload()
    page.get_by_text(re.compile("explains .* of the variation")).first.wait_for()


def test_a_member_picked_in_the_view_opens_its_tube(page: Page, workbench: str):
    opened(page, workbench)
    view = page.locator("canvas[role=application]")
    view.focus()
    for key in ("n", "n", "Enter"):
        view.press(key)
    page.get_by_label("From the list").wait_for()
    assert page.get_by_role("radio", name="Tubes").get_attribute("aria-checked") == "true"


HOSTILE = '![seen](http://example.org/seen.png) <img src="http://example.org/x.png">'


def test_a_study_file_is_opened_saved_and_refused_by_name(
    page: Page, workbench: str, tmp_path: Path
):
    opened(page, workbench)
    page.get_by_role("button", name="Open or save").click()
    name, data = taken(page, "Save this study")
    assert name == "hill-climb-single-seater.toml"
    text = data.decode("utf-8")

    def give(content: str) -> None:
        path = tmp_path / "given.toml"
        path.write_text(content, encoding="utf-8")
        page.locator("input[type=file]").set_input_files(path)
        still(page)

    give(text.replace("wheelbase_mm = 2250", 'wheelbase_mm = "long"'))
    alert = page.get_by_role("alert").filter(has_text="wheelbase")
    alert.first.wait_for()
    assert "long" in alert.first.inner_text()
    page.reload()
    still(page)
    page.get_by_role("button", name="Open or save").click()
    give(text.replace('name = "Hill-climb single-seater"', f"name = '{HOSTILE}'"))
    page.get_by_text("example.org/seen.png").first.wait_for()
    assert "study=own." in page.url
    assert page.locator("img[src*=example]").count() == 0
    for title in STEPS:
        page.get_by_role("link", name=title, exact=True).click()
        still(page)
        assert page.locator("img[src*=example]").count() == 0


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("width", [1280, 1920, 430])
def test_every_page_fits_its_window(
    page: Page, small_sweep: str, screenshots: Path, scheme: Any, width: int
):
    page.emulate_media(color_scheme=scheme)
    page.set_viewport_size({"width": width, "height": 1000})
    query = small_sweep.split("?")[1]
    base = small_sweep.split("/sweep?")[0]
    for title in STEPS:
        path = "" if title == "Frame" else title.lower()
        opened(page, f"{base}/{path}?{query}&frame=3")
        assert page.locator("h1").inner_text() == title
        main = page.get_by_test_id("stMain")
        assert main.evaluate("m => m.scrollWidth <= m.clientWidth + 1"), f"{title} is too wide"
        assert not axe_findings(page), title
        pictured(page, screenshots, f"{title.lower()}-{width}-{scheme}")


def axe_findings(page: Page) -> list[str]:
    """Serious findings of the axe accessibility rules."""
    axe = pytest.importorskip("axe_playwright_python.sync_playwright")
    found = axe.Axe().run(page)
    return [
        f"{rule['id']}: {node['html'][:160]}"
        for rule in found.response["violations"]
        if rule["impact"] in ("serious", "critical")
        for node in rule["nodes"][:3]
    ]
