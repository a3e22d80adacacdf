"""What a plan comes to beside its shipments: what has gone, what is short and unsent, remarks on it."""

from engine.exact import canonical, to_decimal
from engine.findings import Finding, Severity
from engine.money import minor_places, round_half_up
from engine.planning.gone import cost_of, key_of
from engine.planning.model import Integers, Model
from engine.planning.plan import Shipment, Short, Unsent
from engine.planning.shortage import shortages
from engine.week import Week


def gone_shipments(week: Week) -> tuple[Shipment, ...]:
    """What has gone, at the rates it went at."""
    minor = minor_places(week.rules.currency)
    found = []
    for one in week.gone.values():
        cost = cost_of(one)
        found.append(
            Shipment(key_of(one), one.quantity, one.rate, cost, round_half_up(cost, minor), gone=one.name)
        )
    return tuple(found)


def short_of(model: Model, quantity: Integers) -> tuple[Short, ...]:
    """What goes short, customer by customer; `quantity` is what goes on each row of the model."""
    found = []
    for j, row in enumerate(model.short_rows.tolist()):
        missing, charge = int(quantity[row]), int(model.money[row])
        if missing:
            found.append(
                Short(
                    model.customers[j],
                    to_decimal(missing, model.quantity_places),
                    to_decimal(charge, model.money_places),
                    to_decimal(missing * charge, model.quantity_places + model.money_places),
                )
            )
    return tuple(found)


def unsent_of(model: Model, quantity: Integers) -> tuple[Unsent, ...]:
    """What stays, depot by depot; `quantity` is what goes on each row of the model."""
    found = []
    for i, (stay, must) in enumerate(zip(model.stay_rows.tolist(), model.must_row.tolist(), strict=True)):
        must_stay = int(quantity[must]) if must >= 0 else 0
        kept, charge = int(quantity[stay]) + must_stay, int(model.money[stay])
        if kept:
            found.append(
                Unsent(
                    model.depots[i],
                    to_decimal(kept, model.quantity_places),
                    to_decimal(charge, model.money_places),
                    to_decimal(kept * charge, model.quantity_places + model.money_places),
                    to_decimal(must_stay, model.quantity_places),
                )
            )
    return tuple(found)


def about_the_plan(
    week: Week, model: Model, short: tuple[Short, ...], unsent: tuple[Unsent, ...]
) -> tuple[Finding, ...]:
    """Remarks that only the plan shows."""
    found = []
    unpriced = [
        one.customer
        for one in short
        if week.customers[one.customer].charge_if_short is None and week.rules.charge_if_short is None
    ]
    if unpriced:
        found.append(
            Finding(
                Severity.CHECK,
                "freight alone decided who is short",
                f"{_listed(unpriced)} went short and no charge if short is given: freight alone decided who.",
                "Give a charge if short to the customers or to the week if that is not what you want.",
            )
        )
    unit = week.rules.unit
    found.extend(
        Finding(
            Severity.CHECK,
            "short",
            group.sentence(unit),
            "Add stock, open a lane or raise a limit; or lower the orders.",
        )
        for group in (shortages(model) if short else ())
        if group.depots or group.limited  # who is reached by nothing has a finding of the figures already
    )
    found.extend(
        Finding(
            Severity.CHECK,
            "must move not reached",
            f"{one.depot} keeps {canonical(one.must_move)} {unit} that must move: "
            "orders and rates leave no way to send it.",
            "Raise an order, open a lane, or lower Must move.",
        )
        for one in unsent
        if one.must_move
    )
    return tuple(found)


def _listed(names: list[str]) -> str:
    """The first five names and how many there are."""
    shown = ", ".join(names[:5])
    return shown if len(names) <= 5 else f"{shown} and {len(names) - 5} more"
