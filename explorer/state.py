"""What lies on the bench: the one owner of the session and of the page's address.

A page asks ``bench()`` for what is on the bench and changes it through the functions here. The
address of the page names the study, the run, the picked frames, units, output, input and target,
so that a reload, a bookmark or a second tab finds the same bench; the edited study itself lies in
the drafts on disk.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping
from dataclasses import replace
from functools import reduce
from pathlib import Path
from typing import Any

import streamlit as st

from explorer import address, drafts
from explorer.bench import FIRST_VEHICLE, UNITS, Bench
from explorer.editing import edited
from model.errors import DesignError, InputError
from model.frame.layout import Layout
from model.frame.variants import one
from sweeps.catalogue import catalogue
from sweeps.inputs import Input
from sweeps.outputs import OUTPUTS
from sweeps.study import Study
from sweeps.study_file import parse_study
from sweeps.study_text import write_study

MOST_STEPS_BACK = 50

_KEY = "bench"


def bench() -> Bench:
    """What is on the bench; at the start of a session, what the address says."""
    if _KEY not in st.session_state:
        st.session_state[_KEY] = _from_address(dict(st.query_params))
    found: Bench = st.session_state[_KEY]
    return found


def keep_address() -> None:
    """Call once at the start of every page: the address says again what is on the bench.

    The bench wins over the address once a session has begun: a press that was still on its way
    while the address changed carries the old one, and must not bring an old study back.
    """
    _write_address(bench())


def parameters() -> dict[str, str]:
    """The bench as the parameters of a page's address."""
    return address.of(bench())


# --- study ----------------------------------------------------------------------------------


def choose(source: str) -> None:
    """Put a starting vehicle or a draft on the bench."""
    here = bench()
    here.source, here.study, here.text = _read(here, source)
    here.run, here.candidate, here.beside = None, None, ()
    here.given, here.target = None, None
    here.braced, here.snapped = {}, False
    here.waiting, here.fault, here.past, here.held = {}, None, [], {}
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
    here.past, here.study, here.waiting, here.fault, here.held = [], study, {}, None, {}
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


# --- what varies ----------------------------------------------------------------------------


def offered() -> tuple[Input, ...]:
    """The inputs to show: those that vary and those unticked, as they were at this revision."""
    here = bench()
    if here.offer[0] != here.revision:
        there = {given.path: given for given in here.study.inputs}
        here.held = {path: given for path, given in here.held.items() if path not in there}
        every = here.held | there
        before = [given.path for given in here.offer[1] if given.path in every]
        order = dict.fromkeys([*before, *there, *here.held])
        here.offer = (here.revision, tuple(every[path] for path in order))
        here.held_at_first = frozenset(here.held)
    return here.offer[1]


def put_inputs(changed: Mapping[str, Input], held: Collection[str]) -> None:
    """Put changed inputs into the study; those ``held`` are set aside, and vary no more."""
    here = bench()
    order = [given.path for given in offered()]
    every = {**here.held, **{g.path: g for g in here.study.inputs}, **changed}
    aside = {p for p in here.held if p not in changed} | {*held}
    study = here.study
    for path in aside:
        study = study.without_input(path)
    for path in order:
        if path not in aside:
            study = study.with_input(every[path])
    inputs = tuple(study.input(path) for path in order if path not in aside)
    put(replace(study, inputs=inputs), anew=False)
    here.held = {path: every[path] for path in order if path in aside}


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
    here.beside = tuple(dict.fromkeys(frames))[-address.MOST_BESIDE :]
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


def _write_address(here: Bench) -> None:
    shown, said = dict(st.query_params), address.of(here)
    if {name: text for name, text in shown.items() if name in address.NAMES} != said:
        others = {name: text for name, text in shown.items() if name not in address.NAMES}
        st.query_params.from_dict(others | said)


def _from_address(said: Mapping[str, str]) -> Bench:
    text = catalogue().vehicles[FIRST_VEHICLE]
    here = Bench(FIRST_VEHICLE, parse_study(text), text=text)
    source = said.get("study", FIRST_VEHICLE)
    if source != here.source:
        here.source, here.study, here.text = _read(here, source)
    name = said.get("run", "")
    there = address.is_run_name(name) and run_folder(name).is_dir()
    if name and not there:
        here.notice = "The sweep in this address is not on this computer (any more)."
    address.take(here, said, name if there else None)
    return here


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
