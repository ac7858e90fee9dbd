"""A token that cannot stand where it stands → sentences that say so and what could stand there."""

from __future__ import annotations

from wellseq.base.place import Place
from wellseq.base.quantity import RESERVED_UNIT_WORDS
from wellseq.text import odd
from wellseq.text.grammar import Unexpected
from wellseq.text.mistakes import quoted
from wellseq.text.tokens import OPERATORS, Token

_WRITTEN = {
    "_COMMA": "','",
    "_EQUALS": "'='",
    "_DOTS": "'..'",
    "_SPREAD": "'±'",
    "_ALLOW": "'allow'",
    "LPAR": "'('",
    "RPAR": "')'",
    "PLUS": "'+'",
    "MINUS": "'-'",
    "STAR": "'*'",
    "SLASH": "'/'",
}
_VALUE = frozenset(("NUMBER", "NAME", "LPAR"))
_SIGNS = frozenset(("PLUS", "MINUS"))


def explain(tokens: list[Token], error: Unexpected, source: str) -> tuple[Place, str, str]:
    """Where to point, what is wrong, and what would be right, for a statement that has no shape."""
    bad = error.token
    if bad is None:
        last = tokens[-1]
        message = f"the statement ends after {_shown(last)}, where something more must follow"
        return last.place, message, _at_the_end(last, error.accepted)
    at = next(index for index, token in enumerate(tokens) if token is bad)
    before = tokens[at - 1] if at else None
    special = _special(tokens, at, error.accepted) or _decimal_comma(tokens, at, source)
    if special:
        return special
    where = f"stand after {_shown(before)}" if before else "begin a statement"
    return _place(bad), f"{_shown(bad)} cannot {where}", _expected(error.accepted)


def _special(
    tokens: list[Token], at: int, accepted: frozenset[str]
) -> tuple[Place, str, str] | None:
    """The mistakes that have a better sentence than the list of what is expected."""
    bad = tokens[at]
    before = tokens[at - 1] if at else None
    place, shown = _place(bad), _shown(bad)
    if before is None:
        return _at_the_start(bad)
    if bad.type in _SIGNS and before.type in _SIGNS:
        return place, f"{shown} is a second sign", "at most one sign stands before a value"
    if bad.type == before.type == "SLASH":
        return place, "'//' has no meaning here", "a comment begins with '#'"
    if bad.type == before.type == "_EQUALS":
        return place, "'==' has no meaning here", "write one '='"
    if "_EQUALS" in accepted and bad.type in (*_VALUE, *_SIGNS) and _is_targets(tokens[:at]):
        hint = "write the value after '=', as in 'C3, C9 = -60 V'"
        return place, f"'=' is missing before {shown}", hint
    if before.type == "CLAUSE" and bad.type in ("_EQUALS", "CLAUSE", "BECAUSE", "_ALLOW"):
        return (
            before.place,
            f"'{before.value}' is a word of the language and needs a value or a name after it",
            "no name may be one of the words that begin a clause",
        )
    if bad.type == "NAME" and bad.value in RESERVED_UNIT_WORDS:
        hint = f"a unit stands directly after its number, '12 {bad.value}'"
        return place, f"the unit {shown} has no number before it", hint
    if bad.type in ("NAME", "STRING") and "$END" in accepted:
        hint = "a new line or ';' stands between two statements"
        return place, f"{shown} does not belong to the statement before it", hint
    return None


def _at_the_start(bad: Token) -> tuple[Place, str, str] | None:
    if bad.type == "BLOCK":
        message = "this block belongs to no statement"
        return _place(bad), message, "'{' stands on the line of its statement, at the end"
    if bad.type == "_ALLOW":
        hint = "it follows its step on the same or the next line, without ';' between"
        return _place(bad), "'allow' belongs to a step, and none goes on here", hint
    if bad.type == "NUMBER":
        return _place(bad), "a number cannot begin a statement", "a statement begins with its verb"
    return None


def _is_targets(tokens: list[Token]) -> bool:
    """Whether these tokens are the electrodes before an `=`."""
    return len(tokens) > 2 and all(token.type in ("NAME", "_COMMA", "_DOTS") for token in tokens)


def _decimal_comma(tokens: list[Token], at: int, source: str) -> tuple[Place, str, str] | None:
    if [token.type for token in tokens[at - 1 : at + 2]] != ["NUMBER", "_COMMA", "NUMBER"]:
        return None
    whole, comma, after = tokens[at - 1 : at + 2]
    if whole.end != comma.start or comma.end != after.start:
        return None
    return whole.place.to(after.place), *odd.decimal_comma(source[whole.start : after.end])


def _at_the_end(last: Token, accepted: frozenset[str]) -> str:
    if last.type == "STRING" and "NAME" in accepted:
        return "a text at the beginning is the label of the step that follows it"
    return _expected(accepted)


def _expected(accepted: frozenset[str]) -> str:
    """The token types that could stand there, in words."""
    words: list[str] = []
    rest = set(accepted)
    if rest >= _VALUE:
        words.append("a value or a name")
        rest -= _VALUE | _SIGNS
    if rest >= OPERATORS:
        words.append("an operation + - * /")
        rest -= OPERATORS
    elif rest >= _SIGNS:
        words.append("'+' or '-'")
        rest -= _SIGNS
    for type, text in (
        ("NAME", "a name"),
        ("NUMBER", "a number"),
        ("FINDING", "the name of a finding"),
        ("STRING", "a text between two '\"'"),
        ("BLOCK", "a block '{ … }'"),
        ("CLAUSE", "a word such as 'over' or 'to'"),
        ("BECAUSE", "'because' with a reason"),
    ):
        if type in rest:
            words.append(text)
    if "CLAUSE" in rest:
        words = [word for word in words if not word.startswith("'because'")]
        rest -= {"_ALLOW", "BECAUSE"}
    words += [text for type, text in _WRITTEN.items() if type in rest]
    if "$END" in rest:
        words.append("the end of the statement")
    return "here may stand: " + ", ".join(words)


def _shown(token: Token) -> str:
    if token.type == "BLOCK":
        return "a block"
    if token.type == "NUMBER":
        return quoted(f"{float(token.value.value):.12g} {token.value.unit}".rstrip())
    if token.type == "STRING":
        return quoted(f'"{token.value}"')
    return quoted(token.value)


def _place(token: Token) -> Place:
    """A token's place; of a block only its brace."""
    if token.type == "BLOCK":
        return Place(token.file, token.line, token.column, token.line, token.column + 1)
    return token.place
