"""Tokens → statements and the blocks between braces, each statement read as soon as it ends.

An explicit stack stands for the open braces, so that depth costs nothing and can be bounded.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator

from wellseq.base.names import normal
from wellseq.text.braces import Repairs
from wellseq.text.mistakes import Mistakes, ReadingStops
from wellseq.text.tokens import OPERATORS, Token
from wellseq.text.tree import Assignment, Block, Statement

NESTING_MAX = 64
STATEMENT_LENGTH_MAX = 50_000
OPERATORS_MAX = 64
STRAYS_MAX = 64

DEFINING = frozenset({"let", "cloud", "pattern", "procedure", "sequence"})
"""Verbs that give a name to something."""

Item = Statement | Assignment
Reader = Callable[[list[Token]], Item | None]
"""Turns the tokens of one statement into it, or reports its mistake and returns None."""

GOES_ON_AFTER = frozenset(("_COMMA", "LPAR", *OPERATORS))
GOES_ON_BEFORE = frozenset(("RPAR", "CLAUSE", "BECAUSE", "_ALLOW"))


class _Frame:
    """An open block: its `{`, what it holds so far, the statement being gathered."""

    __slots__ = ("items", "opener", "parentheses", "spoiled", "tokens")

    def __init__(self, opener: Token | None) -> None:
        self.opener = opener
        self.items: list[Item] = []
        self.tokens: list[Token] = []
        self.parentheses: list[Token] = []
        self.spoiled = False


class Splitter:
    """Gathers the statements of one file; after `run`, `items` are those that were read.

    `unbalanced` says whether a brace lacked its partner; `unread` are the names that statements
    kept out would have defined.
    """

    def __init__(self, read: Reader, mistakes: Mistakes, repairs: Repairs) -> None:
        self.items: list[Item] = []
        self.unbalanced = False
        self.unread: set[str] = set()
        self._read = read
        self._mistakes = mistakes
        self._repairs = repairs
        self._depth = 0
        self._strays = 0
        self._frames = [_Frame(None)]
        self.items = self._frames[0].items

    def run(self, tokens: Iterable[Token]) -> None:
        """Take all tokens of the file.  Raises ReadingStops where reading on has no sense."""
        handlers = {
            "SEMICOLON": self._semicolon,
            "LPAR": self._open_parenthesis,
            "RPAR": self._close_parenthesis,
            "LBRACE": self._open_brace,
            "RBRACE": self._close_brace,
            "BAD": self._bad,
        }
        frames, closes = self._frames, self._repairs.closes
        after_newline = False
        for token in tokens:
            kind = token.type
            if kind == "NEWLINE":
                after_newline = True
                continue
            if closes:
                self._close_by_layout(token)
            frame = frames[-1]
            if after_newline:
                after_newline = False
                if frame.tokens and not _goes_on(frame.tokens, kind):
                    if kind == "LBRACE" and frame.tokens[-1].type != "BLOCK":
                        self._brace_on_next_line(token)
                    else:
                        self._end_statement()
            elif frame.tokens and kind == "LBRACE" and _is_next_lane(frame.tokens):
                self._end_before_last()
            if kind in handlers:
                handlers[kind](token)
            else:
                frame.tokens.append(token)
            if len(frames[-1].tokens) > STATEMENT_LENGTH_MAX:
                self._too_long(token)
        self._end_statement()
        while len(frames) > 1:
            self._report_unclosed(frames[-1])
            self._close_block(None)

    def _semicolon(self, token: Token) -> None:
        self._end_statement()

    def _bad(self, token: Token) -> None:
        frame = self._frames[-1]
        frame.spoiled = True
        frame.tokens.append(token)

    def _open_parenthesis(self, token: Token) -> None:
        self._deeper(token)
        self._frames[-1].parentheses.append(token)
        self._frames[-1].tokens.append(token)

    def _close_parenthesis(self, token: Token) -> None:
        frame = self._frames[-1]
        if frame.parentheses:
            frame.parentheses.pop()
            self._depth -= 1
            frame.tokens.append(token)
        else:
            self._stray(token, "no '(' is open here")
            token.type = "BAD"
            self._bad(token)

    def _brace_on_next_line(self, token: Token) -> None:
        """Report it and go on with the statement above, which it was meant for."""
        hint = "put it at the end of the line above"
        self._mistakes.add("syntax", token.place, "'{' stands on the line of its statement", hint)

    def _open_brace(self, token: Token) -> None:
        self._unclosed_parentheses()
        self._deeper(token)
        self._frames.append(_Frame(token))

    def _close_brace(self, token: Token) -> None:
        self._end_statement()
        if len(self._frames) == 1 or (token.line, token.column) in self._repairs.extra:
            self.unbalanced = True
            self._stray(token, "no block is open here")
        else:
            self._close_block(token)

    def _close_block(self, closer: Token | None) -> None:
        """Put a finished block into the statement that it belongs to."""
        frame = self._frames.pop()
        self._depth -= 1
        opener = frame.opener
        assert opener is not None
        last = closer or opener
        block_token = Token(
            "BLOCK", None, opener.file, opener.line, opener.column, opener.start, last.end
        )
        block_token.end_line, block_token.end_column = last.end_line, last.end_column
        block_token.value = Block(tuple(frame.items), block_token.place)
        self._frames[-1].tokens.append(block_token)
        if closer is None:
            self._end_statement()

    def _close_by_layout(self, token: Token) -> None:
        for _ in range(self._repairs.closes.pop((token.line, token.column), 0)):
            if len(self._frames) > 1:
                self._end_statement()
                self._report_unclosed(self._frames[-1])
                self._close_block(None)

    def _report_unclosed(self, frame: _Frame) -> None:
        self.unbalanced = True
        assert frame.opener is not None
        message = "this '{' has no '}'"
        self._mistakes.add("syntax", frame.opener.place, message, "close the block with '}'")

    def _unclosed_parentheses(self) -> None:
        frame = self._frames[-1]
        if frame.parentheses:
            frame.spoiled = True
            self._depth -= len(frame.parentheses)
            place, frame.parentheses = frame.parentheses[-1].place, []
            self._mistakes.add("syntax", place, "this '(' has no ')'", "close it in its statement")

    def _deeper(self, token: Token) -> None:
        self._depth += 1
        if self._depth > NESTING_MAX:
            self._mistakes.give_up(
                "too-large",
                token.place,
                f"more than {NESTING_MAX} levels of braces and parentheses; "
                "the file was not read beyond this place",
                "name a part of it: a procedure, a pattern or a let",
            )

    def _stray(self, token: Token, why: str) -> None:
        """Report a closing mark that closes nothing; a row of them is one mistake."""
        tokens = self._frames[-1].tokens
        in_row = self._strays and (not tokens or tokens[-1].type == "BAD")
        self._strays = self._strays + 1 if in_row else 1
        if self._strays == 1:
            message = f"this '{token.value}' closes nothing: {why}"
            self._mistakes.add("syntax", token.place, message, "delete it or open what it closes")
        elif self._strays > STRAYS_MAX:
            raise ReadingStops

    def _too_long(self, token: Token) -> None:
        self._mistakes.give_up(
            "too-large",
            token.place,
            f"a statement of more than {STATEMENT_LENGTH_MAX} words and signs; "
            "the file was not read beyond this place",
        )

    def _end_before_last(self) -> None:
        """End a statement that another one follows on the line: `lane { … } lane { … }`."""
        last = self._frames[-1].tokens.pop()
        self._end_statement()
        self._frames[-1].tokens.append(last)

    def _end_statement(self) -> None:
        self._unclosed_parentheses()
        frame = self._frames[-1]
        tokens, spoiled = frame.tokens, frame.spoiled
        frame.tokens, frame.spoiled = [], False
        if not tokens:
            return
        self._strays = 0
        item = None
        if not spoiled and not self._has_too_many_operators(tokens):
            item = self._read(tokens)
        if item is None:
            self.unread.update(_defined(tokens))
            return
        if len(self._frames) == 1 and isinstance(item, Statement) and item.verb is None:
            place = item.clauses[0].word.place
            word = item.clauses[0].word.text
            message = f"'{word}' goes on with a statement, and none stands above it"
            self._mistakes.add("syntax", place, message, "a statement begins with its verb")
            return
        frame.items.append(item)

    def _has_too_many_operators(self, tokens: list[Token]) -> bool:
        """Whether one value of the statement is a tree too deep to walk."""
        count = 0
        for token in tokens if len(tokens) > OPERATORS_MAX else ():
            count = count + 1 if token.type in OPERATORS else count
            if token.type in ("_COMMA", "CLAUSE", "BLOCK", "STRING"):
                count = 0
            if count > OPERATORS_MAX:
                message = f"a value of more than {OPERATORS_MAX} operations"
                self._mistakes.add("too-large", token.place, message, "name a part of it with let")
                return True
        return False


def _defined(tokens: list[Token]) -> Iterator[str]:
    """The name that a definition was to give, when the statement is one."""
    if len(tokens) > 1 and tokens[0].value in DEFINING and tokens[1].type == "NAME":
        yield normal(tokens[1].value)


def _goes_on(tokens: list[Token], kind: str) -> bool:
    """Whether a statement goes on over the end of its line, before a token of that kind."""
    if tokens[-1].type in GOES_ON_AFTER or kind in GOES_ON_BEFORE:
        return True
    return len(tokens) == 1 and tokens[0].type == "STRING"


def _is_next_lane(tokens: list[Token]) -> bool:
    return len(tokens) > 1 and tokens[-1].type == "NAME" and tokens[-2].type == "BLOCK"
