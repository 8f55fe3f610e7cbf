"""A headless Chromium through its driver: the W3C WebDriver protocol, and nothing but the standard library.

Debian has both in the packages chromium and chromium-driver. ``REASON`` is empty where they are installed.
"""

from __future__ import annotations

import base64
import json
import os
import re
import shutil
import subprocess
import urllib.request
from contextlib import contextmanager

CHROMIUM = shutil.which("chromium") or shutil.which("chromium-browser") or shutil.which("google-chrome")
DRIVER = shutil.which("chromedriver")
REASON = "" if CHROMIUM and DRIVER else "no browser: chromium and chromedriver are not both installed"


class Browser:
    """One session. ``requests`` are the addresses asked for since the page was opened."""

    def __init__(self, base):
        self.base = base

    def ask(self, path, body=None, method=None):
        data = None if body is None else json.dumps(body).encode()
        request = urllib.request.Request(self.base + path, data, {"Content-Type": "application/json"}, method=method)
        with urllib.request.urlopen(request) as answer:
            return json.load(answer)["value"]

    def command(self, name, **parameters):
        """A command of the developer tools."""
        return self.ask("/goog/cdp/execute", {"cmd": name, "params": parameters})

    def view(self, width, height=900, *, dark=False, paper=False):
        self.command(
            "Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=width < 600
        )
        scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        self.command("Emulation.setEmulatedMedia", media="print" if paper else "", features=[scheme])

    def open(self, address):
        self.ask("/se/log", {"type": "performance"})
        self.ask("/se/log", {"type": "browser"})
        self.ask("/url", {"url": address})

    def run(self, script):
        """The value of a script; the driver runs it, whatever the policy of the page."""
        return self.ask("/execute/sync", {"script": script, "args": []})

    def requests(self):
        messages = (json.loads(e["message"])["message"] for e in self.ask("/se/log", {"type": "performance"}))
        return [m["params"]["request"]["url"] for m in messages if m["method"] == "Network.requestWillBeSent"]

    def complaints(self):
        return [entry["message"] for entry in self.ask("/se/log", {"type": "browser"})]

    def picture(self, file, *, whole=True):
        shot = self.command("Page.captureScreenshot", format="png", captureBeyondViewport=whole)
        file.write_bytes(base64.b64decode(shot["data"]))


@contextmanager
def browser(folder):
    """A browser whose files are in ``folder``; ended when the block is left."""
    driver = subprocess.Popen(
        [DRIVER, "--port=0"], stdout=subprocess.PIPE, stderr=subprocess.DEVNULL, text=True,
        env={**os.environ, "HOME": str(folder), "TMPDIR": str(folder)},
    )
    try:
        ports = (re.search(r"on port ([1-9]\d*)", line) for line in driver.stdout)
        port = next(found[1] for found in ports if found)
        base = f"http://127.0.0.1:{port}/session"
        options = {
            "binary": CHROMIUM,
            "args": ["--headless=new", "--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage",
                     f"--user-data-dir={folder}/profile"],
        }
        wanted = {
            "goog:chromeOptions": options,
            "goog:loggingPrefs": {"browser": "ALL", "performance": "ALL"},
        }
        session = Browser(base).ask("", {"capabilities": {"alwaysMatch": wanted}})
        page = Browser(f"{base}/{session['sessionId']}")
        try:
            yield page
        finally:
            page.ask("", method="DELETE")
    finally:
        driver.terminate()
        driver.wait()
        driver.stdout.close()
