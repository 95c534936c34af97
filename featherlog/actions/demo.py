"""A fictional department in a folder of its own, with three courses at different stages."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING

from featherlog.actions import database as databases
from featherlog.actions.confirm import ReadBack, confirm
from featherlog.actions.designs import approve, check, prepare
from featherlog.actions.desk import Signer, practice_time
from featherlog.actions.dose import dose, write_pictures
from featherlog.actions.files import write_private
from featherlog.actions.machines import add_machine
from featherlog.actions.papers import dossier_pages, review_page, sheet
from featherlog.actions.record import Delivery, record
from featherlog.actions.staff import add_staff
from featherlog.actions.today import due_list, today
from featherlog.errors import InputError, RefusedError
from featherlog.exchange.demo import DEMO_DESIGNS, DEMO_MACHINE, DEMO_SPINE, demo_text

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.views.day import DayView, DueList
    from featherlog.views.dose import DoseView

ADMINISTRATOR, PHYSICIST, CHECKER = "Hazel Heron", "Rowan Finch", "Linden Wren"
THERAPIST, SECOND_THERAPIST, PHYSICIAN = "Ash Plover", "Maple Teal", "Aspen Crane"
_STAFF = (
    (ADMINISTRATOR, "administrator"),
    (PHYSICIST, "physicist"),
    (CHECKER, "physicist"),
    (THERAPIST, "therapist"),
    (SECOND_THERAPIST, "therapist"),
    (PHYSICIAN, "physician"),
)
THIGH, BREAST, SPINE = "FH-2041", "FH-2042", "FH-2043"
_DATABASE = "featherlog.db"
_TODAY = "2026-03-09T08:30"
_OFFSET = "+01:00"
# Treated so far: the day, and the position of each field where it was not the planned one.
_THIGH_DAYS = ("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06")
_BREAST_DAYS = ("2026-03-04", "2026-03-05", "2026-03-06")
_BREAST_MISTAKE_ON = "2026-03-05"


@dataclass(frozen=True, slots=True)
class Demo:
    """What the demo built, as it stands on its own fixed morning.

    ``passphrases`` are the files of its fictional people, by name.
    """

    folder: Path
    database: Path
    due: DueList
    day: DayView
    dose: DoseView
    files: tuple[Path, ...]
    passphrases: dict[str, Path]


def build_demo(folder: Path, *, prone: bool = False) -> Demo:
    """Build the demo in a folder, or look at the one that is there.

    ``prone`` lays the craniospinal patient on the face instead of on the back.

    Raises InputError where the folder cannot be made and RefusedError where it holds a database
    that is not for practice, or files that would be written over.
    """
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise InputError(f"--folder {folder} cannot be made: {error.strerror}") from error
    file = folder / _DATABASE
    database = str(file)
    if not file.exists():
        _build(folder, DEMO_SPINE["prone" if prone else "supine"])
    elif not databases.status(database).demo:
        raise RefusedError(f"{file} is not a practice database; name another --folder")
    with practice_time(_at(_TODAY)):
        return Demo(
            folder=folder,
            database=file,
            due=due_list(database, day=None, machine=None),
            day=today(database, THIGH),
            dose=dose(database, THIGH),
            files=tuple(_papers(folder, database)),
            passphrases={name: folder / passphrase_file(name) for name, _ in _STAFF},
        )


def _build(folder: Path, spine: str) -> None:
    designs = (DEMO_MACHINE, *DEMO_DESIGNS, spine)
    files = (*designs, *(passphrase_file(name) for name, _ in _STAFF))
    for name in files:
        if (folder / name).exists():
            raise RefusedError(f"{folder / name} is there already; name another --folder")
    # In a place of its own until it is whole: a run that was stopped leaves nothing half built.
    with TemporaryDirectory(dir=folder) as work:
        _build_in(Path(work), designs)
        for name in (*files, _DATABASE):
            (Path(work) / name).rename(folder / name)


def _build_in(folder: Path, files: tuple[str, ...]) -> None:
    database = str(folder / _DATABASE)
    for name in files:
        write_private(folder / name, demo_text(name).encode())
    for name, _ in _STAFF:
        write_private(folder / passphrase_file(name), f"{_passphrase(name)}\n".encode())
    databases.create(database, demo=True)
    with practice_time(_at("2026-02-27T14:00")):
        for name, role in _STAFF:
            add_staff(database, newcomer=_signer(name), role=role, by=_signer(ADMINISTRATOR))
        add_machine(database, folder / DEMO_MACHINE, by=_signer(PHYSICIST))
        for name in files[1:]:
            key, _, _ = prepare(database, folder / name, by=_signer(PHYSICIST))
            check(database, key, by=_signer(CHECKER))
            approve(database, key, by=_signer(PHYSICIAN), verified_by=_signer(CHECKER))
    for day in _THIGH_DAYS:
        _treat(database, THIGH, f"{day}T09:00")
        _treat(database, SPINE, f"{day}T09:30")
    for day in _BREAST_DAYS:
        mistake = "A" if day == _BREAST_MISTAKE_ON else None
        _treat(database, BREAST, f"{day}T10:00", position=mistake)


def _treat(database: str, key: str, when: str, position: str | None = None) -> None:
    with practice_time(_at(when)):
        planned = today(database, key).position
        confirm(
            database,
            key,
            by=_signer(THERAPIST),
            verified_by=_signer(SECOND_THERAPIST),
            read_back=ReadBack(planned, None, {}),
        )
        record(
            database,
            key,
            by=_signer(THERAPIST),
            verified_by=_signer(SECOND_THERAPIST),
            delivery=Delivery(None, position, {}, {}, {}, ""),
        )


def _papers(folder: Path, database: str) -> Iterator[Path]:
    for course in (THIGH, SPINE):
        view, pdf = sheet(database, course)
        file = folder / f"{course}-fraction-{view.fraction}.pdf"
        write_private(file, pdf)
        yield file
    _, pdf = dossier_pages(database, SPINE)
    file = folder / f"{SPINE}-dossier.pdf"
    write_private(file, pdf)
    yield file
    _, pdf = review_page(database, BREAST)
    file = folder / f"{BREAST}-review.pdf"
    write_private(file, pdf)
    yield file
    yield from write_pictures(dose(database, THIGH), folder / f"{THIGH}-dose.svg")


def passphrase_file(name: str) -> str:
    """Return the name of the file that holds a fictional person's passphrase."""
    return f"{name.lower().replace(' ', '-')}.passphrase"


def _signer(name: str) -> Signer:
    return Signer(name, lambda: _passphrase(name))


def _passphrase(name: str) -> str:
    return f"{name}, for practice only"


def _at(moment: str) -> datetime:
    return datetime.fromisoformat(f"{moment}{_OFFSET}")
