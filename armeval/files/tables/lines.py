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

    def seekable(self) -> bool:
        """Whether it can go back."""

    def seek(self, position: int, whence: int, /) -> int:
        """Go to a byte, counted from here where ``whence`` is 1."""


def whole_lines(stream: Stream) -> Iterator[bytes | memoryview]:
    """Give the rest of the stream in blocks that end where a line ends.

    A stream that can go back is read from the last line end on again, so that no block has to be put together.
    """
    held = b""
    goes_back = stream.seekable()
    while block := stream.read(BLOCK):
        block = held + block if held else block
        # A carriage return at the very end may be half of a line end.
        cut = block.rfind(b"\n") + 1 or block.rfind(b"\r", 0, len(block) - 1) + 1
        if not cut:
            held = block
            continue
        if goes_back:
            stream.seek(cut - len(block), 1)
            held = b""
        else:
            held = block[cut:]
        yield memoryview(block)[:cut]
    if held:
        yield held


def lines(stream: Stream) -> Iterator[bytes]:
    """Give the rest of the stream line by line, with the line ends."""
    for block in whole_lines(stream):
        yield from bytes(block).splitlines(keepends=True)


def without_comments(block: bytes | memoryview) -> bytes:
    """Leave the blank lines and the comment lines out of a block of whole lines."""
    return _SAYS_NOTHING.sub(b"", block)


def count_lines(block: bytes | memoryview) -> int:
    """Count the lines of a block of whole lines."""
    text = bytes(block)
    if b"\r" in text:
        return len(text.splitlines())
    return text.count(b"\n") + (not text.endswith(b"\n"))
