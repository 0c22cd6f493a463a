"""Frame: arrange the frame, and see at once what it weighs and how stiff it is."""

from __future__ import annotations

import streamlit as st

from explorer import frame_form, furniture, looks, state, words
from explorer.charts import profile_chart, profile_in_words
from explorer.view3d import frame_view

here = state.bench()
layout, units = here.study.layout, here.shown_units
start = state.original()

detail, loose = looks.examined(layout)
before = looks.examined(start.layout)[0] if start is not None else None
changes = words.changes_between(layout, start.layout) if start is not None else None
furniture.opening(
    "Frame",
    words.frame_opening(detail, changes, units)
    if detail is not None
    else f"{words.plain(layout.name)}: this frame does not hold together yet.",
)
if here.fault:
    furniture.problem(here.fault)
if loose:
    furniture.problem(loose)
if detail is not None:
    looks.key_numbers(detail, before, units)

picture, editor = st.columns([1.3, 1], gap="medium")
drawing = looks.drawing(layout, detail)
with picture:
    member = frame_view(drawing, key="frame view", height=460, units=units, legend=False)
    if detail is not None:
        profile, stations = looks.profile_tables(detail, units)
        furniture.chart(
            profile_chart(profile, stations, couple_Nm=looks.couple(units), units=units,
                          dark=furniture.dark(), height=230),
            profile_in_words(profile, stations, units),
        )  # fmt: skip
frame_form.open_tube_of(drawing, layout, member)
with editor:
    frame_form.show(layout, units)

if detail is not None:
    st.markdown(words.frame_verdict(detail, units))
    furniture.figures_behind(looks.group_table(detail, units), "Tubes by group",
                             column_config=looks.group_columns(units))  # fmt: skip
furniture.next_step("sweep", "Sweep this frame", "Try thousands of variants of it.")
