"""A visitor without a browser: Streamlit's own messages over a real WebSocket, as its page sends."""

import json
import threading
import time
from typing import Any

from streamlit.proto.BackMsg_pb2 import BackMsg
from streamlit.proto.Delta_pb2 import Delta
from streamlit.proto.ForwardMsg_pb2 import ForwardMsg
from streamlit.proto.WidgetStates_pb2 import WidgetState
from websockets.sync.client import connect

LARGEST = 64 << 20


class Lost(RuntimeError):
    """The desk did not answer as it should have."""


class Visitor:
    """One session on a desk. What it sees is kept as elements by their place on the page.

    A page looks every few seconds whether others changed the week, so a visitor does too.
    """

    def __init__(self, address: str, query: str) -> None:
        self.query = query
        self.states: dict[str, WidgetState] = {}
        self.elements: dict[tuple[int, ...], Any] = {}
        self.looks: dict[str, float] = {}
        self.known: dict[str, bytes] = {}
        self.script = ""
        self.looking = False
        self.received = 0
        self.socket = connect(
            f"ws{address.removeprefix('http')}/_stcore/stream",
            subprotocols=["streamlit"],  # type: ignore[list-item]
            origin=address,  # type: ignore[arg-type]
            max_size=LARGEST,
            open_timeout=60,
        )

    def close(self) -> None:
        self.socket.close()

    def run(self, trigger: str | None = None, seconds: float = 120) -> None:
        """Send what the widgets say, and wait until the page is whole again."""
        self._send(trigger)
        self._until_whole(time.monotonic() + seconds)
        for name in [name for name, state in self.states.items() if state.trigger_value]:
            del self.states[name]

    def look(self, seconds: float = 120) -> None:
        """What a page does by itself every few seconds."""
        for fragment in list(self.looks):
            self._send(None, fragment)
            self._until_whole(time.monotonic() + seconds)

    def id_of(self, kind: str, key: str) -> str:
        """The id of the widget whose key begins so.

        Raises:
            Lost: there is none on the page.
        """
        for element in self.elements.values():
            if element.WhichOneof("type") == kind:
                found = str(getattr(element, kind).id)
                if f"-{key}" in found:
                    return found
        raise Lost(f"There is no {kind} '{key}' on the page: {self.said()[:300]}")

    def has(self, kind: str, key: str) -> bool:
        try:
            return bool(self.id_of(kind, key))
        except Lost:
            return False

    def edit(self, grid: str, row: int, column: str, text: str) -> None:
        """Type into a cell of a grid, as the grid would send it."""
        said = {"edited_rows": {str(row): {column: text}}, "added_rows": [], "deleted_rows": []}
        found = self.id_of("dataframe", grid)
        self.states[found] = WidgetState(id=found, string_value=json.dumps(said))
        self.run()

    def press(self, key: str) -> None:
        """Press a button."""
        found = self.id_of("button", key)
        self.run(found)

    def said(self) -> str:
        """The texts on the page."""
        texts = []
        for element in self.elements.values():
            kind = element.WhichOneof("type")
            if kind in ("markdown", "alert", "exception", "text"):
                part = getattr(element, kind)
                texts.append(str(getattr(part, "body", "") or getattr(part, "message", "")))
        return " | ".join(texts)

    def _send(self, trigger: str | None, fragment: str = "") -> None:
        self.looking = bool(fragment)
        message = BackMsg()
        client = message.rerun_script
        client.query_string = self.query
        client.page_script_hash = self.script
        client.fragment_id = fragment
        client.is_auto_rerun = bool(fragment)
        client.cached_message_hashes.extend(self.known)
        client.context_info.timezone = "UTC"
        client.context_info.locale = "en"
        client.widget_states.widgets.extend(self.states.values())
        if trigger is not None:
            client.widget_states.widgets.append(WidgetState(id=trigger, trigger_value=True))
        self.socket.send(message.SerializeToString())

    def _until_whole(self, end: float) -> None:
        while True:
            left = end - time.monotonic()
            if left <= 0:
                raise Lost("The desk did not answer in time.")
            data = self.socket.recv(timeout=left)
            self.received += len(data)
            message = ForwardMsg.FromString(data)  # type: ignore[arg-type]
            kind = message.WhichOneof("type")
            if kind == "ref_hash":
                place = list(message.metadata.delta_path)
                message = ForwardMsg.FromString(self.known[message.ref_hash])
                message.metadata.delta_path[:] = place
                kind = message.WhichOneof("type")
            elif message.metadata.cacheable and message.hash:
                self.known[message.hash] = bytes(data)  # type: ignore[arg-type]
            if kind == "new_session":
                self.script = message.new_session.page_script_hash or self.script
                if not self.looking:
                    self.looks.clear()
                    self.elements.clear()
            elif kind == "auto_rerun":
                self.looks[message.auto_rerun.fragment_id] = message.auto_rerun.interval
            elif kind == "page_info_changed":
                self.query = message.page_info_changed.query_string
            elif kind == "delta":
                self._take(tuple(message.metadata.delta_path), message.delta)
            elif kind == "script_finished" and message.script_finished in (0, 3):
                return
            elif kind == "script_finished" and message.script_finished == 1:
                raise Lost("The page has a fault.")

    def _take(self, place: tuple[int, ...], delta: Delta) -> None:
        if delta.WhichOneof("type") == "new_element":
            self.elements[place] = delta.new_element


def together(work: list[Any]) -> None:
    """Run these at once; the first fault is raised when all have ended."""
    faults: list[BaseException] = []

    def one(act: Any) -> None:
        try:
            act()
        except BaseException as fault:
            faults.append(fault)

    threads = [threading.Thread(target=one, args=(act,)) for act in work]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    if faults:
        raise faults[0]
