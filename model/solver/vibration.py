"""Natural frequencies and mode shapes of one frame: consistent mass plus point masses."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.linalg
import scipy.sparse as sp
from scipy.sparse.linalg import LinearOperator, eigsh, splu

from model.errors import InputError, LooseFrame
from model.frame.skeleton import F64
from model.solver import beam, general
from model.solver.structure import DIRECTIONS, Frame, assemble, idle_rotations, member_matrices

DENSE = 1500
"""Up to this many free directions all modes are found at once; above, only those asked for."""

MASSLESS = 1e-13
"""Motions with less than this part of the largest mass over stiffness have no frequency."""


@dataclass(frozen=True, eq=False)
class Modes:
    """The lowest modes of a frame, lowest first.

    frequency : (modes,) [Hz]; rigid motions of a frame without supports come as (nearly) 0.
    shape : (modes, J, 6) displacements, scaled to unit modal mass [1/√kg].
    """

    frequency: F64
    shape: F64


def modes(frame: Frame, count: int) -> Modes:
    """The ``count`` lowest modes; fewer when the frame has fewer.

    Supports may be missing or too few. Each frequency is the Rayleigh quotient of its shape,
    summed member by member, so rigid motions come out as zero and not as rounding.
    """
    if count < 1:
        raise InputError("modes", str(count), "ask for one mode or more")
    stiffness = assemble(frame, matrices := member_matrices(frame))
    try:
        idle = general.factor(frame).idle
    except LooseFrame:
        idle = idle_rotations(frame, matrices)
    free = ~frame.held.ravel()
    k = (stiffness + idle.grounding())[free][:, free].tocsc()
    m = idle.quiet(mass_matrix(frame))[free][:, free].tocsc()
    if not m.diagonal().max(initial=0.0) > 0:
        raise InputError("masses", "none", "give the materials a density or the joints a mass")
    shift = _shift(k, m)
    vectors = _lowest(k, m, shift, min(count, k.shape[0]))
    if vectors is None:
        raise general.unlike(frame)
    shape = np.zeros((vectors.shape[1], free.size))
    shape[:, free] = vectors.T
    square = _rayleigh(frame, m, vectors, shape)
    order = np.argsort(square, kind="stable")
    joint_shape = shape[order].reshape(len(order), -1, len(DIRECTIONS))
    return Modes(np.sqrt(square[order]) / (2 * np.pi), joint_shape)


def mass_matrix(frame: Frame) -> sp.csc_matrix:
    """(6J, 6J) consistent mass of the members and point masses of the joints."""
    matrices = beam.consistent_mass(*frame.geometry(), frame.line_mass, frame.rotary)
    lumps = np.zeros((len(frame.joints), 6))
    lumps[:, :3] = frame.lumps[:, None]
    return (assemble(frame, matrices) + sp.diags(lumps.ravel())).tocsc()


def _shift(k: sp.csc_matrix, m: sp.csc_matrix) -> float:
    """A square of a frequency, below all that bend and above rounding [1/s²]."""
    heavy = m.diagonal() > 1e-12 * m.diagonal().max()
    return float(1e-12 * (k.diagonal()[heavy] / m.diagonal()[heavy]).max())


def _lowest(k: sp.csc_matrix, m: sp.csc_matrix, shift: float, count: int) -> F64 | None:
    """(free, count) shapes of the largest mu in M v = mu (K + shift M) v, unit modal mass.

    None when the members are too unlike for the digits.
    """
    shifted = (k + shift * m).tocsc()
    size = k.shape[0]
    if size <= DENSE or count >= size - 1:
        scale = 1 / np.sqrt(shifted.diagonal())
        both = [matrix.toarray() * scale[:, None] * scale for matrix in (m, shifted)]
        try:
            mu, vectors = scipy.linalg.eigh(*both, subset_by_index=(size - count, size - 1))
        except np.linalg.LinAlgError:
            return None
        vectors = scale[:, None] * vectors
    else:
        factor = splu(
            shifted,
            permc_spec="MMD_AT_PLUS_A",
            diag_pivot_thresh=0.0,
            options={"SymmetricMode": True},
        )
        inverse = LinearOperator(k.shape, matvec=factor.solve, dtype=np.float64)
        start = np.random.default_rng(1).standard_normal(size)
        square, vectors = eigsh(k, count, M=m, sigma=-shift, OPinv=inverse, v0=start)
        mu = 1 / (square + shift)
    real = mu > MASSLESS * mu.max()
    vectors = vectors[:, real]
    modal = np.einsum("fk,fk->k", vectors, m @ vectors)
    return np.asarray(vectors / np.sqrt(modal))


def _rayleigh(frame: Frame, m: sp.csc_matrix, vectors: F64, shape: F64) -> F64:
    """(modes,) twice the strain energy over the modal mass [1/s²]."""
    geometry = frame.geometry()
    length = frame.lengths
    square = np.empty(len(shape))
    for k, motion in enumerate(shape.reshape(len(shape), -1, 6)):
        ui, uj = (motion[frame.members[:, end]] for end in (0, 1))
        forces = beam.natural_forces(*geometry, ui, uj)
        energy = beam.energies(length, frame.rigidity, frame.ends, forces)
        square[k] = 2 * energy.sum() / (vectors[:, k] @ (m @ vectors[:, k]))
    return square
