"""Headless Chromium for the tests: shows a file and gives the picture, driven through its own debugging pipe."""

from __future__ import annotations

import base64
import io
import json
import os
import shutil
import subprocess
import time
from pathlib import Path

import numpy as np
from PIL import Image

CHROMIUM = next(filter(None, map(shutil.which, ("chromium", "chromium-browser", "google-chrome"))), None)
WHY = "no Chromium on this machine: what browsers show is not measured"
MM = 25.4 / 96.0  # published: CSS Values, W3C: 96 px are an inch
FINE = 4  # device pixels for each px
_FLAGS = ["--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-sync"]
_FLAGS += ["--disable-background-networking", "--disable-component-update", "--hide-scrollbars"]
_FLAGS += ["--remote-debugging-pipe"]


class Browser:
    """A browser with a profile of its own in `profile`; a context manager."""

    def __init__(self, profile: Path, size: tuple[int, int], *flags: str) -> None:
        (ours, theirs), (back, answers) = os.pipe(), os.pipe()

        def connect() -> None:
            for end, wanted in ((ours, 10), (answers, 11)):
                os.dup2(end, wanted)
            os.dup2(10, 3)
            os.dup2(11, 4)

        self._process = subprocess.Popen(
            [
                CHROMIUM or "",
                *_FLAGS,
                *flags,
                f"--user-data-dir={profile}",
                f"--window-size={size[0]},{size[1]}",
                f"--force-device-scale-factor={FINE}",
                "about:blank",
            ],
            preexec_fn=connect,
            close_fds=False,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
        )
        os.close(ours)
        os.close(answers)
        self._to, self._from, self._left, self._count = theirs, back, b"", 0
        self.events: list[dict] = []
        page = next(t for t in self._call("Target.getTargets")["targetInfos"] if t["type"] == "page")
        self._session = self._call("Target.attachToTarget", targetId=page["targetId"], flatten=True)["sessionId"]

    def __enter__(self) -> Browser:
        return self

    def __exit__(self, *_: object) -> None:
        self._process.kill()
        self._process.wait()
        os.close(self._to)
        os.close(self._from)

    def _call(self, method: str, session: str | None = None, **params: object) -> dict:
        self._count += 1
        message = {"id": self._count, "method": method, "params": params} | ({"sessionId": session} if session else {})
        os.write(self._to, json.dumps(message).encode() + b"\0")
        while True:
            while b"\0" not in self._left:
                if not (read := os.read(self._from, 1 << 20)):
                    raise AssertionError("Chromium has gone")
                self._left += read
            answer, self._left = self._left.split(b"\0", 1)
            said = json.loads(answer)
            if said.get("id") == self._count:
                return said["result"]
            self.events.append(said)

    def show(self, url: str, *, patience: float = 20.0) -> np.ndarray:
        """Grey levels of the page once it holds still, FINE to a px; PDF appears some time after it is loaded."""
        self._call("Page.navigate", self._session, url=url)
        before, shown, start = b"", None, time.monotonic()
        while time.monotonic() - start < patience:
            time.sleep(0.3)
            now = base64.b64decode(self._call("Page.captureScreenshot", self._session, format="png")["data"])
            shown = np.asarray(Image.open(io.BytesIO(now)).convert("L"), dtype=float)
            if now == before and (shown > 250).mean() > 0.05 and np.ptp(shown) > 100:
                return shown
            before = now
        raise AssertionError(f"nothing to see of {url}")
