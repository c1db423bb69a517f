"""A real browser, driven over WebDriver (W3C Recommendation, 5 June 2018) without a client library."""

import base64
import contextlib
import json
import re
import subprocess
import tempfile
import time
import urllib.error
import urllib.request

# What WebDriver calls keys (section 17.4.2).
ENTER, TAB, SPACE, END = "\ue007", "\ue004", " ", "\ue010"
ELEMENT = "element-6066-11e4-a52e-4f735466cecf"

FLAGS = ["--headless=new", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
         "--disable-background-networking", "--disable-component-update", "--disable-sync", "--hide-scrollbars"]


class Browser:
    """Chromium with a profile of its own. `dark` and `size` are as a user's screen would be."""

    def __init__(self, *, dark=False, size=(1280, 1000), downloads=None):
        self.profile = tempfile.TemporaryDirectory(ignore_cleanup_errors=True)
        self.driver = subprocess.Popen(["chromedriver", "--port=0"], stdout=subprocess.PIPE, stderr=subprocess.DEVNULL)
        self.session = None
        port = re.search(rb"on port (\d+)", self._announcement())[1].decode()
        self.base = f"http://127.0.0.1:{port}/session"
        flags = [*FLAGS, f"--user-data-dir={self.profile.name}", f"--window-size={size[0]},{size[1]}"]
        options = {"args": flags + (["--force-dark-mode"] if dark else [])}
        if downloads:
            options["prefs"] = {"download.default_directory": str(downloads)}
        capabilities = {"goog:chromeOptions": options, "goog:loggingPrefs": {"browser": "ALL"}}
        made = self._send("POST", "", {"capabilities": {"alwaysMatch": capabilities}})
        self.session = made["sessionId"]
        media = [{"name": "prefers-color-scheme", "value": "dark" if dark else "light"}]
        self.devtools("Emulation.setEmulatedMedia", {"features": media})
        width, height = size
        metrics = {"width": width, "height": height, "deviceScaleFactor": 1, "mobile": False}
        self.devtools("Emulation.setDeviceMetricsOverride", metrics)

    def __enter__(self):
        return self

    def __exit__(self, *_):
        try:
            self._send("DELETE", f"/{self.session}")
        finally:
            self.driver.terminate()
            self.driver.wait(10)
            self.profile.cleanup()

    def _announcement(self):
        for line in self.driver.stdout:
            if b"successfully on port" in line:
                return line
        raise AssertionError("chromedriver did not start")

    def _send(self, method, path, body=None):
        request = urllib.request.Request(self.base + path, method=method,
                                         data=None if body is None else json.dumps(body).encode(),
                                         headers={"Content-Type": "application/json"})
        try:
            with urllib.request.urlopen(request, timeout=60) as reply:
                return json.load(reply)["value"]
        except urllib.error.HTTPError as error:
            raise AssertionError(json.load(error)["value"]["message"]) from None

    def _do(self, method, path, body=None):
        return self._send(method, f"/{self.session}{path}", body)

    def devtools(self, command, parameters):
        return self._do("POST", "/goog/cdp/execute", {"cmd": command, "params": parameters})

    def open(self, url):
        self._do("POST", "/url", {"url": url})

    @contextlib.contextmanager
    def tab(self, url):
        """Another tab of the same browser for a while."""
        first = self._do("GET", "/window")
        self._do("POST", "/window", {"handle": self._do("POST", "/window/new", {"type": "tab"})["handle"]})
        self.open(url)
        yield
        self._do("DELETE", "/window")
        self._do("POST", "/window", {"handle": first})

    def run(self, script, *arguments):
        """The value of a function body run in the page."""
        return self._do("POST", "/execute/sync", {"script": script, "args": list(arguments)})

    def run_async(self, script, *arguments):
        """The value that a script hands to its last argument."""
        return self._do("POST", "/execute/async", {"script": script, "args": list(arguments)})

    def find(self, selector):
        return self._do("POST", "/element", {"using": "css selector", "value": selector})[ELEMENT]

    def click(self, selector):
        self.run("document.querySelector(arguments[0]).scrollIntoView({block: 'center'})", selector)
        self._do("POST", f"/element/{self.find(selector)}/click", {})

    def type(self, selector, text):
        """Types into a field in place of what stands there."""
        element = self.find(selector)
        self._do("POST", f"/element/{element}/clear", {})
        self._do("POST", f"/element/{element}/value", {"text": text})

    def send(self, selector, text):
        """Hands text, or the path of a file, to an element as it is."""
        self._do("POST", f"/element/{self.find(selector)}/value", {"text": text})

    def choose(self, selector, value):
        """Chooses an option of a select."""
        self.run("const s = document.querySelector(arguments[0]); s.value = arguments[1];"
                 "s.dispatchEvent(new Event('input', {bubbles: true}));"
                 "s.dispatchEvent(new Event('change', {bubbles: true}));", selector, value)

    def keys(self, text):
        """Keys pressed one after the other, wherever the focus is."""
        presses = [{"type": kind, "value": key} for key in text for kind in ("keyDown", "keyUp")]
        self._do("POST", "/actions", {"actions": [{"type": "key", "id": "keyboard", "actions": presses}]})

    def text(self, selector):
        return self.run("return document.querySelector(arguments[0])?.textContent ?? ''", selector)

    def until(self, script, *arguments, seconds=15):
        """Waits for a script to give something true, and gives it."""
        end = time.monotonic() + seconds
        while time.monotonic() < end:
            value = self.run(script, *arguments)
            if value:
                return value
            time.sleep(0.02)
        raise AssertionError(f"never true: {script} {arguments}\n{self.text('main')}")

    def until_text(self, selector, words):
        self.until("return document.querySelector(arguments[0])?.textContent.includes(arguments[1])", selector, words)

    def screenshot(self, path):
        """The whole page, as a PNG."""
        size = self.run("return [document.documentElement.clientWidth, document.documentElement.scrollHeight]")
        clip = {"x": 0, "y": 0, "width": size[0], "height": size[1], "scale": 1}
        shot = self.devtools("Page.captureScreenshot", {"captureBeyondViewport": True, "clip": clip})
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(base64.b64decode(shot["data"]))

    def complaints(self):
        """What the console says is wrong: broken scripts, refused loads, missing files."""
        return [entry["message"] for entry in self._do("POST", "/se/log", {"type": "browser"})
                if entry["level"] == "SEVERE"]
