"""From a case to the rotor of the mechanics.

Numpy and the mechanics load only when a rotor is asked for.
"""

from __future__ import annotations

import cmath
from bisect import bisect_left
from dataclasses import dataclass
from typing import TYPE_CHECKING

from reportgen.case.layout import Layout, Piece
from reportgen.case.places import Located
from reportgen.case.stations import StationRotor

if TYPE_CHECKING:
    from reportgen.case.lateral import UnbalanceCase
    from reportgen.case.supports import BearingGiven, PedestalGiven, SealGiven
    from reportgen.rotor.stations.coefficients import Coefficients
    from reportgen.rotor.stations.inputs import Bearing, Pedestal, Rotor, Section
    from reportgen.rotor.stations.response import Bow, Unbalance


@dataclass(frozen=True, eq=False)
class BuiltRotor:
    """A rotor of the mechanics, and where the case's parts sit in it.

    Attributes
    ----------
    rotor
        For :func:`reportgen.rotor.stations.model.assemble`; its stations count from 0.
    ends
        Places of its stations from the left end in m.
    layout
        The case's own stations.
    given
        What it was made from.
    """

    rotor: Rotor
    ends: tuple[float, ...]
    layout: Layout
    given: StationRotor

    def station(self, part: Located) -> int:
        """Return the station, counted from 0, of a part, probe, clearance or plane."""
        return _nearest(self.ends, self.layout.place(part))

    def unbalance(self, case: UnbalanceCase, total: float | None = None) -> tuple[Unbalance, ...]:
        """Return an unbalance case as the mechanics take it.

        Parameters
        ----------
        case
            Of the case file.
        total
            Total in kg·m that the case's rule gives, factor included; not needed where the
            planes state amounts.
        """
        from reportgen.rotor.stations.response import Unbalance

        if case.rule is not None and total is None:
            raise ValueError(f"the unbalance case {case.name!r} needs the total of its rule")
        return tuple(
            Unbalance(
                self.station(plane),
                float(plane.amount)
                if plane.amount is not None
                else float(plane.share or 0.0) * (total or 0.0),
                float(plane.angle or 0.0),
            )
            for plane in case.planes
        )

    def bow(self) -> Bow | None:
        """Return the residual bow, None where the case states none.

        Between and beyond the stated places the offset runs linearly; stations outside the
        outermost stated places keep the offset of the nearest.
        """
        import numpy as np

        from reportgen.rotor.stations.response import Bow

        if not self.given.bow:
            return None
        points = [
            (self.layout.place(p), cmath.rect(float(p.amount), float(p.angle or 0.0)))
            for p in self.given.bow
        ]
        points.sort(key=lambda point: point[0])
        places = [place for place, _ in points]
        offsets = np.array([offset for _, offset in points])
        return Bow(np.interp(self.ends, places, offsets))


def _nearest(ends: tuple[float, ...], place: float) -> int:
    after = min(bisect_left(ends, place), len(ends) - 1)
    before = max(after - 1, 0)
    return after if abs(ends[after] - place) <= abs(ends[before] - place) else before


def to_rotor(given: StationRotor, also_at: tuple[Located, ...] = ()) -> BuiltRotor:
    """Return the rotor of the mechanics that a case describes.

    Parameters
    ----------
    given
        The case's rotor.
    also_at
        Places that must be stations too: probes, clearances, unbalance planes.

    Returns
    -------
    BuiltRotor
        The rotor with the places of its stations.

    Raises
    ------
    ModelError
        If the mechanics do not cover a value.
    """
    from reportgen.rotor.stations import inputs

    layout = given.layout()
    located = [part for _, part in given.parts()]
    places = [layout.place(p) for p in (*located, *given.bow, *also_at)]
    pieces, ends = layout.cut_at(places)

    def station(part: Located) -> int:
        return _nearest(ends, layout.place(part))

    bearings = [_bearing(b, station(b), carries=True) for b in given.bearings]
    bearings += [_bearing(s, station(s), carries=False) for s in given.seals]
    rotor = inputs.Rotor(
        sections=_sections(given, pieces),
        discs=tuple(
            inputs.Disc(
                station(d),
                float(d.mass),
                float(d.polar_inertia),
                float(d.diametral_inertia),
                d.name,
            )
            for d in given.discs
        ),
        masses=tuple(
            inputs.PointMass(station(m), float(m.mass), m.name) for m in given.added_masses
        ),
        couplings=tuple(
            inputs.Coupling(
                station(c),
                float(c.mass),
                float(c.polar_inertia or 0.0),
                float(c.diametral_inertia or 0.0),
                0.5 if c.share is None else float(c.share),
                c.name,
            )
            for c in given.couplings
        ),
        bearings=tuple(bearings),
        axial_loads=tuple(
            inputs.AxialLoad(
                _nearest(ends, layout.ends[a.from_station - 1]),
                _nearest(ends, layout.ends[a.to_station - 1]),
                float(a.force),
            )
            for a in given.axial_loads
        ),
    )
    return BuiltRotor(rotor, ends, layout, given)


def _sections(given: StationRotor, pieces: list[Piece]) -> tuple[Section, ...]:
    from reportgen.rotor.stations import inputs

    materials = {
        name: inputs.Material(
            density=float(m.density),
            modulus=float(m.modulus),
            # with a shear modulus stated, Poisson's ratio only enters the shear coefficient
            poisson=float(m.poisson)
            if m.poisson is not None
            else min(max(float(m.modulus) / (2 * float(m.shear_modulus or 1)) - 1, 0.0), 0.4999),
            shear_modulus=None if m.shear_modulus is None else float(m.shear_modulus),
            internal_damping=float(m.internal_damping or 0.0),
        )
        for name, m in given.materials.items()
    }
    return tuple(
        inputs.Section(
            length=p.length,
            outer=p.outer[0],
            outer_right=p.outer[1],
            inner=p.inner[0],
            inner_right=p.inner[1],
            mass_outer=None if p.mass_outer is None else p.mass_outer[0],
            mass_outer_right=None if p.mass_outer is None else p.mass_outer[1],
            material=materials[p.material],
            elements=p.count,
        )
        for p in pieces
    )


def _bearing(given: SealGiven | BearingGiven, station: int, carries: bool) -> Bearing:
    from reportgen.rotor.stations import inputs

    pedestal = getattr(given, "pedestal", None)
    return inputs.Bearing(
        station,
        _coefficients(given),
        given.name,
        None if pedestal is None else _pedestal(pedestal),
        carries_weight=carries,
    )


def _pedestal(given: PedestalGiven) -> Pedestal:
    from reportgen.rotor.stations import inputs

    return inputs.Pedestal(
        mass=given.mass.axes(),
        stiffness=given.stiffness.axes(),
        damping=(0.0, 0.0) if given.damping is None else given.damping.axes(),
    )


def _coefficients(given: SealGiven) -> Coefficients:
    import numpy as np

    from reportgen.rotor.stations.coefficients import Constant, SpeedTable

    if given.table is None:
        nothing = ((0.0, 0.0), (0.0, 0.0))
        return Constant(
            given.stiffness.matrix() if given.stiffness else nothing,
            given.damping.matrix() if given.damping else nothing,
            given.inertia.matrix() if given.inertia else nothing,
        )
    table = given.table
    rows = len(table)

    def matrices(letter: str) -> np.ndarray[tuple[int, ...], np.dtype[np.float64]]:
        values = np.zeros((rows, 2, 2))
        for i, a in enumerate("xy"):
            for j, b in enumerate("xy"):
                if f"{letter}{a}{b}" in table.columns:
                    values[:, i, j] = table.column(f"{letter}{a}{b}")
        return values

    return SpeedTable(table.column("speed"), matrices("k"), matrices("c"), matrices("m"))
