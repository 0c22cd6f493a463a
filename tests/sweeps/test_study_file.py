"""The study file says what it means, comes back as it was written, and is refused in words."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from model.errors import InputError
from sweeps.catalogue import catalogue
from sweeps.inputs import Input
from sweeps.study import fields, with_value
from sweeps.study_file import parse_study, read_study
from sweeps.study_text import write_study

VEHICLES = sorted(catalogue().vehicles)


@pytest.mark.parametrize("vehicle", VEHICLES)
def test_a_starting_vehicle_says_that_it_is_invented_and_comes_back_as_written(
    vehicle: str,
) -> None:
    study = read_study(vehicle)
    assert study.about.startswith("Invented vehicle")
    assert parse_study(write_study(study)) == study


@pytest.mark.parametrize("vehicle", VEHICLES)
def test_a_starting_vehicle_varies_what_a_designer_asks_about(vehicle: str) -> None:
    paths = [i.path for i in read_study(vehicle).inputs]
    widths = {p.split(".")[1] for p in paths if p.startswith("station") and "width" in p}
    heights = {p.split(".")[1] for p in paths if p.startswith("station") and "height" in p}
    assert {"wheelbase_mm", "track_front_mm"} <= set(paths)
    assert len(widths) >= 2
    assert len(heights) >= 2
    assert any(p.endswith(".bays") for p in paths)
    assert any(p.endswith((".floor", ".sides", ".top")) for p in paths)
    assert any(p.endswith(".wall_mm") for p in paths)
    assert any(p.endswith((".outside_mm", ".depth_mm")) for p in paths)
    assert any(p.endswith(".stock") for p in paths)


@pytest.mark.parametrize("vehicle", VEHICLES)
def test_every_field_can_be_set_to_what_it_already_is(vehicle: str) -> None:
    layout = read_study(vehicle).layout
    for found in fields(layout):
        if found.kind not in ("stock", "material"):
            again = with_value(layout, found.path, found.value)
            back = next(f for f in fields(again) if f.path == found.path)
            assert back.value == pytest.approx(found.value) if found.unit else found.value


@given(st.sampled_from(VEHICLES), st.integers(0, 1000))
def test_the_layout_of_a_row_equals_what_the_table_shows(vehicle: str, seed: int) -> None:
    study = read_study(vehicle)
    row = np.random.default_rng(seed).random(len(study.inputs))
    layout = study.layout_at(row)
    shown = study.table(row[None]).iloc[0]
    values = {f.path: f.value for f in fields(layout)}
    for path, value in shown.items():
        if isinstance(value, str):
            assert values[str(path)] == value
        else:
            assert values[str(path)] == pytest.approx(value, rel=1e-12)


TEXT = catalogue().vehicles["orchard-truck"]


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("wheelbase_mm = 1900", "wheelbase_in = 75", "write wheelbase_mm, in millimetres"),
        ("wheelbase_mm = 1900", "", "vehicle.wheelbase_mm = missing"),
        ("wheelbase_mm = 1900", 'wheelbase_mm = "long"', "give a number"),
        ("wheelbase_mm = 1900", "wheelbase_mm = nan", "give a number"),
        ("wheelbase_mm = 1900", "wheelbase_mm = 19", "wheelbase_mm = 19: use 200 to 20000"),
        ("bays = 2", "bays = 2.5", "span.battery bay.bays = 2.5: give a whole number"),
        ("bays = 2", "bayes = 2", "did you mean bays?"),
        ('entry = "spring mounts"', 'entry = "magic"', "use one of: spring mounts, linkage"),
        ('stock = "metric-round/35 x 2"', 'stock = "metric-round/36 x 2"', "use a size of"),
        ('stock = "metric-round/35 x 2"', 'stock = "35 x 2"', "write LIST/SIZE"),
        ('material = "mild steel"', 'material = "mild stele"', "use one of: mild steel"),
        ("from = 1800, to = 2100", "from = 2100, to = 1800", "let from be less than to"),
        ("from = 2, to = 4", "from = 2, to = 40", "cannot be built"),
        ('choices = ["open", "single", "cross"]', 'choices = ["open", "zigzag"]', "use one of"),
        ('"wheelbase_mm" = {', '"wheelbase" = {', "write wheelbase_mm"),
        ('"span.cab.floor"', '"span.cab.flor"', "write span.cab.floor"),
        ("samples = 1024", "samples = 1000", "use a power of two, such as 1024"),
        ("seed = 1", "seed = 0", "use 1 or more"),
        ("[sweep]", "[sweeep]", "did you mean sweep?"),
        ("at = 0.26", "at = 1.26", "place it at least 20 mm behind station battery front"),
    ],
)
def test_a_fault_in_the_file_is_refused_with_field_value_and_remedy(
    old: str, new: str, message: str
) -> None:
    assert old in TEXT
    with pytest.raises(InputError) as refused:
        parse_study(TEXT.replace(old, new, 1))
    assert message in str(refused.value)
    assert "\n" not in str(refused.value)


@given(st.text(max_size=200))
def test_no_text_makes_more_than_one_line_of_complaint(text: str) -> None:
    try:
        parse_study(text)
    except InputError as refused:
        line = str(refused)
    assert line


def test_inputs_can_be_added_changed_and_held() -> None:
    study = read_study("orchard-truck")
    narrower = Input("wheelbase_mm", "Wheelbase", "mm", 1850.0, 1950.0)
    changed = study.with_input(narrower)
    assert changed.input("wheelbase_mm").low == 1850.0
    assert [i.path for i in changed.inputs] == [i.path for i in study.inputs]
    held = changed.without_input("wheelbase_mm")
    assert len(held.inputs) == len(study.inputs) - 1
    assert parse_study(write_study(held)) == held
    assert replace(study, samples=64).samples == 64
