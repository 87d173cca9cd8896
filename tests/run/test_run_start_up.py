"""What a command loads before it has anything to do."""

from __future__ import annotations

import ast
import subprocess
import sys

import pytest

LOADED = """
import sys
from reportgen.cli import main
try:
    main(sys.argv[1:])
except SystemExit:
    pass
print(sorted({name.partition(".")[0] for name in sys.modules}), file=sys.stderr)
"""


@pytest.mark.parametrize("words", [["--help"], ["run", "--help"], ["--version"]])
def test_help_loads_nothing_heavy(words: list[str]) -> None:
    done = subprocess.run(
        [sys.executable, "-c", LOADED, *words], capture_output=True, text=True, check=True
    )
    assert done.stdout
    loaded = set(ast.literal_eval(done.stderr.splitlines()[-1]))
    assert "reportgen" in loaded
    for heavy in ("numpy", "scipy", "papermill", "nbformat", "pydantic", "matplotlib", "rich"):
        assert heavy not in loaded
