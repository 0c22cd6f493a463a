"""What each brace that could be added, and each member that could go, does to twist stiffness.

The frame is solved once; every change is then an exact low-rank update of its flexibility
(Sherman, Morrison and Woodbury), so nothing is solved again. A single brace tells little while a
face is open, because gains grow until the last panel closes; mirrored pairs and whole faces are
therefore changes of their own, ranked beside the single ones.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import scipy.linalg
from numpy.typing import NDArray

from model.frame.batch import Batch
from model.frame.generator import Scaffold
from model.frame.layout import Layout
from model.frame.skeleton import F64
from model.frame.variants import brace_paths, every_brace
from model.frame.vocabulary import BRACING, MEETING
from model.results.twist import PER_DEGREE
from model.solver.beam import member_axes, member_stiffness, natural_modes, natural_stiffness
from model.solver.cases import TWIST, gauge, twist_and_bending

SINGULAR = 1e-9
"""A change that leaves less than this share of a member's own stiffness leaves a mechanism."""


_KINDS = ("add", "exchange", "remove")


@dataclass(frozen=True)
class Change:
    """Members that are added or taken away together.

    add, remove : member numbers of the skeleton.
    faces, bracing : when it is a change of bracing, the paths of the faces and their new bracing.
    """

    name: str
    add: tuple[int, ...] = ()
    remove: tuple[int, ...] = ()
    faces: tuple[str, ...] = ()
    bracing: str = ""

    @property
    def kind(self) -> str:
        """``add``, ``exchange`` or ``remove``."""
        if self.add and self.remove:
            return "exchange"
        return "add" if self.add else "remove"


@dataclass(frozen=True, eq=False)
class WhatIf:
    """What each change does.

    twist : twist stiffness after the change [N·m/deg]; 0 where it leaves a mechanism.
    gain : difference to the frame as it is [N·m/deg].
    mass : mass that the change adds (negative: saves) [kg].
    """

    changes: tuple[Change, ...]
    twist: F64
    gain: F64
    mass: F64

    @property
    def gain_per_kg(self) -> F64:
        """Twist stiffness gained (or lost) for each kilogram added (or saved).

        NaN for an exchange, which may weigh nothing.
        """
        one_way = np.array([change.kind != "exchange" for change in self.changes], dtype=bool)
        weight = np.where(one_way, np.abs(self.mass), np.nan)
        ratio: F64 = self.gain / weight
        return ratio


def what_if(batch: Batch, changes: Sequence[Change]) -> WhatIf:
    """The twist stiffness after each change of the first frame of a batch.

    batch : its absent members are the ones that may be added.
    changes : ``single_changes``, ``pair_changes`` or any other sets.
    """
    flexible = _Flexibility(batch)
    skeleton = batch.skeleton
    mass = batch.lengths()[0] * batch.line_mass[0, skeleton.group]
    compliance = np.empty(len(changes))
    by_size: dict[int, list[int]] = {}
    for k, change in enumerate(changes):
        by_size.setdefault(len(change.add) + len(change.remove), []).append(k)
    for numbers in by_size.values():
        members = np.array([changes[k].add + changes[k].remove for k in numbers], dtype=np.int64)
        sign = np.array(
            [[1.0] * len(changes[k].add) + [-1.0] * len(changes[k].remove) for k in numbers]
        )
        compliance[numbers] = flexible.after(members, sign)
    with np.errstate(divide="ignore"):
        twist = np.where(np.isfinite(compliance), PER_DEGREE / compliance, 0.0)
    added = np.array(
        [mass[list(c.add)].sum() - mass[list(c.remove)].sum() for c in changes], dtype=np.float64
    )
    return WhatIf(tuple(changes), twist, twist - PER_DEGREE / flexible.compliance, added)


def ranked(layout: Layout) -> WhatIf:
    """Every single, paired and face-wise change of a layout, the best of each kind first.

    Additions come first, most gain for each kilogram leading; then exchanges of one bracing for
    another, most gain leading; then removals, least loss for each kilogram saved leading.
    Changes that leave a mechanism come last.
    """
    batch, frame = every_brace(layout)
    changes = [*face_changes(layout, batch, frame), *pair_changes(batch), *single_changes(batch)]
    distinct = {(frozenset(c.add), frozenset(c.remove)): c for c in reversed(changes)}
    found = what_if(batch, list(reversed(distinct.values())))
    kind = np.array([_KINDS.index(change.kind) for change in found.changes])
    merit = np.where(kind == _KINDS.index("exchange"), found.gain, found.gain_per_kg)
    order = np.lexsort((-merit, kind, found.twist == 0.0))
    return WhatIf(
        tuple(found.changes[k] for k in order),
        found.twist[order],
        found.gain[order],
        found.mass[order],
    )


def single_changes(batch: Batch) -> list[Change]:
    """Each absent member added and each present one taken away, one at a time."""
    names = batch.skeleton.member_names
    return [
        Change(name, remove=(m,)) if batch.present[0, m] else Change(name, add=(m,))
        for m, name in enumerate(names)
    ]


def pair_changes(batch: Batch) -> list[Change]:
    """Each member together with its mirror image, added or taken away."""
    skeleton, present = batch.skeleton, batch.present[0]
    changes = []
    for m, partner in enumerate(skeleton.mirror_member):
        if partner > m and present[m] == present[partner]:
            pair = (m, int(partner))
            name = f"{skeleton.member_names[m]} and its mirror image"
            changes.append(Change(name, remove=pair) if present[m] else Change(name, add=pair))
    return changes


def face_changes(layout: Layout, batch: Batch, frame: Scaffold) -> list[Change]:
    """Each face, ring and set of faces given another bracing.

    layout, batch, frame : the layout and what ``model.frame.variants.every_brace`` makes of it.

    Sets are the two sides of a span, all faces of a span, one face over all spans, and every
    face of the frame; only where each of them changes.
    """
    present = batch.present[0]
    now = {p: b for p, b in brace_paths(layout).items() if b not in MEETING}
    changes = []
    for name, paths in _face_sets(layout, now).items():
        for bracing in ("open", "single", "parallel", "cross"):
            if len(paths) > 1 and bracing == "open":
                continue
            changing = [p for p in paths if now[p] != bracing]
            if not changing or (len(paths) > 1 and len(changing) < 2):
                continue
            add: list[int] = []
            remove: list[int] = []
            for path in changing:
                mine = np.flatnonzero(frame.face == frame.faces.index(path))
                wanted = frame.patterns[mine, BRACING.index(bracing)]
                add += mine[wanted & ~present[mine]].tolist()
                remove += mine[~wanted & present[mine]].tolist()
            if add or remove:
                changes.append(
                    Change(
                        f"{name}: {bracing}", tuple(add), tuple(remove), tuple(changing), bracing
                    )
                )
    return changes


def _face_sets(layout: Layout, now: Mapping[str, str]) -> dict[str, list[str]]:
    sets: dict[str, list[str]] = {}
    for path in now:
        kind, name, face = path.split(".")
        sets[f"{name} ring" if kind == "station" else f"{name} {face}"] = [path]
    for span in layout.spans:
        mine = [p for p in now if p.startswith(f"span.{span.name}.")]
        sets[f"{span.name} sides"] = [p for p in mine if p.endswith((".left", ".right"))]
        sets[f"{span.name}, all faces"] = mine
    for face, word in (("floor", "whole floor"), ("top", "whole top")):
        sets[word] = [p for p in now if p.endswith(f".{face}")]
    sets["both sides, whole length"] = [p for p in now if p.endswith((".left", ".right"))]
    sets["every face"] = [p for p in now if p.startswith("span.")]
    return {name: paths for name, paths in sets.items() if paths}


class _Flexibility:
    """Flexibility of one frame between the natural modes of its members, present and absent."""

    def __init__(self, batch: Batch) -> None:
        skeleton = batch.skeleton
        ends = skeleton.members
        xi, xj = batch.xyz[0, ends[:, 0]], batch.xyz[0, ends[:, 1]]
        rigidity = batch.rigidity[0, skeleton.group]
        give = batch.ends[0, skeleton.group]
        present = batch.present[0]
        dof = np.concatenate([6 * ends[:, [0]] + np.arange(6), 6 * ends[:, [1]] + np.arange(6)], 1)
        size = 6 * len(skeleton.joints)
        stiffness = np.zeros((size, size))
        blocks = member_stiffness(xi, xj, skeleton.up, rigidity, give)[present]
        where = dof[present]
        np.add.at(stiffness, (where[:, :, None], where[:, None, :]), blocks)
        joint, direction = gauge(skeleton).T
        held = 6 * joint + direction
        stiffness[held, held] *= 2.0
        idle = np.flatnonzero(np.diag(stiffness) == 0.0)
        stiffness[idle, idle] = 1.0
        loads = twist_and_bending(batch)
        force = np.zeros(size)
        force[6 * loads.joint + loads.direction] = loads.value[0, TWIST]
        flexibility = scipy.linalg.cho_solve(scipy.linalg.cho_factor(stiffness), np.eye(size))
        movement = flexibility @ force
        self.compliance = float(force @ movement)
        length = batch.lengths()[0]
        modes = natural_modes(member_axes(xi, xj, skeleton.up), length)
        root = _root(natural_stiffness(length, rigidity, give))
        scaled = np.einsum("mki,mkd->mid", root, modes)
        # strain of each scaled mode under the twist couple, and its flexibility to all others
        self._strain = np.einsum("mid,md->mi", scaled, movement[dof])
        spread = (scaled @ flexibility[dof]).reshape(-1, size)  # (6 m, size)
        mutual = spread.T[dof].transpose(0, 2, 1) @ scaled.transpose(0, 2, 1)  # (n, 6 m, 6)
        self._mutual = mutual.reshape(len(ends), len(ends), 6, 6)  # (n, m, mode of m, mode of n)

    def after(self, members: NDArray[np.int64], sign: F64) -> F64:
        """(changes,) compliance after each change; infinite where it leaves a mechanism.

        members : (changes, k) member numbers; sign : (changes, k), +1 added, -1 taken away.
        """
        count, k = members.shape
        small = self._mutual[members[:, None, :], members[:, :, None]]  # (changes, k, k, 6, 6)
        small = small.transpose(0, 1, 3, 2, 4).reshape(count, 6 * k, 6 * k)
        strain = self._strain[members].reshape(count, 6 * k)
        signs = np.repeat(sign, 6, axis=1)
        system = small + signs[:, :, None] * np.eye(6 * k)
        spectrum = np.linalg.eigvalsh(system)
        fewest = (signs < 0).sum(axis=1)
        # a mechanism turns a negative eigenvalue (one for each mode taken away) into zero
        sound = (np.abs(spectrum).min(axis=1) > SINGULAR) & ((spectrum < 0).sum(axis=1) == fewest)
        safe = np.where(sound[:, None, None], system, np.eye(6 * k))
        answer = np.linalg.solve(safe, strain[:, :, None])[:, :, 0]
        change = (strain * answer).sum(axis=1)
        compliance: F64 = np.where(sound, self.compliance - change, np.inf)
        return compliance


def _root(natural: F64) -> F64:
    """(m, 6, 6) lower factor of the natural stiffness, D = root rootᵀ; zero for released modes."""
    stretch, twist, y11, y12, y22, z11, z12, z22 = np.moveaxis(natural, -1, 0)
    root = np.zeros((*natural.shape[:-1], 6, 6))
    root[..., 0, 0], root[..., 1, 1] = np.sqrt(stretch), np.sqrt(twist)
    for first, (a, b, c) in ((2, (y11, y12, y22)), (4, (z11, z12, z22))):
        corner = np.sqrt(a)
        side = np.divide(b, corner, out=np.zeros_like(b), where=corner > 0)
        root[..., first, first] = corner
        root[..., first + 1, first] = side
        root[..., first + 1, first + 1] = np.sqrt(np.maximum(c - side**2, 0.0))
    return root
