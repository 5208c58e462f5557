"""Names and other texts from files, made safe to print.

A name is data: it must not move the cursor, turn the direction of a line, break a table or
fill the screen.
"""

from __future__ import annotations

import unicodedata
from itertools import accumulate

_JOINERS = "\u200c\u200d"
"""Zero-width joiners: format characters too, but Persian and Indic spelling needs them."""

_UNSAFE = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}
"""Unicode categories of control, format, surrogate, private, unassigned and line characters."""

_RIGHT_TO_LEFT = {"R", "AL", "AN"}

_LEFT_TO_RIGHT_MARK = "\u200e"


def plain(text: object, limit: int = 40) -> str:
    r"""A text on one line, of at most `limit` columns, with unsafe characters escaped.

    Parameters
    ----------
    text : object
        Anything; it is turned into a string.
    limit : int
        A longer text ends in an ellipsis.

    Returns
    -------
    str

    Examples
    --------
    >>> print(plain("Callao\nLima"))
    Callao\x0aLima
    >>> plain("Llanfairpwllgwyngyll", limit=8)
    'Llanfai…'
    """
    escaped = "".join(_escape(c) for c in unicodedata.normalize("NFC", str(text)))
    if columns(escaped) <= limit:
        return escaped
    widths = accumulate(_columns(character) for character in escaped)
    return escaped[: sum(width < limit for width in widths)] + "…"


def columns(text: str) -> int:
    """How many columns of a terminal a text fills: East Asian characters two, marks none."""
    return sum(_columns(character) for character in text)


def pad(text: str, width: int, right: bool = False) -> str:
    """A text filled with spaces to a number of columns, to its right or to its left.

    A text written from right to left is closed by a mark, so that it does not draw the
    numbers that follow it to the wrong side.
    """
    spaces = " " * (width - columns(text))
    if any(unicodedata.bidirectional(c) in _RIGHT_TO_LEFT for c in text):
        text += _LEFT_TO_RIGHT_MARK
    return spaces + text if right else text + spaces


def _escape(character: str) -> str:
    if character in _JOINERS or unicodedata.category(character) not in _UNSAFE:
        return " " if unicodedata.category(character) == "Zs" else character
    code = ord(character)
    return f"\\x{code:02x}" if code < 0x100 else f"\\u{code:04x}"


def _columns(character: str) -> int:
    if unicodedata.combining(character) or character in _JOINERS:
        return 0
    return 2 if unicodedata.east_asian_width(character) in "WF" else 1
