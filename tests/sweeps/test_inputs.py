"""Values follow the distribution that was asked for; links follow; groups name what varies."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from model.errors import InputError
from sweeps.evaluate import OK, evaluate
from sweeps.inputs import Input
from sweeps.links import Group, Link
from sweeps.sampling import Design
from sweeps.study import Study
from sweeps.study_file import parse_study, read_study
from sweeps.study_text import HOW_TO_VARY, write_study

PATH = "tube.lower rails.wall_mm"


@given(
    st.floats(-100, 100), st.floats(0.1, 100), st.floats(0, 1), st.floats(0.01, 50),
    st.lists(st.floats(0, 1), min_size=1, max_size=20),
)  # fmt: skip
def test_values_are_the_inverse_of_the_published_distribution(
    low: float, span: float, part: float, sd: float, cube: list[float]
) -> None:
    high, middle, u = low + span, min(low + part * span, low + span), np.array(cube)
    triangle = Input(PATH, "w", "mm", low, high, shape="triangular", peak=middle)
    exact = stats.triang(part, low, span).ppf(u)
    assert triangle.numbers(u) == pytest.approx(exact, abs=1e-6 * span)
    normal = Input(PATH, "w", "mm", low, high, shape="normal", mean=middle, sd=sd)
    exact = stats.truncnorm((low - middle) / sd, (high - middle) / sd, middle, sd).ppf(u)
    assert normal.numbers(u) == pytest.approx(exact, abs=1e-6 * span)
    for one in (triangle, normal):
        assert ((one.numbers(u) >= low - 1e-9 * span) & (one.numbers(u) <= high)).all()
        assert one.numbers([0.0, 1.0]) == pytest.approx([low, high], abs=1e-9 * span)
    assert np.isnan(triangle.numbers([np.nan])).all()
    assert np.isnan(normal.numbers([np.nan])).all()


TEXT = """
"wheelbase_mm" = { from = 1800, to = 2100, shape = "triangular", peak = 1900 }
"tube.lower rails.wall_mm" = { from = 1.8, to = 2.2, shape = "normal", mean = 2.0, sd = 0.08 }
"tube.floor braces.stock" = { list = "metric-round", sizes = ["20 x 1.5", "25 x 1.5"] }
"span.cab.bays" = { choices = [1, 2] }
"tube.cross members.stock" = { same_as = "tube.floor braces.stock" }
"span.battery bay.bays" = { same_as = "span.cab.bays", plus = 1 }
"track_rear_mm" = { same_as = "wheelbase_mm", plus = -800 }

[judge_together]
"tubes" = ["tube.lower rails.wall_mm", "tube.floor braces.stock"]
"""
HEAD = write_study(replace(read_study("orchard-truck"), inputs=()))


@pytest.fixture
def linked() -> Study:
    return parse_study(HEAD + TEXT)


def test_shapes_links_and_groups_come_back_as_written(linked: Study) -> None:
    assert [i.shape for i in linked.inputs[:2]] == ["triangular", "normal"]
    assert linked.links[1] == Link("span.battery bay.bays", "span.cab.bays", 1.0)
    assert linked.groups == (Group("tubes", (PATH, "tube.floor braces.stock")),)
    assert parse_study(write_study(linked)) == linked
    assert linked.inputs[0].words == "1800 to 2100 mm, most likely 1900"
    assert "standard deviation 0.08" in linked.inputs[1].words


def test_the_file_says_what_may_be_written_and_the_comment_is_true(linked: Study) -> None:
    text = write_study(linked)
    assert HOW_TO_VARY in text
    forms = [line.split("}")[0][1:] + "}" for line in HOW_TO_VARY.splitlines() if "{ " in line]
    paths = [PATH] * 3 + ["span.cab.floor", "tube.lower rails.stock", "wheelbase_mm"]
    assert len(forms) == len(paths)
    for path, form in zip(paths, forms, strict=True):
        form = form.replace("station.dash.height_high_mm", "track_front_mm")
        study = parse_study(HEAD + f'"{path}" = {form.strip()}')
        assert len(study.inputs) + len(study.links) == 1
    assert parse_study(write_study(linked, comments=False)) == linked


def test_a_linked_field_follows_and_takes_no_dimension(linked: Study) -> None:
    unit = Design(4, 8).unit()
    assert len(linked.inputs) == unit.shape[1] == 4
    table = evaluate(linked, unit)
    assert (table["status"] == OK).all()
    assert (table["tube.cross members.stock"] == table["tube.floor braces.stock"]).all()
    assert (table["span.battery bay.bays"] == table["span.cab.bays"] + 1).all()
    assert table["track_rear_mm"].to_numpy() == pytest.approx(table["wheelbase_mm"] - 800)
    layout = linked.layout_at(unit[5])
    assert layout.tubes["cross members"].sizes == layout.tubes["floor braces"].sizes
    assert layout.span("battery bay").bays == layout.span("cab").bays + 1
    assert layout.track_rear == pytest.approx(layout.wheelbase - 0.8)


def test_a_link_to_a_field_that_is_held_takes_its_value(linked: Study) -> None:
    held = linked.without_input("wheelbase_mm").without_input("tube.floor braces.stock")
    assert held.groups == (Group("tubes", (PATH,)),)
    table = evaluate(held, Design(2, 2).unit())
    layout = held.layout
    assert table["track_rear_mm"].to_numpy() == pytest.approx(layout.wheelbase * 1e3 - 800)
    assert (table["tube.cross members.stock"] == layout.tubes["floor braces"].stock).all()


def test_an_input_takes_the_place_of_a_link_and_the_other_way_about(linked: Study) -> None:
    own = linked.with_input(Input("track_rear_mm", "Rear track", "mm", 1000.0, 1200.0))
    assert "track_rear_mm" not in [x.path for x in own.links]
    again = own.with_link(Link("track_rear_mm", "wheelbase_mm", -800.0))
    assert set(again.links) == set(linked.links)
    assert again.inputs == linked.inputs


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("peak = 1900", "peak = 1700", "wheelbase_mm.peak = 1700: give a number from 1800 to 2100"),
        (", peak = 1900", "", "vary.wheelbase_mm.peak = missing"),
        ('"triangular"', '"triangel"', "use one of: even, triangular, normal"),
        ('"triangular"', '"even"', "vary.wheelbase_mm.peak = unknown key"),
        ("sd = 0.08", "sd = 0", "sd = 0.0: give a number above 0"),
        ("mean = 2.0", "mean = 3", "wall_mm.mean = 3: give a number from 1.8 to 2.2"),
        ("span.cab.bays\", plus", "span.cab.bayes\", plus", "write span.cab.bays"),
        ('as = "wheelbase_mm"', 'as = "wheelbase"', "same_as = no unit: write wheelbase_mm"),
        ("plus = -800", 'plus = "less"', "give a number"),
        ("plus = -800", "minus = 800", "use one of: same_as, plus"),
        ('as = "wheelbase_mm"', 'as = "track_rear_mm"', "that is a link itself"),
        ('as = "wheelbase_mm"', 'as = "span.cab.bays"', "name a field that is a number too"),
        ('braces.stock" }', 'braces.stock", plus = 2 }', "leave it out: this is no number"),
        ("plus = 1 }", "plus = 40 }", "cannot be built"),
        ('["tube.lower rails.wall_mm",', '["track_rear_mm",', "an input under [vary] that is no"),
        ('["tube.lower rails.wall_mm",', '["tube.floor braces.stock",', "is in tubes already"),
        ('"tubes" = [', '"none" = []\n"tubes" = [', "judge_together.none = empty"),
        ('"tubes" = [', '"none" = "all"\n"tubes" = [', "give a list of paths"),
    ],
)  # fmt: skip
def test_what_does_not_fit_is_refused_in_words(old: str, new: str, message: str) -> None:
    assert old in TEXT
    with pytest.raises(InputError) as refused:
        parse_study(HEAD + TEXT.replace(old, new, 1))
    assert message in str(refused.value)
