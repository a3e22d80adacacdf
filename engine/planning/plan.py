"""A plan: shipments, what is short, what is unsent, costs, prices and the proof, all in exact decimals."""

from collections.abc import Iterable
from dataclasses import dataclass, replace
from decimal import Decimal
from typing import Literal

from engine.figures import RateKey
from engine.findings import Finding, by_gravity
from engine.network import Flow
from engine.network.closure import Closure
from engine.planning.model import Model
from engine.week import Week

Status = Literal["met", "short"]


@dataclass(frozen=True, slots=True)
class Shipment:
    """A quantity on a rate row.

    `rate` is per unit with the surcharge, never rounded; `cost` is exact; `payable` is `cost` rounded
    half up to the currency's minor unit. `loads` is None where the row is charged per unit. `gone` is the
    name of a quantity that has left already, empty for what is still to go.
    """

    key: RateKey
    quantity: Decimal
    rate: Decimal
    cost: Decimal
    payable: Decimal
    loads: int | None = None
    held: bool = False
    gone: str = ""

    @property
    def depot(self) -> str:
        return self.key.depot

    @property
    def customer(self) -> str:
        return self.key.customer

    @property
    def haulier(self) -> str | None:
        return self.key.haulier


@dataclass(frozen=True, slots=True)
class Short:
    """What a customer ordered and does not get; `charge` is per unit."""

    customer: str
    quantity: Decimal
    charge: Decimal
    cost: Decimal


@dataclass(frozen=True, slots=True)
class Unsent:
    """What a depot could send and keeps; `charge` is per unit, `must_move` what of it should have left."""

    depot: str
    quantity: Decimal
    charge: Decimal
    cost: Decimal
    must_move: Decimal = Decimal(0)


@dataclass(frozen=True, slots=True)
class Proof:
    """What the integer proof found: the cost that prices alone force, and how far the plan is above it.

    `rounding` is freight payable less exact freight.
    """

    exact: bool
    lower_bound: Decimal
    gap: Decimal
    rounding: Decimal


@dataclass(frozen=True, slots=True)
class UnitPrice:
    """The price that the proof gives a unit at a depot or a customer."""

    name: str
    price: Decimal


@dataclass(frozen=True, eq=False)
class Plan:
    """The answer to a week. `total_cost` is what is minimised: exact freight and both charges.

    `model` and `flow` are the same answer in integers, and `closure` the chains of exchanges in it, for the
    reasons to ask further.
    """

    week: Week
    shipments: tuple[Shipment, ...]
    short: tuple[Short, ...]
    unsent: tuple[Unsent, ...]
    freight_cost: Decimal
    unsent_cost: Decimal
    short_cost: Decimal
    total_cost: Decimal
    freight_payable: Decimal
    status: Status
    proof: Proof
    depot_prices: tuple[UnitPrice, ...]
    customer_prices: tuple[UnitPrice, ...]
    findings: tuple[Finding, ...]
    model: Model
    flow: Flow
    closure: Closure


def with_findings(plan: Plan, findings: Iterable[Finding]) -> Plan:
    """The plan with what was found on the sheets put first; what says the same with a cell stands once."""
    first = list(findings)
    said = {(finding.rule, finding.message) for finding in first}
    rest = [finding for finding in plan.findings if (finding.rule, finding.message) not in said]
    return replace(plan, findings=tuple(by_gravity([*first, *rest])))
