"""The cautions that every report carries, and what none of them assesses."""

from __future__ import annotations

from typing import NamedTuple


class Caution(NamedTuple):
    """A caution in words, and a title to find it by."""

    title: str
    text: str


CAUTIONS = (
    Caution(
        "Danger to people",
        "A whirling shaft can rub, break and throw parts. Guards, an exclusion zone at the first "
        "run-up and trip levels are to be set by those responsible for the machine.",
    ),
    Caution(
        "Linear theory",
        "The calculation holds for small motion. Where a result comes near a clearance, or a "
        "support leaves its stated range, the result is void.",
    ),
    Caution(
        "Damping",
        "Damping decides the amplitude at and near a critical speed and is the least certain "
        "input; the results hold only for the damping stated.",
    ),
    Caution(
        "What this document is not",
        "It does not replace the purchaser's specification, local codes, or review by a licensed "
        "engineer. A verdict speaks of the stated limit only.",
    ),
)

NOT_ASSESSED = (
    "torsional and axial vibration",
    "casing, piping and foundation beyond the supports stated",
    "fatigue beyond a stress check that is stated",
    "excitation by the fluid, seals and drive beyond what is stated",
    "thermal bow, rub, looseness, cracks and misalignment",
)
