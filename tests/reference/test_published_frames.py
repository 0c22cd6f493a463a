"""Frames, grillages and trusses printed in textbooks.

Each file under ``data/frames`` holds one frame, its source, the printed answers with half of
the last printed digit as tolerance, and the same answers to nine digits from two independent
solvers (a dense direct-stiffness program and OpenSeesPy).
"""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

from model.solver.frame_file import solve_file

FILES = sorted((Path(__file__).parent / "data" / "frames").glob("*.json"))
PARTS = {"translation_or_force": slice(0, 3), "rotation_or_moment": slice(3, 6)}


@pytest.fixture(params=FILES, ids=[file.stem for file in FILES])
def example(request):
    data = json.loads(request.param.read_text())
    return data, solve_file(data["frame"])["cases"][data["case"]]


def numbers(row: list[float | None]) -> np.ndarray:
    return np.array([np.nan if v is None else v for v in row])


def test_printed_answers_are_met_to_their_last_digit(example):
    data, got = example
    for kind, rows in data["published"].items():
        for node, row in rows.items():
            printed, ours = numbers(row), np.array(got[kind][node])
            for name, part in PARTS.items():
                allowed = data["published_absolute_tolerance"][kind][name]
                off = np.nan_to_num(np.abs(ours - printed)[part])
                assert off.max() <= allowed, f"{kind} {node}: {ours[part]} against {printed[part]}"


def test_recomputed_answers_are_met_to_eight_digits(example):
    data, got = example
    worst = 0.0
    for kind in ("displacements", "reactions"):
        rows = data["recomputed"].get(kind, {})
        for part in PARTS.values():
            largest = max((np.abs(row[part]).max() for row in rows.values()), default=0.0)
            for node, row in rows.items():
                ours = np.array(got[kind].get(node, np.zeros(6)))
                off = np.abs(ours[part] - np.array(row[part])).max()
                worst = max(worst, off / largest if largest else off)
    rows = data["recomputed"]["end_forces"]
    for part in PARTS.values():
        pairs = [
            (np.array(got["end_forces"][m][end][part]), np.array(row[end][part]))
            for m, row in rows.items()
            for end in ("from", "to")
        ]
        largest = max(np.abs(theirs).max() for _, theirs in pairs)
        off = max(np.abs(ours - theirs).max() for ours, theirs in pairs)
        # a pin-jointed truss has no moments at all: compare those as they are
        worst = max(worst, off / largest if largest else off)
    print(f"{data['id']}: worst relative difference {worst:.1e}")
    assert worst < 1e-8, f"worst relative difference {worst:.1e}"  # nine digits are kept
