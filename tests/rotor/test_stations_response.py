"""Response: invariants, bow, forces, peaks, refusals."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import ModelError
from reportgen.rotor.stations import (
    Bearing,
    Bow,
    Constant,
    Disc,
    Material,
    Pedestal,
    Rotor,
    Section,
    SpeedTable,
    Unbalance,
    assemble,
    bearing_forces,
    compare_nearest,
    condition_estimate,
    criticals_from_response,
    energy_balance,
    find_peaks,
    orbits,
    response_peaks,
    shaft_loads,
    unbalance_response,
    unbalance_responses,
    undamped_criticals,
)

STEEL = Material(7850.0, 2.06e11)
CROSS = Constant([[8e7, 2e7], [-3e7, 6e7]], [[2e5, 1e4], [1e4, 1.5e5]])


def rotor(bearing: Constant = CROSS, foot: Pedestal | None = None) -> Rotor:
    return Rotor(
        tuple(Section(0.2, d, STEEL) for d in (0.08, 0.1, 0.12, 0.12, 0.1, 0.08)),
        discs=(Disc(3, 40.0, 0.8, 0.5), Disc(6, 8.0, 0.1, 0.06)),
        bearings=(Bearing(1, bearing, "A", foot), Bearing(5, bearing, "B", foot)),
    )


@settings(deadline=None, max_examples=25)
@given(
    st.floats(-3e7, 3e7), st.floats(-3e7, 3e7), st.floats(1e3, 5e5), st.floats(30, 1500),
    st.booleans(),
)  # fmt: skip
def test_work_of_the_unbalance_is_what_supports_take(
    kxy: float, kyx: float, c: float, speed: float, on_pedestals: bool
) -> None:
    foot = Pedestal((50.0, 30.0), (3e8, 2e8), (3e4, 2e4)) if on_pedestals else None
    model = assemble(rotor(Constant([[9e7, kxy], [kyx, 7e7]], [[c, 0], [0, 2 * c]]), foot))
    r = unbalance_response(model, [speed], [Unbalance(3, 1e-3), Unbalance(6, 1e-4, 2.0)])
    balance = energy_balance(r)
    assert balance.mismatch[0] < 1e-7
    assert r.residual[0] < 1e-10


def test_a_wrong_motion_does_not_balance() -> None:
    r = unbalance_response(assemble(rotor()), [300.0], [Unbalance(3, 1e-3)])
    r.forward[3, 0] *= 1.01
    assert energy_balance(r).mismatch[0] > 1e-3


def test_cases_together_equal_cases_alone_and_superpose() -> None:
    model, speeds = assemble(rotor()), np.linspace(50, 900, 40)
    a, b = [Unbalance(3, 1e-3)], [Unbalance(6, 2e-4, 1.0)]
    one, two, both = unbalance_responses(model, speeds, [a, b, a + b])
    alone = unbalance_response(model, speeds, a)
    assert np.allclose(one.x, alone.x, rtol=1e-12, atol=0)
    assert np.abs(one.y + two.y - both.y).max() < 1e-12 * np.abs(both.y).max()


def test_response_is_reciprocal_on_symmetric_supports() -> None:
    symmetric = Constant([[8e7, 1e7], [1e7, 6e7]], [[2e5, 0], [0, 1e5]])
    still = Rotor(  # no gyroscopic terms: discs without inertia, thin shaft
        tuple(Section(0.2, 0.01, STEEL) for _ in range(6)),
        bearings=(Bearing(1, symmetric), Bearing(5, symmetric)),
    )
    model = assemble(still)
    r3, r6 = unbalance_responses(model, [40.0], [[Unbalance(3, 1e-3)], [Unbalance(6, 1e-3)]])
    assert r3.forward[6, 0, 0] == pytest.approx(r6.forward[3, 0, 0], rel=1e-3)


def test_a_free_rotor_moves_about_its_mass_centre() -> None:
    stiff = Material(7850.0, 1e17)
    free = assemble(Rotor((Section(0.5, 0.1, stiff), Section(0.5, 0.1, stiff))))
    mass = 7850 * np.pi / 4 * 0.01
    r = unbalance_response(free, [100.0, 500.0], [Unbalance(1, 1e-3)])
    assert r.x == pytest.approx(np.full((3, 2), -1e-3 / mass), rel=1e-5)
    still = unbalance_response(free, [0.0], [Unbalance(1, 1e-3)])
    assert np.all(still.x == 0)


def test_an_undamped_rotor_at_its_critical_is_refused() -> None:
    model = assemble(rotor(Constant(7e7)))
    critical = undamped_criticals(model, 7e7, 1).speeds[0]

    def respond(speed: float) -> float:
        return float(unbalance_response(model, [speed], [Unbalance(3, 1e-4)]).x[3, 0].real)

    def close_in() -> None:  # on the exact root, by the sign of the response
        lo, hi = critical * (1 - 1e-9), critical * (1 + 1e-9)
        for _ in range(200):
            mid = (lo + hi) / 2
            lo, hi = (mid, hi) if respond(mid) > 0 else (lo, mid)

    assert respond(critical * 0.999) > 1e-4  # near it, a large but definite answer
    with pytest.raises(ModelError, match="singular"):
        close_in()


def test_bow_shows_slowly_turning_and_cancels_at_a_speed() -> None:
    # One disc between rigid supports: self-balanced where e Ω² = −δ ω² (Nicholas 1976).
    wire = Material(1e-4, 2.06e11, shear_modulus=1e17)
    stiff = Constant(1e12, 1e3)
    bow, m = 5e-5, 30.0
    model = assemble(
        Rotor(
            (Section(0.5, 0.05, wire), Section(0.5, 0.05, wire)),
            discs=(Disc(1, m, 0.0, 0.0),),
            bearings=(Bearing(0, stiff), Bearing(2, stiff)),
        )
    )
    shape = Bow([0.0, bow, 0.0])
    slow = unbalance_response(model, [0.01], [], shape)
    assert slow.x[1, 0] == pytest.approx(bow, rel=1e-6)
    k = 48 * 2.06e11 * np.pi * 0.05**4 / 64
    speed = 0.6 * np.sqrt(k / m)
    unbalance = bow * k / speed**2
    r = unbalance_response(model, [speed], [Unbalance(1, unbalance, np.pi)], shape)
    assert abs(r.x[1, 0]) < 1e-5 * bow
    # Straightened by the unbalance: bent back by the bow's own deflection.
    assert shaft_loads(r).moment.major[0, 1, 0] == pytest.approx(k * bow / 2 * 0.5, rel=1e-4)


def test_forces_and_moments_are_in_balance_along_the_shaft() -> None:
    model = assemble(rotor(foot=Pedestal((50.0, 30.0), (3e8, 2e8), (3e4, 2e4))))
    speeds = np.linspace(50, 1000, 30)
    r = unbalance_response(model, speeds, [Unbalance(3, 1e-3), Unbalance(0, 1e-4)])
    loads = shaft_loads(r)
    top = loads.moment.major.max(axis=(0, 1))
    assert np.all(loads.moment.major[0, 0] < 1e-9 * top)  # free left end
    assert np.abs(loads.moment.major[1, 1] - loads.moment.major[2, 0]).max() < 1e-9 * top.max()
    modulus = np.pi / 32 * 0.12**3
    assert loads.stress[2, 1] == pytest.approx(loads.moment.major[2, 1] / modulus)
    forces = bearing_forces(r)
    foot = r.pedestal_forward[0] + r.pedestal_backward[0]
    inertia = 50.0 * speeds**2 * foot
    assert forces.ground[0, 0] - inertia == pytest.approx(forces.bearing[0, 0], rel=1e-8)


def test_orbit_turns_forward_on_isotropic_bearings_and_both_ways_between_split_criticals() -> None:
    isotropic = unbalance_response(
        assemble(rotor(Constant(7e7, 1e4))), [200.0], [Unbalance(3, 1e-3)]
    )
    orbit = orbits(isotropic)
    assert np.all(orbit.forward)
    assert orbit.minor == pytest.approx(orbit.major)
    split = Constant([[9e6, 0], [0, 3e7]], 10.0)
    model = assemble(rotor(split))
    x, y = (undamped_criticals(model, k, 1).speeds[0] for k in (9e6, 3e7))
    between = orbits(unbalance_response(model, [(x + y) / 2], [Unbalance(3, 1e-3)]))
    assert not between.forward[3, 0]


@settings(deadline=None, max_examples=20)
@given(st.floats(0.005, 0.08), st.floats(50, 900))
def test_half_power_of_one_mass_gives_its_closed_form(zeta: float, natural: float) -> None:
    w = np.linspace(0.3, 2.0, 1500) * natural
    r = w / natural
    peaks = find_peaks(w, r**2 / (1 - r**2 + 2j * zeta * r))
    (peak,) = peaks
    # Exact: r² of the half-power points from 1/A² = 2/A²max in s = 1/r².
    s0, least = 1 - 2 * zeta**2, 4 * zeta**2 * (1 - zeta**2)
    high, low = s0 + np.sqrt(least), s0 - np.sqrt(least)
    exact = (s0**-0.5) / (low**-0.5 - high**-0.5)
    assert peak.amplification == pytest.approx(exact, rel=2e-3)
    assert peak.speed == pytest.approx(natural * s0**-0.5, rel=1e-5)
    assert peak.amplitude == pytest.approx(least**-0.5, rel=1e-4)


def test_a_peak_without_half_power_points_says_why() -> None:
    w = np.linspace(0.8, 1.6, 400)
    (peak,) = find_peaks(w, w**2 / (1 - w**2 + 2j * 0.3 * w))
    assert peak.amplification is None
    assert "does not fall to 0.707 of the peak above" in peak.reason
    overdamped = w**2 / (1 - w**2 + 2j * 0.8 * w)
    assert find_peaks(w, overdamped) == []


def test_refined_peaks_do_not_depend_on_the_first_spacing() -> None:
    model = assemble(rotor(Constant(7e7, 3e4)))
    first = undamped_criticals(model, 7e7, 1).speeds[0]
    found = []
    for n in (60, 200):
        r = unbalance_response(model, np.linspace(0.3, 1.6, n) * first, [Unbalance(3, 1e-3)])
        found.append(response_peaks(r, 3, 0.5)[0])
    assert found[0].speed == pytest.approx(found[1].speed, rel=1e-6)
    assert found[0].amplification == pytest.approx(found[1].amplification, rel=1e-4)


def test_peaks_of_the_response_are_the_criticals_a_second_time() -> None:
    model = assemble(rotor(Constant(7e7, 500.0)))
    direct = undamped_criticals(model, 7e7, 2).speeds
    r = unbalance_response(
        model, np.linspace(50, 1.1 * direct[1], 4000), [Unbalance(3, 1e-3), Unbalance(6, 1e-3)]
    )
    got = compare_nearest(direct, criticals_from_response(r))
    assert got.difference.max() < 1e-3


def test_speeds_outside_a_coefficient_table_are_refused_naming_its_range() -> None:
    table = SpeedTable([100.0, 300.0], np.array([np.eye(2)] * 2) * 8e7, np.zeros((2, 2, 2)))
    model = assemble(rotor(table))  # type: ignore[arg-type]
    with pytest.raises(ModelError, match="table covers 100 to 300 rad/s"):
        unbalance_response(model, [200.0, 301.0], [Unbalance(3, 1e-3)])


def test_a_table_meets_its_rows_and_never_overshoots() -> None:
    k = np.array([1.0, 1.0, 5.0, 5.0])[:, None, None] * np.eye(2) * 1e7
    table = SpeedTable([0.0, 1.0, 2.0, 3.0], k, np.zeros((4, 2, 2)))
    at = table.at(np.linspace(0, 3, 301)).stiffness[:, 0, 0]
    assert at[[0, 100, 200, 300]] == pytest.approx([1e7, 1e7, 5e7, 5e7])
    assert at.min() >= 1e7
    assert at.max() <= 5e7


def test_a_very_short_section_beside_a_long_one_changes_nothing() -> None:
    def built(sections: tuple[Section, ...]) -> float:
        n = len(sections)
        bearings = (Bearing(0, CROSS), Bearing(n, CROSS))
        model = assemble(Rotor(sections, bearings=bearings))
        r = unbalance_response(model, [300.0], [Unbalance(n, 1e-3)])
        assert r.residual[0] < 1e-10
        assert condition_estimate(model, 300.0) < 1e13
        return float(r.major[-1, 0])

    long = Section(1.0, 0.1, STEEL, elements=10)
    cut = (Section(1.0 - 1e-4, 0.1, STEEL, elements=10), Section(1e-4, 0.1, STEEL))
    assert built(cut) == pytest.approx(built((long,)), rel=1e-6)
