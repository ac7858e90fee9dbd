"""The grammar of one statement, loaded once → a parser from tokens to what the builder makes."""

from __future__ import annotations

from collections.abc import Iterator
from functools import lru_cache
from typing import Any

from wellseq.base.data import data_folder
from wellseq.text.build import Builder
from wellseq.text.tokens import Token
from wellseq.text.tree import Assignment, Statement


class Unexpected(Exception):
    """A token that cannot stand where it stands, and the token types that could.

    `token` is None at the end of the statement.  Never leaves this floor.
    """

    def __init__(self, token: Token | None, accepted: frozenset[str]) -> None:
        super().__init__()
        self.token = token
        self.accepted = accepted


class StatementParser:
    """LALR(1) over the tokens of one statement; nodes are built as rules complete, without a walk.

    Lark is imported here, not with the module, so that commands that parse nothing start fast.
    """

    def __init__(self) -> None:
        from lark import Lark, UnexpectedToken
        from lark.lexer import Lexer

        class AsScanned(Lexer):
            """Hands on the tokens that our own scanner made."""

            def __init__(self, lexer_conf: Any) -> None:
                pass

            def lex(self, data: Any) -> Iterator[Any]:  # type: ignore[override]
                return iter(data)

        text = (data_folder("grammar") / "statement.lark").read_text(encoding="utf-8")
        self._lark = Lark(
            text,
            parser="lalr",
            lexer=AsScanned,
            transformer=Builder(),
            strict=True,
            propagate_positions=False,
            cache=False,
        )
        self._unexpected = UnexpectedToken

    def parse(self, tokens: list[Token]) -> Statement | Assignment:
        """Build the one statement that the tokens are.  Raises Unexpected."""
        try:
            return self._lark.parse(tokens)  # type: ignore[return-value]
        except self._unexpected as error:
            token: Any = error.token
            found = None if token.type == "$END" else token
            raise Unexpected(found, frozenset(error.accepts)) from None


@lru_cache(maxsize=1)
def statement_parser() -> StatementParser:
    """The one parser of this process; it keeps nothing between two statements.

    Raises FileNotFoundError when the installation is incomplete.
    """
    return StatementParser()
