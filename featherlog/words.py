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
DOSE_MODEL = (
    "Gaussian beam edges from the settings as rounded, penumbra by depth along each beam; edge "
    "effects alone (depth factor 1), leakage and jaw transmission outside each beam."
)
RECORD_CAUTION = (
    "The department's own treatment record is the record of truth; this ledger stands beside it."
)
DEMO_NOTICE = "PRACTICE DATABASE - FICTIONAL PATIENTS - NOT FOR TREATMENT"
THIS_FRACTION_ONLY = "Valid for this fraction only."
RELATIVE_ONLY = "relative only: no reference reading of the table yet"

MEANING = {
    "prepared": "I prepared this design",
    "checked": "I checked this design independently",
    "approved": "I approve this design for treatment",
}
"""What a signature on a design stands for, by its act."""

PHYSICIST = "physicist"
THERAPIST = "therapist"
PHYSICIAN = "physician"
ADMINISTRATOR = "administrator"
ROLES = (PHYSICIST, THERAPIST, PHYSICIAN, ADMINISTRATOR)

# A move smaller than this is noise of floating point, not something to set.
STILL_CM = 5e-4


def stop_and_call(role: str, contact: str = "") -> str:
    """Say whom a refusal calls: a role, with the department's contact where it has named one."""
    return f"STOP. Do not treat. Call the {role}{f': {contact}' if contact else ''}."


STOP_AND_CALL = stop_and_call(PHYSICIST)


def relative_only_since(why: str, at: str) -> str:
    """Say that table moves are relative only because an earlier read-out no longer holds."""
    return f"relative only: {why} ({at}) and the table was not read since"


MINUS = "−"
_PATIENT_POSITIONS = {
    "HFS": "head first, supine",
    "HFP": "head first, prone",
    "FFS": "feet first, supine",
    "FFP": "feet first, prone",
}


def figure(value: float, least: int = 1, most: int = 2) -> str:
    """Return a number with a true minus and at least ``least`` decimals, more only when needed.

    Digits beyond ``most`` are rounding noise; a value that a machine can be set to keeps them all.
    """
    text = f"{value:.{most}f}"
    whole, point, decimals = text.partition(".")
    decimals = decimals.rstrip("0").ljust(least, "0")
    shown = f"{whole}{point}{decimals}" if decimals else whole
    return shown.replace("-", MINUS) if float(shown) else shown.replace("-", "")


def signed(value: float, least: int = 1, most: int = 2) -> str:
    """Return ``figure`` with its sign always written, and none on zero."""
    text = figure(value, least, most)
    return text if text.startswith(MINUS) or not float(text) else f"+{text}"


def meterset(value_mu: float) -> str:
    """Return a meterset without trailing zeros, which could be misread as tenfold."""
    return figure(value_mu, least=0, most=2)


def patient_position(code: str) -> str:
    """Return a DICOM patient position with its meaning, or the bare code where there is none."""
    return f"{code}, {_PATIENT_POSITIONS[code]}" if code in _PATIENT_POSITIONS else code


def head_first(code: str) -> bool | None:
    """Tell whether the head lies toward the gantry; None when the position does not say."""
    return code.startswith("HF") if code in _PATIENT_POSITIONS else None


def toward(move_cm: float) -> str:
    """Return which way a move along the axis goes in the patient; empty when it does not move."""
    if abs(move_cm) < STILL_CM:
        return ""
    return "toward the head" if move_cm > 0 else "toward the feet"


def junction_move(name: str, move_cm: float) -> str:
    """Say what a junction does against the fraction before, in words."""
    if abs(move_cm) < STILL_CM:
        return f"JUNCTION {name} does not move"
    return f"JUNCTION {name} moves {figure(abs(move_cm))} cm {toward(move_cm)}"


def fields_apart(junction: str, upper: str, lower: str, moves_cm: list[float]) -> str:
    """Say how the two edges of a junction move when its fields were not treated together."""
    parts = [
        f"{field} {f'moves {figure(abs(move))} cm {toward(move)}' if toward(move) else 'stays'}"
        for field, move in zip((upper, lower), moves_cm, strict=True)
    ]
    return f"JUNCTION {junction}: the fields stood apart; {', '.join(parts)}"


_TABLE_WORDS = (
    ("lateral", "to the right, seen facing the gantry", "to the left, seen facing the gantry"),
    ("longitudinal", "toward the gantry", "away from the gantry"),
    ("vertical", "up", "down"),
)


def table_move(
    move_cm: tuple[float, float, float],
    *,
    couch_turned: bool = False,
    was_cm: tuple[float, float, float] | None = None,
) -> tuple[str, ...]:
    """Say each component of a table move in words with its IEC 61217 sign; empty when none.

    Lateral and longitudinal run along the table top; with the couch turned, that is said. A
    component that differs from ``was_cm``, the same move last time, says so.
    """
    lines = []
    for index, (axis, plus, minus) in enumerate(_TABLE_WORDS):
        move, was = move_cm[index], was_cm[index] if was_cm else move_cm[index]
        changed = abs(move - was) >= STILL_CM
        if abs(move) < STILL_CM and not changed:
            continue
        what = f"{figure(abs(move))} cm {plus if move > 0 else minus}"
        how = f"moves {what}" if abs(move) >= STILL_CM else "does not move"
        along = couch_turned and axis != "vertical"
        facts = [f"{axis} {signed(move)} cm"]
        facts += ["along the table top as it turns with the couch"] if along else []
        facts += [f"CHANGED, was {signed(was)}"] if changed else []
        lines.append(f"TABLE {how} ({', '.join(facts)})")
    return tuple(lines)


# An edge that moves less than this part of its jaw's own move stays where it was, but for rounding.
_STAYS = 0.3


def table_target(table_cm: tuple[float, float, float]) -> str:
    """Say where the table must stand, absolute read-outs with their IEC 61217 signs."""
    places = [
        f"{axis} {signed(value)}"
        for (axis, _, _), value in zip(_TABLE_WORDS, table_cm, strict=True)
    ]
    return f"TABLE to {', '.join(places)} cm"


def jaw_move(jaw: str, change_cm: float, edge_cm: float | None) -> str:
    """Say how a jaw moves: opens or closes, by how much, and which way its edge goes.

    ``edge_cm`` is how far the edge moves in the patient (+ toward the head), table move included;
    None for a side jaw. X1 and Y1 open toward negative positions, X2 and Y2 toward positive ones
    (IEC 61217).
    """
    if abs(change_cm) < STILL_CM:
        return ""
    outward = change_cm if jaw.endswith("2") else -change_cm
    what = f"{'opens' if outward > 0 else 'closes'} {figure(abs(change_cm))} cm"
    if edge_cm is None:
        return what
    stays = abs(edge_cm) < _STAYS * abs(change_cm)
    return f"{what}, {'its edge stays in the patient' if stays else toward(edge_cm)}"


def console_value(name: str, value: float) -> str:
    """Return a value as the machine's own console shows it: ``gantry_deg``, gantry 180.0°."""
    what, _, unit = name.rpartition("_")
    return f"{what} {figure(value)}{'°' if unit == 'deg' else ' cm'}"
