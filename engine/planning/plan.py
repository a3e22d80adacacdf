"""A plan: shipments, what is short, what is unsent, costs, prices and the proof, all in exact decimals."""

from collections.abc import Iterable
from dataclasses import dataclass, replace
from decimal import Decimal
from typing import Literal

from engine.exact import Integers
from engine.figures import Basis, RateKey
from engine.findings import Finding, by_gravity
from engine.loads import LoadFlow
from engine.network import Flow
from engine.network.closure import Closure
from engine.planning.model import Model
from engine.week import Week

Status = Literal["met", "short"]


@dataclass(frozen=True, slots=True)
class Shipment:
    """A quantity on a rate row.

    `rate` is with the surcharge, never rounded: per load where `per` says so, else per unit. `cost` is
    exact and has everything in it: trip minimum, and `once`, the charge per use (None: there is none).
    `payable` is `cost` rounded half up to the currency's minor unit. `loads` is how many vehicles of
    `load_size` it takes, None where nothing says what a load is. `gone` is the name of a quantity that has
    left already, empty for what is still to go.
    """

    key: RateKey
    quantity: Decimal
    rate: Decimal
    cost: Decimal
    payable: Decimal
    loads: int | None = None
    held: bool = False
    gone: str = ""
    per: Basis = "unit"
    load_size: Decimal | None = None
    once: Decimal | None = None

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
class Opening:
    """A depot that is opened this week, and what that costs once."""

    depot: str
    charge: Decimal


@dataclass(frozen=True, slots=True)
class Proof:
    """What the integer proof found: the cost that must be paid at least, and how far the plan is above it.

    `exact` says that no plan is better; `rounding` is freight payable less exact freight.
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


@dataclass(frozen=True, slots=True)
class Missed:
    """An aim before cost that is not proved to be served best: units that count, and the fewest proved.

    aim: 'short' or 'must move'; priority: of the customers, empty for 'must move'
    """

    aim: str
    priority: str
    units: Decimal
    at_least: Decimal


@dataclass(frozen=True, eq=False)
class Wholeness:
    """How a plan with whole loads was found, and what it costs that vehicles are whole.

    loads: the same answer in integers, which a later search may start from
    divisible_cost: what the network plan of the same week costs, rates per load spread over the load size,
        without any of the rules on whole loads; less is paid only by sending parts of vehicles
    divisible_short: what goes short in that plan
    missed: aims that are not proved to be served best
    """

    loads: LoadFlow
    divisible_cost: Decimal
    divisible_short: Decimal
    missed: tuple[Missed, ...] = ()

    def how(self, proved: bool) -> str:
        """How a plan was found that is proved, or is not, as a sentence."""
        found = self.loads
        if found.how == "network":
            return "Every quantity is whole loads, so it was solved as a network, exactly."
        seconds = f"{found.seconds:.0f} s" if found.seconds >= 1 else "less than a second"
        if proved:
            return f"Searched by whole loads until no better plan could exist ({seconds})."
        why = "the time was up" if found.ended == "time limit" else "it was stopped"
        return f"Searched by whole loads until {why} ({seconds}); a better plan may exist."


@dataclass(frozen=True, eq=False)
class Plan:
    """The answer to a week. `total_cost` is what is minimised: exact freight and all charges.

    `model` has the rows of the week in integers, and `quantity` what goes on each of them. `flow` and
    `closure` are the network plan and the chains of exchanges in it, for the reasons to ask further. With
    whole loads (`whole` is there) that network plan is another one, to compare with: reasons are withheld.
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
    quantity: Integers
    openings: tuple[Opening, ...] = ()
    opening_cost: Decimal = Decimal(0)
    whole: Wholeness | None = None


def with_findings(plan: Plan, findings: Iterable[Finding]) -> Plan:
    """The plan with what was found on the sheets put first; what says the same with a cell stands once."""
    first = list(findings)
    said = {(finding.rule, finding.message) for finding in first}
    rest = [finding for finding in plan.findings if (finding.rule, finding.message) not in said]
    return replace(plan, findings=tuple(by_gravity([*first, *rest])))
