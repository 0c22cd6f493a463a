"""Single values of a study file, read with errors that name key, value and remedy."""

from __future__ import annotations

import difflib
import math
from collections.abc import Iterable, Mapping
from typing import Any

from model.errors import InputError
from model.frame.vocabulary import RIGID
from sweeps.inputs import UNITS, strip_unit

Table = Mapping[str, Any]


def known(where: str, row: Table, allowed: Iterable[str]) -> None:
    """Refuse keys that are not among those allowed; says which one may be meant."""
    allowed = tuple(allowed)
    for key in row:
        if key in allowed:
            continue
        name = f"{where}.{key}" if where else key
        base = strip_unit(key).removesuffix("_in").removesuffix("_m").removesuffix("_cm")
        if f"{base}_mm" in allowed:
            raise InputError(name, str(row[key]), f"write {base}_mm, in millimetres")
        near = difflib.get_close_matches(key, allowed, 1, 0.5)
        hint = f"did you mean {near[0]}?" if near else f"use one of: {', '.join(allowed)}"
        raise InputError(name, "unknown key", hint)


def table(data: Table, key: str, required: bool = True) -> Table:
    """A table of the file; empty when it may be missing."""
    if key not in data:
        if required:
            raise InputError(key, "missing", f"give a table [{key}]")
        return {}
    if not isinstance(data[key], dict):
        raise InputError(key, repr(data[key]), f"give a table [{key}]")
    found: Table = data[key]
    return found


def rows(data: Table, key: str, required: bool = True) -> list[Table]:
    """The tables of an array of tables."""
    rows = data.get(key, [])
    if not isinstance(rows, list) or not all(isinstance(r, dict) for r in rows):
        raise InputError(key, repr(rows), f"give tables [[{key}]]")
    if required and not rows:
        raise InputError(key, "missing", f"give tables [[{key}]]")
    return rows


_MISSING = object()


def value(where: str, row: Table, key: str, default: Any) -> Any:
    """The value of a key, or what stands for it."""
    if key in row:
        return row[key]
    if default is _MISSING:
        raise InputError(f"{where}.{key}", "missing", "give a value")
    return default


def text(where: str, row: Table, key: str, default: Any = _MISSING) -> str:
    """A text."""
    found = value(where, row, key, default)
    if not isinstance(found, str):
        raise InputError(f"{where}.{key}", repr(found), "give a text in quotes")
    return found


def number(where: str, row: Table, key: str, default: Any = _MISSING) -> float:
    """A finite number."""
    found = value(where, row, key, default)
    if isinstance(found, bool) or not isinstance(found, int | float) or not math.isfinite(found):
        raise InputError(f"{where}.{key}", repr(found), "give a number")
    return float(found)


def mm(where: str, row: Table, key: str, default: Any = _MISSING) -> float:
    """A length given in millimetres, in metres."""
    return number(where, row, key, default) * UNITS["mm"]


def whole(where: str, row: Table, key: str, default: int) -> int:
    """A whole number."""
    found = value(where, row, key, default)
    if isinstance(found, bool) or not isinstance(found, int):
        raise InputError(f"{where}.{key}", repr(found), "give a whole number")
    return found


def flag(where: str, row: Table, key: str, default: bool = True) -> bool:
    """True or false; ``default`` when it is missing."""
    value = row.get(key, default)
    if not isinstance(value, bool):
        raise InputError(f"{where}.{key}", repr(value), "write true or false")
    return value


def stiffness(where: str, row: Table, key: str) -> float:
    """The stiffness of a joint: a number above 0, "rigid", or "pinned" against turning."""
    value = row.get(key, "rigid")
    if value == "rigid":
        return RIGID
    if value == "pinned" and key.startswith("rotation"):
        return 0.0
    if isinstance(value, bool) or not isinstance(value, int | float) or not value > 0:
        raise InputError(f"{where}.{key}", repr(value), 'write "rigid" or a number above 0')
    return float(value)
