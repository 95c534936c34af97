"""One error class for each exit code, each with one documented sentence.

A message says what is wrong, where, what is allowed and, where it helps, what to do.
"""

from __future__ import annotations

from typing import ClassVar


class FeatherlogError(Exception):
    """Any failure the program explains in words; ``exit_code`` is what the shell sees."""

    exit_code: ClassVar[int] = 1
    meaning: ClassVar[str] = "The program met a failure that it can name but not classify."


class InputError(FeatherlogError):
    """A file or an option holds something that is not allowed; nothing was written.

    ``faults`` lists every fault found, not only the first.
    """

    exit_code: ClassVar[int] = 3
    meaning: ClassVar[str] = "A file or an option holds something that is not allowed."

    def __init__(self, *faults: str) -> None:
        self.faults = faults
        super().__init__("\n".join(faults))


class RefusedError(FeatherlogError):
    """A rule of safe practice stops this step before the beam; nothing was written."""

    exit_code: ClassVar[int] = 4
    meaning: ClassVar[str] = (
        "A rule of safe practice or a machine limit stops this step; the message says why."
    )


class NotFoundError(FeatherlogError):
    """The course, machine, person or file that was named does not exist."""

    exit_code: ClassVar[int] = 5
    meaning: ClassVar[str] = "What was named (course, machine, person, file) does not exist."


class StoreError(FeatherlogError):
    """The database cannot be opened, or its schema is not the one this program knows."""

    exit_code: ClassVar[int] = 6
    meaning: ClassVar[str] = "The database cannot be used: missing, unreachable, older or newer."


class IntegrityError(FeatherlogError):
    """The ledger does not fit together."""

    exit_code: ClassVar[int] = 7
    meaning: ClassVar[str] = "The ledger does not fit together; the message names the first entry."


EXIT_CODES: dict[int, str] = {
    0: "Done.",
    1: FeatherlogError.meaning,
    2: "The command was called with words it does not know; its usage is printed.",
    **{
        error.exit_code: error.meaning
        for error in (InputError, RefusedError, NotFoundError, StoreError, IntegrityError)
    },
}
"""Every exit code and its meaning."""
