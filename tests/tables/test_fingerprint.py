"""Fingerprints of content."""

import os
from pathlib import Path

from screener.tables.fingerprint import fingerprint


def test_the_same_content_has_the_same_fingerprint_under_another_name(tmp_path: Path) -> None:
    for name in ("a.csv", "b.csv"):
        (tmp_path / name).write_bytes(b"x\n1\n2\n")
    assert fingerprint(tmp_path / "a.csv") == fingerprint(tmp_path / "b.csv")


def test_one_changed_byte_changes_the_fingerprint(tmp_path: Path) -> None:
    path = tmp_path / "a.csv"
    path.write_bytes(bytes(3_000_000))
    before = fingerprint(path)
    path.write_bytes(bytes(1_500_000) + b"\1" + bytes(1_499_999))
    assert fingerprint(path) != before


def test_a_large_file_is_sampled_and_known_by_its_time_of_change_as_well(tmp_path: Path) -> None:
    path = tmp_path / "a.bin"
    path.write_bytes(bytes(5_000_000))
    os.utime(path, (1, 1))
    before = fingerprint(path, whole_bytes=1_000_000)
    assert before.startswith("sampled:")
    assert fingerprint(path, whole_bytes=1_000_000) == before
    os.utime(path, (2, 2))
    assert fingerprint(path, whole_bytes=1_000_000) != before


def test_the_first_and_the_last_byte_of_a_sampled_file_count(tmp_path: Path) -> None:
    seen = set()
    for content in (bytes(5_000_000), b"\1" + bytes(4_999_999), bytes(4_999_999) + b"\1"):
        path = tmp_path / "a.bin"
        path.write_bytes(content)
        os.utime(path, (1, 1))
        seen.add(fingerprint(path, whole_bytes=1_000_000))
    assert len(seen) == 3
