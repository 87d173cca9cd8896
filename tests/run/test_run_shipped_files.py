"""A shipped template that somebody changed in place is not passed off as ours."""

from __future__ import annotations

import base64
import hashlib
from importlib.metadata import PathDistribution
from pathlib import Path

import pytest

from reportgen import resources
from reportgen.errors import InputError
from reportgen.run.job import Options, build

CASE = Path(__file__).parents[2] / "cases" / "circulating-pump.yaml"


@pytest.fixture
def installed(tmp_path: Path) -> tuple[Path, PathDistribution]:
    """Give a template as an installer puts it down: with its digest in a list of files."""
    template = tmp_path / "reportgen" / "_shipped" / "templates" / "one-mass-whirl.ipynb"
    template.parent.mkdir(parents=True)
    template.write_bytes(resources.templates()["one-mass-whirl"].read_bytes())
    digest = base64.urlsafe_b64encode(hashlib.sha256(template.read_bytes()).digest()).decode()
    info = tmp_path / "reportgen-0.1.0.dist-info"
    info.mkdir()
    name = template.relative_to(tmp_path).as_posix()
    (info / "RECORD").write_text(f"{name},sha256={digest.rstrip('=')},1\n{info.name}/RECORD,,\n")
    return template, PathDistribution(info)


def test_a_file_is_held_against_the_list_of_the_installer(
    installed: tuple[Path, PathDistribution], tmp_path: Path
) -> None:
    template, distribution = installed
    assert resources.as_shipped(template, distribution)
    template.write_bytes(template.read_bytes() + b" ")
    assert not resources.as_shipped(template, distribution)
    other = tmp_path / template.name  # on nobody's list
    other.write_bytes(b"{}")
    assert resources.as_shipped(other, distribution)


def test_a_case_does_not_run_on_a_changed_template(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path, installed: tuple[Path, PathDistribution]
) -> None:
    template, distribution = installed
    template.write_bytes(template.read_bytes() + b" ")
    whole = resources.as_shipped
    monkeypatch.setattr(resources, "templates", lambda: {"one-mass-whirl": template})
    monkeypatch.setattr(resources, "as_shipped", lambda path: whole(path, distribution))
    with pytest.raises(InputError, match="not as it was shipped"):
        build(CASE, Options(output=tmp_path / "out"))
    assert not (tmp_path / "out").exists()
