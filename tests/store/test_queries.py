"""Reading across courses, and that records and tables have the same shape."""

from __future__ import annotations

from dataclasses import fields, replace
from typing import TYPE_CHECKING

import pytest
import store_scenario as scenario

from featherlog.store import queries, rows, tables
from featherlog.store.engine import open_engine, reading, writing
from featherlog.store.ledger import append

if TYPE_CHECKING:
    from sqlalchemy import Table


@pytest.mark.parametrize(
    ("table", "record"),
    [
        (tables.staff, rows.StaffRow),
        (tables.staff_key, rows.StaffKeyRow),
        (tables.failed_signing, rows.FailedSigningRow),
        (tables.policy, rows.PolicyRow),
        (tables.machine, rows.MachineRow),
        (tables.course, rows.CourseRow),
        (tables.revision, rows.RevisionRow),
        (tables.delivery, rows.DeliveryRow),
        (tables.observation, rows.ObservationRow),
        (tables.confirmation, rows.ConfirmationRow),
        (tables.departure, rows.DepartureRow),
    ],
    ids=str,
)
def test_a_record_has_the_columns_of_its_table_in_order(table: Table, record: type) -> None:
    assert [field.name for field in fields(record)] == table.c.keys()


def test_courses_under_treatment_are_due_by_date_on_their_machine(database_url: str) -> None:
    stories = {
        "FIR-1": ("Alder", "2025-03-05", True),
        "FIR-2": ("Alder", "2025-03-04", True),
        "FIR-3": ("Birch", "2025-03-03", True),
        "FIR-4": ("Alder", "2025-03-03", False),
    }
    with writing(open_engine(database_url)) as connection:
        for key, (machine, day, approve) in stories.items():
            prepared = scenario.prepared(course=key, machine_name=machine)
            append(connection, replace(prepared, course=key))
            approved = scenario.approved()
            content = approved.content | {"next_date": day}
            if approve:
                append(connection, replace(approved, course=key, content=content))
    with reading(open_engine(database_url)) as connection:
        assert [row.key for row in queries.courses(connection)] == list(stories)
        assert [row.key for row in queries.due(connection)] == ["FIR-3", "FIR-2", "FIR-1"]
        assert [row.key for row in queries.due(connection, "Alder")] == ["FIR-2", "FIR-1"]
        assert queries.treatment(connection, "FIR-4") is None
