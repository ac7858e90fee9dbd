"""Source text → tokens, one after the other, with the mistakes that a single token can hold.

A token that is wrong comes out as BAD, so that its statement can be left out and the next one read.
Columns count characters; lines end at LF, CRLF and CR only.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from functools import lru_cache

from wellseq.base.names import RESERVED
from wellseq.base.place import Place
from wellseq.base.quantity import RESERVED_UNIT_WORDS, QuantityError, read_number
from wellseq.text import odd
from wellseq.text.mistakes import Mistakes, quoted
from wellseq.text.near_units import near_unit
from wellseq.text.tokens import MARKS, Token
from wellseq.text.tree import Number

NAME_LENGTH_MAX = 200
STRING_LENGTH_MAX = 2000

_BLANK = r"[ \t\u00a0\u1680\u2000-\u200a\u202f\u205f\u3000]"
_UNIT = "|".join(
    re.sub("^u", "[uµμ]", word) for word in sorted(RESERVED_UNIT_WORDS, key=len, reverse=True)
)
TOKEN = re.compile(
    rf"""{_BLANK}*+ (?:
      (?P<name> [A-Za-z_][A-Za-z0-9_]*+ (?![^\x00-\x7f]) )
    | (?P<number> [0-9]++ (?:\.(?!\.)[0-9]*+)? (?:[eE][+\-−]?[0-9]++)? )
      (?: {_BLANK}*+ (?P<unit> % | /c?m3(?!\w) | (?:{_UNIT})(?:/(?:{_UNIT}))?(?!\w) ) )?
    | (?P<mark> \.\. | \+- | ;++ | [-−+*/=,(){{}}±] )
    | (?P<newline> \r\n | \r | \n )
    | (?P<string> "[^"\r\n]*+"? )
    | (?P<comment> \#[^\r\n]*+ )
    | (?P<other> . )
    )""",
    re.VERBOSE | re.DOTALL,
)
"""No quantifier stands inside another, and what can run long gives nothing back (`*+`)."""

_FOREIGN_UNIT = re.compile(rf"{_BLANK}*+([^\W\d]\w*+(?:/[^\W\d]\w*+)?)")
_GLUED_DIVISOR = re.compile(r"/[^\W\d]\w*+")
_HYPHENATED = re.compile(r"(?:-\w++)++")
_MICRO = str.maketrans({"µ": "u", "μ": "u"})
_KINDS = {**dict.fromkeys(RESERVED, "CLAUSE"), "because": "BECAUSE", "allow": "_ALLOW"}

_exact = lru_cache(maxsize=4096)(read_number)


def scan(
    source: str, mistakes: Mistakes, more_marks: Mapping[str, str] | None = None
) -> Iterator[Token]:
    """All tokens of a text without its byte order mark; comments and blanks leave none.

    `more_marks` are single signs that have a meaning in this kind of file only, with their types.
    A token that is wrong has its mistake in `mistakes` and comes out with the type BAD.
    """
    return _Scanner(source, mistakes, more_marks or {}).tokens()


class _Scanner:
    """Where the scan is: the offset, the line, the offset of the line's start, the last tokens."""

    def __init__(self, source: str, mistakes: Mistakes, more_marks: Mapping[str, str]) -> None:
        self.source = source
        self.mistakes = mistakes
        self.more_marks = more_marks
        self.file = mistakes.file
        self.offset = 0
        self.line = 1
        self.line_start = 0
        self.last: Token | None = None
        self.before_last: Token | None = None

    def tokens(self) -> Iterator[Token]:
        source, match_at = self.source, TOKEN.match
        readers = {
            "name": self._name,
            "number": self._number,
            "unit": self._number,
            "mark": self._mark,
            "string": self._string,
            "other": self._other,
        }
        while match := match_at(source, self.offset):
            kind = str(match.lastgroup)
            if kind == "comment":
                self.offset = match.end()
                continue
            if kind == "newline":
                token = self._token("NEWLINE", "\n", match.start(kind), match.end())
                self.line += 1
                self.line_start = match.end()
            else:
                token = readers[kind](match)
            self.before_last, self.last = self.last, token
            yield token

    def _token(self, type: str, value: object, start: int, end: int) -> Token:
        """A token over source[start:end], after which the scan goes on."""
        self.offset = end
        return Token(type, value, self.file, self.line, start - self.line_start + 1, start, end)

    def _bad(
        self, start: int, end: int, message: str, hint: str = "", name: str = "syntax"
    ) -> Token:
        token = self._token("BAD", self.source[start:end], start, end)
        self.mistakes.add(name, token.place, message, hint)
        return token

    def _place(self, start: int, end: int) -> Place:
        column = start - self.line_start + 1
        return Place(self.file, self.line, column, self.line, column + end - start)

    def _name(self, match: re.Match[str]) -> Token:
        return self._word(match.start("name"), match.end())

    def _word(self, start: int, end: int) -> Token:
        text = self.source[start:end]
        if len(text) > NAME_LENGTH_MAX:
            message = f"{quoted(text)} is longer than {NAME_LENGTH_MAX} characters"
            return self._bad(start, end, message, name="too-large")
        if self.last is not None and self.last.type == "_ALLOW":
            tail = _HYPHENATED.match(self.source, end)
            if tail:
                return self._token("FINDING", self.source[start : tail.end()], start, tail.end())
        return self._token(_KINDS.get(text, "NAME"), text, start, end)

    def _number(self, match: re.Match[str]) -> Token:
        start, end = match.start("number"), match.end()
        text, unit = match["number"].replace("−", "-"), (match["unit"] or "").translate(_MICRO)
        if not unit or self.source.startswith("/", end):
            unit, end = self._unit_meant(text, unit, end)
        if unit and self._is_decimal_comma(start):
            return self._decimal_comma(start, end)
        if not unit and end < len(self.source) and odd.goes_on_a_word(self.source[end]):
            tail = odd.word_end(self.source, end)
            message = f"{quoted(self.source[start:tail])} is neither a number nor a name"
            return self._bad(start, tail, message, odd.glued_hint(text, self.source[end:tail]))
        try:
            value = _exact(text)
        except QuantityError as error:
            message = str(error) if len(text) < 100 else f"the number {quoted(text)} is too long"
            return self._bad(start, end, message, error.hint, name="too-large")
        return self._token("NUMBER", Number(value, unit, self._place(start, end)), start, end)

    def _unit_meant(self, number: str, unit: str, end: int) -> tuple[str, int]:
        """The unit to go on with, and where it ends, when `unit` is none or not all that is there.

        A word that looks like a unit is a mistake and is read as the unit that it looks like, so
        that a definition does not drag all its uses along.
        """
        found = (_GLUED_DIVISOR if unit else _FOREIGN_UNIT).match(self.source, end)
        if not found:
            return unit, end
        whole = unit + found[0] if unit else found[1]
        words = [whole] if unit or "/" not in whole else [whole, whole.partition("/")[0]]
        for word in words:
            stop = found.end() - len(whole) + len(word)
            if exact := odd.unit_in_disguise(word):
                return exact, stop
            if meant := near_unit(word):
                place = self._place(stop - len(word), stop)
                hint = f"write {quoted(f'{number} {meant}')}"
                self.mistakes.add("unit-mismatch", place, f"{quoted(word)} is not a unit", hint)
                return meant, stop
        return unit, end

    def _is_decimal_comma(self, start: int) -> bool:
        comma, whole = self.last, self.before_last
        return (
            comma is not None
            and whole is not None
            and comma.type == "_COMMA"
            and whole.type == "NUMBER"
            and not whole.value.unit
            and whole.end == comma.start
            and comma.end == start
        )

    def _decimal_comma(self, start: int, end: int) -> Token:
        assert self.before_last is not None
        first = self.before_last.start
        place, written = self._place(first, end), self.source[first:end]
        self.mistakes.add("syntax", place, *odd.decimal_comma(written))
        return self._token("BAD", written, start, end)

    def _mark(self, match: re.Match[str]) -> Token:
        start, end, text = match.start("mark"), match.end(), match["mark"]
        last = self.last
        if text == "-" and last is not None:
            word = last.type in ("NAME", "CLAUSE", "BECAUSE") or (
                last.type == "NUMBER" and last.value.unit.isalpha()
            )
            if word and last.end == start and odd.begins_a_name(self.source[end : end + 1]):
                return self._hyphen(last, start)
        # Any number of semicolons in a row ends one statement.
        return self._token(MARKS[text[0] if text[0] == ";" else text], text, start, end)

    def _hyphen(self, last: Token, start: int) -> Token:
        first, end = last.start, start
        while self.source.startswith("-", end) and odd.begins_a_name(
            self.source[end + 1 : end + 2]
        ):
            end = odd.word_end(self.source, end + 1)
        written = self.source[first:end]
        message = f"{quoted(written)} has a hyphen and no blanks; no name has a hyphen in it"
        apart = self.source[first:start] + self.source[start:end].replace("-", " - ")
        hint = f"write {quoted(apart)} for a difference, or a name with '_'"
        self.mistakes.add("syntax", self._place(first, end), message, hint)
        return self._token("BAD", written, start, end)

    def _string(self, match: re.Match[str]) -> Token:
        start, end, text = match.start("string"), match.end(), match["string"]
        if len(text) < 2 or not text.endswith('"'):
            message = f"the text that begins with {quoted(text)} has no closing '\"' on its line"
            return self._bad(start, end, message, "a text stands between two '\"' on one line")
        if len(text) > STRING_LENGTH_MAX + 2:
            message = f"a text of more than {STRING_LENGTH_MAX} characters"
            return self._bad(start, end, message, name="too-large")
        if control := odd.CONTROL_IN_TEXT.search(text):
            at = start + control.start()
            self.mistakes.add("syntax", self._place(at, at + 1), *odd.control(control[0]))
            return self._token("BAD", text, start, end)
        return self._token("STRING", text[1:-1], start, end)

    def _other(self, match: re.Match[str]) -> Token:
        start = match.start("other")
        if match["other"] in self.more_marks:
            return self._token(self.more_marks[match["other"]], match["other"], start, start + 1)
        if odd.begins_a_name(self.source[start]):
            return self._word(start, odd.word_end(self.source, start))
        end, message, hint = odd.explain(self.source, start)
        return self._bad(start, end, message, hint)
