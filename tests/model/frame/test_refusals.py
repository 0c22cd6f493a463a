"""Twenty thousand layouts, sane and insane: each is built and solved, or refused by name."""

from __future__ import annotations

import warnings

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from model.errors import InputError
from model.frame.layout import Layout, with_span, with_station, with_tube
from model.frame.variants import known_paths, one, variants
from model.frame.vocabulary import BRACING
from model.results.twist import answers
from tests.model.frame.layouts import box, ladder, random_layout

ODD = (0.0, -0.0, -1.0, 1e-9, 1e-3, 0.5, 3.0, 50.0, 1e9, 1e308, np.nan, np.inf, -np.inf)
LAYOUTS, ROWS = 100, 200


def check(refused: InputError) -> None:
    assert refused.field
    assert refused.given
    assert refused.remedy
    assert "\n" not in str(refused)


@pytest.mark.slow
def test_twenty_thousand_variants_are_solved_or_refused_by_name() -> None:
    rng = np.random.default_rng(20)
    solved = loose = refused = 0
    for _ in range(LAYOUTS):
        try:
            layout = random_layout(rng)
            one(layout)
        except InputError as fault:
            check(fault)
            continue
        paths = [
            p for p in sorted(known_paths(layout))
            if not p.endswith((".stock", ".material", ".ring", ".floor", ".top", ".left",
                               ".right", ".sides"))
        ]  # fmt: skip
        columns = {}
        for path in rng.choice(paths, min(4, len(paths)), replace=False):
            values = rng.choice(np.array(ODD), ROWS)
            usual = rng.random(ROWS) < 0.8
            sane = {"bays": (1.0, 2.0, 3.0)}.get(path.rpartition(".")[2])
            values[usual] = rng.choice(sane, usual.sum()) if sane else rng.uniform(
                0.001, 1.5, usual.sum()
            )  # fmt: skip
            columns[str(path)] = values
        with warnings.catch_warnings(action="error"):
            batches, refusals = variants(layout, columns, ROWS)
        rows = sorted([int(r) for b in batches for r in b.rows] + [r.row for r in refusals])
        assert rows == list(range(ROWS))
        for refusal in refusals:
            check(refusal.as_error())
        refused += len(refusals)
        for batch in batches:
            found = answers(batch, 1)
            bad = found.status != 0
            assert np.isfinite(found.twist[~bad]).all()
            assert (found.twist[~bad] > 0).all()
            assert (found.mass > 0).all()
            assert np.isnan(found.twist[bad]).all()
            solved += int((~bad).sum())
            loose += int(bad.sum())
    print(f"{solved} solved, {loose} loose, {refused} refused")
    assert solved > 2000
    assert refused > 2000


WORDS = st.sampled_from([*BRACING, "", "zigzag", "OPEN", "clear", "crossed"])
NUMBERS = st.sampled_from(ODD)


@settings(max_examples=400)
@given(st.data())
def test_contradictory_arrangements_are_refused_by_name(data: st.DataObject) -> None:
    base = data.draw(st.sampled_from([box(bays=2), ladder(bays=2)]))
    try:
        layout = base
        for _ in range(data.draw(st.integers(1, 4))):
            layout = data.draw(st.sampled_from(CHANGES))(layout, data)
        found = answers(one(layout), 1)
    except InputError as fault:
        check(fault)
        return
    assert np.isfinite(found.twist[0]) or found.status[0]


def _face(layout: Layout, data: st.DataObject) -> Layout:
    face = data.draw(st.sampled_from(["floor", "top", "left", "right"]))
    return with_span(layout, "middle", **{face: data.draw(WORDS)})


def _clear(layout: Layout, data: st.DataObject) -> Layout:
    faces = st.sampled_from(["floor", "top", "left", "right", "roof", ""])
    return with_span(layout, "middle", clear=tuple(data.draw(st.lists(faces, max_size=3))))


def _upper(layout: Layout, data: st.DataObject) -> Layout:
    return with_span(layout, "middle", upper=data.draw(st.booleans()))


def _bays(layout: Layout, data: st.DataObject) -> Layout:
    return with_span(layout, "middle", bays=data.draw(st.integers(-2, 25)))


def _ring(layout: Layout, data: st.DataObject) -> Layout:
    return with_station(layout, "rear", ring=data.draw(WORDS))


def _ring_members(layout: Layout, data: st.DataObject) -> Layout:
    members = ("bottom", "top", "uprights")
    return with_station(layout, "front", **{m: data.draw(st.booleans()) for m in members})


def _station(layout: Layout, data: st.DataObject) -> Layout:
    name = data.draw(st.sampled_from(["at", "width_low", "width_high", "height_high", "outrigger"]))
    return with_station(layout, "rear", **{name: data.draw(NUMBERS)})


def _tube(layout: Layout, data: st.DataObject) -> Layout:
    group = data.draw(st.sampled_from([*layout.tubes]))
    wall = data.draw(NUMBERS)
    return with_tube(layout, group, sizes={**layout.tubes[group].sizes, "wall": wall})


def _ends(layout: Layout, data: st.DataObject) -> Layout:
    group = data.draw(st.sampled_from([*layout.tubes]))
    return with_tube(layout, group, rotation=data.draw(NUMBERS), axial=data.draw(NUMBERS))


def _axle(layout: Layout, data: st.DataObject) -> Layout:
    words = st.sampled_from(["front", "rear", "nowhere", "low", "high", "linkage", "spring mounts"])
    field = data.draw(
        st.sampled_from(["front_axle", "rear_axle", "front_mount", "rear_mount", "entry"])
    )
    return Layout(**{**layout.__dict__, field: data.draw(words)})


CHANGES = (_face, _clear, _upper, _bays, _ring, _ring_members, _station, _tube, _ends, _axle)
