"""Views written by hand: one course of matched fields on several kinds of day."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from featherlog.views.common import DepartureLine, Heading
from featherlog.views.day import (
    BeamView,
    DayView,
    EdgeView,
    FieldView,
    GapView,
    JawView,
    JunctionView,
    NextShift,
    SideView,
    TableMoveView,
)
from featherlog.views.dose import DoseCurve, DoseFigures, DoseLine, DoseView, JunctionDose
from featherlog.views.review import (
    BreakLine,
    ChangeLine,
    GridCell,
    GridRow,
    PositionCheckLine,
    ReviewEvent,
    ReviewView,
    ShareLine,
    SidesLine,
    SignOffLine,
    StripLine,
    WeekView,
)
from featherlog.words import CAUTION, DOSE_CAUTION, jaw_move, table_move

LABELS = ("A", "B", "C")


@pytest.fixture
def heading() -> Heading:
    return Heading(
        course="finch-2031",
        patient_name="Rowan Finch",
        identifiers=(("Hospital number", "FH-004217"), ("Born", "2019-04-02")),
        site="craniospinal axis",
        patient_position="HFS",
        machine="Alder",
        plan_label="CSI-1",
        state="APPROVED",
        revision="2-7f3a9c",
        demo=True,
    )


def move(lateral: float = 0.0, longitudinal: float = 0.0, vertical: float = 0.0) -> TableMoveView:
    cm = (lateral, longitudinal, vertical)
    return TableMoveView(*cm, table_move(cm))


def jaws(superior: float, inferior: float, was_inferior: float | None) -> tuple[JawView, ...]:
    change = 0.0 if was_inferior is None else inferior - was_inferior
    words = jaw_move("Y1", change, change)
    return (
        JawView("Y2", "superior", "jaws", superior, None if was_inferior is None else superior, ""),
        JawView("Y1", "inferior", "jaws", inferior, was_inferior, words),
        JawView("X1", "side", "jaws", -9.0, None if was_inferior is None else -9.0, ""),
        JawView("X2", "side", "jaws", 9.5, None if was_inferior is None else 9.5, ""),
    )


def beam(
    name: str, gantry: float, collimator: float, inferior: float, was: float | None
) -> BeamView:
    return BeamView(
        beam=name,
        energy="6 MV",
        gantry_deg=gantry,
        collimator_deg=collimator,
        couch_deg=0.0,
        previous_collimator_deg=None if was is None else collimator,
        previous_couch_deg=None if was is None else 0.0,
        ssd_cm=91.5,
        planned_mu=103.5,
        delivered_mu=0.0,
        to_deliver_mu=103.5,
        jaws=jaws(10.8, inferior, was),
        console=(),
    )


def field(name: str, beams: tuple[BeamView, ...], *, first: bool) -> FieldView:
    since = move() if first else move(longitudinal=1.0)
    between = None if first else move(longitudinal=24.0, vertical=-6.3)
    return FieldView(
        field=name,
        moved_by="jaws" if first else "couch",
        previous_position="A",
        begun=False,
        since_last=since,
        from_field_before=between,
        before_from_field_before=None if first else TableMoveView(0.0, 23.0, -6.3, ()),
        orders=() if between is None else between.words,
        notes=("TABLE: no move since the last fraction",)
        if first
        else tuple(f"part of that, since the last fraction: {one}" for one in since.words),
        beams=beams,
    )


def edge(field_name: str, beam_name: str, at_skin: float, at_depth: float) -> EdgeView:
    return EdgeView(field_name, beam_name, at_skin, at_depth)


def side_view(superior: str, inferior: str, z: float, moved: float) -> SideView:
    today = (
        (edge(superior, "posterior", z + 0.85, z - 0.85),),
        (edge(inferior, "posterior", z - 0.85, z + 0.85),),
    )
    before = tuple(
        replace(e, z_at_skin_cm=e.z_at_skin_cm - moved, z_at_depth_cm=e.z_at_depth_cm - moved)
        for edges in today
        for e in edges
    )
    return SideView(
        entrance="posterior",
        depth_cm=10.0,
        match_depth_cm=5.0,
        match_z_cm=z,
        critical_name="spinal cord",
        critical_depth_cm=4.5,
        superior_edges=today[0],
        inferior_edges=today[1],
        previous_edges=before if moved else (),
    )


def junction(name: str, superior: str, inferior: str, moves: float) -> JunctionView:
    words = f"JUNCTION {name} moves {abs(moves):.1f} cm toward the feet"
    return JunctionView(
        junction=name,
        technique="skin gap",
        superior_field=superior,
        inferior_field=inferior,
        offset_cm=-1.0,
        moves_cm=moves,
        words=words if moves else f"JUNCTION {name} does not move",
        gaps=(GapView("posterior", 1.7, 0.2),),
        side_view=side_view(superior, inferior, -1.0, moves),
    )


@pytest.fixture
def shift_day(heading: Heading) -> DayView:
    cranial = (
        beam("right lateral", 270.0, 352.9, -9.6, -8.6),
        beam("left lateral", 90.0, 7.1, -9.6, -8.6),
    )
    spinal = (
        beam("posterior upper", 180.0, 0.0, -16.0, -15.1),
        beam("anterior upper", 0.0, 0.0, -16.0, -15.1),
    )
    return DayView(
        heading=heading,
        status="ready",
        stop_reasons=(),
        fraction=6,
        fractions=20,
        step=1,
        steps=1,
        phase="Phase 1",
        dose_gy=1.8,
        projected_date="2031-03-10",
        position="B",
        previous_position="A",
        shift="yes",
        shift_words="after 5 fractions at position A",
        part_delivered=False,
        junctions=(junction("J1", "Cranial", "Upper spine", -1.0),),
        fields=(field("Cranial", cranial, first=True), field("Upper spine", spinal, first=False)),
        table_reference="relative only: no reference reading of the table yet",
        open_departures=(),
        next_shift=NextShift(11, "C", "2031-03-17"),
        page_code="K7Q2-9MZD",
        ledger_head="418-3be1c07a",
        printed_at="2031-03-10 07:42 +01:00",
        caution=CAUTION,
    )


def still(view: DayView) -> DayView:
    """The same settings on a day on which nothing moves."""
    fields = tuple(
        replace(
            f,
            since_last=move(),
            notes=(),
            beams=tuple(
                replace(b, jaws=tuple(replace(j, previous_cm=j.cm, words="") for j in b.jaws))
                for b in f.beams
            ),
        )
        for f in view.fields
    )
    return replace(
        view,
        fraction=7,
        shift="no",
        shift_words="second of 5 fractions at position B",
        previous_position="B",
        fields=fields,
        junctions=tuple(
            junction(j.junction, j.superior_field, j.inferior_field, 0.0) for j in view.junctions
        ),
    )


@pytest.fixture
def no_shift_day(shift_day: DayView) -> DayView:
    return still(shift_day)


@pytest.fixture
def first_day(no_shift_day: DayView) -> DayView:
    fields = tuple(
        replace(
            f,
            beams=tuple(
                replace(
                    b,
                    previous_collimator_deg=None,
                    previous_couch_deg=None,
                    jaws=tuple(replace(j, previous_cm=None) for j in b.jaws),
                )
                for b in f.beams
            ),
        )
        for f in no_shift_day.fields
    )
    return replace(
        no_shift_day,
        fraction=1,
        shift="first",
        shift_words="",
        previous_position=None,
        fields=fields,
    )


@pytest.fixture
def part_day(no_shift_day: DayView) -> DayView:
    first, second = no_shift_day.fields
    given = replace(first.beams[0], delivered_mu=103.5, to_deliver_mu=0.0)
    broken = replace(first.beams[1], delivered_mu=41.2, to_deliver_mu=62.3)
    departure = DepartureLine(
        3, 7, "part-delivered", "open", "left lateral stopped at 41.2 of 103.5 MU", "door interlock"
    )
    return replace(
        no_shift_day,
        part_delivered=True,
        fields=(replace(first, beams=(given, broken)), second),
        open_departures=(departure,),
    )


@pytest.fixture
def stop_day(shift_day: DayView) -> DayView:
    return replace(
        shift_day,
        status="stop",
        call="STOP. Do not treat. Call the physicist: telephone 4711.",
        raised_risk=("imager out since 2031-03-09T16:00:00+01:00 (tube fault)",),
        stop_reasons=(
            "Fraction 5 is incomplete on field Upper spine. Call the physicist, Hazel Wren.",
            "The sequence was superseded by revision 3, which is not approved.",
        ),
    )


@pytest.fixture
def crowded_day(shift_day: DayView) -> DayView:
    """Three fields, two junctions, feet first, long names."""
    last = replace(
        shift_day.fields[1],
        field="Lower spine and sacrum",
        beams=(
            beam("posterior lower spine", 180.0, 0.0, -11.3, -11.3),
            beam("anterior lower spine", 0.0, 0.0, -11.3, -11.3),
        ),
    )
    return replace(
        shift_day,
        heading=replace(
            shift_day.heading,
            patient_name="Wilhelmina Featherstonehaugh-Lindenbaum",
            patient_position="FFS",
            site="craniospinal axis with whole brain and thecal sac",
        ),
        fields=(*shift_day.fields, last),
        junctions=(
            junction("J1", "Cranial", "Upper spine", -1.0),
            junction("J2", "Upper spine", "Lower spine and sacrum", -1.0),
        ),
    )


@pytest.fixture
def step_day(shift_day: DayView) -> DayView:
    """The second step of a split fraction: turned laterals, leaf edges, a console's own scale."""
    cranial, spinal = shift_day.fields
    console = (("gantry_deg", 180.0), ("collimator_deg", 183.5), ("couch_deg", 186.0))
    lateral = replace(
        cranial.beams[0],
        collimator_deg=-7.1,
        previous_collimator_deg=-7.6,
        couch_deg=5.5,
        previous_couch_deg=5.0,
        to_deliver_mu=34.5,
        delivered_mu=34.5,
        console=(*console, ("Y1_cm", 9.6)),
    )
    leaves = tuple(
        jaw if jaw.edge == "side" else replace(jaw, edges_by="leaves")
        for jaw in spinal.beams[0].jaws
    )
    return replace(
        shift_day,
        step=2,
        steps=3,
        fields=(
            replace(cranial, beams=(lateral, replace(cranial.beams[1], console=console))),
            replace(spinal, beams=(replace(spinal.beams[0], jaws=leaves), spinal.beams[1])),
        ),
    )


def profile(
    z: list[float], positions: tuple[float, ...], gap: float, dose: float
) -> tuple[float, ...]:
    def cumulative(t: float) -> float:
        return 0.5 * (1 + math.erf(t / math.sqrt(2)))

    sigma = 0.3
    return tuple(
        dose
        * sum(
            1 - cumulative((x - p + gap / 2) / sigma) + cumulative((x - p - gap / 2) / sigma)
            for p in positions
        )
        / len(positions)
        for x in z
    )


def figures(dose: tuple[float, ...], z: list[float], reference: float) -> DoseFigures:
    most, least = max(dose), min(dose)
    return DoseFigures(
        reference_gy=reference,
        cold_reference_gy=reference,
        maximum_gy=most,
        maximum_percent=100 * most / reference,
        maximum_z_cm=z[dose.index(most)],
        minimum_gy=least,
        minimum_percent=100 * least / reference,
        minimum_z_cm=z[dose.index(least)],
        over_107_cm=0.0,
        under_95_cm=0.4,
    )


def dose_line(place: str, depth: float, gap: float) -> DoseLine:
    z = [-6 + 0.05 * step for step in range(221)]
    doses = {
        "planned": profile(z, (0.0, -1.0, -2.0), gap, 36.0),
        "delivered": profile(z, (0.0, -1.0), gap, 12.6),
        "predicted": profile(z, (0.0, -1.0, -1.0, -2.0), gap, 36.0),
        "unfeathered": profile(z, (0.0,), gap, 36.0),
    }
    curves = tuple(DoseCurve(name, dose, figures(dose, z, 36.0)) for name, dose in doses.items())
    return DoseLine(place, depth, 0.0, -depth, tuple(z), curves)


@pytest.fixture
def junction_dose() -> JunctionDose:
    return JunctionDose(
        junction="J1",
        reference_dose_gy=36.0,
        position_z_cm=(("A", 0.0), ("B", -1.0), ("C", -2.0)),
        lines=(
            dose_line("skin", 0.0, 0.9),
            dose_line("match depth", 5.0, 0.1),
            dose_line("spinal cord", 6.5, -0.2),
        ),
    )


@pytest.fixture
def dose_view(heading: Heading, junction_dose: JunctionDose) -> DoseView:
    return DoseView(
        heading=heading,
        fractions=20,
        delivered_fractions=7,
        model="Edges alone, depth factor 1, leakage counted.",
        junctions=(junction_dose, replace(junction_dose, junction="J2")),
        caution=DOSE_CAUTION,
    )


def grid_row(fraction: int, delivered: int) -> GridRow:
    planned = LABELS[(fraction - 1) // 5 % 3]
    done = fraction <= delivered
    position = planned if done else ""
    late = "A" if fraction == 6 else position
    percent = 100.0 if done else 0.0
    return GridRow(
        fraction=fraction,
        planned_position=planned,
        delivered_at=f"2031-03-{fraction:02d} 09:10 +01:00" if done else "",
        performer=("Hazel Wren", "Ash Plover")[fraction % 2] if done else "",
        verifier="" if fraction == 4 or not done else "Linden Dunnock",
        cells=(
            GridCell("Cranial", position, percent),
            GridCell("Upper spine", late, 40.0 if fraction == 7 else percent),
        ),
    )


def week() -> WeekView:
    """What came after a review that was signed on the first Friday."""
    return WeekView(
        since="2031-03-07T16:00:00+01:00",
        changes=(
            ChangeLine("fraction recorded", 2, ("fraction 6", "fraction 7")),
            ChangeLine("departure explained", 1, ("departure 2: marks misread",)),
        ),
        events=(ReviewEvent(57, "2031-03-10", "marks redrawn", "Ash Plover", 6, "line B redrawn"),),
        image_shifts=(
            ReviewEvent(58, "2031-03-10", "image shift", "Ash Plover", 6, "lateral +0.2 cm"),
        ),
        late_fractions=(3,),
        breaks=(BreakLine("2031-03-06", "2031-03-07", 2),),
        position_checks=(PositionCheckLine("B", 6, "", ""),),
        sign_offs=(
            SignOffLine("physicist", "Rowan Finch", "2031-03-07T16:00:00+01:00", 9),
            SignOffLine("physician", "", "", 60),
            SignOffLine("therapist", "", "", 60),
        ),
        outstanding=(
            "departure 3: no decision is signed",
            "position B was first treated in fraction 6: physics check outstanding",
        ),
        reviewed_to=66,
    )


@pytest.fixture
def review(heading: Heading, dose_view: DoseView) -> ReviewView:
    return ReviewView(
        heading=heading,
        fractions=20,
        delivered_fractions=7,
        departures=(
            DepartureLine(
                2,
                6,
                "other position",
                "incoherent",
                "Upper spine treated at A, planned B",
                "marks misread",
            ),
            DepartureLine(3, 7, "part-delivered", "open", "Upper spine 40 % of its meterset", ""),
        ),
        shares=(ShareLine("A", 10, 5, 5), ShareLine("B", 5, 2, 2), ShareLine("C", 5, 0, 0)),
        sides=(SidesLine("J1", "Cranial", 12.6, 7.0, "Upper spine", 11.52, 6.4, False),),
        grid=tuple(grid_row(fraction, 7) for fraction in range(1, 21)),
        strips=(
            StripLine("J1", -2.0, -1.0, 6.7, 6.7),
            StripLine("J1", -1.0, 0.0, 6.7, 5.7),
        ),
        week=week(),
        next_shift=NextShift(11, "C", "2031-03-17"),
        dose=dose_view,
        ledger_head="418-3be1c07a",
        printed_at="2031-03-10 07:42 +01:00",
        caution=CAUTION,
    )


@pytest.fixture
def long_review(review: ReviewView) -> ReviewView:
    """A course of forty fractions and three fields."""
    rows = tuple(grid_row(fraction, 28) for fraction in range(1, 41))
    return replace(
        review,
        fractions=40,
        delivered_fractions=28,
        grid=tuple(
            replace(row, cells=(*row.cells, replace(row.cells[0], field="Lower spine")))
            for row in rows
        ),
    )
