"""The colours of the workbench, light and dark, and how they are told apart.

Both sets were chosen so that every mark stands out from its ground by a contrast ratio of at
least 3 and every text by 4.5 (the formula of WCAG 2.1), and so that any two palette colours stay
apart for full colour sight and for simulated protanopia, deuteranopia and tritanopia. The ramps
change lightness in one direction only, so that they also read without hue.
"""

from __future__ import annotations

from dataclasses import asdict, dataclass

FONT = '"Source Sans", "Source Sans 3", "Segoe UI", "Helvetica Neue", Arial, sans-serif'


@dataclass(frozen=True)
class Colours:
    """One set of colours, as ``#RRGGBB``.

    background : the page; surface : panels, cards and the ground under drawings.
    ink : text and outlines; muted : secondary text; rule : hairlines and grids (decoration).
    accent : the one colour for what is chosen or to be pressed; warning : what needs care.
    palette : ordered colours for kinds and categories.
    ramp : low to high, for values; the last is what stands out most from the ground.
    tube : a member without any value; quiet : what is present but not asked about.
    """

    background: str
    surface: str
    ink: str
    muted: str
    rule: str
    accent: str
    warning: str
    palette: tuple[str, ...]
    ramp: tuple[str, ...]
    tube: str
    quiet: str


LIGHT = Colours(
    background="#FFFFFF",
    surface="#F4F3EF",
    ink="#1C2126",
    muted="#5A636C",
    rule="#DBD8D0",
    accent="#2B6CA3",
    warning="#98330F",
    palette=("#2B6CA3", "#98330F", "#219688", "#5E2A77", "#94780A", "#1E2A33"),
    ramp=("#D5CFC0", "#DDB877", "#D98A45", "#B9532F", "#83243A", "#4A1033"),
    tube="#71808D",
    quiet="#858D95",
)
DARK = Colours(
    background="#14181D",
    surface="#1D232A",
    ink="#E8EBEE",
    muted="#A3ADB8",
    rule="#343C45",
    accent="#6FB0E6",
    warning="#EE9068",
    palette=("#5793C8", "#EE9068", "#7DE8D2", "#C3A5F2", "#F6DA6A", "#C2593F"),
    ramp=("#4C586F", "#7A5B90", "#BA607E", "#E4735B", "#F2A24C", "#FBE28A"),
    tube="#9AA9B6",
    quiet="#76828E",
)


def colours(dark: bool) -> Colours:
    """The set for a dark or a light page."""
    return DARK if dark else LIGHT


def as_data(dark: bool) -> dict[str, object]:
    """The set as plain data, for the canvas."""
    return {
        name: list(value) if isinstance(value, tuple) else value
        for name, value in asdict(colours(dark)).items()
    }


def mixed(first: str, second: str, part: float) -> str:
    """The colour that lies ``part`` (0..1) of the way from ``first`` to ``second``."""
    a, b = _channels(first), _channels(second)
    return "#" + "".join(f"{round(x + (y - x) * part):02X}" for x, y in zip(a, b, strict=True))


def along(ramp: tuple[str, ...], part: float) -> str:
    """The colour at ``part`` (0..1, clipped) of a ramp."""
    place = min(max(part, 0.0), 1.0) * (len(ramp) - 1)
    step = min(int(place), len(ramp) - 2)
    return mixed(ramp[step], ramp[step + 1], place - step)


def contrast(first: str, second: str) -> float:
    """Contrast ratio of two colours, 1..21 (WCAG 2.1, relative luminance)."""
    low, high = sorted((luminance(first), luminance(second)))
    return (high + 0.05) / (low + 0.05)


def luminance(colour: str) -> float:
    """Relative luminance, 0 black .. 1 white (WCAG 2.1, sRGB)."""
    red, green, blue = (_linear(c / 255) for c in _channels(colour))
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def _channels(colour: str) -> tuple[int, int, int]:
    return int(colour[1:3], 16), int(colour[3:5], 16), int(colour[5:7], 16)


def _linear(channel: float) -> float:
    return channel / 12.92 if channel <= 0.04045 else float(((channel + 0.055) / 1.055) ** 2.4)
