"""Drivers: which input moves a result, how surely, and how the result goes along it."""

from __future__ import annotations

import streamlit as st

from explorer import driving, furniture, results, state, words
from explorer.charts import (
    convergence_chart,
    convergence_in_words,
    drivers_chart,
    drivers_in_words,
    input_clicked,
    response_chart,
    response_in_words,
)
from sweeps.outputs import OUTPUTS

here = state.bench()
units, dark = here.shown_units, furniture.dark()
with furniture.telling():
    run = results.run_on_bench()
if run is None:
    furniture.opening("Drivers", "What moves stiffness and mass shows once a sweep is run.")
    furniture.empty("No sweep yet", "Go and run one", "sweep")
    st.stop()
if not run.complete:
    furniture.opening("Drivers", words.incomplete(run))
    furniture.empty("The sweep is not complete", "Go on with it", "sweep")
    st.stop()

with furniture.telling():
    found = results.drivers_of(run, here.output)
furniture.opening("Drivers", words.drivers_opening(found))
driving.choose_output()
table = driving.for_charts(found.table)
paths = [str(path) for path in table["input"]]
given = next((path for path in paths if path == here.given), paths[0])
asked = run.study.input(given)

bars, along = st.columns([1.25, 1], gap="large")
with bars:

    def take() -> None:
        state.set_given(input_clicked(st.session_state["drivers"]) or here.given)

    furniture.chart(
        drivers_chart(table, picked=given, dark=dark),
        drivers_in_words(table, OUTPUTS[here.output].label),
        key="drivers",
        on_select=take,
        selection_mode="input",
    )
with along:
    driving.choose_given(dict(zip(paths, table["label"], strict=True)), given)
    rows = results.solved(run)
    said = response_in_words(rows, given, here.output, label=asked.label, units=units)
    furniture.chart(
        response_chart(rows, given, here.output, label=asked.label, units=units, dark=dark), said
    )
    st.caption(words.plain(said))

pairs = driving.telling_pairs(found)
if len(pairs):
    st.markdown(words.pairs(pairs))
left, right = st.columns(2)
with left:
    furniture.figures_behind(driving.shown_table(found), "All inputs in figures",
                             column_config=driving.SHARES)  # fmt: skip
with right, st.expander("How settled the ranking is"):
    history = driving.for_charts(found.history.assign(input=found.history["label"]))
    furniture.chart(convergence_chart(history, dark=dark), convergence_in_words(history))
    st.caption(words.plain(convergence_in_words(history)))
if "add samples" in found.verdict and st.button("Add samples", icon=":material/add_circle:"):
    furniture.go("sweep")
furniture.next_step("front", "See mass against twist stiffness",
                    "Find the frames that no other frame beats.")  # fmt: skip
