"""Headings as the trade writes them, and the column of the figures that each stands for.

A heading is compared without case, punctuation, unit and currency: "RATE (EUR/t)" is Rate.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache

from engine.columns import (
    CUSTOMER_COLUMNS,
    DEPOT_COLUMNS,
    GONE_COLUMNS,
    HAULIER_COLUMNS,
    HOLD_HEADINGS,
    RATE_COLUMNS,
    RULE_COLUMNS,
    Column,
    Kind,
)
from engine.intake.names import folded
from engine.intake.units import currencies_of, unclear_unit, unit_of

HOLD_COLUMN = Column(HOLD_HEADINGS[0], "hold", Kind.QUANTITY, "What a dispatcher fixed on the row")
HOLD_REASON_COLUMN = Column(HOLD_HEADINGS[1], "hold_reason", Kind.TEXT, "Why it was fixed")
RULE_COLUMN = Column("Rule", "rule", Kind.TEXT, "Which setting", needed=True)
VALUE_COLUMN = Column("Value", "value", Kind.TEXT, "What it is set to", needed=True)

COLUMNS_OF: Mapping[str, tuple[Column, ...]] = {
    "depots": DEPOT_COLUMNS,
    "customers": CUSTOMER_COLUMNS,
    "rates": (*RATE_COLUMNS, HOLD_COLUMN, HOLD_REASON_COLUMN),
    "rules": (RULE_COLUMN, VALUE_COLUMN),
    "gone": GONE_COLUMNS,
    "hauliers": HAULIER_COLUMNS,
}
"""The columns that a sheet of each table may have."""

TITLES = {
    "depots": "Depots",
    "customers": "Customers",
    "rates": "Rates",
    "rules": "Rules",
    "gone": "Gone",
    "hauliers": "Hauliers",
}

PLAN_HEADINGS = frozenset(
    {"send", "sent", "short", "unsent", "delivered", "payable", "freight payable", "one more", "one less"}
)
"""Headings of a plan that was handed out: a sheet with one of them holds results, never figures."""

PRODUCT_WORDS = frozenset({
    "product", "products", "product name", "material", "item", "article", "commodity", "grade", "goods",
})  # fmt: skip
"""Headings of a column that names the product of each row."""

_DEPOT_WORDS = (
    "depot|depots|depot name|from|from depot|origin|source|site|warehouse|plant|silo|terminal|"
    "loading point|loading place|ship from|supplier|supply point"
)
_CUSTOMER_WORDS = (
    "customer|customers|customer name|to|to customer|destination|dest|consignee|client|ship to|deliver to|"
    "delivery point|delivery place|unloading point|buyer|receiver|drop|account|sold to"
)
_HAULIER_WORDS = (
    "haulier|hauliers|haulage company|carrier|carriers|transporter|transport company|forwarder|contractor|"
    "vendor|trucker|hauler"
)
_LOAD_SIZE_WORDS = "load size|load|size of load|truck size|vehicle size|payload|full load|capacity per load"
_WORDS: dict[str, dict[str, str]] = {
    "depots": {
        "name": _DEPOT_WORDS + "|name|location",
        "available": (
            "available|availability|stock|in stock|stock on hand|on hand|supply|can send|capacity|"
            "available stock|available this week|quantity available|qty available|available quantity|"
            "available qty"
        ),
        "must_move": "must move|must go|to clear|clear|minimum out|must send|must leave",
        "charge_if_unsent": (
            "charge if unsent|unsent charge|storage charge|storage cost|storage|holding cost|"
            "cost if kept|demurrage"
        ),
        "loads_a_day": (
            "loads a day|loads per day|loads day|daily loads|vehicles a day|trucks a day|"
            "trucks per day|loading slots|slots a day"
        ),
        "opening_charge": "opening charge|opening cost|charge for opening|charge to open|cost of opening",
        "latitude": "latitude|lat|y",
        "longitude": "longitude|long|lon|lng|x",
    },
    "customers": {
        "name": _CUSTOMER_WORDS + "|name|location",
        "ordered": (
            "ordered|order|orders|demand|requirement|required|requested|wanted|needs|need|quantity|"
            "qty|order quantity|order qty|quantity ordered|qty ordered|ordered quantity|ordered qty|"
            "weekly order|volume"
        ),
        "charge_if_short": (
            "charge if short|short charge|shortage charge|shortage cost|penalty|charge when short"
        ),
        "priority": "priority|prio|class|rank",
        "one_depot": "one depot|single depot|single source|one source|only depot|depot only",
        "may_decline": "may decline|can decline|optional|may refuse",
        "smallest_drop": (
            "smallest drop|minimum drop|min drop|smallest delivery|minimum delivery|min delivery|"
            "minimum order|min order"
        ),
        "number": (
            "order number|order no|order nr|order id|order ref|order reference|reference|ref|po|"
            "po number|po no|purchase order|order #"
        ),
        "day": "day|delivery day|delivery date|date|due|due date|deliver on|wanted on",
        "latitude": "latitude|lat|y",
        "longitude": "longitude|long|lon|lng|x",
    },
    "rates": {
        "depot": _DEPOT_WORDS,
        "customer": _CUSTOMER_WORDS,
        "rate": (
            "rate|rates|freight rate|freight|price|tariff|cost|haulage|haulage rate|transport cost|"
            "unit cost|unit rate|unit price|freight cost|charge|quote|quoted rate"
        ),
        "per": "per|basis|rate basis|charged per|unit or load|uom|unit",
        "haulier": _HAULIER_WORDS,
        "at_least": "at least|minimum|min|minimum quantity|min quantity|min qty|minimum qty|not under",
        "at_most": (
            "at most|maximum|max|maximum quantity|max quantity|max qty|maximum qty|limit|"
            "weekly limit|lane limit|not over|cap|lane capacity"
        ),
        "closed": "closed|lane closed|blocked|shut|lane shut|not allowed",
        "load_size": _LOAD_SIZE_WORDS,
        "trip_minimum": (
            "trip minimum|minimum charge|min charge|minimum per trip|minimum per load|trip min|"
            "minimum freight"
        ),
        "charge_per_use": ("charge per use|fixed charge|fixed cost|charge once|opening charge|set up charge"),
        "surcharge": (
            "surcharge %|surcharge|fuel surcharge|fuel surcharge %|fuel %|fuel|baf|diesel surcharge|"
            "diesel surcharge %"
        ),
        "valid_from": "valid from|from date|valid|start date|effective|effective from|valid as of|since",
        "km": "km|distance|kilometres|kilometers|distance km|miles",
        "hold": "hold|held",
        "hold_reason": "hold reason|reason for hold|reason",
    },
    "gone": {
        "name": "load|load number|load no|ticket|ticket number|delivery note|trip number",
        "depot": _DEPOT_WORDS,
        "customer": _CUSTOMER_WORDS,
        "haulier": "haulier|carrier|transporter|transport company|contractor",
        "quantity": "gone|has gone|gone already|loaded|left",
        "rate": "paid per unit|paid|rate paid|rate",
        "day": "day gone|gone on|left on|day|date",
    },
    "hauliers": {
        "name": _HAULIER_WORDS + "|name",
        "at_most": (
            "at most|maximum|max|limit|weekly limit|most a week|at most a week|maximum a week|max a week|"
            "capacity|weekly capacity|capacity a week|cap"
        ),
        "load_size": _LOAD_SIZE_WORDS,
    },
    "rules": {
        "rule": "rule|rules|setting|settings|parameter|option",
        "value": "value|values|set to",
    },
}
_RULE_WORDS = {
    "week": "week|period|name of week|week name",
    "unit": "unit|units|unit of quantity|quantity unit|uom",
    "currency": "currency|money|ccy",
    "fuel_surcharge": ("fuel surcharge %|fuel surcharge|surcharge|surcharge %|fuel|fuel %|diesel surcharge"),
    "load_size": "load size|load|vehicle size|truck size|payload",
    "when_short": "when short|if short|short rule|what when short",
    "charge_if_short": "charge if short|short charge|shortage charge|penalty",
    "step": "step|rounding step|round to|smallest step",
    "days": "days|loading days|working days|days a week|loading days a week",
}

_FIELDS = {
    table: {word: field for field, words in fields.items() for word in words.split("|")}
    for table, fields in _WORDS.items()
}
_RULES = {word: field for field, words in _RULE_WORDS.items() for word in words.split("|")}
_ALL_WORDS = frozenset(word for fields in _FIELDS.values() for word in fields) | PLAN_HEADINGS


_COUNTED = re.compile(
    r"(?<![\w.,])'?(\d[\d., ]*?)\s*(kgs?|kilos?|t|to|tonnes?|lbs?|l|ltr|lit(?:re|er)s?|pallets?)\b"
)
"""A number before a unit: the rate is per so many of it."""


@dataclass(frozen=True, slots=True)
class Heading:
    """A heading cut into the words that name its column and the unit and currency that stand beside."""

    words: str
    unit: str = ""
    currency: str = ""
    per_load: bool = False
    unclear: str = ""


@lru_cache(maxsize=65536)
def heading_of(text: str) -> Heading:
    """A heading's own words apart from the unit and currency in it."""
    plain = _COUNTED.sub(lambda m: f"{re.sub('[., ]', '', m[1])}×{m[2]}", folded(text).strip(" :*."))
    if plain in _ALL_WORDS or plain in _RULES:
        return Heading(plain)
    bracketed = re.findall(r"[(\[{]([^)\]}]*)[)\]}]", plain)
    bare = re.sub(r"[(\[{][^)\]}]*[)\]}]", " ", plain)
    bare, comma, behind = bare.partition(",")
    marks = [*bracketed, behind] if comma else list(bracketed)
    words = re.sub(r"[_\-–:*.#]+|\s-\s", " ", bare).split()
    kept = len(words)
    while kept > 1 and " ".join(words[:kept]) not in _ALL_WORDS and _is_mark(words[kept - 1]):
        kept -= 1
    marks.append(" ".join(words[kept:]))
    unit = currency = unclear = ""
    per_load = False
    for piece in re.split(r"[/\s]+|\bper\b|\bin\b", " ".join(marks)):
        if unit_of(piece) == "load":
            per_load = True
        elif unclear_unit(piece):
            unclear = piece
        elif unit_of(piece) and unit_of(piece) != "unit":
            unit = unit_of(piece) or ""
        elif currencies_of(piece):
            currency = piece
    return Heading(" ".join(words[:kept]), unit, currency, per_load, unclear)


def _is_mark(word: str) -> bool:
    pieces = [piece for piece in re.split(r"/", word) if piece]
    known = [
        unit_of(piece) or currencies_of(piece) or unclear_unit(piece) or piece == "%" for piece in pieces
    ]
    return word in ("in", "per", "/") or (bool(known) and all(known))


def is_unit_mark(text: str) -> bool:
    """Whether a text is nothing but a unit or a currency, alone or as EUR/t."""
    pieces = [piece for piece in re.split(r"[/\s]+|\bper\b", folded(text).strip(" ()[]")) if piece]
    return bool(pieces) and all(_is_mark(piece) and piece not in ("%", "unit", "units") for piece in pieces)


def is_heading_word(text: str) -> bool:
    """Whether a cell's text is any heading that is known."""
    return heading_of(text).words in _ALL_WORDS


def is_plan_heading(text: str) -> bool:
    """Whether a heading belongs to a plan that was handed out."""
    return heading_of(text).words in PLAN_HEADINGS


def field_of(table: str, text: str, taught: Mapping[str, str] | None = None) -> str | None:
    """The field that a heading stands for in a table; `taught` has the desk's own words, folded."""
    if taught:
        field = taught.get(folded(text))
        if field is not None:
            return field or None
    return _FIELDS[table].get(heading_of(text).words)


def column_of(table: str, field: str) -> Column:
    """The column of a table that fills a field."""
    return next(column for column in COLUMNS_OF[table] if column.field == field)


def rule_of(text: str) -> Column | None:
    """The rule that a name on *Rules* stands for."""
    field = _RULES.get(folded(text).strip(" :*.")) or _RULES.get(heading_of(text).words)
    return None if field is None else next(column for column in RULE_COLUMNS if column.field == field)


def names_what(text: str) -> str:
    """Whether a corner or heading speaks of 'depot', of 'customer', of neither or both ('')."""
    words = heading_of(text).words
    first = re.split(r"[\\/|>]| and | by | v ", folded(text))[0].strip(" :")
    for word in (words, first):
        if word in _FIELDS["rates"] and _FIELDS["rates"][word] in ("depot", "customer"):
            return _FIELDS["rates"][word]
    return ""
