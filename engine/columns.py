"""The columns of the figures: the heading a spreadsheet carries and the field it fills.

Whatever reads, writes or shows figures goes by these lists, so that a column is named once.
"""

from dataclasses import dataclass
from enum import Enum


class Kind(Enum):
    """How the text of a cell is understood."""

    NAME = "name"
    TEXT = "text"
    QUANTITY = "quantity"  # in the week's unit, not negative
    RATE = "rate"  # money per unit or load, any sign
    CHARGE = "charge"  # money, any sign
    PRICE = "price"  # money, not negative
    PERCENT = "percent"
    COUNT = "count"
    DISTANCE = "distance"  # kilometres, not negative
    LATITUDE = "latitude"
    LONGITUDE = "longitude"
    YES = "yes"
    PRIORITY = "priority"
    ONE_DEPOT = "one depot"
    BASIS = "basis"
    DATE = "date"


@dataclass(frozen=True, slots=True)
class Column:
    """A heading, the field it fills, how it is understood, and what to say of it in one line."""

    heading: str
    field: str
    kind: Kind
    about: str
    needed: bool = False


DEPOT_COLUMNS = (
    Column("Depot", "name", Kind.NAME, "Where goods are sent from", needed=True),
    Column("Available", "available", Kind.QUANTITY, "What it can send in the whole week", needed=True),
    Column("Must move", "must_move", Kind.QUANTITY, "The part of Available that should leave this week"),
    Column("Charge if unsent", "charge_if_unsent", Kind.CHARGE, "Cost per unit kept; negative is a credit"),
    Column("Loads a day", "loads_a_day", Kind.COUNT, "How many vehicles it can load in a day"),
    Column("Opening charge", "opening_charge", Kind.PRICE, "Paid once if anything is sent this week"),
    Column("Latitude", "latitude", Kind.LATITUDE, "Degrees, north is positive"),
    Column("Longitude", "longitude", Kind.LONGITUDE, "Degrees, east is positive"),
)

CUSTOMER_COLUMNS = (
    Column("Customer", "name", Kind.NAME, "Who ordered; rows of one customer are added up", needed=True),
    Column("Ordered", "ordered", Kind.QUANTITY, "What was ordered for the whole week", needed=True),
    Column(
        "Charge if short", "charge_if_short", Kind.PRICE, "Cost per unit not delivered; blank: the week's"
    ),
    Column("Priority", "priority", Kind.PRIORITY, "A is served before B before C; blank counts as C"),
    Column("One depot", "one_depot", Kind.ONE_DEPOT, "yes: a single depot serves; a depot's name: that one"),
    Column("May decline", "may_decline", Kind.YES, "yes: served only where that costs less than being short"),
    Column("Smallest drop", "smallest_drop", Kind.QUANTITY, "A delivery is nothing, or at least this"),
    Column("Order number", "number", Kind.TEXT, "Kept for the loading lists"),
    Column("Day", "day", Kind.TEXT, "Delivery day, kept for the loading lists"),
    Column("Latitude", "latitude", Kind.LATITUDE, "Degrees, north is positive"),
    Column("Longitude", "longitude", Kind.LONGITUDE, "Degrees, east is positive"),
)

RATE_COLUMNS = (
    Column("Depot", "depot", Kind.NAME, "From", needed=True),
    Column("Customer", "customer", Kind.NAME, "To", needed=True),
    Column("Rate", "rate", Kind.RATE, "What the haulier charges, before surcharge", needed=True),
    Column("Per", "per", Kind.BASIS, "unit or load; blank is unit"),
    Column("Haulier", "haulier", Kind.TEXT, "Several hauliers on one lane are alternatives"),
    Column("At least", "at_least", Kind.QUANTITY, "This much goes on the row, whatever it costs"),
    Column("At most", "at_most", Kind.QUANTITY, "No more than this goes on the row"),
    Column("Closed", "closed", Kind.YES, "yes: nothing goes on the row"),
    Column(
        "Load size",
        "load_size",
        Kind.QUANTITY,
        "One vehicle carries it; blank: the haulier's, or the week's",
    ),
    Column("Trip minimum", "trip_minimum", Kind.PRICE, "The least a load is charged"),
    Column("Charge per use", "charge_per_use", Kind.PRICE, "Paid once in the week if the row is used at all"),
    Column("Surcharge %", "surcharge", Kind.PERCENT, "On top of the rate; blank takes the week's"),
    Column("Valid from", "valid_from", Kind.DATE, "First day of the rate"),
    Column("Km", "km", Kind.DISTANCE, "Length of the lane"),
)

HAULIER_COLUMNS = (
    Column("Haulier", "name", Kind.NAME, "As it is called on Rates", needed=True),
    Column("At most", "at_most", Kind.QUANTITY, "What it carries in the whole week, over all its lanes"),
    Column("Load size", "load_size", Kind.QUANTITY, "What one of its vehicles carries; blank: the week's"),
)
"""An optional sheet: hauliers of whom there is something to say."""

RULE_COLUMNS = (
    Column("Week", "week", Kind.TEXT, "What the week is called"),
    Column("Unit", "unit", Kind.TEXT, "What quantities are counted in: t, kg, pallets …"),
    Column("Currency", "currency", Kind.TEXT, "Three letters of ISO 4217"),
    Column("Fuel surcharge %", "fuel_surcharge", Kind.PERCENT, "On every rate that has none of its own"),
    Column("Load size", "load_size", Kind.QUANTITY, "What one vehicle carries"),
    Column("When short", "when_short", Kind.TEXT, "charge, priority or even share"),
    Column(
        "Charge if short", "charge_if_short", Kind.PRICE, "Per unit, where a customer has none of its own"
    ),
    Column("Step", "step", Kind.QUANTITY, "What even shares are rounded down to, a pallet for instance"),
    Column("Days", "days", Kind.COUNT, "Loading days of the week, for Loads a day; blank is 5"),
)
"""The rows of the *Rules* sheet (its own headings are Rule and Value)."""

HOLD_HEADINGS = ("Hold", "Hold reason")
"""On *Rates* in a workbook we wrote: what a dispatcher fixed on the row, and why."""

GONE_COLUMNS = (
    Column("Load", "name", Kind.NAME, "What tells it from others, a load number for instance", needed=True),
    Column("Depot", "depot", Kind.NAME, "Where it left", needed=True),
    Column("Customer", "customer", Kind.NAME, "Where it went", needed=True),
    Column("Haulier", "haulier", Kind.TEXT, "Who carried it"),
    Column("Gone", "quantity", Kind.QUANTITY, "What has left", needed=True),
    Column("Paid per unit", "rate", Kind.RATE, "By the rate of its day, surcharge included"),
    Column("Day gone", "day", Kind.DATE, "When it left"),
)
"""What has gone: facts that count against Ordered and Available, which state the whole week."""

SEND = Column("Send", "quantity", Kind.QUANTITY, "What goes on the row this week", needed=True)
"""The quantity of a plan: a sheet with this heading is a plan and never read as rates."""
