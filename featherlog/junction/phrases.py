"""How figures of a solved junction are said, alike on screen and paper; no numerical libraries."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.words import figure, signed

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.junction.plan import BeamSetting, JunctionSetting, Mismatch

NO_FORMULA = "No textbook formula applies to this geometry; check it by other means."

# Differences that would not show in so many decimals are not said.
_ANGLE_DECIMALS = 4
_MISMATCH_DECIMALS = 3


def mismatch_as_set(place: Mismatch) -> str:
    """Return the worst mismatch (cm), followed by the farthest of the other sign, if any."""
    shown = [mismatch(place.rounded_cm)]
    if place.opposite_cm is not None and float(f"{place.opposite_cm:.{_MISMATCH_DECIMALS}f}"):
        shown.append(mismatch(place.opposite_cm))
    return ", ".join(shown)


def mismatch(value_cm: float) -> str:
    """Return a mismatch (cm) with its sign, + gap."""
    return signed(value_cm, _MISMATCH_DECIMALS, _MISMATCH_DECIMALS)


def plays(junction: JunctionSetting) -> Iterator[tuple[str, str]]:
    """Yield what is off by its tolerance, and how far that may change the mismatch as set.

    Nothing of a plan that was stored before this was worked out.
    """
    for what, play in (
        ("jaws", junction.if_jaws_off),
        ("jaws, all angles, moved tables", junction.if_all_off),
    ):
        if play is not None:
            at_match, worst = (figure(cm, 2) for cm in (play.at_match_depth_cm, play.worst_cm))
            yield what, f"±{at_match} cm at match depth, ±{worst} cm at worst"


def angles_beside_set(beam: BeamSetting) -> str:
    """Return a turned beam's angles solved against its neighbour as set; empty if none differs."""
    collimator, couch = beam.collimator_beside_set_deg, beam.couch_beside_set_deg
    if collimator is None or couch is None:
        return ""
    pairs = ((collimator, beam.exact_collimator_deg), (couch, beam.exact_couch_deg))
    if all(_angle(beside) == _angle(exact) for beside, exact in pairs):
        return ""
    return (
        f"against the neighbour as set: collimator {_angle(collimator)}, couch {_angle(couch)} "
        "degrees"
    )


def _angle(value_deg: float) -> str:
    return signed(value_deg, _ANGLE_DECIMALS, _ANGLE_DECIMALS)
