"""The command line does what the pages do, answers bad input in one line and never with a trace."""

from __future__ import annotations

import io
import json
import os
import signal
import subprocess
import sys
from pathlib import Path

import pytest

import explorer
from explorer import commands
from explorer.commands import main
from explorer.handover import CONTENTS, frame_file
from explorer.run_accounts import KEYS
from model.results.detail import examine
from sweeps.catalogue import catalogue
from sweeps.drivers import drivers
from sweeps.evaluate import evaluate
from sweeps.front import front
from sweeps.outputs import OUTPUTS
from sweeps.runs import open_run
from sweeps.screening import screening
from sweeps.study_file import read_study
from tests.explorer.detailed import plain_ladder
from tests.explorer.spoken import one_line, strict

ROOT = Path(__file__).resolve().parents[2]
VEHICLES = sorted(catalogue().vehicles)


@pytest.fixture(scope="module")
def run_folder(tmp_path_factory) -> Path:
    """A finished sweep of the orchard truck, 2048 frames."""
    folder = tmp_path_factory.mktemp("runs") / "truck"
    assert main(["sweep", "orchard-truck", "--samples", "64", "--into", str(folder)]) == 0
    return folder


def apart(*words: str, **more) -> subprocess.CompletedProcess[str]:
    """The same in a process of its own."""
    return subprocess.run(
        [sys.executable, "-m", "explorer", *words],
        cwd=ROOT,
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
        **more,
    )


# --- what each command answers ---------------------------------------------------------------


@pytest.mark.parametrize("vehicle", VEHICLES)
def test_frame_says_what_the_model_computes(said, vehicle):
    code, out, err = said("frame", vehicle, "--json")
    assert (code, err) == (0, "")
    answer = strict(out)
    detail = examine(read_study(vehicle).layout)
    assert answer["mass_kg"] == detail.mass
    assert answer["twist_Nm_per_deg"] == detail.twist
    assert answer["bend_N_per_mm"] == detail.bend
    assert sum(g["mass_kg"] for g in answer["groups"]) == pytest.approx(detail.mass)
    assert sum(g["energy_share"]["total"] for g in answer["groups"]) == pytest.approx(1)
    assert sum(answer["energy_share"].values()) == pytest.approx(1)
    assert answer["about"].startswith("Invented vehicle")
    assert set(answer["inputs"]) == {i.path for i in read_study(vehicle).inputs}


@pytest.mark.parametrize("vehicle", VEHICLES)
def test_frame_tells_a_person_the_same_with_units(said, vehicle):
    code, out, _ = said("frame", vehicle)
    assert code == 0
    for word in ("Mass", "kg", "Twist stiffness", "N·m/deg", "Bending stiffness", "N/mm"):
        assert word in out
    assert max(len(line) for line in out.splitlines()) <= 120


def test_a_study_file_does_as_well_as_the_id_of_a_vehicle(said, tmp_path, monkeypatch):
    text = catalogue().vehicles["orchard-truck"]
    path = tmp_path / "mine.toml"
    path.write_text("\ufeff" + text, encoding="utf-8")  # some editors put a mark in front
    wanted = said("frame", "orchard-truck", "--json")
    assert said("frame", path, "--json") == wanted
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(text.encode())))
    assert said("frame", "-", "--json") == wanted


@pytest.mark.parametrize("vehicle", VEHICLES)
def test_an_exported_frame_solves_to_the_same_twist_stiffness(said, vehicle, tmp_path):
    path = tmp_path / "frame.json"
    code, out, _ = said("frame", vehicle, "--export", path, "--json")
    assert code == 0
    frame = strict(out)
    code, out, err = said("solve", path, "--json", "--modes", "2")
    assert (code, err) == (0, "")
    solved = strict(out)
    assert solved["mass_kg"] == pytest.approx(frame["mass_kg"], rel=1e-12)
    # work of the unit couple: twice the strain energy is the angle, the two solvers round apart
    energy = sum(sum(e.values()) for e in solved["cases"]["twist"]["energy"].values())
    assert 3.141592653589793 / 180 / (2 * energy) == pytest.approx(
        frame["twist_Nm_per_deg"], rel=1e-9
    )
    energy = sum(sum(e.values()) for e in solved["cases"]["bending"]["energy"].values())
    assert 1e-3 / (2 * energy) == pytest.approx(frame["bend_N_per_mm"], rel=1e-9)
    assert len(solved["frequencies_Hz"]) == 2


def test_solve_prints_the_tip_of_a_cantilever(said, tmp_path):
    # 1 m of 25.4 x 1.6 tube, 100 N down at the tip; E 205 GPa, I 8.508815e-9 m4 (closed form
    # F L3 / 3EI = 0.0191096 m), no shear deformation
    frame = {
        "nodes": {"A": [0, 0, 0], "B": [1, 0, 0]},
        "materials": {"steel": {"E": 205e9, "G": 80e9, "density": 7850}},
        "sections": {"t": {"shape": "round tube", "outside": 0.0254, "wall": 0.0016,
                           "shear": False}},
        "members": [{"name": "m1", "from": "A", "to": "B", "section": "t", "material": "steel"}],
        "supports": {"A": ["x", "y", "z", "rx", "ry", "rz"]},
        "cases": {"tip": {"node_loads": {"B": [0, 0, -100, 0, 0, 0]}}},
    }  # fmt: skip
    path = tmp_path / "tip.json"
    path.write_text(json.dumps(frame), encoding="utf-8")
    code, out, err = said("solve", path)
    assert (code, err) == (0, "")
    tip = next(line for line in out.splitlines() if line.startswith("B "))
    assert tip.split()[1:4] == ["0", "0", "−19.11"]
    held = [line.split() for line in out.splitlines() if line.startswith("A ")][-1]
    assert held[1:] == ["0", "0", "100", "0", "−100", "0"]


def test_sweep_says_how_far_it_is_on_stderr_and_what_it_did_on_stdout(said, tmp_path):
    folder = tmp_path / "run"
    code, out, err = said("sweep", "orchard-truck", "--samples", 512, "--into", folder, "--json")
    answer = strict(out)
    assert code == 0
    assert answer["frames"] == answer["frames_solved"] == 512 * 32  # 2 x 15 inputs + 2
    assert "16,384 of 16,384" in err
    code, out, _ = said("sweep", "orchard-truck", "--samples", 1024, "--into", folder)
    assert code == 0
    assert "32,768 of 32,768 solved" in out


def test_the_seed_and_the_samples_given_are_the_ones_taken(said, tmp_path):
    words = ("sweep", "orchard-truck", "--samples", 8, "--seed", 5, "--into", tmp_path / "run")
    assert said(*words)[0] == 0
    study = open_run(tmp_path / "run").study
    assert (study.samples, study.seed) == (8, 5)


@pytest.mark.parametrize("output", [*OUTPUTS, *KEYS.values()])
def test_drivers_are_those_of_the_pages(said, run_folder, output):
    code, out, err = said("drivers", run_folder, "--output", output, "--json")
    assert (code, err) == (0, "")
    answer = strict(out)
    column = next((c for c, key in KEYS.items() if key == output), output)
    found = drivers(open_run(run_folder), column)
    assert answer["output"] == KEYS.get(column, column)
    assert [row["total"] for row in answer["drivers"]] == list(found.table["total"])
    assert answer["sentence"] == found.sentence
    code, out, _ = said("drivers", run_folder, "--output", output)
    assert code == 0
    assert found.sentence in out
    assert found.verdict in out


def test_drivers_of_a_screening_are_its_effects(said, tmp_path):
    folder = tmp_path / "run"
    words = ("sweep", "orchard-truck", "--samples", 16, "--method", "screening", "--into", folder)
    assert said(*words)[0] == 0
    code, out, err = said("drivers", folder, "--json")
    assert (code, err) == (0, "")
    found = screening(open_run(folder))
    assert [row["effect"] for row in strict(out)["effects"]] == list(found.table["effect"])
    code, out, _ = said("drivers", folder)
    assert code == 0
    assert found.verdict in out


def test_front_is_the_one_of_the_pages_and_meets_its_limits(said, run_folder):
    run = open_run(run_folder)
    words = ("front", run_folder, "--min-twist", 1500, "--max-mass", 70)
    code, out, err = said(*words, "--json")
    assert (code, err) == (0, "")
    answer = strict(out)
    found = front(run.table(), min_twist=1500, max_mass=70)
    assert [row["frame"] for row in answer["front"]] == list(found.rows["frame"])
    assert answer["knee_frame"] == found.knee
    for row in answer["front"]:
        assert row["twist_Nm_per_deg"] >= 1500
        assert row["mass_kg"] <= 70
        assert set(row["inputs"]) == {i.path for i in run.study.inputs}
    code, out, _ = said(*words)
    rows = [line for line in out.splitlines() if line.split() and line.split()[0].isdigit()]
    assert [int(line.split()[0]) for line in rows] == [row["frame"] for row in answer["front"]]


def test_front_without_any_frame_is_an_answer_and_no_error(said, run_folder):
    code, out, err = said("front", run_folder, "--min-twist", "1e9")
    assert (code, err) == (0, "")
    assert "Widen the limits" in out
    code, out, err = said("front", run_folder, "--min-twist", "1e9", "--json")
    assert strict(out)["front"] == []


def test_detail_writes_every_file_and_agrees_with_the_run(said, run_folder, tmp_path):
    into = tmp_path / "new" / "frame"
    code, out, err = said("detail", run_folder, 7, "--into", into, "--json")
    assert (code, err) == (0, "")
    answer = strict(out)
    row = open_run(run_folder).table().set_index("frame").loc[7]
    assert answer["twist_Nm_per_deg"] == pytest.approx(row["twist_Nm_per_deg"], rel=1e-9)
    assert answer["inputs"]["wheelbase_mm"] == row["wheelbase_mm"]
    assert sorted(p.name for p in into.iterdir()) == sorted(CONTENTS)
    assert [Path(p).name for p in answer["files"]] == list(CONTENTS)
    solved = strict(said("solve", into / "frame.json", "--json")[1])
    assert solved["mass_kg"] == pytest.approx(answer["mass_kg"], rel=1e-12)
    # a second time, over the files of the first
    code, out, _ = said("detail", run_folder, 7, "--into", into)
    assert code == 0
    assert all(str(into / name) in out for name in CONTENTS)


# --- how it ends -----------------------------------------------------------------------------

BAD = {
    "no such command": ["unfold"],
    "no study": ["frame"],
    "no such study": ["frame", "no-such-truck"],
    "a folder for a study": ["frame", "."],
    "no such frame file": ["solve", "no-such.json"],
    "modes that are no number": ["solve", "x.json", "--modes", "many"],
    "modes below nothing": ["solve", "x.json", "--modes", "-1"],
    "an unknown option": ["frame", "orchard-truck", "--colour", "red"],
    "samples of no power": ["sweep", "orchard-truck", "--samples", "1000", "--into", "x"],
    "samples without end": ["sweep", "orchard-truck", "--samples", "1" + "0" * 30, "--into", "x"],
    "no seed": ["sweep", "orchard-truck", "--seed", "0", "--into", "x"],
    "an unknown method": ["sweep", "orchard-truck", "--method", "dice", "--into", "x"],
    "nowhere to": ["sweep", "orchard-truck"],
    "a file for a run": ["sweep", "orchard-truck", "--into", __file__],
    "no run": ["drivers", "."],
    "no run either": ["front", "no-such-folder"],
    "a limit that is no number": ["front", ".", "--min-twist", "high"],
    "a limit without end": ["front", ".", "--max-mass", "inf"],
    "no run to detail": ["detail", ".", "3", "--into", "x"],
    "a frame that is no number": ["detail", ".", "best", "--into", "x"],
}


@pytest.mark.parametrize("words", BAD.values(), ids=BAD)
def test_bad_input_is_answered_by_one_line_and_2(said, words, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    code, out, err = said(*words)
    assert code == 2
    assert out == ""
    assert one_line(err)
    assert list(tmp_path.iterdir()) == []


def test_what_a_run_does_not_have_is_answered_by_one_line(said, run_folder, tmp_path):
    for words in (
        ("drivers", run_folder, "--output", "comfort"),
        ("detail", run_folder, 2048, "--into", tmp_path / "x"),
        ("detail", run_folder, 3, "--into", __file__),
        ("sweep", "open-sports-car", "--into", run_folder),
    ):
        code, out, err = said(*words)
        assert (code, out) == (2, ""), words
        assert one_line(err), words


def test_a_loose_frame_is_bad_input_that_names_the_joint(said, tmp_path):
    data = json.loads(frame_file(plain_ladder()))
    for member in data["members"]:
        member["ends"] = ["pinned", "pinned"]
    path = tmp_path / "loose.json"
    path.write_text(json.dumps(data), encoding="utf-8")
    code, out, err = said("solve", path)
    assert (code, out) == (2, "")
    assert err.count("\n") == 1
    assert "moves freely" in err


def test_a_fault_of_ours_is_short_and_1_and_its_trace_is_there_when_asked_for(said, monkeypatch):
    def broken(chosen):
        raise RuntimeError("a wheel\nfell off")

    monkeypatch.setattr(commands, "_solve", broken)
    monkeypatch.delenv(commands.DEBUG, raising=False)
    code, out, err = said("solve", "x.json")
    assert (code, out) == (1, "")
    assert err.count("\n") == 1
    assert "RuntimeError: a wheel fell off" in err
    monkeypatch.setenv(commands.DEBUG, "1")
    assert "Traceback" in said("solve", "x.json")[2]


def test_names_cannot_write_to_the_terminal_by_themselves(said, tmp_path):
    path = tmp_path / "odd.json"
    path.write_text(json.dumps({"nodes": {"A\u001b[2J\r\n": 3}}), encoding="utf-8")
    _, _, err = said("solve", path)
    assert one_line(err)
    assert "\x1b" not in err


@pytest.mark.parametrize("words", [["--help"], ["sweep", "--help"], ["--version"]])
def test_help_and_version_end_well(capsys, words):
    with pytest.raises(SystemExit) as ended:
        main(words)
    assert ended.value.code == 0
    assert "twistfront" in capsys.readouterr().out


def test_every_command_is_there_in_a_process_of_its_own():
    done = apart("--version")
    assert (done.returncode, done.stdout) == (0, f"twistfront {explorer.__version__}\n")
    done = apart("frame", "orchard-truck", "--json")
    assert done.returncode == 0, done.stderr
    assert strict(done.stdout)["name"] == "Orchard truck"
    done = apart("frame", "nothing")
    assert done.returncode == 2
    assert one_line(done.stderr)


def test_a_terminal_of_few_letters_gets_its_answer_too():
    few = {**os.environ, "PYTHONIOENCODING": "ascii", "PYTHONUTF8": "0"}
    done = apart("frame", "orchard-truck", env=few)
    assert done.returncode == 0, done.stderr
    assert "N?m/deg" in done.stdout
    done = apart("frame", "orchard-truck", "--json", env=few)
    assert strict(done.stdout)["name"] == "Orchard truck"


def test_a_reader_who_leaves_early_is_no_fault():
    whole = subprocess.Popen(
        [sys.executable, "-m", "explorer", "frame", "hill-climb-single-seater", "--json"],
        cwd=ROOT,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
    assert whole.stdout is not None
    assert whole.stderr is not None
    whole.stdout.close()
    err = whole.stderr.read()
    whole.stderr.close()
    assert whole.wait(timeout=60) == 0
    assert "Traceback" not in err
    assert "Exception" not in err


@pytest.mark.slow
@pytest.mark.skipif(os.name == "nt", reason="sends the signal that Ctrl-C sends elsewhere")
def test_ctrl_c_stops_a_sweep_cleanly_and_the_same_command_goes_on(tmp_path):
    folder = tmp_path / "run"
    words = ("sweep", "open-sports-car", "--samples", "1024", "--into", str(folder))
    with subprocess.Popen(
        [sys.executable, "-m", "explorer", *words],
        cwd=ROOT,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    ) as sweep:
        assert sweep.stderr is not None
        for line in sweep.stderr:
            if line.startswith("Frames solved: ") and " 0 of" not in line:
                sweep.send_signal(signal.SIGINT)
                break
        _, err = sweep.communicate(timeout=60)
    assert sweep.returncode == 130, err
    assert "goes on from here" in err
    assert "Traceback" not in err
    run = open_run(folder)
    first = run.rows_solved
    assert 0 < first < run.design.rows
    assert apart(*words).returncode == 0
    assert run.complete
    # as if never interrupted: rows solved before and after are those of one go
    part = slice(first - 4, first + 4)
    again = evaluate(run.study, run.design.unit()[part], part.start)
    assert run.table()[part].reset_index(drop=True).equals(again)
