"""Which frames to try: points in the unit cube, arranged so that indices can be read off them.

``sobol``: Saltelli's arrangement of a scrambled Sobol' sequence, row for row as SALib draws it
(A. Saltelli et al., Computer Physics Communications 181, 2010). For each base sample the rows are
A, then A with column k from B for every input, then (for second order) B with column k from A,
then B. Inputs that are judged together change together.

``screening``: Morris's trajectories on a grid of four levels, drawn by SALib (M. D. Morris,
Technometrics 33, 1991); one base sample is one trajectory.

A longer design of the same seed begins with the shorter one, so doubling keeps every row, and any
stretch of base samples can be drawn by itself.
"""

from __future__ import annotations

import warnings
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from model.errors import InputError

F64 = NDArray[np.float64]

METHODS = ("sobol", "screening")

LEVELS = 4
"""Levels of the grid of a screening, as Morris used them."""


@dataclass(frozen=True)
class Design:
    """How many rows of what.

    inputs : how many vary. samples : base samples, a power of two.
    second_order : whether pairs of inputs can be judged too. seed : 1 or more.
    method : one of ``METHODS``.
    parts : for each input the number of the part that it is judged in, counted from 0 in the
        order of their first inputs; empty when every input is judged by itself.
    """

    inputs: int
    samples: int
    second_order: bool = True
    seed: int = 1
    method: str = "sobol"
    parts: tuple[int, ...] = ()

    def __post_init__(self) -> None:
        if self.inputs < 1:
            raise InputError("vary", "nothing varies", "choose at least one input")

    @property
    def judged(self) -> int:
        """How many parts are judged: the inputs, or groups of them."""
        return max(self.parts) + 1 if self.parts else self.inputs

    @property
    def rows_per_sample(self) -> int:
        """Frames for each base sample."""
        if self.method == "screening":
            return self.judged + 1
        return 2 * self.judged + 2 if self.second_order else self.judged + 2

    @property
    def rows(self) -> int:
        """Frames in all."""
        return self.samples * self.rows_per_sample

    def unit(self, first: int = 0, samples: int | None = None) -> F64:
        """Points in the unit cube of ``samples`` base samples from number ``first`` on.

        Returns
        -------
        (rows, inputs) float64
            Equal to the same rows of the whole design, bit for bit.
        """
        count = self.samples - first if samples is None else samples
        if self.method == "screening":
            return self._trajectories(first + count)[first * self.rows_per_sample :]
        from scipy.stats import qmc  # slow to load

        sequence = qmc.Sobol(d=2 * self.inputs, scramble=True, seed=self.seed)
        if first:
            sequence.fast_forward(first)
        with warnings.catch_warnings():  # a stretch of the sequence need not be balanced
            warnings.simplefilter("ignore", UserWarning)
            base = sequence.random(count)
        a, b = base[:, None, : self.inputs], base[:, None, self.inputs :]
        parts = np.array(self.parts or range(self.inputs))
        swapped = parts[None, :] == np.arange(self.judged)[:, None]
        rows = [a, np.where(swapped, b, a), b]
        if self.second_order:
            rows.insert(2, np.where(swapped, a, b))
        return np.ascontiguousarray(np.concatenate(rows, axis=1).reshape(-1, self.inputs))

    def row(self, number: int) -> F64:
        """(inputs,) point of one row."""
        sample, place = divmod(number, self.rows_per_sample)
        point: F64 = self.unit(sample, 1)[place]
        return point

    def problem(self) -> dict[str, object]:
        """The same in SALib's words."""
        names = [f"x{k}" for k in range(self.inputs)]
        found: dict[str, object] = {
            "num_vars": self.inputs,
            "names": names,
            "bounds": [[0.0, 1.0]] * self.inputs,
        }
        if self.parts:
            found["groups"] = [f"g{part}" for part in self.parts]
        return found

    def _trajectories(self, count: int) -> F64:
        from SALib.sample import morris  # slow to load

        points = morris.sample(self.problem(), count, num_levels=LEVELS, seed=self.seed)
        return np.ascontiguousarray(points, dtype=np.float64)
