"""How long two commands take, as ratios to an interpreter that imports their two libraries.

Run it alone on a quiet machine: ``python tests/benchmarks/test_startup.py``. It prints, and never
fails for a time: ratios of interleaved minima still move by some percent between machines.
"""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
import time
from contextlib import redirect_stdout
from dataclasses import dataclass
from io import StringIO
from pathlib import Path
from typing import TYPE_CHECKING

from featherlog.actions.demo import build_demo

if TYPE_CHECKING:
    from collections.abc import Iterator

    import pytest

ROUNDS = 7
_IMPORTS = "import typer, sqlalchemy.orm"
_QUERY = (
    "import typer, sqlalchemy.orm, sqlalchemy as sql\n"
    "with sql.create_engine('sqlite:///{file}').connect() as connection:\n"
    "    connection.execute(sql.text('select key from course')).all()\n"
)


@dataclass(frozen=True)
class Measure:
    """A command of the program, what it is measured against, and the ratio it should stay under."""

    words: tuple[str, ...]
    yardstick: str
    goal: float


MEASURES = (
    Measure(("--help",), _IMPORTS, 0.3),
    Measure(("today",), _QUERY, 1.15),
    Measure(("today", "FH-2041"), _QUERY, 1.15),
)


def report(folder: Path, rounds: int = ROUNDS) -> Iterator[str]:
    """Yield a line for each measure: the ratio of the quickest runs, the goal, both times."""
    with redirect_stdout(StringIO()):
        file = build_demo(folder).database
    environment = os.environ | {
        "FEATHERLOG_DATABASE_URL": str(file),
        "FEATHERLOG_CLOCK": "2026-03-09T08:30:00+01:00",
    }
    for measure in MEASURES:
        program = (sys.executable, "-m", "featherlog", *measure.words)
        yardstick = (sys.executable, "-c", measure.yardstick.format(file=file))
        times: dict[tuple[str, ...], list[float]] = {program: [], yardstick: []}
        # Alternating, so that a busy moment falls on both.
        for _ in range(rounds):
            for command, found in times.items():
                found.append(_seconds(command, environment))
        ours, theirs = min(times[program]), min(times[yardstick])
        yield (
            f"featherlog {' '.join(measure.words):<13} {ours / theirs:5.2f}  (goal "
            f"{measure.goal:.2f}; {ours:.3f} s against {theirs:.3f} s)"
        )


def _seconds(command: tuple[str, ...], environment: dict[str, str]) -> float:
    start = time.perf_counter()
    subprocess.run(command, check=True, capture_output=True, env=environment)
    return time.perf_counter() - start


def test_startup(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    lines = list(report(tmp_path, rounds=2))
    with capsys.disabled():
        sys.stdout.write("\n" + "".join(f"{line}\n" for line in lines))
    assert len(lines) == len(MEASURES)


if __name__ == "__main__":
    with tempfile.TemporaryDirectory() as scratch:
        for text in report(Path(scratch)):
            sys.stdout.write(f"{text}\n")
