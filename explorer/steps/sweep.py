"""Sweep: choose what varies, try thousands of frames, watch, stop and go on."""

from __future__ import annotations

import streamlit as st

from explorer import furniture, results, state, sweeping, varying_form, words
from explorer.charts import front_chart, front_in_words
from sweeps import jobs
from sweeps.evaluate import OK

here = state.bench()
study, units = here.study, here.shown_units
with furniture.telling():
    run = results.run_on_bench()
job = sweeping.active(run)
same = run is not None and sweeping.same_sweep(run, study)
rows = study.design().rows if study.inputs else 0
failed = 0
if run is not None and job is None and run.rows_solved:
    failed = int((results.table(run)["status"] != OK).sum())

furniture.opening(
    "Sweep",
    words.sweep_opening(study, rows, run, same=same, failed=failed, active=job is not None),
)
sweeping.furnish_trouble()

if run is not None and job is not None:
    sweeping.watch(run)
elif run is not None:
    ended = jobs.find(run.folder)
    if ended is not None and ended.progress.message:
        st.error(words.plain(ended.progress.message))
    if run.rows_solved:
        solved, best = results.solved(run), results.front_of(run)
        furniture.chart(
            front_chart(solved, best.rows, units=units, dark=furniture.dark(), height=360),
            front_in_words(solved, best.rows, units=units),
        )  # fmt: skip

ready = run is not None and run.complete and job is None
settings = st.expander("What varies, and how many frames", expanded=not (ready and same))
what, how = settings.columns([2.8, 1], gap="large")
with what:
    st.subheader("What varies", anchor=False)
    varying_form.ranges(study, units)
    varying_form.choices(study)
    varying_form.add_input(study)

if failed and run is not None:
    sweeping.failed_frames(run)
sweeping.earlier()
if ready:
    furniture.next_step("drivers", "See what drives it",
                        "Which of these inputs moves stiffness and mass.")  # fmt: skip
with how:  # last, because it tries a few frames to know how long all will take
    st.subheader("How many", anchor=False)
    sweeping.run_panel(study, run, job is not None, same)
