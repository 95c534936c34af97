"""One life of a course, made up step by step, and what must hold after each step."""

from __future__ import annotations

from dataclasses import replace
from datetime import timedelta
from itertools import count
from typing import TYPE_CHECKING, Any

import pytest
from course_model import Model, Record, Told
from department import (
    AUTHOR,
    CHECKER,
    PHYSICIAN,
    SECOND,
    THERAPIST,
    by,
    moment,
    said,
)
from hypothesis import strategies as st
from hypothesis.stateful import (
    RuleBasedStateMachine,
    invariant,
    precondition,
    rule,
)
from short_thigh import DESIGN, KEY, LOWER, NEW, UPPER, approve_design, design_of, design_text
from sqlalchemy import select

from featherlog.actions import course_life as life
from featherlog.actions.confirm import ReadBack, confirm
from featherlog.actions.corrections import correct
from featherlog.actions.decisions import check_position, decide
from featherlog.actions.departures import explain
from featherlog.actions.desk import at_desk, practice_time, writing_desk
from featherlog.actions.observations import attest_presence, note_image_shift, note_imager
from featherlog.actions.record import Recorded, record
from featherlog.actions.review import review
from featherlog.actions.stored import load
from featherlog.actions.today import day_view
from featherlog.errors import InputError, NotFoundError, RefusedError
from featherlog.store import ledger, queries
from featherlog.store.tables import PROJECTIONS
from featherlog.store.verify import verify

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable
    from pathlib import Path

    from sqlalchemy import Connection

    from featherlog.views.review import ReviewView

START, A_MINUTE, DAY_H = moment("2026-03-02"), timedelta(minutes=1), 24
PARTS = st.sampled_from((0.0, 0.25, 0.5, 1.0, 1.25))
REASONS = st.sampled_from(("", "an interlock"))
FULL_CHECK_EVERY = 6


class LifeOfACourse(RuleBasedStateMachine):
    """One life in a department's database of its own; design files go to ``folder``."""

    def __init__(self, database: str, folder: Path) -> None:
        super().__init__()
        self.url, self.folder = database, folder
        self.model = Model(DESIGN)
        self.now = START
        self.steps = count(1)
        self.labels = set(DESIGN.edge_cm)
        self.imager_out = False
        self.old_codes: set[str] = set()
        self.code, self.page_may_change = self._page_code(), False

    # What happens around the treatment

    @rule(hours=st.sampled_from((1, 5, 7, DAY_H, 3 * DAY_H)))
    def wait(self, hours: int) -> None:
        self.now += timedelta(hours=hours)

    @rule(reason=REASONS)
    def miss(self, reason: str) -> None:
        today = self.now.date()
        closed = today.weekday() > 4 or today.isoformat() == "2026-03-13"
        known = today in self.model.missed or self.model.treated_on(today)
        refused = not reason or self.model.due is None or closed or bool(known)
        following = self.act(
            lambda: life.miss(self.url, KEY, day=None, by=by(THERAPIST), reason=reason), refused
        )
        if not refused:
            self.model.missed.add(today)
            assert following > today.isoformat()
            self.changed()

    @rule()
    def pause(self) -> None:
        refused = self.model.due is None or self.model.halted == "paused"
        self.act(lambda: life.pause(self.url, KEY, by=by(THERAPIST), reason="skin"), refused)
        if not refused:
            self.halt("paused")

    @precondition(lambda self: self.model.halted == "paused")
    @rule()
    def release(self) -> None:
        refused = self.model.due is None
        self.act(lambda: life.release(self.url, KEY, by=by(PHYSICIAN), reason="healed"), refused)
        if not refused:
            self.halt("")

    @precondition(lambda self: self.model.complete > 1 and self.now.day % 3 == 0)
    @rule()
    def end(self) -> None:
        refused = self.model.due is None
        self.act(lambda: life.end(self.url, KEY, by=by(PHYSICIAN), reason="wish"), refused)
        if not refused:
            self.halt("ended")

    @rule(fraction=st.integers(1, 6), kind=st.sampled_from(("shift", "presence", "position")))
    def note_what_leaves_pages_valid(self, fraction: int, kind: str) -> None:
        refused = kind != "position" and fraction > max([self.model.fractions, *self.model.begun()])
        if kind == "shift":
            shift = {"fraction": fraction, "field": UPPER, "shift_cm": (0.1, 0.0, 0.0)}
            self.act(lambda: note_image_shift(self.url, KEY, **shift, by=by(THERAPIST)), refused)
        elif kind == "presence":
            self.act(
                lambda: attest_presence(self.url, KEY, fraction=fraction, by=by(AUTHOR)), refused
            )
        else:
            self.act(lambda: check_position(self.url, KEY, "A", by=by(AUTHOR)), refused=False)

    @rule()
    def note_imager(self) -> None:
        works = self.imager_out
        self.act(
            lambda: note_imager(self.url, KEY, works=works, reason="tube", by=by(THERAPIST)),
            refused=False,
        )
        self.imager_out = not works
        self.changed()

    # The treatment

    @rule(how=st.sampled_from(("rightly", "rightly", "other position", "no position", "old page")))
    def confirm(self, how: str) -> None:
        page = self.code
        position = self.model.due_position or "A"
        refused = not self.may_confirm()
        if how == "other position":
            position, refused = "B" if position == "A" else "A", True
        elif how == "old page" and self.old_codes - {page}:
            page, refused = min(self.old_codes - {page}), True
        read: str | None = position
        if how == "no position":
            read = None
            refused |= self.model.shift() or self.model.part_delivered
        self.confirm_reading(read, page, refused)

    def confirm_reading(self, read: str | None, page: str, refused: bool) -> None:
        back = ReadBack(read, page, {})
        people = {"by": by(THERAPIST), "verified_by": by(SECOND)}
        self.act(lambda: confirm(self.url, KEY, **people, read_back=back), refused)
        if not refused:
            assert self.model.due is not None
            self.model.confirmed[self.model.due] = self.model.due_position or ""

    @precondition(lambda self: not self.model.must_stop() and self.model.due is not None)
    @rule(data=st.data())
    def treat_next_day(self, data: st.DataObject) -> None:
        """Confirm and record on the next morning, so that most lives come to their shifts."""
        self.next_morning()
        refused = not self.may_confirm()
        self.confirm_reading(self.model.due_position, self.code, refused)
        if not refused:
            self.record_confirmed(data)

    def next_morning(self) -> None:
        self.now = (self.now + timedelta(days=1)).replace(hour=9)

    @precondition(lambda self: self.model.due in self.model.confirmed)
    @rule(data=st.data())
    def record_confirmed(self, data: st.DataObject) -> None:
        assert self.model.due is not None
        told = self.told(data, [None, None, None])
        self.record_it(told, self.model.due, data.draw(REASONS), named=False)

    @rule(data=st.data(), hours=st.sampled_from((None, 3, 2 * DAY_H, 5 * DAY_H)))
    def record_any(self, data: st.DataObject, hours: int | None) -> None:
        """Record any fraction, whether confirmed or not, now or late."""
        number = data.draw(st.integers(1, self.model.last_number), "fraction")
        told = self.told(data, [None])
        self.record_it(told, number, data.draw(REASONS), named=True, ago_h=hours)

    def told(self, data: st.DataObject, often: list[str | None]) -> Told:
        labels = sorted(self.labels)
        position = data.draw(st.sampled_from([*often, *labels]), "position")
        apart = data.draw(st.dictionaries(st.sampled_from([UPPER, LOWER]), st.sampled_from(labels)))
        fields = apart if data.draw(st.integers(0, 3), "apart") == 0 else {}
        beams = self.model.design.beams
        broken = data.draw(st.sampled_from(("no", "no", "all", "some")), "broken")
        parts = {"no": {}, "all": dict.fromkeys(beams, 0.25)}.get(broken)
        if parts is None:
            parts = data.draw(st.dictionaries(st.sampled_from(beams), PARTS), "parts")
        mu = {beam: part * self.model.design.mu["A"][beam] for beam, part in parts.items()}
        return Told(position, fields, mu)

    def record_it(
        self, told: Told, number: int, reason: str, *, named: bool, ago_h: int | None = None
    ) -> None:
        model = self.model
        at = self.now if ago_h is None else self.now - timedelta(hours=ago_h, minutes=1)
        again = model.is_complete(model.records, number)
        confirmed = model.confirmed.get(number)
        expected = model.deliver(told, number, at, model.records, confirmed, again=again)
        delivery = said(
            fraction=number if named else None,
            position=told.position,
            field_positions=told.field_positions,
            metersets_mu=told.mu,
            reason=reason,
            again=again,
            treated_at=at.isoformat() if ago_h is not None else None,
        )
        people = {"by": by(THERAPIST), "verified_by": by(SECOND)}
        done = self.act(
            lambda: record(self.url, KEY, **people, delivery=delivery), expected is None
        )
        if expected is not None:
            beams, kinds = expected
            made = Record(done.entry, number, at, beams, dict(model.confirmed))
            self.keep(done, made, kinds, kinds if reason else ())

    def keep(
        self, done: Recorded, made: Record, kinds: list[str], explained: Iterable[str]
    ) -> None:
        said_kinds = [departure.kind for departure in done.departures]
        assert sorted(said_kinds) == sorted(kinds), done.departures
        self.model.keep(made, said_kinds, explained)
        complete = self.model.is_complete(self.model.records, made.fraction)
        assert done.complete == (complete and bool(made.beams))
        self.changed()

    @precondition(lambda self: self.model.records)
    @rule(data=st.data(), void=st.booleans(), renumber=st.booleans())
    def correct(self, data: st.DataObject, void: bool, renumber: bool) -> None:
        model = self.model
        old = data.draw(st.sampled_from(model.records), "record")
        others = [one for one in model.records if one is not old]
        void = void and data.draw(st.booleans(), "really")
        told = self.told(data, [None, None])
        number, again, refused = old.fraction, None, False
        if renumber:
            number = data.draw(st.integers(1, model.last_number), "fraction")
            again = model.is_complete(others, number)
            refused = number > max([model.fractions, *(one.fraction for one in others)]) + 1
        expected = None if refused else self.corrected(old, others, told, number)
        delivery = said(
            fraction=number if renumber else None,
            position=told.position,
            field_positions=told.field_positions,
            metersets_mu=told.mu,
            reason="misread",
            again=bool(again),
        )
        people = {"by": by(AUTHOR), "verified_by": by(CHECKER)}
        refused = refused or (not void and expected is None)
        done = self.act(
            lambda: correct(self.url, KEY, old.entry, **people, delivery=delivery, void=void),
            refused,
        )
        if refused:
            return
        beams, kinds = ((), []) if void else expected or ((), [])
        explained = {d.kind for d in model.departures if d.entry == old.entry and d.has_reason}
        model.replaced(old.entry)
        made = replace(old, entry=done.entry, fraction=number, beams=beams)
        self.keep(done, made, kinds, explained)
        if void:
            model.records.remove(made)

    def corrected(
        self, old: Record, others: list[Record], told: Told, number: int
    ) -> tuple[tuple[Any, ...], list[str]] | None:
        """Return what a correction comes to: what is not named stays as it was."""
        model = self.model
        before = [one for one in others if one.at < old.at]
        again = model.is_complete(before, number)
        left = model.left(before, number, again=again)
        stands = {} if told.position else {beam.field: beam.position for beam in old.beams}
        mu = {
            beam.name: beam.mu
            for beam in old.beams
            if abs(beam.mu - left[beam.name] * model.design.mu[beam.position][beam.name]) > 1e-6
        }
        whole = Told(told.position, stands | {**told.field_positions}, mu | {**told.mu})
        confirmed = old.confirmed.get(number)
        return model.deliver(whole, number, old.at, others, confirmed, again=again)

    # What people decide

    @precondition(lambda self: self.model.departures)
    @rule(data=st.data())
    def explain(self, data: st.DataObject) -> None:
        number, departure = self.some_departure(data)
        refused = departure.status != "open"
        why = {"by": by(THERAPIST), "reason": "a slip"}
        self.act(lambda: explain(self.url, KEY, number, **why), refused)
        if not refused:
            departure.status, departure.has_reason = "explained", True
            self.changed(undoes_check=False)

    @precondition(lambda self: self.model.departures)
    @rule(data=st.data())
    def decide(self, data: st.DataObject) -> None:
        number, departure = self.some_departure(data)
        refused = departure.status != "explained"
        what = {"by": by(PHYSICIAN), "decision": "go on as planned"}
        self.act(lambda: decide(self.url, KEY, number, **what), refused)
        if not refused:
            departure.status = "decided"
            self.changed(undoes_check=False)

    def some_departure(self, data: st.DataObject) -> tuple[int, Any]:
        numbered = list(enumerate(self.model.departures, start=1))
        return data.draw(st.sampled_from(numbered), "departure")

    @rule(
        new=st.sampled_from(sorted(NEW)),
        order=st.sampled_from(("AB-", "BA-", "A-B", "-AB")),
        fractions=st.integers(4, 8),
    )
    def revise(self, new: str, order: str, fractions: int) -> None:
        model = self.model
        planned = tuple(order.replace("-", new)[n // 2 % 3] for n in range(fractions))
        unfinished = any(not model.is_complete(model.records, n) for n in model.begun())
        refused = model.halted == "ended" or unfinished or max(model.begun(), default=0) > fractions
        places = sorted(set(planned))
        text = design_text(KEY, places, planned)
        self.act(lambda: approve_design(self.url, self.folder, text), refused)
        if not refused:
            self.labels = {*places, *self.bound()}
            model.revise(design_of(places, planned))
            self.changed()

    def bound(self) -> set[str]:
        """Return the positions whose meaning stays: planned or treated in a fraction begun."""
        planned = {
            self.model.design.planned[n - 1]
            for n in self.model.begun()
            if n <= self.model.fractions
        }
        return planned | {b.position for r in self.model.records for b in r.beams if b.mu > 0}

    # How a step is made and looked at

    def act(self, what: Callable[[], Any], refused: bool) -> Any:
        """Do something that must be refused, or must not be."""
        self.now += A_MINUTE
        with practice_time(self.now):
            if not refused:
                return what()
            with pytest.raises((RefusedError, InputError, NotFoundError)):
                what()
        return None

    def changed(self, *, undoes_check: bool = True) -> None:
        """Note that an entry was written which printed pages do not know of."""
        self.page_may_change = True
        if undoes_check:
            self.model.confirmed.clear()

    def halt(self, what: str) -> None:
        self.model.halts.append((self.now, what))
        self.changed()

    def may_confirm(self) -> bool:
        model = self.model
        at = self.now + A_MINUTE
        return model.due is not None and not model.must_stop() and model.has_time(at)

    def _page_code(self) -> str:
        with practice_time(self.now), at_desk(self.url) as at:
            return day_view(at, load(at, KEY)).page_code

    @invariant()
    def the_page_changes_when_the_course_did(self) -> None:
        code = self._page_code()
        assert (code != self.code) == self.page_may_change
        assert code not in self.old_codes or code == self.code
        self.old_codes.add(self.code)
        self.code, self.page_may_change = code, False

    @invariant()
    def the_program_says_what_the_model_says(self) -> None:
        model = self.model
        with practice_time(self.now), at_desk(self.url) as at:
            stored = load(at, KEY)
            view = day_view(at, stored)
            kept = queries.departures(at.connection, KEY)
            assert ledger.first_fault(at.connection) is None
        row = stored.row
        undecided = sum(d.status in ("open", "explained") for d in model.departures)
        assert (row.next_fraction, row.next_position) == (model.due, model.due_position)
        assert (row.part_delivered, row.fractions_complete) == (
            model.part_delivered,
            model.complete,
        )
        assert row.state == ("complete" if model.due is None else "approved")
        assert [(d.entry, d.kind, d.status) for d in kept] == [
            (d.entry, d.kind, d.status) for d in model.departures
        ]
        assert row.open_departures == undecided
        assert (row.next_date is None) == (model.due is None)
        expected = "stop" if model.must_stop() else "complete" if model.due is None else "ready"
        assert view.status == expected, view.stop_reasons
        if model.due is not None:
            assert (view.fraction, view.position) == (model.due, model.due_position)

    @invariant()
    def sums_and_ledger_fit(self) -> None:
        if next(self.steps) % FULL_CHECK_EVERY == 0:
            self.look_at_everything()

    def teardown(self) -> None:
        self.look_at_everything()
        with writing_desk(self.url) as at:
            before = _projections(at.connection)
            ledger.rebuild(at.connection)
            assert _projections(at.connection) == before

    def look_at_everything(self) -> None:
        with practice_time(self.now), at_desk(self.url) as at:
            assert verify(at.connection).fault == ""
        with practice_time(self.now):
            page = review(self.url, KEY)
        shares = {share.position: share.delivered for share in page.shares}
        mine = dict.fromkeys(self.labels, 0.0) | self.model.shares()
        assert shares == pytest.approx(mine, abs=2e-3)
        for found, strip in zip(page.strips, self.model.strips(self.labels), strict=True):
            told = (found.low_cm, found.high_cm, found.expected_count, found.covered_count)
            assert told == pytest.approx(strip, abs=2e-3)
        self.compare_dose(page)

    def compare_dose(self, page: ReviewView) -> None:
        """Compare the plateau of each field, beside which the other one only leaks."""
        (junction,) = page.dose.junctions
        line = next(line for line in junction.lines if "match depth" in line.place)
        for curve in line.curves:
            if curve.name not in ("delivered", "predicted"):
                continue
            rest = curve.name == "predicted"
            upper, lower = (self.model.field_gy(n, with_rest=rest) for n in (UPPER, LOWER))
            leak = 0.003
            ends = (lower + leak * upper, upper + leak * lower)
            assert (curve.dose_gy[0], curve.dose_gy[-1]) == pytest.approx(ends, abs=0.02)


def _projections(connection: Connection) -> list[set[tuple[Any, ...]]]:
    return [set(map(tuple, connection.execute(select(table)))) for table in PROJECTIONS]
