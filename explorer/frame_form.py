"""Everything that can be changed about a frame, grouped as the trade groups it."""

from __future__ import annotations

from collections.abc import Sequence

import streamlit as st

from explorer import form, state, words
from explorer.drawing import FrameDrawing
from explorer.editing import without_own_tube
from explorer.units import Units
from model.frame.layout import Hoop, Layout, Span, Station
from model.frame.vocabulary import ENTRIES, FACES, FALLBACK
from sweeps.study import Field, fields

PLACES = ("Axles", "Stations", "Bracing", "Tubes", "Equipment")
RINGS = "rings"
"""Stands among the spans for the rings between them."""

_PLACE, _GROUP, _SEEN = "place", "group", "member seen"
_RAILS = {"low": "Lower rails", "high": "Upper rails"}
_ENTRY_WORDS = {
    "spring mounts": "at the spring mounts alone",
    "linkage": "through the wheel linkages",
}
_RING_MEMBERS = ("bottom", "top", "uprights")


def open_tube_of(drawing: FrameDrawing, layout: Layout, member: str | None) -> None:
    """Open the tube of the member that was just picked in the drawing; call before ``show``."""
    if member is not None and member != st.session_state.get(_SEEN):
        group = drawing.groups[drawing.names.index(member)]
        st.session_state[_PLACE] = "Tubes"
        st.session_state[_GROUP] = layout.tube_group(group)
    st.session_state[_SEEN] = member


def show(layout: Layout, units: Units) -> None:
    """The fields of one place, and the buttons that take changes back."""
    here = state.bench()
    st.session_state.setdefault(_PLACE, PLACES[0])
    place = st.segmented_control("What to change", PLACES, required=True, key=_PLACE,
                                 width="stretch", wrap=True)  # fmt: skip
    known = fields(layout)
    if place == "Axles":
        _axles(layout, known)
    elif place == "Stations":
        _stations(layout, known)
    elif place == "Bracing":
        _bracing(layout, known)
    elif place == "Tubes":
        group = _which(list(layout.tubes), _GROUP)
        form.tube(group)
        _own_tubes(layout, group)
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


def _axles(layout: Layout, known: Sequence[Field]) -> None:
    _two_by_two([f for f in known if f.place == "vehicle"])
    for column, end in zip(st.columns(2), ("front", "rear"), strict=True):
        with column:
            path = f"{end}_mount"
            form.choice(path, f"{end.capitalize()} springs act on", list(_RAILS),
                        getattr(layout, path), lambda name: _RAILS[name])  # fmt: skip
    form.choice("entry", "The twist comes in", ENTRIES, layout.entry,
                lambda name: _ENTRY_WORDS[name])  # fmt: skip


def _stations(layout: Layout, known: Sequence[Field]) -> None:
    names = [s.name for s in layout.stations] + [h.name for h in layout.hoops]
    name = _which(names, "station")
    own = [f for f in known if f.place in ("station", "hoop") and f.owner == name]
    _two_by_two([f for f in own if f.kind != "bracing"])
    for k, station in enumerate(layout.stations):
        if station.name == name:
            _ring(station, tall=layout.tall(k))
    for hoop in layout.hoops:
        if hoop.name == name:
            _hoop(layout, hoop)


def _ring(station: Station, *, tall: bool) -> None:
    path = f"station.{station.name}"
    if not station.outrigger:
        form.number(f"{path}.outrigger_mm", "Width over outriggers, 0 for none", 0.0, "length")
    if tall:
        there = [name for name in _RING_MEMBERS if getattr(station, name)]
        form.several(path, "Members of the ring", _RING_MEMBERS, there)
        form.switch(f"{path}.clear", "No brace across this ring", station.clear)


def _hoop(layout: Layout, hoop: Hoop) -> None:
    path = f"hoop.{hoop.name}"
    form.choice(f"{path}.bracing", "Bracing of the hoop", ["open", "single", "cross"], hoop.bracing)
    stations = [s.name for s in layout.stations if s.name != hoop.station]
    form.choice(f"{path}.stays_to", "Stays run to", ["", *stations], hoop.stays_to,
                lambda name: name or "nowhere: no stays")  # fmt: skip


def _bracing(layout: Layout, known: Sequence[Field]) -> None:
    spans = [s.name for s in layout.spans]
    rings = [f for f in known if f.path.endswith(".ring")]
    name = _which([*spans, RINGS] if rings else spans, "span")
    if name == RINGS and RINGS not in spans:
        for ring in rings:
            form.bracing(ring, f"Ring at {words.plain(ring.owner)}")
        return
    for field in known:
        if field.place == "span" and field.owner == name:
            if field.kind == "count":
                form.whole(field.path, "Bays", field.value)
            else:
                form.bracing(field, form.label_of(field))
    _openings(layout.span(name))


def _openings(span: Span) -> None:
    path = f"span.{span.name}"
    form.several(f"{path}.clear", "Must stay open", FACES, list(span.clear))
    form.switch(f"{path}.upper", "Upper rails run through", span.upper)


def _own_tubes(layout: Layout, group: str) -> None:
    """Give a further group a tube of its own, or let one share again."""
    here = state.bench()
    key = f"own tube {here.revision} {sorted(layout.tubes)}"

    def take() -> None:
        chosen = st.session_state[key]
        if chosen is not None:
            state.set_field(f"tube.{chosen}", True)
            st.session_state[_GROUP] = chosen

    st.selectbox("Give another group its own tube", without_own_tube(layout), index=None, key=key,
                 placeholder="Choose a group", on_change=take)  # fmt: skip
    if group in FALLBACK:
        st.button(f"Let the {words.plain(group)} share again", key=f"share {group}",
                  on_click=lambda: state.set_field(f"tube.{group}", False))  # fmt: skip


def _which(names: list[str], key: str) -> str:
    """The one of several things to edit."""
    if st.session_state.get(key) not in names:
        st.session_state[key] = names[0]
    chosen = st.pills("Which", names, required=True, key=key, label_visibility="collapsed",
                      format_func=words.plain, wrap=True)  # fmt: skip
    return chosen or names[0]


def _two_by_two(found: list[Field]) -> None:
    for first in range(0, len(found), 2):
        for field, column in zip(found[first : first + 2], st.columns(2), strict=False):
            with column:
                form.field(field)
