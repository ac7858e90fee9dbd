"""TOML text → plain values and the place of each key, or what keeps it from being TOML.

Line length, nesting, dotted keys and the number of words are bounded before the standard reader
sees the text.
"""

from __future__ import annotations

import re
import tomllib

from wellseq.base.finding import Mistake
from wellseq.base.names import printable
from wellseq.base.place import Place
from wellseq.model.toml_places import Places, locate

LINE_MAX = 10_000

_LINE = re.compile(r"[^\r\n]++")
_PLACE_IN_MESSAGE = re.compile(r"(.*?) \(at (?:line (\d+), column (\d+)|end of document)\)", re.S)
_GIVEN_TWICE = re.compile(r"Cannot overwrite a value|Cannot declare .* twice|.*namespace.*", re.S)
_QUOTES = 'quantities, names and texts stand in quotes: radius = "15 mm"'
_PLAINER = (
    (_GIVEN_TWICE, "this table or key is given twice", "a list of tables is written [[name]]"),
    (r"Illegal character '\\n'", "this text has no closing quote on its line", ""),
    (r"Expected newline or end", "the line should end here", _QUOTES),
    (r"Invalid value", "a value is expected here", _QUOTES),
)
"""The TOML reader's sentence (its beginning), what it means here, and what would be right."""


def parse(source: str, shown: str) -> tuple[dict[str, object], Places] | Mistake:
    """Plain TOML values and the place of each key, or what keeps the text from being TOML."""
    text = source.removeprefix("\ufeff")
    places = locate(text, shown)
    bomb = _too_large(places)
    if bomb is not None:
        return bomb
    try:
        return tomllib.loads(text), places
    except RecursionError:
        return Mistake("too-large", Place(shown), "lists and tables are nested too deeply")
    except ValueError as error:
        return _syntax(str(error), places)


def _too_large(places: Places) -> Mistake | None:
    """The first thing that would cost the TOML reader more than its size is worth."""
    for line in _LINE.finditer(places.source):
        if len(line.group()) > LINE_MAX:
            place = places.span(line.start() + LINE_MAX, line.end())
            hint = f"at most {LINE_MAX} characters a line"
            return Mistake("too-large", place, "this line is too long", hint)
    if places.excess is None:
        return None
    token, message, hint = places.excess
    return Mistake("too-large", places.span(token.start, token.end), message, hint)


def _syntax(message: str, places: Places) -> Mistake:
    """The TOML reader's complaint with its place taken out of the sentence."""
    match = _PLACE_IN_MESSAGE.fullmatch(message)
    what, line, column = match.groups() if match else (message, None, None)
    if _GIVEN_TWICE.match(what) and places.repeated:
        place = places.span(*places.repeated[0])
        return Mistake("syntax", place, "this key is given twice", "keep one of the two")
    if line is None or column is None:
        end = len(places.source)
        place = places.span(end, end)
    else:
        place = Place(places.file, int(line), int(column), int(line), int(column) + 1)
    for pattern, better, hint in _PLAINER:
        if re.match(pattern, what):
            return Mistake("syntax", place, f"this is not TOML: {better}", hint)
    return Mistake("syntax", place, f"this is not TOML: {printable(what[:1].lower() + what[1:])}")
