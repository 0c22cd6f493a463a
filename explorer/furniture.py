"""What every page has: an opening sentence, messages, empty places and the way to the next page."""

from __future__ import annotations

import datetime
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import altair as alt
import pandas as pd
import streamlit as st

from explorer import bench, drafts, state, theme, words
from explorer.page_theme import page_is_dark
from model.errors import DesignError, InputError
from sweeps.catalogue import catalogue
from sweeps.study_file import parse_study
from sweeps.study_text import write_study

PAGES = {
    "frame": "Frame",
    "sweep": "Sweep",
    "drivers": "Drivers",
    "front": "Front",
    "candidate": "Candidate",
}
"""The pages in the order of the work: name of the file, and what a person reads."""

_STYLE = (Path(__file__).parent / "assets" / "pages.css").read_text(encoding="utf-8")


def dark() -> bool:
    """Whether the person's page is dark."""
    return page_is_dark()


def _style() -> str:
    look = theme.colours(dark())
    better = max((look.background, look.ink), key=lambda c: theme.contrast(c, look.accent))
    colours = f"--frame-ink: {look.ink}; --frame-muted: {look.muted}; --frame-on-accent: {better};"
    return f"<style>:root {{{colours}}}\n{_STYLE}</style>"


def opening(title: str, sentence: str) -> None:
    """The head of a page: its name, and how things stand in one sentence."""
    st.html(_style())
    st.title(title, anchor=False)
    st.markdown(sentence)
    here = state.bench()
    if here.notice:
        st.info(here.notice)
        here.notice = ""


def problem(fault: DesignError) -> None:
    """Say what is wrong and what would do."""
    st.error(words.fault(fault, state.bench().study.layout), icon=":material/error:")


def our_fault(fault: Exception) -> None:
    """Say that the program went wrong, and that nothing is lost."""
    st.error(
        "This is a fault of the program, not of your input: "
        f"{words.plain(type(fault).__name__)}. Your study and your sweeps are on disk; load the "
        "page again, or choose another vehicle. The terminal says more.",
        icon=":material/error:",
    )


@contextmanager
def telling() -> Iterator[None]:
    """Say a fault that a person can mend, and go no further down the page."""
    try:
        yield
    except DesignError as fault:
        problem(fault)
        st.stop()


def empty(sentence: str, advice: str, page: str) -> None:
    """A place with nothing in it yet: says so, and leads to where it comes from."""
    with st.container(border=True, horizontal_alignment="center", gap="medium"):
        st.space("small")
        st.markdown(f"**{sentence}**", text_alignment="center")
        if st.button(advice, type="primary", key=f"empty_{page}"):
            go(page)
        st.space("small")


def next_step(page: str, label: str, why: str = "") -> None:
    """What to do next: one button, and a word on why."""
    st.divider()
    with st.container(horizontal=True, vertical_alignment="center", gap="medium"):
        if st.button(label, type="primary", icon=":material/arrow_forward:", key="next"):
            go(page)
        if why:
            st.markdown(why)


def go(page: str) -> None:
    """Go to another page with everything that is on the bench."""
    st.switch_page(f"steps/{page}.py", query_params=state.parameters())


def chart(picture: alt.LayerChart, said: str, **more: Any) -> Any:
    """Show a chart with what it shows in words."""
    return st.altair_chart(picture, theme=None, alt=said, width="stretch", **more)


def figures_behind(table: pd.DataFrame, name: str, **more: Any) -> None:
    """The figures of a picture as a table, folded away."""
    with st.expander(name):
        st.dataframe(table, hide_index=True, width="stretch", **more)


# --- the side of the page -------------------------------------------------------------------


def sidebar() -> None:
    """The vehicle on the bench, the units, and files in and out."""
    with st.sidebar:
        _vehicle()
        _units()
        _files()


def _vehicle() -> None:
    here = state.bench()
    titles = vehicle_titles()
    if here.source != here.vehicle:
        titles = {here.source: f"{here.study.name}, edited"} | {
            source: title for source, title in titles.items() if source != here.source
        }
    # a list keeps its choice by the words shown: with other words it must be another list
    key = f"vehicle {here.revision} {here.source} {sorted(titles.items())}"

    def choose() -> None:
        if st.session_state[key] in titles:
            state.choose(st.session_state[key])

    st.selectbox(
        "Vehicle",
        list(titles),
        index=list(titles).index(here.source),
        format_func=lambda source: titles[source],
        key=key,
        on_change=choose,
    )
    st.caption(here.study.about)


def vehicle_titles() -> dict[str, str]:
    """What can be put on the bench: starting vehicles, then drafts, by what a person reads."""
    found = {source: _name_of(text) for source, text in catalogue().vehicles.items()}
    now = datetime.datetime.now()
    for draft in drafts.drafts():
        when = datetime.datetime.fromtimestamp(draft.changed)
        try:
            name = _name_of(draft.text)
        except InputError:
            continue
        title = f"{name}, {words.moment(when, now)}"
        same = sum(other.startswith(title) for other in found.values())
        found[draft.name] = f"{title} ({same + 1})" if same else title
    return found


@st.cache_data(show_spinner=False, max_entries=200)
def _name_of(text: str) -> str:
    return parse_study(text).name


def _units() -> None:
    here = state.bench()

    def choose() -> None:
        state.set_units(st.session_state["units"] or here.units)

    st.session_state["units"] = here.units
    st.segmented_control(
        "Units",
        list(bench.UNITS),
        required=True,
        format_func=lambda name: "Metric" if name == "metric" else "Inch-pound",
        key="units",
        on_change=choose,
        width="stretch",
    )


def _files() -> None:
    here = state.bench()
    with st.popover("Open or save", icon=":material/folder_open:", width="stretch"):
        st.download_button(
            "Save this study",
            lambda: write_study(here.study),
            file_name=f"{words.file_name(here.study.name)}.toml",
            mime="application/toml",
            on_click="ignore",
            help="Frame, ranges and sample count as one text file, for the command line too.",
            width="stretch",
        )
        given = st.file_uploader("Open a study file", type="toml", key=f"file {here.revision}")
        if given is not None:
            _open(given.getvalue())


def _open(data: bytes) -> None:
    try:
        state.open_text(data.decode("utf-8"))
    except DesignError as fault:
        problem(fault)
    except (ValueError, RecursionError):  # no text, or numbers and nesting without end
        problem(InputError("study file", "not readable", "choose a TOML file in UTF-8"))
    else:
        st.rerun()
