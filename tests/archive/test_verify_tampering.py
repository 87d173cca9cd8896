"""Any change to any byte, name or entry of a package is seen: hypothesis looks for one.

``MUTATIONS`` in the environment sets how many are tried in each test (above 1000, every bit
of a signature too).
"""

from __future__ import annotations

import json
import os
from dataclasses import replace
from datetime import timedelta

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from reportgen.archive.verify import Contents, judge_package, read_package
from reportgen.archive.verify_cms import read_detached
from reportgen.archive.verify_zip import read_zip_bytes
from reportgen.package.bag import bag_files
from reportgen.package.zipped import zip_bytes

MUTATIONS = int(os.environ.get("MUTATIONS", "100"))
SETTINGS = settings(
    deadline=None,
    max_examples=MUTATIONS,
    suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow],
)
P7S = "tagmanifest-sha512.txt.p7s"


@pytest.fixture(scope="module")
def whole(workshop, tmp_path_factory):
    return read_package(workshop.package(tmp_path_factory.mktemp("whole"), "checked"))


@pytest.fixture(scope="module")
def now(workshop):
    return workshop.signed_time + timedelta(days=3)


def changed_bytes(draw, content: bytes) -> bytes:
    kind = draw(st.sampled_from(["flip", "replace", "insert", "delete", "cut", "append", "swap"]))
    at = draw(st.integers(0, max(0, len(content) - 1)))
    some = draw(st.binary(min_size=1, max_size=8))
    match kind:
        case "flip" if content:
            return (
                content[:at]
                + bytes([content[at] ^ (1 << draw(st.integers(0, 7)))])
                + (content[at + 1 :])
            )
        case "replace":
            return content[:at] + some + content[at + len(some) :]
        case "insert":
            return content[:at] + some + content[at:]
        case "delete":
            return content[:at] + content[at + draw(st.integers(1, 64)) :]
        case "cut":
            return content[:at]
        case "append":
            return content + some
        case _:
            return content[at:] + content[:at]


@st.composite
def mutations(draw, files):
    """Give the files with one thing changed."""
    files = dict(files)
    name = draw(st.sampled_from(sorted(files)))
    other = draw(st.sampled_from(sorted(files)))
    kind = draw(
        st.sampled_from(["bytes", "bytes", "bytes", "remove", "rename", "copy", "exchange", "add"])
    )
    match kind:
        case "bytes":
            files[name] = changed_bytes(draw, files[name])
        case "remove":
            del files[name]
        case "rename":
            folder, _, last = name.rpartition("/")
            last = draw(st.sampled_from([last.upper(), last + "x", last[:-1], " " + last]))
            files[f"{folder}/{last}" if folder else last] = files.pop(name)
        case "copy":
            files[name] = files[other]
        case "exchange":
            files[name], files[other] = files[other], files[name]
        case _:
            folder = draw(st.sampled_from(["", "data/", "signatures/", "signatures/checked/"]))
            last = draw(st.sampled_from(["x", "fetch.txt", "manifest-md5.txt", "report.pdf2", "."]))
            files[folder + last] = draw(st.binary(max_size=20))
    return files


@given(st.data())
@SETTINGS
def test_no_change_to_a_signed_package_is_unseen(whole, now, data):
    files = data.draw(mutations(whole.files))
    found = judge_package(replace(whole, files=files), now=now)
    assert found.ok is (files == whole.files)


@given(st.data())
@SETTINGS
def test_no_change_to_what_was_signed_is_unseen(whole, now, data):
    signed = {name: c for name, c in whole.files.items() if not name.startswith("data/")}
    name = data.draw(st.sampled_from(sorted(signed)))
    content = changed_bytes(data.draw, signed[name])
    found = judge_package(replace(whole, files={**whole.files, name: content}), now=now)
    assert found.ok is (content == signed[name])


@given(st.data())
@SETTINGS
def test_no_change_to_a_zip_is_unseen(whole, now, data):
    content = zip_bytes(whole.name, whole.files)
    spoilt = changed_bytes(data.draw, content)
    found = judge_package(read_zip_bytes(whole.name, spoilt), now=now)
    assert found.ok is (spoilt == content)


@given(st.data())
@SETTINGS
def test_whatever_bytes_come_a_verdict_is_given(whole, now, data):
    files = {
        name: data.draw(st.one_of(st.just(content), st.binary(max_size=40)))
        for name, content in whole.files.items()
    }
    assert judge_package(replace(whole, files=files), now=now).ok is (files == whole.files)


JSON = st.recursive(
    st.none() | st.booleans() | st.integers(-9, 9) | st.text(max_size=5),
    lambda inner: (
        st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3)
    ),
    max_leaves=6,
)


@given(st.data())
@SETTINGS
def test_whatever_the_results_hold_a_verdict_is_given(workshop, now, data):
    payload = workshop.payload()
    results = json.loads(payload["results.json"])
    place = data.draw(
        st.sampled_from([(), ("document",), ("results", 0), ("results", 0, "second")])
    )
    part = results
    for key in place:
        part = part[key]
    part[data.draw(st.sampled_from(sorted(part)))] = data.draw(JSON)
    if data.draw(st.booleans()):
        results["holds"] = data.draw(JSON)
    payload["results.json"] = json.dumps(results).encode()
    files = bag_files(payload, {})
    assert judge_package(Contents("CAL-0417_B", files), now=now).kind in ("damaged", "unsigned")


@given(JSON, st.data())
@SETTINGS
def test_whatever_a_statement_holds_a_verdict_is_given(whole, now, value, data):
    name = "signatures/checked/statement.json"
    given_statement = json.loads(whole.files[name])
    given_statement[data.draw(st.sampled_from(sorted(given_statement)))] = value
    text = json.dumps(given_statement, ensure_ascii=False, indent=1, sort_keys=True) + "\n"
    content = text.encode(errors="surrogatepass")
    found = judge_package(replace(whole, files={**whole.files, name: content}), now=now)
    assert found.ok is (content == whole.files[name])


def accepted_changes(whole, role):
    """Give the bits of a signature that could be changed and left it accepted.

    Few mutations try every ninth byte, in the
    bit that tells small letters from capitals; many try every bit.
    """
    step, bits = (1, range(8)) if MUTATIONS > 1000 else (9, (5,))
    content = whole.files[f"signatures/{role}/{P7S}"]
    manifest = whole.files["tagmanifest-sha512.txt"]
    expected = read_detached(manifest, content, ())
    found = []
    for at in range(0, len(content), step):
        for bit in bits:
            spoilt = bytearray(content)
            spoilt[at] ^= 1 << bit
            try:
                read = read_detached(manifest, bytes(spoilt), ())
            except Exception:
                continue  # any refusal will do: verification turns each into a finding
            # The statement, which is signed, names every certificate by its digest.
            if read.fingerprints == expected.fingerprints:
                found.append((at, bit))
    return found


def test_every_byte_of_a_signature_counts(whole):
    assert accepted_changes(whole, "checked") == []


def test_every_byte_of_a_time_stamped_signature_counts(workshop, tmp_path, stamper):
    path = workshop.package(tmp_path)
    workshop.sign(path, "prepared", "Ann Ash", timestamper=stamper.at(workshop.signed_time))
    assert accepted_changes(read_package(path), "prepared") == []
