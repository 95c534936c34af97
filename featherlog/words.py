"""One vocabulary: every label, direction and standing sentence that people read."""

from __future__ import annotations

CAUTION = (
    "An estimate for review by a qualified medical physicist, not a treatment planning "
    "calculation. Local protocol and licensed practice govern."
)
DOSE_CAUTION = (
    "A geometric edge estimate in uniform water, without heterogeneity, scatter between fields or "
    "leaf effects; not a dose calculation. 1 mm of jaw error alone changes the match line by about "
    "10-22 %. Confirm with the planning system and measurement."
)
RECORD_CAUTION = (
    "The department's own treatment record is the record of truth; this ledger stands beside it."
)
DEMO_NOTICE = "PRACTICE DATABASE - FICTIONAL PATIENTS - NOT FOR TREATMENT"
STOP_AND_CALL = "STOP. Do not treat. Call the physicist."
THIS_FRACTION_ONLY = "Valid for this fraction only."
RELATIVE_ONLY = "relative only: no reference reading of the table yet"

PHYSICIST = "physicist"
THERAPIST = "therapist"
PHYSICIAN = "physician"
ADMINISTRATOR = "administrator"
ROLES = (PHYSICIST, THERAPIST, PHYSICIAN, ADMINISTRATOR)

# A move smaller than this is noise of floating point, not something to set.
STILL_CM = 5e-4


def signed(value_cm: float, digits: int = 1) -> str:
    """Return a length with its sign written and a true minus: ``+1.0``, ``−0.5``, ``0.0``."""
    text = f"{value_cm:+.{digits}f}"
    if float(text) == 0:
        return f"{0:.{digits}f}"
    return text.replace("-", "−")


def toward(move_cm: float) -> str:
    """Return which way a move along the axis goes in the patient; empty when it does not move."""
    if abs(move_cm) < STILL_CM:
        return ""
    return "toward the head" if move_cm > 0 else "toward the feet"


def junction_move(name: str, move_cm: float) -> str:
    """Say what a junction does against the fraction before, in words."""
    if abs(move_cm) < STILL_CM:
        return f"JUNCTION {name} does not move"
    return f"JUNCTION {name} moves {abs(move_cm):.1f} cm {toward(move_cm)}"


_TABLE_WORDS = (
    ("lateral", "to the right, seen facing the gantry", "to the left, seen facing the gantry"),
    ("longitudinal", "toward the gantry", "away from the gantry"),
    ("vertical", "up", "down"),
)


def table_move(move_cm: tuple[float, float, float]) -> tuple[str, ...]:
    """Say each component of a table move in words with its IEC 61217 sign; empty when none."""
    return tuple(
        f"TABLE moves {abs(component):.1f} cm {plus if component > 0 else minus} "
        f"({axis} {signed(component)} cm)"
        for component, (axis, plus, minus) in zip(move_cm, _TABLE_WORDS, strict=True)
        if abs(component) >= STILL_CM
    )


def jaw_move(jaw: str, change_cm: float, end: str | None) -> str:
    """Say how a jaw moves: opens or closes, by how much, and which way its edge goes.

    ``end`` is superior or inferior for a jaw that forms an end of the field, None for a side jaw.
    X1 and Y1 open toward negative positions, X2 and Y2 toward positive ones (IEC 61217).
    """
    if abs(change_cm) < STILL_CM:
        return ""
    outward = change_cm if jaw.endswith("2") else -change_cm
    what = f"{'opens' if outward > 0 else 'closes'} {abs(change_cm):.1f} cm"
    if end is None:
        return what
    return f"{what}, {toward(outward if end == 'superior' else -outward)}"
