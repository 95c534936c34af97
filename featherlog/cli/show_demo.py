"""What the demo prints: what it built, how it looks, and what to type next."""

from __future__ import annotations

import shlex
from typing import TYPE_CHECKING

from featherlog.cli.output import rule
from featherlog.cli.show_day import day_text, due_text
from featherlog.cli.show_dose import dose_lines

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.actions.demo import Demo


def demo_text(demo: Demo) -> str:
    """Return the demo's walk around its department."""
    database = f"--database {shlex.quote(str(demo.database))}"
    course = demo.day.heading.course
    files = "\n".join(f"  {file}" for file in demo.files)
    keys = "\n".join(f"  {file}: {name}" for name, file in demo.passphrases.items())
    performer, verifier = "Ash Plover", "Maple Teal"
    pair = [
        f"    --by '{performer}' --passphrase-file {_typed(demo.passphrases[performer])} \\",
        f"    --with '{verifier}' --with-passphrase-file {_typed(demo.passphrases[verifier])}",
    ]
    return "\n".join(
        [
            f"A fictional department stands in {demo.folder}. This is its morning:",
            rule("="),
            due_text(demo.due),
            rule("="),
            day_text(demo.day),
            rule("="),
            *dose_lines(demo.dose),
            rule("="),
            f"Written:\n{files}",
            f"Passphrase files of its people:\n{keys}",
            "",
            "What to type next:",
            f"  featherlog today {database}",
            f"  featherlog course show FH-2043 {database}",
            f"  featherlog review FH-2042 {database}",
            f"  featherlog confirm {course} {database} --position {demo.day.position} \\",
            *pair,
            f"  featherlog record {course} {database} \\",
            *pair,
            f"  featherlog ledger verify {database}",
            "  featherlog template design",
        ]
    )


def _typed(file: Path) -> str:
    return shlex.quote(str(file))
