import math

import numpy as np
import pytest

from reportgen.criteria import project_source
from reportgen.criteria.acceptance import agreement
from reportgen.criteria.peaks import Record, recorded_peaks, without_runout
from reportgen.errors import ModelError

SPEC = project_source("Test procedure 3")


def run(*modes, low=40.0, high=240.0, readings=801):
    """Amplitude and lag of a sum of one-mass responses (critical speed, damping ratio, size)."""
    speed = np.linspace(low, high, readings)
    z = np.zeros_like(speed, dtype=complex)
    for critical, damping, size in modes:
        r = speed / critical
        z += size * r**2 / (1 - r**2 + 2j * damping * r)
    return speed, np.abs(z), -np.angle(z)


def judged(record, speed=100.0, factor=10.0, at=0.05, af=0.2):
    return agreement(
        record, speed, factor, speed_tolerance=at, amplification_tolerance=af, source=SPEC
    )


def test_a_test_that_follows_the_calculation_meets():
    found = judged(Record(*run((100.0, 0.05, 1.0))))
    assert (found.speed.verdict, found.amplification.verdict) == ("meets", "meets")
    assert found.peak.turn == pytest.approx(math.pi / 2, abs=0.1)


def test_a_test_that_differs_does_not_meet():
    found = judged(Record(*run((110.0, 0.02, 1.0))))
    assert (found.speed.verdict, found.amplification.verdict) == ("does not meet", "does not meet")
    assert found.speed.value == pytest.approx(0.10, abs=0.002)


def test_a_run_down_reads_as_a_run_up():
    speed, amplitude, phase = run((100.0, 0.05, 1.0))
    up, down = Record(speed, amplitude, phase), Record(speed[::-1], amplitude[::-1], phase[::-1])
    assert judged(up) == judged(down)


def test_of_several_peaks_the_nearest_is_compared():
    record = Record(*run((100.0, 0.02, 1.0), (180.0, 0.02, 1.0)))
    assert [round(p.speed) for p in recorded_peaks(record)] == [100, 180]
    assert judged(record, 178.0).peak.speed == pytest.approx(180.0, rel=0.01)


def test_two_peaks_in_one_half_power_band_have_no_factor():
    record = Record(*run((100.0, 0.02, 1.0), (109.0, 0.02, -1.0)))
    found = judged(record, 100.0)
    assert found.speed.verdict == "meets"
    assert found.amplification.verdict == "not assessed"
    assert "another peak" in found.amplification.reason


@pytest.mark.parametrize(("low", "high", "side"), [(96.0, 240.0, "below"), (40.0, 104.0, "above")])
def test_a_record_that_stops_within_the_band_has_no_factor(low, high, side):
    found = judged(Record(*run((100.0, 0.05, 1.0), low=low, high=high)))
    assert found.speed.verdict == "meets"
    assert found.amplification.verdict == "not assessed"
    assert side in found.amplification.reason


def test_a_record_without_a_peak_is_not_assessed():
    speed = np.linspace(10.0, 90.0, 50)
    rising = judged(Record(speed, speed**2))
    assert rising.peak is None
    assert rising.speed.verdict == rising.amplification.verdict == "not assessed"
    assert recorded_peaks(Record(speed, 0.0 * speed)) == []


def test_a_peak_whose_phase_does_not_turn_is_no_critical_speed():
    speed, amplitude, _ = run((100.0, 0.05, 1.0))
    found = judged(Record(speed, amplitude, np.full_like(speed, 0.3)))
    assert found.speed.verdict == found.amplification.verdict == "not assessed"
    assert "0°" in found.speed.reason
    assert judged(Record(speed, amplitude)).speed.verdict == "meets"


def test_a_record_too_coarse_for_the_factor_says_so():
    record = Record(*run((100.0, 0.02, 1.0), readings=121))
    found = judged(record)
    assert "readings" in found.amplification.reason
    assert found.amplification.verdict == "not assessed"


def test_a_calculation_without_a_factor_leaves_it_open():
    found = judged(Record(*run((100.0, 0.05, 1.0))), factor=None)
    assert (found.speed.verdict, found.amplification.verdict) == ("meets", "not assessed")


def test_runout_is_subtracted_as_a_vector():
    speed, amplitude, phase = run((100.0, 0.05, 1.0))
    true = Record(speed, amplitude, phase)
    shifted = amplitude * np.exp(-1j * phase) + 3.0 * np.exp(-0.7j)
    measured = Record(speed, np.abs(shifted), -np.angle(shifted))
    cleared = without_runout(measured, 3.0, 0.7)
    assert cleared.amplitude == pytest.approx(true.amplitude, abs=1e-12)
    assert judged(cleared).amplification.value == pytest.approx(
        judged(true).amplification.value, rel=1e-9
    )
    with pytest.raises(ModelError, match="no phase"):
        without_runout(Record(speed, amplitude), 3.0, 0.7)


def test_a_flat_top_is_a_peak():
    speed = np.arange(1.0, 12.0)
    amplitude = np.array([0, 1, 2, 3, 4, 4, 4, 3, 2, 1, 0], dtype=float)
    (peak,) = recorded_peaks(Record(speed, amplitude))
    assert (peak.speed, peak.amplitude) == (6.0, 4.0)


def test_half_power_speeds_may_be_the_ends_of_the_record():
    amplitude = np.array([7.0, 8.0, 9.0, 10.0, 9.0, 8.0, 7.0])
    (peak,) = recorded_peaks(Record(np.arange(1.0, 8.0), amplitude))
    assert (peak.lower, peak.upper) == (
        pytest.approx(10.0 / 2**0.5 - 6.0, abs=1e-9),
        pytest.approx(14.0 - 10.0 / 2**0.5, abs=1e-9),
    )
    assert peak.amplification == pytest.approx(4.0 / (20.0 - 20.0 / 2**0.5))


def test_jumps_of_a_whole_turn_in_the_phase_are_no_turn():
    speed, amplitude, phase = run((100.0, 0.05, 1.0))
    wrapped = (phase + 1.6) % (2 * math.pi)
    one, other = judged(Record(speed, amplitude, phase)), judged(Record(speed, amplitude, wrapped))
    assert one.peak.turn == pytest.approx(other.peak.turn)


@pytest.mark.parametrize(
    ("speed", "amplitude", "phase", "words"),
    [
        ([1, 2, 3, 4], [0, 1, 0, 1], None, "at least 5"),
        ([1, 2, 3, 4, 5], [0, 1, 0, 1], None, "differ in length"),
        ([1, 2, 3, 4, 5], [0, 1, 0, 1, 0], [0, 0], "differ in length"),
        ([1, 2, 2, 4, 5], [0, 1, 0, 1, 0], None, "reading 3"),
        ([1, 2, 4, 3, 5], [0, 1, 0, 1, 0], None, "reading 4"),
        ([0, 2, 3, 4, 5], [0, 1, 0, 1, 0], None, "above zero"),
        ([1, 2, 3, 4, 5], [0, 1, math.nan, 1, 0], None, "reading 3"),
        ([1, 2, 3, 4, 5], [0, 1, -1, 1, 0], None, "below zero"),
        ([[1, 2], [3, 4]], [0, 1, 0, 1, 0], None, "dimensions"),
    ],
)
def test_a_record_that_is_none_is_refused(speed, amplitude, phase, words):
    with pytest.raises(ModelError, match=words):
        Record(speed, amplitude, phase)


@pytest.mark.parametrize("bad", [math.nan, 0.0, -1.0])
def test_a_calculation_or_tolerance_that_is_none_is_refused(bad):
    record = Record(*run((100.0, 0.05, 1.0)))
    for options in ({"speed": bad}, {"factor": bad}, {"at": bad}, {"af": bad}):
        with pytest.raises(ModelError):
            judged(record, **options)
