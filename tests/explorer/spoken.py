"""How the answers of commands are read in tests."""

from __future__ import annotations

import json


def strict(text: str):
    """JSON as the standard has it: NaN and Infinity are no numbers."""

    def refuse(word: str):
        raise AssertionError(f"{word} is not JSON")

    return json.loads(text, parse_constant=refuse)


def one_line(err: str) -> bool:
    """``field = value: remedy`` on one line."""
    return err.count("\n") == 1 and err.endswith("\n") and " = " in err and ": " in err
