"""A stressed plan as JSON: decimals as strings, exact, like the plan's own."""

from typing import Any

from engine.compare.stress import Stressed
from engine.compare.stress_solve import Outcome
from engine.exact import canonical


def stress_as_json(stressed: Stressed) -> dict[str, Any]:
    """All cases that were done, the week as it is first; the drawn ones in the order of their numbers."""
    rules = stressed.plan.week.rules
    return {
        "week": rules.week,
        "unit": rules.unit,
        "currency": rules.currency,
        **({} if stressed.seconds is None else {"seconds_a_case": stressed.seconds}),
        "asked": stressed.asked,
        "done": len(stressed.outcomes),
        "unchanged": list(stressed.unchanged),
        "today": _outcome(stressed.today),
        "cases": [_outcome(one) for one in stressed.ranked()],
        "seed": None if stressed.draws is None else stressed.draws.seed,
        "drawn": [_outcome(one) for one in stressed.outcomes if one.case.kind == "drawn"],
    }


def _outcome(one: Outcome) -> dict[str, Any]:
    case = one.case
    said: dict[str, Any] = {"case": case.words, "kind": case.kind}
    said |= {
        name: value
        for name, value in (
            ("depot", case.depot),
            ("customer", case.customer),
            ("haulier", case.haulier),
            ("percent", canonical(case.percent) if case.percent else ""),
            ("number", case.number + 1 if case.kind == "drawn" else ""),
        )
        if value != ""
    }
    if one.why:
        return {**said, "cannot_be_planned": one.why}
    return (
        said
        | {
            "freight_cost": canonical(one.freight),
            "short_cost": canonical(one.short_charge),
            "unsent_cost": canonical(one.unsent_charge),
            "total_cost": canonical(one.total),
            "short": [{"customer": name, "quantity": canonical(quantity)} for name, quantity in one.short],
            "more_short": [{"customer": name, "quantity": canonical(quantity)} for name, quantity in one.hit],
            "unsent": canonical(one.unsent),
            "must_move_kept": canonical(one.must_stay),
            "moved": canonical(one.moved),
        }
        | _with_whole_loads(one)
    )


def _with_whole_loads(one: Outcome) -> dict[str, Any]:
    """What stands beside a plan that was searched for."""
    if one.at_least is None:
        return {}
    return {
        "opening_cost": canonical(one.opening_charge),
        "lower_bound": canonical(one.at_least),
        "gap": canonical(one.gap),
        "may_serve_better": one.may_serve_better,
    }
