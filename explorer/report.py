"""One frame as a report: a single HTML page that needs nothing else and prints on A4."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence, Set
from dataclasses import dataclass, field
from html import escape
from pathlib import Path

import numpy as np

from explorer.detail_drawing import KINDS, drawing_of_detail
from explorer.exports import cut_rows, joint_rows, stock_rows
from explorer.meanings import CAUTIONS, definitions
from explorer.numbers import count, number, percent, signed
from explorer.plots_svg import profile_svg, share_bar
from explorer.theme import LIGHT
from explorer.units import METRIC, Units
from explorer.views_svg import View, view_svg
from model.frame.layout import Tube
from model.frame.variants import every_brace
from model.frame.vocabulary import RIGID
from model.results.detail import Detail, bay_words, own_tubes
from model.results.whatif import WhatIf, ranked

_WIDTHS: dict[View, int] = {"side": 900, "plan": 900, "front": 620}
"""Of the plain views [px]."""

_STYLE = (Path(__file__).parent / "assets" / "report.css").read_text(encoding="utf-8")


@dataclass(frozen=True)
class Subject:
    """What a report is about.

    name : of the vehicle; title : of the frame ("Frame 812"); about : a note on the vehicle.
    inputs : label and value, as text, of everything that was chosen for this frame.
    origin : label and text of where it comes from (run, seed, version, date).
    """

    name: str
    title: str
    about: str = ""
    inputs: tuple[tuple[str, str], ...] = ()
    origin: tuple[tuple[str, str], ...] = field(default=())


def report_html(detail: Detail, subject: Subject, units: Units = METRIC) -> str:
    """The report of one frame as the text of an HTML page."""
    heading = f"{subject.name}: {subject.title}"
    sections = (
        _head(subject),
        _key_numbers(detail, units),
        _views(detail, heading, units),
        _where_it_twists(detail, units),
        _what_if(detail, ranked(detail.layout), units),
        _to_build(detail),
        _inputs(subject),
        _meaning(detail),
    )
    body = "\n".join(part for part in sections if part)
    return (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        '<meta http-equiv="Content-Security-Policy" '
        "content=\"default-src 'none'; style-src 'unsafe-inline'\">\n"
        f"<title>{escape(heading)}</title>\n<style>\n{_STYLE}</style>\n</head>\n"
        f"<body>\n<main>\n{body}\n</main>\n</body>\n</html>\n"
    )


def _head(subject: Subject) -> str:
    about = f'<p class="about">{escape(subject.about)}</p>' if subject.about else ""
    origin = " · ".join(f"{escape(label)} {escape(text)}" for label, text in subject.origin)
    return (
        f"<header>\n<h1>{escape(subject.title)} <small>{escape(subject.name)}</small></h1>\n"
        f'{about}\n<p class="origin">{origin}</p>\n</header>'
    )


def _key_numbers(detail: Detail, units: Units) -> str:
    answers = detail.answers
    tiles = (
        ("Mass", units.write(detail.mass, "mass")),
        ("Twist stiffness", units.write(detail.twist, "twist")),
        ("Bending stiffness", units.write(detail.bend, "bend")),
        ("Twist stiffness per mass", units.write(detail.twist / detail.mass, "twist per mass")),
        ("Axial share", percent(detail.axial_share)),
        ("Tube length", units.write(float(answers.stock[0]), "stock")),
    )
    cells = "\n".join(f"<div><dt>{name}</dt><dd>{escape(text)}</dd></div>" for name, text in tiles)
    x, _, z = (units.write(v * 1e3, "length") for v in detail.bill.centre)
    return (
        f'<section>\n<h2>Key numbers</h2>\n<dl class="tiles">\n{cells}\n</dl>\n'
        f"<p>{count(len(detail.bill.joints), 'joint')}, "
        f"{count(int(detail.batch.present[0].sum()), 'member')}. Centre of gravity of the bare "
        f"frame {x} behind the front axle, {z} above the ground.</p>\n</section>"
    )


def _views(detail: Detail, heading: str, units: Units) -> str:
    drawing = drawing_of_detail(detail, heading)
    first = view_svg(drawing, "3d", units=units, colour="value", ident="share")
    others = "\n".join(
        f"<figure>{view_svg(drawing, view, units=units, width=width, ident='plain')}</figure>"
        for view, width in _WIDTHS.items()
    )
    return (
        f'<section>\n<h2>The frame</h2>\n<figure class="wide">{first}<figcaption>Thick and dark: '
        "members that store most of the strain energy when the frame is twisted.</figcaption>"
        f"</figure>\n{others}\n</section>"
    )


def _where_it_twists(detail: Detail, units: Units) -> str:
    skeleton = detail.batch.skeleton
    axles = (
        float(detail.batch.xyz[0, skeleton.front[0], 0]),
        float(detail.batch.xyz[0, skeleton.rear[0], 0]),
    )
    sentence = bay_words(detail)
    by_kind = detail.energy.sum(axis=0)
    stored = ", ".join(
        f"{percent(float(part))} in {kind}"
        for kind, part in zip(KINDS, by_kind, strict=True)
        if part > 5e-5
    )
    most = [
        (skeleton.member_names[m], skeleton.groups[skeleton.group[m]], percent(share))
        for m, share in _greatest(detail)
    ]
    return (
        f"<section>\n<h2>Where it twists</h2>\n<p>{escape(sentence)} Strain energy: "
        f"{escape(stored)}.</p>\n"
        f"<figure>{profile_svg(detail.profile, axles, sentence, units)}</figure>\n"
        f"{_groups(detail, units)}\n"
        + _table("Members that store most", ("Member", "Group", "Energy share"), most, right={2})
        + "\n</section>"
    )


def _greatest(detail: Detail, most: int = 8) -> list[tuple[int, float]]:
    order = np.argsort(-detail.share, kind="stable")[:most]
    return [(int(m), float(detail.share[m])) for m in order if detail.share[m] > 0]


def _groups(detail: Detail, units: Units) -> str:
    """Each group's tube, mass and part of the strain energy under twist."""
    skeleton, bill = detail.batch.skeleton, detail.bill
    tubes = own_tubes(detail.layout, detail.batch)
    energy = np.zeros((len(skeleton.groups), len(KINDS)))
    np.add.at(energy, skeleton.group, detail.energy)
    full = float(energy.sum(axis=1).max())
    rows = []
    for g in np.argsort(-energy.sum(axis=1), kind="stable"):
        name = skeleton.groups[g]
        if name not in bill.by_group:
            continue
        tube, mass = tubes[name], bill.by_group[name]
        rows.append(
            (
                name,
                f"{tube.shape} {tube.label}",
                tube.material.name,
                _ends(tube),
                units.write(mass, "mass"),
                percent(float(energy[g].sum())),
                _Raw(share_bar(energy[g].tolist(), full, KINDS)),
            )
        )
    key = " ".join(
        f'<span class="key" style="background:{LIGHT.palette[k]}"></span> {kind}'
        for k, kind in enumerate(KINDS)
        if k < 4 or energy[:, k].any()
    )
    head = ("Group", "Tube [mm]", "Material", "Joints", "Mass", "Energy share", "Stored as")
    return _table("Groups and their tubes", head, rows, right={4, 5}) + f"<p>{key}</p>"


def _ends(tube: Tube) -> str:
    turning, pulling = tube.rotation, tube.axial
    parts = []
    if turning == 0:
        parts.append("pinned")
    elif turning != RIGID:
        parts.append(f"{number(turning)} N·m/rad")
    if pulling != RIGID:
        parts.append(f"{number(pulling)} N/m along")
    return ", ".join(parts) or "welded, rigid"


def _what_if(detail: Detail, found: WhatIf, units: Units, most: int = 10, least: int = 5) -> str:
    """The changes worth a look; rails are no candidates to leave out."""
    skeleton = every_brace(detail.layout)[0].skeleton  # the one that the changes number
    rails = {g for g, name in enumerate(skeleton.groups) if "rails" in name}
    gains: list[tuple[str, ...]] = []
    losses: list[tuple[str, ...]] = []
    for k, change in enumerate(found.changes):
        if change.kind == "remove":
            own = all(int(skeleton.group[m]) not in rails for m in change.remove)
            if own and found.twist[k] > 0 and len(losses) < least:
                losses.append(_change(found, k, units))
        elif found.gain[k] > 0 and len(gains) < most:
            gains.append(_change(found, k, units))
    head = ("Change", "Twist stiffness", "Mass", "For each unit of mass", "Twist stiffness then")
    right = {1, 2, 3, 4}
    tables = [
        _table("What would stiffen it, best for its mass first", head, gains, right=right),
        _table("What could go, least loss for its mass first", head, losses, right=right),
    ]
    if not any(tables):
        return ""
    return (
        "<section>\n<h2>What if</h2>\n<p>Each change alone, computed exactly on this frame. Gains "
        "do not add up: while a face is open its braces are worth little one by one.</p>\n"
        + "\n".join(tables)
        + "\n</section>"
    )


def _change(found: WhatIf, k: int, units: Units) -> tuple[str, ...]:
    change = found.changes[k]
    twist, mass = (float(a[k]) for a in (found.gain, found.mass))
    return (
        f"{change.kind} {change.name}" if change.kind != "exchange" else change.name,
        signed(units.shown(twist, "twist"), units.unit("twist")),
        signed(units.shown(mass, "mass"), units.unit("mass")),
        units.write(float(found.gain_per_kg[k]), "twist per mass"),
        units.write(float(found.twist[k]), "twist"),
    )


def _to_build(detail: Detail) -> str:
    """The tables of the workshop; lengths in the units of the files, whatever is displayed."""
    bill = detail.bill
    materials = {row.material for row in bill.stock}
    of_one = f", all of {next(iter(materials))}" if len(materials) == 1 else ""
    cuts = [
        (r["item"], r["group"], _tube(r, not of_one), _one(r["length_mm"]), r["quantity"],
         _three(r["mass_kg"]), r["end_joints"])
        for r in cut_rows(bill)
    ]  # fmt: skip
    joints = [
        (r["joint"], _one(r["x_mm"]), _one(r["y_mm"]), _one(r["z_mm"]), r["members"])
        for r in joint_rows(bill)
    ]
    stock = [
        (_tube(r, True), _three(r["length_m"]), _three(r["mass_kg"]), r["pieces"])
        for r in stock_rows(bill)
    ]
    cut_head = ("Item", "Group", "Tube [mm]", "Length [mm]", "Quantity", "Mass [kg]",
                "Between joints")  # fmt: skip
    stock_head = ("Tube [mm]", "Length [m]", "Mass [kg]", "Pieces")
    joint_head = ("Joint", "x [mm]", "y [mm]", "z [mm]", "Members that meet")
    return (
        "<section>\n<h2>To build it</h2>\n<p>Lengths run between joint centres; x rearward from "
        "the front axle, y to the right, z up from the ground. Tube to buy is net, without "
        "cutting waste.</p>\n"
        + _table(f"Cut list{of_one}", cut_head, cuts, right={0, 3, 4, 5}, whole={1, 2})
        + _table("Tube to buy", stock_head, stock, right={1, 2, 3})
        + _table("Joints", joint_head, joints, right={1, 2, 3}, whole={0})
        + "\n</section>"
    )


def _tube(row: Mapping[str, object], material: bool) -> str:
    return f"{row['shape']} {row['size_mm']}" + (f", {row['material']}" if material else "")


def _one(value: object) -> str:
    return f"{value:.1f}".replace("-", "−")


def _three(value: object) -> str:
    return f"{value:.3f}"


def _inputs(subject: Subject) -> str:
    table = _table("What was chosen for this frame", ("Input", "Value"), subject.inputs, right={1})
    return f"<section>\n<h2>Inputs</h2>\n{table}\n</section>" if table else ""


def _meaning(detail: Detail) -> str:
    terms = "\n".join(
        f"<dt>{name}</dt><dd>{escape(text)}</dd>"
        for name, text in definitions(detail.layout.entry).items()
    )
    cautions = "\n".join(f"<li>{escape(text)}</li>" for text in CAUTIONS)
    return (
        f"<section>\n<h2>What the numbers mean</h2>\n<dl>\n{terms}\n</dl>\n</section>\n"
        f"<section>\n<h2>Cautions</h2>\n<ul>\n{cautions}\n</ul>\n</section>"
    )


class _Raw(str):
    """Text that is markup already."""


def _table(
    caption: str,
    head: Sequence[str],
    rows: Iterable[Sequence[object]],
    right: Set[int] = frozenset(),
    whole: Set[int] = frozenset(),
) -> str:
    """A table, or nothing when there are no rows.

    right : columns that hold numbers; whole : columns whose cells stay on one line.
    """

    def cell(value: object, column: int, tag: str = "td", scope: str = "") -> str:
        kind = "right" if column in right else "whole" if column in whole else ""
        kind = f' class="{kind}"' if kind else ""
        text = value if isinstance(value, _Raw) else escape(str(value))
        return f"<{tag}{scope}{kind}>{text}</{tag}>"

    lines = [
        "<tr>" + "".join(cell(value, c) for c, value in enumerate(row)) + "</tr>" for row in rows
    ]
    if not lines:
        return ""
    body, kind = "\n".join(lines), ' class="short"' if len(lines) <= 15 else ""
    titles = "".join(cell(title, c, "th", ' scope="col"') for c, title in enumerate(head))
    return (
        f"<table{kind}>\n<caption>{escape(caption)}</caption>\n<thead><tr>{titles}</tr></thead>\n"
        f"<tbody>\n{body}\n</tbody>\n</table>\n"
    )
