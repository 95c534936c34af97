"""Many processes that record at the same instant. Usage: record_together.py URL WHERE COURSE...

WHERE is a position, or ``confirmed`` for where the fraction was confirmed. One process for each
course named. Each prints ``ok COURSE ENTRY SECONDS`` or ``error COURSE WHY``.
"""

from __future__ import annotations

import os
import sys
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from department import recorded

from featherlog.actions.database import status
from featherlog.errors import FeatherlogError

DAY = "2026-03-02"


def record(url: str, where: str, key: str) -> str:
    start = time.perf_counter()
    position = None if where == "confirmed" else where
    try:
        done = recorded(url, key, DAY, position=position, reason="harness" if position else "")
    except FeatherlogError as error:
        return f"error {key} {error}"
    return f"ok {key} {done.entry} {time.perf_counter() - start:.3f}"


def main() -> None:
    url, where, *keys = sys.argv[1:]
    status(url)  # loads the driver here and not in every process
    gate, opener = os.pipe()
    recorders = []
    for key in keys:
        recorder = os.fork()
        if recorder == 0:
            os.close(opener)
            os.read(gate, 1)  # returns when the gate is closed on the other side, for all at once
            os.write(1, f"{record(url, where, key)}\n".encode())
            os._exit(0)
        recorders.append(recorder)
    os.close(opener)
    for recorder in recorders:
        os.waitpid(recorder, 0)


if __name__ == "__main__":
    main()
