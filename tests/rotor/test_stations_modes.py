"""Criticals, Campbell diagram, stability and statics: behaviour and refusals."""

from __future__ import annotations

import numpy as np
import pytest

import reportgen.rotor.stations as stations
from reportgen.errors import ModelError
from reportgen.rotor.stations import (
    AxialLoad,
    Bearing,
    Constant,
    Coupling,
    Disc,
    Material,
    Pedestal,
    Rotor,
    Section,
    SpeedTable,
    assemble,
    campbell,
    critical_speed_map,
    criticals_on_bearings,
    cross_coupling_sensitivity,
    cross_coupling_sweep,
    discretisation_check,
    energy_shares,
    instability_onset,
    log_decrement,
    lowest_pairs,
    mass_properties,
    static_deflection,
    synchronous_crossings,
    undamped_criticals,
    with_cross_coupling,
)

STEEL = Material(7850.0, 2.06e11)


def rotor(bearing: Constant, overhung: bool = False, material: Material = STEEL) -> Rotor:
    return Rotor(
        tuple(Section(0.2, 0.08, material, elements=2) for _ in range(5)),
        discs=(Disc(5 if overhung else 2, 40.0, 2.0, 1.1),),
        bearings=(Bearing(0, bearing), Bearing(4, bearing)),
    )


def test_equal_eigenvalues_at_rest_become_forward_and_backward_modes() -> None:
    chart = campbell(assemble(rotor(Constant(5e7, 1e3), overhung=True)), np.linspace(0, 800, 9), 4)
    assert chart.present.all()
    assert set(chart.sense[:, 1:].ravel()) == {"forward", "backward"}
    for mode in chart.sense:
        assert len(set(mode)) == 1  # a mode keeps its sense from rest on
    forward = chart.frequencies[chart.sense[:, 1] == "forward"]
    backward = chart.frequencies[chart.sense[:, 1] == "backward"]
    assert np.all(np.diff(forward[0]) > 0)
    assert np.all(np.diff(backward[0]) < 0)


def test_modes_keep_their_line_where_frequencies_cross() -> None:
    chart = campbell(
        assemble(rotor(Constant(5e7, 10.0), overhung=True)), np.linspace(0, 6000, 61), 6
    )
    full = chart.present.all(axis=1)
    assert full.sum() >= 6
    steps = np.abs(np.diff(chart.exponents[full], 2, axis=1))
    size = np.abs(chart.exponents[full][:, 1:-1])
    assert (steps / size).max() < 0.02  # no line jumps to another


def test_anisotropic_bearings_at_rest_have_modes_without_sense() -> None:
    chart = campbell(assemble(rotor(Constant([[5e7, 0], [0, 8e7]]))), [0.0, 400.0], 4)
    assert set(chart.sense[:, 0]) == {"straight line"}
    assert "straight line" not in chart.sense[:, 1]


def test_overdamped_modes_are_named_and_have_no_decrement() -> None:
    chart = campbell(assemble(rotor(Constant(2e6, 5e5))), [100.0, 200.0], 4)
    over = chart.sense[:, 0] == "overdamped"
    assert over.any()
    assert np.all(chart.exponents[over, 0].real < 0)
    values, exists = chart.decrements
    assert not exists[over].any()
    assert np.all(np.isfinite(values))
    with pytest.raises(ModelError, match="overdamped mode has no"):
        log_decrement(np.array([-3.0 + 0j]))


def test_undamped_rotor_has_zero_decrement() -> None:
    values, exists = campbell(assemble(rotor(Constant(5e7))), [300.0], 4).decrements
    assert exists.all()
    assert np.abs(values).max() < 1e-6


def test_free_shaft_has_rigid_body_modes_left_out() -> None:
    free = Rotor((Section(1.0, 0.05, STEEL, elements=10),))
    assert undamped_criticals(assemble(free), 0.0, 2).rigid_body == 2
    chart = campbell(assemble(free), [0.0], 2)
    bending = undamped_criticals(assemble(free), 0.0, 1).speeds[0]
    assert chart.frequencies.max() == pytest.approx(bending, rel=1e-2)


def test_internal_damping_sets_the_onset_of_instability() -> None:
    # Ω = ω (1 + c_e/c_i): one mass between stiff bearings, external damping on the disc
    # (Ehrich 1964; Tondl 1965).
    eta, ce, m = 2e-4, 60.0, 40.0
    wire = Material(1e-3, 2.06e11, shear_modulus=1e17, internal_damping=eta)
    k = 48 * 2.06e11 * np.pi * 0.05**4 / 64
    stiff = Constant(1e13)
    model = assemble(
        Rotor(
            (Section(0.5, 0.05, wire), Section(0.5, 0.05, wire)),
            discs=(Disc(1, m, 0.0, 0.01),),
            bearings=(Bearing(0, stiff), Bearing(2, stiff), Bearing(1, Constant(0.0, ce))),
        )
    )
    expected = np.sqrt(k / m) * (1 + ce / (eta * k))
    chart = campbell(model, np.linspace(0.5 * expected, 1.5 * expected, 12), 2)
    onset = instability_onset(chart)
    assert onset is not None
    assert onset.speed == pytest.approx(expected, rel=1e-4)
    assert onset.sense == "forward"
    assert abs(onset.decrement) < 1e-8


def test_cross_coupling_beyond_its_threshold_makes_the_rotor_unstable() -> None:
    machine = rotor(Constant(5e7, 2e4))
    sweep = cross_coupling_sweep(machine, 500.0, 2, np.linspace(0, 4e6, 5))
    assert np.all(np.diff(sweep.decrement) < 0)
    assert sweep.threshold is not None
    at = lowest_pairs(
        assemble(with_cross_coupling(machine, 2, sweep.threshold)), np.array([500.0]), 4
    )
    assert np.abs(at.exponents.real).min() < 1e-4
    assert sweep.sense[-1] == "forward"


def test_sensitivity_is_the_slope_of_the_eigenvalues() -> None:
    model = assemble(rotor(Constant([[5e7, 1e7], [-2e7, 7e7]], 2e4)))
    step, speed = 100.0, np.array([500.0])
    pairs = lowest_pairs(model, speed, 4)
    slope = cross_coupling_sensitivity(model, pairs, 2)
    up, down = (
        lowest_pairs(assemble(with_cross_coupling(model.rotor, 2, q)), speed, 4).exponents
        for q in (step, -step)
    )
    assert np.abs((up - down) / (2 * step) - slope).max() < 1e-4 * np.abs(slope).max()


def test_criticals_cross_where_both_ways_agree() -> None:
    model = assemble(rotor(Constant(5e7), overhung=True))
    chart = campbell(model, np.linspace(0, 1500, 31), 4)
    forward = [c.speed for c in synchronous_crossings(chart) if c.sense == "forward"]
    direct = undamped_criticals(model, 5e7, len(forward)).speeds
    assert forward == pytest.approx(direct, rel=1e-8)


def test_map_rises_with_stiffness_and_bearing_tables_meet_it() -> None:
    rows = np.array([0.0, 2000.0])
    k = np.array([2e7, 8e7])[:, None, None] * np.eye(2)
    model = assemble(rotor(SpeedTable(rows, k, 0 * k)))  # type: ignore[arg-type]
    chart = critical_speed_map(model, np.geomspace(1e6, 1e10, 9), 3)
    assert chart.found.all()
    assert np.all(np.diff(chart.speeds, axis=0) > 0)
    met = criticals_on_bearings(model, np.linspace(0, 2000, 21), 3)
    assert met
    for c in met:
        again = undamped_criticals(model, c.stiffness, 3).speeds
        assert again[c.mode] == pytest.approx(c.speed, rel=1e-8)


def test_energy_shares_sum_to_one_and_move_to_the_supports_as_they_soften() -> None:
    foot = Pedestal((100.0, 100.0), (2e8, 2e8))
    soft = Rotor(
        tuple(Section(0.2, 0.08, STEEL) for _ in range(4)),
        discs=(Disc(2, 40.0, 0.5, 0.3),),
        bearings=(Bearing(0, Constant(1e7), "", foot), Bearing(4, Constant(1e7), "", foot)),
    )
    model = assemble(soft)
    shares = [energy_shares(undamped_criticals(model, k, 1), 0) for k in (1e6, 1e7, 1e8)]
    for e in shares:
        assert e.sections.sum() + e.supports.sum() + e.pedestals.sum() == pytest.approx(1)
        kinetic = e.shaft_kinetic.sum() + e.station_kinetic.sum() + e.pedestal_kinetic.sum()
        assert kinetic == pytest.approx(1)
    supports = [e.supports.sum() for e in shares]
    assert supports[0] > supports[1] > supports[2]


def test_axial_tension_raises_and_buckling_compression_is_refused() -> None:
    def bar(force: float) -> Rotor:
        return Rotor(
            (Section(1.0, 0.02, STEEL, elements=12),),
            bearings=(Bearing(0, Constant(1e10)), Bearing(1, Constant(1e10))),
            axial_loads=(AxialLoad(0, 1, force),),
        )

    euler = np.pi**2 * 2.06e11 * np.pi * 0.02**4 / 64  # Euler's load of a pinned bar
    plain = undamped_criticals(assemble(bar(0.0)), 1e10, 1).speeds[0]
    for share in (-0.8, -0.5, 0.5):
        got = undamped_criticals(assemble(bar(share * euler)), 1e10, 1).speeds[0]
        assert got / plain == pytest.approx(np.sqrt(1 + share), rel=3e-3)
    with pytest.raises(ModelError, match="buckles"):
        undamped_criticals(assemble(bar(-1.02 * euler)), 1e10, 1)


def test_halved_elements_are_compared() -> None:
    check = discretisation_check(rotor(Constant(5e7)), 5e7, 3)
    assert check.change.shape == (3,)
    assert 0 < check.largest < 1e-2


def test_coupling_counts_with_its_share() -> None:
    bare = rotor(Constant(5e7))
    with_half = Rotor(bare.sections, bare.discs, couplings=(Coupling(5, 12.0, 0.1, 0.06),))
    gained = mass_properties(assemble(with_half)).mass - mass_properties(assemble(bare)).mass
    assert gained == pytest.approx(6.0)


def test_springs_under_the_bearings_keep_the_loads_of_a_determinate_rotor() -> None:
    model = assemble(rotor(Constant(5e7), overhung=True))
    rigid, sprung = static_deflection(model), static_deflection(model, [5e7, 5e7])
    assert rigid.bearing_loads == pytest.approx(sprung.bearing_loads, rel=1e-9)
    assert sprung.deflection[0] == pytest.approx(-sprung.bearing_loads[0] / 5e7, rel=1e-9)


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda m: static_deflection(m, [5e7]), "1 vertical stiffnesses for 2"),
        (lambda m: undamped_criticals(m, -1.0), "zero or above"),
        (lambda m: undamped_criticals(m, [1.0, 2.0, 3.0]), "3 support stiffnesses for 2"),
        (lambda m: campbell(m, [300.0, 200.0]), "must rise"),
        (lambda m: m.node(6), "station 6 does not exist; the shaft has 0 to 5"),
        (lambda m: static_deflection(assemble(Rotor(m.rotor.sections))), "at least two"),
    ],
)
def test_what_cannot_be_answered_is_refused_in_words(call, words: str) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(ModelError, match=words):
        call(assemble(rotor(Constant(5e7))))


def test_every_exported_name_exists() -> None:
    assert sorted(stations.__all__) == list(stations.__all__)
    for name in stations.__all__:
        assert getattr(stations, name) is not None
