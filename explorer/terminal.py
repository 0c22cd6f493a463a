"""What a terminal shows: tables in columns, strict JSON, progress on one line; text goes out."""

from __future__ import annotations

import json
import math
import sys
import time
from collections.abc import Iterable, Mapping, Sequence
from typing import Any, TextIO

GAP = "   "
"""Between two columns."""


def table(head: Sequence[str], rows: Iterable[Sequence[str]], right: Iterable[int] = ()) -> str:
    """Rows under a head and a rule; ``right``: columns that hold numbers."""
    body = [list(row) for row in rows]
    numbers = set(right)
    width = [max(len(row[c]) for row in [list(head), *body]) for c in range(len(head))]

    def line(cells: Sequence[str]) -> str:
        placed = (
            text.rjust(w) if c in numbers else text.ljust(w)
            for c, (text, w) in enumerate(zip(cells, width, strict=True))
        )
        return GAP.join(placed).rstrip()

    return "\n".join([line(head), GAP.join("-" * w for w in width), *(line(row) for row in body)])


def pairs(rows: Sequence[tuple[str, str]]) -> str:
    """Names with their values beside them, values ending in one column."""
    first = max(len(name) for name, _ in rows)
    return "\n".join(f"{name.ljust(first)}{GAP}{value}" for name, value in rows)


def strict(value: Any) -> Any:
    """The same with every number that JSON cannot say (NaN, infinity) as null."""
    if isinstance(value, Mapping):
        return {str(key): strict(item) for key, item in value.items()}
    if isinstance(value, str) or value is None or isinstance(value, bool):
        return value
    if hasattr(value, "tolist"):  # numbers and arrays of numpy
        return strict(value.tolist())
    if isinstance(value, int):
        return value
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, Iterable):
        return [strict(item) for item in value]
    return str(value)


def json_text(value: Any) -> str:
    """Strict JSON in plain letters, so that no code page can spoil it."""
    return json.dumps(strict(value), indent=2, allow_nan=False)


class Progress:
    """How far a long job is: one line that renews itself on a terminal, few lines elsewhere.

    out : where to; nothing but progress is written there.
    """

    def __init__(self, what: str, out: TextIO | None = None) -> None:
        self.what = what
        self.out = sys.stderr if out is None else out
        self.live = self.out.isatty()
        self.start = time.monotonic()
        self.told = -1
        self.first: int | None = None

    def show(self, done: int, of: int) -> None:
        """``done`` of ``of`` pieces are there."""
        if self.first is None:
            self.first = done
        tenth = 10 * done // max(of, 1)
        if not self.live and tenth == self.told:
            return
        self.told = tenth
        text = f"{self.what}: {done:,} of {of:,}{self._rate(done, of)}"
        self.out.write(f"\r{text:<78}" if self.live else text + "\n")
        self.out.flush()

    def end(self) -> None:
        """Leave the line."""
        if self.live and self.told >= 0:
            self.out.write("\n")
            self.out.flush()

    def _rate(self, done: int, of: int) -> str:
        took = time.monotonic() - self.start
        new = done - (self.first or 0)
        if new <= 0 or took < 0.5:
            return ""
        left = (of - done) * took / new
        ends = f", about {left:.0f} s left" if 0 < done < of else f", {took:.1f} s"
        return f" ({new / took:,.0f} a second{ends})"
