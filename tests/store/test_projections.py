"""What each kind of entry changes, and that the ledger alone can make it all again."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import store_scenario as scenario
from sqlalchemy import select

from featherlog.store import queries
from featherlog.store.engine import open_engine, reading, writing
from featherlog.store.ledger import append, rebuild
from featherlog.store.tables import PROJECTIONS

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from featherlog.store.entry import Draft, Entry
    from featherlog.store.rows import CourseRow


def tell(url: str, *drafts: Draft) -> list[Entry]:
    with writing(open_engine(url)) as connection:
        return [append(connection, told) for told in drafts]


def course_after(url: str, *drafts: Draft) -> CourseRow:
    tell(url, *drafts)
    with reading(open_engine(url)) as connection:
        found = queries.course_row(connection, scenario.COURSE)
    assert found is not None
    return found


def states(url: str) -> list[str]:
    with reading(open_engine(url)) as connection:
        found = (queries.revision_row(connection, scenario.COURSE, n) for n in (1, 2, 3))
        return [row.state for row in found if row is not None]


def everything(connection: Connection) -> dict[str, list[tuple[Any, ...]]]:
    return {
        table.name: sorted(map(tuple, connection.execute(select(table))), key=repr)
        for table in PROJECTIONS
    }


def test_a_rebuild_makes_what_was_written_live(database_url: str) -> None:
    tell(database_url, *scenario.whole_story())
    with writing(open_engine(database_url)) as connection:
        live = everything(connection)
        assert all(live.values())
        rebuild(connection)
        assert everything(connection) == live


def test_a_later_machine_or_role_takes_the_place_of_the_earlier(database_url: str) -> None:
    tell(
        database_url,
        scenario.staff(),
        scenario.staff(role="administrator"),
        scenario.machine(),
        scenario.machine(couch_deg=10.0),
    )
    with reading(open_engine(database_url)) as connection:
        assert [(row.name, row.entry) for row in queries.staff(connection)] == [("Rowan Finch", 2)]
        found = queries.person(connection, "Rowan Finch")
        assert found is not None
        assert (found.role, found.left_entry) == ("administrator", None)
        assert queries.person(connection, "Ash Plover") is None
        assert [(row.name, row.entry) for row in queries.machines(connection)] == [("Alder", 4)]
        assert queries.machine_content(connection, "Alder") == '{"couch_deg":10,"name":"Alder"}'


def test_a_prepared_design_opens_its_course(database_url: str) -> None:
    course = course_after(database_url, scenario.prepared())
    assert (course.state, course.revision, course.approved_revision) == ("prepared", 1, None)
    assert (course.fractions, course.next_fraction, course.machine) == (13, None, "Alder")


def test_a_returned_design_is_prepared_anew(database_url: str) -> None:
    assert course_after(database_url, scenario.prepared(), scenario.returned()).state == "returned"
    course = course_after(database_url, scenario.prepared(2, fractions=15))
    assert (course.state, course.revision, course.fractions) == ("prepared", 2, 15)
    assert states(database_url) == ["returned", "prepared"]


def test_an_approved_design_is_what_is_treated(database_url: str) -> None:
    tell(database_url, scenario.prepared(), scenario.checked(), scenario.approved())
    with reading(open_engine(database_url)) as connection:
        treatment = queries.treatment(connection, scenario.COURSE)
    assert treatment is not None
    assert (treatment.course.state, treatment.course.next_position) == ("approved", "A")
    assert (treatment.revision.state, treatment.revision.code) == ("approved", "R1-7F3A")
    assert treatment.revision.checked_by == treatment.revision.approved_by == "Rowan Finch"


def test_a_new_design_waits_behind_the_approved_one(database_url: str) -> None:
    tell(database_url, scenario.prepared(), scenario.approved())
    course = course_after(database_url, scenario.prepared(2, fractions=15), scenario.checked(2))
    assert (course.state, course.revision, course.approved_revision) == ("approved", 2, 1)
    assert course.fractions == 13
    assert states(database_url) == ["approved", "checked"]


def test_an_approval_supersedes_what_came_before(database_url: str) -> None:
    tell(database_url, scenario.prepared(), scenario.approved(), scenario.prepared(2))
    course = course_after(
        database_url, scenario.prepared(3, fractions=15), scenario.approved(3, fraction=4)
    )
    assert states(database_url) == ["superseded", "superseded", "approved"]
    assert (course.fractions, course.next_fraction, course.approved_revision) == (15, 4, 3)


def test_the_state_of_a_course_is_its_last_entry_but_for_confirmations(database_url: str) -> None:
    *_, approved = tell(database_url, scenario.prepared(), scenario.approved())
    assert course_after(database_url, scenario.confirmed()).state_hash == approved.hash
    (recorded,) = tell(database_url, scenario.recorded())
    assert course_after(database_url).state_hash == recorded.hash


def test_a_confirmation_is_kept_with_the_state_it_was_made_against(database_url: str) -> None:
    tell(database_url, scenario.prepared(), scenario.approved(), scenario.confirmed("c" * 64))
    with reading(open_engine(database_url)) as connection:
        (row,) = queries.confirmations(connection, scenario.COURSE, 1)
        assert queries.confirmations(connection, scenario.COURSE, 2) == ()
    assert (row.position, row.state_hash, row.verifier) == ("A", "c" * 64, "Ash Plover")


def test_a_record_keeps_every_beam_and_gap_and_moves_the_course_on(database_url: str) -> None:
    course = course_after(
        database_url,
        scenario.prepared(),
        scenario.approved(),
        scenario.recorded(part_delivered=True),
    )
    assert (course.next_fraction, course.next_position, course.next_date) == (2, "B", "2025-03-05")
    assert (course.part_delivered, course.fractions_complete, course.state) == (True, 1, "approved")
    with reading(open_engine(database_url)) as connection:
        beams = queries.deliveries(connection, scenario.COURSE)
        (gap,) = queries.observations(connection, scenario.COURSE)
    assert [(row.beam, row.meterset_mu) for row in beams] == [("left", 100.0), ("right", 99.5)]
    assert (gap.junction, gap.side, gap.gap_cm) == ("upper spine", "posterior", 1.0)


def test_the_last_record_completes_the_course(database_url: str) -> None:
    done = scenario.recorded(next_fraction=None, next_position=None, next_date=None, complete=True)
    course = course_after(database_url, scenario.prepared(), scenario.approved(), done)
    assert (course.state, course.next_fraction) == ("complete", None)


def test_departures_are_numbered_through_the_course_and_open_until_decided(
    database_url: str,
) -> None:
    course = course_after(
        database_url,
        scenario.prepared(),
        scenario.approved(),
        scenario.recorded(1, reasons=("", "known")),
        scenario.recorded(2, reasons=("",)),
    )
    assert course.open_departures == 3
    assert course_after(database_url, scenario.explained(3)).open_departures == 3
    assert course_after(database_url, scenario.decided(2)).open_departures == 2
    with reading(open_engine(database_url)) as connection:
        found = queries.departures(connection, scenario.COURSE)
    assert [(row.number, row.fraction, row.status, row.reason, row.decision) for row in found] == [
        (1, 1, "open", "", None),
        (2, 1, "decided", "known", "shares as they are"),
        (3, 2, "explained", "marks were faint", None),
    ]
