"""The commented templates of the three file formats, ready to be copied and filled in."""

from __future__ import annotations

from importlib.resources import files

_TEMPLATES = files("featherlog.exchange") / "templates"

DESIGN_TEMPLATE = (_TEMPLATES / "design.toml").read_text(encoding="utf-8")
"""A design file that explains each key; it reads as it is, for the machine template."""

MACHINE_TEMPLATE = (_TEMPLATES / "machine.toml").read_text(encoding="utf-8")
"""A machine file that explains each key; it reads as it is."""

POLICY_TEMPLATE = (_TEMPLATES / "policy.toml").read_text(encoding="utf-8")
"""A policy file that explains each key; it reads as it is."""
