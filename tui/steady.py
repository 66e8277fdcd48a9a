"""What goes on after something could not be done.

Textual ends the message loop of whatever raises: it would hear no key any more. What is raised on purpose,
such as a full disk or a casebook that another program holds, is said in words instead.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from textual.message_pump import MessagePump

from calc.errors import PlatesideError

if TYPE_CHECKING:
    from textual.message import Message


class Steady(MessagePump):
    """An app, a page or a widget that goes on; stands before Textual's own class."""

    async def _dispatch_message(self, message: Message) -> None:
        """Hand a message on; what was raised on purpose ends here."""
        try:
            await super()._dispatch_message(message)
        except PlatesideError as error:
            self.app._handle_exception(error)
