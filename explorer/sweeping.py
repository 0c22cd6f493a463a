"""A sweep on its page: how many frames, run, watch, stop and go on; earlier sweeps."""

from __future__ import annotations

import datetime
from dataclasses import replace

import pandas as pd
import streamlit as st

from explorer import furniture, results, state, words
from explorer.numbers import count
from explorer.units import METRIC
from explorer.varying_form import guarded
from sweeps import jobs
from sweeps.failures import failures
from sweeps.runs import Run, RunError, digest, prepare
from sweeps.study import Study

SAMPLES = tuple(2**k for k in range(5, 17))
"""Base samples that are offered."""
LOOK_AGAIN = 0.5
"""Seconds between two looks at a sweep under way."""


def same_sweep(run: Run, study: Study) -> bool:
    """Whether a run is of this very study, whatever the number of samples."""
    return bool(run.facts().get("digest") == digest(study, run.second_order))


def start(study: Study, run: Run | None) -> None:
    """Start a sweep; one of the same study goes on in its folder and keeps what is solved."""
    begun: Run | None = None
    if run is not None and same_sweep(run, study):
        try:
            begun = prepare(study, run.folder, run.second_order)
        except RunError:  # too few samples to build on: a new sweep is as quick
            begun = None
    if begun is None:
        begun = prepare(study, state.run_folder(_new_name(study)))
    jobs.start(begun)
    state.use_run(begun.name)


def _new_name(study: Study) -> str:
    """A name for a new run that no folder has yet."""
    stem = f"{words.file_name(study.name)}-{datetime.datetime.now():%Y%m%d-%H%M%S}"
    names = (stem, *(f"{stem}-{number}" for number in range(2, 1000)))
    return next(name for name in names if not state.run_folder(name).exists())


def resume(run: Run) -> None:
    """Go on with a sweep that was stopped."""
    jobs.start(run)


def active(run: Run | None) -> jobs.Job | None:
    """The job that works on a run now, if there is one."""
    job = None if run is None else jobs.find(run.folder)
    return job if job is not None and job.active else None


def watch(run: Run) -> None:
    """Progress of a sweep under way; looks again by itself, and shows the page anew at the end."""

    @st.fragment(run_every=LOOK_AGAIN)
    def look() -> None:
        job = jobs.find(run.folder)
        if job is None or not job.active:
            st.session_state.pop("stopping", None)
            st.rerun(scope="app")
        p = job.progress
        with st.container(border=True):
            st.progress(min(p.share, 1.0), words.progress(p))
            if st.button("Cancel", icon=":material/stop_circle:", key="cancel"):
                job.cancel()
                st.session_state["stopping"] = run.name
            if st.session_state.get("stopping") == run.name:
                st.caption("Stopping as soon as the frames in hand are solved.")
            else:
                st.caption("What is solved stays. You may close the page: the sweep goes on.")

    look()


def failed_frames(run: Run) -> None:
    """The frames without a result, what they were and why."""
    found = failures(results.table(run))
    if len(found):
        with st.expander(f"Frames without a result ({len(found):,})"):
            heads = {given.path: words.titled_input(given, METRIC) for given in run.study.inputs}
            shown = found.rename(columns={"frame": "Frame", "reason": "Why", **heads})
            order = ["Frame", "Why", *(head for head in shown if head not in ("Frame", "Why"))]
            st.dataframe(shown[order], hide_index=True, width="stretch", height=280)


def earlier() -> None:
    """Sweeps on disk; one can be opened."""
    here = state.bench()
    found = results.earlier_runs()
    others = [shelved for shelved in found if shelved.name != here.run]
    if not others:
        return
    now = datetime.datetime.now()
    with st.expander(f"Earlier sweeps ({len(others)})"):
        rows = pd.DataFrame(
            {
                "Vehicle": [s.vehicle for s in others],
                "When": [words.moment(s.when, now) for s in others],
                "Frames": [s.rows for s in others],
                "Inputs": [s.inputs for s in others],
                "State": ["complete" if s.complete else f"{s.solved / s.rows:.0%} solved"
                          for s in others],
            }
        )  # fmt: skip
        event = st.dataframe(
            rows,
            key=f"earlier {here.run} {len(others)}",
            hide_index=True,
            width="stretch",
            on_select="rerun",
            selection_mode="single-row",
            column_config={"Frames": st.column_config.NumberColumn(format="localized")},
        )
        chosen = event["selection"]["rows"]
        if st.button("Open the one ticked", disabled=not chosen):
            open_earlier(others[chosen[0]].name)
            st.rerun()


def open_earlier(name: str) -> None:
    """Put an earlier sweep on the bench, and the study it was made of with it."""
    state.use_run(name)
    run = results.run_on_bench()
    if run is not None and not same_sweep(run, state.bench().study):
        state.put_other(run.study)


def extent(study: Study, trial: results.Trial | None) -> str:
    """How many frames a sweep makes and how long it will take."""
    rows = study.design().rows
    text = f"**{count(rows, 'frame')}**"
    if trial is None:
        return text
    return f"{text}, about {words.duration(rows / trial.rate)}"


def refused_ahead(trial: results.Trial) -> str:
    """What part of the ranges cannot be built, if any."""
    if not trial.failed:
        return ""
    return (
        f"About {trial.failed / trial.frames:.0%} of these frames cannot be solved, most often "
        f"because {words.plain(trial.reason)}. Narrow the ranges, or let them be left out."
    )


def furnish_trouble() -> None:
    """Say what the last edit could not do."""
    here = state.bench()
    if here.trouble is not None:
        furniture.problem(here.trouble)
        here.trouble = None


def run_panel(study: Study, run: Run | None, busy: bool, same: bool) -> None:
    """How many frames, how long, and the one button that fits how things stand."""
    here = state.bench()
    key = f"samples {here.revision}"
    st.select_slider(
        "Base samples",
        sorted({*SAMPLES, study.samples}),
        value=study.samples,
        format_func=lambda n: f"{n:,}",
        key=key,
        on_change=guarded(
            lambda: state.put(replace(study, samples=st.session_state[key]), anew=False)
        ),
        help="The more, the surer the ranking of the drivers. A power of two.",
    )
    if not study.inputs:
        st.warning("Nothing varies yet: tick an input, or add one.")
        return
    ahead = st.empty()  # filled last: trying a few frames takes a moment
    _run_buttons(study, run, same, busy)
    with furniture.telling():
        found = results.trial(study)
    with ahead.container():
        st.markdown(extent(study, found))
        if refused_ahead(found):
            st.caption(refused_ahead(found))


def _run_buttons(study: Study, run: Run | None, same: bool, busy: bool) -> None:
    if busy:
        return
    label, icon = _what_next(study, run, same)
    if label and st.button(label, type="primary", icon=icon, width="stretch"):
        with furniture.telling():
            start(study, run)
        st.rerun()
    if run is not None and same and run.complete:
        double = replace(study, samples=2 * run.study.samples)
        if st.button("Double the samples", icon=":material/add_circle:", width="stretch"):
            with furniture.telling():
                state.put(double)
                start(double, run)
            st.rerun()
        st.caption("Keeps every frame already solved.")


def _what_next(study: Study, run: Run | None, same: bool) -> tuple[str, str]:
    """Label and icon of the button; no label where there is nothing to start."""
    if run is None or not same:
        return "Run the sweep", ":material/play_arrow:"
    if study.samples > run.study.samples:
        return f"Extend to {study.samples:,} samples", ":material/add_circle:"
    if not run.complete:
        return "Resume the sweep", ":material/play_arrow:"
    return "", ""
