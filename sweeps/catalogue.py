"""What lies in the presets folder: starting vehicles, stock lists and materials."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import model
from model.errors import InputError
from model.stock.materials import Material, parse_materials
from model.stock.tubes import StockList, StockSize, parse_stock


@dataclass(frozen=True)
class Catalogue:
    """Stock lists and materials by name, and the text of every starting vehicle by its id."""

    stock: Mapping[str, StockList]
    materials: Mapping[str, Material]
    vehicles: Mapping[str, str]

    def material(self, field: str, name: str) -> Material:
        """The material of that name; ``field`` is named when there is none."""
        if name not in self.materials:
            raise InputError(field, repr(name), f"use one of: {', '.join(self.materials)}")
        return self.materials[name]

    def stock_list(self, field: str, name: str) -> StockList:
        """The stock list of that name; ``field`` is named when there is none."""
        if name not in self.stock:
            raise InputError(field, repr(name), f"use one of: {', '.join(self.stock)}")
        return self.stock[name]

    def size(self, field: str, given: str) -> StockSize:
        """A stock size from ``LIST/LABEL``, such as ``metric-round/25 x 1.5``."""
        name, slash, label = given.partition("/")
        if not slash:
            raise InputError(field, repr(given), "write LIST/SIZE, such as metric-round/25 x 1.5")
        for size in self.stock_list(field, name).sizes:
            if size.label == label:
                return size
        near = ", ".join(s.label for s in self.stock[name].sizes)
        raise InputError(field, repr(given), f"use a size of {name}: {near}")


def presets_folder() -> Path:
    """The presets beside the packages, in a checkout as well as when installed."""
    first = next(iter(model.__path__))
    return Path(first).resolve().parent / "presets"


@cache
def catalogue() -> Catalogue:
    """Everything in the presets folder; read once."""
    folder = presets_folder()
    stock = {
        path.stem: parse_stock(path.stem, path.read_text(encoding="utf-8"))
        for path in sorted((folder / "stock").glob("*.csv"))
    }
    materials = parse_materials((folder / "materials.toml").read_text(encoding="utf-8"))
    vehicles = {
        path.stem: path.read_text(encoding="utf-8")
        for path in sorted((folder / "vehicles").glob("*.toml"))
    }
    return Catalogue(stock, materials, vehicles)
