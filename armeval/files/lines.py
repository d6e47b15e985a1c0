"""The lines of a text file, whatever ends them."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Protocol

BLOCK = 1 << 22
_SAYS_NOTHING = re.compile(rb"(?:(?<=[\r\n])|\A)[ \t]*(?:#[^\r\n]*)?(?:\r\n|\r|\n|\Z)")


class Stream(Protocol):
    """What bytes are read from."""

    def read(self, nbytes: int, /) -> bytes:
        """Give up to so many bytes; none at the end."""


def whole_lines(stream: Stream) -> Iterator[bytes]:
    """Give the rest of the stream in blocks that end where a line ends."""
    held = b""
    while block := bytes(stream.read(BLOCK)):
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


def without_comments(block: bytes) -> bytes:
    """Leave the blank lines and the comment lines out of a block of whole lines."""
    return _SAYS_NOTHING.sub(b"", block)
