"""A backup of PostgreSQL, made by its own ``pg_dump``, and how it is brought back."""

from __future__ import annotations

import os
import shutil
import subprocess
from typing import TYPE_CHECKING

from sqlalchemy import make_url

from featherlog.errors import IntegrityError, StoreError
from featherlog.store.backup import free
from featherlog.store.copying import make_private
from featherlog.store.engine import masked, open_engine, reading
from featherlog.store.verify import verify

if TYPE_CHECKING:
    from pathlib import Path

HOW_TO_RESTORE = (
    "PostgreSQL is restored into an empty database of its own: as the owner, "
    "`createdb --template=template0 NEW`, then `pg_restore --exit-on-error --dbname=NEW FILE`, "
    "give the grants again, name NEW in FEATHERLOG_DATABASE_URL and run "
    "`featherlog database health`"
)


def back_up(url: str, target: Path) -> Path:
    """Dump a PostgreSQL database into ``target`` (pg_dump's custom format), for its owner alone.

    Raises:
        RefusedError: there is a file of that name already.
        IntegrityError: the ledger does not fit together.
        StoreError: ``pg_dump`` is not there, or it failed.
    """
    part = free(target).with_name(f"{target.name}.part")
    with reading(open_engine(url)) as connection:
        fault = verify(connection).fault
    if fault:
        raise IntegrityError(f"No backup was made, for the database is not sound: {fault}")
    try:
        make_private(part)
        try:
            _run(url, "pg_dump", "-w", "-Fc", "-f", str(part), "-d", _without_password(url))
            # It reads what was written back as far as its table of contents.
            _run(url, "pg_restore", "--list", str(part))
        except BaseException:
            part.unlink()
            raise
        part.rename(target)
    except OSError as error:
        raise StoreError(f"{target} cannot be written: {error.strerror}.") from error
    return target


def _run(url: str, program: str, *arguments: str) -> None:
    found = shutil.which(program)
    if found is None:
        raise StoreError(
            f"PostgreSQL is backed up by its own {program}, which is not installed here (on "
            "Debian: apt-get install postgresql-client), or with `pg_dump -Fc` on the server."
        )
    done = subprocess.run(  # noqa: S603 - a program of PostgreSQL, arguments not through a shell
        [found, *arguments],
        check=False,
        stdin=subprocess.DEVNULL,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.PIPE,
        text=True,
        env=os.environ | _password(url),
    )
    if done.returncode != 0:
        lines = done.stderr.strip().splitlines() or ["no reason given"]
        raise StoreError(f"The database {masked(make_url(url))} was not backed up: {lines[0]}.")


def _without_password(url: str) -> str:
    # An argument can be read by every user of the computer, the environment by its owner alone.
    bare = make_url(url).set(drivername="postgresql")._replace(password=None)
    return bare.difference_update_query(["password"]).render_as_string(hide_password=False)


def _password(url: str) -> dict[str, str]:
    parsed = make_url(url)
    password = parsed.password or parsed.query.get("password")
    return {"PGPASSWORD": str(password)} if password else {}
