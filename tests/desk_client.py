"""A visitor without a browser: speaks to a running desk over its WebSocket as the page in a browser does."""

import json
import time
from dataclasses import dataclass, field

from streamlit.proto.BackMsg_pb2 import BackMsg
from streamlit.proto.ForwardMsg_pb2 import ForwardMsg
from streamlit.proto.WidgetStates_pb2 import WidgetState
from websockets.sync.client import ClientConnection, connect


@dataclass
class Visitor:
    """One session. `said` are the texts of the page as it was sent last, `ids` its widgets' ids by key."""

    socket: ClientConnection
    query: str
    said: list[str] = field(default_factory=list)
    ids: dict[str, str] = field(default_factory=dict)

    def run(self, *states: WidgetState, seconds: float = 30) -> None:
        """Send widget states and wait until the page stands.

        Raises:
            ConnectionError: the desk is gone, or does not answer in time.
        """
        asked = BackMsg()
        asked.rerun_script.query_string = self.query
        asked.rerun_script.widget_states.widgets.extend(states)
        end = time.monotonic() + seconds
        try:
            self.socket.send(asked.SerializeToString())
            running = True
            while running:
                message = ForwardMsg()
                message.ParseFromString(bytes(self.socket.recv(timeout=max(0.01, end - time.monotonic()))))
                running = self._hear(message)
        except TimeoutError:
            raise ConnectionError("The desk did not answer in time.") from None
        except Exception as gone:  # whatever a killed server does to a socket
            raise ConnectionError(f"The desk is gone: {gone}") from None

    def _hear(self, message: ForwardMsg) -> bool:
        """Take note of a message; whether more of this run is to come."""
        kind = message.WhichOneof("type")
        if kind == "new_session":
            self.said, self.ids = [], {}
        elif kind == "page_info_changed":
            self.query = message.page_info_changed.query_string
        elif kind == "delta" and message.delta.WhichOneof("type") == "new_element":
            element = message.delta.new_element
            what = element.WhichOneof("type")
            if what == "markdown":
                self.said.append(element.markdown.body)
            elif what == "alert":
                self.said.append(element.alert.body)
            elif what is not None and getattr(getattr(element, what), "id", ""):
                name = getattr(element, what).id
                self.ids[name.split("-", 2)[-1]] = name
        finished = ForwardMsg.ScriptFinishedStatus.FINISHED_SUCCESSFULLY
        return not (kind == "script_finished" and message.script_finished == finished)

    def close(self) -> None:
        self.socket.close()


def visit(port: int, query: str) -> Visitor:
    """Open a session and let the page be built once."""
    socket = connect(
        f"ws://127.0.0.1:{port}/_stcore/stream",
        subprotocols=["streamlit"],  # type: ignore[list-item]
        origin=f"http://127.0.0.1:{port}",  # type: ignore[arg-type]
        max_size=None,
        open_timeout=20,
    )
    found = Visitor(socket, query)
    found.run()
    return found


def pressed(visitor: Visitor, key: str) -> WidgetState:
    """A button that is pressed."""
    return WidgetState(id=visitor.ids[key], trigger_value=True)


def typed(visitor: Visitor, key: str, row: int, heading: str, text: str) -> WidgetState:
    """A cell of a grid that is typed into."""
    edits = {"edited_rows": {str(row): {heading: text}}, "added_rows": [], "deleted_rows": []}
    grid = next(name for known, name in visitor.ids.items() if known.startswith(key))
    return WidgetState(id=grid, string_value=json.dumps(edits))
