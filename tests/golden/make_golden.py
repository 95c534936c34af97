"""Write the golden databases of the present schema revision into ``fixtures/golden``.

Run it once for each revision, before a later one changes the schema::

    python tests/golden/make_golden.py

It makes ``REVISION.db`` (SQLite) and, where the PostgreSQL server and ``pg_dump`` are installed,
``REVISION.sql`` (a plain dump without owners). Both hold the practice department of
``tests/department.py`` with some fractions treated: complete, in part, at another position, with
and without a reason. Everybody in it is fictional. A file that is there already is left alone, for
a golden database is what an earlier program really wrote.
"""

from __future__ import annotations

import re
import subprocess
import sys
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

TESTS = Path(__file__).resolve().parents[1]
GOLDEN = TESTS.parent / "fixtures" / "golden"
sys.path.insert(0, str(TESTS))

import conftest  # noqa: E402 - the path to it is set above
from department import BREAST, THIGH, build, recorded, treated  # noqa: E402 - as above

from featherlog.store.engine import resolve_url  # noqa: E402 - as above
from featherlog.store.schema import REVISIONS  # noqa: E402 - as above

if TYPE_CHECKING:
    from collections.abc import Iterator


def tell(url: str) -> None:
    """Build the department and treat its two courses a little."""
    build(url)
    treated(url, THIGH, "2026-03-02")
    treated(url, THIGH, "2026-03-03", position="B", reason="label misread")
    treated(url, BREAST, "2026-03-04", position="B")
    recorded(url, THIGH, "2026-03-04", position="A", metersets_mu={"AP upper": 50.0})


def main() -> None:
    """Make what is missing of the present revision."""
    GOLDEN.mkdir(exist_ok=True)
    file = GOLDEN / f"{REVISIONS[-1]}.db"
    if not file.exists():
        tell(resolve_url(str(file)))
    dump = file.with_suffix(".sql")
    if not dump.exists():
        with _postgresql() as url:
            tell(url)
            dump.write_text(_dumped(url), encoding="utf-8")


def _dumped(url: str) -> str:
    """Return the database as statements alone, which a server of any version takes."""
    options = ("--no-owner", "--no-privileges", "--inserts")
    done = subprocess.run(["pg_dump", *options, url], check=True, capture_output=True, text=True)
    # Comments, settings of this server's version, and commands of psql.
    kept = re.sub(
        r"^(--.*|SET .*|SELECT pg_catalog.set_config.*|\\.*)\n", "", done.stdout, flags=re.MULTILINE
    )
    return re.sub(r"\n{3,}", "\n\n", kept).lstrip()


@contextmanager
def _postgresql() -> Iterator[str]:
    binaries = conftest._server_binaries()
    if binaries is None:
        sys.exit(conftest.MISSING)
    with conftest._throwaway_server(binaries) as server:
        yield server.database()


if __name__ == "__main__":
    main()
