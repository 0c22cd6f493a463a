"""What a report is about: name, inputs and origin of a frame, from the study or run it is of."""

from __future__ import annotations

from typing import Any

from explorer import __version__
from explorer.numbers import number
from explorer.report import Subject
from sweeps.candidate import row_of
from sweeps.runs import Run
from sweeps.study import Study, field


def starting_frame(study: Study) -> Subject:
    """The frame that a study starts from."""
    inputs = tuple(
        (_labelled(given.label, given.unit), _value(value))
        for (given, _), value in zip(study.drawn, starting_values(study).values(), strict=True)
    )
    return Subject(
        name=study.name,
        title="Starting frame",
        about=study.about,
        inputs=inputs,
        origin=(("Twistfront", __version__),),
    )


def starting_values(study: Study) -> dict[str, Any]:
    """What the inputs of a study are in its starting frame, by path, in the units of files."""
    values = {given.path: field(study.layout, given.path).value for given, _ in study.drawn}
    return {
        path: float(f"{value:.12g}") if isinstance(value, float) else value  # 1900.0000000000002
        for path, value in values.items()
    }


def frame_of_run(run: Run, frame: int) -> Subject:
    """One frame of a run."""
    row = row_of(run, frame)
    study = run.study
    return Subject(
        name=study.name,
        title=f"Frame {frame}",
        about=study.about,
        inputs=tuple(
            (_labelled(given.label, given.unit), _value(row[given.path]))
            for given, _ in study.drawn
        ),
        origin=(
            ("Run", run.name),
            ("Method", f"{study.method}, {study.samples:,} samples, seed {study.seed}"),
            ("Twistfront", __version__),
        ),
    )


def _labelled(label: str, unit: str) -> str:
    return f"{label} [{unit}]" if unit else label


def _value(value: Any) -> str:
    if isinstance(value, int | float):
        return number(float(value), 4)
    return str(value) or "own size"
