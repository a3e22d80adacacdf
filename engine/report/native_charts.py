"""Charts that a spreadsheet program draws itself from the cells of a sheet, readable without colour."""

from typing import Any

from openpyxl.chart import BarChart, LineChart, Reference, ScatterChart
from openpyxl.chart.label import DataLabelList
from openpyxl.chart.layout import Layout, ManualLayout
from openpyxl.chart.series_factory import SeriesFactory
from openpyxl.chart.shapes import GraphicalProperties

from engine.report.look import DEEP
from engine.report.text import cell_text

ROW_HEIGHT = 0.53
"""Centimetres of a row of a sheet."""


JOINED_HEIGHT = 10.0
"""Centimetres of a chart of joined points."""


def chart_rows(height: float) -> int:
    """How many rows a chart covers, and one more."""
    return int(height / ROW_HEIGHT) + 2


def bars_height(bars: int) -> float:
    """Centimetres of a chart of so many ranked bars."""
    return max(6.0, 0.62 * bars + 2)


def ranked_bars(sheet: Any, title: str, names: tuple[int, int, int], column: int, number: str) -> Any:
    """Bars to the right, the first row on top, each with its figure.

    names: column, first and last row of the names; column: where the figures stand, in the same rows
    """
    at, first, last = names
    chart: Any = BarChart()
    chart.type = "bar"
    chart.title = cell_text(title)
    chart.legend = None
    chart.add_data(Reference(sheet, min_col=column, min_row=first, max_row=last))
    chart.set_categories(Reference(sheet, min_col=at, min_row=first, max_row=last))
    chart.series[0].graphicalProperties = GraphicalProperties(solidFill=DEEP)
    chart.dataLabels = DataLabelList(showVal=True, showSerName=False, showCatName=False, showLegendKey=False)
    chart.dataLabels.numFmt = number
    chart.x_axis.scaling.orientation = "maxMin"
    chart.x_axis.tickLblPos = "low"
    chart.x_axis.delete, chart.y_axis.delete = False, True
    chart.y_axis.majorGridlines = None
    chart.gapWidth = 50
    chart.width, chart.height = 17, bars_height(last - first + 1)
    return chart


def columns(sheet: Any, title: str, names: tuple[int, int, int], column: int, axes: tuple[str, str]) -> Any:
    """Columns side by side without gaps, as a histogram has them; `axes` says what is across and up."""
    at, first, last = names
    chart: Any = BarChart()
    chart.type = "col"
    chart.title = cell_text(title)
    chart.legend = None
    chart.add_data(Reference(sheet, min_col=column, min_row=first, max_row=last))
    chart.set_categories(Reference(sheet, min_col=at, min_row=first, max_row=last))
    chart.series[0].graphicalProperties = GraphicalProperties(solidFill=DEEP)
    chart.x_axis.title, chart.y_axis.title = (cell_text(axis) for axis in axes)
    chart.x_axis.delete = chart.y_axis.delete = False
    chart.gapWidth = 4
    chart.width, chart.height = 18, 8
    return chart


def joined_points(
    sheet: Any, title: str, rows: tuple[int, int], across: tuple[int, str], up: tuple[int, str]
) -> Any:
    """Points joined by straight lines; `across` and `up` are columns and what they hold."""
    first, last = rows
    chart: Any = ScatterChart()
    chart.title = cell_text(title)
    chart.legend = None
    chart.style = 2
    series = SeriesFactory(
        Reference(sheet, min_col=up[0], min_row=first, max_row=last),
        Reference(sheet, min_col=across[0], min_row=first, max_row=last),
    )
    series.graphicalProperties.line.solidFill = DEEP
    series.smooth = False
    series.marker.symbol = "circle"
    series.marker.size = 5
    series.marker.graphicalProperties = GraphicalProperties(solidFill=DEEP)
    chart.series.append(series)
    chart.x_axis.title, chart.y_axis.title = cell_text(across[1]), cell_text(up[1])
    chart.x_axis.delete = chart.y_axis.delete = False
    chart.x_axis.majorGridlines = None
    chart.layout = Layout(ManualLayout(x=0.12, y=0.12, w=0.82, h=0.66))
    chart.width, chart.height = 24, JOINED_HEIGHT
    return chart


def floating_bars(
    sheet: Any, title: str, names: tuple[int, int, int], parts: tuple[int, int, int], begins: float
) -> Any:
    """Bars that begin where the one above ends: from one amount to another, step by step.

    names: column, first and last row of the names; parts: the columns of what lies below each bar (not
    drawn), of what rises (filled) and of what falls (hollow); begins: where the axis does
    """
    at, first, last = names
    chart: Any = BarChart()
    chart.type, chart.grouping, chart.overlap = "bar", "stacked", 100
    chart.title = cell_text(title)
    chart.legend = None
    for column in parts:
        chart.add_data(Reference(sheet, min_col=column, min_row=first, max_row=last))
    chart.set_categories(Reference(sheet, min_col=at, min_row=first, max_row=last))
    below, rises, falls = chart.series
    below.graphicalProperties = GraphicalProperties(noFill=True)
    below.graphicalProperties.line.noFill = True
    rises.graphicalProperties = GraphicalProperties(solidFill=DEEP)
    falls.graphicalProperties = GraphicalProperties(solidFill="FFFFFF")
    falls.graphicalProperties.line.solidFill = DEEP
    chart.x_axis.scaling.orientation = "maxMin"
    chart.x_axis.tickLblPos = "low"
    chart.x_axis.delete, chart.y_axis.delete = False, False
    chart.y_axis.scaling.min = begins
    chart.y_axis.number_format, chart.y_axis.numFmt.sourceLinked = "#,##0", False
    chart.y_axis.majorGridlines = None
    chart.gapWidth = 40
    chart.width, chart.height = 20, max(7.0, 0.75 * (last - first + 1) + 2.5)
    return chart


def line_over_rows(sheet: Any, title: str, names: tuple[int, int, int], column: int, number: str) -> Any:
    """A line over the rows, each point with its figure: one value a week, for instance."""
    at, first, last = names
    chart: Any = LineChart()
    chart.title = cell_text(title)
    chart.legend = None
    chart.add_data(Reference(sheet, min_col=column, min_row=first, max_row=last))
    chart.set_categories(Reference(sheet, min_col=at, min_row=first, max_row=last))
    series = chart.series[0]
    series.graphicalProperties.line.solidFill = DEEP
    series.smooth = False
    series.marker.symbol, series.marker.size = "circle", 6
    series.marker.graphicalProperties = GraphicalProperties(solidFill=DEEP)
    chart.dataLabels = DataLabelList(showVal=True, showSerName=False, showCatName=False, showLegendKey=False)
    chart.dataLabels.numFmt = number
    chart.x_axis.delete, chart.y_axis.delete = False, True
    chart.y_axis.majorGridlines = None
    chart.width, chart.height = 18, 7
    return chart
