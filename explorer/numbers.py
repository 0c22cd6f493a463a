"""How numbers are written everywhere: significant figures, comma for thousands, a real minus.

Figures beyond the significant ones are rounded off only behind the decimal point, so a count of
frames stays exact: 12288 reads "12,288", 1234.5 reads "1,234" and 0.012345 reads "0.0123".
"""

from __future__ import annotations

import math

SPACE = "\u00a0"
"""Stands between a number and its unit, so that a line never breaks there."""
UNKNOWN = "–"
"""Stands for a number that is not known."""

AXIS = ",~f"
"""The same style as a format of chart axes (comma, no superfluous zeros)."""
PERCENT_AXIS = f"format(100 * datum.value, ',~f') + '{SPACE}%'"
"""Shares of one in per cent, as a label expression of chart axes."""


def number(value: float | None, figures: int = 3) -> str:
    """A number with at least ``figures`` significant figures, or a dash when not known."""
    if value is None or math.isnan(value):
        return UNKNOWN
    if math.isinf(value):
        return "∞" if value > 0 else "−∞"
    if 0 < abs(value) < 1e-4:
        return _small(value, figures)
    text = f"{value:,.{decimals(value, figures)}f}"
    if "." in text and float(value).is_integer():
        text = text.rstrip("0").rstrip(".")
    if text.strip("-0.,") == "":
        return "0"
    return text.replace("-", "−")


def with_unit(value: float | None, unit: str, figures: int = 3) -> str:
    """A number and its unit: "1,240 N·m/deg"; per cent and degrees like any other unit."""
    written = number(value, figures)
    return written if unit == "" or written == UNKNOWN else f"{written}{SPACE}{unit}"


def signed(value: float, unit: str = "", figures: int = 3) -> str:
    """A change, with its sign: "+0.42 kg", "−12 N·m/deg", "±0 kg"."""
    written = with_unit(value, unit, figures)
    if number(value, figures) == "0":
        return "±" + written
    return written if written.startswith("−") or written == UNKNOWN else "+" + written


def percent(share: float | None) -> str:
    """A share of one in per cent: "41 %", "3.2 %", "< 0.1 %"."""
    if share is None or math.isnan(share):
        return UNKNOWN
    value = share * 100
    if 0 < abs(value) < 0.1:
        return f"<{SPACE}0.1{SPACE}%"
    if value == 0 or abs(value) >= 9.95:
        return with_unit(round(value), "%", 2)
    return f"{value:.1f}{SPACE}%".replace("-", "−")


def count(amount: int, one: str, many: str | None = None) -> str:
    """A number of things: "1 frame", "12,288 frames", "no frames"."""
    plural = many or one + "s"
    if amount == 0:
        return f"no {plural}"
    return f"{amount:,}{SPACE}{one if amount == 1 else plural}"


def listed(items: list[str], last: str = "and") -> str:
    """Items in a sentence: "a", "a and b", "a, b and c"."""
    if len(items) < 2:
        return "".join(items)
    return f"{', '.join(items[:-1])} {last} {items[-1]}"


def decimals(value: float, figures: int = 3) -> int:
    """Decimal places that show ``figures`` significant figures of a value."""
    if value == 0 or not math.isfinite(value):
        return 0
    exponent = int(f"{value:.{figures - 1}e}".partition("e")[2])  # of the rounded value
    return max(0, figures - 1 - exponent)


def _small(value: float, figures: int) -> str:
    mantissa, _, exponent = f"{value:.{figures - 1}e}".partition("e")
    raised = str(int(exponent)).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
    return f"{mantissa}×10{raised}".replace("-", "−")
