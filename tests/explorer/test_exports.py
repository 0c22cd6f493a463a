"""Tables, drawings and frame files that leave the house say what the frame is."""

import csv
import io
import json
import math
import xml.etree.ElementTree as ET
import zipfile

import numpy as np
import pytest
from ezdxf.filemanagement import read as read_drawing

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
from explorer.handover import CONTENTS, archive, files, frame_file
from model.frame.layout import with_span
from model.results.detail import Detail, examine
from model.solver.frame_file import solve_file
from tests.explorer.detailed import (
    SUBJECT,
    awkward_box,
    braced_box,
    plain_ladder,
    springy_ladder,
)
from tests.model.frame.layouts import box

FRAMES = [braced_box, plain_ladder, springy_ladder]


def read(text):
    return list(csv.DictReader(io.StringIO(text, newline="")))


@pytest.fixture(params=FRAMES, ids=lambda make: make.__name__)
def detail(request) -> Detail:
    return request.param()


def test_the_cut_list_adds_up_to_the_frame(detail):
    rows = read(csv_text(CUT_COLUMNS, cut_rows(detail.bill)))
    assert sum(int(r["quantity"]) for r in rows) == detail.batch.present[0].sum()
    # masses are written to 0.1 g an item
    assert sum(float(r["mass_kg"]) for r in rows) == pytest.approx(
        detail.mass, abs=1e-4 * len(rows)
    )
    # lengths are written to 0.1 mm, pieces of one item agree to 0.1 mm
    long = sum(float(r["length_mm"]) * int(r["quantity"]) for r in rows)
    pieces = sum(int(r["quantity"]) for r in rows)
    assert long / 1e3 == pytest.approx(detail.answers.stock[0], abs=2e-4 * pieces)


def test_the_cut_list_names_every_member_and_its_ends_once(detail):
    skeleton = detail.batch.skeleton
    rows = read(csv_text(CUT_COLUMNS, cut_rows(detail.bill)))
    members = [name for r in rows for name in r["members"].split("; ")]
    here = np.flatnonzero(detail.batch.present[0])
    assert sorted(members) == sorted(skeleton.member_names[m] for m in here)
    ends = dict(
        zip(members, (pair for r in rows for pair in r["end_joints"].split("; ")), strict=True)
    )
    for m in here:
        start, end = (skeleton.joints[j] for j in skeleton.members[m])
        assert ends[skeleton.member_names[m]] == f"{start} - {end}"


def test_the_joint_table_places_every_joint(detail):
    rows = {r["joint"]: r for r in read(csv_text(JOINT_COLUMNS, joint_rows(detail.bill)))}
    for j, name in enumerate(detail.batch.skeleton.joints):
        at = [float(rows[name][key]) for key in ("x_mm", "y_mm", "z_mm")]
        assert at == pytest.approx(detail.batch.xyz[0, j] * 1e3, abs=0.05)
        assert int(rows[name]["members_meeting"]) == len(rows[name]["members"].split("; "))
    met = sum(int(r["members_meeting"]) for r in rows.values())
    assert met == 2 * detail.batch.present[0].sum()


def test_stock_to_buy_is_the_length_and_mass_of_the_frame(detail):
    rows = read(csv_text(STOCK_COLUMNS, stock_rows(detail.bill)))
    assert sum(float(r["mass_kg"]) for r in rows) == pytest.approx(detail.mass, abs=2e-3)
    assert sum(float(r["length_m"]) for r in rows) == pytest.approx(
        detail.answers.stock[0], abs=2e-3
    )


def test_text_that_a_spreadsheet_would_run_is_made_harmless():
    for columns, rows in (
        (CUT_COLUMNS, cut_rows(awkward_box().bill)),
        (STOCK_COLUMNS, stock_rows(awkward_box().bill)),
    ):
        materials = {row["material"] for row in read(csv_text(columns, rows))}
        assert "'=1+1 <script>alert('x')</script>" in materials
        assert not any(m.startswith("=") for m in materials)


def test_negative_coordinates_stay_numbers():
    rows = read(csv_text(JOINT_COLUMNS, joint_rows(plain_ladder().bill)))
    assert min(float(r["y_mm"]) for r in rows) == -400.0


def test_the_drawing_exchange_file_holds_every_centre_line(detail):
    document = read_drawing(io.StringIO(centre_lines_dxf(detail.batch)))
    assert not document.audit().errors
    assert document.header["$INSUNITS"] == 4  # millimetres
    lines = document.modelspace().query("LINE")
    skeleton = detail.batch.skeleton
    here = np.flatnonzero(detail.batch.present[0])
    assert len(lines) == len(here)
    for line, m in zip(lines, here, strict=True):
        i, j = skeleton.members[m]
        assert np.allclose(tuple(line.dxf.start), detail.batch.xyz[0, i] * 1e3, atol=1e-6)
        assert np.allclose(tuple(line.dxf.end), detail.batch.xyz[0, j] * 1e3, atol=1e-6)
        assert line.dxf.layer == skeleton.groups[skeleton.group[m]]


def twist_of(answer, detail):
    """Twist stiffness read off the solved frame file: vertical movement of the four mounts."""
    u, batch = answer["cases"]["twist"]["displacements"], detail.batch
    angle = 0.0
    for (left, right), sign in ((batch.skeleton.front, 1), (batch.skeleton.rear, -1)):
        base = batch.xyz[0, right, 1] - batch.xyz[0, left, 1]
        names = batch.skeleton.joints
        angle += sign * (u[names[right]][2] - u[names[left]][2]) / base
    return math.pi / 180 / angle


def test_the_frame_file_solves_to_the_same_twist_stiffness_and_mass(detail):
    answer = solve_file(frame_file(detail, SUBJECT))
    # the two solvers share the member; what differs is rounding
    assert twist_of(answer, detail) == pytest.approx(detail.twist, rel=1e-9)
    assert answer["mass_kg"] == pytest.approx(detail.mass, rel=1e-12)


def test_the_frame_file_solves_to_the_same_bending_stiffness():
    detail = braced_box()
    moved = solve_file(frame_file(detail))["cases"]["bending"]["displacements"]
    # the middle ring of eight bays lies half-way; its two lower joints carry the force
    down = [moved[f"middle 4 low {side}"][2] for side in ("left", "right")]
    axles = [
        moved[f"{end} low {side}"][2] for end in ("front", "rear") for side in ("left", "right")
    ]
    deflection = sum(axles) / 4 - sum(down) / 2
    assert 1e-3 / deflection == pytest.approx(detail.bend, rel=1e-9)


def test_the_frame_file_is_held_without_constraint(detail):
    data = json.loads(frame_file(detail))
    assert sum(len(held) for held in data["supports"].values()) == 6
    answer = solve_file(data)
    for case in ("twist", "bending"):
        reactions = [abs(v) for row in answer["cases"][case]["reactions"].values() for v in row]
        assert max(reactions) < 1e-9  # of a couple of 1 N·m or a force of 1 N


def test_members_that_are_left_out_are_not_handed_over():
    detail = examine(with_span(box(2, "single"), "middle", top="open"))
    assert len(json.loads(frame_file(detail))["members"]) == detail.batch.present[0].sum()
    lines = read_drawing(io.StringIO(centre_lines_dxf(detail.batch))).modelspace().query("LINE")
    assert len(lines) == detail.batch.present[0].sum()


def test_every_file_of_a_frame_is_there_and_drawings_are_sound(detail):
    texts = files(detail, SUBJECT)
    assert list(texts) == list(CONTENTS)
    for name, text in texts.items():
        assert text.strip(), name
        if name.endswith(".svg"):
            root = ET.fromstring(text)
            assert root.tag == "{http://www.w3.org/2000/svg}svg"
            references = [v for e in root.iter() for k, v in e.attrib.items() if "href" in k]
            assert references == []


def test_the_archive_holds_the_same_texts_and_the_same_bytes_each_time():
    texts = files(plain_ladder(), SUBJECT)
    packed = archive(texts, "frame-12")
    assert packed == archive(texts, "frame-12")
    with zipfile.ZipFile(io.BytesIO(packed)) as opened:
        assert opened.testzip() is None
        assert {n: opened.read(n).decode() for n in opened.namelist()} == {
            f"frame-12/{name}": text for name, text in texts.items()
        }
