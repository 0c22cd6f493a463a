"""Whatever a file holds, a command solves it or refuses it in one line."""

from __future__ import annotations

import copy
import json

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from explorer.handover import frame_file
from sweeps.catalogue import catalogue
from tests.explorer.detailed import plain_ladder
from tests.explorer.spoken import one_line, strict

VEHICLES = sorted(catalogue().vehicles)
SCALARS = st.one_of(
    st.none(),
    st.booleans(),
    st.integers(-3, 3),
    st.integers(),
    st.floats(),
    st.sampled_from([1e308, -1e308, 1e-320, 10**400, 1e9, "", "x", "\n", "\u0000", "\ud800"]),
    st.text(max_size=8),
    st.sampled_from(["A", "rigid", "pinned", "front low left", "x", "round tube"]),
)
JUNK = st.recursive(
    SCALARS,
    lambda part: (
        st.lists(part, max_size=6) | st.dictionaries(st.text(max_size=5), part, max_size=4)
    ),
    max_leaves=12,
)
WHOLE = json.loads(frame_file(plain_ladder()))
LINES = {name: text.split("\n") for name, text in catalogue().vehicles.items()}
MANY = settings(
    max_examples=100, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None
)


@st.composite
def spoilt_frames(draw) -> object:
    """A sound frame file with one to three entries put wrong, left out or added."""
    data = copy.deepcopy(WHOLE)
    for _ in range(draw(st.integers(1, 3))):
        here = data
        while True:
            keys = sorted(here) if isinstance(here, dict) else range(len(here))
            if not keys:
                break
            key = draw(st.sampled_from(keys))
            if isinstance(here[key], dict | list) and draw(st.integers(0, 3)):
                here = here[key]
                continue
            what = draw(st.integers(0, 5))
            if what == 0:
                del here[key]
            elif what == 1 and isinstance(here, dict):
                here[draw(st.text(max_size=4))] = draw(JUNK)
            else:
                here[key] = draw(JUNK)
            break
    return data


VALUES = st.sampled_from(
    ["nan", "inf", "-inf", "0", "-1", "1e308", "1e-300", "''", "'x'", "[]", "{}", "true", "[1,2]",
     "21", "1000000", "1979-05-27", "'open'", "'cross'", "'K'", "'mild steel'", "{from=1,to=2}",
     "{from=-inf,to=inf}", "{choices=[]}", "{choices=['a']}", "{choices=[[]]}", "{choices=[1,2]}",
     "99999999999999999999999", "'metric-round/25'", '"\\u0000"', "[[", "="]
)  # fmt: skip
EXTRA = st.sampled_from(
    ["[x]", "[[station]]", "[[span]]", "[[hoop]]", "[tube.'upper rails']", "foo = 1", "[vary]",
     "[[mass]]", "[sweep]", "'a.b.c' = {from = 1, to = 2}", "#", "\x00", "]"]
)  # fmt: skip


@st.composite
def spoilt_studies(draw) -> str:
    """A starting vehicle with one to four lines put wrong, left out, doubled or added."""
    lines = list(LINES[draw(st.sampled_from(VEHICLES))])
    for _ in range(draw(st.integers(1, 4))):
        k = draw(st.integers(0, len(lines) - 1))
        what = draw(st.integers(0, 5))
        if what == 0:
            del lines[k]
        elif what == 1:
            lines.insert(k, draw(st.sampled_from(lines)))
        elif what == 2:
            lines.insert(k, draw(EXTRA))
        elif "=" in lines[k]:
            lines[k] = f"{lines[k].split('=')[0]}= {draw(VALUES)}"
    return "\n".join(lines)


def ends_well(said, *words) -> None:
    code, out, err = said(*words)
    if code == 0:
        if "--json" in words:
            strict(out)
        return
    assert (code, out) == (2, ""), err
    assert err.count("\n") == 1
    assert "Traceback" not in err
    assert " = " in err or "moves freely" in err


@MANY
@given(spoilt_frames(), st.sampled_from([[], ["--json"], ["--modes", "2"]]))
def test_whatever_stands_in_a_frame_file_is_solved_or_refused(said, tmp_path, data, more):
    path = tmp_path / "spoilt.json"
    path.write_text(json.dumps(data), encoding="utf-8")
    ends_well(said, "solve", path, *more)


@MANY
@given(spoilt_studies(), st.booleans())
def test_whatever_stands_in_a_study_is_solved_or_refused(said, tmp_path, text, machine):
    path = tmp_path / "spoilt.toml"
    path.write_text(text, encoding="utf-8")
    ends_well(said, "frame", path, *(["--json"] if machine else []))


@MANY
@given(st.binary(max_size=200), st.sampled_from(["solve", "frame"]))
def test_any_bytes_are_refused(said, tmp_path, data, command):
    path = tmp_path / "bytes"
    path.write_bytes(data)
    code, out, err = said(command, path)
    assert (code, out) == (2, "")
    assert one_line(err)


@pytest.mark.parametrize("command", ["solve", "frame"])
@pytest.mark.parametrize(
    "data",
    [
        b"[" * 5000,
        b"{" * 5000,
        b'{"nodes": ' + b"9" * 5000 + b"}",
        b"a = " + b"9" * 400,
        b"a = " + b"[" * 5000,
        b"\xff\xfe",
        b"",
    ],
    ids=["lists", "objects", "digits", "more digits", "nested lists", "no letters", "nothing"],
)
def test_files_that_lead_readers_astray_are_refused(said, tmp_path, command, data):
    path = tmp_path / "astray"
    path.write_bytes(data)
    code, out, err = said(command, path)
    assert (code, out) == (2, "")
    assert one_line(err)


@pytest.mark.parametrize(
    "name, data",
    [
        ("run.json", b""),
        ("run.json", b"[]"),
        ("run.json", b'{"format": 1}'),
        ("run.json", b'{"format": "one"}'),
        ("run.json", b"\xff"),
        ("study.toml", b""),
        ("study.toml", b"\xff"),
        ("study.toml", b"[vehicle]\nname = 3"),
        ("blocks/00000.parquet", b""),
        ("blocks/00000.parquet", b"PAR1 no rows PAR1"),
    ],
)
def test_a_run_folder_that_was_spoilt_is_refused_or_resumed(said, tmp_path, name, data):
    folder = tmp_path / "run"
    assert said("sweep", "orchard-truck", "--samples", 8, "--into", folder)[0] == 0
    (folder / name).write_bytes(data)
    for words in (
        ("drivers", folder),
        ("front", folder),
        ("detail", folder, 3, "--into", tmp_path / "out"),
    ):
        code, out, err = said(*words)
        assert (code, out) == (2, ""), (words, err)
        assert one_line(err), err
