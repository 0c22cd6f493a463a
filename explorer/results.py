"""Results of the run on the bench, worked out once: kept by the run's folder and digest."""

from __future__ import annotations

import datetime
from collections.abc import Mapping
from dataclasses import dataclass
from functools import reduce
from pathlib import Path

import pandas as pd
import streamlit as st

from explorer import drafts, state
from explorer.bench import FIRST_VEHICLE
from explorer.editing import snapped
from model.errors import DesignError
from model.frame.layout import Layout
from model.results.detail import Detail, examine
from model.results.whatif import WhatIf, ranked
from sweeps.candidate import detail_of
from sweeps.catalogue import catalogue
from sweeps.drivers import Drivers, drivers
from sweeps.evaluate import OK, evaluate
from sweeps.front import Front, front
from sweeps.runs import Run, digest, open_run
from sweeps.study import Study, with_value
from sweeps.study_file import read_study


def run_on_bench() -> Run | None:
    """The run on the bench; None where there is none. Raises DesignError where it is spoilt."""
    name = state.bench().run
    if name is None:
        return None
    folder = state.run_folder(name)
    head = folder / "run.json"
    return _opened(str(folder), head.stat().st_mtime if head.exists() else 0.0)


def key_of(run: Run) -> str:
    """What the results of a run depend on, in a few words."""
    return f"{run.folder} {run.facts().get('digest')} {run.study.samples} {run.rows_solved}"


def table(run: Run) -> pd.DataFrame:
    """All solved rows of a run. Do not change it: every page gets the same one."""
    return _table(key_of(run), run)


@st.cache_resource(max_entries=3, show_spinner=False)
def _table(key: str, _run: Run) -> pd.DataFrame:
    return _run.table()


def solved(run: Run) -> pd.DataFrame:
    """The rows of a run that have a result."""
    return _solved(key_of(run), run)


@st.cache_resource(max_entries=3, show_spinner=False)
def _solved(key: str, _run: Run) -> pd.DataFrame:
    rows = table(_run)
    return rows[rows["status"] == OK].reset_index(drop=True)


def drivers_of(run: Run, output: str) -> Drivers:
    """What drives a result of a run."""
    return _drivers(key_of(run), output, run)


@st.cache_resource(max_entries=12, show_spinner=False)
def _drivers(key: str, output: str, _run: Run) -> Drivers:
    return drivers(_run, output, table(_run))


def front_of(run: Run) -> Front:
    """The frames of a run that no other beats in mass and twist stiffness."""
    return _front(key_of(run), run)


@st.cache_resource(max_entries=6, show_spinner=False)
def _front(key: str, _run: Run) -> Front:
    return front(table(_run))


def detail(
    run: Run, frame: int, braced: Mapping[str, str] | None = None, from_stock: bool = False
) -> Detail:
    """One frame of a run looked at closely, with other bracing on some of its faces.

    from_stock : with tubes from stock lists in place of sizes between them.
    """
    found = _detail(key_of(run), frame, run)
    if not braced and not from_stock:
        return found
    layout = with_bracing(found.layout, braced or {})
    return examine(snapped(layout, catalogue().stock) if from_stock else layout)


@st.cache_resource(max_entries=40, show_spinner=False)
def _detail(key: str, frame: int, _run: Run) -> Detail:
    return detail_of(_run, frame)


def with_bracing(layout: Layout, braced: Mapping[str, str]) -> Layout:
    """A layout with other bracing on some of its faces, by path."""
    changed: Layout = reduce(lambda found, one: with_value(found, *one), braced.items(), layout)
    return changed


def what_if(run: Run, frame: int, braced: Mapping[str, str], from_stock: bool) -> WhatIf:
    """What braces added to or taken from a frame of a run would do."""
    changes = f"{sorted(braced.items())} {from_stock}"
    return _what_if(key_of(run), frame, changes, detail(run, frame, braced, from_stock).layout)


@st.cache_resource(max_entries=40, show_spinner=False)
def _what_if(key: str, frame: int, changes: str, _layout: Layout) -> WhatIf:
    return ranked(_layout)


@st.cache_resource(show_spinner="Preparing the solver for this computer. This happens once.")
def ready() -> bool:
    """True once the compiled parts of the solver are loaded or made."""
    study = read_study(FIRST_VEHICLE)
    examine(study.layout)
    return True


# --- before the sweep -----------------------------------------------------------------------


@dataclass(frozen=True)
class Trial:
    """A few frames solved ahead of a sweep. rate : frames a second; failed : of ``frames``."""

    rate: float
    frames: int
    failed: int
    reason: str


def trial(study: Study) -> Trial:
    """How fast frames of a study are solved here, and how many of them cannot be."""
    return _trial(digest(study, True), study)


@st.cache_resource(max_entries=20, show_spinner=False)
def _trial(key: str, _study: Study) -> Trial:
    import time

    unit = _study.design().unit(0, min(16, _study.samples))
    evaluate(_study, unit[:8])  # prepares what is prepared once
    began = time.perf_counter()
    rows = evaluate(_study, unit)
    seconds = time.perf_counter() - began
    bad = rows.loc[rows["status"] != OK, "status"]
    reason = "" if bad.empty else str(bad.mode().iloc[0])
    return Trial(len(rows) / max(seconds, 1e-6), len(rows), len(bad), reason)


# --- earlier runs ---------------------------------------------------------------------------


@dataclass(frozen=True)
class Shelved:
    """A run on disk: its folder's name, vehicle, size, how much is solved, and when."""

    name: str
    vehicle: str
    inputs: int
    samples: int
    rows: int
    solved: int
    when: datetime.datetime

    @property
    def complete(self) -> bool:
        """Whether every frame is solved."""
        return self.solved >= self.rows


def earlier_runs(most: int = 50) -> list[Shelved]:
    """The runs on disk, newest first; folders that cannot be read are left out."""
    heads = (drafts.runs_folder()).glob("*/run.json")
    newest = sorted(heads, key=lambda path: path.stat().st_mtime, reverse=True)[:most]
    return [shelved for path in newest if (shelved := _shelved(path)) is not None]


def _shelved(head: Path) -> Shelved | None:
    try:
        changed = head.stat().st_mtime
        run = _opened(str(head.parent), changed)
    except (DesignError, OSError):
        return None
    when = datetime.datetime.fromtimestamp(changed)
    study = run.study
    return Shelved(run.name, study.name, len(study.inputs), study.samples, run.design.rows,
                   run.rows_solved, when)  # fmt: skip


@st.cache_resource(max_entries=100, show_spinner=False)
def _opened(folder: str, changed: float) -> Run:
    return open_run(folder)
