"""A small finished run for the tests of this folder."""

from dataclasses import replace
from pathlib import Path

import pytest

from sweeps import jobs, runs
from sweeps.study import Study
from sweeps.study_file import read_study


@pytest.fixture
def small_study() -> Study:
    """The orchard truck with four inputs and 16 base samples."""
    study = read_study("orchard-truck")
    kept = ("wheelbase_mm", "span.battery bay.bays", "span.battery bay.floor",
            "tube.lower rails.wall_mm")  # fmt: skip
    inputs = tuple(i for i in study.inputs if i.path in kept)
    return replace(study, inputs=inputs, samples=16)


@pytest.fixture
def small_run(small_study: Study, tmp_path: Path) -> runs.Run:
    run = runs.prepare(small_study, tmp_path / "run")
    jobs.carry_out(run)
    return run
