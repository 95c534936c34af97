"""The summed junction dose of a stored course or of a design that is not stored."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.desk import at_desk
from featherlog.actions.files import write_private
from featherlog.actions.stored import Stored, delivered_beams, load
from featherlog.dose.junction_dose import junction_doses
from featherlog.errors import InputError
from featherlog.exchange.dose_csv import dose_csv
from featherlog.paper.dose_picture import dose_pdf, dose_svg
from featherlog.views.dose import DoseView

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.junction.design import Course
    from featherlog.junction.machine import Machine
    from featherlog.junction.plan import Plan
    from featherlog.views.dose import JunctionDose

# No patient is thicker; the profiles of a deeper line would be of no one.
_DEEPEST_CM = 60.0


def dose(database: str | None, key: str, *, depths_cm: tuple[float, ...] = ()) -> DoseView:
    """Return the dose of a course: planned, delivered, predicted, unfeathered.

    ``depths_cm`` are asked for beside those of the design, below the entrance skin. Raises
    NotFoundError where there is no such course.
    """
    with at_desk(database) as desk:
        return stored_dose(load(desk, key), demo=desk.demo, depths_cm=depths_cm)


def stored_dose(stored: Stored, *, demo: bool, depths_cm: tuple[float, ...] = ()) -> DoseView:
    """Return the dose of a course that was read from the database."""
    return DoseView(
        heading=stored.heading(demo=demo),
        fractions=stored.course.fractions,
        delivered_fractions=stored.progress.complete,
        model=words.DOSE_MODEL,
        junctions=junction_doses(
            stored.course,
            stored.plan,
            stored.machine,
            delivered_beams(stored.deliveries),
            _checked(depths_cm),
        ),
        caution=f"{words.CAUTION} {words.DOSE_CAUTION}",
    )


def design_dose(
    course: Course, plan: Plan, machine: Machine, *, depths_cm: tuple[float, ...] = ()
) -> DoseView:
    """Return the dose that a design would add up to, with nothing delivered."""
    return DoseView(
        heading=None,
        fractions=course.fractions,
        delivered_fractions=0,
        model=words.DOSE_MODEL,
        junctions=junction_doses(course, plan, machine, (), _checked(depths_cm)),
        caution=f"{words.CAUTION} {words.DOSE_CAUTION}",
    )


def _checked(depths_cm: tuple[float, ...]) -> tuple[float, ...]:
    for depth in depths_cm:
        if not 0 <= depth <= _DEEPEST_CM:
            raise InputError(f"--depth is {depth:g}, but must be 0 to {_DEEPEST_CM:g} cm")
    return depths_cm


def write_pictures(view: DoseView, file: Path) -> tuple[Path, ...]:
    """Write the profiles as PDF, or as SVG at each junction's match depth; return the files.

    With several junctions an SVG is written for each, its name before the ending. Raises InputError
    for another ending.
    """
    match file.suffix.lower():
        case ".pdf":
            write_private(file, dose_pdf(view))
            return (file,)
        case ".svg":
            return tuple(_write_svg(view, junction, file) for junction in view.junctions)
    raise InputError(f"--picture is {file.name!r}, but must end in .pdf or .svg")


def write_csv(view: DoseView, file: Path) -> None:
    """Write every profile as CSV."""
    write_private(file, dose_csv(view).encode())


def _write_svg(view: DoseView, junction: JunctionDose, file: Path) -> Path:
    if len(view.junctions) > 1:
        file = file.with_stem(f"{file.stem}-{junction.junction.replace(' ', '-')}")
    place = next(line.place for line in junction.lines if "match depth" in line.place)
    write_private(file, dose_svg(junction, place).encode())
    return file
