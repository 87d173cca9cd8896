"""Passages of a rotor by stations, held against the exact form and the steady whirl."""

from __future__ import annotations

import math

import numpy as np
import pytest

from reportgen.errors import ModelError
from reportgen.rotor import onemass, passage
from reportgen.rotor import stations as mechanics
from reportgen.rotor.stations.coefficients import Constant
from reportgen.rotor.stations.inputs import Bearing, Disc, Material, Rotor, Section
from reportgen.rotor.transient.programme import Prescribed
from reportgen.rotor.transient.station_run import station_run

MASS, DAMPING, UNBALANCE = 40.0, 700.0, 2e-3


def light_shaft() -> mechanics.Model:
    """Give a shaft that weighs next to nothing, with a heavy disc and a damper at its middle."""
    steel = Material(density=1e-3, modulus=205e9, poisson=0.29)
    half = Section(length=0.5, outer=0.04, material=steel, elements=2)
    rigid = Constant(np.eye(2) * 1e12, np.zeros((2, 2)), np.zeros((2, 2)))
    damper = Constant(np.zeros((2, 2)), np.eye(2) * DAMPING, np.zeros((2, 2)))
    return mechanics.assemble(
        Rotor(
            sections=(half, half),
            discs=(Disc(1, MASS, 0.0, 0.0),),
            bearings=(
                Bearing(0, rigid, "left"),
                Bearing(2, rigid, "right"),
                Bearing(1, damper, "damper", carries_weight=False),
            ),
        )
    )


def same_one_mass(model: mechanics.Model) -> onemass.OneMassRotor:
    """Give the one mass on the stiffness that the shaft shows under its weight."""
    sag = abs(float(mechanics.static_deflection(model).deflection[model.node(1)]))
    k = MASS * 9.80665 / sag
    ratio = DAMPING / (2.0 * math.sqrt(k * MASS))
    return onemass.OneMassRotor(
        mass=MASS, stiffness=k, damping_ratio=ratio, eccentricity=UNBALANCE / MASS
    )


@pytest.mark.parametrize("sign", [1.0, -1.0], ids=["up", "down"])
def test_a_rotor_that_reduces_to_one_mass_passes_as_the_exact_form_has_it(sign: float) -> None:
    model = light_shaft()
    one = same_one_mass(model)
    ends = (0.3 * one.natural_frequency, 1.8 * one.natural_frequency)
    programme = passage.ConstantAcceleration(*ends[:: int(sign)], sign * 25.0)
    exact = passage.passage_peak(one, programme)
    unbalance = (mechanics.Unbalance(1, UNBALANCE),)
    run = station_run(
        model, Prescribed(programme), unbalance, None, 3, one.natural_frequency, per_turn=64
    )
    z = run.displacement(1)
    assert np.abs(z).max() == pytest.approx(exact.amplitude, rel=1e-4)
    assert run.speed[np.abs(z).argmax()] == pytest.approx(exact.speed, rel=2e-3)
    drawn = passage.passage(one, programme, run.time)
    assert np.abs(z - drawn.displacement).max() < 2e-3 * exact.amplitude
    # the two ends carry what the damper does not: half each
    left, right, damper = np.abs(run.forces()).max(axis=1)
    assert left == pytest.approx(right, rel=1e-6)
    assert left == pytest.approx(0.5 * one.stiffness * exact.amplitude, rel=2e-3)
    assert 0.0 < damper < left


def test_a_slow_passage_tends_to_the_steady_curve() -> None:
    model = light_shaft()
    one = same_one_mass(model)
    steady = onemass.resonance_peak(one).amplitude
    assert steady is not None
    missed = []
    for acceleration in (40.0, 10.0, 2.5):
        ramp = passage.ConstantAcceleration(
            0.8 * one.natural_frequency, 1.2 * one.natural_frequency, acceleration
        )
        unbalance = (mechanics.Unbalance(1, UNBALANCE),)
        run = station_run(model, Prescribed(ramp), unbalance, None, 3, one.natural_frequency)
        missed.append(abs(np.abs(run.displacement(1)).max() / steady - 1.0))
    assert missed[0] > missed[1] > missed[2]
    assert missed[2] < 2e-3


def test_a_passage_of_hours_is_refused_with_what_to_change() -> None:
    model = light_shaft()
    slow = passage.ConstantAcceleration(0.0, 400.0, 1e-3)
    with pytest.raises(ModelError, match="make it faster, or begin and end it nearer"):
        station_run(model, Prescribed(slow), (mechanics.Unbalance(1, 1e-3),), None, 2, 200.0)
