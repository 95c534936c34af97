"""Files that an action leaves behind, readable by their owner alone."""

from __future__ import annotations

import os
import stat
from typing import TYPE_CHECKING

from featherlog.errors import InputError

if TYPE_CHECKING:
    from pathlib import Path


def write_private(file: Path, content: bytes) -> None:
    """Write a file that its owner alone can read; InputError where it cannot be written."""
    try:
        descriptor = os.open(file, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
        with os.fdopen(descriptor, "wb") as stream:
            # A file that was there before keeps its mode; a device or pipe is not ours to close.
            if stat.S_ISREG(os.fstat(descriptor).st_mode):
                os.fchmod(descriptor, 0o600)
            stream.write(content)
    except OSError as error:
        raise InputError(f"{file} cannot be written: {error.strerror}") from error
