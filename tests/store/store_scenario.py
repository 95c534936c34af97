"""A course that goes through every kind of entry, told once for all tests of the store."""

from __future__ import annotations

from typing import Any

from featherlog.store.entry import Draft, Kind, content_hash

COURSE = "FIR-1"
MACHINE = {"name": "Alder", "couch_deg": 5.0}


def draft(kind: str, content: dict[str, Any], course: str | None = COURSE) -> Draft:
    return Draft(
        course=course,
        kind=kind,
        who="Rowan Finch",
        role="physicist",
        meaning="author",
        at="2025-03-03T08:00:00+01:00",
        content=content,
    )


def staff(name: str = "Rowan Finch", role: str = "physicist") -> Draft:
    return draft(Kind.STAFF_ADDED, {"name": name, "role": role}, course=None)


def key(name: str = "Rowan Finch", letter: str = "A", **more: object) -> Draft:
    """Return an entry that gives a person a key; the store does not look into keys."""
    content = {"name": name, "key": {"public": letter * 43 + "="}, "reason": "forgotten"}
    return draft(Kind.KEY_REPLACED, content | more, course=None)


def left(name: str = "Rowan Finch") -> Draft:
    return draft(Kind.STAFF_LEFT, {"name": name, "reason": "moved away"}, course=None)


def restored(name: str = "Hazel Heron", letter: str = "C") -> Draft:
    content = key(name, letter).content | {"role": "administrator"}
    return draft(Kind.ADMINISTRATOR_RESTORED, content, course=None)


def signing_failed(name: str = "Rowan Finch") -> Draft:
    return draft(Kind.SIGNING_FAILED, {"name": name, "act": "check a design"}, course=None)


def policy(version: int = 1) -> Draft:
    content = {"version": version, "policy": {"department": "Fernhollow"}}
    return draft(Kind.POLICY_SET, content, course=None)


def machine(**changes: object) -> Draft:
    return draft(Kind.MACHINE_ADDED, {"machine": MACHINE | changes}, course=None)


def prepared(revision: int = 1, **changes: object) -> Draft:
    design = {"label": f"design {revision}", "step_cm": 1.0}
    plan = {"positions": ["A", "B"]}
    content = {
        "course": COURSE,
        "patient_name": "Larch Dunnock",
        "site": "spine",
        "machine_name": "Alder",
        "fractions": 13,
        "revision": revision,
        "design": design,
        "plan": plan,
        "machine": MACHINE,
        "content_hash": content_hash(design, plan, MACHINE),
    }
    return draft(Kind.DESIGN_PREPARED, content | changes)


def checked(revision: int = 1) -> Draft:
    return draft(Kind.DESIGN_CHECKED, {"revision": revision})


def returned(revision: int = 1) -> Draft:
    return draft(Kind.DESIGN_RETURNED, {"revision": revision, "reason": "wrong side"})


def approved(revision: int = 1, fraction: int = 1, position: str = "A") -> Draft:
    content = {
        "revision": revision,
        "code": f"R{revision}-7F3A",
        "next_fraction": fraction,
        "next_position": position,
        "next_date": "2025-03-04",
    }
    return draft(Kind.DESIGN_APPROVED, content)


def confirmed(state_hash: str = "a" * 64) -> Draft:
    content = {
        "fraction": 1,
        "position": "A",
        "state_hash": state_hash,
        "performer": "Hazel Wren",
        "verifier": "Ash Plover",
    }
    return draft(Kind.FRACTION_CONFIRMED, content)


def recorded(fraction: int = 1, reasons: tuple[str, ...] = (), **after: object) -> Draft:
    content = {
        "fraction": fraction,
        "performer": "Hazel Wren",
        "verifier": "Ash Plover",
        "beams": [
            {
                "field": "upper",
                "beam": beam,
                "position": "A",
                "meterset_mu": mu,
                "planned_mu": 100.0,
            }
            for beam, mu in (("left", 100.0), ("right", 99.5))
        ],
        "gaps": [{"junction": "upper spine", "side": "posterior", "gap_cm": 1.0}],
        "departures": [
            {"kind": "gap", "grade": "coherent", "detail": "0.3 cm", "reason": reason}
            for reason in reasons
        ],
        "after": {
            "next_fraction": fraction + 1,
            "next_position": "B",
            "next_date": "2025-03-05",
            "part_delivered": False,
            "fractions_complete": fraction,
            "complete": False,
        }
        | after,
    }
    return draft(Kind.FRACTION_RECORDED, content)


def explained(number: int = 1) -> Draft:
    return draft(Kind.DEPARTURE_EXPLAINED, {"departure": number, "reason": "marks were faint"})


def decided(number: int = 1) -> Draft:
    content = {"departure": number, "decision": "shares as they are"}
    return draft(Kind.DEPARTURE_DECIDED, content)


def paused() -> Draft:
    return draft(Kind.COURSE_PAUSED, {"reason": "fever"})


def whole_story() -> list[Draft]:
    """Return drafts of every kind, in an order that happens."""
    return [
        staff(),
        staff(role="administrator"),
        machine(),
        machine(couch_deg=10.0),
        prepared(),
        returned(),
        prepared(2),
        checked(2),
        approved(2),
        confirmed(),
        recorded(reasons=("", "known")),
        explained(),
        decided(),
        prepared(3, fractions=15),
        approved(3, fraction=2, position="B"),
        recorded(2, next_fraction=None, next_position=None, next_date=None, complete=True),
        key(),
        key(letter="B"),
        left(),
        restored(),
        signing_failed(),
        policy(),
        paused(),
    ]
