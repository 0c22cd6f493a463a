"""What lies on the bench: the one owner of the session and of the page's address.

A page asks ``bench()`` for what is on the bench and changes it through the functions here. The
address of the page names the study, the run, the picked frames, units, output, input and target,
so that a reload, a bookmark or a second tab finds the same bench; the edited study itself lies in
the drafts on disk.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from functools import reduce
from pathlib import Path
from typing import Any

import streamlit as st

from explorer import drafts
from explorer.editing import edited
from explorer.units import INCH_POUND, METRIC, Units
from model.errors import DesignError, InputError
from model.frame.layout import Layout
from model.frame.variants import one
from sweeps.catalogue import catalogue
from sweeps.outputs import OUTPUTS
from sweeps.study import Study
from sweeps.study_file import parse_study
from sweeps.study_text import write_study

UNITS: Mapping[str, Units] = {"metric": METRIC, "inch": INCH_POUND}
FIRST_VEHICLE = "hill-climb-single-seater"
MOST_STEPS_BACK = 50
MOST_BESIDE = 3

_KEY = "bench"
_RUN_NAME = re.compile(r"[a-z0-9][a-z0-9.-]{0,90}")


@dataclass
class Bench:
    """Everything a person has on the bench.

    source : id of a starting vehicle or name of a draft; study : the same, read.
    run : name of the run folder that Drivers, Front and Candidate look at.
    candidate : the frame of that run being detailed. beside : frames kept to compare it with.
    given : path of the input looked at closely. target : least twist stiffness [N·m/deg].
    braced : changes of bracing tried on the candidate, path to bracing. snapped : whether its
    tubes are taken from stock lists.
    waiting : edits that cannot be built, by path, with ``fault`` saying why.
    trouble, notice : what the next page says once.
    past : studies to go back to. revision : counts what makes every field show anew.
    """

    source: str
    study: Study
    run: str | None = None
    candidate: int | None = None
    beside: tuple[int, ...] = ()
    units: str = "metric"
    output: str = "twist_Nm_per_deg"
    given: str | None = None
    target: float | None = None
    braced: dict[str, str] = field(default_factory=dict)
    snapped: bool = False
    waiting: dict[str, Any] = field(default_factory=dict)
    fault: InputError | None = None
    trouble: DesignError | None = None
    notice: str = ""
    past: list[Study] = field(default_factory=list)
    revision: int = 0
    address: dict[str, str] = field(default_factory=dict)
    text: str = ""

    @property
    def shown_units(self) -> Units:
        """The units chosen for display."""
        return UNITS[self.units]

    @property
    def vehicle(self) -> str:
        """Id of the starting vehicle that the study began as."""
        return drafts.vehicle_of(self.source)

    @property
    def picked(self) -> tuple[int, ...]:
        """Frames to mark, the candidate first."""
        first = () if self.candidate is None else (self.candidate,)
        return tuple(dict.fromkeys((*first, *self.beside)))


def bench() -> Bench:
    """What is on the bench; at the start of a session, what the address says."""
    if _KEY not in st.session_state:
        st.session_state[_KEY] = _from_address(dict(st.query_params))
    found: Bench = st.session_state[_KEY]
    return found


def follow_address() -> Bench:
    """Call once at the start of every page: what is new in the address comes onto the bench."""
    known = _KEY in st.session_state
    here = bench()
    said = {name: text for name, text in dict(st.query_params).items() if name in _NAMES}
    if known and said and said != here.address:  # the person went back, or changed it by hand
        _take(here, said)
    _write_address(here)
    return here


def address() -> dict[str, str]:
    """The bench as the parameters of a page's address."""
    return _address(bench())


# --- study ----------------------------------------------------------------------------------


def choose(source: str) -> None:
    """Put a starting vehicle or a draft on the bench."""
    here = bench()
    here.source, here.study, here.text = _read(here, source)
    here.run, here.candidate, here.beside = None, None, ()
    here.given, here.target = None, None
    here.braced, here.snapped = {}, False
    here.waiting, here.fault, here.past = {}, None, []
    _changed(here)


def open_text(text: str) -> None:
    """Put the text of a study file on the bench; raises InputError where it is none."""
    study = parse_study(text)
    one(study.layout)
    use_run(None)
    put_other(study)


def put(study: Study, *, anew: bool = True) -> None:
    """Put a changed study on the bench and on disk. anew : fields must show it as it now is."""
    here = bench()
    here.past = [*here.past, here.study][-MOST_STEPS_BACK:]
    here.study, here.waiting, here.fault = study, {}, None
    _keep(here)
    if anew:
        here.revision += 1
    _write_address(here)


def put_other(study: Study) -> None:
    """Put a study from elsewhere on the bench, as a draft of the vehicle it is of."""
    here = bench()
    shelf = catalogue().vehicles
    names = {parse_study(text).name: vehicle for vehicle, text in shelf.items()}
    here.source = drafts.new_name(names.get(study.name, drafts.OWN))
    here.text = ""
    here.past, here.study, here.waiting, here.fault = [], study, {}, None
    _keep(here)
    _changed(here)


def set_field(path: str, value: Any) -> None:
    """Set one field of the layout; what cannot be built waits, with the fault said."""
    here = bench()
    waiting = {**here.waiting, path: value}
    fault = None
    for edits in (waiting, {path: value}):
        try:
            layout = _built(here.study.layout, edits)
        except InputError as found:
            fault = fault or found
            continue
        left = {p: v for p, v in waiting.items() if p not in edits}
        put(here.study.with_layout(layout), anew=False)
        here.waiting, here.fault = left, fault if left else None
        return
    here.waiting, here.fault = waiting, fault


def step_back() -> None:
    """Take the last change back."""
    here = bench()
    if here.past:
        *earlier, study = here.past
        put(study)
        here.past = earlier


def original() -> Study | None:
    """The starting vehicle that the study began as; None for one opened from a file."""
    vehicle = bench().vehicle
    return parse_study(catalogue().vehicles[vehicle]) if vehicle in catalogue().vehicles else None


def _built(layout: Layout, edits: Mapping[str, Any]) -> Layout:
    changed: Layout = reduce(lambda found, edit: edited(found, *edit), edits.items(), layout)
    one(changed)
    return changed


# --- run and frames -------------------------------------------------------------------------


def use_run(name: str | None) -> None:
    """Look at another run; a frame picked in the last one is put away."""
    here = bench()
    if name != here.run:
        here.run, here.beside = name, ()
        here.candidate, here.braced, here.snapped = None, {}, False
    _write_address(here)


def run_folder(name: str) -> Path:
    """The folder of a run by its name."""
    return drafts.runs_folder() / name


def pick(frame: int | None) -> None:
    """Pick the frame to be detailed."""
    here = bench()
    if frame != here.candidate:
        here.candidate, here.braced, here.snapped = frame, {}, False
    _write_address(here)


def keep_beside(frames: Iterable[int]) -> None:
    """Keep these frames to compare the candidate with."""
    here = bench()
    here.beside = tuple(dict.fromkeys(frames))[-MOST_BESIDE:]
    _write_address(here)


def brace(changes: Mapping[str, str]) -> None:
    """Try other bracing on the candidate; no changes: as it was."""
    here = bench()
    here.braced = {**here.braced, **changes} if changes else {}


def snap(on: bool) -> None:
    """Take the candidate's tubes from stock lists, or leave them as they are."""
    bench().snapped = on


# --- choices of display ---------------------------------------------------------------------


def set_units(name: str) -> None:
    """Show metric, or inch and pound."""
    here = bench()
    if name in UNITS and name != here.units:
        here.units = name
        here.revision += 1
    _write_address(here)


def set_output(name: str) -> None:
    """Look at another result."""
    here = bench()
    here.output = name if name in OUTPUTS else here.output
    _write_address(here)


def set_given(path: str | None) -> None:
    """Look closely at another input."""
    here = bench()
    here.given = path
    _write_address(here)


def set_target(target: float | None) -> None:
    """Ask for at least this twist stiffness [N·m/deg]; None asks for nothing."""
    here = bench()
    here.target = target
    _write_address(here)


# --- address and disk -----------------------------------------------------------------------

_NAMES = ("study", "run", "frame", "beside", "units", "output", "input", "target")


def _address(here: Bench) -> dict[str, str]:
    said = {
        "study": here.source,
        "run": here.run or "",
        "frame": "" if here.candidate is None else str(here.candidate),
        "beside": ",".join(str(frame) for frame in here.beside),
        "units": here.units if here.units != "metric" else "",
        "output": here.output if here.output != "twist_Nm_per_deg" else "",
        "input": here.given or "",
        "target": "" if here.target is None else f"{here.target:.6g}",
    }
    return {name: text for name, text in said.items() if text}


def _write_address(here: Bench) -> None:
    here.address = _address(here)
    shown = dict(st.query_params)
    if {name: text for name, text in shown.items() if name in _NAMES} != here.address:
        others = {name: text for name, text in shown.items() if name not in _NAMES}
        st.query_params.from_dict(others | here.address)


def _from_address(said: Mapping[str, str]) -> Bench:
    study = parse_study(catalogue().vehicles[FIRST_VEHICLE])
    here = Bench(FIRST_VEHICLE, study, text=catalogue().vehicles[FIRST_VEHICLE])
    _take(here, said)
    return here


def _take(here: Bench, said: Mapping[str, str]) -> None:
    """Read an address; what it says wrongly is left out, and said once where it matters."""
    source = said.get("study", FIRST_VEHICLE)
    if source != here.source:
        here.source, here.study, here.text = _read(here, source)
        here.waiting, here.fault, here.past = {}, None, []
    run_name = said.get("run", "")
    there = _RUN_NAME.fullmatch(run_name) and run_folder(run_name).is_dir()
    if run_name and not there:
        here.notice = "The sweep in this address is not on this computer (any more)."
    here.run = run_name if there else None
    here.candidate = next(iter(_frames(said.get("frame"))), None) if here.run else None
    here.beside = _frames(said.get("beside"))[:MOST_BESIDE] if here.run else ()
    here.units = said.get("units", "metric") if said.get("units") in UNITS else "metric"
    output = said.get("output", "")
    here.output = output if output in OUTPUTS else "twist_Nm_per_deg"
    here.given = said.get("input")
    here.target = _number(said.get("target"))
    here.braced, here.snapped = {}, False
    here.revision += 1


def _read(here: Bench, source: str) -> tuple[str, Study, str]:
    """Name, study and text of a starting vehicle or draft; the first vehicle where it fails."""
    vehicles = catalogue().vehicles
    text = vehicles.get(source) or drafts.read(source)
    try:
        if text is None:
            raise InputError("study", repr(source[:80]), "choose a vehicle from the list")
        return source, parse_study(text), text
    except DesignError as fault:
        here.notice = f"This study cannot be opened: {fault}."
        return FIRST_VEHICLE, parse_study(vehicles[FIRST_VEHICLE]), vehicles[FIRST_VEHICLE]


def _keep(here: Bench) -> None:
    """Write the study to its draft; to a new one if another tab has changed it meanwhile."""
    if not drafts.is_name(here.source):
        here.source = drafts.new_name(here.source)
    elif drafts.read(here.source) not in (here.text, None):
        here.source = drafts.new_name(here.vehicle)
    here.text = write_study(here.study)
    drafts.write(here.source, here.text)


def _changed(here: Bench) -> None:
    here.revision += 1
    _write_address(here)


def _frames(text: str | None) -> tuple[int, ...]:
    parts = (text or "")[:100].split(",")
    return tuple(dict.fromkeys(int(p) for p in parts if p.isascii() and p.isdigit()))


def _number(text: str | None) -> float | None:
    try:
        value = float(text or "")
    except ValueError:
        return None
    return value if 0 < value < 1e9 else None
