"""Figures and names as text for the screen: numbers in the desk's style, names that stay plain text."""

import re
from decimal import Decimal

from engine.exact import canonical
from engine.money import minor_places, round_half_up

_PUNCTUATION = re.compile(r"([!-/:-@\[-`{-~])")
_WOULD_LINK = re.compile(r"\\[:@]|\bwww(?=\\\.)", re.IGNORECASE)
_WORD_JOINER = "\u2060"


def plain(text: str) -> str:
    """A name or note that a person typed, safe inside Markdown: every mark is escaped, no code forms."""
    escaped = _PUNCTUATION.sub(r"\\\1", " ".join(text.split()))
    # Neither codes like :icon: nor bare addresses can be escaped: a word joiner, unseen, breaks them.
    return _WOULD_LINK.sub(rf"\g<0>{_WORD_JOINER}", escaped)


def number(value: Decimal, mark: str = ".", places: int | None = None) -> str:
    """A number with thousands apart; `places` fixes its decimals, None shows what there is."""
    digits = canonical(value if places is None else round_half_up(value, places))
    if places:
        whole, _, rest = digits.partition(".")
        digits = f"{whole}.{rest.ljust(places, '0')}"
    sign, digits = ("\u2212", digits[1:]) if digits.startswith("-") else ("", digits)
    whole, point, rest = digits.partition(".")
    grouped = f"{int(whole):,}"
    if mark == ",":
        grouped, point = grouped.replace(",", "."), point.replace(".", ",")
    return f"{sign}{grouped}{point}{rest}"


def money(value: Decimal, currency: str, mark: str = ".") -> str:
    """An amount rounded half up to the currency's minor unit."""
    return f"{number(value, mark, minor_places(currency))} {currency}"


def amount(value: Decimal, currency: str, mark: str = ".") -> str:
    """The same without the currency, for a column that has it in its heading."""
    return number(value, mark, minor_places(currency))


def quantity(value: Decimal, unit: str, mark: str = ".") -> str:
    return f"{number(value, mark)} {unit}"


def counted(count: int, one: str, many: str | None = None) -> str:
    """1 depot, 2 depots."""
    return f"{count:,} {one if count == 1 else many or one + 's'}"
