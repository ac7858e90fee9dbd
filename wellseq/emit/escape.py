"""Names as they must be written so that they cannot act: in Markdown, in CSV, as a file name."""

from __future__ import annotations

import re

from wellseq.base.names import printable

_MARKDOWN = re.compile(r"([\\`*_\[\]<>#|~&]|^[-+=])")
_FORMULA = ("=", "+", "-", "@", "\t", "\r")
_UNSAFE = re.compile(r"[^A-Za-z0-9_-]+")


def markdown(text: str) -> str:
    """The text on one line with every character that Markdown or HTML would act on escaped."""
    return _MARKDOWN.sub(r"\\\1", printable(" ".join(text.split())))


def csv_text(text: str) -> str:
    """A text cell of RFC 4180: quoted where needed; a formula's first sign gets `'` before it."""
    text = printable(text)
    if text.startswith(_FORMULA):
        text = "'" + text
    if any(sign in text for sign in ',"\r\n'):
        return '"' + text.replace('"', '""') + '"'
    return text


def file_name(name: str) -> str:
    """A part of a file name in plain ASCII letters; what is left out becomes `_`."""
    return _UNSAFE.sub("_", name)[:40] or "_"
