"""Where each key of a TOML text stands: path such as ("electrode", 3, "radius") → place.

The standard reader gives values without places.  This one gives places without values: it splits
the text into tokens and follows headers, dotted keys, arrays and inline tables.  It never raises,
takes time in proportion to the text, and does not recurse; for a text that is not TOML it gives the
places up to where it loses the thread.  It stops where the text goes beyond a limit, since the
standard reader recurses over nested lists and takes time that grows with the square of a dotted
key's parts.  Grammar: TOML v1.0.0.
"""

from __future__ import annotations

import re
from bisect import bisect_right
from dataclasses import dataclass, field
from typing import NamedTuple

from wellseq.base.place import Place

Path = tuple[str | int, ...]
ELEMENTS_MAX = 1000
"""Elements of one array that get a place of their own."""
TOKENS_MAX = 150_000
NESTING_MAX = 64
DOTS_MAX = 8
WORD_MAX = 100

# A string that is never closed is one token all the same: else each quote would scan to the end.
_TOKEN = re.compile(
    r"(?P<newline>\r\n|\n|\r)"
    r"|(?P<blank>[ \t]+)"
    r"|(?P<comment>\#[^\r\n]*)"
    r'|(?P<basic>"""(?:[^"\\]++|\\[\s\S]|"(?!""))*+(?:"{3,5})?+|"(?:[^"\\\r\n]++|\\.)*+"?+)'
    r"|(?P<literal>'''(?:[^']++|'(?!''))*+(?:'{3,5})?+|'[^'\r\n]*+'?+)"
    r"|(?P<bare>[A-Za-z0-9_+:\-]++)"
    r"|(?P<mark>[\[\]{}=,.])"
    r"|(?P<other>[\s\S])"
)
_LINE_END = re.compile(r"\r\n|\n|\r")


class Token(NamedTuple):
    """A piece of the text: its kind (a group of the pattern), its characters, where it begins."""

    kind: str
    text: str
    start: int

    @property
    def end(self) -> int:
        """The offset after the last character."""
        return self.start + len(self.text)


class Excess(NamedTuple):
    """What goes beyond a limit: the token, what is wrong with it, and the limit in words."""

    token: Token
    message: str
    hint: str


class Tokens:
    """The tokens of a text one by one, blanks and comments left out, with one token in view.

    They end early, and `excess` says why, where the text goes beyond a limit.
    """

    def __init__(self, source: str) -> None:
        self._matches = _TOKEN.finditer(source)
        self._end = len(source)
        self._count = self._depth = self._dots = 0
        self.excess: Excess | None = None
        self.view = Token("newline", "", 0)
        self.move()

    def move(self) -> Token:
        """Step past the token in view and give it back; the end is a token of kind `end`."""
        passed = self.view
        for match in self._matches:
            kind = str(match.lastgroup)
            if kind not in ("blank", "comment"):
                self.view = Token(kind, match.group(), match.start())
                self._count_in(self.view)
                return passed
        self.view = Token("end", "", self._end)
        return passed

    def sees(self, text: str) -> bool:
        """Whether the token in view is this mark."""
        return self.view.kind == "mark" and self.view.text == text

    def _count_in(self, token: Token) -> None:
        self._count += 1
        if token.kind == "mark":
            self._depth = max(0, self._depth + (token.text in "[{") - (token.text in "]}"))
            self._dots = self._dots + 1 if token.text == "." else 0
        elif token.kind == "newline":
            self._dots = 0
        message, hint = self._beyond(token.text if token.kind == "bare" else "")
        if message:
            self.excess = Excess(token, message, hint)
            self._matches = iter(())
            self.view = Token("end", "", self._end)

    def _beyond(self, word: str) -> tuple[str, str]:
        if self._count > TOKENS_MAX:
            return "this file says too much for a trap", f"at most {TOKENS_MAX} words and signs"
        if self._depth > NESTING_MAX:
            return "lists and tables are nested too deeply", f"at most {NESTING_MAX} levels"
        if self._dots > DOTS_MAX:
            return "this key has too many parts", f"at most {DOTS_MAX} dots in a key"
        if len(word) > WORD_MAX:
            return "this word or number is too long", f"at most {WORD_MAX} characters"
        return "", ""


@dataclass
class Places:
    """The places of all keys and array elements of one text.

    `repeated` holds the spans of keys that were given a value twice, in order.  `excess` is what
    went beyond a limit, if anything did.
    """

    file: str
    source: str
    spans: dict[Path, tuple[int, int]] = field(default_factory=dict)
    repeated: list[tuple[int, int]] = field(default_factory=list)
    excess: Excess | None = None

    def __post_init__(self) -> None:
        ends = (match.end() for match in _LINE_END.finditer(self.source))
        self._starts = [0, *ends]

    def of(self, path: Path) -> Place:
        """Where the key, table or element stands; else where what holds it stands; else line 1."""
        for length in range(len(path), 0, -1):
            if path[:length] in self.spans:
                return self.span(*self.spans[path[:length]])
        return self.span(0, 0)

    def span(self, start: int, end: int) -> Place:
        """The place of the characters from `start` up to `end`."""
        line, column = self._line_column(start)
        end_line, end_column = self._line_column(end)
        return Place(self.file, line, column, end_line, end_column)

    def _line_column(self, offset: int) -> tuple[int, int]:
        line = bisect_right(self._starts, offset)
        return line, offset - self._starts[line - 1] + 1

    def note(self, path: Path, start: int, end: int) -> None:
        """Record where a path was first written."""
        self.spans.setdefault(path, (start, end))


@dataclass
class _Open:
    """An array or inline table that has not been closed yet; `index` counts array elements."""

    path: Path
    is_array: bool
    index: int = 0

    def expected(self) -> Path:
        """The path of the element that comes next in an array."""
        return (*self.path, self.index)


def locate(source: str, file: str) -> Places:
    """Find the place of every key of a TOML text; `file` is the name that the places will show."""
    places = Places(file, source)
    tokens = Tokens(source)
    sizes: dict[Path, int] = {}
    table: Path = ()
    while tokens.view.kind != "end":
        if tokens.view.kind == "newline":
            tokens.move()
        elif tokens.sees("["):
            table = _header(tokens, places, sizes, table)
        else:
            path = _key(tokens, places, table)
            if path is not None:
                _value(tokens, places, path)
            _skip_line(tokens)
    places.excess = tokens.excess
    return places


def _skip_line(tokens: Tokens) -> None:
    while tokens.view.kind not in ("newline", "end"):
        tokens.move()


def _parts(tokens: Tokens) -> list[Token]:
    """The parts of a dotted key in view; empty when there is none."""
    parts: list[Token] = []
    while tokens.view.kind in ("bare", "basic", "literal"):
        parts.append(tokens.move())
        if not tokens.sees("."):
            break
        tokens.move()
    return parts


def _word(part: Token) -> str:
    """The key as compared: quotes taken off; an escaped key keeps its escapes (none is known)."""
    return part.text if part.kind == "bare" else part.text[1:-1]


def _header(tokens: Tokens, places: Places, sizes: dict[Path, int], table: Path) -> Path:
    """Read `[a.b]` or `[[a.b]]`; gives the path of the table that it opens."""
    start = tokens.move().start
    is_array = tokens.sees("[")
    if is_array:
        tokens.move()
    parts = _parts(tokens)
    end = tokens.view.end
    while tokens.sees("]"):
        end = tokens.move().end
    _skip_line(tokens)
    if not parts:
        return table
    path: Path = ()
    for part in parts:
        path = (*path, _word(part))
        last = part is parts[-1]
        if last and is_array:
            sizes[path] = sizes.get(path, 0) + 1
        places.note(path, start, end)
        if path in sizes:
            path = (*path, sizes[path] - 1)
            places.note(path, start, end)
    return path


def _key(tokens: Tokens, places: Places, table: Path) -> Path | None:
    """Read `a.b =`; gives the path that gets a value, or None when it is not a key."""
    parts = _parts(tokens)
    if not parts or not tokens.sees("="):
        if not parts:
            tokens.move()
        return None
    tokens.move()
    path = table
    for part in parts[:-1]:
        path = (*path, _word(part))
        places.note(path, part.start, part.end)
    path = (*path, _word(parts[-1]))
    if path in places.spans:
        places.repeated.append((parts[-1].start, parts[-1].end))
    places.note(path, parts[0].start, parts[-1].end)
    return path


def _value(tokens: Tokens, places: Places, path: Path) -> None:
    """Read a value, noting array elements and the keys of inline tables."""
    stack: list[_Open] = []
    while True:
        here = stack[-1].expected() if stack and stack[-1].is_array else path
        token = tokens.view
        if token.kind == "end" or (token.kind == "newline" and not stack):
            return
        if token.kind == "mark" and token.text in "[{":
            _note_element(places, stack, token)
            tokens.move()
            stack.append(_Open(here, token.text == "["))
        elif token.kind == "mark" and token.text in "]}":
            if not stack:
                return
            tokens.move()
            stack.pop()
        elif tokens.sees(","):
            if not stack:
                return
            tokens.move()
            stack[-1].index += 1
        elif stack and not stack[-1].is_array and token.kind in ("bare", "basic", "literal"):
            path = _key(tokens, places, stack[-1].path) or stack[-1].path
            _scalar(tokens)
        else:
            _note_element(places, stack, token)
            tokens.move()


def _scalar(tokens: Tokens) -> None:
    """Step over the rest of a plain value, up to a mark that could end it or open a list."""
    while tokens.view.kind in ("bare", "basic", "literal", "other") or tokens.sees("."):
        tokens.move()


def _note_element(places: Places, stack: list[_Open], token: Token) -> None:
    if stack and stack[-1].is_array and stack[-1].index < ELEMENTS_MAX and token.kind != "newline":
        places.note(stack[-1].expected(), token.start, token.end)
