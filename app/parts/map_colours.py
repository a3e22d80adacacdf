"""The colours of the map, for a light and a dark desk; they go with the theme beside the main script.

The four tones and the colour of a shortage stay apart for colour-blind eyes, and stand out from land
and sea by 3 to 1 or more (WCAG 2.2, criterion 1.4.11); a test measures both.
"""

from typing import NamedTuple


class Colours(NamedTuple):
    """Colours as #RRGGBB. `tones` are those of depots and what they send."""

    sea: str
    land: str
    coast: str
    grid: str
    ink: str
    faint_ink: str
    halo: str
    customer: str
    short: str
    tones: tuple[str, ...]


LIGHT = Colours(
    sea="#E6EEEE",
    land="#F4F0E6",
    coast="#B7AD97",
    grid="#CDD7D6",
    ink="#1E2B30",
    faint_ink="#6C7C7F",
    halo="#F8F5EE",
    customer="#4A5A60",
    short="#AE1A10",
    tones=("#0B6670", "#C2690C", "#39318F", "#A071BE"),
)

DARK = Colours(
    sea="#172329",
    land="#26343A",
    coast="#50646C",
    grid="#2F3F46",
    ink="#EEF2F1",
    faint_ink="#8CA0A5",
    halo="#172329",
    customer="#B9C6C9",
    short="#FF6D40",
    tones=("#3DC09E", "#EBD65A", "#6F8EF7", "#F2A6E4"),
)


def colours(theme: str | None) -> Colours:
    """The colours for a theme type as the browser names it: 'dark', 'light' or not known yet."""
    return DARK if theme == "dark" else LIGHT


def rgba(colour: str, alpha: int = 255) -> list[int]:
    """Red, green, blue and opacity, each from 0 to 255."""
    return [int(colour[at : at + 2], 16) for at in (1, 3, 5)] + [alpha]
