"""Local joint flexibility. Fessler, Mockford & Webster 1986; values from an independent prototype
that agrees with the source of a general-purpose library (out-of-plane term from memory)."""

import math

import pytest

from model.errors import InputError
from model.stock.tube_joints import joint_give


@pytest.mark.parametrize(
    ("angle", "axial", "in_plane", "out_of_plane"),
    [
        (90, 6.59653e-9, 3.42925e-6, 1.07200e-5),
        (45, 3.08807e-9, 2.24683e-6, 5.07086e-6),
    ],
)
def test_check_values(angle: float, axial: float, in_plane: float, out_of_plane: float) -> None:
    found = joint_give(0.1, 0.004, 0.06, math.radians(angle), 205e9)
    assert found.axial == pytest.approx(axial, rel=1e-5)
    assert found.in_plane == pytest.approx(in_plane, rel=1e-5)
    assert found.out_of_plane == pytest.approx(out_of_plane, rel=1e-5)
    assert found.remarks == ()


def test_frame_tubes_are_called_an_extrapolation() -> None:
    found = joint_give(0.032, 0.002, 0.0254, math.pi / 2, 205e9)
    assert len(found.remarks) == 2
    assert all("extrapolated" in remark for remark in found.remarks)


def test_a_brace_as_wide_as_its_chord_does_not_give_along_itself() -> None:
    assert joint_give(0.03, 0.002, 0.03, math.pi / 2, 205e9).axial_stiffness == math.inf


def test_a_thicker_chord_gives_less_and_a_wider_brace_gives_less() -> None:
    def give(wall: float, brace: float) -> float:
        return joint_give(0.04, wall, brace, 1.0, 205e9).in_plane

    assert give(0.003, 0.025) < give(0.002, 0.025)
    assert give(0.002, 0.030) < give(0.002, 0.025)


@pytest.mark.parametrize(
    ("chord", "wall", "brace", "angle"),
    [(0.03, 0.002, 0.04, 1.0), (0.03, 0.02, 0.02, 1.0), (0.03, 0.002, 0.02, 0.0),
     (0.03, 0.002, math.nan, 1.0)],
)  # fmt: skip
def test_impossible_joints_are_refused(
    chord: float, wall: float, brace: float, angle: float
) -> None:
    with pytest.raises(InputError):
        joint_give(chord, wall, brace, angle, 205e9)
