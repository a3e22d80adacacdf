"""Where names stand on the map: depots always, others only where they cover no other name."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from app.parts.map_drawing import Mark
from app.parts.map_plane import HEIGHT, WIDTH, Spot

Box = tuple[float, float, float, float]
Boxes = npt.NDArray[np.float64]
"""Left, top, right, bottom in pixels."""

RING = 5.0
"""How far the ring around a customer going short reaches beyond it, in pixels."""

LETTER = 0.5
"""A letter's usual width as a part of its height, for telling how long a name is."""

SIDES = ((1, 0), (-1, 0), (0, -1), (0, 1), (1, -1), (1, 1), (-1, -1), (-1, 1))
"""Where a name may stand beside its mark, best first."""


@dataclass(frozen=True, slots=True)
class Wish:
    """A name that should stand beside a mark; one that `must` stands even where it covers another."""

    text: str
    mark: Mark
    height: float
    kind: str
    must: bool = False


@dataclass(frozen=True, slots=True)
class Label:
    """A name beside a spot; the offset is in pixels, to the end of the text that the anchor says."""

    text: str
    spot: Spot
    offset: Spot
    anchor: str
    height: float
    kind: str


def placed(wishes: Sequence[Wish], depots: Sequence[Mark], customers: Sequence[Mark]) -> tuple[Label, ...]:
    """Labels for the wishes in their order, each where it covers least; those without room are left out."""
    squares = [_around(mark) for mark in depots]
    squares += [_around(mark) for mark in customers if mark.short > 0]
    dots = _boxes([_around(mark) for mark in customers if mark.short <= 0])
    in_the_way = _boxes(squares)
    taken: list[Box] = []
    labels: list[Label] = []
    for wish in wishes:
        half_width = len(wish.text) * wish.height * LETTER / 2 + 2
        half_height = wish.height / 2 + 1
        best: tuple[float, Label, Box, float] | None = None
        others = _boxes(taken)
        for rank, (right, down) in enumerate(SIDES):
            gap = _reach(wish.mark) + (3 if right == 0 or down == 0 else 0)
            near = (right * gap, down * (half_height + gap))
            x, y = wish.mark.spot[0] + near[0] + right * half_width, wish.mark.spot[1] + near[1]
            box = (x - half_width, y - half_height, x + half_width, y + half_height)
            covered = 20 * _overlap(box, others) + 10 * _overlap(box, in_the_way) + 30 * _outside(box)
            cost = covered + _overlap(box, dots) + 3 * rank
            if best is None or cost < best[0]:
                anchor = ("middle", "start", "end")[right]
                best = (
                    cost,
                    Label(wish.text, wish.mark.spot, near, anchor, wish.height, wish.kind),
                    box,
                    covered,
                )
        if best is not None and (wish.must or best[3] == 0):
            taken.append(best[2])
            labels.append(best[1])
    return tuple(labels)


def _boxes(boxes: Sequence[Box]) -> Boxes:
    """(boxes, 4) left, top, right, bottom."""
    return np.array(boxes, dtype=np.float64).reshape(-1, 4)


def _reach(mark: Mark) -> float:
    """Half a mark's width, with its ring if it goes short."""
    return mark.size + (RING if mark.short > 0 else 0)


def _around(mark: Mark) -> Box:
    (x, y), size = mark.spot, _reach(mark)
    return x - size, y - size, x + size, y + size


def _overlap(box: Box, others: Boxes) -> float:
    """The area, in square pixels, that a box shares with others."""
    if not len(others):
        return 0.0
    left, top, right, bottom = box
    wide = np.minimum(right, others[:, 2]) - np.maximum(left, others[:, 0])
    high = np.minimum(bottom, others[:, 3]) - np.maximum(top, others[:, 1])
    return float((np.maximum(wide, 0.0) * np.maximum(high, 0.0)).sum())


def _outside(box: Box) -> float:
    """How far, in pixels, a box reaches out of what is seen at first."""
    left, top, right, bottom = box
    x, y = WIDTH / 2 + 20, HEIGHT / 2 + 20
    return max(0.0, -x - left) + max(0.0, right - x) + max(0.0, -y - top) + max(0.0, bottom - y)
