"""Candidate: one frame in full, what would better it, and everything to take away."""

from __future__ import annotations

import streamlit as st

from explorer import detailing, furniture, looks, results, state, words
from explorer.charts import energy_bars, energy_in_words, profile_chart, profile_in_words
from explorer.detail_drawing import KINDS, drawing_of_detail
from explorer.meanings import CAUTIONS
from explorer.view3d import frame_view
from model.errors import DesignError
from sweeps.front import distance

here = state.bench()
units, dark = here.shown_units, furniture.dark()
with furniture.telling():
    run = results.run_on_bench()
if run is None or here.candidate is None:
    furniture.opening("Candidate", "The frame you pick on the front is detailed here.")
    page, advice = ("front", "Pick one") if run is not None else ("sweep", "Run a sweep first")
    furniture.empty("No frame picked yet", advice, page)
    st.stop()

frame = here.candidate
try:
    plain = results.detail(run, frame)
    detail = results.detail(run, frame, here.braced, here.snapped)
except DesignError as fault:
    furniture.opening("Candidate", f"Frame {frame:,} cannot be detailed.")
    furniture.problem(fault)
    state.brace({})
    furniture.next_step("front", "Pick another frame")
    st.stop()

changed = bool(here.braced) or here.snapped
off = distance(results.front_of(run), detailing.as_row(detail))
furniture.opening("Candidate", words.candidate_opening(detail, frame, off, changed, units))
start = looks.examined(run.study.layout)[0]
looks.key_numbers(detail, plain if changed else start, units)
with st.container(horizontal=True, vertical_alignment="center"):
    colour = detailing.colour_by()
    detailing.stock_switch(run, frame, detail)
    st.caption("Changes against the frame of the sweep." if changed
               else "Changes against the frame the sweep started from.")  # fmt: skip

picture, chosen = st.columns([1.3, 1], gap="medium")
with picture:
    frame_view(drawing_of_detail(detail, f"Frame {frame:,}"), key="candidate view", height=470,
               colour=colour, units=units)  # fmt: skip
with chosen:
    st.dataframe(detailing.inputs_table(run, frame, units), hide_index=True, width="stretch",
                 height=470, column_config=detailing.INPUT_COLUMNS)  # fmt: skip
st.markdown(words.frame_verdict(detail, units))
groups, along = st.columns(2, gap="large")
with groups:
    table = looks.energy_table(detail)
    furniture.chart(energy_bars(table, kinds=KINDS, dark=dark), energy_in_words(table))
with along:
    profile, stations = looks.profile_tables(detail, units)
    furniture.chart(
        profile_chart(profile, stations, couple_Nm=looks.couple(units), units=units, dark=dark,
                      height=260),
        profile_in_words(profile, stations, units),
    )  # fmt: skip

st.subheader("What if", anchor=False)
detailing.what_if(run, frame, units)

st.subheader("To build it", anchor=False)
detailing.to_build(detail)
detailing.downloads(run, frame, detail, units)

st.subheader("Before you build", anchor=False)
st.markdown("\n".join(f"- {line}" for line in (detailing.SAFETY, *CAUTIONS)))
st.divider()
with st.container(horizontal=True, vertical_alignment="center"):
    if st.button("Go on from this frame", type="primary", icon=":material/replay:", key="next"):
        detailing.go_on_from(run, detail)
        furniture.go("frame")
    st.markdown("Makes it the starting frame of the next round.")
