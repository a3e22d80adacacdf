"""The map says what the figures say: placed right, nothing lost, names never run, nothing fetched."""

import json
import random
from decimal import Decimal
from itertools import combinations
from pathlib import Path
from xml.etree import ElementTree

import openpyxl
import pytest
from streamlit.testing.v1 import AppTest

import sample_data
from app.parts import flow_map as widget
from app.parts.coast import around_here, coasts, on_land
from app.parts.flow_map import Focus, MapFlow, MapPoint, flows_frame, plain, remarks, summary
from app.parts.map_colours import DARK, LIGHT
from app.parts.map_drawing import MOST_LINES, MOST_MARKS, drawing
from app.parts.map_labels import placed
from app.parts.map_layers import deck, layer_ids, shown
from app.parts.map_legend import in_words, legend
from app.parts.map_plane import WIDTH, ground
from tests.app.flow_map_page import figures

PAGE = Path(__file__).with_name("flow_map_page.py")


def sample_points(name):
    book = openpyxl.load_workbook(sample_data.path(name), read_only=True)
    points = {}
    for sheet, kind in (("Depots", "depot"), ("Customers", "customer")):
        rows = book[sheet].iter_rows(values_only=True)
        headings = next(rows)
        for row in rows:
            record = dict(zip(headings, row, strict=True))
            points[record[headings[0]]] = MapPoint(
                kind, record[headings[0]], record["Latitude"], record["Longitude"], Decimal(50)
            )
    return list(points.values())


def many(depots, customers):
    """Customers strewn over the island, each served by the depot listed at its place."""
    chance = random.Random(3)
    places = []
    while len(places) < depots + customers:
        place = (-127 + 4.5 * chance.random(), -49 + 2.8 * chance.random())
        if on_land(place):
            places.append(place)
    points, flows = [], []
    for number, (x, y) in enumerate(places):
        kind = "depot" if number < depots else "customer"
        points.append(MapPoint(kind, f"{kind} {number}", y, x, Decimal(number % 90 + 10)))
        if kind == "customer":
            flows.append(MapFlow(f"depot {number % depots}", f"customer {number}", Decimal(number % 70 + 1)))
    return points, flows


def drawn_deck(points, flows, focus=None, unit="t"):
    made = drawing(points, flows)
    highlighted = widget._highlighted(made, flows, focus)
    labels = placed(widget._wishes(made, highlighted, focus, unit, plain), made.depots, made.customers)
    return json.loads(deck(made, highlighted, focus, labels, LIGHT, unit, plain).to_json()), labels


def test_north_is_up_and_east_is_right_and_a_degree_north_is_longer():
    points = [
        MapPoint("depot", "South west", 59.0, 10.0, Decimal(1)),
        MapPoint("customer", "North east", 61.0, 12.0, Decimal(1)),
    ]
    made = drawing(points, [])
    (x, y), (east, north) = made.depots[0].spot, made.customers[0].spot
    assert east > x
    assert north < y
    # A degree of longitude at 60 degrees north is half as long as one of latitude (cosine of 60 degrees).
    assert (east - x) / (y - north) == pytest.approx(0.5, abs=0.001)


def test_a_desk_across_the_180th_meridian_stays_together():
    points = [
        MapPoint("depot", "West of it", 0.0, 179.5, Decimal(1)),
        MapPoint("customer", "East of it", 0.0, -179.5, Decimal(1)),
        MapPoint("customer", "North of it", 1.0, 180.0, Decimal(1)),
    ]
    made = drawing(points, [])
    assert made.depots[0].spot[0] < made.customers[1].spot[0] < made.customers[0].spot[0]
    assert made.customers[0].spot[0] - made.depots[0].spot[0] == pytest.approx(WIDTH, abs=0.1)
    assert {"179°45′ E", "180°", "179°45′ W"} <= {text for text, _ in made.ground.grid_labels}


def test_the_coast_is_drawn_for_our_island_only():
    assert len(ground([(-124.0, -47.5)]).outlines) == len(coasts()) == 4
    assert ground([(-124.0, -47.5), (4.0, 51.0)]).outlines == ()
    assert ground([(4.0, 51.0)]).grid
    assert not around_here([])


def test_the_island_is_where_no_land_is():
    # The oceanic pole of inaccessibility, 48 52.6 S 123 23.6 W (Lukatela 1992; value from memory).
    assert on_land((-(123 + 23.6 / 60), -(48 + 52.6 / 60)))


def test_samples_lie_on_land():
    for name in ("small_week.xlsx", "large_week.xlsx"):
        assert all(on_land(point.place) for point in sample_points(name))


def test_no_coordinates_no_drawing():
    assert drawing(figures("nowhere")[0], figures("nowhere")[1]) is None
    assert drawing([], []) is None


def test_places_that_are_not_on_earth_are_named_and_not_drawn():
    points, flows = figures("")
    lost = MapPoint("customer", "Fern", 910.0, 5.0, Decimal(1))
    made = drawing([*points, lost, MapPoint("depot", "Nan", float("nan"), 1.0, Decimal(1))], flows)
    assert [point.name for point in made.unplaced] == ["Elm", "Fern", "Nan"]
    said = " ".join(remarks(made, 1, 3))
    assert "Elm, Fern, Nan" in said
    assert "1 flow from or to them" in said


def test_widths_go_with_quantities():
    points, flows = figures("")
    made = drawing(points, flows)
    width = {(line.depot, line.customers): line.width for line in made.lines}
    assert width["Northgate", ("Aster",)] == pytest.approx(2 * width["Upland", ("Birch",)], abs=0.02)
    assert width["Upland", ("Birch",)] == pytest.approx(2 * width["Upland", ("Cole",)], abs=0.02)
    assert [line.quantity for line in made.lines] == [Decimal(120), Decimal(60), Decimal(30), Decimal(12)]


@pytest.mark.parametrize(("depots", "customers"), [(20, 500), (30, 3_000), (100, 10_000)])
def test_shared_lines_lose_nothing(depots, customers):
    points, flows = many(depots, customers)
    made = drawing(points, flows)
    assert len(made.lines) <= MOST_LINES
    assert len(made.customers) <= MOST_MARKS
    assert sum(line.quantity for line in made.lines) == sum(flow.quantity for flow in flows)
    assert sum(line.flows for line in made.lines) == len(flows) == made.flows_drawn
    assert sorted(name for mark in made.customers for name in mark.names) == sorted(f.customer for f in flows)
    by_depot = {}
    for line in made.lines:
        by_depot[line.depot] = by_depot.get(line.depot, 0) + line.quantity
    for flow in flows:
        by_depot[flow.depot] -= flow.quantity
    assert set(by_depot.values()) == {0}
    shared = any("share them" in sentence for sentence in remarks(made, 0, depots))
    assert shared == (customers > MOST_LINES)


def test_neighbouring_depots_differ_in_tone():
    made = drawing(sample_points("small_week.xlsx"), [])
    for mark in made.depots:
        others = [other for other in made.depots if other is not mark]
        nearest = min(others, key=lambda other: abs(complex(*other.spot) - complex(*mark.spot)))
        assert nearest.tone != mark.tone


def box(label):
    """Where a label's text stands, by its own fields; half an em a letter."""
    x, y = label.spot[0] + label.offset[0], label.spot[1] + label.offset[1]
    wide = len(label.text) * label.height / 2
    left = {"start": x, "middle": x - wide / 2, "end": x - wide}[label.anchor]
    return left, y - label.height / 2, left + wide, y + label.height / 2


def meet(first, second):
    return first[0] < second[2] and second[0] < first[2] and first[1] < second[3] and second[1] < first[3]


def test_labels_do_not_cover_each_other_on_the_large_sample():
    points = sample_points("large_week.xlsx")
    points = [
        MapPoint(p.kind, p.name, p.latitude, p.longitude, p.quantity, Decimal(n % 5))
        if p.kind == "customer" and n % 6 == 0
        else p
        for n, p in enumerate(points)
    ]
    _, labels = drawn_deck(points, [])
    assert sum(label.kind == "depot" for label in labels) == 20
    assert sum(label.kind == "short" for label in labels) >= 10
    assert not [(a.text, b.text) for a, b in combinations(labels, 2) if meet(box(a), box(b))]


def test_customers_are_named_when_short_or_looked_at():
    points, flows = figures("")
    _, labels = drawn_deck(points, flows)
    assert {label.text for label in labels if label.kind != "depot"} == {"Cole −20.5 t"}
    _, labels = drawn_deck(points, flows, Focus(depot="Northgate"))
    assert {label.text for label in labels if label.kind == "customer"} == {"Aster"}


def texts(value):
    if isinstance(value, dict):
        return [text for inner in value.values() for text in texts(inner)]
    if isinstance(value, list):
        return [text for inner in value for text in texts(inner)]
    return [value] if isinstance(value, str) else []


def test_names_are_never_run_or_filled_in():
    points, flows = figures("hostile")
    spec, _ = drawn_deck(points, flows, Focus(depot="@@=alert(1)"), unit="{tip}")
    found = [text for layer in spec["layers"] for text in texts(layer["data"])]
    assert any("alert(1)" in text for text in found)
    assert not [text for text in found if text.startswith("@@") or "{" in text or "}" in text]
    assert shown("@@=x") != "@@=x"
    assert shown("Quarry") == "Quarry"
    assert shown(" a\nb  c ") == "a b c"
    assert len(shown("x" * 500)) == 60


def test_nothing_is_fetched_and_no_key_is_sent(monkeypatch):
    monkeypatch.setenv("MAPBOX_API_KEY", "secret")
    monkeypatch.setenv("GOOGLE_MAPS_API_KEY", "secret")
    points, flows = figures("")
    made = drawing(points, flows)
    drawn = deck(made, (), None, (), DARK, "t", plain)
    spec = json.loads(drawn.to_json())
    assert drawn.mapbox_key is None
    assert drawn.google_maps_key is None
    assert "secret" not in drawn.to_json()
    assert spec.get("mapProvider") is None
    assert spec.get("mapStyle") is None
    assert not [text for text in texts(spec) if "//" in text]


def state(layer, index):
    return {"selection": {"indices": {layer: [index]}, "objects": {}}}


def test_what_is_picked():
    points, flows = figures("")
    made = drawing(points, flows)
    ids = layer_ids(made)
    assert widget._picked(made, state(ids["depots"], 1)) == Focus(depot="Quarry")
    assert widget._picked(made, state(ids["customers"], 2)) == Focus(customers=("Cole",))
    assert widget._picked(made, state(ids["lines"], 0)) == Focus("Northgate", ("Aster",))
    for strange in (state("lines-0", 0), state(ids["lines"], 99), state(ids["lines"], "0"), None, {}, "x"):
        assert widget._picked(made, strange) is None


def test_a_pick_is_forgotten_when_other_flows_are_drawn():
    points, flows = figures("")
    before, after = drawing(points, flows), drawing(points, flows[1:])
    assert layer_ids(before)["depots"] == layer_ids(after)["depots"]
    assert widget._picked(after, state(layer_ids(before)["lines"], 0)) is None


def test_highlight_is_what_the_focus_holds():
    points, flows = figures("")
    made = drawing(points, flows)
    lines = widget._highlighted(made, flows, Focus(customers=("Aster",)))
    assert {(line.depot, line.customers) for line in lines} == {
        ("Northgate", ("Aster",)),
        ("Quarry", ("Aster",)),
    }
    assert all(line.width in {other.width for other in made.lines} for line in lines)


def test_table_says_the_same_exactly():
    points, flows = figures("")
    points.append(MapPoint("customer", "Fern", -47.0, -124.0, Decimal("0.1"), Decimal("0.1")))
    frame = flows_frame(points, flows, "t")
    assert list(frame.columns) == ["Depot", "Customer", "Send (t)", "Ordered (t)", "Short (t)", "Note"]
    assert [tuple(row)[:3] for row in frame.itertuples(index=False)] == [
        ("Northgate", "Aster", Decimal(120)),
        ("Upland", "Birch", Decimal(60)),
        ("Upland", "Cole", Decimal(30)),
        ("Quarry", "Aster", Decimal(12)),
        ("Quarry", "Elm", Decimal(8)),
        ("", "Fern", None),
    ]
    assert list(frame["Short (t)"]) == [None, None, Decimal("20.5"), None, None, Decimal("0.1")]


def test_blank_figures_are_never_written_as_numbers():
    def only_numbers(quantity):
        assert quantity.is_finite()
        return plain(quantity)

    assert widget._written(only_numbers, float("nan")) == ""
    assert widget._written(only_numbers, 1234.1) == "1234.1"


def test_summary_and_remarks():
    made = drawing(*figures(""))
    assert summary(made, "t") == (
        "Map of 3 depots, 3 customers and 4 flows; 1 customer going short, most of all Cole by 20.5 t."
        " The table of flows says the same."
    )
    assert remarks(made, 1, 3) == [
        "Without usable coordinates, so not on the map: Elm.",
        "1 flow from or to them: in the table only.",
    ]


def test_legend_is_a_picture_that_also_stands_in_words():
    made = drawing(*figures(""))
    picture = ElementTree.fromstring(legend(made, LIGHT, "<t>", plain))
    words = [element.text for element in picture.iter("{http://www.w3.org/2000/svg}text")]
    assert words == [
        "depots", "customer, sized by its order", "going short, by how much",
        "100 <t> sent", "20 <t> sent", "10 <t> sent",
    ]  # fmt: skip
    assert "A ring marks a customer going short" in in_words(made, "t", plain)
    nothing_sent = drawing(figures("")[0][:4], [])
    assert "short" not in in_words(nothing_sent, "t", plain)
    ElementTree.fromstring(legend(nothing_sent, DARK, "t", plain))


@pytest.mark.parametrize(
    ("quantity", "written"),
    [("120", "120"), ("0.500", "0.5"), ("1E+3", "1000"), ("0", "0"), ("-2.50", "-2.5")],
)
def test_plain(quantity, written):
    assert plain(Decimal(quantity)) == written


def test_page_draws_the_map_and_its_table():
    at = AppTest.from_file(PAGE, default_timeout=30).run()
    assert not at.exception
    chart = at.get("deck_gl_json_chart")[0].proto
    assert chart.alt.startswith("Map of 3 depots, 3 customers and 4 flows; 1 customer going short")
    assert len(at.dataframe) == 1
    assert "picked: None" in " ".join(text.value for text in at.text)


def test_page_without_coordinates_says_so():
    at = AppTest.from_file(PAGE, default_timeout=30)
    at.query_params["case"] = "nowhere"
    at.run()
    assert not at.exception
    assert "No map" in at.info[0].value
    assert not at.get("deck_gl_json_chart")
    assert len(at.dataframe[0].value) == 5
