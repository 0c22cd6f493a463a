"""What the numbers of a frame mean and what they do not say, in sentences; text comes out."""

from __future__ import annotations

_ENTRY = {
    "spring mounts": "as vertical forces at the spring mounts",
    "linkage": "through the wheel linkages, with the sideways forces they add",
}

CAUTIONS = (
    (
        "A concept, not an approval: strength, fatigue, crash behaviour and the rules that apply "
        "to the vehicle are not answered here."
    ),
    (
        "Members are linear elastic, straight between joint centres, and move little; tube walls "
        "neither buckle nor ovalise."
    ),
    (
        "Joints are as stiff as the tube table says. Welded joints of thin tube give way a "
        "little, so expect a measured frame to be softer than one computed with rigid joints."
    ),
    "Panels, body, engine and suspension neither stiffen nor soften the frame here.",
    (
        "Cut lengths run between joint centres. Notch and trim to the tubes that meet, and check "
        "sizes and tolerances with the supplier before ordering."
    ),
    (
        "Material values are nominal. Welding lowers the strength of aluminium and of "
        "heat-treated or cold-drawn steel beside the weld; stiffness stays."
    ),
)
"""What a reader of any result should know."""


def definitions(entry: str) -> dict[str, str]:
    """What each result is, by its name; ``entry``: how the twist couple comes in."""
    return {
        "Twist stiffness": (
            "The couple applied at the front axle divided by the angle between the two axle "
            "planes, the rear axle held, on supports that constrain nothing else. The couple "
            f"comes in {_ENTRY[entry]}. It belongs to the frame alone, read at its own mounts: "
            "figures measured hub to hub, or with the rear clamped, are not comparable."
        ),
        "Bending stiffness": (
            "A force half-way between the axles, half on each lower rail, divided by the "
            "deflection there against the straight line between the axles."
        ),
        "Axial share": (
            "The part of the strain energy under twist that is tension and compression. A fully "
            "braced space frame lies above 90 %; a ladder or an open box lives on bending and "
            "torsion."
        ),
        "Energy share": (
            "The part of the strain energy under twist that a group of members stores. It equals "
            "the per cent of twist stiffness gained for one per cent more stiffness of that group."
        ),
        "Mass": (
            "Tubes alone: length between joint centres times mass for each metre. No brackets, "
            "welds or panels, and nothing taken off for notches."
        ),
    }
