"""Whatever is in a file, reading it gives a case or an InputError with places."""

import random
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from reportgen.case import Case, from_resolved, read_case
from reportgen.errors import InputError

SETTINGS = settings(
    deadline=None, max_examples=80, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
LINES = (Path(__file__).parents[2] / "cases" / "exhauster.yaml").read_text().splitlines()


def outcome(path: Path, content: bytes) -> Case | InputError:
    path.write_bytes(content)
    try:
        return read_case(path)
    except InputError as error:
        return error


def reads_or_explains(path: Path, content: bytes) -> None:
    found = outcome(path, content)
    if isinstance(found, Case):
        assert from_resolved(found.resolved()) == found
        return
    assert found.problems
    for problem in found.problems:
        assert problem.message
        assert problem.file.startswith(str(path.parent))
        assert len(str(problem)) < 2000


@SETTINGS
@given(content=st.binary(max_size=400))
def test_any_bytes(tmp_path: Path, content: bytes) -> None:
    reads_or_explains(tmp_path / "case.yaml", content)


@SETTINGS
@given(content=st.text(max_size=300))
def test_any_text(tmp_path: Path, content: str) -> None:
    reads_or_explains(tmp_path / "case.yaml", content.encode("utf-8", "surrogatepass"))


@SETTINGS
@given(data=st.data())
def test_any_text_in_the_place_of_a_part(tmp_path: Path, data: st.DataObject) -> None:
    lines = list(LINES)
    for _ in range(data.draw(st.integers(1, 3))):
        at = data.draw(st.integers(0, len(lines) - 1))
        line = lines[at]
        start = data.draw(st.integers(0, len(line)))
        end = data.draw(st.integers(start, len(line)))
        junk = data.draw(st.text("{}[]:,&*!|>'\"%@`#-? \n\tabc019.eE+~µ", max_size=12))
        lines[at] = line[:start] + junk + line[end:]
    reads_or_explains(tmp_path / "case.yaml", "\n".join(lines).encode())


@pytest.mark.parametrize("seed", range(40))
def test_lines_lost_doubled_and_shuffled(tmp_path: Path, seed: int) -> None:
    chance = random.Random(seed)
    lines = list(LINES)
    for _ in range(chance.randint(1, 4)):
        at, to = chance.randrange(len(lines)), chance.randrange(len(lines))
        match chance.randrange(3):
            case 0:
                del lines[at]
            case 1:
                lines.insert(to, lines[at])
            case _:
                lines[at], lines[to] = lines[to], lines[at]
    reads_or_explains(tmp_path / "case.yaml", "\n".join(lines).encode())


NESTED = st.recursive(
    st.none() | st.text(max_size=8) | st.sampled_from(["1 kg", "20 %", "flat", "si", "nan m"]),
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(
            st.sampled_from(["value", "source", "kind", "rated", "mass", "tolerance", "x", "name"]),
            inner,
            max_size=4,
        )
    ),
    max_leaves=12,
)


@settings(SETTINGS, max_examples=40)
@given(data=st.data())
def test_any_structure_in_the_place_of_a_part(tmp_path: Path, data: st.DataObject) -> None:
    import io

    from ruamel.yaml import YAML

    whole = YAML(typ="safe", pure=True).load("\n".join(LINES))
    whole["document"]["date"] = "2026-03-02"
    inner = whole
    while True:
        key = data.draw(
            st.sampled_from(sorted(inner)) if isinstance(inner, dict)
            else st.integers(0, len(inner) - 1)
        )  # fmt: skip
        below = inner[key]
        if not isinstance(below, (dict, list)) or not below or data.draw(st.booleans()):
            inner[key] = data.draw(NESTED)
            break
        inner = below
    stream = io.StringIO()
    yaml = YAML(typ="safe", pure=True)
    yaml.representer.ignore_aliases = lambda *_: True
    yaml.dump(whole, stream)
    reads_or_explains(tmp_path / "case.yaml", stream.getvalue().encode("utf-8", "surrogatepass"))
