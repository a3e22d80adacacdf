"""Drawn weeks: the same in whichever order they are drawn, and distributed as they say."""

from decimal import Decimal

import numpy as np
import pytest
from scipy import stats

from engine.compare.stress_draws import Draws, Spread, factors, raw_numbers

D = Decimal


def test_raw_numbers_are_those_of_a_stream_that_begins_at_the_counter() -> None:
    for counter in ((0, 0, 0, 0), (0, 0, 1, 7), (0, 0, 2, 2**40)):
        stream = np.random.Philox(key=99, counter=np.array(counter, dtype=np.uint64))
        assert raw_numbers(99, counter, 3).tolist() == stream.random_raw(3).tolist()
        raw_numbers(99, (0, 0, 0, 5), 1)
        assert raw_numbers(99, counter, 9)[:3].tolist() == raw_numbers(99, counter, 3).tolist()


def test_a_known_answer_of_the_stream() -> None:
    """Philox4x64-10, key and counter 0: the first word in the authors' own table of known answers (from
    memory). The generator counts on before it gives numbers, so it is set one before 0."""
    assert raw_numbers(0, (2**64 - 1,) * 4, 1).tolist() == [0x16554D9ECA36314C]


def test_a_case_is_the_same_whatever_was_drawn_before() -> None:
    draws = Draws(3, orders=Spread("triangular", D(-20), D(30), D(5)), stock=Spread("even", D(-9), D(0)))
    forwards = [factors(draws, number, "orders", 40).tolist() for number in range(5)]
    backwards = [factors(draws, number, "orders", 40).tolist() for number in reversed(range(5))]
    assert forwards == backwards[::-1]
    assert len({tuple(one) for one in forwards}) == 5
    assert factors(draws, 2, "orders", 10).tolist() == forwards[2][:10]
    assert forwards[0] != factors(Draws(4, orders=draws.orders), 0, "orders", 40).tolist()
    assert factors(draws, 0, "rates", 3).tolist() == [1000, 1000, 1000]


@pytest.mark.parametrize(
    ("spread", "reference"),
    [
        (Spread("triangular", D(-20), D(30), D(5)), stats.triang(c=0.5, loc=-20, scale=50)),
        (Spread("triangular", D(0), D(8), D(0)), stats.triang(c=0, loc=0, scale=8)),
        (Spread("normal", D(-10), D(25), D(3), D(9)), stats.truncnorm(-13 / 9, 22 / 9, loc=3, scale=9)),
        (Spread("even", D(-4), D(6)), stats.uniform(-4, 10)),
    ],
)
def test_percentages_follow_their_distribution(spread: Spread, reference: stats.rv_continuous) -> None:
    """Against scipy.stats, another way to the same quantiles."""
    chance = np.linspace(0.0005, 0.9995, 1999)
    assert np.allclose(spread.percents(chance), reference.ppf(chance), atol=1e-9)


def test_figures_stray_together_or_each_by_itself() -> None:
    together = factors(Draws(1, orders=Spread("even", D(-50), D(50), together=True)), 0, "orders", 20)
    apart = factors(Draws(1, orders=Spread("even", D(-50), D(50))), 0, "orders", 20)
    assert len(set(together.tolist())) == 1
    assert len(set(apart.tolist())) > 10
    assert 500 <= apart.min() <= apart.max() <= 1500


@pytest.mark.parametrize(
    "wrong",
    [
        lambda: Spread("even", D(5), D(-5)),
        lambda: Spread("even", D(-101), D(5)),
        lambda: Spread("triangular", D(0), D(5), D(6)),
        lambda: Spread("normal", D(-5), D(5)),
        lambda: Spread("lumpy", D(-5), D(5)),  # type: ignore[arg-type]
        lambda: Draws(-1),
    ],
)
def test_what_cannot_be_drawn_is_refused(wrong: object) -> None:
    with pytest.raises(ValueError, match=r"stray|likely|normal|seed"):
        wrong()  # type: ignore[operator]
