"""Unbalance that appears at a constant speed, on one mass."""

from __future__ import annotations

import cmath
import math
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from reportgen.assess.model import SecondComputation
from reportgen.assess.transient_force import largest_force, with_newton
from reportgen.assess.transient_model import ForcePeak, SuddenRun
from reportgen.assess.transient_picture import envelope
from reportgen.errors import ModelError
from reportgen.rotor import onemass, passage
from reportgen.rotor.passage_integrated import passage_integrated

if TYPE_CHECKING:
    from reportgen.assess.transient_side import OneMassSide
    from reportgen.case.passage import SuddenUnbalance

_MOST_TURNS = 2_000
_PER_TURN = 32


def find_sudden(side: OneMassSide, given: SuddenUnbalance) -> SuddenRun:
    """Calculate the whirl after an unbalance appears.

    The rotor whirls steadily with the unbalance it has; at one instant the new one adds to it.
    The mass lost and the change of speed are left out.

    Raises
    ------
    ModelError
        If the rotor has no damping: the motion after it would never settle.
    """
    rotor, speed = side.rotor, float(given.speed)
    if rotor.damping_ratio == 0.0:
        raise ModelError("without damping the whirl after a sudden unbalance never settles")
    added = cmath.rect(float(given.amount) / rotor.mass, float(given.angle or 0.0))
    new = rotor.eccentricity + added
    after = replace(
        rotor,
        eccentricity=abs(new),
        bow_angle=rotor.bow_angle - cmath.phase(new) if rotor.bow else 0.0,
    )
    still = complex(onemass.response(rotor, speed))
    foot = complex(onemass.support_response(rotor, speed))
    start = passage.WhirlState(still, 1j * speed * still, foot, 1j * speed * foot)
    decay = rotor.damping_ratio * rotor.natural_frequency
    turn = 2.0 * math.pi / speed
    duration = min(max(8.0 / decay, 6.0 * turn), _MOST_TURNS * turn)
    dwell = passage.PiecewiseAcceleration(
        [(0.0, speed), (duration, speed)], start_angle=cmath.phase(new)
    )
    fastest = max(speed, rotor.natural_frequency)
    count = math.ceil(duration * fastest / (2.0 * math.pi) * _PER_TURN) + 2
    times = np.linspace(0.0, duration, count)
    # the record turns with the new unbalance, and so do mass centre and bow
    turned = replace(side, rotor=after)
    second = None
    if rotor.internal_damping:
        ran = passage_integrated(after, dwell, times, start)
        method = "equations of motion integrated"
        at = int(ran.amplitude.argmax())
        peak, when = float(ran.amplitude[at]), float(times[at])
        force = _force(turned, ran)
    else:
        ran, method = passage.passage(after, dwell, times, start), "modes in closed form"
        found = passage.passage_peak(after, dwell, start)
        peak, when = found.amplitude, found.time
        around = np.linspace(max(when - 0.1 * turn, 0.0), min(when + 0.1 * turn, duration), 401)
        second = SecondComputation(
            "equations of motion integrated by an explicit Runge-Kutta method",
            float(passage_integrated(after, dwell, around, start).amplitude.max()),
            1e-6,
            "integrated at 1e-10, sampled 2,000 times a turn",
        )
        force = _force(turned, ran)
        step = turn / 200.0
        middle = min(max(force.time, 2.0 * step), duration - 2.0 * step)
        few = passage.passage(after, dwell, middle + step * np.arange(-2.0, 3.0), start)
        force = with_newton(turned, force, few.time, few.speed, few.angle, few.velocity)
    drawn = envelope(times, ran.amplitude)
    return SuddenRun(
        name=given.name,
        speed=speed,
        amount=float(given.amount),
        place="",
        time=drawn[0],
        amplitude=drawn[1],
        before=abs(still),
        after=abs(complex(onemass.response(after, speed))),
        peak=peak,
        peak_time=when,
        method=method,
        contacts=side.contacts(peak),
        force=force,
        second=second,
    )


def _force(side: OneMassSide, ran: passage.Passage) -> ForcePeak:
    return largest_force(side, ran.time, ran.speed, ran.angle, ran.displacement, ran.velocity)
