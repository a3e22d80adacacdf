"""What a row costs where it must be used, against the same customer searched with the row forced."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.loads import LoadProblem
from engine.loads.arrays import NEVER, Answers
from engine.loads.cost import short_of
from engine.loads.fit import priced_alone, rows_alone
from engine.loads.turns import cheapest, regrets_of
from tests.loads.weeks import weeks


def nothing_known(week: LoadProblem) -> Answers:
    nothing = np.zeros(week.rows, dtype=np.int64)
    never = np.full(week.customers, NEVER, dtype=np.int64)
    return Answers(nothing, short_of(week, nothing), never, never.copy())


@settings(deadline=None)
@given(weeks(most=20), st.integers(0, 60))
def test_regrets_are_exact_up_to_what_interests(week: LoadProblem, most: int) -> None:
    rows, priced = rows_alone(week), priced_alone(week)
    everybody = np.arange(week.customers, dtype=np.int64)
    answers = nothing_known(week)
    cheapest(rows, priced, everybody, answers)
    if (answers.lower == NEVER).any():
        return
    regret = regrets_of(rows, priced, everybody, answers, most)
    for row in range(week.rows):
        forced = rows.forced.copy()
        forced[row] = 1
        again = nothing_known(week)
        cheapest(rows._replace(forced=forced), priced, everybody, again)
        j = week.customer[row]
        exact = again.lower[j] - answers.lower[j]
        assert min(exact, most) <= regret[row] <= exact or (again.lower[j] == NEVER and regret[row] >= most)
    assert (rows.forced == (week.at_least > 0)).all()
