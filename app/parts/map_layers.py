"""A drawing as pydeck layers, without a basemap and without any address to fetch from.

The browser fades what is not picked in the fills and lines of most layer types, down to 40 percent.
What must stay as it is (names, and the flows that are looked at) is therefore drawn as GeoJSON
lines and texts, which it leaves alone.
"""

from collections.abc import Iterable, Sequence
from zlib import crc32

import pydeck

from app.parts.map_colours import Colours, rgba
from app.parts.map_drawing import Drawing, Focus, Line, Mark, Number
from app.parts.map_labels import RING, Label
from app.parts.map_plane import HEIGHT, WIDTH

FONT = '"Source Sans", "Source Sans Pro", sans-serif'
LONGEST_NAME = 60

TOOLTIP_STYLE = {"fontSize": "13px", "lineHeight": "1.35", "borderRadius": "4px", "padding": "6px 9px"}


def shown(text: str) -> str:
    """A name as data that the browser only ever draws.

    Its JSON reader runs texts that begin with '@@=' or '@@#', and the pointer's text replaces {words}
    in braces; neither can happen to what this returns.
    """
    one_line = " ".join(text.split())
    short = one_line if len(one_line) <= LONGEST_NAME else one_line[: LONGEST_NAME - 1] + "…"
    return ("\u2009" if short.startswith("@@") else "") + short.replace("{", "❴").replace("}", "❵")


def layer_ids(drawing: Drawing) -> dict[str, str]:
    """The ids of the layers that can be picked.

    Each ends in a check sum of what is in the layer, so that a pick is forgotten rather than passed on
    to another mark when the figures change.
    """
    return {
        "depots": f"depots-{_sum(mark.names for mark in drawing.depots)}",
        "customers": f"customers-{_sum(mark.names for mark in drawing.customers)}",
        "lines": f"lines-{_sum((line.depot, *line.customers) for line in drawing.lines)}",
    }


def deck(
    drawing: Drawing,
    highlighted: Sequence[Line],
    focus: Focus | None,
    labels: Sequence[Label],
    colours: Colours,
    unit: str,
    number: Number,
) -> pydeck.Deck:
    """The whole map; with a focus, `highlighted` stands out and the rest steps back."""
    ids = layer_ids(drawing)
    made = pydeck.Deck(
        layers=[
            *_ground(drawing, colours),
            _lines(drawing.lines, ids["lines"], colours, 45 if focus else 190, unit, number),
            _highlight(highlighted, colours),
            _customers(drawing.customers, ids["customers"], colours, focus, unit, number),
            _short_rings(drawing.customers, colours),
            _depots(drawing.depots, ids["depots"], colours, focus, unit, number),
            *_labels(labels, colours),
        ],
        views=[pydeck.View(type="OrthographicView", id="plane", controller=True)],
        initial_view_state={"target": [0, 0], "zoom": 0, "minZoom": -1, "maxZoom": 6},
        map_provider=None,
        map_style=None,
        tooltip={
            "text": "{tip}",
            "style": {"backgroundColor": colours.ink, "color": colours.halo, **TOOLTIP_STYLE},
        },
    )
    made.mapbox_key = made.google_maps_key = None  # pydeck takes them from the environment, to send them on
    return made


def _sum(parts: Iterable[tuple[str, ...]]) -> str:
    return f"{crc32(repr(list(parts)).encode()):08x}"


def _ground(drawing: Drawing, colours: Colours) -> list[pydeck.Layer]:
    x, y = 2 * WIDTH, 2 * HEIGHT
    under = drawing.ground
    return [
        pydeck.Layer(
            "PolygonLayer",
            [{"outline": [[-x, -y], [x, -y], [x, y], [-x, y]]}],
            id="sea",
            get_polygon="outline",
            get_fill_color=rgba(colours.sea if under.outlines else colours.land),
            stroked=False,
            pickable=False,
        ),
        pydeck.Layer(
            "PolygonLayer",
            [{"outline": outline} for outline in under.outlines],
            id="land",
            get_polygon="outline",
            get_fill_color=rgba(colours.land),
            get_line_color=rgba(colours.coast),
            get_line_width=1.2,
            line_width_units='"pixels"',
            pickable=False,
        ),
        pydeck.Layer(
            "PathLayer",
            [{"path": line} for line in under.grid],
            id="grid",
            get_path="path",
            get_color=rgba(colours.grid),
            get_width=1,
            width_units='"pixels"',
            pickable=False,
        ),
        pydeck.Layer(
            "TextLayer",
            [{"text": text, "spot": spot} for text, spot in under.grid_labels],
            id="grid-labels",
            get_text="text",
            get_position="spot",
            get_size=11,
            get_color=rgba(colours.faint_ink),
            get_text_anchor='"start"',
            character_set='"auto"',
            font_family=f"'{FONT}'",
            pickable=False,
        ),
    ]


def _lines(
    lines: Sequence[Line], layer_id: str, colours: Colours, alpha: int, unit: str, number: Number
) -> pydeck.Layer:
    rows = [
        {
            "start": line.start,
            "end": line.end,
            "width": line.width,
            "colour": rgba(colours.tones[line.tone], alpha),
            "tip": _tip(
                [f"{line.depot} → {_names(line.customers)}", f"{number(line.quantity)} {unit}", line.label]
            ),
        }
        for line in lines
    ]
    return pydeck.Layer(
        "LineLayer",
        rows,
        id=layer_id,
        get_source_position="start",
        get_target_position="end",
        get_width="width",
        get_color="colour",
        width_units='"pixels"',
        pickable=True,
        auto_highlight=False,
    )


def _highlight(lines: Sequence[Line], colours: Colours) -> pydeck.Layer:
    features = [
        {
            "type": "Feature",
            "geometry": {"type": "LineString", "coordinates": [line.start, line.end]},
            "properties": {"width": line.width + 0.8, "colour": rgba(colours.tones[line.tone])},
        }
        for line in lines
    ]
    return pydeck.Layer(
        "GeoJsonLayer",
        {"type": "FeatureCollection", "features": features},
        id="highlight",
        get_line_color="properties.colour",
        get_line_width="properties.width",
        line_width_units='"pixels"',
        line_cap_rounded=True,
        pickable=False,
    )


def _customers(
    marks: Sequence[Mark], layer_id: str, colours: Colours, focus: Focus | None, unit: str, number: Number
) -> pydeck.Layer:
    rows = []
    for mark in marks:
        alpha = 255 if _in_focus(mark, focus, focus.customers if focus else ()) else 110
        empty = mark.short >= mark.quantity > 0
        rows.append(
            {
                "spot": mark.spot,
                "size": mark.size,
                "fill": rgba(colours.land if empty else colours.customer, alpha),
                "edge": rgba(colours.customer if empty else colours.halo, alpha),
                "tip": _tip([
                    mark.title,
                    f"ordered {number(mark.quantity)} {unit}",
                    f"short {number(mark.short)} {unit}" if mark.short > 0 else "",
                    mark.note,
                ]),
            }
        )  # fmt: skip
    return pydeck.Layer(
        "ScatterplotLayer",
        rows,
        id=layer_id,
        get_position="spot",
        get_radius="size",
        radius_units='"pixels"',
        get_fill_color="fill",
        get_line_color="edge",
        get_line_width=1.2,
        line_width_units='"pixels"',
        stroked=True,
        pickable=True,
    )


def _short_rings(marks: Sequence[Mark], colours: Colours) -> pydeck.Layer:
    return pydeck.Layer(
        "ScatterplotLayer",
        [{"spot": mark.spot, "size": mark.size + RING - 1} for mark in marks if mark.short > 0],
        id="short",
        get_position="spot",
        get_radius="size",
        radius_units='"pixels"',
        get_line_color=rgba(colours.short),
        get_line_width=2.4,
        line_width_units='"pixels"',
        filled=False,
        stroked=True,
        pickable=False,
    )


def _depots(
    marks: Sequence[Mark], layer_id: str, colours: Colours, focus: Focus | None, unit: str, number: Number
) -> pydeck.Layer:
    rows = [
        {
            "spot": mark.spot,
            "fill": rgba(
                colours.tones[mark.tone],
                255 if _in_focus(mark, focus, (focus.depot,) if focus and focus.depot else ()) else 140,
            ),
            "tip": _tip([mark.title, f"available {number(mark.quantity)} {unit}", mark.note]),
        }
        for mark in marks
    ]
    return pydeck.Layer(
        "ColumnLayer",
        rows,
        id=layer_id,
        get_position="spot",
        get_fill_color="fill",
        get_line_color=rgba(colours.halo),
        get_line_width=2,
        line_width_units='"pixels"',
        radius=max((mark.size for mark in marks), default=1.0) * 2**0.5,  # to a corner of the square
        radius_units='"pixels"',
        disk_resolution=4,
        angle=45,
        extruded=False,
        stroked=True,
        pickable=True,
    )


def _in_focus(mark: Mark, focus: Focus | None, names: Sequence[str]) -> bool:
    return focus is None or not names or any(name in names for name in mark.names)


def _labels(labels: Sequence[Label], colours: Colours) -> list[pydeck.Layer]:
    ink = {"depot": colours.ink, "customer": colours.ink, "short": colours.short}
    weights = {"depot": "700", "customer": "400", "short": "600"}
    return [
        pydeck.Layer(
            "GeoJsonLayer",
            {
                "type": "FeatureCollection",
                "features": [
                    {
                        "type": "Feature",
                        "geometry": {"type": "Point", "coordinates": label.spot},
                        "properties": {
                            "text": shown(label.text),
                            "size": label.height,
                            "offset": label.offset,
                            "anchor": label.anchor,
                        },
                    }
                    for label in labels
                    if label.kind == kind
                ],
            },
            id=f"labels-{kind}",
            point_type='"text"',
            get_text="properties.text",
            get_text_size="properties.size",
            get_text_pixel_offset="properties.offset",
            get_text_color=rgba(ink[kind]),
            text_character_set='"auto"',
            text_font_family=f"'{FONT}'",
            text_font_weight=f'"{weights[kind]}"',
            get_text_anchor="properties.anchor",
            text_font_settings={"fontSize": 28},
            text_background=True,
            get_text_background_color=rgba(colours.halo, 200),
            text_background_padding=[3, 0, 3, 1],
            pickable=False,
        )
        for kind in ("customer", "short", "depot")
    ]


def _names(names: Sequence[str]) -> str:
    return names[0] if len(names) == 1 else f"{len(names)} customers around {names[0]}"


def _tip(lines: Sequence[str]) -> str:
    return "\n".join(shown(line) for lines_of in lines if lines_of for line in lines_of.split("\n"))
