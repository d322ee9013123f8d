"""A page in headless Chromium for the tests of the report: what it asks for, says, shows and prints."""

from __future__ import annotations

import base64
import time
from pathlib import Path

import browser

WEBGL = ("--enable-unsafe-swiftshader", "--use-angle=swiftshader", "--use-gl=angle", "--ignore-gpu-blocklist")
_LOUD = ("Runtime.exceptionThrown", "Log.entryAdded", "Runtime.consoleAPICalled")


class Page(browser.Browser):
    """A browser that opens one page after another and keeps account of them."""

    def open(self, url: str, width: int = 1280, height: int = 900) -> None:
        """Show a page, `width` px wide, and wait until it is loaded."""
        self.events.clear()
        for domain in ("Page", "Runtime", "Network", "Log"):
            self._call(f"{domain}.enable", self._session)
        self.resize(width, height)
        self._call("Page.navigate", self._session, url=url)
        until = time.monotonic() + 30.0
        while not self.evaluate("document.readyState === 'complete' && location.href !== 'about:blank'"):
            assert time.monotonic() < until, f"{url} does not load"
            time.sleep(0.05)

    def resize(self, width: int, height: int = 900) -> None:
        size = {"width": width, "height": height, "deviceScaleFactor": 1, "mobile": False}
        self._call("Emulation.setDeviceMetricsOverride", self._session, **size)

    def evaluate(self, script: str) -> object:
        """Value of a JavaScript expression in the page."""
        found = self._call("Runtime.evaluate", self._session, expression=script, returnByValue=True, awaitPromise=True)
        assert "exceptionDetails" not in found, found["exceptionDetails"]
        return found["result"].get("value")

    @property
    def said(self) -> list[str]:
        """What stands in the console, errors and warnings above all."""
        self.evaluate("0")
        return [str(event["params"]) for event in self.events if event.get("method") in _LOUD]

    @property
    def asked(self) -> list[str]:
        """Addresses that were asked for."""
        self.evaluate("0")
        found = (event for event in self.events if event.get("method") == "Network.requestWillBeSent")
        return [event["params"]["request"]["url"] for event in found]

    def picture(self, path: Path, *, whole: bool = False) -> None:
        """Write the page as a PNG, `whole` or as much as the window shows."""
        found = self._call("Page.captureScreenshot", self._session, format="png", captureBeyondViewport=whole)
        path.write_bytes(base64.b64decode(found["data"]))

    def printed(self) -> bytes:
        """The page as Chromium prints it."""
        options = {"preferCSSPageSize": True, "printBackground": True}
        return base64.b64decode(self._call("Page.printToPDF", self._session, **options)["data"])
