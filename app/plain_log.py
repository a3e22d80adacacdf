"""The log says where a fault arose, never what a week holds: no figure, no name of a depot or a customer."""

import logging
import traceback
import warnings
from types import TracebackType
from typing import TextIO

_Fault = tuple[type[BaseException] | None, BaseException | None, TracebackType | None]


class PlainFormatter(logging.Formatter):
    """Faults by their kind and place: what an exception says may quote a cell."""

    def __init__(self) -> None:
        super().__init__("%(asctime)s %(levelname)s %(name)s: %(message)s")

    def format(self, record: logging.LogRecord) -> str:
        """The record as one line; the fault's message, and whatever else quotes it, is left out."""
        fault = record.exc_info[1] if record.exc_info else None
        quoted = fault is not None or any(isinstance(one, BaseException) for one in _arguments(record))
        plain = logging.makeLogRecord(record.__dict__)
        if quoted:
            plain.msg, plain.args = "a fault", ()
        plain.exc_text = None
        return super().format(plain)

    def formatException(self, ei: _Fault) -> str:
        kind = ei[0].__name__ if ei[0] else "Fault"
        places = traceback.extract_tb(ei[2])
        return "\n".join([kind, *(f"  {place.filename}:{place.lineno} in {place.name}" for place in places)])

    def formatStack(self, stack_info: str) -> str:
        return ""


def keep_log_plain() -> None:
    """Let every log of this process, Streamlit's included, speak by this formatter."""
    from streamlit import logger

    # Streamlit gives each of its loggers a handler with a formatter of its own, also those made later.
    logger.setup_formatter = _plain  # type: ignore[assignment]
    for named in list(logger._loggers.values()):
        _plain(named)
    logging.lastResort = _handler()
    warnings.showwarning = _shown


def _plain(named: logging.Logger) -> None:
    for handler in list(named.handlers):
        named.removeHandler(handler)
    named.addHandler(_handler())
    named.propagate = False


def _handler() -> logging.StreamHandler[TextIO]:
    handler = logging.StreamHandler()
    handler.setFormatter(PlainFormatter())
    handler.setLevel(logging.WARNING)
    return handler


def _shown(
    message: Warning | str,
    category: type[Warning],
    filename: str,
    lineno: int,
    file: TextIO | None = None,
    line: str | None = None,
) -> None:
    """A warning by its kind and place."""
    logging.getLogger("warnings").warning("%s at %s:%s", category.__name__, filename, lineno)


def _arguments(record: logging.LogRecord) -> tuple[object, ...]:
    return record.args if isinstance(record.args, tuple) else ()
