"""Random frames against general-purpose libraries, where the theories coincide.

OpenSeesPy: ElasticTimoshenkoBeam and elasticBeamColumn with consistent mass. PyNite: no shear
deformation, pinned ends. Their direct solvers keep about 16 digits less those that the frame's
condition takes (five to seven), hence 1e-8.
"""

from __future__ import annotations

import numpy as np
import pytest

from model.solver import general, vibration
from tests.model.solver.random_frames import random_frame
from tests.reference.other_solvers import (
    frequencies_with_opensees,
    solve_with_opensees,
    solve_with_pynite,
    worst_difference,
)


def compare(frames, solver) -> float:
    worst = 0.0
    for frame in frames:
        answer = general.solve(frame)
        displacement, force = solver(frame)
        worst = max(
            worst,
            worst_difference(answer.displacement, displacement),
            worst_difference(answer.end_force, force),
        )
    return worst


@pytest.mark.parametrize("shear", [True, False])
def test_150_random_frames_agree_with_opensees(opensees, shear):
    frames = (random_frame(seed, shear=shear) for seed in range(150))
    worst = compare(frames, lambda frame: solve_with_opensees(opensees, frame))
    print(f"worst relative difference from OpenSeesPy, shear {shear}: {worst:.1e}")
    assert worst < 1e-8, f"worst relative difference {worst:.1e}"


def test_30_random_frames_with_pinned_ends_agree_with_pynite(pynite):
    frames = (random_frame(seed, shear=False, pins=True) for seed in range(30))
    worst = compare(frames, lambda frame: solve_with_pynite(pynite, frame))
    print(f"worst relative difference from PyNite: {worst:.1e}")
    assert worst < 1e-8, f"worst relative difference {worst:.1e}"


@pytest.mark.parametrize("shear", [True, False])
def test_frequencies_of_random_frames_agree_with_opensees(opensees, shear):
    # round tubes, because the library takes J for the polar second moment of the section; its
    # member without shear has no rotary inertia
    worst = 0.0
    for seed in range(25):
        frame = random_frame(seed, shear=shear, round_tubes=True)
        frame.rotary[:] = shear
        count = min(8, int((~frame.held).sum()))
        expected = frequencies_with_opensees(opensees, frame, count)
        got = vibration.modes(frame, count).frequency
        worst = max(worst, float(np.abs(got / expected - 1).max()))
    print(f"worst relative difference of a frequency from OpenSeesPy, shear {shear}: {worst:.1e}")
    assert worst < 1e-8, f"worst relative difference {worst:.1e}"
