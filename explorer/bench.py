"""What lies on the bench: the study, the run, the frames picked and how they are shown."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from explorer import drafts
from explorer.units import INCH_POUND, METRIC, Units
from model.errors import DesignError, InputError
from sweeps.inputs import Input
from sweeps.study import Study

UNITS: Mapping[str, Units] = {"metric": METRIC, "inch": INCH_POUND}
FIRST_VEHICLE = "hill-climb-single-seater"
FIRST_OUTPUT = "twist_Nm_per_deg"


@dataclass
class Bench:
    """Everything a person has on the bench.

    source : id of a starting vehicle or name of a draft; study : the same, read.
    run : name of the run folder that Drivers, Front and Candidate look at.
    candidate : the frame of that run being detailed. beside : frames kept to compare it with.
    given : path of the input looked at closely. target : least twist stiffness [N·m/deg].
    braced : changes of bracing tried on the candidate, path to bracing. snapped : whether its
    tubes are taken from stock lists.
    waiting : edits that cannot be built, by path, with ``fault`` saying why.
    trouble, notice : what the next page says once.
    held : inputs unticked, with the range they had; offer : revision, and all inputs that the
    sweep's table showed then, of which ``held_at_first`` were unticked.
    past : studies to go back to. revision : counts what makes every field show anew.
    """

    source: str
    study: Study
    run: str | None = None
    candidate: int | None = None
    beside: tuple[int, ...] = ()
    units: str = "metric"
    output: str = FIRST_OUTPUT
    given: str | None = None
    target: float | None = None
    braced: dict[str, str] = field(default_factory=dict)
    snapped: bool = False
    waiting: dict[str, Any] = field(default_factory=dict)
    fault: InputError | None = None
    trouble: DesignError | None = None
    notice: str = ""
    held: dict[str, Input] = field(default_factory=dict)
    held_at_first: frozenset[str] = frozenset()
    offer: tuple[int, tuple[Input, ...]] = (-1, ())
    past: list[Study] = field(default_factory=list)
    revision: int = 0
    text: str = ""

    @property
    def shown_units(self) -> Units:
        """The units chosen for display."""
        return UNITS[self.units]

    @property
    def vehicle(self) -> str:
        """Id of the starting vehicle that the study began as."""
        return drafts.vehicle_of(self.source)

    @property
    def picked(self) -> tuple[int, ...]:
        """Frames to mark, the candidate first."""
        first = () if self.candidate is None else (self.candidate,)
        return tuple(dict.fromkeys((*first, *self.beside)))
