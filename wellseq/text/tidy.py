"""Source text → the same text in the one layout: words, comments, order and line ends kept.

The author's lines stay lines; no statement is joined or cut.  What is settled here is the rest:
two blanks of indentation a block and for what goes on with a statement, one blank between words,
none inside parentheses, at most one empty line, no `;` where a line end or a brace does its work,
`±`, `-` and `u` for their other spellings, comments of neighbouring lines in one column.  A text
with mistakes has no layout.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from itertools import pairwise

from wellseq.text.mistakes import Mistakes
from wellseq.text.parse import parse
from wellseq.text.scan import scan
from wellseq.text.split import GOES_ON_AFTER, GOES_ON_BEFORE
from wellseq.text.tokens import Token
from wellseq.text.tree import Number

STEP = "  "
COMMENT_COLUMN_MAX = 60
"""Characters of a line beyond which its comment no longer moves those of its neighbours."""
_COMMENT = re.compile(r"#[^\r\n]*")
_LINE_END = re.compile(r"\r\n|\n|\r")
_DIGITS = re.compile(r"[0-9.]+(?:[eE][+\-−]?[0-9]+)?")
_TIGHT_AFTER = frozenset(("LPAR", "_DOTS"))
_TIGHT_BEFORE = frozenset(("RPAR", "_COMMA", "SEMICOLON", "_DOTS"))
_SIGNS = frozenset(("PLUS", "MINUS"))
_VALUES = frozenset(("NAME", "NUMBER", "RPAR"))
_SPELLED = {"_SPREAD": "±", "MINUS": "-", "SEMICOLON": ";"}


@dataclass(slots=True)
class _Line:
    """One line: its tokens, its comment with the `#`, whether an empty line stands above it."""

    tokens: list[Token] = field(default_factory=list)
    comment: str = ""
    gap: bool = False
    depth: int = 0

    @property
    def closers(self) -> int:
        """How many closing braces the line begins with."""
        kinds = [token.type == "RBRACE" for token in self.tokens]
        return kinds.index(False) if False in kinds else len(kinds)


def tidy(source: str) -> str | None:
    """The text in the one layout; None for a text with mistakes, which is better left alone."""
    mark = "\ufeff" if source.startswith("\ufeff") else ""
    body = source.removeprefix("\ufeff")
    if parse(body, "").mistakes:
        return None
    lines = _lines(body)
    verbs = _indent(lines)
    _drop_gaps(lines)
    written = [(_code(line, body, verbs), line) for line in lines]
    end = _ending(body)
    return mark + "".join(f"{line}{end}" for line in _with_comments(written))


def comments(source: str) -> list[str]:
    """The comments of a text in order, without blanks at their ends."""
    return [line.comment for line in _lines(source.removeprefix("\ufeff")) if line.comment]


def _ending(source: str) -> str:
    """The line end that the text has most often; LF before CRLF before CR where two are equal."""
    found = _LINE_END.findall(source)
    return max(("\n", "\r\n", "\r"), key=found.count)


def _lines(source: str) -> list[_Line]:
    """The lines that hold anything, each with what stands on it; needless `;` are left out."""
    lines: list[_Line] = []
    line, gap, at = _Line(), False, 0
    left_out = False
    for token in _scanned(source):
        between = source[at : token.start]
        at = token.end
        if comment := _COMMENT.search(between):
            line.comment = comment[0].rstrip()
        if token.type == "NEEDLESS":
            left_out = True
        elif token.type != "NEWLINE":
            line.tokens.append(token)
        elif line.tokens or line.comment:
            line.gap = gap and bool(lines)
            lines.append(line)
            line, gap, left_out = _Line(), False, False
        else:
            gap, left_out = gap or not left_out, False
    return lines


def _scanned(source: str) -> list[Token]:
    """All tokens and a last line end; a `;` that ends nothing has the type NEEDLESS."""
    tokens = list(scan(source, Mistakes("")))
    end = len(source)
    tokens.append(Token("NEWLINE", "\n", "", 0, 0, end, end))
    words = [token for token in tokens if token.type != "NEWLINE"]
    after: dict[int, Token] = {id(a): b for a, b in pairwise(words)}
    kept: list[Token] = []
    visible = [token for token in tokens if token.type != "SEMICOLON"]
    ends = {id(a) for a, b in pairwise(visible) if b.type == "NEWLINE"}
    ends_line: set[int] = set()
    last = 0
    for token in tokens:
        if token.type != "SEMICOLON":
            last = id(token)
        elif last in ends or not last:
            ends_line.add(id(token))
    new_line = True
    for token in tokens:
        if token.type == "SEMICOLON" and _is_needless(
            token, kept, after.get(id(token)), new_line, id(token) in ends_line
        ):
            token.type = "NEEDLESS"
        elif token.type != "NEWLINE":
            kept.append(token)
        new_line = token.type == "NEWLINE" or (new_line and token.type == "NEEDLESS")
    return tokens


def _is_needless(
    token: Token, kept: list[Token], after: Token | None, begins_line: bool, ends_line: bool
) -> bool:
    """Whether every statement ends where it does without this `;`."""
    before = kept[-1] if kept else None
    if before is None or before.type in ("SEMICOLON", "LBRACE"):
        return True
    if after is None or after.type == "RBRACE":
        return before.type not in GOES_ON_AFTER
    if not (ends_line or begins_line):
        return False
    follows = after.type in GOES_ON_BEFORE or after.type == "LBRACE"
    return not follows and before.type not in GOES_ON_AFTER


def _indent(lines: list[_Line]) -> set[int]:
    """Give every line its depth; returns the ids of the tokens that are verbs."""
    verbs: set[int] = set()
    parentheses = 0
    begun_by = [""]
    last: Token | None = None
    for line in lines:
        goes_on = bool(line.tokens) and (parentheses > 0 or _goes_on(last, line.tokens[0]))
        line.depth = len(begun_by) - 1 - line.closers
        line.depth += goes_on and begun_by[-1] != "CLAUSE"
        begins = not goes_on
        for token in line.tokens:
            begins = begins or last is None or last.type in ("LBRACE", "SEMICOLON")
            if begins:
                begun_by[-1] = token.type
                verbs.add(id(token))
            begins = begins and token.type == "STRING"
            if token.type == "LBRACE":
                begun_by.append("")
            elif token.type == "RBRACE" and len(begun_by) > 1:
                begun_by.pop()
            parentheses += {"LPAR": 1, "RPAR": -1}.get(token.type, 0)
            last = token
    _indent_comments(lines)
    return verbs


def _goes_on(last: Token | None, first: Token) -> bool:
    """Whether a line goes on with the statement of the line above."""
    if last is None or last.type in ("SEMICOLON", "LBRACE"):
        return False
    return last.type in GOES_ON_AFTER or first.type in GOES_ON_BEFORE


def _indent_comments(lines: list[_Line]) -> None:
    """A comment on a line of its own stands as deep as what follows it in its block."""
    depth = 0
    for line in reversed(lines):
        if line.tokens:
            depth = line.depth + line.closers
        else:
            line.depth = depth


def _drop_gaps(lines: list[_Line]) -> None:
    """No empty line stands after an opening brace or before a closing one."""
    before: _Line | None = None
    for line in lines:
        opened = before is not None and bool(before.tokens) and before.tokens[-1].type == "LBRACE"
        if opened or line.closers:
            line.gap = False
        before = line


def _code(line: _Line, source: str, verbs: set[int]) -> str:
    """The words of a line with their blanks and their indentation."""
    pieces = [STEP * line.depth]
    earlier: Token | None = None
    before: Token | None = None
    for token in line.tokens:
        if before is not None and _apart(earlier, before, token, verbs):
            pieces.append(" ")
        pieces.append(_spelled(token, source))
        earlier, before = before, token
    return "".join(pieces)


def _apart(earlier: Token | None, before: Token, token: Token, verbs: set[int]) -> bool:
    """Whether a blank stands between two tokens."""
    if before.type in _TIGHT_AFTER or token.type in _TIGHT_BEFORE:
        return False
    if before.type in _SIGNS and (earlier is None or earlier.type not in _VALUES):
        return False  # a sign, not an operation
    if token.type == "LPAR" and before.type == "NAME":
        return id(before) in verbs  # after any other name they are arguments
    return True


def _spelled(token: Token, source: str) -> str:
    """A token as it is written in the one layout; digits and names stay as they are."""
    written = source[token.start : token.end]
    if isinstance(token.value, Number):
        digits = _DIGITS.match(written)
        number = (digits[0] if digits else written).replace("−", "-")
        return f"{number} {token.value.unit}".rstrip()
    return _SPELLED.get(token.type, written)


def _with_comments(written: Iterable[tuple[str, _Line]]) -> Iterator[str]:
    """The finished lines, empty ones among them."""
    for run in _runs(written):
        lengths = [len(code) for code, line in run if line.tokens and line.comment]
        column = max((one for one in lengths if one <= COMMENT_COLUMN_MAX), default=0) + 2
        for code, line in run:
            if line.gap:
                yield ""
            if line.tokens and line.comment:
                yield code + " " * max(2, column - len(code)) + line.comment
            else:
                yield code + line.comment


def _runs(written: Iterable[tuple[str, _Line]]) -> Iterator[list[tuple[str, _Line]]]:
    """Neighbouring lines that all have a comment beside their code; any other line alone."""
    run: list[tuple[str, _Line]] = []
    for code, line in written:
        if run and (line.gap or not (line.tokens and line.comment)):
            yield run
            run = []
        run.append((code, line))
    if run:
        yield run
