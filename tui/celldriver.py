"""The cell-diffing driver itself: ``tui.driver.Cells`` between Textual and a Unix terminal."""

from __future__ import annotations

import os
import selectors
from typing import Any, Final

from textual.drivers.linux_driver import LinuxDriver

from tui.driver import SYNC_OFF, SYNC_ON, Cells
from tui.keyreader import KeyReader

READ_BYTES: Final = 4096
TICK_S: Final = 0.1
HANG_UP_S: Final = 2.0
"""How long the app has to keep its drafts once the terminal is gone."""


class CellDriver(LinuxDriver):
    """A Unix terminal that gets only the cells that changed."""

    def __init__(self, *args: Any, **kwargs: Any) -> None:  # noqa: ANN401  (the base class's own)
        super().__init__(*args, **kwargs)
        self.cells = Cells()
        self._sync_asked = False

    def start_application_mode(self) -> None:
        """Start on an unknown screen."""
        self.cells.forget()
        super().start_application_mode()  # type: ignore[no-untyped-call]

    def write(self, data: str) -> None:
        """Send the difference between what is shown and ``data``."""
        if data == SYNC_ON:
            self._sync_asked = True
        elif data == SYNC_OFF:
            if not self._sync_asked:
                super().write(data)
            self._sync_asked = False
        elif data:
            self._send(self._difference(data))

    def _difference(self, data: str) -> str:
        """Return what must be sent; frames are the writes that move the cursor first."""
        difference = self.cells.difference(data, (self._app.size.width, self._app.size.height))
        return data if difference is None else difference

    def _send(self, data: str) -> None:
        """Send, inside a synchronized update if one was asked for; half characters cannot be sent."""
        if not data:
            return
        if not data.isascii():
            data = data.encode(errors="replace").decode()
        if self._sync_asked:
            self._sync_asked = False
            super().write(SYNC_ON)
        super().write(data)

    # keys

    def _run_input_thread(self) -> None:
        """Read keys; a mistake of the program there ends it as any other does, with its details kept."""
        try:
            self.run_input_thread()
        except Exception as error:
            self._app.call_later(self._app._handle_exception, error)

    def run_input_thread(self) -> None:
        """Hand on what is typed until the app stops or the terminal is gone; runs in a thread."""
        reader = KeyReader()
        with selectors.SelectSelector() as selector:
            selector.register(self.fileno, selectors.EVENT_READ)
            while not self.exit_event.is_set():
                if selector.select(TICK_S):
                    data = self._read()
                    if not data:
                        self._hang_up()
                        return
                    for message in reader.feed(data):
                        self.process_message(message)
                for message in reader.tick():
                    self.process_message(message)

    def _read(self) -> bytes:
        """Return the next bytes; none once the terminal is gone."""
        try:
            return os.read(self.fileno, READ_BYTES)
        except OSError:
            return b""

    def _hang_up(self) -> None:
        """Have the app keep what is typed and end; end in any case, as nobody can type any more."""
        hang_up = getattr(self._app, "on_hang_up", None)
        if hang_up is not None:
            self._app.call_later(hang_up)
        if not self.exit_event.wait(HANG_UP_S):
            os._exit(0)
