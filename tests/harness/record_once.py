"""Record one fraction and print what a person would see. Usage: record_once.py URL COURSE [BYTES].

With BYTES no file may grow beyond that many, as on a disk that is full. Exit code as the program's.
"""

from __future__ import annotations

import resource
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from department import recorded

from featherlog.errors import FeatherlogError

LONG = "reason " * 2000
"""More than fits into one page of the file."""

if __name__ == "__main__":
    url, key, *limit = sys.argv[1:]
    if limit:
        resource.setrlimit(resource.RLIMIT_FSIZE, (int(limit[0]), resource.RLIM_INFINITY))
    try:
        done = recorded(url, key, "2026-03-02", position="A", reason=LONG)
        print("entry", done.entry)  # noqa: T201 - this is what the test reads
    except FeatherlogError as error:
        print(error)  # noqa: T201 - as above
        sys.exit(error.exit_code)
