"""A headless Chromium for the tests, driven over its debugging pipe; without one they are skipped."""

from __future__ import annotations

import base64
import json
import os
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

from screener.cli import run
from screener.files import shipped

NAMES = ("chromium", "chromium-browser", "google-chrome")
OPTIONS = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-dev-shm-usage",
    "--disable-background-networking",
    "--hide-scrollbars",
    "--remote-debugging-pipe",
)


class Chromium:
    """One page in a browser, which reads commands from its file 3 and answers by their id on file 4."""

    def __init__(self, program: str, profile: Path) -> None:
        theirs, ours = os.pipe()
        read, back = os.pipe()
        command = [program, *OPTIONS, f"--user-data-dir={profile}", "about:blank"]
        start = (
            f"import os, sys; os.dup2({theirs}, 3); os.dup2({back}, 4); os.execv(sys.argv[1], sys.argv[1:])"
        )
        with open(os.devnull, "wb") as nowhere:
            self.process = subprocess.Popen(
                [sys.executable, "-c", start, *command],
                pass_fds=(theirs, back),
                stdout=nowhere,
                stderr=nowhere,
            )
        os.close(theirs)
        os.close(back)
        self._to, self._from = os.fdopen(ours, "wb"), os.fdopen(read, "rb", buffering=0)
        self._rest = b""
        self._sent = 0
        self._session = ""
        self.events: list[dict[str, Any]] = []
        target = self.send("Target.createTarget", url="about:blank")["targetId"]
        self._session = self.send("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Runtime", "Network", "Log"):
            self.send(f"{domain}.enable")

    def send(self, method: str, **parameters: object) -> Any:
        """One command; its answer."""
        self._sent += 1
        message: dict[str, object] = {"id": self._sent, "method": method, "params": parameters}
        if self._session:
            message["sessionId"] = self._session
        self._to.write(json.dumps(message).encode() + b"\0")
        self._to.flush()
        while True:
            answer = self._next()
            if answer.get("id") == self._sent:
                assert "error" not in answer, answer["error"]
                return answer["result"]

    def _next(self) -> dict[str, Any]:
        while b"\0" not in self._rest:
            more = os.read(self._from.fileno(), 1 << 20)
            assert more, "the browser is gone"
            self._rest += more
        one, self._rest = self._rest.split(b"\0", 1)
        message: dict[str, Any] = json.loads(one)
        if "method" in message:
            self.events.append(message)
        return message

    def open(
        self, page: Path, width: int, height: int, *, scheme: str = "light", scripts: bool = True
    ) -> None:
        """Show a file in a window of that size; what happens from here on stands in `events`."""
        phone = width < 600
        self.events.clear()
        self.send(
            "Emulation.setDeviceMetricsOverride",
            width=width,
            height=height,
            deviceScaleFactor=1,
            mobile=phone,
        )
        self.send("Emulation.setScriptExecutionDisabled", value=not scripts)
        self.send(
            "Emulation.setEmulatedMedia",
            media="",
            features=[{"name": "prefers-color-scheme", "value": scheme}],
        )
        self.send("Page.navigate", url=page.as_uri())
        while not any(event["method"] == "Page.loadEventFired" for event in self.events):
            self._next()

    def value(self, expression: str) -> Any:
        """What an expression of the page comes to."""
        answer = self.send("Runtime.evaluate", expression=expression, returnByValue=True, awaitPromise=True)
        assert "exceptionDetails" not in answer, answer["exceptionDetails"]
        return answer["result"].get("value")

    def seen(self, method: str) -> list[dict[str, Any]]:
        """Parameters of every event of one kind since the page was opened."""
        return [event["params"] for event in self.events if event["method"] == method]

    def picture(self, path: Path, *, whole: bool = True) -> None:
        """A screenshot of the page, or of what the window shows."""
        taken = self.send("Page.captureScreenshot", captureBeyondViewport=whole)
        path.write_bytes(base64.b64decode(taken["data"]))

    def printed(self, width: float, height: float) -> bytes:
        """The page as a PDF on paper of that size [in]."""
        answer = self.send("Page.printToPDF", paperWidth=width, paperHeight=height, preferCSSPageSize=False)
        return base64.b64decode(answer["data"])

    def close(self) -> None:
        """End the browser, by its own process alone."""
        self._to.close()
        self._from.close()
        try:
            self.process.wait(10)
        except subprocess.TimeoutExpired:
            self.process.kill()
            self.process.wait()


@pytest.fixture(scope="session")
def chromium(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Chromium]:
    """The browser, one for all tests."""
    program = next(filter(None, map(shutil.which, NAMES)), None)
    if program is None:
        pytest.skip("there is no Chromium here: apt-get install chromium")
    browser = Chromium(program, tmp_path_factory.mktemp("profile"))
    yield browser
    browser.close()


@pytest.fixture(scope="session")
def pages(tmp_path_factory: pytest.TempPathFactory) -> Callable[..., Path]:
    """The html of a command on the demo plant, each made once."""
    folder = tmp_path_factory.mktemp("pages")
    case = shipped.demo("osier-bank", "case.toml")

    def page(command: str, *more: str) -> Path:
        file = folder / f"{'-'.join((command, *more)).replace(' ', '-')}.html"
        if not file.exists():
            assert run([command, str(case), *more, "--output", str(file)]) in (0, 1)
        return file

    return page
