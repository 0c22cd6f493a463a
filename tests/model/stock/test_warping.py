"""Channels in torsion: worked values, Vlasov's equation solved another way, and the limits."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from model.errors import InputError
from model.stock.sections import section_values
from model.stock.warping import channel_warping, held_warping_torsion

E = 205e9
G = E / 2.6
CHANNEL = {"flange": 0.052, "depth": 0.104, "wall": 0.004}
"""Mid-line 50 x 100 mm, wall 4 mm."""
LENGTH = 1.5


def test_channel_of_the_check_values():
    """An independent prototype, six digits; section analysis gives J -0.2 %, Iw +0.7 %."""
    j, iw, centre = channel_warping(CHANNEL)
    assert j == pytest.approx(4.26667e-9, abs=5e-15)
    assert iw == pytest.approx(3.64583e-10, abs=5e-16)
    assert centre == pytest.approx(0.01875, abs=5e-6)
    assert j == section_values("channel", CHANNEL).J


@pytest.mark.parametrize(
    "spring, ratio, half_digit",
    [(0.0, 1.0, 0.0), (100.0, 1.307503, 5e-7), (1000.0, 2.019124, 5e-7), (np.inf, 2.371880, 5e-7)],
)
def test_held_ends_of_the_check_channel(spring, ratio, half_digit):
    j, iw, _ = channel_warping(CHANNEL)
    got = held_warping_torsion(j, iw, E, G, LENGTH, spring)
    assert got / j == pytest.approx(ratio, rel=1e-12, abs=half_digit)


def twist_by_vlasov(j, iw, length, spring) -> float:
    """End twist under unit torque from the four constants of the general solution.

    φ = a + b x + c cosh kx + d sinh kx; E Iw φ''' - G J φ' = -T; φ(0) = 0; bimoment E Iw φ''
    equals spring times φ' at both ends.
    """
    k = np.sqrt(G * j / (E * iw))
    h = k * length

    def rate(x, order):
        """Row of the order-th derivative at x."""
        s, c = np.sinh(k * x), np.cosh(k * x)
        cosh = c if order % 2 == 0 else s
        sinh = s if order % 2 == 0 else c
        return np.array([order == 0, x if order == 0 else order == 1, k**order * cosh,
                         k**order * sinh], dtype=float)  # fmt: skip

    rows = [
        rate(0, 0),
        G * j * rate(0, 1) - E * iw * rate(0, 3),
        E * iw * rate(0, 2) - spring * rate(0, 1),
        E * iw * rate(length, 2) + spring * rate(length, 1),
    ]
    assert h < 20  # the exponentials stay within reach
    constants = np.linalg.solve(np.array(rows), [0, 1, 0, 0])
    return float(rate(length, 0) @ constants)


@given(st.floats(0.3, 4), st.floats(-2, 6))
def test_partly_held_ends_agree_with_vlasovs_equation(length, exponent):
    j, iw, _ = channel_warping(CHANNEL)
    spring = 10.0**exponent
    expected = length / (G * twist_by_vlasov(j, iw, length, spring))
    # the equations behind ``expected`` lose some digits for stiff springs
    assert held_warping_torsion(j, iw, E, G, length, spring) == pytest.approx(expected, rel=1e-8)


def test_short_members_twist_as_flanges_that_bend():
    """h near 0: 12 E Iw/(G L²), both flanges clamped at both ends; J plays no part."""
    limit = 12 * E * 3e-10 / (G * 0.01)
    for j in (0.0, 1e-300, 1e-20, 1e-15):
        assert held_warping_torsion(j, 3e-10, E, G, 0.1) == pytest.approx(limit, rel=1e-7)
    # next term of the series, 1.2 J
    got = held_warping_torsion(1e-13, 3e-10, E, G, 0.1)
    assert got - limit == pytest.approx(1.2e-13, rel=1e-2)


def test_long_members_twist_freely():
    j, iw, _ = channel_warping(CHANNEL)
    for length in (1e3, 1e6, 1e9):
        k = np.sqrt(G * j / (E * iw))
        got = held_warping_torsion(j, iw, E, G, length)
        assert got / j == pytest.approx(1 / (1 - 2 / (k * length)), rel=1e-14)


def test_series_and_formula_meet_without_a_step():
    """Just below and just above the changeover the answer is smooth to 1e-12."""
    iw, length = 3e-10, 1.0
    at = np.array([0.1 * (1 - 1e-9), 0.1 * (1 + 1e-9)])
    j = E * iw / G * (2 * at / length) ** 2
    low, high = held_warping_torsion(j, iw, E, G, length)
    # the slope of the answer with J is 1.2 there
    assert high - low == pytest.approx(1.2 * (j[1] - j[0]), abs=1e-12 * high)


def test_nothing_that_warps_and_nothing_that_holds_leave_plain_torsion():
    assert held_warping_torsion(4e-9, 0.0, E, G, 1.0) == 4e-9
    assert held_warping_torsion(4e-9, 3e-10, E, G, 1.0, 0.0) == 4e-9
    assert held_warping_torsion(0.0, 3e-10, E, G, 1.0, 0.0) == 0.0


@given(st.floats(0.01, 100), st.floats(-3, 8), st.floats(1, 10))
def test_stiffer_ends_never_twist_more_and_lie_between_free_and_held(length, exponent, more):
    j, iw, _ = channel_warping(CHANNEL)
    spring = 10.0**exponent
    free, soft, stiff, held = held_warping_torsion(
        j, iw, E, G, length, np.array([0, spring, spring * more, np.inf])
    )
    assert free <= soft * (1 + 1e-14)
    assert soft <= stiff * (1 + 1e-14)
    assert stiff <= held * (1 + 1e-14)


@pytest.mark.parametrize(
    "name, bad",
    [
        ("J", -1e-9),
        ("J", np.inf),
        ("Iw", np.nan),
        ("Iw", np.inf),
        ("E", 0.0),
        ("G", np.inf),
        ("length", 0.0),
        ("length", np.inf),
        ("spring", -1.0),
        ("spring", np.nan),
    ],
)
def test_what_cannot_be_is_refused_by_name(name, bad):
    given_values = {"J": 4e-9, "Iw": 3e-10, "E": E, "G": G, "length": 1.0, "spring": 10.0}
    with pytest.raises(InputError) as caught:
        held_warping_torsion(**{**given_values, name: bad})
    assert caught.value.field == name


def test_channel_warping_checks_its_sizes():
    with pytest.raises(InputError, match="wall"):
        channel_warping({**CHANNEL, "wall": 0.03})
