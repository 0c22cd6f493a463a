"""The workbench: sets up the page, the way through the work and the side; a page does the rest."""

import sys
import traceback
from pathlib import Path

import streamlit as st

from explorer import furniture, results, state
from explorer.page_theme import watch_theme

HERE = Path(__file__).parent


def main() -> None:
    """Show the page that the person is on."""
    state.keep_address()
    page = st.navigation(
        [
            st.Page(f"steps/{name}.py", title=title, url_path=name, default=name == "frame")
            for name, title in furniture.PAGES.items()
        ]
    )
    furniture.sidebar()
    results.ready()
    page.run()


# the page server looks here first, where our modules would stand in for others of their name
sys.path[:] = [place for place in sys.path if Path(place) != HERE]
st.set_page_config(page_title="Twistfront", page_icon=HERE / "assets" / "icon.png", layout="wide")
try:
    main()
except Exception as fault:  # what a person did wrong is said by the page; this is ours
    traceback.print_exc()
    furniture.our_fault(fault)
watch_theme()
