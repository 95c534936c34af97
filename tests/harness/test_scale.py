"""How the time of a day's actions grows with the courses that the database holds.

Ratios of medians between two databases, taken in turn in one run; printed, never asserted, for
they depend on the computer. What is asserted is that no query of a day walks through a table that
grows with the courses.
"""

from __future__ import annotations

import re
import shutil
import sqlite3
import time
from contextlib import closing
from datetime import date, timedelta
from pathlib import Path
from statistics import median
from typing import TYPE_CHECKING, Any

import pytest
from course_copies import add_copies
from department import add_course, build, confirmed, moment, recorded, treated
from sqlalchemy import Engine, event

from featherlog.actions.desk import practice_time
from featherlog.actions.review import review
from featherlog.actions.today import due_list, today

if TYPE_CHECKING:
    from collections.abc import Callable

FINISHED, UNDER_WAY = "FH-5000", "FH-6000"
FRACTIONS = 30
TREATED = 13
_SMALL = ("alembic_version", "failed_signing", "policy", "staff", "store_property")
SMALL = {f"SCAN {name}" for name in _SMALL}
"""Tables that grow with the department and not with its courses."""
MEASURED = 12
"""How many courses under treatment each database has, each measured once."""


def weekdays(count: int) -> list[str]:
    days = (date(2026, 3, 2) + timedelta(days=n) for n in range(2 * count))
    return [day.isoformat() for day in days if day.weekday() < 5][:count]


@pytest.fixture(scope="session")
def template(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Give a department with one finished course and one under treatment."""
    file = tmp_path_factory.mktemp("scale") / "template.db"
    build(str(file))
    for key, count in ((FINISHED, FRACTIONS), (UNDER_WAY, TREATED)):
        add_course(str(file), key, FRACTIONS)
        for day in weekdays(count):
            treated(str(file), key, day)
    return file


def grown(template: Path, file: Path, courses: int) -> tuple[str, list[str]]:
    """Fill a copy of the template with finished courses, and a few under treatment amid them."""
    shutil.copy(template, file)
    under_way = [f"{UNDER_WAY[:-4]}{7000 + n}" for n in range(MEASURED)]
    finished = [f"Z{n:06}" for n in range(courses)]
    half = len(finished) // 2
    add_copies(file, FINISHED, finished[:half])
    add_copies(file, UNDER_WAY, under_way)
    add_copies(file, FINISHED, finished[half:])
    return str(file), under_way


def test_no_query_walks_through_what_grows(template: Path, tmp_path: Path) -> None:
    database, [key, *_] = grown(template, tmp_path / "copied.db", 10)
    asked: set[tuple[str, tuple[object, ...]]] = set()

    def note(_connection: object, _cursor: object, statement: str, *more: Any) -> None:
        if statement.startswith(("SELECT", "UPDATE", "DELETE")) and isinstance(more[0], tuple):
            asked.add((statement, more[0]))

    event.listen(Engine, "before_cursor_execute", note)
    try:
        measure(database, key)
    finally:
        event.remove(Engine, "before_cursor_execute", note)
    walked = set()
    with closing(sqlite3.connect(database)) as connection:
        for statement, values in asked:
            for row in connection.execute(f"EXPLAIN QUERY PLAN {statement}", values):
                # The head of the ledger is the last entry: the walk ends at its first step.
                if re.match(r"SCAN (?!sqlite_)", row[3]) and " LIMIT ?" not in statement:
                    walked.add(row[3])
    assert walked <= SMALL


def timed(action: Callable[[], object]) -> float:
    start = time.perf_counter()
    action()
    return time.perf_counter() - start


def measure(database: str, key: str) -> dict[str, float]:
    day = weekdays(TREATED + 1)[-1]
    with practice_time(moment(day)):
        reads = {
            "today": timed(lambda: due_list(database, day=None, machine=None)),
            "today COURSE": timed(lambda: today(database, key)),
            "review": timed(lambda: review(database, key)),
        }
    return reads | {
        "confirm": timed(lambda: confirmed(database, key, day)),
        "record": timed(lambda: recorded(database, key, day)),
    }


def in_turn(small: str, large: str, key: str, first: int) -> list[dict[str, float]]:
    """Measure both, the large one first every other time: what comes second is often quicker."""
    order = (large, small) if first else (small, large)
    done = {database: measure(database, key) for database in order}
    return [done[small], done[large]]


@pytest.mark.parametrize(
    ("few", "many"),
    [(100, 2000), pytest.param(500, 50_000, marks=pytest.mark.long)],
    ids=["short", "long"],
)
def test_times_beside_many_courses(template: Path, tmp_path: Path, few: int, many: int) -> None:
    start = time.perf_counter()
    small, keys = grown(template, tmp_path / "small.db", few)
    large, _ = grown(template, tmp_path / "large.db", many)
    filled_s = time.perf_counter() - start
    measure(small, keys[0])  # loads what is loaded once
    measure(large, keys[0])
    pairs = [in_turn(small, large, key, first=number % 2) for number, key in enumerate(keys[1:])]
    size = {name: Path(name).stat().st_size / 1e6 for name in (small, large)}
    print(  # noqa: T201 - a harness prints its figures
        f"\n{many} courses with {FRACTIONS * many} fractions ({size[large]:.0f} MB) against {few} "
        f"({size[small]:.0f} MB), filled in {filled_s:.0f} s; medians of {len(pairs)}:"
    )
    for name in pairs[0][0]:
        one, other = (median(pair[side][name] for pair in pairs) for side in (0, 1))
        print(  # noqa: T201 - as above
            f"  {name:13} {1000 * one:7.1f} ms {1000 * other:7.1f} ms   ratio {other / one:.2f}"
        )
