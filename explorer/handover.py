"""Every file that one frame is taken away in: names and texts come out, nothing is written yet."""

from __future__ import annotations

import io
import json
import zipfile
from collections.abc import Callable, Mapping

from explorer.detail_drawing import drawing_of_detail
from explorer.exports import (
    CUT_COLUMNS,
    JOINT_COLUMNS,
    STOCK_COLUMNS,
    centre_lines_dxf,
    csv_text,
    cut_rows,
    joint_rows,
    stock_rows,
)
from explorer.report import Subject, report_html
from explorer.units import METRIC, Units
from explorer.views_svg import Colour, View, view_svg
from model.results.detail import Detail, own_tubes
from model.solver.frame_export import to_json

CONTENTS = {
    "report.html": "everything on one page, for reading and printing",
    "cut-list.csv": "tubes to cut: size, length between joint centres, quantity, end joints",
    "joints.csv": "where each joint lies and which members meet there",
    "stock.csv": "tube to buy by size and material, net",
    "frame.json": "joints, members, supports and load cases, for `twistfront solve`",
    "centre-lines.dxf": "member centre lines in millimetres, a layer a group",
    "side.svg": "left side with dimensions",
    "plan.svg": "plan with dimensions",
    "front.svg": "front with dimensions",
    "isometric.svg": "from the front left, coloured by share of the strain energy under twist",
}
"""The files and what is in them."""

_VIEWS: Mapping[str, View] = {
    "side.svg": "side",
    "plan.svg": "plan",
    "front.svg": "front",
    "isometric.svg": "3d",
}


def files(detail: Detail, subject: Subject, units: Units = METRIC) -> dict[str, str]:
    """Text of every file by its name, in the order of ``CONTENTS``; units as ``text_of``."""
    return {name: text_of(name, detail, subject, units) for name in CONTENTS}


def text_of(name: str, detail: Detail, subject: Subject, units: Units = METRIC) -> str:
    """Text of one file of ``CONTENTS``.

    units : of the report and the drawings; tables and drawing exchange keep kg and mm.
    """
    if name in _VIEWS:
        view = _VIEWS[name]
        drawing = drawing_of_detail(detail, f"{subject.name}: {subject.title}")
        colour: Colour = "value" if view == "3d" else "plain"
        return view_svg(drawing, view, units=units, colour=colour, ident=view)
    bill = detail.bill
    makers: dict[str, Callable[[], str]] = {
        "report.html": lambda: report_html(detail, subject, units),
        "cut-list.csv": lambda: csv_text(CUT_COLUMNS, cut_rows(bill)),
        "joints.csv": lambda: csv_text(JOINT_COLUMNS, joint_rows(bill)),
        "stock.csv": lambda: csv_text(STOCK_COLUMNS, stock_rows(bill)),
        "frame.json": lambda: frame_file(detail, subject),
        "centre-lines.dxf": lambda: centre_lines_dxf(detail.batch),
    }
    return makers[name]()


def frame_file(detail: Detail, subject: Subject | None = None) -> str:
    """The frame as a frame file: cases ``twist`` (1 N·m) and ``bending`` (1 N)."""
    data = to_json(detail.batch, own_tubes(detail.layout, detail.batch))
    if subject is not None:
        head = {"name": f"{subject.name}: {subject.title}"}
        data = head | ({"about": subject.about} if subject.about else {}) | data
    return json.dumps(data, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def archive(texts: Mapping[str, str], folder: str) -> bytes:
    """The files in one ZIP archive, inside a folder of that name; equal texts, equal bytes."""
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as packed:
        for name, text in texts.items():
            entry = zipfile.ZipInfo(f"{folder}/{name}")
            entry.compress_type = zipfile.ZIP_DEFLATED
            entry.external_attr = 0o644 << 16
            packed.writestr(entry, text.encode("utf-8"))
    return out.getvalue()
