"""The letterhead file, read and refused."""

from __future__ import annotations

from pathlib import Path
from types import ModuleType

import pytest

from reportgen.errors import InputError
from reportgen.publish import publish, read_house
from reportgen.publish.house import contrast_on_white

LOGO = '<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 60 20"><path d="M0 0H60V20Z"/></svg>'
GOOD = """\
reportgen-house: 1
name: Hollow Oak Pumping Company
logo: oak.svg
logo alt: Hollow Oak
colours: {main: "#1b4d3e", accent: "#7a3b00"}
paper: letter
fields: {number: Calculation no., client reference: Order}
closing:
  - This calculation belongs to Hollow Oak.
  - "<b>#panic()</b>"
"""


def written(folder: Path, text: str, logo: str = LOGO) -> Path:
    (folder / "oak.svg").write_text(logo, encoding="utf-8")
    place = folder / "house.yaml"
    place.write_text(text, encoding="utf-8")
    return place


def test_a_house_file_is_read_whole(tmp_path: Path) -> None:
    house = read_house(written(tmp_path, GOOD))
    assert house.name == "Hollow Oak Pumping Company"
    assert house.logo_kind == "svg"
    assert (house.main, house.accent, house.paper) == ("#1b4d3e", "#7a3b00", "letter")
    assert house.field_name("number") == "Calculation no."
    assert house.field_name("client_reference") == "Order"
    assert house.field_name("date") == "Date"
    assert len(house.closing) == 2


def test_the_house_shows_in_both_forms(sample: ModuleType, tmp_path: Path) -> None:
    house = read_house(written(tmp_path, GOOD))
    report = publish(sample.small(), house=house)
    page = report.html.decode()
    assert "#1b4d3e" in page
    assert "Calculation no." in page
    assert 'alt="Hollow Oak"' in page
    assert "&lt;b&gt;#panic()&lt;/b&gt;" in page
    assert report.pdf != publish(sample.small()).pdf


FAULTS = {
    "reportgen-house: 2": "format 2 is not known",
    "reportgen-house: 1\nnmae: X": "did you mean 'name'",
    "reportgen-house: 1\ncolours: {main: red}": "#rrggbb",
    'reportgen-house: 1\ncolours: {main: "#ffee00"}': "a darker one",
    "reportgen-house: 1\npaper: a5": "a4 or letter",
    "reportgen-house: 1\nlogo: gone.svg": "cannot be read",
    "reportgen-house: 1\nfields: {colour: x}": "is not a field",
    "reportgen-house: 1\nclosing: 3": "a text or a list",
    "- a list": "holds no fields",
    "a: [": "is not YAML",
    "a: 1\na: 2": "is not YAML",
}


@pytest.mark.parametrize(("text", "told"), FAULTS.items())
def test_a_fault_is_one_clear_error(tmp_path: Path, text: str, told: str) -> None:
    with pytest.raises(InputError) as caught:
        read_house(written(tmp_path, text))
    assert told in str(caught.value)
    assert "house.yaml" in str(caught.value)


def test_faults_carry_their_line(tmp_path: Path) -> None:
    with pytest.raises(InputError) as caught:
        read_house(written(tmp_path, "reportgen-house: 1\npaper: a5\ncolours: {main: red}\n"))
    assert [(p.line, p.field) for p in caught.value.problems] == [
        (3, "colours.main"),
        (2, "paper"),
    ]


@pytest.mark.parametrize(
    "logo",
    [
        "<svg xmlns='http://www.w3.org/2000/svg'><script>1</script></svg>",
        "<svg xmlns='http://www.w3.org/2000/svg' onload='x()'/>",
        "<svg xmlns='http://www.w3.org/2000/svg'><image href='http://a.example/x.png'/></svg>",
        "<!DOCTYPE svg [<!ENTITY a 'b'>]><svg xmlns='http://www.w3.org/2000/svg'>&a;</svg>",
        "<html/>",
        "GIF89a",
    ],
)
def test_a_logo_that_runs_or_loads_is_refused(tmp_path: Path, logo: str) -> None:
    with pytest.raises(InputError, match="logo"):
        read_house(written(tmp_path, GOOD, logo))


def test_contrast_follows_wcag() -> None:
    # WCAG 2.1: black on white is 21:1; #767676 is the lightest grey that passes 4.5:1
    assert contrast_on_white("#000000") == pytest.approx(21)
    assert contrast_on_white("#767676") == pytest.approx(4.54, abs=0.005)
    assert contrast_on_white("#777777") < 4.5
