"""A study written as the TOML that ``sweeps.study_file`` reads, with what a reader needs beside."""

from __future__ import annotations

import json
import math
from collections.abc import Iterable
from typing import Any

from model.frame.layout import Hoop, Mass, Span, Station, Tube
from model.frame.vocabulary import BRACING, ENTRIES
from sweeps.inputs import Input
from sweeps.links import Link
from sweeps.study import Study

HOW_TO_VARY = """\
# how inputs vary (lengths in the unit of the path):
#   { from = 1.2, to = 3.0 }                                    all values alike
#   { from = 1.2, to = 3.0, shape = "triangular", peak = 2.0 }  most at the peak
#   { from = 1.9, to = 2.1, shape = "normal", mean = 2.0, sd = 0.05 }
#   { choices = ["open", "single", "cross"] }
#   { list = "metric-round", from = "20 x 1.5", to = "35 x 2" } or sizes = ["25 x 1.5"]
#   { same_as = "station.dash.height_high_mm", plus = 40 }      follows another field
# [judge_together] lists, by a name, inputs that are judged as one.
# method: sobol (shares of the variation) | screening (which of many inputs matter at all)"""
"""Comment that a written study file carries above its ``[vary]`` table."""


def write_study(study: Study, comments: bool = True) -> str:
    """The study file's text; reading it gives the same study back.

    comments : whether what may vary, and how, stands beside.
    """
    layout = study.layout
    parts = [
        "# A Twistfront study. Lengths in millimetres, masses in kilograms, positions of stations",
        "# in wheelbases behind the front axle.",
        f"# bracing: {' | '.join(BRACING)}",
        f"# entry: {' | '.join(ENTRIES)}",
        "",
        _table(
            "[vehicle]",
            {
                "name": layout.name,
                "about": study.about,
                "wheelbase_mm": _mm(layout.wheelbase),
                "track_front_mm": _mm(layout.track_front),
                "track_rear_mm": _mm(layout.track_rear),
                "front_axle": layout.front_axle,
                "rear_axle": layout.rear_axle,
                "front_mount": layout.front_mount,
                "rear_mount": layout.rear_mount,
                "entry": layout.entry,
            },
        ),
        *(_station(s, layout.tall(k)) for k, s in enumerate(layout.stations)),
        *(_span(s) for s in layout.spans),
        *(_hoop(h) for h in layout.hoops),
        *(_tube(group, tube) for group, tube in layout.tubes.items()),
        *(_mass(m) for m in layout.masses),
        _table("[sweep]", {"samples": study.samples, "seed": study.seed, "method": study.method}),
        *([HOW_TO_VARY] if comments else []),
        "[vary]",
        *(f"{_text(i.path)} = {_range(i)}" for i in study.inputs),
        *(f"{_text(link.path)} = {_link(link)}" for link in study.links),
    ]
    if study.groups:
        groups = {_text(group.name): list(group.paths) for group in study.groups}
        parts += ["", _table("[judge_together]", groups).rstrip()]
    return "\n".join(parts) + "\n"


def _station(station: Station, tall: bool) -> str:
    rows: dict[str, Any] = {
        "name": station.name,
        "at": station.at,
        "width_low_mm": _mm(station.width_low),
        "height_low_mm": _mm(station.height_low),
    }
    if tall:
        rows |= {
            "width_high_mm": _mm(station.width_high),
            "height_high_mm": _mm(station.height_high),
            "ring": station.ring,
        }
    rows |= {key: False for key in ("bottom", "top", "uprights") if not getattr(station, key)}
    if station.outrigger > 0:
        rows["outrigger_mm"] = _mm(station.outrigger)
    if station.clear:
        rows["clear"] = True
    return _table("[[station]]", rows)


def _span(span: Span) -> str:
    rows: dict[str, Any] = {"name": span.name, "bays": span.bays, "floor": span.floor}
    if span.upper:
        rows["top"] = span.top
        if span.left == span.right:
            rows["sides"] = span.left
        else:
            rows |= {"left": span.left, "right": span.right}
    else:
        rows["upper"] = False
    if span.clear:
        rows["clear"] = list(span.clear)
    if span.tube:
        rows["tube"] = span.tube
    return _table("[[span]]", rows)


def _hoop(hoop: Hoop) -> str:
    rows: dict[str, Any] = {
        "name": hoop.name,
        "station": hoop.station,
        "height_mm": _mm(hoop.height),
        "width_mm": _mm(hoop.width),
        "lean_mm": _mm(hoop.lean),
        "bracing": hoop.bracing,
    }
    if hoop.stays_to:
        rows["stays_to"] = hoop.stays_to
    return _table("[[hoop]]", rows)


def _tube(group: str, tube: Tube) -> str:
    rows: dict[str, Any] = {"material": tube.material.name}
    if tube.stock:
        rows["stock"] = tube.stock
    else:
        rows["shape"] = tube.shape
        rows |= {f"{name}_mm": _mm(value) for name, value in tube.sizes.items()}
    if math.isfinite(tube.rotation):
        rows["rotation_Nm_per_rad"] = tube.rotation if tube.rotation > 0 else "pinned"
    if math.isfinite(tube.axial):
        rows["axial_N_per_m"] = tube.axial
    return _table(f"[tube.{_text(group)}]", rows)


def _mass(mass: Mass) -> str:
    place = {f"{axis}_mm": _mm(getattr(mass, axis)) for axis in "xyz"}
    return _table("[[mass]]", {"name": mass.name, "kg": mass.kg, **place})


def _range(given: Input) -> str:
    if not given.is_choice:
        rows: dict[str, Any] = {"from": given.low, "to": given.high}
        if given.shape != "even":
            extra = ("peak",) if given.shape == "triangular" else ("mean", "sd")
            rows |= {"shape": given.shape, **{key: getattr(given, key) for key in extra}}
        return _inline(rows)
    labels = given.option_labels
    if given.path.endswith(".stock"):
        name = str(labels[0]).split("/", 1)[0]
        sizes = _list(str(label).split("/", 1)[1] for label in labels)
        return f"{{ list = {_text(name)}, sizes = {sizes} }}"
    return f"{{ choices = {_list(labels)} }}"


def _link(link: Link) -> str:
    rows: dict[str, Any] = {"same_as": link.same_as}
    if link.plus:
        rows["plus"] = link.plus
    return _inline(rows)


def _inline(rows: dict[str, Any]) -> str:
    return "{ " + ", ".join(f"{key} = {_any(value)}" for key, value in rows.items()) + " }"


def _table(head: str, rows: dict[str, Any]) -> str:
    return "\n".join([head, *(f"{key} = {_any(value)}" for key, value in rows.items()), ""])


def _list(values: Iterable[Any]) -> str:
    return "[" + ", ".join(_any(v) for v in values) + "]"


def _any(value: Any) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, list):
        return _list(value)
    if isinstance(value, str):
        return _text(value)
    return _number(value)


def _text(value: str) -> str:
    """A TOML basic string; JSON's escapes are among TOML's, but for delete."""
    return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")


def _number(value: Any) -> str:
    return repr(value)


def _mm(metres: float) -> float:
    """Millimetres that come back as the same number of metres."""
    for digits in (6, 9, 12):
        shown = round(metres * 1e3, digits)
        if shown * 1e-3 == metres:
            return int(shown) if shown == int(shown) else shown
    return metres * 1e3
