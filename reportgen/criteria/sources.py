"""Where the limits come from: the one list that the table of sources is made from.

Formulas and values are facts and are stated; no standard's text is repeated. Where an entry
is from memory it says so, and the user checks it against the edition they hold.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

Basis = Literal["read", "from memory", "common practice", "project"]


@dataclass(frozen=True)
class Source:
    """One place that a limit is taken from.

    Parameters
    ----------
    id
        Name within this project.
    standard
        Designation of the standard, or what a project calls its own specification.
    clause
        Number or subject of the clause.
    edition
        Year or number of the edition.
    used
        What is taken from it.
    basis
        ``read``, ``from memory``, ``common practice`` or ``project``.
    """

    id: str
    standard: str
    clause: str
    edition: str
    used: str
    basis: Basis


_ALL = (
    Source(
        "balance-grade",
        "ISO 21940-11",
        "balance quality grades, guidance by machine type",
        "2016 (as ISO 1940-1:2003)",
        "e_per·Ω = G, U_per = G·m/Ω; grades G0.4 to G4000; machine types of each grade",
        "from memory",
    ),
    Source(
        "balance-planes",
        "ISO 21940-11",
        "allocation of the permissible residual unbalance to the bearing planes",
        "2016 (as ISO 1940-1:2003)",
        "split by the distances of the mass centre from the bearing planes; 0.3 to 0.7 of the "
        "whole between bearings, 0.3 to 1.3 overhung",
        "from memory",
    ),
    Source(
        "petroleum-unbalance",
        "API 617",
        "residual unbalance",
        "7th edition, 2002, and 8th edition, 2014",
        "6350·W/N g·mm in each plane (W kg journal load, N r/min); 0.254·W g·mm at and above "
        "25 000 r/min",
        "from memory",
    ),
    Source(
        "petroleum-analysis-unbalance",
        "API 684",
        "unbalance in the damped response analysis",
        "2nd edition, 2005",
        "a multiple of the residual unbalance, placed by the mode: sum at the largest deflection "
        "(translatory), each journal's own in opposition (conical), overhung mass at the overhang",
        "from memory",
    ),
    Source(
        "petroleum-vibration",
        "API 617",
        "shaft vibration limit in the mechanical running test",
        "7th edition, 2002, and 8th edition, 2014",
        "25.4·√(12000/N) µm peak-to-peak, at most 25.4 µm",
        "from memory",
    ),
    Source(
        "petroleum-separation",
        "API 617",
        "separation margins by amplification factor",
        "7th edition, 2002, and 8th edition, 2014",
        "below: 17·(1 − 1/(AF − 1.5)) %, at most 16 %; above: 10 + 17·(1 − 1/(AF − 1.5)) %, "
        "at most 26 %; none required for AF below 2.5",
        "from memory",
    ),
    Source(
        "petroleum-clearance",
        "API 617",
        "response against the minimum running clearance",
        "7th edition, 2002, and 8th edition, 2014",
        "at most 75 % of the minimum running clearance, from standstill to trip speed",
        "from memory",
    ),
    Source(
        "petroleum-stability",
        "API 617",
        "stability with the anticipated cross-coupling",
        "7th edition, 2002, and 8th edition, 2014",
        "logarithmic decrement of the first forward mode above 0.1; anticipated cross-coupling "
        "from power, diameter, width and density ratio",
        "from memory",
    ),
    Source(
        "petroleum-verification",
        "API 684",
        "verification of the calculation by the unbalance response test",
        "2nd edition, 2005",
        "measured critical speed within 5 % of the calculated one",
        "from memory",
    ),
    Source(
        "shaft-zones",
        "ISO 7919-3",
        "relative shaft vibration, zone boundaries",
        "2009 (in ISO 20816-3:2022)",
        "4800/√n, 9000/√n and 13200/√n µm peak-to-peak (n r/min), 1000 to 30 000 r/min",
        "from memory",
    ),
    Source(
        "casing-zones",
        "ISO 20816-3",
        "broad-band velocity on non-rotating parts, zone boundaries",
        "2022 (values as ISO 10816-3:2009)",
        "r.m.s. velocity by machine group and support, above 15 kW, 120 to 30 000 r/min",
        "from memory",
    ),
    Source(
        "half-power",
        "Half-power method",
        "",
        "",
        "AF = N_c/(N₂ − N₁) at 0.707 of the peak; two peaks whose bands overlap have no AF "
        "of their own",
        "common practice",
    ),
    Source(
        "internal-damping",
        "Threshold of whirl by internal damping",
        "",
        "",
        "threshold speed against the trip speed with a stated margin",
        "common practice",
    ),
    Source(
        "contact",
        "Geometry",
        "",
        "",
        "peak + sag + runout + bow against the smallest radial clearance",
        "common practice",
    ),
)

SOURCES: dict[str, Source] = {source.id: source for source in _ALL}


def project_source(standard: str, clause: str = "", edition: str = "") -> Source:
    """Return a project's own source: a specification, a data sheet, an agreement."""
    return Source("project", standard, clause, edition, "the limit itself", "project")


def cited(source: Source, *, standard: str = "", clause: str = "", edition: str = "") -> Source:
    """Return ``source`` with what a case states of it; a case's own words replace ours.

    Where a case names another standard than ours, our clause and edition go. The basis stays:
    the rule is still the one we hold, from memory or not, and its caution with it.
    """
    other = bool(standard) and standard != source.standard
    return replace(
        source,
        standard=standard or source.standard,
        clause=clause or ("" if other else source.clause),
        edition=edition or ("" if other else source.edition),
    )
