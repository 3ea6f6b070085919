"""A small client for a TOML language server: opens a text as an editor does and asks what it says."""

from __future__ import annotations

import json
import subprocess
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

TOMBI = Path(sys.executable).with_name("tombi")

Message = dict[str, Any]


class Editor:
    """One session over the Language Server Protocol (JSON-RPC with Content-Length headers)."""

    def __init__(self, process: subprocess.Popen[bytes]) -> None:
        assert process.stdin is not None
        assert process.stdout is not None
        self._to, self._back = process.stdin, process.stdout
        self._asked = 0

    def tell(self, method: str, params: Any) -> None:
        """A notification."""
        self._send({"method": method, "params": params})

    def ask(self, method: str, params: Any) -> Any:
        """A request, and its result."""
        self._asked += 1
        number = f"editor-{self._asked}"
        self._send({"id": number, "method": method, "params": params})
        answer = self._heard(lambda message: message.get("id") == number)
        assert "error" not in answer, answer
        return answer["result"]

    def opened(self, file: Path) -> list[Message]:
        """Open a file; the diagnostics that come back for it."""
        document = {"uri": file.as_uri(), "languageId": "toml", "version": 1, "text": file.read_text()}
        self.tell("textDocument/didOpen", {"textDocument": document})
        told = self._heard(
            lambda message: (
                message.get("method") == "textDocument/publishDiagnostics"
                and message["params"]["uri"] == file.as_uri()
            )
        )
        found: list[Message] = told["params"]["diagnostics"]
        return found

    def hover(self, file: Path, line: int, column: int) -> str:
        """What is said of the place (both from 0)."""
        place = {"textDocument": {"uri": file.as_uri()}, "position": {"line": line, "character": column}}
        return str(self.ask("textDocument/hover", place)["contents"]["value"])

    def _send(self, message: Message) -> None:
        body = json.dumps({"jsonrpc": "2.0", **message}).encode()
        self._to.write(b"Content-Length: %d\r\n\r\n" % len(body) + body)
        self._to.flush()

    def _heard(self, wanted: Callable[[Message], bool]) -> Message:
        while True:
            length = 0
            while line := self._back.readline().strip():
                if line.lower().startswith(b"content-length:"):
                    length = int(line.split(b":")[1])
            assert length, "the language server has ended"
            message: Message = json.loads(self._back.read(length))
            if "id" in message and "method" in message:  # it asks the editor something: nothing to say
                self._send({"id": message["id"], "result": None})
            elif wanted(message):
                return message


@contextmanager
def editor(folder: Path) -> Iterator[Editor]:
    """A session in a folder; the server is ended with it."""
    with subprocess.Popen(
        [str(TOMBI), "lsp", "--offline"],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        cwd=folder,
    ) as process:
        try:
            session = Editor(process)
            uri = folder.as_uri()
            session.ask(
                "initialize",
                {
                    "processId": None,
                    "rootUri": uri,
                    "workspaceFolders": [{"uri": uri, "name": "recipes"}],
                    "capabilities": {"textDocument": {"publishDiagnostics": {}, "hover": {}}},
                },
            )
            session.tell("initialized", {})
            yield session
        finally:
            process.kill()


def linted(folder: Path, *names: str) -> tuple[int, list[Message]]:
    """The linter's exit code and diagnostics for files of a folder, by the folder's configuration."""
    out = folder / "diagnostics.json"
    form = ["--diagnostics-format", "json", "--diagnostics-file", str(out)]
    done = subprocess.run(
        [str(TOMBI), "lint", "--offline", "--quiet", *form, *names],
        cwd=folder,
        capture_output=True,
        timeout=60,
        check=False,
    )
    found: list[Message] = json.loads(out.read_text())
    return done.returncode, found
