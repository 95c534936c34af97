"""The beams of a design file's fields."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from featherlog.exchange.kinds import choice, interval, number, point, text
from featherlog.exchange.quantities import COORDINATE_CM, JAW_CM, SAD_CM
from featherlog.geometry.frames import patient_from_beam
from featherlog.junction.design import Beam, EdgesBy

if TYPE_CHECKING:
    from featherlog.exchange.toml_fields import Table
    from featherlog.geometry.patient import PatientPosition, Point

_GANTRY_DEG = number("degrees", 0, 360, high_open=True)
_SIGNED_DEG = number("degrees", -180, 360, high_open=True)
_SSD_CM = number("cm", 50, 300)
_WEIGHT = number("", 0, 1, low_open=True)
_ENTRY_CM = replace(
    point(COORDINATE_CM),
    allowed=f"{point(COORDINATE_CM).allowed} (or isocentre_cm given for the whole field)",
)
_HALF_TURN_DEG = 180.0
_DIGITS = 9  # of a computed isocentre: far below any distance that can be set


def read_beams(
    tables: tuple[Table, ...],
    shared_cm: Point | None,
    position: PatientPosition,
    machine_sad_cm: float,
) -> tuple[Beam, ...]:
    """Read every ``[[field.beam]]`` of a field; ``shared_cm`` is the field's isocentre if given."""
    return tuple(
        _beam(table, weight, shared_cm, position, machine_sad_cm)
        for table, weight in zip(tables, _weights(tables), strict=True)
    )


def _weights(beams: tuple[Table, ...]) -> tuple[float, ...]:
    """Read the weights of a field's beams: given for all of them, or equal when for none."""
    if any(beam.has("weight") for beam in beams):
        return tuple(beam.take("weight", _WEIGHT) for beam in beams)
    for beam in beams:
        beam.take_or("weight", _WEIGHT, None)
    return (1 / len(beams),) * len(beams) if beams else ()


def _beam(
    table: Table,
    weight: float,
    shared_cm: Point | None,
    position: PatientPosition,
    machine_sad_cm: float,
) -> Beam:
    gantry_deg = table.take("gantry_deg", _GANTRY_DEG)
    collimator_deg = _signed(table.take("collimator_deg", _SIGNED_DEG))
    couch_deg = _signed(table.take("couch_deg", _SIGNED_DEG))
    ssd_cm = table.take("ssd_cm", _SSD_CM)
    sad_cm = table.take_or("sad_cm", SAD_CM, machine_sad_cm)
    if shared_cm is None:
        toward_source = patient_from_beam(position, gantry_deg, collimator_deg, couch_deg)[:, 2]
        entry_cm = table.take("entry_cm", _ENTRY_CM)
        isocentre_cm = _along(entry_cm, toward_source.tolist(), ssd_cm - sad_cm)
    else:
        _refuse_entry(table)
        isocentre_cm = shared_cm
    return Beam(
        name=table.take("name", text()),
        energy=table.take("energy", text(20)),
        gantry_deg=gantry_deg,
        collimator_deg=collimator_deg,
        couch_deg=couch_deg,
        isocentre_cm=isocentre_cm,
        sad_cm=sad_cm,
        ssd_cm=ssd_cm,
        side_jaws_cm=table.take("side_jaws_cm", interval(JAW_CM)),
        weight=weight,
        edges_by=table.take_or("edges_by", choice(EdgesBy), EdgesBy.JAWS),
    )


def _refuse_entry(table: Table) -> None:
    if table.has("entry_cm"):
        table.fault("entry_cm", "is given, but the field has an isocentre_cm that fixes the beam")
    else:
        table.take_or("entry_cm", _ENTRY_CM, None)


def _along(start_cm: Point, direction: list[float], distance_cm: float) -> Point:
    """Return the point a distance from another in a direction, without noise or minus zero."""
    x, y, z = (
        round(start + distance_cm * part, _DIGITS) + 0.0
        for start, part in zip(start_cm, direction, strict=True)
    )
    return x, y, z


def _signed(angle_deg: float) -> float:
    """Return the same angle in (-180, 180], exactly as written where it is in there."""
    if angle_deg > _HALF_TURN_DEG:
        return angle_deg - 2 * _HALF_TURN_DEG
    return angle_deg if angle_deg > -_HALF_TURN_DEG else _HALF_TURN_DEG
