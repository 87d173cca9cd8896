"""The cautions that every report carries, and what none of them assesses."""

CAUTIONS = (
    "Linear theory of small motion: where a result comes near a clearance, or a support leaves "
    "its stated range, the result is void.",
    "Damping decides the amplitude at and near a critical speed and is the least certain input; "
    "the results hold only for the damping stated.",
    "A whirling shaft can rub, break and throw parts. Guards, an exclusion zone at the first "
    "run-up and trip levels are to be set by those responsible for the machine.",
    "This calculation does not replace the purchaser's specification, local codes, or review by "
    "a licensed engineer. A verdict speaks of the stated limit only.",
)

NOT_ASSESSED = (
    "torsional and axial vibration",
    "casing, piping and foundation beyond the supports stated",
    "fatigue beyond a stress check that is stated",
    "excitation by the fluid, seals and drive beyond what is stated",
    "thermal bow, rub, looseness, cracks and misalignment",
)
