"""The protocol (LSP 3.17) around the engine; every answer is made elsewhere, here it is worded.

A change is looked at once the editor has been quiet for a moment; what was asked about a text that
has changed since is not answered from the old one.
"""

from __future__ import annotations

import asyncio
from collections.abc import Iterator
from pathlib import Path

from lsprotocol import types
from pygls import uris
from pygls.exceptions import JsonRpcInvalidParams
from pygls.lsp.server import LanguageServer

from wellseq.base.finding import Finding, Verdict
from wellseq.base.place import Place
from wellseq.editor import going, lines, looking, offering, times
from wellseq.editor.documents import Documents, Looked
from wellseq.editor.positions import Positions
from wellseq.emit.excerpt import line_of
from wellseq.emit.fingerprints import fingerprints
from wellseq.emit.trail import trail
from wellseq.review.tidying import tidied
from wellseq.version import __version__

QUIET_s = 0.01
"""How long no key must be struck before a text is looked at, s."""
SEVERITY = {
    Verdict.FAIL: types.DiagnosticSeverity.Error,
    Verdict.UNSURE: types.DiagnosticSeverity.Error,
    Verdict.ALLOWED: types.DiagnosticSeverity.Information,
}
KINDS = {
    "keyword": types.CompletionItemKind.Keyword,
    "electrode": types.CompletionItemKind.Constant,
    "cloud": types.CompletionItemKind.Class,
    "pattern": types.CompletionItemKind.Struct,
    "procedure": types.CompletionItemKind.Function,
    "unit": types.CompletionItemKind.Unit,
    "let": types.CompletionItemKind.Variable,
    "argument": types.CompletionItemKind.Variable,
    "each": types.CompletionItemKind.Variable,
    "trigger": types.CompletionItemKind.Event,
    "text": types.CompletionItemKind.Text,
}


class Server(LanguageServer):
    """One editor's session."""

    def __init__(self) -> None:
        super().__init__(
            "wellseq", __version__, text_document_sync_kind=types.TextDocumentSyncKind.Full
        )
        self.documents = Documents()
        self.told: dict[str, dict[str, list[types.Diagnostic]]] = {}
        """Examined file → file → what the first found in the second."""
        self.versions: dict[str, int] = {}
        self.dismissed = False
        """Whether the editor said that it will leave, before it left."""

    # what stands where

    def positions(self, path: str) -> Positions:
        """Conversions for a file, in the unit that was agreed on."""
        agreed = self.workspace.position_encoding
        unit = str(getattr(agreed, "value", agreed) or "utf-16")
        return Positions(self.documents.text(path) or "", unit)

    def range(self, place: Place) -> types.Range:
        """A place as the protocol has it."""
        (line, start), (end_line, end) = self.positions(place.file).span(place)
        return types.Range(types.Position(line, start), types.Position(end_line, end))

    def spot(self, path: str, position: types.Position) -> tuple[int, int]:
        """Line and column of a position."""
        return self.positions(path).place(position.line, position.character)

    # findings

    async def changed(self, path: str) -> None:
        """Look at a changed buffer, and at all that read it, once the keys are quiet."""
        version = self.versions[path] = self.versions.get(path, 0) + 1
        await asyncio.sleep(QUIET_s)
        if self.versions.get(path) == version:
            for concerned in self.documents.concerned(path):
                if concerned in self.documents.texts:
                    self.look(concerned)

    def look(self, path: str) -> None:
        """Examine a buffer and tell the editor what was found, file by file."""
        looked = self.documents.look(path)
        before = self.told.get(path, {})
        self.told[path] = self.diagnostics(looked, path)
        for file in dict.fromkeys((path, *before, *self.told[path])):
            self.tell(file)

    def forget(self, path: str) -> None:
        """A buffer was closed."""
        self.versions.pop(path, None)
        self.documents.close(path)
        for file in dict.fromkeys((path, *self.told.pop(path, {}))):
            self.tell(file)

    def tell(self, file: str) -> None:
        """Everything that any open sequence found in a file, each thing once."""
        found: dict[tuple[object, ...], types.Diagnostic] = {}
        for by_file in self.told.values():
            for one in by_file.get(file, ()):
                start = one.range.start
                found.setdefault((start.line, start.character, one.code, one.message), one)
        self.text_document_publish_diagnostics(
            types.PublishDiagnosticsParams(uris.from_fs_path(file) or file, list(found.values()))
        )

    def diagnostics(self, looked: Looked, path: str) -> dict[str, list[types.Diagnostic]]:
        """File → diagnostics of what does not pass."""
        thing = looked.thing
        found: dict[str, list[types.Diagnostic]] = {}
        told = [one for one in thing.findings if one.verdict is not Verdict.PASS]
        for finding, fingerprint in zip(told, fingerprints(thing, told), strict=True):
            one = self.diagnostic(looked, finding, fingerprint)
            found.setdefault(finding.place.file, []).append(one)
        whole = looked.case.sequence is not None
        if whole and thing.cause and not any(one.blocks for one in thing.findings):
            place = self.range(Place(path))
            message = f"not examined: {thing.cause}"
            error = types.DiagnosticSeverity.Error
            found.setdefault(path, []).append(
                types.Diagnostic(place, message, severity=error, code="not-examined")
            )
        return found

    def diagnostic(self, looked: Looked, finding: Finding, fingerprint: str) -> types.Diagnostic:
        """One finding, with the calls and passes that led to it."""
        sure = "not decided: " if finding.verdict is Verdict.UNSURE else ""
        hint = f"\n{finding.hint}" if finding.hint else ""
        allowed = f"\nallowed: {finding.reason}" if finding.reason else ""
        return types.Diagnostic(
            self.range(finding.place),
            f"{sure}{finding.message}{hint}{allowed}",
            severity=SEVERITY[finding.verdict],
            code=finding.name,
            source="wellseq",
            related_information=[
                types.DiagnosticRelatedInformation(self.location(place), words)
                for place, words in trail(looked.thing, finding)
            ],
            data={"fingerprint": fingerprint},
        )

    def location(self, place: Place) -> types.Location:
        """A place in a file."""
        return types.Location(uris.from_fs_path(place.file) or place.file, self.range(place))


def path_of(uri: str) -> str:
    """The path behind a URI; what is no file is taken by its own name."""
    path = uris.to_fs_path(uri)
    return Path(path).as_posix() if path else uri


def made() -> Server:
    """A server with everything that it can do."""
    server = Server()
    _open_and_close(server)
    _about_spots(server)
    _about_files(server)
    return server


def _open_and_close(server: Server) -> None:
    @server.feature(types.SHUTDOWN)
    def dismissed(params: None) -> None:
        server.dismissed = True

    @server.feature(types.TEXT_DOCUMENT_DID_OPEN)
    async def opened(params: types.DidOpenTextDocumentParams) -> None:
        path = path_of(params.text_document.uri)
        server.documents.set(path, params.text_document.text)
        await server.changed(path)

    @server.feature(types.TEXT_DOCUMENT_DID_CHANGE)
    async def changed(params: types.DidChangeTextDocumentParams) -> None:
        path = path_of(params.text_document.uri)
        server.documents.set(path, params.content_changes[-1].text)
        await server.changed(path)

    @server.feature(types.TEXT_DOCUMENT_DID_SAVE)
    async def saved(params: types.DidSaveTextDocumentParams) -> None:
        await server.changed(path_of(params.text_document.uri))

    @server.feature(types.TEXT_DOCUMENT_DID_CLOSE)
    def closed(params: types.DidCloseTextDocumentParams) -> None:
        server.forget(path_of(params.text_document.uri))


def _about_spots(server: Server) -> None:
    @server.feature(types.TEXT_DOCUMENT_HOVER)
    def hover(params: types.HoverParams) -> types.Hover | None:
        path = path_of(params.text_document.uri)
        said = looking.hover(server.documents, path, *server.spot(path, params.position))
        if said is None:
            return None
        content = types.MarkupContent(types.MarkupKind.Markdown, said[0])
        return types.Hover(content, server.range(said[1]))

    @server.feature(
        types.TEXT_DOCUMENT_COMPLETION, types.CompletionOptions(trigger_characters=[" "])
    )
    def complete(params: types.CompletionParams) -> types.CompletionList:
        path = path_of(params.text_document.uri)
        found = offering.offers(server.documents, path, *server.spot(path, params.position))
        return types.CompletionList(
            False,
            [
                types.CompletionItem(
                    one.word,
                    kind=KINDS.get(one.sort, types.CompletionItemKind.Value),
                    detail=one.says or None,
                    sort_text=f"{number:04d}",
                )
                for number, one in enumerate(found)
            ],
        )

    @server.feature(types.TEXT_DOCUMENT_DEFINITION)
    def define(params: types.DefinitionParams) -> types.Location | None:
        path = path_of(params.text_document.uri)
        found = going.definition(server.documents, path, *server.spot(path, params.position))
        return server.location(found[0]) if found is not None else None

    @server.feature(types.TEXT_DOCUMENT_REFERENCES)
    def refer(params: types.ReferenceParams) -> list[types.Location]:
        path = path_of(params.text_document.uri)
        found = going.mentions(server.documents, path, *server.spot(path, params.position))
        return [server.location(place) for place in found]

    @server.feature(types.TEXT_DOCUMENT_RENAME)
    def rename(params: types.RenameParams) -> types.WorkspaceEdit:
        path = path_of(params.text_document.uri)
        spot = server.spot(path, params.position)
        try:
            places = going.rename(server.documents, path, *spot, params.new_name)
        except going.CannotRename as why:
            raise JsonRpcInvalidParams(str(why)) from None
        changes: dict[str, list[types.TextEdit]] = {}
        for place in places:
            edit = types.TextEdit(server.range(place), params.new_name)
            changes.setdefault(uris.from_fs_path(place.file) or place.file, []).append(edit)
        return types.WorkspaceEdit(changes)


def _about_files(server: Server) -> None:
    @server.feature(types.TEXT_DOCUMENT_FORMATTING)
    def tidy(params: types.DocumentFormattingParams) -> list[types.TextEdit]:
        path = path_of(params.text_document.uri)
        text = server.documents.texts.get(path, "")
        one = tidied(Path(path), path, text.encode("utf-8", "surrogatepass"))
        if not one.changed:
            return []
        end = types.Position(*server.positions(path).end())
        return [types.TextEdit(types.Range(types.Position(0, 0), end), one.after)]

    @server.feature(types.TEXT_DOCUMENT_FOLDING_RANGE)
    def fold(params: types.FoldingRangeParams) -> list[types.FoldingRange]:
        text = server.documents.text(path_of(params.text_document.uri)) or ""
        return [
            types.FoldingRange(first - 1, last - 1, kind=types.FoldingRangeKind(kind))
            for first, last, kind in sorted(lines.folds(text))
        ]

    @server.feature(types.TEXT_DOCUMENT_INLAY_HINT)
    def inlay(params: types.InlayHintParams) -> list[types.InlayHint]:
        path = path_of(params.text_document.uri)
        return list(_hints(server, path, params.range))

    legend = types.SemanticTokensLegend(list(lines.SORTS), [])

    @server.feature(types.TEXT_DOCUMENT_SEMANTIC_TOKENS_FULL, legend)
    def colour(params: types.SemanticTokensParams) -> types.SemanticTokens:
        path = path_of(params.text_document.uri)
        return types.SemanticTokens(list(_colours(server, path)))


def _hints(server: Server, path: str, asked: types.Range) -> Iterator[types.InlayHint]:
    looked = server.documents.looked.get(path)
    text = server.documents.texts.get(path, "")
    if looked is None or looked.text != text:
        return
    positions = server.positions(path)
    for line, words, more in times.hints(looked, path):
        if asked.start.line <= line - 1 <= asked.end.line:
            spot = positions.spot(line, len(line_of(text, line) or "") + 1)
            yield types.InlayHint(
                types.Position(*spot), words, padding_left=True, tooltip=f"{words} {more}"
            )


def _colours(server: Server, path: str) -> Iterator[int]:
    """Five numbers a stretch, each line and column from the stretch before (LSP 3.17)."""
    documents = server.documents
    positions = server.positions(path)
    line_before = start_before = 0
    text = documents.text(path) or ""
    for one in lines.colours(text, documents.index(path), documents.trap(path)):
        line, start = positions.spot(one.line, one.column)
        _, end = positions.spot(one.line, one.end_column)
        yield from (
            line - line_before,
            start - start_before if line == line_before else start,
            end - start,
            lines.SORTS.index(one.sort),
            0,
        )
        line_before, start_before = line, start
