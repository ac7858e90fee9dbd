"""A client for the tests: speaks the protocol over real pipes with a server of its own."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import threading
import time
from pathlib import Path
from queue import Empty, Queue
from types import TracebackType
from typing import Any

import wellseq

ROOT = str(Path(wellseq.__file__).parents[1])
PATIENCE_s = 60.0


class Client:
    """One editor: requests wait for their answer, notifications are kept by method."""

    def __init__(self, encodings: list[str] | None = None) -> None:
        self.process = subprocess.Popen(
            [sys.executable, "-m", "wellseq", "editor"],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            env={**os.environ, "PYTHONPATH": ROOT},
        )
        self.number = 0
        self.answers: Queue[dict[str, Any]] = Queue()
        self.diagnostics: dict[str, list[dict[str, Any]]] = {}
        self.news: Queue[str] = Queue()
        self.reader = threading.Thread(target=self._read, daemon=True)
        self.reader.start()
        general = {"positionEncodings": encodings} if encodings else {}
        answer = self.ask(
            "initialize",
            {"processId": None, "rootUri": None, "capabilities": {"general": general}},
        )
        self.capabilities: dict[str, Any] = answer["capabilities"]
        self.tell("initialized", {})

    def __enter__(self) -> Client:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.ask("shutdown", None)
        self.tell("exit", None)
        assert self.process.wait(timeout=20) == 0
        self.reader.join(timeout=20)
        for pipe in (self.process.stdin, self.process.stdout, self.process.stderr):
            assert pipe is not None
            pipe.close()

    def _read(self) -> None:
        stream = self.process.stdout
        assert stream is not None
        while head := stream.readline():
            length = int(head.split(b":")[1])
            while stream.readline().strip():
                pass
            message = json.loads(stream.read(length))
            if message.get("method") == "textDocument/publishDiagnostics":
                params = message["params"]
                self.diagnostics[params["uri"]] = params["diagnostics"]
                self.news.put(params["uri"])
            elif "id" in message and "method" not in message:
                self.answers.put(message)

    def _send(self, message: dict[str, Any]) -> None:
        body = json.dumps({"jsonrpc": "2.0", **message}).encode()
        stream = self.process.stdin
        assert stream is not None
        stream.write(b"Content-Length: %d\r\n\r\n" % len(body) + body)
        stream.flush()

    def tell(self, method: str, params: Any) -> None:
        """Send a notification."""
        self._send({"method": method, "params": params})

    def ask(self, method: str, params: Any) -> Any:
        """Send a request and return its result; a refusal is raised as LookupError."""
        self.number += 1
        self._send({"id": self.number, "method": method, "params": params})
        answer = self.answers.get(timeout=PATIENCE_s)
        assert answer["id"] == self.number
        if "error" in answer:
            raise LookupError(answer["error"]["message"])
        return answer["result"]

    def open(self, path: Path, text: str | None = None) -> list[dict[str, Any]]:
        """Open a buffer and wait for what is found in it."""
        text = text if text is not None else path.read_bytes().decode()
        document = {"uri": path.as_uri(), "languageId": "wellseq", "version": 1, "text": text}
        self.tell("textDocument/didOpen", {"textDocument": document})
        return self.wait(path)

    def change(self, path: Path, text: str, version: int = 2) -> list[dict[str, Any]]:
        """Change a buffer and wait for what is found in it."""
        document = {"uri": path.as_uri(), "version": version}
        params = {"textDocument": document, "contentChanges": [{"text": text}]}
        self.tell("textDocument/didChange", params)
        return self.wait(path)

    def wait(self, path: Path) -> list[dict[str, Any]]:
        """The next diagnostics of a file."""
        end = time.monotonic() + PATIENCE_s
        while self.news.get(timeout=max(0.1, end - time.monotonic())) != path.as_uri():
            pass
        return self.diagnostics[path.as_uri()]

    def settle(self, quiet_s: float = 0.3) -> None:
        """Wait until no more diagnostics come for a moment."""
        while True:
            try:
                self.news.get(timeout=quiet_s)
            except Empty:
                return

    def at(self, method: str, path: Path, line: int, character: int, **more: Any) -> Any:
        """Ask about a position, from 0."""
        position = {"line": line, "character": character}
        document = {"uri": path.as_uri()}
        return self.ask(
            f"textDocument/{method}", {"textDocument": document, "position": position, **more}
        )
