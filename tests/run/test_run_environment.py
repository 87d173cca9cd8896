"""The record of what a calculation ran on is complete and tells nothing private."""

from __future__ import annotations

import getpass
import hashlib
import json
import os
import platform
import re
import socket
import subprocess
import sys
from importlib.metadata import distribution

import numpy as np

from reportgen.run.environment import environment


def test_it_lists_what_pip_lists() -> None:
    listed = subprocess.run(
        [sys.executable, "-m", "pip", "list", "--format=json", "--disable-pip-version-check"],
        capture_output=True,
        text=True,
        check=True,
    )
    expected = {
        re.sub(r"[-_.]+", "-", entry["name"]).lower(): entry["version"]
        for entry in json.loads(listed.stdout)
    }
    found = {entry["name"]: entry["version"] for entry in environment()["packages"]}
    assert found == expected


def test_a_package_is_known_by_the_digest_of_its_file_list() -> None:
    found = {entry["name"]: entry["record_sha256"] for entry in environment()["packages"]}
    record = distribution("numpy").read_text("RECORD")
    assert record is not None
    assert found["numpy"] == hashlib.sha256(record.encode()).hexdigest()


def test_it_names_python_the_platform_and_the_linear_algebra() -> None:
    found = environment()
    assert found["python"]["version"] == platform.python_version()
    assert found["platform"]["machine"] == platform.machine()
    built = np.show_config(mode="dicts")["Build Dependencies"]["blas"]  # type: ignore[index]
    assert (found["blas"]["name"], found["blas"]["version"]) == (built["name"], built["version"])


def test_it_is_the_same_each_time_and_plain_json() -> None:
    assert json.dumps(environment(), allow_nan=False) == json.dumps(environment())


def test_it_holds_no_path_and_no_name_of_computer_or_user() -> None:
    found = environment()
    # Names of packages may hold any word, so they are judged apart.
    rest = json.dumps({key: value for key, value in found.items() if key != "packages"})
    for private in (socket.gethostname(), getpass.getuser(), os.sep + "home", sys.prefix):
        assert private not in rest
    assert os.sep not in json.dumps(found)
