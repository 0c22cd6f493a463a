"""Front: mass against twist stiffness of every frame; pick the one to build."""

from __future__ import annotations

import streamlit as st

from explorer import choosing, furniture, results, state, words
from explorer.charts import MODES, frames_clicked, front_chart, front_in_words

here = state.bench()
units, dark = here.shown_units, furniture.dark()
with furniture.telling():
    run = results.run_on_bench()
if run is None or not run.rows_solved:
    furniture.opening("Front", "Mass against twist stiffness shows once a sweep is run.")
    furniture.empty("No sweep yet", "Go and run one", "sweep")
    st.stop()

with furniture.telling():
    rows, best = results.solved(run), results.front_of(run)
furniture.opening("Front", words.front_opening(run, rows, best, here.target, units))
colour = choosing.controls(run, rows)


def take() -> None:
    clicked = frames_clicked(st.session_state["front"])
    if clicked:
        state.pick(clicked[-1])


furniture.chart(
    front_chart(rows, best.rows, here.picked, target=here.target, colour=colour,
                colour_words=choosing.label_of(run, colour), units=units, dark=dark),
    front_in_words(rows, best.rows, here.picked, target=here.target, units=units),
    key="front",
    on_select=take,
    selection_mode=list(MODES),
)  # fmt: skip
st.caption("Click a frame to pick it. Ctrl and wheel zoom, shift and drag move, double click "
           "shows all.")  # fmt: skip
choosing.picked(run, rows, best)
choosing.front_table(run, best, here.target)
