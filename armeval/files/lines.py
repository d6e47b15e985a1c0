"""The lines of a text file, whatever ends them, and the file without those that say nothing about the data."""

from __future__ import annotations

import io
import re
from collections.abc import Iterator
from typing import Protocol

_BLOCK = 1 << 20
_SAYS_NOTHING = re.compile(rb"(?:(?<=[\r\n])|\A)[ \t]*(?:#[^\r\n]*)?(?:\r\n|\r|\n|\Z)")


class Stream(Protocol):
    """What bytes are read from."""

    def read(self, nbytes: int, /) -> bytes:
        """Give up to so many bytes; none at the end."""


def whole_lines(stream: Stream) -> Iterator[bytes]:
    """Give the rest of the stream in blocks that end where a line ends."""
    held = b""
    while block := bytes(stream.read(_BLOCK)):
        block = held + block
        # A carriage return at the very end may be half of a line end.
        cut = max(block.rfind(b"\n"), block.rfind(b"\r", 0, len(block) - 1)) + 1
        held = block[cut:]
        if cut:
            yield block[:cut]
    if held:
        yield held


def lines(stream: Stream) -> Iterator[bytes]:
    """Give the rest of the stream line by line, with the line ends."""
    for block in whole_lines(stream):
        yield from block.splitlines(keepends=True)


class WithoutComments(io.RawIOBase):
    """The rest of a stream with its blank lines and its comment lines left out.

    Parameters
    ----------
    stream
        Stands at the start of a line.
    """

    def __init__(self, stream: Stream) -> None:
        self._blocks = (_SAYS_NOTHING.sub(b"", block) for block in whole_lines(stream))
        self._block = memoryview(b"")

    def readable(self) -> bool:
        """Whether it can be read from."""
        return True

    def readinto(self, buffer: bytearray | memoryview, /) -> int:  # type: ignore[override]
        """Fill a buffer; give the number of bytes put into it, 0 at the end."""
        while not self._block:
            block = next(self._blocks, None)
            if block is None:
                return 0
            self._block = memoryview(block)
        count = min(len(buffer), len(self._block))
        buffer[:count] = self._block[:count]
        self._block = self._block[count:]
        return count
