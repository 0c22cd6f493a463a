"""The command line: words go in, a table or JSON comes out; commands ask what the pages ask."""

from __future__ import annotations

import argparse
import os
import shlex
import sys
import traceback
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any, NoReturn

from explorer import __version__, filing
from model.errors import DesignError, InputError

if TYPE_CHECKING:
    from sweeps.runs import Run
    from sweeps.study import Study

DONE, OUR_FAULT, BAD_INPUT, STOPPED = 0, 1, 2, 130
"""Exit codes."""

DEBUG = "TWISTFRONT_DEBUG"
"""Environment variable that asks for a traceback when the fault is ours."""


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command; returns the exit code.

    Bad input is answered by one line on stderr, ``field = value: remedy``, and 2.
    """
    arguments = list(sys.argv[1:] if argv is None else argv)
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")
    try:
        return _run(arguments)
    except DesignError as fault:
        _say(_one_line(fault))
        return BAD_INPUT
    except KeyboardInterrupt:
        _say("Stopped.")
        return STOPPED
    except BrokenPipeError:  # whoever read the answer has read enough
        sys.stdout = open(os.devnull, "w", encoding="utf-8")  # noqa: SIM115
        return DONE
    except Exception as fault:
        if os.environ.get(DEBUG):
            traceback.print_exc()
        _say(
            f"This is a fault of the program, not of your input: {type(fault).__name__}: {fault} "
            f"(set {DEBUG}=1 to see where)"
        )
        return OUR_FAULT


def _run(arguments: list[str]) -> int:
    if not arguments:
        from explorer import server

        return server.main([])
    try:
        chosen = _parser().parse_args(arguments)
    except _WrongWords as fault:
        raise InputError("command line", repr(shlex.join(arguments)), str(fault)) from None
    code: int = chosen.run(chosen)
    sys.stdout.flush()
    return code


# --- the commands ---------------------------------------------------------------------------


def _solve(chosen: argparse.Namespace) -> int:
    from explorer.solved_text import solved_text
    from model.solver.frame_file import solve_file

    answer = solve_file(filing.read("FRAME.json", chosen.frame_file), chosen.modes)
    _answer(chosen, answer, lambda: solved_text(answer))
    return DONE


def _frame(chosen: argparse.Namespace) -> int:
    from textwrap import fill

    from explorer.accounts import frame_record, frame_text
    from explorer.handover import frame_file
    from explorer.subjects import starting_frame, starting_values
    from model.results.detail import examine

    study = _study(chosen.study)
    detail = examine(study.layout)
    if chosen.export is not None:
        filing.write("--export", {chosen.export: frame_file(detail, starting_frame(study))})
    record = {
        "name": study.name,
        "about": study.about,
        **frame_record(detail),
        "inputs": starting_values(study),
    }
    _answer(
        chosen, record, lambda: f"{study.name}\n{fill(study.about, 79)}\n\n{frame_text(detail)}"
    )
    return DONE


def _sweep(chosen: argparse.Namespace) -> int:
    from dataclasses import replace

    from explorer.interrupt import Interrupt
    from explorer.run_accounts import sweep_record, sweep_text
    from explorer.terminal import Progress
    from sweeps import jobs, runs

    study = _study(chosen.study)
    change = {"samples": chosen.samples, "seed": chosen.seed, "method": chosen.method}
    study = replace(study, **{key: value for key, value in change.items() if value is not None})
    if Path(chosen.into).exists() and not Path(chosen.into).is_dir():
        raise InputError("--into", repr(chosen.into), "is no folder; name a new or empty one")
    run = runs.prepare(study, chosen.into)
    line = Progress("Frames solved")
    with Interrupt() as stop:
        ended = jobs.carry_out(run, lambda p: line.show(p.solved, p.rows), stop)
        line.end()
    if ended.message:
        _say(ended.message)
    _answer(chosen, sweep_record(run, ended), lambda: sweep_text(run, ended))
    if ended.state == jobs.CANCELLED:
        _say("Stopped. The same command goes on from here.")
        return STOPPED
    return DONE


def _drivers(chosen: argparse.Namespace) -> int:
    from explorer import run_accounts
    from sweeps.drivers import drivers
    from sweeps.screening import screening

    run, output = _opened(chosen.folder), run_accounts.column_of(chosen.output)
    if run.study.method == "screening":
        effects = screening(run, output)
        record = run_accounts.screening_record(run, effects)
        _answer(chosen, record, lambda: run_accounts.screening_text(run, effects))
        return DONE
    found = drivers(run, output)
    record = run_accounts.drivers_record(run, found)
    _answer(chosen, record, lambda: run_accounts.drivers_text(run, found))
    return DONE


def _front(chosen: argparse.Namespace) -> int:
    from explorer.run_accounts import front_record, front_text
    from sweeps.front import front

    run = _opened(chosen.folder)
    found = front(run.table(), min_twist=chosen.min_twist, max_mass=chosen.max_mass)
    _answer(chosen, front_record(run, found), lambda: front_text(run, found))
    return DONE


def _detail(chosen: argparse.Namespace) -> int:
    from explorer.accounts import frame_record, frame_text
    from explorer.handover import CONTENTS, files
    from explorer.subjects import frame_of_run
    from explorer.terminal import pairs
    from sweeps.candidate import detail_of, row_of

    run = _opened(chosen.folder)
    detail = detail_of(run, chosen.frame)
    subject = frame_of_run(run, chosen.frame)
    into = Path(chosen.into)
    filing.write("--into", {into / name: text for name, text in files(detail, subject).items()})
    row = row_of(run, chosen.frame)
    record = {
        "name": subject.name,
        "frame": chosen.frame,
        **frame_record(detail),
        "inputs": {given.path: row[given.path] for given, _ in run.study.drawn},
        "files": [str(into / name) for name in CONTENTS],
    }
    written = pairs([(str(into / name), what) for name, what in CONTENTS.items()])
    _answer(
        chosen,
        record,
        lambda: f"{subject.name}: {subject.title}\n\n{frame_text(detail)}\n\nWritten\n{written}",
    )
    return DONE


def _answer(chosen: argparse.Namespace, record: Mapping[str, Any], text: Callable[[], str]) -> None:
    from explorer.terminal import json_text

    print(json_text(record) if chosen.json else text())


# --- words on the command line --------------------------------------------------------------


class _WrongWords(Exception):
    """The words are no command; says why and where to look."""


class _Parser(argparse.ArgumentParser):
    """Leaves the answer to a wrong command line to ``main``."""

    def error(self, message: str) -> NoReturn:
        raise _WrongWords(f"{message}; see {self.prog} --help")


def _parser() -> argparse.ArgumentParser:
    parser = _Parser(
        prog="twistfront",
        description="Settle the concept of a vehicle frame. Without a command: open the workbench.",
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"twistfront {__version__}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", required=True)

    def command(name: str, run: Callable[[argparse.Namespace], int], does: str) -> _Parser:
        added: _Parser = commands.add_parser(name, help=does, description=does, allow_abbrev=False)
        added.add_argument("--json", action="store_true", help="answer in JSON, units in the keys")
        added.set_defaults(run=run)
        return added

    study = "a study file, or a starting vehicle such as orchard-truck"
    folder = "a folder that a sweep was run into"
    it = command("solve", _solve, "Solve one frame given by joints and members.")
    it.add_argument("frame_file", metavar="FRAME.json", help="the frame; - reads it from stdin")
    it.add_argument("--modes", type=_whole("--modes", 0), default=0, metavar="N",
                    help="natural frequencies wanted")  # fmt: skip
    it = command("frame", _frame, "Solve the frame that a study starts from.")
    it.add_argument("study", metavar="STUDY.toml", help=study)
    it.add_argument("--export", metavar="FRAME.json", help="write it as a frame file")
    it = command("sweep", _sweep, "Run, resume or extend a sweep.")
    it.add_argument("study", metavar="STUDY.toml", help=study)
    it.add_argument("--samples", type=_whole("--samples", 1), metavar="N",
                    help="base samples, a power of two; without it the study's own")  # fmt: skip
    it.add_argument("--into", required=True, metavar="FOLDER", help="the run folder")
    it.add_argument("--seed", type=_whole("--seed", 1), metavar="S", help="1 or more")
    it.add_argument("--method", metavar="M", help="sobol (shares) or screening (effects)")
    it = command("drivers", _drivers, "Say which inputs drive an output, and how surely.")
    it.add_argument("folder", metavar="FOLDER", help=folder)
    it.add_argument("--output", default="twist_Nm_per_deg", metavar="COLUMN",
                    help="a result column; default: %(default)s")  # fmt: skip
    it = command("front", _front, "List the frames that no other frame beats.")
    it.add_argument("folder", metavar="FOLDER", help=folder)
    it.add_argument("--min-twist", type=_number("--min-twist"), metavar="X",
                    help="only frames of at least so many N·m/deg")  # fmt: skip
    it.add_argument("--max-mass", type=_number("--max-mass"), metavar="Y",
                    help="only frames of at most so many kg")  # fmt: skip
    it = command("detail", _detail, "Write cut list, joints, drawings and report of one frame.")
    it.add_argument("folder", metavar="FOLDER", help=folder)
    it.add_argument("frame", metavar="FRAME", type=_whole("FRAME", 0), help="number of the frame")
    it.add_argument("--into", required=True, metavar="DIR", help="where the files go")
    return parser


def _whole(field: str, least: int) -> Callable[[str], int]:
    def read(text: str) -> int:
        if not (text.isascii() and text.isdigit() and len(text) < 16 and int(text) >= least):
            raise InputError(field, repr(text), f"give a whole number, {least} or more")
        return int(text)

    return read


def _number(field: str) -> Callable[[str], float]:
    def read(text: str) -> float:
        try:
            value = float(text)
        except ValueError:
            value = float("nan")
        if not abs(value) < float("inf"):
            raise InputError(field, repr(text), "give a number")
        return value

    return read


# --- files and lines ------------------------------------------------------------------------


def _study(name: str) -> Study:
    """The study in a file, on stdin for ``-``, or of a starting vehicle."""
    from sweeps.catalogue import catalogue
    from sweeps.study_file import parse_study

    shelf = catalogue()
    if name in shelf.vehicles:
        return parse_study(shelf.vehicles[name], shelf)
    if name != "-" and not Path(name).exists():
        known = ", ".join(shelf.vehicles)
        raise InputError("STUDY.toml", repr(name), f"no such file; starting vehicles: {known}")
    try:
        return parse_study(filing.read("STUDY.toml", name), shelf)
    except RecursionError:
        raise InputError("STUDY.toml", repr(name), "nested too deeply to be a study") from None


def _opened(folder: str) -> Run:
    """The run in a folder."""
    from sweeps.runs import open_run

    try:
        return open_run(folder)
    except (KeyError, TypeError, ValueError):
        remedy = "run.json or study.toml in it is spoilt; sweep into a new folder"
        raise InputError("FOLDER", repr(folder), remedy) from None


def _one_line(fault: DesignError) -> str:
    from sweeps.runs import RunError

    if isinstance(fault, RunError):
        return f"run folder = {fault}"
    text = str(fault)
    return f"''{text}" if text.startswith(" = ") else text


def _say(text: str) -> None:
    """One line on stderr, whatever the text holds."""
    line = " ".join(text.split())
    print("".join(c if c.isprintable() else "?" for c in line), file=sys.stderr, flush=True)
