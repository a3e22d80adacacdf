"""The checks on top of sheet *Proof*: pairs of formulas that should agree, and what they come to today.

Today's figures come from the flow and its prices on one side and from the plan on the other, so that a
plan that was not proved would be written with a warning.
"""

from collections.abc import Sequence
from decimal import Decimal
from typing import NamedTuple

import numpy as np

from engine.exact import to_decimal, total_of
from engine.money import round_half_up
from engine.planning.gone import cost_of
from engine.planning.plan import Plan
from engine.report.proof_figures import ProofFigures, check_codes, left_over, lower_bound
from engine.report.proof_layout import Layout

NUMBER_OF_CHECKS = 11


class Check(NamedTuple):
    """Two formulas that should agree in so many decimal places, and what they come to today."""

    about: str
    here: str
    should: str
    is_here: Decimal
    is_should: Decimal
    places: int

    @property
    def difference(self) -> Decimal:
        """What the sheet shows as the difference, rounded as there."""
        return round_half_up(self.is_here - self.is_should, self.places)


class _FromFlow(NamedTuple):
    """Sums over what has gone and the rate rows of the flow: sent, exact cost, payable."""

    sent: Decimal
    cost: Decimal
    payable: Decimal


def checks_of(plan: Plan, figures: ProofFigures, layout: Layout, costs: dict[str, str]) -> list[Check]:
    """Every check, in the order of the sheet.

    costs: cells of *Costs*, by what they hold.
    """
    return [*_nothing_wrong(plan, figures, layout), *_sums_agree(plan, figures, layout, costs)]


def _nothing_wrong(plan: Plan, figures: ProofFigures, layout: Layout) -> list[Check]:
    """Counts that should be 0."""
    model = plan.model
    depots, customers, rates = layout.depots, layout.customers, layout.rates
    codes = check_codes(plan, figures)
    depot_left, customer_left = left_over(plan, figures)
    aside = np.ones(model.problem.rows, dtype=bool)
    aside[figures.rows] = False
    stand_in_codes = f"SUM({layout.range('L', (depots[0], depots[1] + 1))},{layout.range('L', customers)})"
    return [
        Check(about, formula, "0", Decimal(int(count)), Decimal(0), 0)
        for about, formula, count in (
            (
                "Depots whose quantities do not add up",
                f'COUNTIF({layout.range("G", depots)},"<>0")',
                np.count_nonzero(depot_left),
            ),
            (
                "Customers whose quantities do not add up",
                f'COUNTIF({layout.range("G", customers)},"<>0")',
                np.count_nonzero(customer_left),
            ),
            (
                "Rate rows outside their limits",
                f"COUNTIF({layout.range('L', rates)},2)",
                np.count_nonzero(codes[figures.rows] == 2),
            ),
            (
                "Rate rows that could improve the plan",
                f"COUNTIF({layout.range('L', rates)},1)",
                np.count_nonzero(codes[figures.rows] == 1),
            ),
            ("Short or unsent quantities that could improve it", stand_in_codes, codes[aside].sum()),
        )
    ]


def _sums_agree(plan: Plan, figures: ProofFigures, layout: Layout, costs: dict[str, str]) -> list[Check]:
    """Sums that should be the same on both sides."""
    depots, customers, rates, places = layout.depots, layout.customers, layout.rates, layout.places
    flow = _from_flow(plan, figures)
    sent, cost, payable = (_sum_of(layout, column) for column in "EMN")
    plan_sent, plan_cost, plan_payable = (
        f"SUM({layout.on_plan(heading)})" for heading in ("Send", "Cost", "Payable")
    )
    charges = _products(layout, "E", "I", (depots, customers))
    stand_ins = ((depots[0], depots[1] + 1), (customers[0], customers[1] + 1))
    by_prices = _products(layout, "N", "H", stand_ins)
    by_limits = "+".join(f"SUM({layout.range('O', table)})" for table in (depots, customers, rates))
    if plan.week.gone:
        by_limits += f"+SUM({layout.range('M', layout.gone)})"
    listed = plan.shipments
    return [
        Check(
            "Quantity sent: rate rows, and Plan",
            sent,
            plan_sent,
            flow.sent,
            total_of(shipment.quantity for shipment in listed),
            places.quantity,
        ),
        Check(
            "Exact freight: rate rows, and Plan",
            cost,
            plan_cost,
            flow.cost,
            total_of(shipment.cost for shipment in listed),
            places.total,
        ),
        Check(
            "Exact freight and charges: added up, and by prices alone",
            f"{cost}+{charges}",
            f"{by_prices}+{by_limits}",
            total_of((flow.cost, plan.short_cost, plan.unsent_cost)),
            total_of((lower_bound(plan, figures), *(cost_of(one) for one in plan.week.gone.values()))),
            places.total,
        ),
        Check(
            "Freight payable: each row rounded, and Plan",
            payable,
            plan_payable,
            flow.payable,
            total_of(shipment.payable for shipment in listed),
            places.payable,
        ),
        Check(
            "Freight payable: Plan, and Costs",
            plan_payable,
            costs["payable"],
            total_of(shipment.payable for shipment in listed),
            plan.freight_payable,
            places.payable,
        ),
        Check(
            "Rounding: payable less exact, and Costs",
            f"{payable}-{cost}",
            costs["rounding"],
            flow.payable - flow.cost,
            plan.proof.rounding,
            places.total,
        ),
    ]


def _sum_of(layout: Layout, column: str) -> str:
    """A column of the rate rows, and of what has gone, added up."""
    tables = [layout.rates] if layout.gone[1] < layout.gone[0] else [layout.gone, layout.rates]
    return f"SUM({','.join(layout.range(column, table) for table in tables)})"


def _products(layout: Layout, left: str, right: str, tables: Sequence[tuple[int, int]]) -> str:
    return "+".join(
        f"SUMPRODUCT({layout.range(left, table)},{layout.range(right, table)})" for table in tables
    )


def _from_flow(plan: Plan, figures: ProofFigures) -> _FromFlow:
    model, quantity = plan.model, plan.flow.quantity
    used = figures.rows[quantity[figures.rows] > 0]
    places = model.quantity_places + model.money_places
    costs = [
        to_decimal(sent * rate, places)
        for sent, rate in zip(quantity[used].tolist(), model.money[used].tolist(), strict=True)
    ]
    costs += [cost_of(one) for one in plan.week.gone.values()]
    sent = to_decimal(sum(quantity[used].tolist()), model.quantity_places)
    return _FromFlow(
        total_of((sent, *(one.quantity for one in plan.week.gone.values()))),
        total_of(costs),
        total_of(round_half_up(cost, figures.payable_places) for cost in costs),
    )
