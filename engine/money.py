"""How many decimal places a currency is paid in, and rounding to them once."""

from decimal import ROUND_HALF_UP, Context, Decimal
from fractions import Fraction

USUAL_PLACES = 2
PER_UNIT_PLACES = 4
"""Decimal places of money by unit of a quantity."""

MINOR_PLACES = {
    "BHD": 3, "BIF": 0, "CLF": 4, "CLP": 0, "DJF": 0, "GNF": 0, "IQD": 3, "ISK": 0, "JOD": 3, "JPY": 0,
    "KMF": 0, "KRW": 0, "KWD": 3, "LYD": 3, "OMR": 3, "PYG": 0, "RWF": 0, "TND": 3, "UGX": 0, "UYI": 0,
    "UYW": 4, "VND": 0, "VUV": 0, "XAF": 0, "XOF": 0, "XPF": 0,
}  # fmt: skip
"""Currencies that are not paid in hundredths (ISO 4217 list one, as published on 2026-01-01)."""

PAID_IN_HUNDREDTHS = frozenset((
    "AED", "AUD", "BRL", "CAD", "CHF", "CNY", "COP", "CZK", "DKK", "EGP", "EUR", "GBP",
    "GEL", "HKD", "HUF", "IDR", "ILS", "INR", "KES", "KZT", "LKR", "MAD", "MDL", "MKD",
    "MXN", "MYR", "NGN", "NOK", "NZD", "PEN", "PHP", "PKR", "PLN", "QAR", "RON", "RSD",
    "SAR", "SEK", "SGD", "THB", "TRY", "TWD", "UAH", "USD", "UYU", "UZS", "ZAR",
))  # fmt: skip
"""Some currencies of two places that a desk is likely to name (ISO 4217 list one; from memory, not all)."""

_ROUNDING = Context(prec=200, rounding=ROUND_HALF_UP)


def minor_places(currency: str) -> int:
    """How many decimal places amounts in `currency` (three letters of ISO 4217) are paid in.

    Any code that is not listed counts as paid in hundredths; `is_known` says whether that is a guess.
    """
    return MINOR_PLACES.get(_code(currency), USUAL_PLACES)


def is_known(currency: str) -> bool:
    """Whether `minor_places` goes by a listed currency rather than by the usual two places."""
    code = _code(currency)
    return code in MINOR_PLACES or code in PAID_IN_HUNDREDTHS


def round_half_up(exact: Decimal, places: int) -> Decimal:
    """`exact` rounded to `places` decimal places, halves away from zero: 2.345 is 2.35, -2.345 is -2.35.

    Raises ValueError for NaN and infinity.
    """
    if not exact.is_finite():
        raise ValueError(f"{exact} is no amount of money: only an ordinary number can be rounded.")
    return exact.quantize(Decimal((0, (1,), -places)), context=_ROUNDING)


def per_unit(money: Decimal, quantity: Decimal, places: int = PER_UNIT_PLACES) -> Decimal | None:
    """Money by unit of a quantity, rounded half up once; None where the quantity is 0."""
    if not quantity:
        return None
    shifted = Fraction(money) / Fraction(quantity) * 10**places
    whole = (2 * abs(shifted.numerator) + shifted.denominator) // (2 * shifted.denominator)
    return Decimal(whole if shifted >= 0 else -whole).scaleb(-places, _ROUNDING)


def _code(currency: str) -> str:
    return currency.strip().upper()
