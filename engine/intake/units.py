"""Units and currencies as they stand beside figures: what a word means, and exact factors between units."""

import re
from decimal import Decimal
from fractions import Fraction

# How many of the base unit (kg, l, or a thing counted) one unit is. Exact by definition: pound
# 0.45359237 kg (international yard and pound agreement, 1959), short ton 2000 lb, long ton 2240 lb,
# gallons of 3.785411784 l and 4.54609 l; see NIST Special Publication 811, appendix B.
_FACTORS: dict[str, tuple[str, Fraction]] = {
    "kg": ("mass", Fraction(1)),
    "t": ("mass", Fraction(1000)),
    "lb": ("mass", Fraction("0.45359237")),
    "short ton": ("mass", Fraction("907.18474")),
    "long ton": ("mass", Fraction("1016.0469088")),
    "l": ("volume", Fraction(1)),
    "hl": ("volume", Fraction(100)),
    "m3": ("volume", Fraction(1000)),
    "US gallon": ("volume", Fraction("3.785411784")),
    "imperial gallon": ("volume", Fraction("4.54609")),
    "km": ("distance", Fraction(1)),
    "mile": ("distance", Fraction("1.609344")),
    "pallet": ("pallet", Fraction(1)),
    "load": ("load", Fraction(1)),
    "piece": ("piece", Fraction(1)),
    "bag": ("bag", Fraction(1)),
}

_WORDS = {
    "kg": "kg", "kgs": "kg", "kilo": "kg", "kilos": "kg", "kilogram": "kg", "kilograms": "kg",
    "t": "t", "to": "t", "tonne": "t", "tonnes": "t", "metric ton": "t", "metric tons": "t", "mt": "t",
    "lb": "lb", "lbs": "lb", "pound": "lb", "pounds": "lb",
    "short ton": "short ton", "short tons": "short ton", "us ton": "short ton", "us tons": "short ton",
    "long ton": "long ton", "long tons": "long ton",
    "l": "l", "ltr": "l", "litre": "l", "litres": "l", "liter": "l", "liters": "l",
    "hl": "hl", "m3": "m3", "m³": "m3", "cbm": "m3",
    "us gallon": "US gallon", "us gallons": "US gallon", "imperial gallon": "imperial gallon",
    "imperial gallons": "imperial gallon",
    "km": "km", "kms": "km", "kilometre": "km", "kilometres": "km", "kilometer": "km", "kilometers": "km",
    "mile": "mile", "miles": "mile", "mi": "mile",
    "pallet": "pallet", "pallets": "pallet", "plt": "pallet", "plts": "pallet", "pal": "pallet",
    "load": "load", "loads": "load", "truckload": "load", "trip": "load",
    "piece": "piece", "pieces": "piece", "pc": "piece", "pcs": "piece", "unit": "unit", "units": "unit",
    "bag": "bag", "bags": "bag",
}  # fmt: skip

UNCLEAR = {"ton": ("t", "short ton", "long ton"), "tons": ("t", "short ton", "long ton"),
           "gallon": ("US gallon", "imperial gallon"), "gallons": ("US gallon", "imperial gallon"),
           "gal": ("US gallon", "imperial gallon")}  # fmt: skip
"""Words that mean different units in different places: asked about, never guessed."""

_SIGNS = {
    "€": ("EUR",), "£": ("GBP",), "$": ("USD", "CAD", "AUD", "NZD", "SGD", "HKD", "MXN", "CLP"),
    "us$": ("USD",), "a$": ("AUD",), "c$": ("CAD",), "¥": ("JPY", "CNY"), "zł": ("PLN",), "zl": ("PLN",),
    "kr": ("SEK", "NOK", "DKK", "ISK"), "kr.": ("DKK", "SEK", "NOK", "ISK"), "kč": ("CZK",), "ft": ("HUF",),
    "fr.": ("CHF",), "sfr.": ("CHF",), "₹": ("INR",), "₺": ("TRY",), "₩": ("KRW",), "₴": ("UAH",),
    "₪": ("ILS",), "r$": ("BRL",), "lei": ("RON",),
}  # fmt: skip

_CODE_LIST = (
    "AED ARS AUD BGN BHD BRL CAD CHF CLP CNY COP CZK DKK EGP EUR GBP GHS HKD HUF IDR ILS INR ISK JPY KES "
    "KRW KWD MAD MXN MYR NGN NOK NZD PEN PHP PLN RON RSD RUB SAR SEK SGD THB TND TRY TWD UAH USD UYU VND "
    "XAF XOF ZAR"
)
_CODES = frozenset(_CODE_LIST.split())
_COUNTED = re.compile(r"(\d{1,3}(?:[., ]\d{3})*|\d+)\s*×?\s*([a-z³]+)")


def unit_of(word: str) -> str | None:
    """The unit a word stands for, None where it is no unit that is known or is an unclear one."""
    plain = " ".join(word.casefold().rstrip(".").split())
    if plain[:1].isdigit():
        return _counted_unit(plain)
    return _WORDS.get(plain)


def _counted_unit(word: str) -> str | None:
    """A number of a unit, such as 100 kg, by which rates are quoted; '000 stands for thousands."""
    found = _COUNTED.fullmatch(word)
    unit = _WORDS.get(found[2]) if found else None
    if found is None or unit not in _FACTORS:
        return None
    number = int(re.sub(r"[., ]", "", found[1])) or 1000
    if number == 1000 and unit == "kg":
        return "t"
    return unit if number == 1 else f"{number} {unit}"


def _sized(unit: str) -> tuple[str, Fraction] | None:
    """What a unit measures, and how many of the base unit it is."""
    number, _, plain = unit.partition(" ")
    if number.isdigit() and plain in _FACTORS:
        kind, size = _FACTORS[plain]
        return kind, size * int(number)
    return _FACTORS.get(unit)


def plain_unit(word: str) -> str:
    """A unit by its symbol where it has one ('tonnes' is t), else as it was typed."""
    unit = unit_of(word) or ""
    return unit if len(unit) <= 2 and unit else word


def unclear_unit(word: str) -> tuple[str, ...]:
    """What a word such as 'ton' may mean, empty where it is clear or no unit at all."""
    return UNCLEAR.get(word.casefold().strip(" ."), ())


def same_unit(first: str, second: str) -> bool:
    """Whether two words mean one unit; words that are not known are compared as they stand."""
    known = unit_of(first), unit_of(second)
    return known[0] == known[1] if all(known) else first.casefold().strip() == second.casefold().strip()


def factor(source: str, target: str, pallet: Fraction | None = None) -> Fraction | None:
    """How many `target` one `source` is, exactly; None where the two do not measure the same thing.

    pallet: what a pallet weighs in kg, where that is known
    """
    known = unit_of(source) or source, unit_of(target) or target
    sizes = [("mass", pallet) if unit == "pallet" and pallet is not None else _sized(unit) for unit in known]
    if sizes[0] is None or sizes[1] is None or sizes[0][0] != sizes[1][0]:
        return None
    return sizes[0][1] / sizes[1][1]


def times(number: Decimal, by: Fraction) -> Decimal | None:
    """`number` times a fraction, None where the result has no end as a decimal."""
    exact = Fraction(number) * by
    denominator, places = exact.denominator, 0
    for prime in (2, 5):
        count = 0
        while denominator % prime == 0:
            denominator //= prime
            count += 1
        places = max(places, count)
    if denominator != 1:
        return None
    whole = int(exact * 10**places)
    return Decimal((whole < 0, tuple(map(int, str(abs(whole)))), -places))


def currencies_of(word: str) -> tuple[str, ...]:
    """The currencies that a sign or code may stand for, as codes of ISO 4217; empty where it is none."""
    plain = word.strip()
    if plain.upper() in _CODES:
        return (plain.upper(),)
    return _SIGNS.get(plain.casefold(), ())
