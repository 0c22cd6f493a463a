"""Beyond sampling: the lightest tubes that reach a twist stiffness, by exact gradients.

For fixed joints and members the mass is linear in the tube areas and twist stiffness has exact
slopes with every size from the solution already there, so a few dozen solutions find the optimum:
sequential quadratic programming (D. Kraft 1988, SLSQP of scipy) in the logarithms of the sizes.
The line of such optima over the targets is the best that sizes alone can do; sampled fronts are
judged against it.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import minimize

from model.errors import InputError
from model.frame.batch import Batch
from model.frame.layout import Layout, Tube, with_tube
from model.frame.variants import one
from model.results.slopes import energy_by_rigidity
from model.results.twist import PER_DEGREE, loose
from model.solver.cases import TWIST, gauge, twist_and_bending
from model.solver.solve import solve
from model.stock.sections import section_slopes, section_values
from sweeps.inputs import UNITS
from sweeps.study import Study

F64 = NDArray[np.float64]

SLENDER = 25.0
"""Greatest outside over wall of a tube that is welded by hand; common practice, no published
source."""


@dataclass(frozen=True)
class Size:
    """A size that may be chosen freely between two bounds [m], shared by some groups."""

    groups: tuple[str, ...]
    name: str
    low: float
    high: float


@dataclass(frozen=True)
class LeastMass:
    """The lightest frame that reaches a target.

    mass [kg], twist [N·m/deg]; sizes : by (first group, name) [m]; solves : frames solved.
    reached : whether the target can be reached within the bounds.
    """

    target: float
    mass: float
    twist: float
    sizes: Mapping[tuple[str, str], float]
    solves: int
    reached: bool


class Sizing:
    """A frame whose sizes are free: mass and twist stiffness with their exact slopes.

    batch : one frame; its joints and members stay. tubes : by group. slender : greatest outside
    over wall, None for no limit.
    """

    def __init__(
        self,
        batch: Batch,
        tubes: Mapping[str, Tube],
        sizes: Sequence[Size],
        slender: float | None = SLENDER,
    ) -> None:
        if not sizes:
            raise InputError("sizes", "none", "let at least one tube size vary")
        self.batch, self.tubes, self.sizes, self.slender = batch, dict(tubes), tuple(sizes), slender
        length = np.where(batch.present[0], batch.lengths()[0], 0.0)
        self._length = np.bincount(
            batch.skeleton.group, length, minlength=len(batch.skeleton.groups)
        )
        self._loads = twist_and_bending(batch)
        self._gauge = gauge(batch.skeleton)
        self.solves = 0
        self._known: tuple[bytes, tuple[float, F64, float, F64]] | None = None
        self.low = np.log([s.low for s in sizes])
        self.high = np.log([s.high for s in sizes])

    def tubes_at(self, x: F64) -> dict[str, Tube]:
        """Tubes of every group for logarithms of the sizes."""
        tubes = dict(self.tubes)
        for size, value in zip(self.sizes, np.exp(x), strict=True):
            for group in size.groups:
                given = {**tubes[group].sizes, size.name: float(value)}
                tubes[group] = replace(tubes[group], sizes=given, stock="")
        return tubes

    def evaluate(self, x: F64) -> tuple[float, F64, float, F64]:
        """Mass [kg], its slopes, twist stiffness [N·m/deg], its slopes, for logarithms ``x``."""
        key = x.tobytes()
        if self._known is not None and self._known[0] == key:
            return self._known[1]
        tubes, groups = self.tubes_at(x), self.batch.skeleton.groups
        own = [_own(tubes[g]) for g in groups]
        batch = replace(
            self.batch,
            rigidity=np.stack([o[0] for o in own])[None],
            line_mass=np.array([[o[1] for o in own]]),
        )
        solution = solve(batch, self._loads, self._gauge, displacements=True, threads=1)
        self.solves += 1
        if solution.status[0]:
            raise loose(batch, int(solution.status[0]))
        assert solution.displacement is not None
        compliance = float(solution.compliance[0, TWIST])
        energy = energy_by_rigidity(batch, solution.displacement[0, TWIST])
        share = np.stack(
            [np.bincount(batch.skeleton.group, e, minlength=len(groups)) for e in energy.T], axis=1
        ) * (2 / compliance)  # fmt: skip
        mass = float(batch.line_mass[0] @ self._length)
        twist = PER_DEGREE / compliance
        mass_slope, twist_slope = np.zeros((2, len(self.sizes)))
        for k, size in enumerate(self.sizes):
            for group in size.groups:
                g, tube = groups.index(group), tubes[group]
                relative = _relative_slope(tube, size.name)
                mass_slope[k] += batch.line_mass[0, g] * self._length[g] * relative[0]
                twist_slope[k] += twist * float(share[g] @ relative)
        self._known = (key, (mass, mass_slope, twist, twist_slope))
        return self._known[1]

    def slender_limits(self) -> list[tuple[int, int]]:
        """Pairs of (outside, wall) numbers of sizes that belong together."""
        pairs = []
        for k, wall in enumerate(self.sizes):
            for j, across in enumerate(self.sizes):
                if wall.name == "wall" and across.name != "wall" and wall.groups == across.groups:
                    pairs.append((j, k))
        return pairs


def least_mass(problem: Sizing, target: float, start: F64 | None = None) -> LeastMass:
    """The lightest sizes that reach a twist stiffness.

    target : [N·m/deg]. start : logarithms of the sizes to begin from; the middle when not given.

    The optimum does not depend on the start (tested); a start near it only saves solutions.
    """
    before = problem.solves
    x = (problem.low + problem.high) / 2 if start is None else start
    constraints: list[Any] = [
        {
            "type": "ineq",
            "fun": lambda v: np.log(problem.evaluate(v)[2] / target),
            "jac": lambda v: problem.evaluate(v)[3] / problem.evaluate(v)[2],
        }
    ]
    if problem.slender is not None:
        for across, wall in problem.slender_limits():
            slope = np.zeros(len(x))
            slope[across], slope[wall] = -1.0, 1.0
            limit = float(np.log(problem.slender))
            constraints.append(
                {
                    "type": "ineq",
                    "fun": lambda v, a=across, w=wall, c=limit: c - v[a] + v[w],
                    "jac": lambda _, s=slope: s,
                }
            )

    def cost(v: F64) -> float:
        return float(np.log(problem.evaluate(v)[0]))

    def cost_slope(v: F64) -> F64:
        mass, slope, _, _ = problem.evaluate(v)
        return slope / mass

    found = minimize(
        cost,
        np.clip(x, problem.low, problem.high),
        jac=cost_slope,
        bounds=list(zip(problem.low.tolist(), problem.high.tolist(), strict=True)),
        constraints=constraints,
        method="SLSQP",
        options={"ftol": 1e-10, "maxiter": 200},
    )
    mass, _, twist, _ = problem.evaluate(found.x)
    sizes = {
        (size.groups[0], size.name): float(v)
        for size, v in zip(problem.sizes, np.exp(found.x), strict=True)
    }
    reached = twist >= target * (1 - 1e-6)
    return LeastMass(target, mass, twist, sizes, problem.solves - before, bool(reached))


def sizing_front(problem: Sizing, targets: Sequence[float]) -> list[LeastMass]:
    """The best-possible line: least mass for each target, each begun from the one before."""
    found: list[LeastMass] = []
    start: F64 | None = None
    for target in targets:
        best = least_mass(problem, target, start)
        if not best.reached:
            best = least_mass(problem, target)
        found.append(best)
        if best.reached:
            start = np.log([best.sizes[s.groups[0], s.name] for s in problem.sizes])
    return found


def sizing_of(study: Study, layout: Layout | None = None) -> Sizing:
    """The sizing problem of a study: its tube sizes with a range are free.

    layout : the layout whose joints and members stay; the study's own when not given. A stock
    size that varies makes its outside and wall free between the smallest and the largest listed.
    Tubes linked to another one without a difference stay of its size; others keep their own.
    """
    layout = layout or study.layout
    batch = one(layout)
    sizes = []
    for given in study.inputs:
        parts = given.inner_path.split(".")
        if parts[0] != "tube" or parts[1] not in batch.skeleton.groups:
            continue
        group = parts[1]
        follow = [
            x.path.split(".")[1] for x in study.links if x.same_as == given.path and not x.plus
        ]
        groups = (group, *(g for g in follow if g in batch.skeleton.groups))
        if parts[2] == "stock":
            for name in given.options[0].sizes:
                values = [option.sizes[name] for option in given.options]
                if min(values) < max(values):
                    sizes.append(Size(groups, name, min(values), max(values)))
        elif parts[2] in layout.tubes[group].sizes and given.low is not None:
            assert given.high is not None
            scale = UNITS[given.unit]
            sizes.append(Size(groups, parts[2], given.low * scale, given.high * scale))
    tubes = {group: layout.tubes[group] for group in batch.skeleton.groups}
    return Sizing(batch, tubes, sizes)


def sized(layout: Layout, best: LeastMass) -> Layout:
    """The layout with the sizes of an optimum."""
    for (group, name), value in best.sizes.items():
        sizes = {**layout.tubes[group].sizes, name: value}
        layout = with_tube(layout, group, sizes=sizes, stock="")
    return layout


def _own(tube: Tube) -> tuple[F64, float]:
    s = section_values(tube.shape, tube.sizes)
    m = tube.material
    rigidity = np.array(
        [m.E * s.A, m.E * s.Iy, m.E * s.Iz, m.G * s.J, 1 / (m.G * s.Asy), 1 / (m.G * s.Asz)]
    )
    return rigidity, float(m.density * s.A)


def _relative_slope(tube: Tube, size: str) -> F64:
    """(6,) slopes of ln A, Iy, Iz, J, Asy, Asz with the logarithm of a size."""
    own = section_values(tube.shape, tube.sizes)
    slope = section_slopes(tube.shape, tube.sizes)[size]
    names = ("A", "Iy", "Iz", "J", "Asy", "Asz")
    return np.array(
        [float(getattr(slope, n)) * tube.sizes[size] / float(getattr(own, n)) for n in names]
    )
