"""The fictional machine and courses of the practice database."""

from __future__ import annotations

from importlib.resources import files
from typing import TYPE_CHECKING

from featherlog.exchange.design_file import parse_design
from featherlog.exchange.machine_file import parse_machine

if TYPE_CHECKING:
    from featherlog.junction.design import Course
    from featherlog.junction.machine import Machine

DEMO_MACHINE = "alder.toml"
DEMO_DESIGNS = ("thigh.toml", "breast.toml")
DEMO_SPINE = {"supine": "spine.toml", "prone": "spine_prone.toml"}
"""One more course, designed for either way the patient may lie."""


def demo_text(name: str) -> str:
    """Return the text of one of the demo's files."""
    return (files("featherlog.exchange") / "scenario" / name).read_text(encoding="utf-8")


def demo_machine() -> Machine:
    """Return the fictional machine Alder."""
    return parse_machine(demo_text(DEMO_MACHINE), DEMO_MACHINE)


def demo_courses() -> tuple[Course, ...]:
    """Return the fictional courses, all treated on Alder."""
    machine = demo_machine()
    return tuple(parse_design(demo_text(name), name, machine) for name in DEMO_DESIGNS)
