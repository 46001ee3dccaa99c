"""A few sign flips of the core, all of them with SPLITCALC_ALL_FLIPS=1; each must be noticed."""

import os
import random

import pytest

from tests.flips import ROOT, SAME, Flip, all_flips, flips_in, noticed

FLIPS = all_flips()
SEEDS = (3, 14, 159, 26, 53, 589)
CHOSEN = (
    FLIPS
    if os.environ.get("SPLITCALC_ALL_FLIPS") == "1"
    else [random.Random(seed).choice(FLIPS) for seed in SEEDS]
)

SOURCE = b'''"""Text - with + signs."""

HALF = 1 - 0.5  # a constant - and a comment


@mark(source="a" + "b")
def f(a: float, b: float) -> float:
    """Not - these."""
    b -= a[..., -1] + a.sum(-1)
    c = (
        a  # not + this
        - g(-b, stack(axis=-1), end=-1)
    )
    return (a) + c[1:-1]
'''


def test_signs_are_found_but_in_text_indices_and_axes() -> None:
    found = flips_in(SOURCE)
    assert sorted(flip.byte for flip in found) == [
        SOURCE.index(mark) + offset
        for mark, offset in (
            (b"1 - 0.5", 2),
            (b"-= a", 0),
            (b"] + a.sum", 2),
            (b"- g(", 0),
            (b"(-b", 1),
            (b"=-1)\n    )", 1),
            (b") + c", 2),
        )
    ]
    assert {flip.code for flip in found if flip.line == 3} == {
        "HALF = 1 - 0.5  # a constant - and a comment"
    }


def test_a_flip_changes_its_sign_alone() -> None:
    for flip in flips_in(SOURCE):
        flipped = flip.applied(SOURCE)
        assert [n for n in range(len(SOURCE)) if SOURCE[n] != flipped[n]] == [flip.byte]
        assert {SOURCE[flip.byte], flipped[flip.byte]} == set(b"+-")


def test_there_are_signs_to_flip_and_the_excused_ones_still_stand() -> None:
    assert len(FLIPS) > 300
    for path, code in SAME:
        lines = (ROOT / path).read_text("utf-8").splitlines()
        assert code in [line.strip() for line in lines]


@pytest.mark.slow
@pytest.mark.parametrize("flip", CHOSEN, ids=str)
def test_a_flipped_sign_is_noticed(flip: Flip) -> None:
    assert noticed(flip)


@pytest.mark.slow
def test_without_a_flip_nothing_is_noticed() -> None:
    assert noticed(None) == ""
