"""The cell-diffing driver itself: ``tui.driver.Cells`` between Textual and a Unix terminal."""

from __future__ import annotations

from typing import Any

from textual.drivers.linux_driver import LinuxDriver

from tui.driver import SYNC_OFF, SYNC_ON, Cells


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
        """Send, inside a synchronized update if one was asked for."""
        if not data:
            return
        if self._sync_asked:
            self._sync_asked = False
            super().write(SYNC_ON)
        super().write(data)
