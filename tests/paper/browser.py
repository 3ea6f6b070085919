"""A real Chromium without a window, spoken to over a pipe by its DevTools protocol: one start, many pages.

It is told to resolve no name and to ask a proxy that is not there, so that whatever a page asks for outside
of its own file fails, and is written down here.
"""

from __future__ import annotations

import base64
import json
import os
import shutil
import subprocess
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

NAMES = ("chromium", "chromium-browser", "google-chrome")
INCH = 25.4


def chromium() -> str | None:
    """Where the browser is, if there is one."""
    return next((found for name in NAMES if (found := shutil.which(name))), None)


class Page:
    """One tab. `requests`: the addresses of everything that was asked for since it was opened."""

    def __init__(self, say: int, hear: int) -> None:
        self._say, self._hear = say, hear
        self._last, self._rest = 0, b""
        self._session: str | None = None
        self.requests: list[str] = []
        self.complaints: list[str] = []
        self._loaded = False
        target = self.call("Target.createTarget", url="about:blank")["targetId"]
        self._session = self.call("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Network", "Log", "Runtime"):
            self.call(f"{domain}.enable")

    def call(self, method: str, **params: Any) -> dict[str, Any]:
        """The answer to one command. Raises RuntimeError where the browser refuses it."""
        self._last += 1
        message: dict[str, Any] = {"id": self._last, "method": method, "params": params}
        if self._session is not None:
            message["sessionId"] = self._session
        os.write(self._say, json.dumps(message).encode() + b"\0")
        while (answer := self._next()).get("id") != self._last:
            self._note(answer)
        if "error" in answer:
            raise RuntimeError(f"{method}: {answer['error']}")
        return dict(answer["result"])

    def open(self, file: Path) -> None:
        """Go to a file and wait until it has loaded."""
        self.requests, self.complaints, self._loaded = [], [], False
        self.call("Page.navigate", url=file.as_uri())
        while not self._loaded:
            self._note(self._next())

    def evaluate(self, script: str) -> Any:
        """What an expression comes to in the page."""
        return self.call("Runtime.evaluate", expression=script, returnByValue=True)["result"].get("value")

    def picture(self, width: int, height: int, *, whole: bool = False, scale: float = 1.0) -> bytes:
        """PNG of the page in a window of this size, or of the whole page at this width."""
        self.call(
            "Emulation.setDeviceMetricsOverride",
            width=width,
            height=height,
            deviceScaleFactor=scale,
            mobile=False,
        )
        made = self.call("Page.captureScreenshot", format="png", captureBeyondViewport=whole)
        return base64.b64decode(made["data"])

    def pdf(self, width_mm: float, height_mm: float) -> bytes:
        """The page as printed on paper of this size, backgrounds left out, as printers do."""
        made = self.call(
            "Page.printToPDF",
            paperWidth=width_mm / INCH,
            paperHeight=height_mm / INCH,
            preferCSSPageSize=False,
            printBackground=False,
        )
        return base64.b64decode(made["data"])

    def _next(self) -> dict[str, Any]:
        while b"\0" not in self._rest:
            more = os.read(self._hear, 1 << 20)
            if not more:
                raise RuntimeError("the browser has gone")
            self._rest += more
        message, _, self._rest = self._rest.partition(b"\0")
        return dict(json.loads(message))

    def _note(self, message: dict[str, Any]) -> None:
        method, params = message.get("method"), message.get("params", {})
        if method == "Network.requestWillBeSent":
            self.requests.append(params["request"]["url"])
        elif method == "Log.entryAdded":
            self.complaints.append(params["entry"]["text"])
        elif method == "Page.loadEventFired":
            self._loaded = True


@contextmanager
def browser(home: Path) -> Iterator[Page]:
    """A tab of a browser of our own, which is gone afterwards. `home`: an empty folder for it."""
    program = chromium()
    assert program is not None
    their_in, our_out = os.pipe()
    our_in, their_out = os.pipe()
    command = [
        program,
        "--headless=new",
        "--remote-debugging-pipe",
        "--no-sandbox",  # tests may run as root in a container, where it cannot be
        "--disable-gpu",
        "--disable-dev-shm-usage",
        "--disable-background-networking",
        "--disable-component-update",
        "--disable-sync",
        "--no-first-run",
        "--no-default-browser-check",
        "--proxy-server=127.0.0.1:1",
        "--proxy-bypass-list=<-loopback>",
        f"--user-data-dir={home / 'profile'}",
    ]

    # The browser wants its pipes as 3 and 4; a shell puts them there whatever they are called here.
    placed = f'exec "$@" 3</dev/fd/{their_in} 4>/dev/fd/{their_out}'
    process = subprocess.Popen(
        ["/bin/sh", "-c", placed, "sh", *command],
        stdin=subprocess.DEVNULL,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
        pass_fds=(their_in, their_out),
        env={**os.environ, "HOME": str(home)},
    )
    os.close(their_in)
    os.close(their_out)
    try:
        yield Page(our_out, our_in)
    finally:
        os.close(our_out)
        os.close(our_in)
        process.terminate()
        process.wait(20)
