"""The pages without a browser: what they say and do for what is typed, chosen and pressed."""

from __future__ import annotations

import shutil
import time
from collections.abc import Callable, Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from streamlit.testing.v1 import AppTest

from explorer import drafts
from explorer.furniture import PAGES
from sweeps import jobs
from sweeps.catalogue import catalogue
from sweeps.runs import Run, open_run, prepare
from sweeps.study_file import parse_study, read_study

APP = Path(__file__).resolve().parents[2] / "explorer" / "app.py"
Open = Callable[..., AppTest]


@pytest.fixture
def home(tmp_path, monkeypatch):
    """An empty folder for drafts and runs."""
    monkeypatch.setenv(drafts.HOME, str(tmp_path))
    return tmp_path


@pytest.fixture
def open_page(home) -> Open:
    """Open a page of the workbench at an address, as a new session."""

    def opened(page: str = "frame", **said: str) -> AppTest:
        at = AppTest.from_file(str(APP), default_timeout=60)
        at.query_params.update(said)
        at.switch_page(f"steps/{page}.py").run()
        return sound(at)

    return opened


@pytest.fixture(scope="module")
def small_run(tmp_path_factory) -> Run:
    """A complete sweep of the open sports car with few samples."""
    study = read_study("open-sports-car")
    few = study.inputs[:4]
    run = prepare(replace(study, inputs=few, samples=64), tmp_path_factory.mktemp("runs") / "small")
    jobs.carry_out(run, threads=1)
    return run


@pytest.fixture
def swept(home, small_run) -> dict[str, str]:
    """The address of a bench with that sweep on it."""
    shutil.copytree(small_run.folder, home / "runs" / "small")
    return {"study": "open-sports-car", "run": "small"}


def sound(at: AppTest) -> AppTest:
    """The page ran through: no traceback, and not our own words for one."""
    assert not at.exception
    assert not [e.value for e in at.error if "fault of the program" in e.value]
    return at


def words_of(at: AppTest) -> str:
    return "\n".join(m.value for m in at.markdown).replace("\u00a0", " ")


def field(at: AppTest, label: str) -> Any:
    for kind in (at.number_input, at.selectbox, at.multiselect, at.select_slider, at.toggle):
        for one in kind:
            if one.label == label:
                return one
    raise AssertionError(f"no field {label!r}")


def press(at: AppTest, label: str) -> AppTest:
    button = next(b for b in at.button if b.label.startswith(label))
    return sound(button.click().run())


def address(at: AppTest) -> dict[str, str]:
    """The parameters of the page's address."""
    said = at.query_params
    return {n: said[n] if isinstance(said[n], str) else said[n][-1] for n in said}


def go(at: AppTest, place: str) -> AppTest:
    group = next(g for g in at.button_group if place in g.options)
    return sound(group.set_value(place).run())


def numbers(at: AppTest) -> Mapping[str, str]:
    return {metric.label: metric.value for metric in at.metric}


# --- every page -----------------------------------------------------------------------------


@pytest.mark.parametrize("page", PAGES)
def test_every_page_opens_on_an_empty_bench_and_says_what_to_do(open_page, page):
    at = open_page(page)
    assert at.title[0].value == PAGES[page]
    assert at.markdown[0].value
    assert at.button


@pytest.mark.parametrize("page", ["drivers", "front", "candidate"])
def test_a_page_without_a_sweep_leads_to_the_sweep(open_page, page):
    at = open_page(page)
    press(at, "Run a sweep first" if page == "candidate" else "Go and run one")
    assert at.title[0].value == "Sweep"


def test_a_sweep_that_is_gone_is_said_once(open_page):
    at = open_page(run="long-gone")
    assert "not on this computer" in at.info[0].value
    assert not at.run().info


def test_a_fault_of_the_program_is_owned_and_nothing_is_lost(open_page, monkeypatch):
    at = open_page()

    def broken(*_: object) -> None:
        raise ZeroDivisionError

    monkeypatch.setattr("explorer.looks.key_numbers", broken)
    at.run()
    assert not at.exception
    assert "fault of the program" in at.error[0].value
    monkeypatch.undo()


# --- Frame ----------------------------------------------------------------------------------


@pytest.mark.parametrize("vehicle", catalogue().vehicles)
def test_each_vehicle_shows_its_numbers(open_page, vehicle):
    at = open_page()
    field(at, "Vehicle").set_value(vehicle).run()
    sound(at)
    assert address(at)["study"] == vehicle
    assert any("Invented vehicle" in c.value for c in at.caption)
    assert set(numbers(at)) == {
        "Mass [kg]", "Twist stiffness [N·m/deg]", "Bending stiffness [N/mm]", "Axial share"
    }  # fmt: skip
    for place in ("Stations", "Bracing", "Tubes", "Equipment", "Axles"):
        go(at, place)


def test_a_changed_dimension_changes_the_numbers_and_survives_a_reload(open_page):
    at = open_page()
    before = numbers(at)
    field(at, "Wheelbase [mm]").set_value(2500).run()
    sound(at)
    assert numbers(at)["Twist stiffness [N·m/deg]"] != before["Twist stiffness [N·m/deg]"]
    assert "1 change from the starting vehicle" in words_of(at)
    name = address(at)["study"]
    assert parse_study(drafts.read(name) or "").layout.wheelbase == 2.5
    again = open_page(study=name)
    assert numbers(again) == numbers(at)
    press(again, "Start over")
    assert numbers(again) == before


def test_a_change_can_be_taken_back(open_page):
    at = open_page()
    before = numbers(at)
    field(at, "Wheelbase [mm]").set_value(2500).run()
    field(at, "Front track [mm]").set_value(1500).run()
    press(press(at, "Take back"), "Take back")
    assert numbers(at) == before
    assert field(at, "Wheelbase [mm]").value == 2250


def test_what_cannot_be_built_is_refused_by_name_and_the_last_frame_stays(open_page):
    at = open_page()
    before = numbers(at)
    field(at, "Wheelbase [mm]").set_value(20).run()
    sound(at)
    assert "**Wheelbase** = 20 mm. Use 200 to 20000." in at.error[0].value
    assert numbers(at) == before
    field(at, "Wheelbase [mm]").set_value(2300).run()
    assert not at.error
    assert numbers(at) != before


def test_an_error_goes_when_another_field_makes_sense_of_it(open_page):
    at = go(open_page(), "Stations")
    field(at, "Height of the lower rails [mm]").set_value(450).run()
    assert "at least 20 mm above" in at.error[0].value
    field(at, "Height of the upper rails [mm]").set_value(700).run()
    assert not sound(at).error
    name = address(at)["study"]
    nose = parse_study(drafts.read(name) or "").layout.station("nose")
    assert (nose.height_low, nose.height_high) == pytest.approx((0.45, 0.7))


def test_a_stock_list_gives_the_nearest_size_and_then_others(open_page):
    at = go(open_page(), "Tubes")
    assert field(at, "Size [in]").value == "1 x 0.065"
    field(at, "From the list").set_value("metric-round").run()
    assert field(at, "Size [mm]").value == "25 x 1.5"
    field(at, "Size [mm]").set_value("30 x 2").run()
    field(at, "From the list").set_value("own size").run()
    sound(at)
    assert field(at, "Outside [mm]").value == 30
    assert field(at, "Wall [mm]").value == 2
    field(at, "Ends").set_value("springy").run()
    assert field(at, "Stiffness of an end [N·m/rad]").value == 50000


def test_what_a_ring_has_and_what_stays_open_is_set(open_page):
    at = go(open_page(), "Stations")
    go(at, "dash")
    members = next(g for g in at.button_group if "uprights" in g.options)
    sound(members.set_value(["bottom", "uprights"]).run())
    field(at, "Width over outriggers, 0 for none [mm]").set_value(1200).run()
    assert "outriggers" in sound(at).error[0].value  # no tube for them yet
    field(go(at, "Tubes"), "Give another group its own tube").set_value("outriggers").run()
    assert not sound(at).error
    go(at, "Bracing")
    go(at, "engine bay")
    field(at, "Top bracing").set_value("open").run()
    sound(next(g for g in at.button_group if "floor" in g.options).set_value(["top"]).run())
    layout = parse_study(drafts.read(address(at)["study"]) or "").layout
    assert not layout.station("dash").top
    assert layout.station("dash").outrigger == 1.2
    assert layout.span("engine bay").clear == ("top",)
    assert layout.tubes["outriggers"] == layout.tubes["lower rails"]


def test_a_frame_that_does_not_hold_together_is_drawn_with_the_joint_named(open_page):
    at = go(open_page(study="orchard-truck"), "Tubes")
    groups = next(g for g in at.button_group if "lower rails" in g.options)
    for group in groups.options:
        next(g for g in at.button_group if "lower rails" in g.options).set_value(group).run()
        field(at, "Ends").set_value("pinned").run()
    sound(at)
    assert "does not hold together" in words_of(at)
    assert "moves freely" in at.error[0].value
    assert not at.metric


# --- units ----------------------------------------------------------------------------------


def test_units_change_what_is_shown_and_not_what_is_stored(open_page, home):
    at = open_page()
    units = next(g for g in at.button_group if "Inch-pound" in g.options or "inch" in g.options)
    units.set_value("inch").run()
    sound(at)
    assert field(at, "Wheelbase [in]").value == pytest.approx(2250 / 25.4, rel=1e-6)
    assert numbers(at)["Mass [lb]"] == "67.9"  # 30.8 kg
    assert address(at)["units"] == "inch"
    assert not list((home / "drafts").glob("*"))  # nothing was changed
    field(at, "Wheelbase [in]").set_value(100.0).run()
    name = address(at)["study"]
    assert parse_study(drafts.read(name) or "").layout.wheelbase == pytest.approx(2.54, rel=1e-12)


# --- Sweep ----------------------------------------------------------------------------------


def test_a_sweep_runs_to_the_end_and_can_be_doubled(open_page, home):
    at = open_page("sweep", study="orchard-truck")
    field(at, "Base samples").set_value(64).run()
    assert "2,048 frames" in words_of(at)
    press(at, "Run the sweep")
    name = address(at)["run"]
    finish(home / "runs" / name)
    at.run()
    assert "2,048 frames solved" in words_of(at)
    again = open_page("sweep", **address(at))
    press(again, "Double the samples")
    finish(home / "runs" / address(again)["run"])
    again.run()
    assert "4,096 frames solved: the sweep is complete." in words_of(again)


def test_an_input_can_be_held_and_another_added(open_page):
    at = open_page("sweep", study="orchard-truck")
    field(at, "Battery bay, bays").set_value([]).run()
    assert "14 inputs" in words_of(sound(at))
    field(at, "Battery bay, bays").set_value(["2", "4"]).run()
    assert "15 inputs" in words_of(sound(at))
    field(at, "Vary something else as well").set_value("track_rear_mm").run()
    assert "16 inputs" in words_of(sound(at))
    name = address(at)["study"]
    study = parse_study(drafts.read(name) or "")
    assert study.input("span.battery bay.bays").options == (2, 4)
    assert (study.input("track_rear_mm").low, study.input("track_rear_mm").high) == (972, 1188)


def test_a_sweep_of_an_earlier_version_is_called_so(open_page, swept):
    at = open_page("sweep", **swept)
    assert "has changed since" in words_of(at)
    press(at, "Run the sweep")
    assert address(at)["run"] != swept["run"]
    finish(drafts.runs_folder() / address(at)["run"])


def finish(folder: Path) -> None:
    """Wait for a sweep to end."""
    until = time.monotonic() + 60
    while time.monotonic() < until:
        job = jobs.find(folder)
        if job is not None and not job.active:
            assert job.progress.state == jobs.DONE, job.progress
            assert open_run(folder).complete
            return
        time.sleep(0.05)
    raise AssertionError("the sweep does not end")


# --- Drivers, Front, Candidate --------------------------------------------------------------


def test_drivers_say_what_moves_the_result_asked_for(open_page, swept):
    at = open_page("drivers", **swept)
    assert "of the variation in twist stiffness" in words_of(at)
    field(at, "Result").set_value("mass_kg").run()
    assert "of the variation in mass" in words_of(sound(at))
    labels = field(at, "Along the input").options
    assert len(labels) == 4
    field(at, "Along the input").set_value(field(at, "Along the input").options[-1])
    assert address(at)["output"] == "mass_kg"


def test_the_front_counts_what_reaches_the_target(open_page, swept):
    at = open_page("front", **swept)
    assert "are beaten by no other" in words_of(at)
    field(at, "Least twist stiffness [N·m/deg]").set_value(1e6).run()
    assert "None of" in words_of(sound(at))
    field(at, "Least twist stiffness [N·m/deg]").set_value(1.0).run()
    assert "the lightest of them is frame" in words_of(sound(at))
    field(at, "Colour by").set_value("wheelbase_mm").run()
    sound(at)


def test_a_frame_is_picked_kept_and_detailed(open_page, swept):
    at = open_page("front", **swept)
    press(at, "Take frame")
    frame = address(at)["frame"]
    press(at, "Keep to compare")
    assert address(at)["beside"] == frame
    press(at, "Detail frame")
    assert at.title[0].value == "Candidate"
    assert f"Frame {int(frame):,} of" in words_of(at)
    assert "no proof of strength" in words_of(at)


def test_a_candidate_from_stock_is_told_from_the_frame_of_the_sweep(open_page, swept):
    at = open_page("candidate", **swept, frame="5")
    before = numbers(at)
    toggles = [t for t in at.toggle if t.label == "Take the tubes from stock lists"]
    if toggles:
        toggles[0].set_value(True).run()
        assert "changed from the frame of the sweep" in words_of(sound(at))
        assert numbers(at) != before
    press(at, "Go on from this frame")
    assert at.title[0].value == "Frame"
    assert address(at)["study"].startswith("open-sports-car.")


def test_a_frame_that_the_run_does_not_have_is_refused(open_page, swept):
    at = open_page("candidate", **swept, frame="999999")
    assert "Use a frame of the run" in at.error[0].value
