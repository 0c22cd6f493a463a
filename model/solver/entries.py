"""One entry of a nested file: its path, its value, and the questions a reader asks of it."""

from __future__ import annotations

import difflib
import json
import math
from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from model.errors import InputError
from model.frame.skeleton import F64

LARGEST = 1e30
"""Numbers beyond this, or below one over this, are no sizes of anything that is built."""

_ABSENT = object()


@dataclass(frozen=True, eq=False)
class Entry:
    """A value with the path that leads to it, such as ``sections.t.wall``.

    Every question either gives a checked value or raises ``InputError`` with the path, the value
    as it was given and what would do.
    """

    path: str
    value: Any

    def __contains__(self, key: str) -> bool:
        return key in self._mapping()

    def __getitem__(self, key: str) -> Entry:
        return Entry(self._below(key), self._mapping().get(key, _ABSENT))

    def get(self, key: str) -> Entry:
        """An entry that may be left out: empty then."""
        return Entry(self._below(key), self._mapping().get(key, {}))

    def items(self) -> list[tuple[str, Entry]]:
        """Names and entries of an object."""
        return [(str(k), Entry(self._below(k), v)) for k, v in self._mapping().items()]

    def sequence(self) -> list[Entry]:
        """Entries of a list."""
        if not isinstance(self.value, (list, tuple)):
            raise self._wrong("give a list")
        return [Entry(f"{self.path}[{k}]", v) for k, v in enumerate(self.value)]

    def known(self, *keys: str) -> None:
        """Refuse names that mean nothing here."""
        for key, value in self._mapping().items():
            if key not in keys:
                hint = _nearest(str(key), keys)
                raise InputError(self._below(key), _short(value), f"no such entry; {hint}")

    def number(self, what: str = "a number") -> float:
        """A finite number."""
        ok = isinstance(self.value, (int, float)) and not isinstance(self.value, bool)
        if not ok or self.value != self.value or abs(self.value) == math.inf:
            raise self._wrong(f"give {what}")
        if abs(self.value) > LARGEST:
            raise self._wrong(f"use a number of at most {LARGEST:g}")
        return float(self.value)

    def positive(self, unit: str) -> float:
        """A finite number above 0."""
        value = self.number(f"a number above 0 in {unit}")
        if not value > 1 / LARGEST:
            raise self._wrong(f"use a number above 0 in {unit}")
        return value

    def flag(self) -> bool:
        """true or false."""
        if not isinstance(self.value, bool):
            raise self._wrong("use true or false")
        return self.value

    def text(self) -> str:
        """A text that is not empty."""
        if not isinstance(self.value, str) or not self.value:
            raise self._wrong("give a text")
        return self.value

    def vector(self, size: int) -> F64:
        """(size,) finite numbers."""
        entries = self.sequence()
        if len(entries) != size:
            raise self._wrong(f"give {size} numbers")
        return np.array([entry.number() for entry in entries])

    def one_of(self, names: Collection[str], kind: str) -> str:
        """A name that is among ``names``."""
        if not isinstance(self.value, str) or self.value not in names:
            hint = _nearest(str(self.value), names)
            raise self._wrong(
                f"name one of the {kind}; {hint}" if names else f"there are no {kind}"
            )
        return self.value

    def name_in(self, names: Collection[str], kind: str, name: str) -> str:
        """The entry's own name, which must be among ``names``."""
        if name not in names:
            raise InputError(
                self.path, _short(self.value), f"{name} is none of the {kind}; "
                + _nearest(name, names)
            )  # fmt: skip
        return name

    def _mapping(self) -> Mapping[str, Any]:
        if not isinstance(self.value, Mapping):
            raise self._wrong("give an object with named entries")
        return self.value

    def _below(self, key: object) -> str:
        return f"{self.path}.{key}" if self.path else str(key)

    def _wrong(self, remedy: str) -> InputError:
        given = "missing" if self.value is _ABSENT else _short(self.value)
        return InputError(self.path or "frame file", given, remedy)


def read_json(text: str) -> Mapping[str, Any]:
    """The object in a JSON text; refuses broken text and names that come twice."""
    try:
        value = json.loads(text, object_pairs_hook=_no_twins)
    except json.JSONDecodeError as error:
        raise InputError(
            "frame file", f"line {error.lineno} column {error.colno}", f"not JSON: {error.msg}"
        ) from None
    except RecursionError:
        raise InputError("frame file", "nested too deeply", "use the frame file's form") from None
    if not isinstance(value, dict):
        raise InputError("frame file", _short(value), "give an object with nodes and members")
    return value


def _no_twins(pairs: Iterable[tuple[str, Any]]) -> dict[str, Any]:
    found: dict[str, Any] = {}
    for key, value in pairs:
        if key in found:
            raise InputError(key, "twice in one object", "keep one of the two")
        found[key] = value
    return found


def _nearest(name: str, names: Iterable[str]) -> str:
    options = list(names)
    near = difflib.get_close_matches(name, options, n=1)
    if near:
        return f"did you mean {near[0]}?"
    shown = ", ".join(options[:8]) + (", ..." if len(options) > 8 else "")
    return f"use {shown}"


def _short(value: Any) -> str:
    if value is _ABSENT:
        return "missing"
    try:
        text = json.dumps(value, ensure_ascii=False)
    except (TypeError, ValueError):
        text = str(value)
    return text if len(text) <= 60 else text[:57] + "..."
