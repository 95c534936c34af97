"""A writer for tests that need another process: append people, or hold a transaction open.

Usage: store_writer.py URL NAME COUNT | store_writer.py URL hold
"""

from __future__ import annotations

import sys

import store_scenario as scenario

from featherlog.store.engine import open_engine, writing
from featherlog.store.ledger import append


def write(url: str, name: str, count: int) -> None:
    engine = open_engine(url)
    for number in range(count):
        with writing(engine) as connection:
            append(connection, scenario.staff(f"{name} {number}"))


def hold(url: str) -> None:
    with writing(open_engine(url)) as connection:
        append(connection, scenario.staff("Nobody"))
        print("holding", flush=True)  # noqa: T201 - tells the test that it may strike
        sys.stdin.read()


if __name__ == "__main__":
    if sys.argv[2] == "hold":
        hold(sys.argv[1])
    else:
        write(sys.argv[1], sys.argv[2], int(sys.argv[3]))
