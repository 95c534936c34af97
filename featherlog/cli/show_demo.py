"""What the demo prints: what it built, how it looks, and what to type next."""

from __future__ import annotations

import shlex
from typing import TYPE_CHECKING

from featherlog.cli.output import rule
from featherlog.cli.show_day import day_text, due_text
from featherlog.cli.show_dose import dose_lines

if TYPE_CHECKING:
    from featherlog.actions.demo import Demo


def demo_text(demo: Demo) -> str:
    """Return the demo's walk around its department."""
    database = f"--database {shlex.quote(str(demo.database))}"
    course = demo.day.heading.course
    files = "\n".join(f"  {file}" for file in demo.files)
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
            "",
            "What to type next:",
            f"  featherlog today {database}",
            f"  featherlog course show FH-2043 {database}",
            f"  featherlog review FH-2042 {database}",
            f"  featherlog confirm {course} {database} \\",
            f'    --by "Ash Plover" --with "Maple Teal" --position {demo.day.position}',
            f"  featherlog record {course} {database} \\",
            '    --by "Ash Plover" --with "Maple Teal"',
            "  featherlog template design",
        ]
    )
