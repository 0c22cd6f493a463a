"""Files a frame is taken away in: tables as CSV, centre lines as DXF; text comes out."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence

import numpy as np

from model.frame.batch import Batch
from model.frame.bill import Bill

CUT_COLUMNS = (
    "item",
    "group",
    "shape",
    "size_mm",
    "material",
    "length_mm",
    "quantity",
    "mass_each_kg",
    "mass_kg",
    "members",
    "end_joints",
)
JOINT_COLUMNS = ("joint", "x_mm", "y_mm", "z_mm", "members_meeting", "members")
STOCK_COLUMNS = ("shape", "size_mm", "material", "length_m", "mass_kg", "pieces")

_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")


def cut_rows(bill: Bill) -> list[dict[str, object]]:
    """The cut list as rows: length between joint centres, quantity and end joints of each item."""
    return [
        dict(
            zip(
                CUT_COLUMNS,
                (
                    cut.item,
                    cut.group,
                    cut.shape,
                    cut.size,
                    cut.material,
                    round(cut.length * 1e3, 1),
                    cut.quantity,
                    round(cut.mass_each, 4),
                    round(cut.mass_each * cut.quantity, 4),
                    "; ".join(cut.members),
                    "; ".join(cut.ends),
                ),
                strict=True,
            )
        )
        for cut in bill.cuts
    ]


def joint_rows(bill: Bill) -> list[dict[str, object]]:
    """The joint table as rows: position and the members that meet."""
    return [
        dict(
            zip(
                JOINT_COLUMNS,
                (
                    joint.name,
                    *(round(v * 1e3, 1) for v in (joint.x, joint.y, joint.z)),
                    len(joint.members),
                    "; ".join(joint.members),
                ),
                strict=True,
            )
        )
        for joint in bill.joints
    ]


def stock_rows(bill: Bill) -> list[dict[str, object]]:
    """Tube to buy as rows: net length and mass of each size, without cutting waste."""
    return [
        dict(
            zip(
                STOCK_COLUMNS,
                (s.shape, s.size, s.material, round(s.length, 3), round(s.mass, 3), s.pieces),
                strict=True,
            )
        )
        for s in bill.stock
    ]


def csv_text(columns: Sequence[str], rows: Iterable[dict[str, object]]) -> str:
    """Rows as CSV; text that a spreadsheet would run as a formula gets a leading apostrophe."""
    out = io.StringIO()
    writer = csv.DictWriter(out, columns, lineterminator="\r\n")
    writer.writeheader()
    for row in rows:
        writer.writerow({key: _harmless(value) for key, value in row.items()})
    return out.getvalue()


def _harmless(value: object) -> object:
    if isinstance(value, str) and value.startswith(_FORMULA_STARTS):
        return "'" + value
    return value


def centre_lines_dxf(batch: Batch) -> str:
    """Member centre lines of the first frame as a DXF drawing in millimetres, a layer a group."""
    from ezdxf.filemanagement import new as new_drawing  # slow to load, seldom needed

    document = new_drawing("R2010", setup=True)
    document.header["$INSUNITS"] = 4  # millimetres
    space = document.modelspace()
    skeleton = batch.skeleton
    for number, group in enumerate(skeleton.groups):
        document.layers.add(group, color=1 + number % 6)
    for m in np.flatnonzero(batch.present[0]):
        start, end = (batch.xyz[0, j] * 1e3 for j in skeleton.members[m])
        layer = skeleton.groups[skeleton.group[m]]
        space.add_line(tuple(start), tuple(end), dxfattribs={"layer": layer})
    out = io.StringIO()
    document.write(out)
    return out.getvalue()
