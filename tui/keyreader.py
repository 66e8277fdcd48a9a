"""Bytes from a terminal to keys. Whatever comes, the keyboard goes on.

A byte that is no UTF-8 (a terminal set to another character set, noise on the line) becomes a
replacement character, a code that cannot be read is dropped, and what nobody asked for is left out:
mouse events, and sizes that are told by escape code instead of by the system.
"""

from __future__ import annotations

from codecs import getincrementaldecoder
from typing import TYPE_CHECKING, Final

from textual import events, messages
from textual._xterm_parser import XTermParser

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator

    from textual.message import Message

NOT_ASKED_FOR: Final = (events.Resize, events.MouseEvent, messages.InBandWindowResize)


class KeyReader:
    """Reads what a terminal sends, piece by piece as it comes."""

    def __init__(self) -> None:
        self._decode = getincrementaldecoder("utf-8")("replace").decode
        self._parser = XTermParser()

    def feed(self, data: bytes) -> Iterator[Message]:
        """Yield the keys and pastes in the next bytes; what is torn waits for its other half."""
        for character in self._decode(data):
            # one at a time: where a code breaks the parser, what is typed behind it still comes
            yield from self._wanted(lambda character=character: self._parser.feed(character))  # type: ignore[misc]

    def tick(self) -> Iterator[Message]:
        """Yield the key of a torn code whose other half did not come in time, such as Escape alone."""
        yield from self._wanted(self._parser.tick)

    def _wanted(self, parse: Callable[[], Iterable[Message]]) -> Iterator[Message]:
        """Yield what is parsed and asked for; start anew where the parser fails."""
        try:
            yield from (message for message in parse() if not isinstance(message, NOT_ASKED_FOR))
        except Exception:
            self._parser = XTermParser()
