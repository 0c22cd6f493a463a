"""Which frames to try: points in the unit cube, arranged so that indices can be read off them.

Saltelli's arrangement of a scrambled Sobol' sequence, drawn by SALib (A. Saltelli et al., Computer
Physics Communications 181, 2010). For each base sample the rows are A, then A with column k from
B for every input, then (for second order) B with column k from A, then B. A longer design of the
same seed begins with the shorter one, so doubling keeps every row.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from model.errors import InputError

F64 = NDArray[np.float64]


@dataclass(frozen=True)
class Design:
    """How many rows of what.

    inputs : how many vary. samples : base samples, a power of two.
    second_order : whether pairs of inputs can be judged too. seed : 1 or more.
    """

    inputs: int
    samples: int
    second_order: bool = True
    seed: int = 1

    def __post_init__(self) -> None:
        if self.inputs < 1:
            raise InputError("vary", "nothing varies", "choose at least one input")

    @property
    def rows_per_sample(self) -> int:
        """Frames for each base sample."""
        return 2 * self.inputs + 2 if self.second_order else self.inputs + 2

    @property
    def rows(self) -> int:
        """Frames in all."""
        return self.samples * self.rows_per_sample

    def unit(self) -> F64:
        """(rows, inputs) points in the unit cube."""
        from SALib.sample import sobol  # slow to load

        problem = {
            "num_vars": self.inputs,
            "names": [f"x{k}" for k in range(self.inputs)],
            "bounds": [[0.0, 1.0]] * self.inputs,
        }
        points = sobol.sample(
            problem, self.samples, calc_second_order=self.second_order, seed=self.seed
        )
        return np.ascontiguousarray(points, dtype=np.float64)
