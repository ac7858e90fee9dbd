"""A token that cannot stand where it stands in a rule → sentences that say so, and what could."""

from __future__ import annotations

from wellseq.base.place import Place
from wellseq.base.quantity import RESERVED_UNIT_WORDS
from wellseq.text.grammar import Unexpected
from wellseq.text.mistakes import quoted
from wellseq.text.tokens import Token

_SENTENCE = frozenset(("_WHILE", "_REQUIRE", "_FORBID", "_BEFORE", "_AFTER", "_AT"))
_CONDITION = frozenset(("NAME", "NOT", "EVERY", "DRIVE", "LPAR"))
_WORDS = (
    ("_RULE", "'rule'"),
    ("NEVER_WAIVABLE", "'never_waivable'"),
    ("_COLON", "':'"),
    ("NAME", "a name"),
    ("NUMBER", "a value with its unit"),
    ("STRING", "a text between two '\"'"),
    ("_COMMA", "','"),
    ("_REQUIRE", "'require'"),
    ("_FORBID", "'forbid'"),
    ("_WHILE", "'while'"),
    ("_END", "'end'"),
    ("_MOST", "'most'"),
    ("_TIMES", "'times'"),
    ("_AT", "'at most N times'"),
    ("ABOVE", "'above', 'below', 'beyond' or 'between'"),
    ("AND", "'and'"),
    ("OR", "'or'"),
    ("FOR", "'for' and a time"),
    ("WITHIN", "'within' and a time"),
    ("_OF", "'of'"),
    ("_FROM", "'from'"),
    ("SAFE", "'safe'"),
    ("HAZARDOUS", "'hazardous'"),
    ("ON", "'on'"),
    ("_DOTS", "'..'"),
    ("RPAR", "')'"),
    ("MINUS", "'-'"),
    ("$END", "the end of the rule"),
)


def explain(tokens: list[Token], error: Unexpected) -> tuple[Place, str, str]:
    """Where to point, what is wrong, and what would be right, for a rule that has no shape."""
    bad = error.token
    if bad is None:
        last = tokens[-1]
        message = f"the rule ends after {_shown(last)}, where something more must follow"
        return last.place, message, _expected(error.accepted)
    at = next(index for index, token in enumerate(tokens) if token is bad)
    before = tokens[at - 1]
    if bad.type == "NAME" and bad.value in RESERVED_UNIT_WORDS:
        hint = f"a unit stands directly after its number, '12 {bad.value}'"
        return bad.place, f"the unit {_shown(bad)} has no number before it", hint
    if bad.type in ("LBRACE", "RBRACE", "SEMICOLON"):
        hint = "a rule goes on until the next word 'rule'; conditions are grouped by '( )'"
        return bad.place, f"{_shown(bad)} has no meaning in a rules file", hint
    message = f"{_shown(bad)} cannot stand after {_shown(before)}"
    return bad.place, message, _expected(error.accepted)


def _expected(accepted: frozenset[str]) -> str:
    """The token types that could stand there, in words."""
    if accepted >= _SENTENCE:
        return "here may stand: 'while', 'forbid', 'never', 'require', 'before', 'after', 'at end'"
    words: list[str] = []
    rest = set(accepted)
    if rest >= _CONDITION:
        words.append("a condition such as 'G1 beyond 500 V', 'valve open' or 'release'")
        rest &= {"RPAR"}
    words += [text for type, text in _WORDS if type in rest]
    return "here may stand: " + ", ".join(words)


def _shown(token: Token) -> str:
    if token.type == "NUMBER":
        return quoted(f"{float(token.value.value):.12g} {token.value.unit}".rstrip())
    if token.type == "STRING":
        return quoted(f'"{token.value}"')
    return quoted(token.value)
