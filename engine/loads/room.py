"""What depots and hauliers can still give while customers are served and taken out again."""

from __future__ import annotations

from engine.loads.arrays import Moves, Room, Rows
from engine.loads.compiled import part


@part
def limit_to_room(rows: Rows, room: Room, j: int) -> None:
    """Sets `most` on a customer's rows to what each of them could still get."""
    for row in range(rows.start[j], rows.start[j + 1]):
        i, size = rows.depot[row], rows.load_size[row]
        most = min(room.limit[row], room.supply[i])
        if size > 0 and room.vehicles[i] < most // size + 1:
            most = min(most, room.vehicles[i] * size)
        elif room.vehicles[i] == 0:
            most = 0
        if room.whose[row] >= 0:
            most = min(most, room.haulier[room.whose[row]])
        rows.most[row] = most


@part
def use_room(rows: Rows, room: Room, row: int, x: int) -> None:
    """Takes `x` from what can still be given, or gives minus `x` back."""
    i, size, amount = rows.depot[row], rows.load_size[row], abs(x)
    loads = min(1, amount)
    if size > 0:
        loads = (amount + size - 1) // size
    room.supply[i] -= x
    room.vehicles[i] -= loads if x > 0 else -loads
    if room.whose[row] >= 0:
        room.haulier[room.whose[row]] -= x


@part
def has_room(rows: Rows, room: Room, first: int, last: int) -> bool:
    """Whether no depot and no haulier of these rows gives more than it has."""
    for row in range(first, last):
        i = rows.depot[row]
        if room.supply[i] < 0 or room.vehicles[i] < 0:
            return False
        if room.whose[row] >= 0 and room.haulier[room.whose[row]] < 0:
            return False
    return True


@part
def openings(room: Room, moves: Moves) -> int:
    """What the depots that send something cost to open."""
    cost = 0
    for i in range(len(moves.opening)):
        if room.supply[i] < moves.supply[i]:
            cost += moves.opening[i]
    return cost


@part
def too_much_stays(room: Room, moves: Moves) -> bool:
    """Whether more stays somewhere than may."""
    found = False
    for i in range(len(moves.stay)):
        found |= room.supply[i] > moves.stay[i]
    return found
