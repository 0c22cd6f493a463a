"""Frame: arrange the frame, and see at once what it weighs and how stiff it is."""

from __future__ import annotations

import streamlit as st

from explorer import form, furniture, looks, state, words
from explorer.charts import profile_chart, profile_in_words
from explorer.view3d import frame_view
from model.frame.vocabulary import ENTRIES
from sweeps.study import Field, fields

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
)  # fmt: skip
if here.fault:
    furniture.problem(here.fault)
if loose:
    furniture.problem(loose)
if detail is not None:
    looks.key_numbers(detail, before, units)

picture, editor = st.columns([1.3, 1], gap="medium")
with picture:
    picked = frame_view(
        looks.drawing(layout, detail), key="frame view", height=460, units=units, legend=False
    )
    if detail is not None:
        profile, stations = looks.profile_tables(detail, units)
        said = profile_in_words(profile, stations, units)
        furniture.chart(
            profile_chart(profile, stations, couple_Nm=looks.couple(units), units=units,
                          dark=furniture.dark(), height=230),
            said,
        )  # fmt: skip

PLACES = ("Axles", "Stations", "Bracing", "Tubes", "Equipment")


def of_place(place: str, owner: str = "") -> list[Field]:
    return [f for f in fields(layout) if f.place == place and owner in ("", f.owner)]


def which(names: list[str], key: str) -> str:
    """The one of several things to edit."""
    return st.pills("Which", names, default=names[0], required=True, key=key,
                    label_visibility="collapsed", format_func=words.plain, wrap=True)  # fmt: skip


def two_by_two(found: list[Field]) -> None:
    for first in range(0, len(found), 2):
        for field, column in zip(found[first : first + 2], st.columns(2), strict=False):
            with column:
                label = form.label_of(field)
                quantity = "length" if field.unit == "mm" else "none"
                if field.kind == "number":
                    form.number(field.path, label, field.value, quantity)
                elif field.kind == "count":
                    form.whole(field.path, label, field.value)
                else:
                    form.bracing(field, label)


with editor:
    place = st.segmented_control("What to change", PLACES, default=PLACES[0], required=True,
                                 key="place", width="stretch", wrap=True)  # fmt: skip
    if place == "Axles":
        two_by_two(of_place("vehicle"))
        rails = {"low": "Lower rails", "high": "Upper rails"}
        for column, end in zip(st.columns(2), ("front", "rear"), strict=True):
            with column:
                path = f"{end}_mount"
                form.choice(path, f"{end.capitalize()} springs act on", list(rails),
                            getattr(layout, path), lambda name: rails[name])  # fmt: skip
        form.choice("entry", "The twist comes in", ENTRIES, layout.entry,
                    lambda name: {"spring mounts": "at the spring mounts alone",
                                  "linkage": "through the wheel linkages"}[name])  # fmt: skip
    elif place == "Stations":
        name = which([s.name for s in layout.stations] + [h.name for h in layout.hoops], "station")
        found = of_place("station", name) or of_place("hoop", name)
        two_by_two([f for f in found if f.kind != "bracing"])
    elif place == "Bracing":
        spans = [s.name for s in layout.spans]
        rings = [f for f in fields(layout) if f.path.endswith(".ring")]
        name = which([*spans, "rings"] if rings else spans, "span")
        if name == "rings" and rings:
            for ring in rings:
                form.bracing(ring, f"Ring at {words.plain(ring.owner)}")
        else:
            for field in of_place("span", name):
                if field.kind == "count":
                    form.whole(field.path, "Bays", field.value)
                else:
                    form.bracing(field, form.label_of(field))
    elif place == "Tubes":
        name = which(list(layout.tubes), "group")
        form.tube(name)
    else:
        unit = units.unit("length")
        st.caption("Loads the frame but does not stiffen it. "
                   f"Places in {unit} from the front axle, the middle and the ground.")  # fmt: skip
        form.masses(units)
    with st.container(horizontal=True):
        st.button("Take back", icon=":material/undo:", disabled=not here.past,
                  on_click=state.step_back)  # fmt: skip
        st.button("Start over", icon=":material/restart_alt:", disabled=here.source == here.vehicle,
                  on_click=state.choose, args=(here.vehicle,))  # fmt: skip

if detail is not None:
    st.markdown(words.frame_verdict(detail, units))
    furniture.figures_behind(looks.group_table(detail, units), "Tubes by group",
                             column_config=looks.group_columns(units))  # fmt: skip
furniture.next_step("sweep", "Sweep this frame", "Try thousands of variants of it.")
