"""The map's legend as a small picture: shapes and widths say it as well as colours do."""

from collections.abc import Sequence
from decimal import Decimal
from xml.sax.saxutils import escape

from app.parts.map_colours import Colours
from app.parts.map_drawing import THINNEST, WIDEST, Drawing, Number

ROW = 26
TEXT_AT = 38
EDGE = 6
FONTS = "Source Sans, Segoe UI, Helvetica, Arial, sans-serif"
FONT_SIZE = 13
LETTER = 5.9
"""A letter's usual width in pixels at that size."""


def legend(drawing: Drawing, colours: Colours, unit: str, number: Number, width: int = 540) -> str:
    """The legend as SVG, at most this many pixels wide, on a ground of its own to be read on any page."""
    items = [
        (_squares(colours), "depots"),
        (_dot(colours, 6), "customer, sized by its order"),
    ]
    if any(mark.short > 0 for mark in drawing.customers):
        items.append((_ring(colours), "going short, by how much"))
    shapes, widths = len(items), _widths(drawing, unit, number)
    items += [(_stroke(colours, line_width), f"{text} sent") for line_width, text in widths]
    x, y = 0.0, 0
    parts = []
    for place, (shape, text) in enumerate(items):
        wide = TEXT_AT + len(text) * LETTER + 16
        if x and (x + wide > width - 2 * EDGE or place == shapes):
            x, y = 0.0, y + ROW
        words = f'<text x="{TEXT_AT}" y="{ROW / 2 + 4.5}">{escape(text)}</text>'
        parts.append(f'<g transform="translate({x + EDGE:.0f} {y + EDGE})">{shape}{words}</g>')
        x += wide
    height = y + ROW + 2 * EDGE
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width}" height="{height}"'
        f' viewBox="0 0 {width} {height}">'
        f'<rect width="{width}" height="{height}" rx="4" fill="{colours.sea}"/>'
        f'<g fill="{colours.ink}" font-family="{FONTS}" font-size="{FONT_SIZE}">{"".join(parts)}</g></svg>'
    )


def in_words(drawing: Drawing, unit: str, number: Number) -> str:
    """The legend for those who do not see it."""
    short = " A ring marks a customer going short." if any(m.short > 0 for m in drawing.customers) else ""
    widths = ", ".join(text for _, text in _widths(drawing, unit, number))
    lines = f" Lines are wider the more goes: {widths}." if widths else ""
    return f"Legend. Squares are depots, dots are customers, larger the more they ordered.{short}{lines}"


def _widths(drawing: Drawing, unit: str, number: Number) -> Sequence[tuple[float, str]]:
    """Up to three line widths with the round quantities they stand for."""
    most = drawing.largest_flow
    if most <= 0:
        return ()
    widest = drawing.lines[0].width
    steps = [step for step in (_round(most), _round(most / 3), _round(most / 9)) if step > 0]
    told: list[tuple[float, str]] = []
    for step in dict.fromkeys(steps):
        width = min(WIDEST, max(THINNEST, float(step / most) * widest))
        if not told or told[-1][0] - width > 0.5:  # narrower differences are not seen
            told.append((width, f"{number(step)} {unit}"))
    return told


def _round(value: Decimal) -> Decimal:
    """The value rounded down to one leading figure, or to half of one."""
    unit = Decimal(1).scaleb(value.adjusted())
    for factor in (Decimal(5), Decimal(2), Decimal(1)):
        if value >= factor * unit:
            step = factor * unit
            return step.quantize(Decimal(1)) if step == step.to_integral_value() else step.normalize()
    return unit


def _squares(colours: Colours) -> str:
    return "".join(
        f'<rect x="{x}" y="{ROW / 2 - 5}" width="10" height="10" fill="{tone}"/>'
        for x, tone in zip((0, 11, 22), colours.tones, strict=False)
    )


def _dot(colours: Colours, radius: float) -> str:
    return f'<circle cx="16" cy="{ROW / 2}" r="{radius}" fill="{colours.customer}"/>'


def _ring(colours: Colours) -> str:
    return (
        f'<circle cx="16" cy="{ROW / 2}" r="9" fill="none" stroke="{colours.short}" stroke-width="2.4"/>'
        f'<circle cx="16" cy="{ROW / 2}" r="4.5" fill="{colours.customer}"/>'
    )


def _stroke(colours: Colours, width: float) -> str:
    return (
        f'<line x1="2" y1="{ROW / 2}" x2="28" y2="{ROW / 2}" stroke="{colours.customer}"'
        f' stroke-width="{width:.1f}"/>'
    )
