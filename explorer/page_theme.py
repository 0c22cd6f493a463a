"""Whether the page is dark, as the browser shows it: charts must know, style sheets do not.

The page server's own word for it may be wrong when a page opens and is not told anew when the
person changes the theme; a component without a face looks at the page and reports.
"""

from __future__ import annotations

import streamlit as st

_KEY = "page_theme"
_LOOK = """
export default function ({ data, parentElement, setStateValue }) {
  const ground = getComputedStyle(parentElement.host).getPropertyValue("--st-background-color");
  const probe = document.createElement("canvas").getContext("2d");
  probe.fillStyle = ground.trim() || "#ffffff";
  probe.fillRect(0, 0, 1, 1);
  const [r, g, b] = probe.getImageData(0, 0, 1, 1).data;
  const dark = 0.2126 * r + 0.7152 * g + 0.0722 * b < 110;
  if (data.dark !== dark) setStateValue("dark", dark);
}
"""

_watcher = st.components.v2.component("twistfront_theme", js=_LOOK, css=":host { display: none; }")


def page_is_dark() -> bool:
    """True when the page has a dark ground, as last seen; ask before charts are made."""
    seen = (st.session_state.get(_KEY) or {}).get("dark")
    return st.context.theme.type == "dark" if seen is None else bool(seen)


def watch_theme() -> None:
    """Look at the page; call once in every run, at its end: it takes up the room of one gap."""
    _watcher(key=_KEY, data={"dark": page_is_dark()}, on_dark_change=lambda: None)
