"""What is left at one junction and position: skin gaps, mismatch where it is stated, the worst."""

from __future__ import annotations

from itertools import groupby
from typing import TYPE_CHECKING, Any

from featherlog.junction.phrases import mismatch, mismatch_as_set, plays
from featherlog.paper import style
from featherlog.paper.fonts import Markup, join, safe, strong
from featherlog.paper.layout import space
from featherlog.paper.style import grid, para, ruled, shares
from featherlog.words import figure, signed

if TYPE_CHECKING:
    from reportlab.platypus import Flowable, Table

    from featherlog.junction.plan import JunctionSetting, SkinGap

_GUTTER_PT = 12.0


def junction_setting(setting: JunctionSetting, tolerance_cm: float, width: float) -> Table:
    """Return one junction: facts and skin gaps at the left, the mismatch table at the right."""
    left, right = shares(width - _GUTTER_PT, 48, 52)
    facts = [
        para(strong(f"JUNCTION {setting.junction}"), style.LEAD),
        *map(para, _facts(setting)),
        space(3),
        _gaps(setting.skin_gaps, tolerance_cm, left),
        *map(para, _overlap(setting)),
    ]
    return grid(
        [[facts, "", _mismatches(setting, right)]],
        [left, _GUTTER_PT, right],
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        padding=(0, 0),
    )


def _facts(setting: JunctionSetting) -> list[Markup]:
    point = ", ".join(map(figure, setting.match_point_cm))
    lines = [
        safe(f"{signed(setting.offset_cm)} cm from position A"),
        safe(f"match point x, y, z {point} cm"),
        safe(f"depth below the skin here {figure(setting.depth_below_skin_cm)} cm"),
    ]
    if setting.separation_cm:
        lines.append(safe(f"planned separation {signed(setting.separation_cm)} cm"))
    changes = (
        ("largest change by rounding", f"{mismatch(setting.rounding_cm)} cm"),
        *((f"change, off by tolerance: {what}", change) for what, change in plays(setting)),
    )
    return lines + [join(" ", [safe(what), strong(change)]) for what, change in changes]


def _gaps(gaps: tuple[SkinGap, ...], tolerance_cm: float, width: float) -> Flowable:
    if not gaps:
        return para(safe("No skin gap: no pair of beams lights one skin."))
    heads = ("Skin gap", "exact", "expected", "superior", "inferior", "along skin")
    rows = [
        [
            safe(gap.side),
            safe(figure(gap.exact_cm, 3, 3)),
            strong(figure(gap.expected_cm)),
            safe(figure(gap.superior_part_cm)),
            safe(figure(gap.inferior_part_cm)),
            safe(figure(gap.along_skin_cm)),
        ]
        for gap in gaps
    ]
    note = para(safe(f"cm; − is overlap; accept ±{figure(tolerance_cm)} cm"), style.SMALL)
    table = ruled(heads, rows, width, (51, 33, 42, 41, 38, 47))
    return grid([[[table, note]]], [width], padding=(0, 0))


def _overlap(setting: JunctionSetting) -> list[Markup]:
    if setting.three_field_overlap_cm is None:
        return []
    words = f"three-field overlap {figure(setting.three_field_overlap_cm, 3, 3)} cm"
    if setting.gap_without_overlap_cm is not None:
        words += f"; a gap of {figure(setting.gap_without_overlap_cm, 3, 3)} cm removes it"
    return [safe(words)]


def _mismatches(setting: JunctionSetting, width: float) -> Table:
    heads = ("Mismatch (+ gap), cm", "x", "y", "exact", "as set")
    rows: list[list[Any]] = []
    for place, found in groupby(setting.mismatches, key=lambda each: each.place):
        for number, each in enumerate(found):
            rows.append(
                [
                    safe("" if number else place),
                    safe(figure(each.x_cm)),
                    safe(figure(each.y_cm)),
                    safe(mismatch(each.exact_cm)),
                    strong(mismatch_as_set(each)),
                ]
            )
    return ruled(heads, rows, width, (36, 15, 15, 20, 40), numbers_from=1)
