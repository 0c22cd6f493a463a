"""Open channels in torsion: warping constant, shear centre, and what held ends add."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from model.errors import InputError
from model.stock.sections import F64, Sizes, section_values

SMALL = 0.1
"""Half of kL below which 1 - tanh(h)/h is taken from its series; both are good to 1e-13 there."""


def channel_warping(sizes: Sizes) -> tuple[F64, F64, F64]:
    """Torsion constant J [m⁴], warping constant Iw [m⁶], shear centre [m] of a channel.

    sizes : flange, depth, wall [m], outside dimensions. The shear centre lies that far outside
        the mid-line of the web, on the side away from the flanges.

    Mid-line formulas (Timoshenko & Gere, Theory of Elastic Stability): within 1 to 2 % of an
    exact section analysis for thin walls.
    """
    j = section_values("channel", sizes).J
    flange, depth, t = (np.asarray(sizes[n], dtype=np.float64) for n in ("flange", "depth", "wall"))
    b, h = flange - t / 2, depth - t
    iw: F64 = t * b * b * b * h * h / 12 * ((3 * b + 2 * h) / (6 * b + h))
    centre: F64 = 3 * b * b / (h + 6 * b)
    return j, iw, centre


def held_warping_torsion(
    J: ArrayLike,
    Iw: ArrayLike,
    E: ArrayLike,
    G: ArrayLike,
    length: ArrayLike,
    spring: ArrayLike = np.inf,
) -> F64:
    """Torsion constant that a member acts with when its ends cannot warp freely [m⁴].

    Parameters
    ----------
    J, Iw : (...) torsion constant [m⁴], warping constant [m⁶]; 0 or more, finite.
    E, G : (...) [Pa]. length : (...) [m] between the ends.
    spring : (...) bimoment each end takes per unit of warping, the same at both [N·m³]; 0 lets
        the ends warp (the answer is J), infinite holds them.

    Notes
    -----
    E Iw φ'''' = G J φ'' (Vlasov, Thin-Walled Elastic Beams). With h = L/2 √(GJ/EIw) and
    β = 1/(1 + 2 h E Iw tanh(h)/(L c)): J/(1 - β tanh(h)/h); partial restraint: own derivation.
    Written so that neither a short thick member (h near 0: 12 E Iw/(G L²)) nor a long one
    (h large: J) loses digits.
    """
    names = ("J", "Iw", "E", "G", "length", "spring")
    arrays = np.broadcast_arrays(
        *(np.asarray(v, dtype=np.float64) for v in (J, Iw, E, G, length, spring))
    )
    for name, value in zip(names, arrays, strict=True):
        positive = name in ("E", "G", "length")
        good = value > 0 if positive else value >= 0
        if name != "spring":
            good = good & (value < np.inf)
        if not good.all():
            i = int(np.flatnonzero(~good)[0])
            remedy = "stay above 0, and finite" if positive else "use 0 or more"
            remedy += ", and finite" if name in ("J", "Iw") else ""
            raise InputError(name, f"{value.flat[i]:g}", remedy)
    j, iw, e, g, span, c = arrays
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        half = span / 2 * np.sqrt(g * j / (e * iw))
        near, far = np.minimum(half, SMALL), np.maximum(half, SMALL)
        x = near * near
        # (1 - tanh(h)/h)/h² of small h
        series = 1 / 3 - x * (2 / 15 - x * (17 / 315 - x * (62 / 2835 - x * (
            1382 / 155925 - x * (21844 / 6081075)))))  # fmt: skip
        ratio = np.where(half < SMALL, 1 - x * series, np.tanh(far) / far)
        give = g * j * span / 2 * ratio
        # twist per unit torque and length, times G: what free warping and held warping allow
        held = np.where(half < SMALL, series * g * span * span / (4 * e * iw), (1 - ratio) / j)
        part = np.where(np.isinf(c), 1.0, np.where(c > 0, c / (c + give), 0.0))
        free = np.where(c > 0, g * span / 2 * ratio / (c + give), 1 / j)
        answer: F64 = 1 / (free + part * held)
        # nothing warps, or the ends take nothing: plain torsion
        return np.where((iw == 0) | (c == 0), j, answer)
