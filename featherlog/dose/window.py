"""The stretch of the junction axis over which a junction's dose is judged."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.dose.course_sum import AxisLine, EdgeOnLine, edge_on_line

if TYPE_CHECKING:
    from featherlog.junction.plan import BeamSetting, Plan

_MARGIN_CM = 1.5
# Beyond four sigma a Gaussian edge is within 0.004 % of its plateau.
_MARGIN_SIGMAS = 4.0


def junction_window(line: AxisLine, plan: Plan, index: int) -> tuple[float, float]:
    """Return the lowest and highest z (cm) of the dose at junction ``index`` on the line.

    It holds the edges that meet there at every position, their penumbra and at least 1.5 cm, and
    ends before the penumbra of the two fields' other ends, whose fall of dose is not the
    junction's. Where the fields are too short for that it ends at the outermost meeting edges.
    """
    above, below = _settings(plan, index), _settings(plan, index + 1)
    meeting = _inferior_edges(line, above) + _superior_edges(line, below)
    lowest_cm = min(edge.z_cm for edge in meeting)
    highest_cm = max(edge.z_cm for edge in meeting)
    margin_cm = max(_MARGIN_CM, *(_MARGIN_SIGMAS * edge.sigma_cm for edge in meeting))
    floor_cm = max(e.z_cm + _MARGIN_SIGMAS * e.sigma_cm for e in _inferior_edges(line, below))
    ceiling_cm = min(e.z_cm - _MARGIN_SIGMAS * e.sigma_cm for e in _superior_edges(line, above))
    return (
        min(lowest_cm, max(lowest_cm - margin_cm, floor_cm)),
        max(highest_cm, min(highest_cm + margin_cm, ceiling_cm)),
    )


def _settings(plan: Plan, field: int) -> list[BeamSetting]:
    return [beam for position in plan.positions for beam in position.fields[field].beams]


def _inferior_edges(line: AxisLine, settings: list[BeamSetting]) -> list[EdgeOnLine]:
    return [edge_on_line(line, setting, setting.inferior_edge) for setting in settings]


def _superior_edges(line: AxisLine, settings: list[BeamSetting]) -> list[EdgeOnLine]:
    return [edge_on_line(line, setting, setting.superior_edge) for setting in settings]
