"""What strangers on the line must not do: hold places for ever, fill the terminal.

Connections that begin no request, or do not end its head, are cut: others need their places.
"""

import asyncio
import logging
from typing import Any

from .page_guard import PATIENCE_S


def patient_protocol() -> type[asyncio.Protocol]:
    """The server library's own protocol, which waits for a head for ever, with an end to that."""
    import h11
    from uvicorn.protocols.http.h11_impl import H11Protocol

    class PatientProtocol(H11Protocol):
        """Looks at its connection now and then."""

        _looker: asyncio.TimerHandle | None = None
        _was_late = False

        def connection_made(self, transport: Any) -> None:
            """Begin to look."""
            super().connection_made(transport)
            self._later()

        def connection_lost(self, exc: Exception | None) -> None:
            """Look no more."""
            super().connection_lost(exc)
            if self._looker is not None:
                self._looker.cancel()

        def _later(self) -> None:
            self._looker = self.loop.call_later(PATIENCE_S / 2, self._look)

        def _look(self) -> None:
            """Cut it if it has waited for the same head at two looks."""
            if self.transport.is_closing() or self.conn.their_state is h11.SWITCHED_PROTOCOL:
                return
            is_begun = self.scope is None or bool(self.conn.trailing_data[0])
            is_late = self.conn.their_state is h11.IDLE and is_begun
            if is_late and self._was_late:
                self.transport.close()
                return
            self._was_late = is_late
            self._later()

    return PatientProtocol


def is_worth_telling(record: logging.LogRecord) -> bool:
    """Whether a line of the server's log is of use: a frame that is no text is its sender's fault.

    The socket is closed for it; the library would print a traceback too.
    """
    return not record.getMessage().startswith("Invalid UTF-8 sequence received")
