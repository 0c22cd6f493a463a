"""Generated vehicle frames of every family against general-purpose libraries.

Each random layout (two or four rails, any bracing, hoops, outriggers) is solved three ways: by
the compiled solver of the sweeps, by the solver of single frames, and by the library.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from model.frame.variants import one
from model.results.twist import answers
from model.solver import general
from model.solver.frame_export import default_cases, default_supports
from model.solver.structure import Frame, frame_of
from tests.model.frame.layouts import random_layout
from tests.reference.other_solvers import solve_with_opensees, solve_with_pynite, worst_difference

PER_DEGREE = np.pi / 180


def generated(seed: int, *, shear: bool = True) -> tuple[Frame, float, float]:
    """A frame under twist and bending, and its stiffnesses from the solver of the sweeps."""
    batch = one(random_layout(np.random.default_rng(seed)))
    if not shear:
        batch = replace(batch, rigidity=batch.rigidity * [1, 1, 1, 1, 0, 0])
    answer = answers(batch, threads=1)
    cases = default_cases(batch)
    loads = np.stack(list(cases.values()))
    frame = _used(frame_of(batch, default_supports(batch), tuple(cases), loads))
    return frame, float(answer.twist[0]), float(answer.bend[0])


def _used(frame: Frame) -> Frame:
    """The frame without the joints that no member meets; libraries refuse or mislead there."""
    used = np.unique(frame.members)
    number = np.full(len(frame.joints), -1, dtype=np.int32)
    number[used] = np.arange(len(used))
    return replace(
        frame,
        joints=tuple(frame.joints[j] for j in used),
        xyz=frame.xyz[used],
        members=number[frame.members],
        held=frame.held[used],
        lumps=frame.lumps[used],
        loads=frame.loads[:, used],
    )


def compare(seeds, solver, *, shear: bool) -> tuple[float, float, float]:
    """Worst relative differences: displacements and end forces of one frame; both stiffnesses."""
    single = forces = sweep = 0.0
    for seed in seeds:
        frame, twist, bend = generated(seed, shear=shear)
        displacement, force = solver(frame)
        answer = general.solve(frame)
        single = max(single, worst_difference(answer.displacement, displacement))
        forces = max(forces, worst_difference(answer.end_force, force))
        work = np.einsum("cjk,cjk->c", frame.loads, displacement)
        theirs = PER_DEGREE / work[0], 1e-3 / work[1]
        sweep = max(sweep, abs(twist / theirs[0] - 1), abs(bend / theirs[1] - 1))
    return single, forces, sweep


def report(name: str, worst: tuple[float, float, float]) -> str:
    words = (
        f"{name}: worst relative difference of displacements {worst[0]:.1e}, of end forces "
        f"{worst[1]:.1e}, of the sweeps' stiffnesses {worst[2]:.1e}"
    )
    print(words)
    return words


@pytest.mark.slow
def test_300_generated_frames_agree_with_opensees(opensees):
    worst = compare(range(300), lambda frame: solve_with_opensees(opensees, frame), shear=True)
    assert max(worst) < 1e-8, report("OpenSeesPy", worst)
    report("OpenSeesPy, 300 frames", worst)


@pytest.mark.slow
def test_30_generated_frames_agree_with_pynite(pynite):
    worst = compare(range(30), lambda frame: solve_with_pynite(pynite, frame), shear=False)
    assert max(worst) < 1e-8, report("PyNite", worst)
    report("PyNite, 30 frames", worst)
