"""Twist stiffness of every starting vehicle against a general-purpose library.

OpenSeesPy, ElasticTimoshenkoBeam: the same member theory, so only rounding may differ. The twist
angle is read there from the joint displacements of the balanced twist couple.
"""

from __future__ import annotations

import numpy as np
import pytest

from model.frame.variants import one
from model.results.detail import examine
from model.solver.cases import TWIST, gauge, twist_force
from model.solver.structure import frame_of
from sweeps.catalogue import catalogue
from sweeps.study_file import read_study
from tests.reference.other_solvers import solve_with_opensees


@pytest.mark.parametrize("vehicle", sorted(catalogue().vehicles))
def test_twist_stiffness_of_a_starting_vehicle_agrees_with_opensees(opensees, vehicle):
    layout = read_study(vehicle).layout
    batch = one(layout)
    held = np.zeros((len(batch.skeleton.joints), 6), dtype=bool)
    held[tuple(gauge(batch.skeleton).T)] = True
    track = None if batch.track is None else batch.track[0]
    force = twist_force(batch.skeleton, batch.xyz[0], track)
    frame = frame_of(batch, held, ("twist",), force[None], 0)
    moved, _ = solve_with_opensees(opensees, frame)
    theirs = np.pi / 180 / float((force * moved[TWIST]).sum())
    ours = examine(layout).twist
    print(f"{vehicle}: relative difference {ours / theirs - 1:.1e}")
    assert ours == pytest.approx(theirs, rel=1e-9)
