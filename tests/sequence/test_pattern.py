import pytest
from spine_course import sequence, spine

from featherlog.junction.design import Pattern
from featherlog.sequence.pattern import (
    Block,
    assign,
    blocks,
    even_block,
    shares,
    shift_fractions,
)
from featherlog.sequence.planning import plan_fractions


@pytest.mark.parametrize(
    ("pattern", "positions", "length", "expected"),
    [
        (Pattern.BLOCKS, "ABC", 2, "AABBCCA"),
        (Pattern.DAILY, "ABC", None, "ABCABCA"),
        (Pattern.LIST, "ACCBABA", None, "ACCBABA"),
        (Pattern.NO_SHIFT, "B", None, "BBBBBBB"),
    ],
)
def test_each_pattern_assigns_every_fraction(
    pattern: Pattern, positions: str, length: int | None, expected: str
) -> None:
    assert "".join(assign(sequence(pattern, positions, length), 7)) == expected


@pytest.mark.parametrize(
    ("fractions", "length", "expected"),
    [
        (13, 5, (5, 5, 3)),
        (13, None, (5, 4, 4)),
        (20, 5, (10, 5, 5)),
        (20, None, (7, 7, 6)),
        (21, 5, (10, 6, 5)),
        (21, 7, (7, 7, 7)),
    ],
)
def test_shares_of_three_positions(
    fractions: int, length: int | None, expected: tuple[int, ...]
) -> None:
    pattern = Pattern.BLOCKS if length else Pattern.DAILY
    counted = shares(assign(sequence(pattern, "ABC", length), fractions))
    assert counted == dict(zip("ABC", expected, strict=True))


def test_blocks_and_the_fractions_that_shift() -> None:
    assert blocks("AABBBA") == (Block(1, 2, "A"), Block(3, 5, "B"), Block(6, 6, "A"))
    assert shift_fractions("AABBBA") == (3, 6)
    assert shift_fractions("AAA") == ()


@pytest.mark.parametrize(("fractions", "length"), [(21, 7), (20, None), (13, None)])
def test_the_block_that_would_make_shares_equal(fractions: int, length: int | None) -> None:
    assert even_block(assign(sequence(positions="ABC"), fractions)) == length


def test_fraction_numbers_and_doses_run_through_the_course() -> None:
    fractions = plan_fractions(
        spine(fractions=6, order=sequence(positions="ABC", block_fractions=2))
    )
    assert [(f.number, f.position, f.dose_gy) for f in fractions] == [
        (number, position, 1.8) for number, position in enumerate("AABBCC", start=1)
    ]
