"""The bench as the parameters of a page's address, and back; nothing that is wrong is believed."""

from __future__ import annotations

import re
from collections.abc import Mapping

from explorer.bench import FIRST_OUTPUT, UNITS, Bench
from sweeps.outputs import OUTPUTS

NAMES = ("study", "run", "frame", "beside", "units", "output", "input", "target")
"""The parameters."""
MOST_BESIDE = 3

_RUN_NAME = re.compile(r"[a-z0-9][a-z0-9.-]{0,90}")


def of(here: Bench) -> dict[str, str]:
    """The parameters that say what is on the bench; what is usual is left out."""
    said = {
        "study": here.source,
        "run": here.run or "",
        "frame": "" if here.candidate is None else str(here.candidate),
        "beside": ",".join(str(frame) for frame in here.beside),
        "units": here.units if here.units != "metric" else "",
        "output": here.output if here.output != FIRST_OUTPUT else "",
        "input": here.given or "",
        "target": "" if here.target is None else f"{here.target:.6g}",
    }
    return {name: text for name, text in said.items() if text}


def take(here: Bench, said: Mapping[str, str], run: str | None) -> None:
    """Put on the bench what an address says, but for the study. run : its run, if it is there."""
    frames = _frames(said.get("frame"))
    here.run = run
    here.candidate = frames[0] if run is not None and frames else None
    here.beside = _frames(said.get("beside"))[:MOST_BESIDE] if run is not None else ()
    here.units = said.get("units", "metric") if said.get("units") in UNITS else "metric"
    here.output = said.get("output", "") if said.get("output") in OUTPUTS else FIRST_OUTPUT
    here.given = said.get("input")
    here.target = _number(said.get("target"))


def is_run_name(name: str) -> bool:
    """Whether this can be the name of a run folder; nothing else is ever looked up on disk."""
    return _RUN_NAME.fullmatch(name) is not None and ".." not in name


def _frames(text: str | None) -> tuple[int, ...]:
    parts = (text or "")[:100].split(",")
    return tuple(dict.fromkeys(int(p) for p in parts if p.isascii() and p.isdigit()))


def _number(text: str | None) -> float | None:
    try:
        value = float(text or "")
    except ValueError:
        return None
    return value if 0 < value < 1e9 else None
