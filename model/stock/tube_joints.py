"""How much a welded joint of round tubes gives where a brace meets the wall of a chord.

Local joint flexibility of T and Y joints after H. Fessler, P. B. Mockford and J. J. Webster,
"Parametric equations for the flexibility matrices of single brace tubular joints in offshore
structures", Proceedings of the Institution of Civil Engineers 81 (1986); the axial and in-plane
terms confirmed against the source of a general-purpose library, the out-of-plane term and the
range from memory. Tubes of vehicle frames often lie outside the range; the answer is then an
extrapolation and says so.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from model.errors import InputError

BETA_RANGE = (0.33, 0.76)
"""Brace diameter over chord diameter for which the formulas were fitted."""
GAMMA_RANGE = (10.0, 20.0)
"""Chord radius over chord wall for which the formulas were fitted."""
ANGLE_RANGE = (30.0, 90.0)
"""Angle between brace and chord [deg] for which the formulas were fitted."""


@dataclass(frozen=True)
class JointGive:
    """Flexibility of one brace end.

    axial [m/N]; in_plane, out_of_plane [rad/(N·m)].
    remarks : where the joint lies outside the range of the formulas, in words.
    """

    axial: float
    in_plane: float
    out_of_plane: float
    remarks: tuple[str, ...]

    @property
    def rotation_stiffness(self) -> float:
        """Stiffness against turning [N·m/rad], the mean of both planes' flexibilities."""
        return 2 / (self.in_plane + self.out_of_plane)

    @property
    def axial_stiffness(self) -> float:
        """Stiffness along the brace [N/m]; infinite for a brace as wide as its chord."""
        return math.inf if self.axial == 0 else 1 / self.axial


def joint_give(
    chord_outside: float, chord_wall: float, brace_outside: float, angle: float, E: float
) -> JointGive:
    """Give of a round brace welded to a round chord.

    chord_outside, chord_wall, brace_outside : [m]. angle : between their axes [rad].
    E : of the chord [Pa].

    Raises
    ------
    InputError
        A brace wider than its chord, or an angle outside 0 to 90 degrees.
    """
    if not 0 < chord_wall <= chord_outside / 2:
        raise InputError("chord_wall", f"{chord_wall * 1e3:g} mm", "stay within the chord")
    beta = brace_outside / chord_outside
    if not 0 < beta <= 1:
        raise InputError(
            "brace_outside", f"{brace_outside * 1e3:g} mm", "use at most the chord's outside"
        )
    if not 0 < angle <= math.pi / 2 + 1e-9:
        raise InputError("angle", f"{math.degrees(angle):g} deg", "use more than 0, at most 90")
    gamma = chord_outside / (2 * chord_wall)
    sine = math.sin(angle)
    along = 1.95 * gamma**2.15 * (1 - beta) ** 1.3 * sine**2.19 / (E * chord_outside)
    per = E * chord_outside**3
    return JointGive(
        along,
        134 * gamma**1.73 * math.exp(-4.52 * beta) * sine**1.22 / per,
        85.5 * gamma**2.2 * math.exp(-3.85 * beta) * sine**2.16 / per,
        _remarks(beta, gamma, math.degrees(angle)),
    )


def _remarks(beta: float, gamma: float, angle: float) -> tuple[str, ...]:
    said = []
    for value, (low, high), words in (
        (beta, BETA_RANGE, "brace over chord diameter"),
        (gamma, GAMMA_RANGE, "chord radius over wall"),
        (angle, ANGLE_RANGE, "angle in degrees"),
    ):
        if not low - 1e-9 <= value <= high + 1e-9:
            said.append(f"{words} {value:.3g} is outside {low:g} to {high:g}: extrapolated")
    return tuple(said)
