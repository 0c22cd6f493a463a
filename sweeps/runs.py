"""A run is a folder: the study, what was asked, and the solved rows in blocks.

``study.toml`` is the complete input, ``run.json`` says what was asked and solved, and
``blocks/00000.parquet`` and on hold the rows. A block is written whole to a temporary name and
renamed, so it is either there or not; it says which run it is of and is sealed. Resuming solves
the blocks that are missing; doubling the samples keeps every block. A file that does not belong
or is damaged is set aside under another name, never trusted and never deleted.
"""

from __future__ import annotations

import hashlib
import json
import os
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.errors import InputError
from sweeps.blocks import BlockFault, read_block, write_block
from sweeps.folders import RunError, locked, naming, set_aside
from sweeps.sampling import Design
from sweeps.study import Study
from sweeps.study_file import parse_study
from sweeps.study_text import write_study

__all__ = ["BLOCK_ROWS", "FORMAT", "Run", "RunError", "digest", "locked", "open_run", "prepare",
           "set_aside"]  # fmt: skip

FORMAT = 2
"""Version of the folder's contents; runs of another version are not read."""

BLOCK_ROWS = 16384
"""A block holds about so many rows: whole base samples, a power of two of them."""


@dataclass(frozen=True)
class Run:
    """A run on disk.

    folder : where it lies. study : what is asked; its samples are what the run aims for.
    samples_per_block : base samples in one block, settled when the run is made.
    """

    folder: Path
    study: Study
    second_order: bool
    samples_per_block: int

    @property
    def name(self) -> str:
        """Name of the folder."""
        return self.folder.name

    @property
    def design(self) -> Design:
        """The rows that the run is made of."""
        return self.study.design(self.second_order)

    @property
    def blocks(self) -> range:
        """Numbers of all blocks."""
        return range(self.study.samples // self.samples_per_block)

    def rows_of(self, block: int) -> slice:
        """Rows of the design that a block holds."""
        rows = self.samples_per_block * self.design.rows_per_sample
        return slice(block * rows, (block + 1) * rows)

    def path_of(self, block: int) -> Path:
        """File of a block."""
        return self.folder / "blocks" / f"{block:05d}.parquet"

    def missing(self) -> list[int]:
        """Blocks that are not solved yet. Reads every block; sets bad ones aside."""
        return self.inspect()[0]

    def inspect(self) -> tuple[list[int], list[str]]:
        """Blocks that are not solved yet, and in words which files were set aside for it."""
        missing, aside = [], []
        for block in self.blocks:
            path = self.path_of(block)
            if not path.exists():
                missing.append(block)
                continue
            try:
                read_block(path, self._owner(block), ["frame"])
            except BlockFault as fault:
                missing.append(block)
                aside.append(f"{path.name} was {fault} and is set aside as {set_aside(path).name}")
        return missing, aside

    @property
    def rows_solved(self) -> int:
        """Rows in the blocks on disk."""
        rows = self.samples_per_block * self.design.rows_per_sample
        return rows * sum(self.path_of(block).exists() for block in self.blocks)

    @property
    def complete(self) -> bool:
        """Whether every block is there."""
        return all(self.path_of(block).exists() for block in self.blocks)

    def write_block(self, block: int, rows: pd.DataFrame) -> None:
        """Put a solved block on disk, whole or not at all."""
        write_block(self.path_of(block), rows, self._owner(block))

    def read_block(self, block: int, columns: Sequence[str] | None = None) -> pd.DataFrame:
        """Rows of a solved block.

        Raises
        ------
        RunError
            The block is damaged or of another run; it is set aside.
        """
        path = self.path_of(block)
        try:
            return read_block(path, self._owner(block), columns)
        except BlockFault as fault:
            other = set_aside(path)
            raise RunError(
                f"{path}: {fault}; it is set aside as {other.name}, resume the sweep to solve its "
                "frames again"
            ) from None

    def unit_of(self, block: int) -> NDArray[np.float64]:
        """(rows, inputs) points in the unit cube of one block."""
        count = self.samples_per_block
        return self.design.unit(block * count, count)

    def table(self, columns: Sequence[str] | None = None) -> pd.DataFrame:
        """All solved rows, in the order of the design.

        columns : only these are read; all when not given.

        Raises
        ------
        RunError
            No block is there, or one is not to be trusted and now set aside.
        """
        wanted = None if columns is None else list(dict.fromkeys(columns))
        parts = [
            self.read_block(block, wanted) for block in self.blocks if self.path_of(block).exists()
        ]
        if not parts:
            raise RunError(f"{self.folder}: no frame is solved yet; run or resume the sweep")
        return pd.concat(parts, ignore_index=True)

    @cached_property
    def digest(self) -> str:
        """What two runs share that are the same but for their sample counts."""
        return digest(self.study, self.second_order)

    def _owner(self, block: int) -> str:
        rows = self.rows_of(block)
        return f"run {self.digest}, frames {rows.start} to {rows.stop - 1}"

    def clear_scratch(self) -> None:
        """Take away what killed processes had not finished writing; only while locked."""
        for scratch in (*self.folder.glob("*.part*"), *self.folder.glob("blocks/*.part*")):
            with naming(scratch):
                scratch.unlink(missing_ok=True)

    def note(self, **facts: Any) -> None:
        """Write facts (counts, timings) beside what was asked into ``run.json``."""
        _write_json(self.folder / "run.json", {**_read_json(self.folder / "run.json"), **facts})

    def facts(self) -> dict[str, Any]:
        """What ``run.json`` says."""
        return _read_json(self.folder / "run.json")


def digest(study: Study, second_order: bool) -> str:
    """What two runs must share to be the same run, whatever their sample counts."""
    asked = write_study(replace(study, samples=2), comments=False)
    return hashlib.sha256(f"{FORMAT} {second_order}\n{asked}".encode()).hexdigest()[:16]


def open_run(folder: str | Path) -> Run:
    """A run that is already on disk."""
    folder = Path(folder)
    facts_path, study_path = folder / "run.json", folder / "study.toml"
    if not folder.is_dir() or not facts_path.exists() or not study_path.exists():
        raise InputError("FOLDER", repr(str(folder)), "name a folder that a sweep was run into")
    facts = _read_json(facts_path)
    if facts.get("format") != FORMAT:
        raise RunError(
            f"{facts_path}: written by another version (format {facts.get('format')!r}, "
            f"this one reads {FORMAT}); run the sweep into a new folder"
        )
    with naming(study_path):
        try:
            study = parse_study(study_path.read_text(encoding="utf-8"))
        except UnicodeDecodeError:
            raise RunError(f"{study_path}: is no text; restore it") from None
    second_order, per_block = facts.get("second_order"), facts.get("samples_per_block")
    if not isinstance(second_order, bool) or not isinstance(per_block, int) or per_block < 1:
        raise RunError(f"{facts_path}: incomplete; run the sweep into a new folder")
    run = Run(folder, study, second_order, per_block)
    if facts.get("digest") != run.digest:
        raise RunError(
            f"{study_path}: changed since the run was made; restore it, or run the changed study "
            "into a new folder"
        )
    return run


def prepare(study: Study, folder: str | Path, second_order: bool = True) -> Run:
    """A run folder for a study: made, or opened again to resume or extend it.

    Raises
    ------
    RunError
        The folder holds something else, or a run of another study; nothing is touched.
    """
    folder = Path(folder)
    study.design(second_order)
    if (folder / "run.json").exists():
        run = open_run(folder)
        if digest(study, second_order) != run.digest:
            raise RunError(
                f"{folder}: holds a run of another study; choose a new folder, or resume with the "
                "study.toml in it"
            )
        if study.samples > run.study.samples:
            with locked(folder):
                return _write_head(replace(run, study=study))
        return run
    with naming(folder):
        if folder.exists() and not folder.is_dir():
            raise RunError(f"{folder}: is a file; choose a new or empty folder")
        if folder.exists() and not _hardly_begun(folder, study):
            raise RunError(f"{folder}: holds other files; choose a new or empty folder")
        (folder / "blocks").mkdir(parents=True, exist_ok=True)
    return _write_head(Run(folder, study, second_order, _per_block(study, second_order)))


def _hardly_begun(folder: Path, study: Study) -> bool:
    """Whether a folder is empty, or holds no more than a process left that was killed here."""
    for path in folder.iterdir():
        empty = path.name == "blocks" and path.is_dir() and not any(path.iterdir())
        unfinished = path.name.startswith(("study.toml.part", "run.json.part"))
        own = path.name == "study.toml" and path.read_bytes() == write_study(study).encode()
        if not (empty or unfinished or own):
            return False
    return True


def _per_block(study: Study, second_order: bool) -> int:
    """Base samples that make a block of the usual size, or all of a small run."""
    most = max(1, BLOCK_ROWS // study.design(second_order).rows_per_sample)
    return int(min(2 ** int(np.log2(most)), study.samples))


def _write_head(run: Run) -> Run:
    """Write study and run file."""
    with naming(run.folder):
        _write_text(run.folder / "study.toml", write_study(run.study))
        facts = {
            "format": FORMAT,
            "digest": run.digest,
            "seed": run.study.seed,
            "samples": run.study.samples,
            "second_order": run.second_order,
            "rows": run.design.rows,
            "samples_per_block": run.samples_per_block,
        }
        _write_json(run.folder / "run.json", facts)
    return run


def _write_text(path: Path, text: str) -> None:
    scratch = path.with_name(f"{path.name}.part{os.getpid()}")
    scratch.write_text(text, encoding="utf-8")
    os.replace(scratch, path)


def _write_json(path: Path, facts: dict[str, Any]) -> None:
    _write_text(path, json.dumps(facts, indent=1) + "\n")


def _read_json(path: Path) -> dict[str, Any]:
    try:
        found = json.loads(path.read_text(encoding="utf-8"))
    except (OSError, ValueError):
        raise RunError(f"{path}: cannot be read; run the sweep into a new folder") from None
    if not isinstance(found, dict):
        raise RunError(f"{path}: is no run file; run the sweep into a new folder")
    return found
