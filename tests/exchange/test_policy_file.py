"""What a policy file may say, and the sentences that refuse one."""

from __future__ import annotations

import pytest

from featherlog.errors import InputError
from featherlog.exchange.policy_file import parse_policy
from featherlog.exchange.template import POLICY_TEMPLATE
from featherlog.policy import Act, Contacts, ReadBackItem, ReportingThresholds

NOTHING = ReportingThresholds(None, None, None)


def test_the_template_reads_as_it_is() -> None:
    policy = parse_policy(POLICY_TEMPLATE, "policy.toml")
    assert (policy.department, policy.time_zone) == ("My department", "Europe/Berlin")
    assert policy.two_people == (Act.APPROVE,)
    assert policy.minimum_interval_hours == 6
    assert policy.read_back_on_shift_days == tuple(ReadBackItem)
    assert policy.reporting_thresholds == ReportingThresholds(20, 50, 30)
    assert policy.physics_presence_at_shifts is False
    assert policy.contacts == Contacts(
        "physicist on call, telephone 4711", "physician on call, telephone 4712"
    )


def test_thresholds_may_be_left_out() -> None:
    without, _, _ = POLICY_TEMPLATE.partition("[reporting_thresholds]")
    assert parse_policy(without, "policy.toml").reporting_thresholds == NOTHING
    assert parse_policy(f"{without}[reporting_thresholds]\n", "p").reporting_thresholds == NOTHING


ZONE = 'must be the IANA name of a time zone, like "Europe/Berlin"'
PERCENT = "must be a number of percent above 0 up to 1000"
TEXT = "must be text in quotes, 1 to 120 printable characters, no space at either end"
NOT_A_KEY = "is not a key that belongs here; did you mean weekly_percent?"
FAULTS = [
    (
        'format = "featherlog policy 1"',
        'format = "featherlog policy 2"',
        'line 3: format is "featherlog policy 2", but must be "featherlog policy 1"',
    ),
    (
        '"Europe/Berlin"',
        '"Europe/Fernhollow"',
        f'line 6: time_zone is "Europe/Fernhollow", but {ZONE}',
    ),
    ('"Europe/Berlin"', '"../../etc"', f'line 6: time_zone is "../../etc", but {ZONE}'),
    (
        '["approve a design"]',
        '["add staff"]',
        'line 12: two_people has "add staff", which has a rule of its own',
    ),
    (
        "minimum_interval_hours = 6.0",
        "minimum_interval_hours = -1",
        "line 15: minimum_interval_hours is -1, but must be a number of hours from 0 up to 24",
    ),
    (
        '["position", "jaw or table value", "gap"]',
        '["gap"]',
        'line 19: read_back_on_shift_days lacks "position", which is always read back',
    ),
    (
        'physician = "physician on call, telephone 4712"',
        "",
        f"line 25: contacts.physician is missing, but {TEXT}",
    ),
    (
        "weekly_percent = 30.0",
        "weekly = 30.0",
        f"line 34: reporting_thresholds.weekly {NOT_A_KEY}",
    ),
    (
        "total_percent = 20.0",
        "total_percent = 0",
        f"line 32: reporting_thresholds.total_percent is 0, but {PERCENT}",
    ),
]


@pytest.mark.parametrize(("written", "instead", "fault"), FAULTS)
def test_a_bad_policy_is_refused_in_these_words(written: str, instead: str, fault: str) -> None:
    assert written in POLICY_TEMPLATE
    with pytest.raises(InputError) as refusal:
        parse_policy(POLICY_TEMPLATE.replace(written, instead, 1), "policy.toml")
    assert refusal.value.faults == (f"policy.toml {fault}",)
