"""What-ifs by low-rank update against solving the changed frame again."""

from dataclasses import replace

import numpy as np
import pytest

from model.frame.batch import Batch
from model.frame.layout import with_span
from model.frame.variants import Choice, every_brace, variants
from model.results.detail import examine
from model.results.twist import answers
from model.results.whatif import Change, pair_changes, ranked, single_changes, what_if
from tests.model.frame.layouts import box, random_layout

FACES = ("floor", "top", "left", "right")


def braceable(bracing: str) -> Batch:
    """The box with every missing diagonal as an absent member."""
    choice = Choice((bracing, "cross"), np.array([0]))
    batches, _ = variants(
        box(bracing=bracing), {f"span.middle.{face}": choice for face in FACES}, 1
    )
    return batches[0]


def solved_again(batch: Batch, change: Change) -> float:
    present = batch.present.copy()
    present[0, list(change.add)] = True
    present[0, list(change.remove)] = False
    return float(answers(replace(batch, present=present), 1).twist[0])


@pytest.mark.parametrize("bracing", ["open", "single"])
def test_every_single_and_mirrored_change_equals_solving_again(bracing: str) -> None:
    batch = braceable(bracing)
    changes = [*single_changes(batch), *pair_changes(batch)]
    found = what_if(batch, changes)
    for change, twist in zip(changes, found.twist, strict=True):
        again = solved_again(batch, change)
        if np.isnan(again):
            assert twist == 0.0
        else:
            assert twist == pytest.approx(again, rel=1e-9)


def test_removing_an_end_ring_diagonal_pair_of_rails_leaves_a_mechanism_or_a_softer_frame() -> None:
    batch = braceable("open")
    found = what_if(batch, [c for c in single_changes(batch) if c.remove])
    assert (found.gain <= 1e-6).all()
    assert (found.mass < 0).all()


def test_gains_grow_until_the_last_face_closes() -> None:
    """Adding whole faces to the open box: one and two faces do little, four do everything."""
    batch = braceable("open")
    names = batch.skeleton.member_names
    odd = [" brace", " counter brace"]

    def alternating(face: str, first: int = 0) -> list[int]:
        return [names.index(f"middle {k} {face}{odd[(k - 1 + first) % 2]}") for k in range(1, 9)]

    # one way round the box, as in the check frame: up on one side and down on the other
    floor, top = alternating("floor"), alternating("top", 1)
    sides = alternating("right") + alternating("left", 1)
    sets = [floor, floor + top, floor + top + sides]
    found = what_if(batch, [Change(str(k), add=tuple(s)) for k, s in enumerate(sets)])
    assert found.twist == pytest.approx([581.462, 1080.208, 13787.385], abs=5e-4)  # prototype
    singles = what_if(batch, [Change(str(m), add=(m,)) for m in sets[2]])
    assert singles.gain.sum() < 0.1 * found.gain[2]


@pytest.mark.parametrize("seed", range(8))
def test_every_ranked_change_of_a_random_layout_equals_solving_again(seed: int) -> None:
    layout = random_layout(np.random.default_rng(seed))
    batch, _ = every_brace(layout)
    found = ranked(layout)
    assert len({(c.add, c.remove) for c in found.changes}) == len(found.changes)
    for k in range(0, len(found.changes), 7):
        again = solved_again(batch, found.changes[k])
        # taking away a rail that carries nearly everything costs digits: up to 1e-8 seen
        assert found.twist[k] == pytest.approx(0.0 if np.isnan(again) else again, rel=1e-6)


def test_a_change_of_bracing_applied_to_the_layout_gives_the_promised_stiffness() -> None:
    layout = box(bracing="single")
    found = ranked(layout)
    k = next(k for k, c in enumerate(found.changes) if c.name == "middle top: cross")
    assert examine(with_span(layout, "middle", top="cross")).twist == pytest.approx(
        found.twist[k], rel=1e-9
    )


def test_additions_lead_and_the_best_gain_for_each_kilogram_is_first() -> None:
    found = ranked(box(bracing="single"))
    kinds = [c.kind for c, twist in zip(found.changes, found.twist, strict=True) if twist > 0]
    assert kinds == sorted(kinds)  # add, exchange, remove
    adds = found.gain_per_kg[: kinds.count("add")]
    assert (np.diff(adds) <= 1e-9).all()
