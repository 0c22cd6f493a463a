"""Section values: worked values, properties that hold for every size, and what is refused."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from model.errors import InputError
from model.stock.sections import (
    SHAPES,
    VALUES,
    section_reach,
    section_slopes,
    section_values,
)

SIZES = {
    "round tube": {"outside": 0.0254, "wall": 0.0016},
    "square tube": {"outside": 0.04, "wall": 0.003},
    "rectangular tube": {"width": 0.05, "depth": 0.1, "wall": 0.003},
    "solid round": {"outside": 0.02},
    "solid rectangle": {"width": 0.02, "depth": 0.035},
    "channel": {"flange": 0.052, "depth": 0.104, "wall": 0.004},
}
"""One of each shape, in metres."""

WALLED = [shape for shape in SHAPES if "wall" in SHAPES[shape].sizes]


def numbers(values) -> dict[str, float]:
    return {name: float(getattr(values, name)) for name in VALUES}


@st.composite
def any_size(draw, shape: str) -> dict[str, float]:
    """Sizes of a shape as tubes are made: 8 to 200 mm outside, wall 3 to 45 % of the least."""
    outside = [name for name in SHAPES[shape].sizes if name != "wall"]
    sizes = {name: draw(st.floats(0.008, 0.2)) for name in outside}
    if "wall" in SHAPES[shape].sizes:
        sizes["wall"] = draw(st.floats(0.03, 0.45)) * min(sizes.values())
    return sizes


SHAPES_AND_SIZES = st.sampled_from(list(SHAPES)).flatmap(
    lambda shape: st.tuples(st.just(shape), any_size(shape))
)


# --- worked values --------------------------------------------------------------------------


def test_every_shape_has_a_size_here():
    assert set(SIZES) == set(SHAPES)


def test_round_tube_of_the_check_frames():
    """25.4 x 1.6 mm; an independent prototype, seven digits."""
    got = section_values("round tube", SIZES["round tube"])
    assert pytest.approx(1.196318e-4, abs=5e-11) == got.A
    assert got.Iy == pytest.approx(8.508815e-9, abs=5e-16)
    assert 2 * got.Iy == got.J


def test_rectangular_tube_with_square_corners():
    """50 x 100 x 3 mm, Bredt: 4 (47 x 97 mm²)² 3 mm / (2 (47 + 97) mm) = 866020 mm⁴."""
    got = section_values("rectangular tube", SIZES["rectangular tube"])
    assert pytest.approx(8.66020e-7, abs=5e-13) == got.J


def polygon(width: float, depth: float, radius: float) -> tuple[float, float]:
    """Area and second moment about the y axis of a rounded rectangle with 4 x 3000 corners."""
    turn = np.linspace(0, np.pi / 2, 3000)
    corners = []
    for k, (y, z) in enumerate([(1, 1), (-1, 1), (-1, -1), (1, -1)]):
        at = turn + k * np.pi / 2
        middle = np.array([y * (width / 2 - radius), z * (depth / 2 - radius)])
        corners.append(middle + radius * np.stack([np.cos(at), np.sin(at)], axis=-1))
    y, z = np.concatenate(corners).T
    cross = y * np.roll(z, -1) - np.roll(y, -1) * z
    squares = z * z + z * np.roll(z, -1) + np.roll(z, -1) ** 2
    return float(cross.sum() / 2), float((cross * squares).sum() / 12)


def test_rounded_corners_are_counted_exactly():
    """50 x 100 x 3 with radii 6 and 3: a polygon of many corners, good to 1e-7, says the same."""
    real = section_values("rectangular tube", {**SIZES["rectangular tube"], "corner_radius": 0.006})
    outside, inside = polygon(0.05, 0.1, 0.006), polygon(0.044, 0.094, 0.003)
    assert pytest.approx(outside[0] - inside[0], rel=1e-7) == real.A
    assert real.Iy == pytest.approx(outside[1] - inside[1], rel=1e-7)


def test_square_tube_whose_corner_is_a_quarter_circle_is_a_round_tube():
    """Radius = half the outside; area and second moment are then exact for circles."""
    square = section_values("square tube", {"outside": 0.04, "wall": 0.003, "corner_radius": 0.02})
    tube = section_values("round tube", {"outside": 0.04, "wall": 0.003})
    assert pytest.approx(tube.A, rel=1e-12) == square.A
    assert square.Iy == pytest.approx(tube.Iy, rel=1e-12)
    # Bredt's mean circle with the wall's own part: 1 - (t/D)²-like terms are left out
    assert pytest.approx(tube.J, rel=0.01) == square.J


def test_saint_venant_coefficients_of_rectangles():
    """J/(long short³), Timoshenko & Goodier, Theory of Elasticity, table in §109: four digits."""
    printed = {1: 0.1406, 1.2: 0.166, 1.5: 0.196, 2: 0.229, 2.5: 0.249, 3: 0.263, 4: 0.281,
               5: 0.291, 10: 0.312}  # fmt: skip
    for ratio, coefficient in printed.items():
        upright = section_values("solid rectangle", {"width": 0.01, "depth": 0.01 * ratio})
        lying = section_values("solid rectangle", {"width": 0.01 * ratio, "depth": 0.01})
        allowed = 5e-5 if ratio == 1 else 5e-4
        assert upright.J / (ratio * 1e-8) == pytest.approx(coefficient, abs=allowed)
        assert lying.J == upright.J


def test_torsion_of_a_square_bar_to_many_digits():
    """0.140577 of the fourth power; the series summed term by term to 4000 terms."""
    got = section_values("solid rectangle", {"width": 1.0, "depth": 1.0}).J
    odd = np.arange(1, 8001, 2, dtype=float)
    long_sum = np.sum((np.tanh(np.minimum(odd * np.pi / 2, 300)) / odd**5)[::-1])
    assert got == pytest.approx((1 - 192 / np.pi**5 * long_sum) / 3, rel=1e-13)
    assert got == pytest.approx(0.140577, abs=5e-7)


def test_thin_strip_twists_as_its_limit_says():
    """long short³/3 (1 - 0.6302 short/long), Roark; 1e-4 of the correction is left off."""
    got = section_values("solid rectangle", {"width": 0.5, "depth": 1e-4}).J
    assert got == pytest.approx(0.5 * 1e-12 / 3 * (1 - 0.6302 * 1e-4 / 0.5), rel=1e-7)


def test_solid_round_is_the_round_tube_without_a_hole():
    bar = numbers(section_values("solid round", {"outside": 0.02}))
    tube = numbers(section_values("round tube", {"outside": 0.02, "wall": 0.01}))
    assert bar == pytest.approx(tube, rel=1e-14)


def test_shear_coefficients_of_cowper():
    """ν = 0.3: circle 7.8/8.8, rectangle 13/15.3 (Cowper 1966, table 1)."""
    circle = section_values("solid round", {"outside": 0.02})
    assert circle.Asy / circle.A == pytest.approx(7.8 / 8.8, rel=1e-14)
    box = section_values("solid rectangle", {"width": 0.02, "depth": 0.03})
    assert box.Asz / box.A == pytest.approx(13 / 15.3, rel=1e-14)


def test_channel_is_three_plates_with_their_steiner_terms():
    f, d, t = 0.052, 0.104, 0.004
    got = section_values("channel", {"flange": f, "depth": d, "wall": t})
    plates = [(t, d, t / 2, 0.0), (f - t, t, (f + t) / 2, d / 2 - t / 2),
              (f - t, t, (f + t) / 2, t / 2 - d / 2)]  # width, depth, y, z  # fmt: skip
    area = sum(w * h for w, h, _, _ in plates)
    out = sum(w * h * y for w, h, y, _ in plates) / area
    assert pytest.approx(area, rel=1e-13) == got.A
    strong = sum(w * h**3 / 12 + w * h * z**2 for w, h, _, z in plates)
    weak = sum(h * w**3 / 12 + w * h * (y - out) ** 2 for w, h, y, _ in plates)
    assert got.Iy == pytest.approx(strong, rel=1e-13)
    assert got.Iz == pytest.approx(weak, rel=1e-13)


def test_reach_is_half_the_outside_and_for_a_channel_the_far_tip():
    for shape, half in (
        ("round tube", (0.0127, 0.0127)),
        ("rectangular tube", (0.025, 0.05)),
        ("solid rectangle", (0.01, 0.0175)),
    ):
        assert tuple(float(c) for c in section_reach(shape, SIZES[shape])) == half
    cy, cz = section_reach("channel", SIZES["channel"])
    assert cz == 0.052
    # web 104 x 4 at 2 mm, flanges 2 x 48 x 4 at 28 mm: centroid 14.48 mm from the back
    assert cy == pytest.approx(0.052 - (416 * 2 + 384 * 28) / 800 * 1e-3, rel=1e-13)


# --- what holds for every size --------------------------------------------------------------


@given(SHAPES_AND_SIZES, st.floats(0.2, 5))
def test_doubling_every_size_scales_area_by_squares_and_second_moments_by_fourth_powers(one, s):
    shape, sizes = one
    before = numbers(section_values(shape, sizes))
    after = numbers(section_values(shape, {name: s * value for name, value in sizes.items()}))
    for name in VALUES:
        power = s**2 if name.startswith("A") else s**4
        assert after[name] == pytest.approx(power * before[name], rel=1e-11)


@given(
    st.sampled_from(WALLED).flatmap(lambda s: st.tuples(st.just(s), any_size(s))), st.floats(1, 1.1)
)
def test_a_thicker_wall_never_has_less_area_second_moment_or_torsion_constant(one, more):
    """Up to a quarter of the outside: Bredt's formula falls again for a nearly solid box."""
    shape, sizes = one
    least = min(value for name, value in sizes.items() if name != "wall")
    thin = {**sizes, "wall": min(sizes["wall"], 0.2 * least)}
    before = numbers(section_values(shape, thin))
    after = numbers(section_values(shape, {**thin, "wall": thin["wall"] * more}))
    for name in ("A", "Iy", "Iz", "J"):
        assert after[name] >= before[name] * (1 - 1e-12)


@given(SHAPES_AND_SIZES)
def test_slopes_are_what_central_differences_say(one):
    """Step 1e-5 of the size: differences are good to 1e-9 of the value's own scale."""
    shape, sizes = one
    slopes = section_slopes(shape, sizes)
    assert list(slopes) == list(SHAPES[shape].sizes)
    for size, slope in slopes.items():
        step = 1e-5 * sizes[size]
        up, down = (numbers(section_values(shape, {**sizes, size: sizes[size] + s}))
                    for s in (step, -step))  # fmt: skip
        own = numbers(section_values(shape, sizes))
        for name in VALUES:
            difference = (up[name] - down[name]) / (2 * step)
            allowed = 1e-7 * own[name] / sizes[size]
            assert float(getattr(slope, name)) == pytest.approx(difference, rel=1e-7, abs=allowed)


@given(SHAPES_AND_SIZES)
def test_slopes_times_sizes_add_up_to_two_areas_and_four_second_moments(one):
    """Euler's theorem: areas grow by squares of all sizes together, moments by fourth powers."""
    shape, sizes = one
    own, slopes = numbers(section_values(shape, sizes)), section_slopes(shape, sizes)
    for name in VALUES:
        total = sum(float(getattr(slope, name)) * sizes[size] for size, slope in slopes.items())
        power = 2 if name.startswith("A") else 4
        # slopes of a wall and of the outside take each other away when a wall is thin
        assert total == pytest.approx(power * own[name], rel=1e-11)


@pytest.mark.parametrize("shape", SHAPES)
def test_slopes_of_many_sizes_are_the_slopes_of_each(shape):
    """But for rounding: complex products of arrays may round otherwise than those of numbers."""
    many = {name: value * np.array([[0.9], [1.0], [1.1]]) for name, value in SIZES[shape].items()}
    together, own = section_slopes(shape, many), section_values(shape, SIZES[shape])
    for k in range(3):
        alone = section_slopes(shape, {name: float(value[k, 0]) for name, value in many.items()})
        for size in SHAPES[shape].sizes:
            for name in VALUES:
                found = np.broadcast_to(getattr(together[size], name), (3, 1))
                expected = float(getattr(alone[size], name))
                allowed = 1e-13 * float(getattr(own, name)) / SIZES[shape][size]
                assert found[k, 0] == pytest.approx(expected, rel=1e-13, abs=allowed)


def test_slopes_of_a_round_tube_in_closed_form():
    """A = π t (D - t), so dA/dD = π t and dA/dt = π (D - 2 t); dI/dD from I = π/64 (D⁴ - d⁴)."""
    outside, wall = 0.0254, 0.0016
    inner = outside - 2 * wall
    slopes = section_slopes("round tube", {"outside": outside, "wall": wall})
    assert float(slopes["outside"].A) == pytest.approx(np.pi * wall, rel=1e-13)
    assert float(slopes["wall"].A) == pytest.approx(np.pi * inner, rel=1e-13)
    grown = np.pi / 16 * (outside**3 - inner**3)
    assert float(slopes["outside"].Iy) == pytest.approx(grown, rel=1e-13)
    assert float(slopes["wall"].J) == pytest.approx(np.pi / 4 * inner**3, rel=1e-13)


def test_slopes_of_a_tube_with_round_corners_keep_the_radius():
    sizes = {"width": 0.05, "depth": 0.1, "wall": 0.003, "corner_radius": 0.006}
    slopes = section_slopes("rectangular tube", sizes)
    step = 1e-8
    more = section_values("rectangular tube", {**sizes, "wall": 0.003 + step})
    less = section_values("rectangular tube", {**sizes, "wall": 0.003 - step})
    for name in VALUES:
        difference = (getattr(more, name) - getattr(less, name)) / (2 * step)
        assert float(getattr(slopes["wall"], name)) == pytest.approx(difference, rel=1e-6)
    assert "corner_radius" not in slopes


@given(SHAPES_AND_SIZES)
def test_width_and_depth_change_places_when_a_section_is_turned(one):
    shape, sizes = one
    if set(sizes) - {"wall"} != {"width", "depth"}:
        return
    turned = {**sizes, "width": sizes["depth"], "depth": sizes["width"]}
    a, b = numbers(section_values(shape, sizes)), numbers(section_values(shape, turned))
    assert a["Iy"] == pytest.approx(b["Iz"], rel=1e-12)
    assert a["Asy"] == pytest.approx(b["Asz"], rel=1e-12)
    assert a["J"] == pytest.approx(b["J"], rel=1e-12)


@pytest.mark.parametrize("shape", SHAPES)
def test_one_size_has_the_same_bits_alone_as_among_many(shape):
    rng = np.random.default_rng(5)
    many = {name: value * rng.uniform(0.8, 1.2, 203) for name, value in SIZES[shape].items()}
    together = section_values(shape, many)
    for count in (1, 2, 3, 7, 100):
        part = section_values(shape, {name: value[-count:] for name, value in many.items()})
        for name in VALUES:
            assert (getattr(part, name) == getattr(together, name)[-count:]).all()


def test_sizes_broadcast():
    got = section_values(
        "channel", {"flange": [[0.04], [0.05]], "depth": [0.08, 0.1], "wall": 3e-3}
    )
    assert got.J.shape == (2, 2)


# --- what is refused ------------------------------------------------------------------------


def refused(shape, sizes) -> InputError:
    with pytest.raises(InputError) as caught:
        section_values(shape, sizes)
    return caught.value


@pytest.mark.parametrize("bad", [0.0, -0.001, float("nan"), float("inf")])
@pytest.mark.parametrize("shape", SHAPES)
def test_sizes_that_cannot_be_are_refused_by_name(shape, bad):
    for name in SHAPES[shape].sizes:
        fault = refused(shape, {**SIZES[shape], name: bad})
        assert fault.field == name
        assert fault.given == f"{bad * 1e3:g} mm"


def test_the_first_bad_entry_is_named_in_millimetres_with_what_would_do():
    fault = refused("round tube", {"outside": 0.025, "wall": [0.001, 0.013, 0.02]})
    assert str(fault) == ("wall = 13 mm (entry 1): keep it at most half the outside size, 12.5 mm")
    fault = refused("round tube", {"outside": [0.02, np.nan], "wall": 0.001})
    assert str(fault) == "outside = nan mm (entry 1): stay above 0, and finite"


def test_a_wall_of_half_the_outside_is_a_solid_bar():
    sizes = {"outside": 0.3, "wall": 0.15}
    assert pytest.approx(np.pi * 0.0225, rel=1e-14) == section_values("round tube", sizes).A
    # 25.4 / 2 is not quite 12.7 once both are converted; that is no fault
    section_values("round tube", {"outside": 25.4 * 1e-3, "wall": 12.7 * 1e-3 * (1 + 1e-15)})


@pytest.mark.parametrize("bad", [-0.001, 0.021, float("nan")])
def test_a_corner_radius_past_the_middle_is_refused(bad):
    fault = refused("square tube", {"outside": 0.04, "wall": 0.003, "corner_radius": bad})
    assert fault.field == "corner_radius"
    assert fault.remedy == "stay between 0 and 20 mm"


def test_a_size_that_the_shape_does_not_have_is_refused():
    """A corner radius on a round tube would else be forgotten without a word."""
    fault = refused("round tube", {**SIZES["round tube"], "corner_radius": 0.003})
    assert str(fault) == "corner_radius = 0.003: leave it out: a round tube has outside, wall"
    fault = refused("square tube", {**SIZES["square tube"], "width": 0.04})
    assert fault.remedy.endswith("has outside, wall, corner_radius")


@pytest.mark.parametrize("bad", [float("nan"), float("inf"), -1.0, 0.51])
def test_a_ratio_of_poisson_that_cannot_be_is_refused(bad):
    for ask in (section_values, section_slopes):
        with pytest.raises(InputError, match="poisson"):
            ask("round tube", SIZES["round tube"], bad)


def test_unknown_shapes_and_missing_sizes_are_refused():
    fault = refused("oval tube", {"outside": 0.04})
    assert fault.field == "shape"
    assert "round tube" in fault.remedy
    fault = refused("channel", {"flange": 0.04, "depth": 0.08})
    assert fault.field == "wall"
    assert "flange, depth, wall" in fault.remedy
    with pytest.raises(InputError):
        section_reach("channel", {"flange": 0.04, "depth": 0.08, "wall": 0.05})
    with pytest.raises(InputError):
        section_slopes("solid round", {"outside": -1.0})
