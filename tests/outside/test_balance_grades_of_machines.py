"""Source: "ISO 21940 balance G grades", a reprint of the guidance table (ascentialtech.com), read.

Machines and the grade [mm/s] that the table puts them in; our own words for a machine must name
it at the same grade and at no other.

Obtained: read.
"""

import pytest

from reportgen.criteria import MACHINE_TYPES
from reportgen.criteria.balance import GRADES

TABLE = {
    "car wheels": 40.0,
    "crushers": 16.0,
    "farm machines": 16.0,
    "cardan": 16.0,
    "fans": 6.3,
    "pumps": 6.3,
    "gears": 6.3,
    "paper machines": 6.3,
    "centrifuges": 6.3,
    "turbochargers": 6.3,
    "water turbines": 6.3,
    "aircraft gas turbines": 6.3,
    "compressors": 2.5,
    "gas and steam turbines": 2.5,
    "machine-tool drives": 2.5,
    "textile machines": 2.5,
    "grinding-machine drives": 1.0,
    "gyroscopes": 0.4,
    "spindles": 0.4,
}


def test_the_series_of_grades():
    series = [0.4, 1, 2.5, 6.3, 16, 40, 100, 250, 630, 1600, 4000]
    assert [g * 1e3 for g in GRADES] == pytest.approx(series)


@pytest.mark.parametrize(("machine", "grade"), TABLE.items())
def test_a_machine_stands_at_its_grade(machine, grade):
    found = [t.grade * 1e3 for t in MACHINE_TYPES if machine in t.machines]
    assert found == pytest.approx([grade])
