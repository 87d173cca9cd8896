"""The bytes of a bag."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import PackageError
from reportgen.package.bag import bag_files, read_bag_info

PAYLOAD = {"b.txt": b"two", "a/c.txt": b"one"}


def test_a_bag_holds_payload_and_four_tag_files():
    files = bag_files(PAYLOAD, {"External-Identifier": "CAL-1"})
    assert sorted(files) == [
        *("bag-info.txt", "bagit.txt", "data/a/c.txt", "data/b.txt"),
        *("manifest-sha512.txt", "tagmanifest-sha512.txt"),
    ]
    assert files["bagit.txt"] == b"BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n"
    assert read_bag_info(files["bag-info.txt"]) == {
        "External-Identifier": "CAL-1",
        "Payload-Oxum": "6.2",
    }


def test_the_order_in_which_files_are_given_does_not_matter():
    backwards = dict(reversed(PAYLOAD.items()))
    assert bag_files(PAYLOAD, {"A": "1", "B": "2"}) == bag_files(backwards, {"B": "2", "A": "1"})


@pytest.mark.parametrize(
    ("payload", "info", "words"),
    [
        ({}, {}, "without files"),
        ({"../x": b""}, {}, "path part"),
        ({"a\nb": b""}, {}, "control"),
        ({"a": b"", "A": b""}, {}, "collide"),
        ({"a": b""}, {"Label:": "x"}, "label"),
        ({"a": b""}, {"A\nB": "x"}, "label"),
    ],
)
def test_what_cannot_be_written_is_refused(payload, info, words):
    with pytest.raises(PackageError, match=words):
        bag_files(payload, info)


@given(st.text(max_size=60))
@settings(deadline=None, max_examples=100)
def test_a_value_cannot_add_lines_to_the_bag_info(value):
    content = bag_files({"a": b""}, {"Note": value})["bag-info.txt"].decode()
    assert [line.split(":")[0] for line in content.split("\n")] == ["Note", "Payload-Oxum", ""]
