"""A headless Chromium spoken to through a pipe (DevTools protocol), with the standard library alone."""

from __future__ import annotations

import base64
import json
import os
import select
import shutil
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

CHROMIUM = next((found for name in ("chromium", "chromium-browser") if (found := shutil.which(name))), None)
needs_chromium = pytest.mark.skipif(
    CHROMIUM is None, reason="Chromium is not installed (Debian: apt-get install chromium)"
)
PATIENCE_S = 60.0
_ON_3_AND_4 = """
import fcntl, os, sys
read, write = (fcntl.fcntl(int(fd), fcntl.F_DUPFD, 10) for fd in sys.argv[1:3])
os.dup2(read, 3)
os.dup2(write, 4)
os.execv(sys.argv[3], sys.argv[3:])
"""
"""Chromium listens at descriptor 3 and answers at 4."""


class Browser:
    """One browser with one tab; ``events`` are those of the tab since the last call of :meth:`open`."""

    def __init__(self) -> None:
        assert CHROMIUM is not None
        self._profile = tempfile.mkdtemp(prefix="chromium-")
        to_browser, self._write = os.pipe()
        self._read, from_browser = os.pipe()
        command = [
            CHROMIUM, "--headless=new", "--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage", "--hide-scrollbars",
            "--remote-debugging-pipe", "--no-first-run", "--disable-background-networking", "--disable-extensions",
            f"--user-data-dir={self._profile}", "about:blank",
        ]  # fmt: skip
        self._process = subprocess.Popen(
            [sys.executable, "-c", _ON_3_AND_4, str(to_browser), str(from_browser), *command],
            pass_fds=(to_browser, from_browser),
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
        )
        os.close(to_browser)
        os.close(from_browser)
        self._buffer = b""
        self._number = 0
        self._session: str | None = None
        self.events: list[dict[str, Any]] = []
        target = self._call("Target.createTarget", url="about:blank")["targetId"]
        self._session = self._call("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Network", "Log", "Runtime", "Performance"):
            self._call(f"{domain}.enable")

    def close(self) -> None:
        """Ends the browser that was started here."""
        self._process.terminate()
        self._process.wait(20)
        os.close(self._write)
        os.close(self._read)
        shutil.rmtree(self._profile, ignore_errors=True)

    def open(self, page: Path, *, width: int = 1280, height: int = 900, dark: bool = False, media: str = "") -> float:
        """Shows a file; the seconds until it was loaded and drawn."""
        self._call(
            "Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=width < 600
        )
        scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        self._call("Emulation.setEmulatedMedia", media=media, features=[scheme])
        self.events = []
        start = time.perf_counter()
        self._call("Page.navigate", url=page.resolve().as_uri())
        self._until(lambda: any(e["method"] == "Page.loadEventFired" for e in self.events))
        self.ask("new Promise(done => requestAnimationFrame(() => requestAnimationFrame(done)))")
        return time.perf_counter() - start

    def ask(self, script: str) -> Any:
        """The value of an expression in the page."""
        found = self._call("Runtime.evaluate", expression=script, returnByValue=True, awaitPromise=True)
        assert "exceptionDetails" not in found, found
        return found["result"].get("value")

    def printed(self) -> bytes:
        """The page as PDF."""
        return base64.b64decode(self._call("Page.printToPDF", printBackground=True)["data"])

    def picture(self) -> bytes:
        """What is seen, as PNG."""
        return base64.b64decode(self._call("Page.captureScreenshot", format="png")["data"])

    def counters(self) -> dict[str, float]:
        """The browser's own counters of the tab: nodes, seconds of style, layout, scripts and tasks."""
        return {m["name"]: m["value"] for m in self._call("Performance.getMetrics")["metrics"]}

    def _call(self, method: str, **parameters: Any) -> Any:
        self._number += 1
        number = self._number
        message = {"id": number, "method": method, "params": parameters}
        if self._session is not None:
            message["sessionId"] = self._session
        os.write(self._write, json.dumps(message).encode() + b"\0")
        answer: list[dict[str, Any]] = []

        def answered() -> bool:
            answer.extend(m for m in self._incoming() if m.get("id") == number)
            return bool(answer)

        self._until(answered)
        assert "error" not in answer[0], (method, answer[0])
        return answer[0]["result"]

    def _until(self, true: Callable[[], bool]) -> None:
        end = time.monotonic() + PATIENCE_S
        while not true():
            assert time.monotonic() < end, "the browser does not answer"
            assert self._process.poll() is None, "the browser has gone"
            self._receive()

    def _receive(self) -> None:
        ready, _, _ = select.select([self._read], [], [], 0.2)
        if ready:
            self._buffer += os.read(self._read, 1 << 20)
            *whole, self._buffer = self._buffer.split(b"\0")
            for text in whole:
                message = json.loads(text)
                (self.events if "method" in message else self._answers).append(message)

    @property
    def _answers(self) -> list[dict[str, Any]]:
        return self.__dict__.setdefault("_answered", [])

    def _incoming(self) -> list[dict[str, Any]]:
        found = list(self._answers)
        self._answers.clear()
        return found


LOOK = r"""
(() => {
  const out = {figures: 0, faults: [], small: 1e9};
  const name = svg => (svg.closest('article')?.id || '?') + ' ' + svg.querySelector('title').textContent;
  for (const svg of document.querySelectorAll('figure svg')) {
    out.figures += 1;
    const [x, y, w, h] = svg.getAttribute('viewBox').split(' ').map(Number);
    const inside = b => b.x >= x - 1 && b.y >= y - 1 && b.x + b.width <= x + w + 1 && b.y + b.height <= y + h + 1;
    let visible = 0;
    for (const shape of svg.querySelectorAll('path, circle')) {
      const box = shape.getBBox(), style = getComputedStyle(shape);
      if (!inside(box)) out.faults.push(name(svg) + ': ' + shape.getAttribute('class') + ' leaves the frame');
      const seen = style.fill !== 'none' || (style.stroke !== 'none' && parseFloat(style.strokeWidth) > 0);
      if (!seen) out.faults.push(name(svg) + ': ' + shape.getAttribute('class') + ' cannot be seen');
      const role = shape.getAttribute('class');
      const large = box.width > 2 || box.height > 2 || /^(dot|ring)$/.test(role);
      if (seen && large && !/grid|axis|hair|zero/.test(role)) visible += 1;
    }
    if (!visible) out.faults.push(name(svg) + ': nothing to see');
    const words = [...svg.querySelectorAll('text')].map(t => [t.textContent, t.getBBox()]);
    for (const [text, box] of words)
      if (!inside(box)) out.faults.push(name(svg) + ': "' + text + '" leaves the canvas');
    for (let i = 0; i < words.length; i++) for (let j = i + 1; j < words.length; j++) {
      const [a, b] = [words[i][1], words[j][1]];
      const across = Math.min(a.x + a.width, b.x + b.width) - Math.max(a.x, b.x);
      const down = Math.min(a.y + a.height, b.y + b.height) - Math.max(a.y, b.y);
      const both = '"' + words[i][0] + '" and "' + words[j][0] + '" overlap';
      if (across > 0.5 && down > 2.5) out.faults.push(name(svg) + ': ' + both);
    }
    const shown = svg.getBoundingClientRect();
    for (const t of svg.querySelectorAll('text:not(.small-letter)'))
      out.small = Math.min(out.small, parseFloat(getComputedStyle(t).fontSize) * shown.width / w);
  }
  const blocks = [...document.querySelectorAll('h1, h2, h3, p, dt, dd, li, summary, figcaption, .row > span, label')]
    .filter(e => e.getClientRects().length);
  out.wide = document.documentElement.scrollWidth - document.documentElement.clientWidth;
  out.cut = blocks.filter(e => e.scrollWidth > e.clientWidth + 1 && getComputedStyle(e).display !== 'inline')
    .map(e => e.tagName + ' ' + e.textContent.slice(0, 60));
  return out;
})()
"""
"""What every figure holds and whether it is where it should be; widest overflow of the page."""
