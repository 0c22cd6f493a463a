"""Sentences from numbers: how things stand, what is good or bad about a frame; text comes out."""

from __future__ import annotations

import datetime
import re
import unicodedata
from typing import Any

import numpy as np
import pandas as pd

from explorer.numbers import count, number, percent
from explorer.units import METRIC, Units
from model.errors import DesignError, InputError
from model.frame.layout import Layout
from model.results.detail import Detail, bay_words
from sweeps.drivers import Drivers
from sweeps.front import Distance, Front
from sweeps.inputs import Input
from sweeps.jobs import WAITING, Progress
from sweeps.runs import Run
from sweeps.study import Study, fields

_SPECIAL = re.compile(r"([\\`*_{}\[\]()<>#+\-.!|~$:&^=])")


def plain(text: str) -> str:
    """Text of a person's own for a place that reads Markdown: shown as it is, nothing fetched."""
    return _SPECIAL.sub(r"\\\1", " ".join(text.split()))


def file_name(text: str) -> str:
    """A name as part of a file name: letters, digits and hyphens."""
    letters = unicodedata.normalize("NFKD", text).encode("ascii", "ignore").decode().lower()
    return re.sub(r"[^a-z0-9]+", "-", letters).strip("-")[:60] or "study"


def moment(when: datetime.datetime, now: datetime.datetime) -> str:
    """When something was: "13:20", "yesterday 13:20", "28 Nov 13:20", "28 Nov 2024"."""
    clock = f"{when:%H:%M}"
    days = (now.date() - when.date()).days
    if days == 0:
        return clock
    if days == 1:
        return f"yesterday {clock}"
    date = f"{when.day} {when:%b}"
    return f"{date} {clock}" if when.year == now.year else f"{date} {when.year}"


def duration(seconds: float) -> str:
    """A time as a person says it: "less than a second", "12 s", "3 min", "2 h 10 min"."""
    if seconds < 1:
        return "less than a second"
    if seconds < 90:
        return f"{seconds:.0f}\u00a0s"
    minutes = round(seconds / 60)
    if minutes < 90:
        return f"{minutes}\u00a0min"
    return f"{minutes // 60}\u00a0h {minutes % 60}\u00a0min"


def fault(found: DesignError, layout: Layout) -> str:
    """A fault as Markdown: the field by its words, the value as given, what would do."""
    if not isinstance(found, InputError):
        return plain(capital(str(found))) + "."
    name, unit = found.field, ""
    for known in fields(layout):
        if found.field in (known.path, known.path.removesuffix(f"_{known.unit}")):
            name, unit = known.label, known.unit
    given = f"{found.given} {unit}".strip()
    remedy = capital(found.remedy)
    return f"**{plain(name)}** = {plain(given)}. {plain(remedy)}."


# --- a sweep --------------------------------------------------------------------------------


def progress(p: Progress) -> str:
    """How far a sweep is: frames, rate, time left."""
    if p.state == WAITING:
        return "Waiting for another sweep to finish"
    said = f"{p.solved:,} of {count(p.rows, 'frame')}"
    if p.rate > 0:
        said += f" · {number(p.rate, 2)} a second"
    if p.seconds_left is not None:
        said += f" · {duration(p.seconds_left)} left"
    return said


def sweep_opening(
    study: Study, rows: int, run: Run | None, *, same: bool, failed: int, active: bool
) -> str:
    """Where the sweep stands. rows : frames it would make; failed : frames without a result."""
    vary = f"{count(len(study.inputs), 'input')} of {plain(study.name)} vary"
    if run is None:
        return f"{vary}: {count(rows, 'frame')} to try. No sweep yet."
    solved = run.rows_solved
    if active:
        return f"{vary}; a sweep of {count(run.design.rows, 'frame')} is under way."
    if solved == 0:
        return f"{vary}; the sweep was stopped before any frame was solved."
    done = f"{count(solved, 'frame')} solved"
    if failed:
        done += f", {failed:,} of them could not stand or be built"
    if not run.complete:
        return f"{done}; the sweep was stopped at {percent(solved / run.design.rows)}."
    if not same:
        return f"{done} of an earlier version of this study; it has changed since."
    return f"{done}: the sweep is complete."


def incomplete(run: Run) -> str:
    """That a sweep is not complete yet."""
    return (
        f"{run.rows_solved:,} of {count(run.design.rows, 'frame')} are solved; what drives them "
        "shows when all are."
    )


def drivers_opening(found: Drivers) -> str:
    """What drives a result most, and how far the ranking can be relied on."""
    return f"**{plain(found.sentence)}** {plain(found.verdict)}"


def pairs(table: pd.DataFrame) -> str:
    """Which inputs act together."""
    said = [
        f"- {plain(str(row['one']))} **with** {plain(str(row['other']))}: "
        f"{percent(float(row['second']))}"
        for _, row in table.iterrows()
    ]
    return "\n".join(["Acting together, these explain more than each does alone:", "", *said])


def front_opening(
    run: Run, rows: pd.DataFrame, best: Front, target: float | None, units: Units
) -> str:
    """How many frames there are, how many reach the target, and what the lightest weighs."""
    solved = count(len(rows), "frame")
    part = "" if run.complete else " so far"
    if target is None:
        ends = best.rows
        return (
            f"Of {solved}{part}, {len(ends):,} are beaten by no other: from "
            f"{units.write(float(ends['mass_kg'].iloc[0]), 'mass')} with "
            f"{units.write(float(ends['twist_Nm_per_deg'].iloc[0]), 'twist')} to "
            f"{units.write(float(ends['mass_kg'].iloc[-1]), 'mass')} with "
            f"{units.write(float(ends['twist_Nm_per_deg'].iloc[-1]), 'twist')}."
        )
    reach = rows[rows["twist_Nm_per_deg"] >= target]
    wanted = units.write(target, "twist")
    if reach.empty:
        most = units.write(float(rows["twist_Nm_per_deg"].max()), "twist")
        return f"None of {solved}{part} reaches {wanted}; the stiffest has {most}."
    lightest = reach.sort_values("mass_kg").iloc[0]
    return (
        f"{len(reach):,} of {solved}{part} reach {wanted}; the lightest of them is frame "
        f"{int(lightest['frame']):,} with {units.write(float(lightest['mass_kg']), 'mass')}."
    )


def frame_against_front(frame: pd.Series[Any], off: Distance, units: Units) -> str:
    """A frame of a sweep, and how far it is from the front."""
    said = (
        f"**Frame {int(frame['frame']):,}**: {units.write(float(frame['mass_kg']), 'mass')}, "
        f"{units.write(float(frame['twist_Nm_per_deg']), 'twist')}, "
        f"{units.write(float(frame['twist_per_kg']), 'twist per mass')}"
    )
    if _on_front(off):
        return said + ". No other frame beats it."
    return (
        f"{said}. Others are up to {units.write(off.lighter, 'mass', 2)} lighter at no less "
        f"stiffness, or {units.write(off.stiffer, 'twist', 2)} stiffer at no more mass."
    )


_SHORT = {
    "mass_kg": ("Mass", "mass"),
    "twist_Nm_per_deg": ("Twist", "twist"),
    "twist_per_kg": ("", "twist"),
    "bend_N_per_mm": ("Bending", "bend"),
    "axial_share": ("Axial", "share"),
}


def short_title(column: str, units: Units) -> str:
    """A result as a short title of a column, with its unit."""
    title, quantity = _SHORT[column]
    return units.titled(title or f"Twist per {units.unit('mass')}", quantity)


def _on_front(off: Distance) -> bool:
    """Whether no other frame beats it, but for rounding."""
    return off.lighter < 1e-6 and off.stiffer < 1e-6


def titled_input(given: Input, units: Units) -> str:
    """An input as the title of a column, with the unit shown."""
    return units.titled(given.label, _quantity(given))


def input_cell(given: Input, value: Any, units: Units) -> Any:
    """The value of an input in a table: a number in display units, or its words."""
    if isinstance(value, int | float | np.number):
        return float(units.shown(float(value), _quantity(given)))
    return str(value).partition("/")[2] or str(value)


def input_value(given: Input, value: Any, units: Units) -> str:
    """The value of an input as text, without unit."""
    cell = input_cell(given, value, units)
    return bare(cell) if isinstance(cell, float) else str(cell)


def bare(value: float) -> str:
    """A number as text, four figures."""
    return number(value, 4)


def face(path: str) -> str:
    """A face or ring by its path, in words: "Cockpit, floor"."""
    _, owner, name = path.split(".")
    return capital(f"{owner}, {name}")


def capital(text: str) -> str:
    """A phrase at the start of a line."""
    return text[:1].upper() + text[1:]


def _quantity(given: Input) -> str:
    return "length" if given.unit == "mm" else "none"


# --- one frame ------------------------------------------------------------------------------


def frame_opening(detail: Detail, changes: int | None, units: Units = METRIC) -> str:
    """The frame on the bench in one sentence. changes : fields that differ from the start."""
    said = (
        f"{plain(detail.layout.name)}: {units.write(detail.mass, 'mass')} of tube that takes "
        f"{units.write(detail.twist, 'twist')} to twist"
    )
    if changes is None:
        return said + "."
    if changes == 0:
        return said + ", as the starting vehicle stands."
    return said + f", {count(changes, 'change')} from the starting vehicle."


def changes_between(now: Layout, then: Layout) -> int:
    """How many fields of two layouts differ."""
    before = {f.path: f.value for f in fields(then)}
    after = {f.path: f.value for f in fields(now)}
    tubes = {p for p in {**before, **after} if p.startswith("tube.")}
    groups = {p.rsplit(".", 1)[0] for p in tubes if before.get(p) != after.get(p)}
    others = {p for p in {**before, **after} if p not in tubes and before.get(p) != after.get(p)}
    rest = [
        name
        for name in ("front_mount", "rear_mount", "entry", "masses")
        if getattr(now, name) != getattr(then, name)
    ]
    return len(groups) + len(others) + len(rest)


def frame_verdict(detail: Detail, units: Units) -> str:
    """What a frame is good or bad at, in two or three sentences."""
    said = (
        how_it_carries(detail.axial_share),
        plain(_in_units(bay_words(detail), units)),
        where_it_pays(detail),
    )
    return "\n".join(f"- {sentence}" for sentence in said if sentence)


def _in_units(text: str, units: Units) -> str:
    """A sentence with its millimetres in the units shown, and room before per cent."""
    shown = re.sub(r"(\d+) mm", lambda found: units.write(float(found[1]), "length"), text)
    return shown.replace("%", "\u00a0%")


def how_it_carries(axial_share: float) -> str:
    """What the axial share says about the frame."""
    share = percent(axial_share)
    if axial_share >= 0.9:
        return (
            f"It works as a true space frame: {share} of the twist is carried by tension and "
            "compression."
        )
    if axial_share >= 0.5:
        return (
            f"Partly a space frame: {share} of the twist is carried by tension and compression, "
            "the rest by bending and torsion where faces are open."
        )
    return (
        f"It lives on bending and torsion of its members: only {share} of the twist is carried by "
        "tension and compression."
    )


def where_it_pays(detail: Detail) -> str:
    """Which group earns its mass most and which least, by energy share against mass share."""
    skeleton, masses = detail.batch.skeleton, detail.bill.by_group
    energy = np.zeros(len(skeleton.groups))
    np.add.at(energy, skeleton.group, detail.share)
    shares = {
        name: (float(energy[g]), masses[name] / detail.mass)
        for g, name in enumerate(skeleton.groups)
        if name in masses
    }
    telling = {n: (e, m) for n, (e, m) in shares.items() if e > 0.03 or m > 0.03}
    if len(telling) < 2:
        return ""
    most = max(telling, key=lambda n: telling[n][0] / max(telling[n][1], 1e-9))
    least = min(telling, key=lambda n: telling[n][0] / max(telling[n][1], 1e-9))

    def said(name: str) -> str:
        stored, mass = telling[name]
        return f"{percent(stored)} of the twist energy in {percent(mass)} of the mass"

    return (
        f"More tube pays most in the {plain(most)} ({said(most)}), least in the {plain(least)} "
        f"({said(least)})."
    )


def candidate_opening(
    detail: Detail, frame: int, off: Distance | None, tried: bool, units: Units
) -> str:
    """The frame being detailed in one sentence."""
    said = (
        f"Frame {frame:,} of {plain(detail.layout.name)}: {units.write(detail.mass, 'mass')}, "
        f"{units.write(detail.twist, 'twist')}, "
        f"{units.write(detail.twist / detail.mass, 'twist per mass')}"
    )
    if tried:
        return f"{said}; changed from the frame of the sweep."
    if off is not None and _on_front(off):
        return f"{said}. No other frame of the sweep beats it."
    return said + "."
