"""Files are made for their owner alone."""

from __future__ import annotations

import os
import stat
from pathlib import Path

import pytest

from featherlog.actions.files import write_private
from featherlog.errors import InputError


def _mode(file: Path) -> int:
    return stat.S_IMODE(file.stat().st_mode)


def test_a_new_file_is_its_owners(tmp_path: Path) -> None:
    old = os.umask(0)
    try:
        write_private(tmp_path / "sheet.pdf", b"new")
    finally:
        os.umask(old)
    assert _mode(tmp_path / "sheet.pdf") == 0o600


def test_a_file_that_was_open_to_all_is_closed_and_replaced(tmp_path: Path) -> None:
    file = tmp_path / "sheet.pdf"
    file.write_bytes(b"what was there")
    file.chmod(0o644)
    write_private(file, b"new")
    assert (file.read_bytes(), _mode(file)) == (b"new", 0o600)


def test_a_device_keeps_its_mode() -> None:
    device = Path(os.devnull)
    before = _mode(device)
    write_private(device, b"gone")
    assert _mode(device) == before


def test_a_folder_is_no_file(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="cannot be written: Is a directory"):
        write_private(tmp_path, b"new")
