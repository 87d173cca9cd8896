"""Highest amplitude of a passage by integration, for rotors that the closed form leaves out."""

from __future__ import annotations

import math

import numpy as np

from reportgen.errors import ModelError
from reportgen.rotor.onemass_model import OneMassRotor
from reportgen.rotor.passage_integrated import passage_integrated
from reportgen.rotor.passage_peak import PassagePeak, judged_peak
from reportgen.rotor.passage_programme import Programme, speed_range

_PER_PERIOD = 64
_MOST_SAMPLES = 2_000_000


def integrated_peak(rotor: OneMassRotor, programme: Programme) -> PassagePeak:
    """Highest amplitude of the disc during a speed programme, from the integrated motion.

    Parameters
    ----------
    rotor
        The rotor, with internal damping if it has any.
    programme
        The speed programme; the motion at its start is the steady whirl.

    Returns
    -------
    PassagePeak
        As from `passage_peak`. The motion is sampled 64 times in the shortest beat and its
        highest value taken from the parabola through three samples, good to 1e-6 relative.

    Raises
    ------
    ModelError
        As in `passage_integrated`, or if more than two million samples would be needed.
    """
    first, last = programme.start_time, programme.end_time
    beat = (speed_range(programme)[1] + rotor.natural_frequency) / (2.0 * math.pi)
    count = math.ceil((last - first) * beat * _PER_PERIOD) + 3
    if count > _MOST_SAMPLES:
        raise ModelError(
            f"the passage would need {count:.3g} samples with internal damping; integration "
            f"covers {_MOST_SAMPLES:,}: make it faster, or start it nearer the critical speed"
        )
    run = passage_integrated(rotor, programme, np.linspace(first, last, count))
    size = np.abs(run.displacement)
    top = int(np.argmax(size))
    amplitude, time, speed = float(size[top]), float(run.time[top]), float(run.speed[top])
    if 0 < top < count - 1:
        left, middle, right = (float(v) for v in size[top - 1 : top + 2])
        curve = left - 2.0 * middle + right
        if curve < 0.0:
            off = 0.5 * (left - right) / curve
            amplitude = middle - 0.125 * (left - right) ** 2 / curve
            time += off * float(run.time[1] - run.time[0])
            speed = float(np.interp(time, run.time, run.speed))
    return judged_peak(rotor, programme, amplitude, time, speed)
