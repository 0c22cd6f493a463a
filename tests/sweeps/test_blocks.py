"""A block that is damaged, or of another run, is never believed: it is named and set aside."""

import json
import shutil
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from sweeps import jobs, runs
from sweeps.blocks import BlockFault, read_block, write_block
from sweeps.candidate import row_of
from sweeps.drivers import drivers
from sweeps.front import front
from sweeps.study import Study

OWNER = "run 0123456789abcdef, frames 0 to 39"


@pytest.fixture
def run(small_study: Study, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> runs.Run:
    """A finished run of four blocks."""
    monkeypatch.setattr(runs, "BLOCK_ROWS", 40)
    made = runs.prepare(small_study, tmp_path / "run")
    jobs.carry_out(made)
    assert len(made.blocks) == 4
    return made


def damage(path: Path) -> None:
    data = bytearray(path.read_bytes())
    data[len(data) // 3] ^= 0x10
    path.write_bytes(data)


@pytest.fixture(scope="module")
def written(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, bytes]:
    random = np.random.default_rng(1)
    rows = pd.DataFrame(
        {
            "frame": np.arange(40),
            "span.cab.floor": random.choice(["open", "cross"], 40),
            "mass_kg": np.where(random.random(40) < 0.1, np.nan, random.random(40)),
        }
    )
    path = tmp_path_factory.mktemp("blocks") / "00000.parquet"
    write_block(path, rows, OWNER)
    pd.testing.assert_frame_equal(read_block(path, OWNER), rows, check_exact=True)
    pd.testing.assert_frame_equal(pd.read_parquet(path), rows, check_exact=True)
    return path, path.read_bytes()


@given(st.data())
def test_no_bit_may_turn_unnoticed(written: tuple[Path, bytes], data: st.DataObject) -> None:
    path, good = written
    spoilt = bytearray(good)
    spoilt[data.draw(st.integers(0, len(good) - 1))] ^= 1 << data.draw(st.integers(0, 7))
    path.write_bytes(spoilt)
    with pytest.raises(BlockFault, match="damaged"):
        read_block(path, OWNER)
    path.write_bytes(good[: data.draw(st.integers(0, len(good) - 1))])
    with pytest.raises(BlockFault, match="damaged"):
        read_block(path, OWNER)
    path.write_bytes(good)
    read_block(path, OWNER)


def test_rows_of_another_run_or_another_place_are_not_taken(
    run: runs.Run, small_study: Study, tmp_path: Path
) -> None:
    other = runs.prepare(replace(small_study, seed=2), tmp_path / "other")
    jobs.carry_out(other)
    good = run.table()
    for source in (other.path_of(1), run.path_of(2)):
        shutil.copy(source, run.path_of(1))
        with pytest.raises(runs.RunError, match=r"00001.parquet: of another run; it is set aside"):
            run.table()
        assert run.missing() == [1]
        jobs.carry_out(run)
        pd.testing.assert_frame_equal(run.table(), good, check_exact=True)
    assert len(list(run.folder.glob("blocks/00001.parquet.set-aside-*"))) == 2


@pytest.mark.parametrize(
    "ask", [drivers, lambda run: front(run.table()), lambda run: row_of(run, 57)]
)
def test_whoever_asks_is_told_of_a_damaged_block_and_how_to_mend_it(run: runs.Run, ask) -> None:
    damage(run.path_of(1))
    with pytest.raises(runs.RunError, match=r"damaged; it is set aside as .*resume the sweep"):
        ask(run)
    assert not run.complete
    assert jobs.carry_out(run).state == jobs.DONE
    ask(run)


def test_resuming_says_what_it_set_aside(run: runs.Run) -> None:
    good = run.table()
    damage(run.path_of(2))
    ended = jobs.carry_out(run)
    assert ended.state == jobs.DONE
    assert ended.message == (
        "00002.parquet was damaged and is set aside as 00002.parquet.set-aside-1"
    )
    pd.testing.assert_frame_equal(run.table(), good, check_exact=True)
    assert jobs.carry_out(run).message == ""


def test_a_column_that_was_not_solved_for_is_named_and_the_block_stays(run: runs.Run) -> None:
    with pytest.raises(runs.RunError, match="lacks one of frame, beauty"):
        run.table(["frame", "beauty"])
    assert run.complete


def test_what_a_start_cut_short_left_behind_is_no_hindrance(
    small_study: Study, tmp_path: Path
) -> None:
    folder = tmp_path / "run"
    runs.prepare(small_study, folder)
    (folder / "run.json").rename(folder / "run.json.part123")
    again = runs.prepare(small_study, folder)
    assert jobs.carry_out(again).state == jobs.DONE
    assert sorted(p.name for p in folder.iterdir()) == ["blocks", "run.json", "study.toml"]
    facts = json.loads((folder / "run.json").read_text())
    (folder / "run.json").unlink()
    with pytest.raises(runs.RunError, match="other files"):  # blocks of a lost run
        runs.prepare(small_study, folder)
    assert facts["format"] == runs.FORMAT
    (tmp_path / "mine").mkdir()
    (tmp_path / "mine/study.toml").write_text("# my notes")
    with pytest.raises(runs.RunError, match="other files"):
        runs.prepare(small_study, tmp_path / "mine")
    assert (tmp_path / "mine/study.toml").read_text() == "# my notes"


def test_a_file_where_the_folder_should_be_is_named(small_study: Study, tmp_path: Path) -> None:
    (tmp_path / "run").write_text("a letter")
    with pytest.raises(runs.RunError, match="run: is a file; choose a new or empty folder"):
        runs.prepare(small_study, tmp_path / "run")
