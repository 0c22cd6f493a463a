"""The parts of the Drivers page: tables in the shape that charts take, and the choosers."""

from __future__ import annotations

from collections.abc import Mapping

import pandas as pd
import streamlit as st

from explorer import state
from explorer.words import capital
from sweeps.drivers import Drivers
from sweeps.outputs import OUTPUTS

_SHOWN = {
    "label": "Input",
    "total": "With interactions",
    "total_interval": "±",
    "first": "On its own",
    "first_interval": "± ",
}
SHARES = {
    name: st.column_config.NumberColumn(format="percent")
    for name in _SHOWN.values()
    if name != "Input"
}
"""How the columns of ``shown_table`` are shown."""


def choose_output() -> None:
    """The result to explain."""
    here = state.bench()
    key = f"output {here.revision}"
    st.selectbox(
        "Result",
        list(OUTPUTS),
        index=list(OUTPUTS).index(here.output),
        format_func=lambda name: capital(OUTPUTS[name].label),
        key=key,
        on_change=lambda: state.set_output(st.session_state[key]),
        width=340,
    )


def choose_given(labels: Mapping[str, str], now: str) -> None:
    """The input to follow; a click on a bar chooses it as well."""
    key = f"given {now}"
    st.selectbox(
        "Along the input",
        list(labels),
        index=list(labels).index(now),
        format_func=lambda path: labels[path],
        key=key,
        on_change=lambda: state.set_given(st.session_state[key]),
    )


def for_charts(table: pd.DataFrame) -> pd.DataFrame:
    """A table of indices with the column names that charts take."""
    return table.rename(columns=lambda name: str(name).replace("_interval", "_conf"))


def shown_table(found: Drivers) -> pd.DataFrame:
    """The indices as a person reads them."""
    return found.table[list(_SHOWN)].rename(columns=_SHOWN)


def telling_pairs(found: Drivers, most: int = 3) -> pd.DataFrame:
    """Pairs of inputs that act together by more than chance, the strongest first."""
    pairs = found.pairs
    sure = pairs[(pairs["second"] > pairs["second_interval"]) & (pairs["second"] > 0.005)]
    return pd.DataFrame(sure.head(most))
