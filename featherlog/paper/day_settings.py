"""The settings table of the shift sheet: every field and beam, old and new."""

from __future__ import annotations

from itertools import groupby
from typing import TYPE_CHECKING, Any

from reportlab.lib.styles import ParagraphStyle

from featherlog.paper import style
from featherlog.paper.fonts import ITALIC, Markup, join, safe, strong
from featherlog.paper.style import grid, para, shares
from featherlog.words import STILL_CM, figure, meterset, signed

if TYPE_CHECKING:
    from collections.abc import Iterator

    from reportlab.platypus import Table

    from featherlog.views.day import BeamView, DayView, FieldView, JawView

TICK = "☐"
_HEADS = (
    "Beam",
    "Gantry°",
    "Coll.°",
    "Couch°",
    "SSD cm",
    "MU",
    "Edge",
    "Jaw, cm",
    "Moves",
    "",
)
_PARTS = (72, 36, 36, 37, 36, 40, 38, 100, 131, 12)
_NUMBERS = range(1, 6)
_FIELD_LINE = ParagraphStyle("field", parent=style.BODY, leading=13)
_NEW_VALUE_PT = 11
_SPACE = "\N{NO-BREAK SPACE}" * 2
_JAW_LINE = ParagraphStyle("jaw", parent=style.BODY, leading=12)
# Set in from the IEC values above it, so that a console's own scale is never read as one of them.
_CONSOLE = ParagraphStyle("console", parent=style.SMALL, fontName=ITALIC, leftIndent=14)
_EDGE_COLUMN = 6
_EDGES = ("superior", "inferior")
_TURNED = (2, 3)
_BY_LEAVES = "leaf edge, from the plan: not set by hand"
_CONSOLE_UNITS = {"deg": "°", "cm": " cm"}


def settings_table(view: DayView, width: float, padding: float) -> Table:
    """Return one table of all fields; changed jaws and angles are bold and framed.

    ``padding`` is the room above and below each line, in points.
    """
    rows = [_head_row(part=view.part_delivered)]
    commands: list[tuple[Any, ...]] = [("RIGHTPADDING", (5, 0), (5, -1), 6)]
    for field in view.fields:
        commands += _field_rules(len(rows))
        rows.append([_field_line(field)] + [""] * (len(_HEADS) - 1))
        for beam in field.beams:
            first = len(rows)
            rows += _beam_rows(beam, part=view.part_delivered, split=view.steps > 1)
            commands += _beam_rules(beam, first, len(rows) - 1)
            if beam.console:
                commands.append(("SPAN", (0, len(rows)), (-1, len(rows))))
                rows.append([_console_line(beam)] + [""] * (len(_HEADS) - 1))
    return grid(rows, shares(width, *_PARTS), *commands, padding=(2, padding), repeat_rows=1)


def _head_row(*, part: bool) -> list[Any]:
    heads = ["MU left" if part and head == "MU" else head for head in _HEADS]
    return [
        para(safe(head), style.SMALL_RIGHT if column in _NUMBERS else style.SMALL)
        for column, head in enumerate(heads)
    ]


def _field_rules(row: int) -> list[tuple[Any, ...]]:
    return [
        ("SPAN", (0, row), (-1, row)),
        ("LINEABOVE", (0, row), (-1, row), style.RULE_PT, "black"),
        ("TOPPADDING", (0, row), (-1, row), 2.5),
    ]


def _beam_rules(beam: BeamView, first: int, last: int) -> list[tuple[Any, ...]]:
    spans = [("SPAN", (column, first), (column, last)) for column in range(_EDGE_COLUMN)]
    turned = [
        _changed_frame((column, first), (column, last))
        for column, (now, before) in zip(_TURNED, _angles(beam), strict=True)
        if _turns(now, before)
    ]
    moved = [
        _changed_frame((_EDGE_COLUMN, first + i), (-1, first + i))
        for i, jaws in enumerate(_lines(beam))
        if _changed(jaws)
    ]
    line = ("LINEABOVE", (0, first), (-1, first), style.HAIR_PT, "black")
    return [*spans, line, *turned, *moved]


def _changed_frame(start: tuple[int, int], end: tuple[int, int]) -> tuple[Any, ...]:
    return ("BOX", start, end, style.RULE_PT, "black")


def _angles(beam: BeamView) -> tuple[tuple[float, float | None], ...]:
    return (
        (beam.collimator_deg, beam.previous_collimator_deg),
        (beam.couch_deg, beam.previous_couch_deg),
    )


def _turns(now_deg: float, before_deg: float | None) -> bool:
    return before_deg is not None and figure(now_deg) != figure(before_deg)


def _field_line(field: FieldView) -> list[Any]:
    name = Markup(f'<font size="11">{strong(field.field)}</font>')
    facts = [name, safe(f"moved by {field.moved_by}"), *map(safe, field.notes)]
    return [
        para(join("  ·  ", facts), _FIELD_LINE),
        *(para(join(" ", [safe(TICK), strong(order)])) for order in field.orders),
        *([para(join(" ", [safe(TICK), strong(field.target.words)]))] if field.target else []),
    ]


def _lines(beam: BeamView) -> Iterator[tuple[JawView, ...]]:
    """Yield the jaws of one line: a changed jaw alone, unchanged ones of one edge together.

    The edges that make junctions come first, from the head to the feet, whatever their jaws.
    """
    for _, jaws in groupby(sorted(beam.jaws, key=_edge_order), key=_line_key):
        yield tuple(jaws)


def _edge_order(jaw: JawView) -> int:
    return _EDGES.index(jaw.edge) if jaw.edge in _EDGES else len(_EDGES)


def _line_key(jaw: JawView) -> tuple[str, bool, str]:
    changed = _changed((jaw,))
    return jaw.edge, changed, jaw.jaw if changed else ""


def _changed(jaws: tuple[JawView, ...]) -> bool:
    return any(
        not _by_leaves(jaw)
        and jaw.previous_cm is not None
        and abs(jaw.cm - jaw.previous_cm) >= STILL_CM
        for jaw in jaws
    )


def _by_leaves(jaw: JawView) -> bool:
    return jaw.edges_by == "leaves"


def _beam_rows(beam: BeamView, *, part: bool, split: bool) -> list[list[Any]]:
    left: list[Any] = [
        _beam_name(beam, part=part, split=split),
        para(safe(figure(beam.gantry_deg)), style.VALUE),
        *(_angle(now, before) for now, before in _angles(beam)),
        para(safe(figure(beam.ssd_cm)), style.VALUE),
        para(strong(meterset(beam.to_deliver_mu)), style.VALUE),
    ]
    blank = [""] * _EDGE_COLUMN
    return [
        (blank if number else left) + _jaw_cells(jaws) for number, jaws in enumerate(_lines(beam))
    ]


def _angle(now_deg: float, before_deg: float | None) -> list[Any]:
    if before_deg is None or not _turns(now_deg, before_deg):
        return [para(safe(signed(now_deg)), style.VALUE)]
    return [
        para(safe(f"{signed(before_deg)}→"), style.SMALL_RIGHT),
        para(strong(signed(now_deg)), style.VALUE),
    ]


def _beam_name(beam: BeamView, *, part: bool, split: bool) -> list[Any]:
    lines = [para(strong(beam.beam)), para(safe(beam.energy), style.SMALL)]
    if part or split:
        given = f"{meterset(beam.delivered_mu)} of {meterset(beam.planned_mu)} given"
        lines.append(para(safe(given), style.SMALL))
    if part and meterset(beam.to_deliver_mu) == "0":
        lines.append(para(strong("DO NOT TREAT AGAIN"), style.SMALL))
    return lines


def _console_line(beam: BeamView) -> Any:  # noqa: ANN401 - a reportlab flowable
    shown = ", ".join(_on_console(name, value) for name, value in beam.console)
    return para(safe(f"console: {shown}"), _CONSOLE)


def _on_console(name: str, value: float) -> str:
    what, _, unit = name.rpartition("_")
    return f"{what}{_SPACE[0]}{figure(value)}{_CONSOLE_UNITS[unit]}"


def _jaw_cells(jaws: tuple[JawView, ...]) -> list[Any]:
    leaves = _by_leaves(jaws[0])
    return [
        para(safe(jaws[0].edge), style.SMALL),
        para(join(" · ", [_jaw(jaw) for jaw in jaws]), _JAW_LINE),
        para(safe(_BY_LEAVES if leaves else jaws[0].words), style.SMALL),
        "" if leaves else para(safe(TICK)),
    ]


def _jaw(jaw: JawView) -> Markup:
    if jaw.previous_cm is not None and _changed((jaw,)):
        old = safe(f"{jaw.jaw}{_SPACE}{signed(jaw.previous_cm)} →")
        return Markup(f'{old} <font size="{_NEW_VALUE_PT}">{strong(signed(jaw.cm))}</font>')
    return safe(f"{jaw.jaw}{_SPACE}{signed(jaw.cm)}")
