"""A practice department whose two courses are approved and not yet begun, built by the actions."""

from __future__ import annotations

from datetime import datetime
from pathlib import Path
from tempfile import TemporaryDirectory

import pytest
from program import PASSPHRASE, SCENARIO

from featherlog.actions.confirm import ReadBack, confirm
from featherlog.actions.database import create
from featherlog.actions.designs import approve, check, prepare
from featherlog.actions.desk import Signer, practice_time
from featherlog.actions.machines import add_machine
from featherlog.actions.record import Delivery, Recorded, record
from featherlog.actions.staff import add_staff
from featherlog.actions.today import today

ADMINISTRATOR, AUTHOR, CHECKER = "Hazel Heron", "Rowan Finch", "Linden Wren"
PHYSICIAN, THERAPIST, SECOND = "Aspen Crane", "Ash Plover", "Maple Teal"
STAFF = {
    ADMINISTRATOR: "administrator",
    AUTHOR: "physicist",
    CHECKER: "physicist",
    PHYSICIAN: "physician",
    THERAPIST: "therapist",
    SECOND: "therapist",
}
THIGH, BREAST = "FH-2041", "FH-2042"
DESIGNS = {THIGH: "thigh.toml", BREAST: "breast.toml"}


def moment(text: str) -> datetime:
    """Return a date, or date and time, of the department's winter."""
    return datetime.fromisoformat(f"{text if 'T' in text else text + 'T09:00:00'}+01:00")


def by(name: str) -> Signer:
    """Return a person who knows the one passphrase of the tests."""
    return Signer(name, lambda: PASSPHRASE)


def build(database: str) -> None:
    create(database, demo=True)
    with practice_time(moment("2026-02-27")):
        for name, role in STAFF.items():
            add_staff(database, newcomer=by(name), role=role, by=by(ADMINISTRATOR))
        add_machine(database, SCENARIO / "alder.toml", by=by(AUTHOR))
        for key, file in DESIGNS.items():
            prepare(database, SCENARIO / file, by=by(AUTHOR))
            check(database, key, by=by(CHECKER))
            approve(database, key, by=by(PHYSICIAN), verified_by=by(CHECKER))


def add_course(database: str, key: str, fractions: int = 15) -> None:
    """Prepare, check and approve one more course, like the thigh's in all but key and length."""
    text = (SCENARIO / DESIGNS[THIGH]).read_text(encoding="utf-8").replace(THIGH, key)
    text = text.replace("fractions = 15", f"fractions = {fractions}")
    with TemporaryDirectory() as folder, practice_time(moment("2026-02-27")):
        design = Path(folder) / "design.toml"
        design.write_text(text, encoding="utf-8")
        prepare(database, design, by=by(AUTHOR))
        check(database, key, by=by(CHECKER))
        approve(database, key, by=by(PHYSICIAN), verified_by=by(CHECKER))


def said(**differs: object) -> Delivery:
    """Return what was delivered: everything as confirmed except what is named."""
    plain = {"fraction": None, "position": None, "field_positions": {}, "metersets_mu": {}}
    return Delivery(**(plain | {"gaps_cm": {}, "reason": ""} | differs))  # type: ignore[arg-type] - a test's shorthand


def confirmed(database: str, key: str, day: str) -> None:
    """Confirm the fraction that is due as it is planned."""
    with practice_time(moment(day)):
        label = today(database, key).position
        read_back = ReadBack(label, None, {})
        confirm(database, key, by=by(THERAPIST), verified_by=by(SECOND), read_back=read_back)


def recorded(database: str, key: str, day: str, **differs: object) -> Recorded:
    with practice_time(moment(day)):
        delivery = said(**differs)
        return record(database, key, by=by(THERAPIST), verified_by=by(SECOND), delivery=delivery)


def treated(database: str, key: str, day: str, **differs: object) -> Recorded:
    """Confirm and record the fraction that is due."""
    confirmed(database, key, day)
    return recorded(database, key, day, **differs)


@pytest.fixture(scope="session")
def department_file(tmp_path_factory: pytest.TempPathFactory) -> str:
    """Give the SQLite file of a department, from which others are copied."""
    file = str(tmp_path_factory.mktemp("department") / "featherlog.db")
    build(file)
    return file
