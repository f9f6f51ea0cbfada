"""Drives a headless Chromium over its DevTools websocket, with what tornado (which distributed brings) offers."""

from __future__ import annotations

import asyncio
import base64
import json
import shutil
import subprocess
import tempfile
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from tornado.websocket import WebSocketClientConnection, websocket_connect

FLAGS = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--hide-scrollbars",
    "--remote-debugging-port=0",
    "--remote-allow-origins=*",
)
START_WAIT_S = 90.0  # a loaded machine may take its time
ANSWER_WAIT_S = 120.0


class Browser:
    """One open page; `problems` collects exceptions, console errors and log entries of level error."""

    def __init__(self, loop: asyncio.AbstractEventLoop, socket: WebSocketClientConnection) -> None:
        self._loop, self._socket, self._count = loop, socket, 0
        self.problems: list[str] = []
        self.requests: list[str] = []

    def send(self, method: str, **parameters: Any) -> dict[str, Any]:
        """One DevTools call and its result; events that come meanwhile are kept."""
        return self._loop.run_until_complete(self._send(method, parameters))

    async def _send(self, method: str, parameters: dict[str, Any]) -> dict[str, Any]:
        self._count += 1
        call = {"id": self._count, "method": method, "params": parameters}
        await self._socket.write_message(json.dumps(call))
        while True:
            answer = await self._next()
            if answer.get("id") == call["id"]:
                assert "error" not in answer, answer["error"]
                return dict(answer["result"])

    async def _next(self) -> dict[str, Any]:
        text = await asyncio.wait_for(self._socket.read_message(), ANSWER_WAIT_S)
        assert text is not None, "the browser closed the connection"
        message: dict[str, Any] = json.loads(text)
        self._note(message.get("method", ""), message.get("params", {}))
        return message

    def _note(self, method: str, parameters: dict[str, Any]) -> None:
        if method == "Runtime.exceptionThrown":
            self.problems.append(str(parameters["exceptionDetails"]))
        if method == "Runtime.consoleAPICalled" and parameters["type"] in ("error", "warning", "assert"):
            self.problems.append(str(parameters["args"]))
        if method == "Log.entryAdded" and parameters["entry"]["level"] == "error":
            self.problems.append(str(parameters["entry"]))
        if method == "Page.javascriptDialogOpening":
            self.problems.append(f"dialog: {parameters['message']}")
        if method == "Network.requestWillBeSent":
            self.requests.append(str(parameters["request"]["url"]))

    def open(self, page: Path, *, width: int = 1280, height: int = 1000, dark: bool = False) -> None:
        """Load a page from the file system at a window size, in light or dark, and wait until it stands."""
        for domain in ("Page", "Runtime", "Log", "Network"):
            self.send(f"{domain}.enable")
        self.size(width, height)
        scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        self.send("Emulation.setEmulatedMedia", features=[scheme])
        self._loop.run_until_complete(self._navigate(page.resolve().as_uri()))

    async def _navigate(self, url: str) -> None:
        self._count += 1
        await self._socket.write_message(
            json.dumps({"id": self._count, "method": "Page.navigate", "params": {"url": url}})
        )
        while (await self._next()).get("method") != "Page.loadEventFired":
            pass

    def size(self, width: int, height: int) -> None:
        """Make the window this large; below 600 px as on a phone."""
        self.send(
            "Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=width < 600
        )

    def value(self, expression: str) -> Any:
        """What a JavaScript expression gives (JSON values)."""
        result = self.send("Runtime.evaluate", expression=expression, returnByValue=True, awaitPromise=True)
        assert "exceptionDetails" not in result, result["exceptionDetails"]
        return result["result"].get("value")

    def click(self, selector: str) -> None:
        """Press the left mouse button on the middle of an element."""
        self.value(f"document.querySelector({json.dumps(selector)}).scrollIntoView({{block: 'center'}})")
        box = self.value(
            f"(r => [r.x + r.width / 2, r.y + r.height / 2])(document.querySelector({json.dumps(selector)}).getBoundingClientRect())"
        )
        for kind in ("mousePressed", "mouseReleased"):
            self.send("Input.dispatchMouseEvent", type=kind, x=box[0], y=box[1], button="left", clickCount=1)

    def press(self, key: str, code: int, text: str = "") -> None:
        """Press and release one key, for whatever has the focus."""
        for kind in ("keyDown", "keyUp"):
            more = {"text": text} if text and kind == "keyDown" else {}
            self.send("Input.dispatchKeyEvent", type=kind, key=key, windowsVirtualKeyCode=code, **more)

    def picture(self, target: Path, *, whole: bool = True) -> Path:
        """A PNG of the page (all of it, or what the window shows)."""
        shot = self.send("Page.captureScreenshot", captureBeyondViewport=whole)
        target.write_bytes(base64.b64decode(shot["data"]))
        return target


@contextmanager
def browser() -> Iterator[Browser]:
    """A Chromium of its own with a fresh profile, ended by its process when the block ends."""
    program = shutil.which("chromium") or shutil.which("chromium-browser") or shutil.which("google-chrome")
    assert program, "the page's tests need Chromium on the path"
    profile = Path(tempfile.mkdtemp(prefix="page-test-"))
    process = subprocess.Popen(
        [program, *FLAGS, f"--user-data-dir={profile}", "about:blank"],
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    loop = asyncio.new_event_loop()
    try:
        yield Browser(loop, loop.run_until_complete(_connected(profile)))
    finally:
        process.terminate()
        process.wait(timeout=20)
        loop.close()
        shutil.rmtree(profile, ignore_errors=True)


async def _connected(profile: Path) -> WebSocketClientConnection:
    """The websocket of the first page; the port is what Chromium writes into its profile."""
    from tornado.httpclient import AsyncHTTPClient

    port_file = profile / "DevToolsActivePort"
    end = time.monotonic() + START_WAIT_S
    while time.monotonic() < end:
        if port_file.is_file() and (lines := port_file.read_text().split()):
            listed = await AsyncHTTPClient().fetch(f"http://127.0.0.1:{lines[0]}/json/list")
            pages = [entry for entry in json.loads(listed.body) if entry["type"] == "page"]
            if pages:
                return await websocket_connect(pages[0]["webSocketDebuggerUrl"], max_message_size=200 * 2**20)
        await asyncio.sleep(0.1)
    raise AssertionError("Chromium did not open its DevTools port")
