"""The text of a rules file → RulesTree: scan, split where `rule` stands, read each rule on its own.

A mistake leaves its rule out and never hides another one; new lines mean nothing.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from contextlib import suppress
from functools import lru_cache
from itertools import pairwise
from typing import Any

from wellseq.base.data import data_folder
from wellseq.text.grammar import Unexpected
from wellseq.text.mistakes import Mistakes, ReadingStops
from wellseq.text.rules_build import Parsed, RuleBuilder
from wellseq.text.rules_hints import explain
from wellseq.text.rules_tree import RulesTree, RuleText
from wellseq.text.scan import scan
from wellseq.text.tokens import Token

RULES_MAX = 2000
RULE_LENGTH_MAX = 1000
NESTING_MAX = 64
WINDOWS_MAX = 16
COMMENT_LINES_MAX = 100

KEYWORDS = {
    "rule": "_RULE",
    "never_waivable": "NEVER_WAIVABLE",
    "while": "_WHILE",
    "require": "_REQUIRE",
    "forbid": "_FORBID",
    "never": "_NEVER",
    "before": "_BEFORE",
    "after": "_AFTER",
    "at": "_AT",
    "end": "_END",
    "most": "_MOST",
    "times": "_TIMES",
    "for": "FOR",
    "within": "WITHIN",
    "and": "AND",
    "or": "OR",
    "not": "NOT",
    "above": "ABOVE",
    "below": "BELOW",
    "beyond": "BEYOND",
    "between": "BETWEEN",
    "every": "EVERY",
    "safe": "SAFE",
    "drive": "DRIVE",
    "on": "ON",
    "awaiting": "AWAITING",
    "block": "BLOCK",
    "slew": "SLEW",
    "of": "_OF",
    "difference": "DIFFERENCE",
    "from": "_FROM",
    "number": "CLOUD",
    "temperature": "CLOUD",
    "depth": "CLOUD",
    "position": "CLOUD",
    "any": "ANY",
    "all": "ALL",
    "hazardous": "HAZARDOUS",
}
"""The words of rules; nothing of a trap that bears one of them can be spoken of."""

_LINE_END = re.compile(r"\r\n|\r|\n")
_WORDS = frozenset(("NAME", "CLAUSE", "BECAUSE", "_ALLOW"))


class RuleParser:
    """LALR(1) over the tokens of one rule; lark is imported here, not with the module."""

    def __init__(self) -> None:
        from lark import Lark, UnexpectedToken
        from lark.lexer import Lexer

        class AsScanned(Lexer):
            """Hands on the tokens that our own scanner made."""

            def __init__(self, lexer_conf: Any) -> None:
                pass

            def lex(self, data: Any) -> Iterator[Any]:  # type: ignore[override]
                return iter(data)

        text = (data_folder("grammar") / "rules.lark").read_text(encoding="utf-8")
        self._lark = Lark(
            text,
            parser="lalr",
            lexer=AsScanned,
            transformer=RuleBuilder(),
            strict=True,
            propagate_positions=False,
            cache=False,
        )
        self._unexpected = UnexpectedToken

    def parse(self, tokens: list[Token]) -> Parsed:
        """The one rule that the tokens are.  Raises Unexpected."""
        try:
            return self._lark.parse(tokens)  # type: ignore[return-value]
        except self._unexpected as error:
            token: Any = error.token
            found = None if token.type == "$END" else token
            raise Unexpected(found, frozenset(error.accepts)) from None


@lru_cache(maxsize=1)
def rule_parser() -> RuleParser:
    """The one parser of rules of this process.

    Raises FileNotFoundError when the installation is incomplete.
    """
    return RuleParser()


def parse_rules(source: str, file: str) -> RulesTree:
    """Read a rules file to its end; `file` is the name that places bear.

    Never raises for what the text holds: each mistake is in `mistakes` and leaves its rule out.
    """
    source = source.removeprefix("\ufeff")
    mistakes = Mistakes(file)
    reading = _Reading(source, mistakes)
    with suppress(ReadingStops):
        reading.take(scan(source, mistakes, {":": "_COLON"}))
    return RulesTree(file, tuple(reading.rules), mistakes.listed())


class _Reading:
    """Gathers the tokens of one rule after the other."""

    def __init__(self, source: str, mistakes: Mistakes) -> None:
        self.source, self.mistakes = source, mistakes
        self.lines = _LINE_END.split(source)
        self.rules: list[RuleText] = []
        self.met = 0
        self.parser = rule_parser()

    def take(self, tokens: Iterable[Token]) -> None:
        """All tokens of the file.  Raises ReadingStops where reading on has no sense."""
        gathered: list[Token] = []
        for token in tokens:
            if token.type == "NEWLINE":
                continue
            _settle_word(token)
            if token.type == "_RULE":
                self._end(gathered)
                gathered = []
                self._count(token)
            if len(gathered) == RULE_LENGTH_MAX:
                message = f"a rule of more than {RULE_LENGTH_MAX} words and signs"
                self.mistakes.give_up("too-large", token.place, message, "make several rules of it")
            gathered.append(token)
        self._end(gathered)

    def _count(self, token: Token) -> None:
        self.met += 1
        if self.met > RULES_MAX:
            message = f"more than {RULES_MAX} rules; the file was not read beyond this place"
            self.mistakes.give_up("too-large", token.place, message)

    def _end(self, tokens: list[Token]) -> None:
        """Read the tokens of one rule, unless one of them is a mistake already."""
        if not tokens or any(token.type == "BAD" for token in tokens):
            return
        if tokens[0].type != "_RULE":
            message = "a rules file holds rules, and each begins with 'rule' and its name"
            hint = "rule NAME: while CONDITION, require CONDITION"
            self.mistakes.add("syntax", tokens[0].place, message, hint)
            return
        if self._is_too_deep(tokens):
            return
        try:
            parsed = self.parser.parse(tokens)
        except Unexpected as error:
            self.mistakes.add("syntax", *explain(tokens, error))
            return
        self.rules.append(
            RuleText(
                parsed.name,
                parsed.never_waivable,
                parsed.sentence,
                self._text(tokens),
                self._comment(tokens[0].line),
                tokens[0].place.to(parsed.name.place),
            )
        )

    def _is_too_deep(self, tokens: list[Token]) -> bool:
        depth = windows = 0
        for token in tokens:
            depth += {"LPAR": 1, "RPAR": -1}.get(token.type, 0)
            windows += token.type in ("FOR", "WITHIN")
            if depth > NESTING_MAX:
                message = f"more than {NESTING_MAX} levels of parentheses"
            elif windows > WINDOWS_MAX:
                message = f"more than {WINDOWS_MAX} times after 'for' and 'within' in one rule"
            else:
                continue
            self.mistakes.add("too-large", token.place, message, "make several rules of it")
            return True
        return False

    def _text(self, tokens: list[Token]) -> str:
        """The rule as it was written, on one line and without comments."""
        words = [self.source[token.start : token.end] for token in tokens]
        gaps = [" " if a.end != b.start else "" for a, b in pairwise(tokens)]
        return "".join(word + gap for word, gap in zip(words, [*gaps, ""], strict=True))

    def _comment(self, line: int) -> str:
        """The lines of comment directly above a line, as sentences."""
        found: list[str] = []
        for text in reversed(self.lines[max(0, line - 1 - COMMENT_LINES_MAX) : line - 1]):
            if not text.strip().startswith("#"):
                break
            found.append(text.strip().lstrip("#").strip())
        return " ".join(word for word in reversed(found) if word)


def _settle_word(token: Token) -> None:
    """Words of sequences mean nothing here; words of rules do."""
    if token.type in _WORDS:
        token.type = KEYWORDS.get(token.value, "NAME")
