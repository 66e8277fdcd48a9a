"""What goes on after something could not be done, and on a machine that is too busy.

Textual ends the message loop of whatever raises: it would hear no key any more. What is raised on purpose,
such as a full disk or a casebook that another program holds, is said in words instead. And it leaves out a
timer that starts late, also one that is to fire once.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from textual.message_pump import MessagePump

from calc.errors import PlatesideError

if TYPE_CHECKING:
    from textual.message import Message
    from textual.timer import Timer


class Steady(MessagePump):
    """An app, a page or a widget that goes on; stands before Textual's own class."""

    def set_timer(self, *arguments: Any, **named: Any) -> Timer:  # noqa: ANN401  (Textual's own)
        """Return a timer that fires once in any case."""
        timer = super().set_timer(*arguments, **named)
        timer._skip = False  # it starts to run only after this
        return timer

    async def _dispatch_message(self, message: Message) -> None:
        """Hand a message on; what was raised on purpose ends here."""
        try:
            await super()._dispatch_message(message)
        except PlatesideError as error:
            self.app._handle_exception(error)
