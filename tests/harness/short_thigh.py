"""The thigh's course as its life needs it: short, and with other positions to revise it by."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING
from uuid import uuid4

from course_model import Design
from department import AUTHOR, CHECKER, PHYSICIAN, THIGH, build, by, moment
from program import SCENARIO

from featherlog.actions.designs import approve, check, prepare
from featherlog.actions.desk import practice_time

if TYPE_CHECKING:
    from collections.abc import Iterable
    from pathlib import Path

UPPER, LOWER = "upper thigh", "lower thigh"
DESIGN = Design(
    fields={
        UPPER: {"AP upper": 0.5, "PA upper": 0.5},
        LOWER: {"AP lower": 0.5, "PA lower": 0.5},
    },
    edge_cm={"A": 0.0, "B": -1.0, "C": -2.0},
    mu={
        "A": {"AP upper": 112.0, "PA upper": 113.0, "AP lower": 111.0, "PA lower": 112.0},
        "B": {"AP upper": 111.0, "PA upper": 112.0, "AP lower": 112.0, "PA lower": 113.0},
        "C": {"AP upper": 110.0, "PA upper": 111.0, "AP lower": 113.0, "PA lower": 114.0},
    },
    planned=("A", "A", "B", "B", "C", "C"),
    dose_gy=2.0,
)
NEW = {
    "D": (-0.5, {"AP upper": 112.0, "PA upper": 112.5, "AP lower": 111.5, "PA lower": 112.5}),
    "E": (1.0, {"AP upper": 113.0, "PA upper": 114.0, "AP lower": 110.0, "PA lower": 111.0}),
}
"""Positions that a revised design may have in the place of C: edge and MU."""


def place(label: str) -> tuple[float, dict[str, float]]:
    return NEW.get(label) or (DESIGN.edge_cm[label], dict(DESIGN.mu[label]))


def design_of(places: Iterable[str], planned: tuple[str, ...]) -> Design:
    """Return what the model knows of the thigh with other positions and fractions."""
    told = {label: place(label) for label in places}
    edges, metersets = ({label: one[n] for label, one in told.items()} for n in (0, 1))
    return replace(DESIGN, planned=planned, edge_cm=edges, mu=metersets)


def design_text(key: str, places: Iterable[str], planned: tuple[str, ...]) -> str:
    """Return the thigh's design file with other positions and fractions, in blocks of two."""
    text = (SCENARIO / "thigh.toml").read_text(encoding="utf-8")
    head, rest = text.split("[[position]]", 1)
    sequence = rest[rest.index("[sequence]") :]
    order = list(dict.fromkeys(planned))
    for old, new in (
        (f'"{THIGH}"', f'"{key}"'),
        ("fractions = 15", f"fractions = {len(planned)}"),
        ("block_fractions = 5", "block_fractions = 2"),
        ('["A", "B", "C"]', str(order).replace("'", '"')),
    ):
        assert old in head + sequence
        head, sequence = head.replace(old, new), sequence.replace(old, new)
    return head + "".join(map(_position_text, places)) + sequence


def _position_text(label: str) -> str:
    edge, mu = place(label)
    rows = "".join(f'"{beam}" = {value}\n' for beam, value in mu.items())
    return f'[[position]]\nlabel = "{label}"\noffset_cm = {edge}\n[position.meterset_mu]\n{rows}\n'


KEY = "FH-7000"


def approve_design(database: str, folder: Path, text: str) -> None:
    file = folder / f"{uuid4().hex}.toml"
    file.write_text(text, encoding="utf-8")
    prepare(database, file, by=by(AUTHOR))
    check(database, KEY, by=by(CHECKER))
    approve(database, KEY, by=by(PHYSICIAN), verified_by=by(CHECKER))


def build_department(database: str, folder: Path) -> str:
    """Make a department with the one course whose life is lived."""
    build(database)
    with practice_time(moment("2026-02-27")):
        approve_design(database, folder, design_text(KEY, "ABC", DESIGN.planned))
    return database
