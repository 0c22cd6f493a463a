"""What pages say, from numbers alone."""

from __future__ import annotations

import datetime
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from explorer import words
from explorer.units import INCH_POUND, METRIC
from model.errors import InputError, LooseFrame
from model.frame.layout import with_station
from model.results.detail import examine
from sweeps.front import Distance
from sweeps.inputs import Input
from sweeps.jobs import RUNNING, WAITING, Progress
from sweeps.study_file import read_study

STUDY = read_study("hill-climb-single-seater")
NOW = datetime.datetime(2025, 12, 1, 13, 20)


def without_hard_spaces(text: str) -> str:
    return text.replace("\u00a0", " ")


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("seat back", "seat back"),
        ("a [link](http://example.org)", r"a \[link\]\(http\://example\.org\)"),
        ("<b>1 + 1 = $2$</b>", r"\<b\>1 \+ 1 \= \$2\$\</b\>"),
        ("two\nlines", "two lines"),
    ],
)
def test_text_of_a_person_is_shown_as_it_is(text, shown):
    assert words.plain(text) == shown


@pytest.mark.parametrize(
    ("text", "name"),
    [("Hill-climb single-seater", "hill-climb-single-seater"), ("../../etc", "etc"),
     ("Größe Ø 25", "groe-25"), ("///", "study")],
)  # fmt: skip
def test_a_file_name_holds_letters_digits_and_hyphens(text, name):
    assert words.file_name(text) == name


@pytest.mark.parametrize(
    ("hours_ago", "said"),
    [(1, "12:20"), (20, "yesterday 17:20"), (24 * 5, "26 Nov 13:20"), (24 * 400, "27 Oct 2024")],
)
def test_a_moment_is_said_as_shortly_as_it_can_be(hours_ago, said):
    assert words.moment(NOW - datetime.timedelta(hours=hours_ago), NOW) == said


@pytest.mark.parametrize(
    ("seconds", "said"),
    [(0.2, "less than a second"), (12.4, "12 s"), (200, "3 min"), (7800, "2 h 10 min")],
)
def test_a_duration_has_no_more_figures_than_it_deserves(seconds, said):
    assert without_hard_spaces(words.duration(seconds)) == said


def test_a_fault_names_field_value_and_remedy_in_words():
    found = InputError("station.dash.width_low_mm", "5", "use 20 to 5000")
    assert words.fault(found, STUDY.layout) == (
        "**Dash, width at the lower rails** = 5 mm. Use 20 to 5000."
    )


def test_a_loose_joint_is_said_with_what_would_hold_it():
    found = LooseFrame("dash low left", "z", "brace a face that meets there")
    said = words.fault(found, STUDY.layout)
    assert said.startswith("Joint dash low left moves freely in z")
    assert "brace a face" in said


def test_the_frame_opens_with_mass_and_stiffness_in_the_units_shown():
    detail = examine(STUDY.layout)
    said = without_hard_spaces(words.frame_opening(detail, 0, METRIC))
    assert said.startswith("Hill\\-climb single\\-seater: 30.8 kg of tube")
    assert said.endswith("as the starting vehicle stands.")
    assert "1 change from the starting vehicle." in without_hard_spaces(
        words.frame_opening(detail, 1, INCH_POUND)
    )
    assert " lb of tube" in without_hard_spaces(words.frame_opening(detail, None, INCH_POUND))


def test_changes_are_counted_by_field_and_by_tube():
    layout = STUDY.layout
    wider = with_station(layout, "dash", width_low=0.6)
    assert words.changes_between(layout, layout) == 0
    assert words.changes_between(wider, layout) == 1
    assert words.changes_between(replace(wider, entry="spring mounts"), layout) == 2


@pytest.mark.parametrize(
    ("share", "said"),
    [(0.95, "true space frame"), (0.6, "Partly a space frame"), (0.1, "bending and torsion")],
)
def test_the_axial_share_says_how_the_frame_carries(share, said):
    assert said in words.how_it_carries(share)


def test_the_verdict_has_three_lines_and_follows_the_units():
    detail = examine(STUDY.layout)
    metric, inch = (words.frame_verdict(detail, units) for units in (METRIC, INCH_POUND))
    assert metric.count("\n- ") == 2
    assert "mm" in metric
    assert "mm" not in inch


def test_progress_says_how_many_how_fast_and_how_long():
    p = Progress(40960, 8192, 0, 2.0, 4096.0, RUNNING)
    assert without_hard_spaces(words.progress(p)) == (
        "8,192 of 40,960 frames · 4,096 a second · 8 s left"
    )
    waiting = Progress(40960, 0, 0, 0.0, 0.0, WAITING)
    assert words.progress(waiting) == "Waiting for another sweep to finish"


def test_a_frame_is_said_against_the_front():
    frame = pd.Series(
        {"frame": 812, "mass_kg": 30.0, "twist_Nm_per_deg": 3000.0, "twist_per_kg": 100.0}
    )
    on = words.frame_against_front(frame, Distance(0.0, 1e-9), METRIC)
    off = words.frame_against_front(frame, Distance(1.3, 200.0), METRIC)
    assert on.endswith("No other frame beats it.")
    assert "1.3 kg lighter" in without_hard_spaces(off)
    assert "200 N·m/deg stiffer" in without_hard_spaces(off)


def test_the_value_of_an_input_follows_the_units_and_loses_the_name_of_the_list():
    length = Input("wheelbase_mm", "Wheelbase", "mm", 2000.0, 3000.0)
    size = Input("tube.hoop.stock", "Hoop, stock size", "", options=("metric-round/25 x 1.5",))
    assert words.input_value(length, np.float64(2540.0), INCH_POUND) == "100"
    assert words.titled_input(length, INCH_POUND) == "Wheelbase [in]"
    assert words.input_value(size, "metric-round/25 x 1.5", METRIC) == "25 x 1.5"


def test_a_face_is_named_by_place_and_face():
    assert words.face("span.engine bay.top") == "Engine bay, top"
