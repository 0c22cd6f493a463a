"""Drafts on disk, the address, setting fields, and what may vary: everything below the pages."""

from __future__ import annotations

from dataclasses import replace

import pytest

from explorer import address, drafts, varying
from explorer.bench import Bench
from explorer.editing import edited, equipment, nearest, snapped
from model.errors import InputError
from model.frame.layout import Mass
from sweeps.catalogue import catalogue
from sweeps.inputs import Input, option_label
from sweeps.study import field, fields
from sweeps.study_file import parse_study, read_study
from sweeps.study_text import write_study

STUDY = read_study("hill-climb-single-seater")
TRUCK = read_study("orchard-truck")


@pytest.fixture(autouse=True)
def home(tmp_path, monkeypatch):
    monkeypatch.setenv(drafts.HOME, str(tmp_path))
    return tmp_path


# --- drafts ---------------------------------------------------------------------------------


def test_a_draft_is_read_back_as_it_was_written(home):
    name = drafts.new_name("orchard-truck")
    drafts.write(name, "first")
    drafts.write(name, "second")
    assert drafts.read(name) == "second"
    assert drafts.vehicle_of(name) == "orchard-truck"
    assert [draft.name for draft in drafts.drafts()] == [name]
    assert [path.name for path in (home / "drafts").iterdir()] == [f"{name}.toml"]


@pytest.mark.parametrize("name", ["../secrets", "a/b.aaaaaa", "orchard-truck", "x.zzzzzz", ""])
def test_a_name_from_outside_reaches_no_other_file(home, name):
    (home / "secrets.toml").write_text("x")
    assert drafts.read(name) is None


# --- address --------------------------------------------------------------------------------


def test_the_address_brings_back_what_it_was_made_of():
    here = Bench("orchard-truck", TRUCK, run="orchard-truck-1", candidate=812, beside=(3, 4),
                 units="inch", output="mass_kg", given="wheelbase_mm", target=2500.5)  # fmt: skip
    again = Bench("orchard-truck", TRUCK)
    address.take(again, address.of(here), run="orchard-truck-1")
    assert address.of(again) == address.of(here)
    assert set(address.of(here)) == set(address.NAMES)


@pytest.mark.parametrize(
    "said",
    [
        {"frame": "-1", "beside": "x,1e9,..", "units": "cubits", "output": "__class__"},
        {"frame": "٣", "target": "nan"},
        {"frame": "1" * 5000, "target": "-5"},
    ],
)
def test_nonsense_in_an_address_is_not_believed(said):
    here = Bench("orchard-truck", TRUCK)
    address.take(here, said, run=None)
    assert address.of(here) == {"study": "orchard-truck"}


@pytest.mark.parametrize("name", ["..", "../x", "a/b", "A", "", "a..b", "x" * 200])
def test_a_run_is_only_looked_up_by_a_plain_name(name):
    assert not address.is_run_name(name)


# --- setting fields -------------------------------------------------------------------------


@pytest.mark.parametrize("study", [STUDY, TRUCK], ids=["space frame", "ladder"])
def test_every_field_can_be_set_to_what_it_is(study):
    stock, materials = catalogue().stock, catalogue().materials
    for one in fields(study.layout):
        value = one.value
        if one.kind == "material":
            value = materials[value]
        elif one.kind == "stock":
            if not value:
                continue
            name, _, label = value.partition("/")
            value = stock[name].size(label)
        again = field(edited(study.layout, one.path, value), one.path)
        assert again.value == pytest.approx(one.value) if one.kind == "number" else one.value


def test_nothing_in_a_field_is_refused_by_its_name():
    with pytest.raises(InputError, match="wheelbase_mm = nothing"):
        edited(STUDY.layout, "wheelbase_mm", None)


def test_another_shape_keeps_outside_and_wall():
    changed = edited(TRUCK.layout, "tube.lower rails.shape", "square tube")
    assert dict(changed.tubes["lower rails"].sizes) == {"outside": 0.1, "wall": 0.003}


def test_equipment_comes_from_rows_with_empty_cells():
    rows: list[dict[str, object]] = [
        {"name": "battery", "kg": 12, "x_mm": 500, "y_mm": None},
        {"name": None, "kg": None},
    ]
    assert equipment(rows) == (Mass("battery", 12.0, 0.5, 0.0, 0.0), Mass("item 2", 0, 0, 0, 0))
    with pytest.raises(InputError, match=r"mass.battery.kg = -1"):
        equipment([{"name": "battery", "kg": -1}])


def test_the_nearest_stock_size_of_a_stock_size_is_itself():
    sizes = catalogue().stock["metric-round"]
    for size in sizes.sizes:
        assert nearest(sizes, size.shape, size.sizes) == size


def test_tubes_between_sizes_snap_to_the_list_that_the_frame_is_made_from():
    between = edited(STUDY.layout, "tube.lower rails.outside_mm", 25.3)
    assert between.tubes["lower rails"].stock == ""
    again = snapped(between, catalogue().stock)
    assert again.tubes["lower rails"].stock == "inch-round/1 x 0.065"
    assert again.tubes["side braces"] == STUDY.layout.tubes["side braces"]


# --- what may vary --------------------------------------------------------------------------


@pytest.mark.parametrize("study", [STUDY, TRUCK], ids=["space frame", "ladder"])
def test_every_input_offered_can_be_added_and_written(study):
    for one in varying.addable(study):
        given = varying.first_input(study.layout, one.path)
        again = parse_study(write_study(study.with_input(given)))
        assert again.input(one.path).words == given.words


def test_a_tube_varies_by_stock_or_by_size_but_not_by_both():
    offered = {one.path for one in varying.addable(STUDY)}
    assert "tube.lower rails.stock" not in offered  # its outside and wall vary already
    assert "tube.side braces.wall_mm" not in offered  # its stock size varies already
    assert {"tube.top braces.stock", "tube.top braces.wall_mm"} <= offered


def test_the_range_of_the_starting_vehicle_comes_first():
    fewer = STUDY.without_input("wheelbase_mm")
    assert varying.first_input(fewer.layout, "wheelbase_mm", STUDY) == STUDY.input("wheelbase_mm")


def test_only_bracing_that_a_face_can_have_is_offered():
    layout = STUDY.layout
    assert "K" not in varying.bracings(layout, "station.tail.ring")
    assert "chevron" not in varying.bracings(layout, "span.footwell.floor")
    assert varying.bracings(layout, "span.cockpit.top") == ["open"]


def test_possible_options_include_those_there_are():
    for study in (STUDY, TRUCK):
        for given in study.inputs:
            if given.is_choice:
                possible = varying.possible(study.layout, given)
                assert set(given.option_labels) <= {option_label(o) for o in possible}


def test_a_range_without_an_end_is_refused():
    given = Input("wheelbase_mm", "Wheelbase", "mm", 2000.0, 2500.0)
    assert varying.ranged(given, 2100, 2400) == replace(given, low=2100.0, high=2400.0)
    with pytest.raises(InputError, match="nothing"):
        varying.ranged(given, None, 2400)
    with pytest.raises(InputError, match="less than to"):
        varying.ranged(given, 2500, 2400)
