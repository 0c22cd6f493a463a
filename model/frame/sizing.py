"""Section and material columns of one group of members: rigidity, end flexibility, line mass."""

from __future__ import annotations

import numpy as np

from model.frame.batch import PINNED
from model.frame.columns import Choice, Values
from model.frame.layout import Tube
from model.frame.skeleton import F64
from model.stock.materials import Material
from model.stock.sections import SHAPES, SectionValues, section_values
from model.stock.tubes import StockSize


def tube_columns(values: Values, group: str, tube: Tube) -> tuple[F64, F64, F64]:
    """Rigidity (n, 6), end flexibility (n, 6) and line mass (n,) of one group; n may be 1."""
    path = f"tube.{group}"
    material = values.choice(f"{path}.material", tube.material)
    options: tuple[Material, ...] = material.options
    e, g, density = (
        np.array([getattr(m, name) for m in options])[material.index]
        for name in ("E", "G", "density")
    )
    s = _sections(values, path, tube)
    rigidity = np.stack(
        [e * s.A, e * s.Iy, e * s.Iz, g * s.J, 1 / (g * s.Asy), 1 / (g * s.Asz)], axis=-1
    )
    rotation = values.number(f"{path}.rotation", tube.rotation)
    axial = values.number(f"{path}.axial", tube.axial)
    values.refuse(~(rotation >= 0), f"{path}.rotation", rotation, "", "use 0 or more N·m/rad")
    values.refuse(~(axial > 0), f"{path}.axial", axial, "", "use more than 0 N/m")
    with np.errstate(divide="ignore"):
        turn = np.minimum(1 / np.maximum(rotation, 0.0), PINNED)
        pull = np.minimum(2 / np.maximum(axial, 0.0), PINNED)
    # a pin is a ball: it frees the member's turning about itself as well
    spin = np.where(rotation > 0, 0.0, PINNED)
    return rigidity, np.stack([pull, spin, turn, turn, turn, turn], axis=-1), density * s.A


def _sections(values: Values, path: str, tube: Tube) -> SectionValues:
    stock = values.columns.get(f"{path}.stock")
    if isinstance(stock, Choice):
        sizes: tuple[StockSize, ...] = stock.options
        table = [section_values(size.shape, size.sizes) for size in sizes]
        return SectionValues(
            *(
                np.array([float(getattr(s, f)) for s in table])[stock.index]
                for f in ("A", "Iy", "Iz", "J", "Asy", "Asz")
            )
        )
    names = SHAPES[tube.shape].sizes
    given = {name: values.number(f"{path}.{name}", tube.sizes[name]) for name in names}
    safe = dict(given)
    sound = np.ones(values.n, dtype=bool)
    for name in names:
        bad = ~((given[name] > 1e-4) & (given[name] <= 1.0))
        values.refuse(bad, f"{path}.{name}", given[name], "mm", "use 0.1 to 1000")
        sound &= ~bad
    if "wall" in given:
        across = np.minimum.reduce([given[n] for n in names if n != "wall"])
        bad = sound & ~(given["wall"] < across / 2)
        values.refuse(bad, f"{path}.wall", given["wall"], "mm",
                      "keep it below half the outside size")  # fmt: skip
        sound &= ~bad
    for name in names:
        safe[name] = np.where(sound, given[name], 0.1 if name != "wall" else 0.01)
    return section_values(tube.shape, safe)
