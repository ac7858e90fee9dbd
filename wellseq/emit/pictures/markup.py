"""Elements of HTML and SVG as text, with everything that comes from a file made harmless.

`Markup` is text that is markup already; any other text is escaped on its way into an element, so
nothing gets into a page unescaped by being forgotten.
"""

from __future__ import annotations

from collections.abc import Iterable
from html import escape
from json import dumps

from wellseq.base.names import printable

VOID = frozenset(("br", "hr", "input", "meta", "link", "wbr"))
LONG = 40
Attribute = str | int | float | None


class Markup(str):
    """Text that is markup and is not escaped again."""

    __slots__ = ()


def tag(element: str, *inside: str | Iterable[str], **attributes: Attribute) -> Markup:
    """An element; `class_` stands for `class`, `data_at` for `data-at`; None leaves one out."""
    words = [element]
    for name, value in attributes.items():
        if value is not None:
            words.append(f'{_attribute(name)}="{escape(_said(value))}"')
    if element in VOID:
        return Markup(f"<{' '.join(words)}>")
    return Markup(f"<{' '.join(words)}>{joined(*inside)}</{element}>")


def joined(*parts: str | Iterable[str]) -> Markup:
    """Parts one after the other, escaped where they are not markup."""
    pieces = []
    for part in parts:
        if isinstance(part, Markup):
            pieces.append(str(part))
        elif isinstance(part, str):
            pieces.append(escape(harmless(part)))
        else:
            pieces.append(joined(*part))
    return Markup("".join(pieces))


def harmless(text: str) -> str:
    """A text without signs that steer how it is shown."""
    return text if text.isascii() and text.isprintable() else printable(text)


def name(text: str, longest: int = LONG) -> Markup:
    """A name that cannot turn the text around it; a long one is cut, and whole on hover.

    Isolation: HTML Living Standard, `bdi`.
    """
    shown = cut(text, longest)
    whole = printable(text) if shown != printable(text) else None
    return tag("bdi", Markup(escape(shown)), title=whole)


def cut(text: str, longest: int = LONG) -> str:
    """A text that can be printed, its middle left out where it is longer than `longest`."""
    shown = printable(" ".join(text.split()))
    if len(shown) <= longest:
        return shown
    half = (longest - 1) // 2
    return f"{shown[: longest - 1 - half]}…{shown[len(shown) - half :]}"


def number(value: float, shown: str) -> Markup:
    """A number as people read it, with its exact value for machines."""
    return tag("data", shown, value=repr(float(value)))


def island(data: object) -> Markup:
    """Plain values as JSON that no HTML parser takes for markup, whatever the texts in it say."""
    text = dumps(data, ensure_ascii=True, allow_nan=False, sort_keys=True, separators=(",", ":"))
    for sign in "<>&":
        text = text.replace(sign, f"\\u{ord(sign):04x}")
    return Markup(text)


def _attribute(word: str) -> str:
    return word.rstrip("_").replace("_", "-")


def _said(value: str | int | float) -> str:
    if isinstance(value, str):
        return harmless(value)
    return f"{value:.6g}" if isinstance(value, float) else str(value)
