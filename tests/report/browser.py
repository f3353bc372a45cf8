"""Drives a headless Chromium through its DevTools protocol, with nothing but Python's standard library.

Each Browser starts its own process with a new empty profile and ends it, and it alone, on close().
"""
import base64
import json
import os
import shutil
import socket
import struct
import subprocess
import tempfile
import time
import urllib.request

FLAGS = ["--headless", "--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking", "--disable-component-update",
         "--disable-sync", "--disable-default-apps", "--disable-extensions", "--hide-scrollbars", "--remote-debugging-port=0"]


def find_chromium():
    return shutil.which("chromium") or ("/usr/bin/chromium" if os.path.exists("/usr/bin/chromium") else None)


class WebSocket:
    """Client side of RFC 6455, as much of it as DevTools needs: text frames, fragments, ping."""

    def __init__(self, url):
        host, path = url[len("ws://"):].split("/", 1)
        name, port = host.split(":")
        self.socket = socket.create_connection((name, int(port)), timeout=60)
        key = base64.b64encode(os.urandom(16)).decode()
        self.socket.sendall(("GET /%s HTTP/1.1\r\nHost: %s\r\nUpgrade: websocket\r\nConnection: Upgrade\r\nSec-WebSocket-Key: %s\r\nSec-WebSocket-Version: 13\r\n\r\n" % (path, host, key)).encode())
        self.buffer = b""
        while b"\r\n\r\n" not in self.buffer:
            self.buffer += self.socket.recv(4096)
        head, self.buffer = self.buffer.split(b"\r\n\r\n", 1)
        if b" 101 " not in head.split(b"\r\n")[0] + b" ":
            raise RuntimeError("no WebSocket: %r" % head)

    def send(self, text, opcode=1):
        data = text.encode() if isinstance(text, str) else text
        head = struct.pack("!B", 0x80 | opcode)
        if len(data) < 126:
            head += struct.pack("!B", 0x80 | len(data))
        elif len(data) < 65536:
            head += struct.pack("!BH", 0x80 | 126, len(data))
        else:
            head += struct.pack("!BQ", 0x80 | 127, len(data))
        mask = os.urandom(4)
        self.socket.sendall(head + mask + bytes(b ^ mask[i % 4] for i, b in enumerate(data)))

    def read(self, count):
        while len(self.buffer) < count:
            chunk = self.socket.recv(1 << 16)
            if not chunk:
                raise RuntimeError("the browser closed the connection")
            self.buffer += chunk
        data, self.buffer = self.buffer[:count], self.buffer[count:]
        return data

    def receive(self):
        message = b""
        while True:
            first, second = self.read(2)
            length = second & 0x7F
            if length == 126:
                length = struct.unpack("!H", self.read(2))[0]
            elif length == 127:
                length = struct.unpack("!Q", self.read(8))[0]
            data = self.read(length)
            opcode = first & 0x0F
            if opcode == 9:
                self.send(data, 10)
            elif opcode == 8:
                raise RuntimeError("the browser closed the connection")
            elif opcode in (0, 1):
                message += data
                if first & 0x80:
                    return message.decode()


class Browser:
    def __init__(self, width=1440, height=900, dark=False):
        self.profile = tempfile.mkdtemp(prefix="thirdrung-browser-")
        self.log = open(os.path.join(self.profile, "log"), "wb")
        self.process = subprocess.Popen([find_chromium(), *FLAGS, "--user-data-dir=" + self.profile, "--window-size=%d,%d" % (width, height), "about:blank"],
                                        stdout=self.log, stderr=self.log)
        self.events, self.number = [], 0
        try:
            port = self.wait_for_port()
            with urllib.request.urlopen("http://127.0.0.1:%d/json" % port, timeout=30) as answer:
                target = next(t for t in json.load(answer) if t["type"] == "page")
            self.socket = WebSocket(target["webSocketDebuggerUrl"])
            for domain in ("Page", "Runtime", "Log", "Network"):
                self.call(domain + ".enable")
            self.size(width, height)
            self.call("Emulation.setEmulatedMedia", features=[{"name": "prefers-color-scheme", "value": "dark" if dark else "light"}, {"name": "prefers-reduced-motion", "value": "reduce"}])
        except BaseException:
            self.close()
            raise

    def wait_for_port(self):
        path = os.path.join(self.profile, "DevToolsActivePort")
        for _ in range(600):
            if os.path.exists(path):
                lines = open(path).read().split()
                if lines:
                    return int(lines[0])
            if self.process.poll() is not None:
                break
            time.sleep(0.1)
        self.log.flush()
        raise RuntimeError("chromium did not start: " + open(self.log.name, errors="replace").read()[-2000:])

    def __enter__(self):
        return self

    def __exit__(self, *_):
        self.close()

    def close(self):
        self.process.terminate()
        try:
            self.process.wait(20)
        except subprocess.TimeoutExpired:
            self.process.kill()
            self.process.wait(20)
        self.log.close()
        shutil.rmtree(self.profile, ignore_errors=True)

    def call(self, method, **parameters):
        self.number += 1
        self.socket.send(json.dumps({"id": self.number, "method": method, "params": parameters}))
        while True:
            message = json.loads(self.socket.receive())
            if message.get("id") == self.number:
                if "error" in message:
                    raise RuntimeError("%s: %s" % (method, message["error"]))
                return message["result"]
            if "method" in message:
                self.events.append(message)

    def size(self, width, height):
        self.call("Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=False)

    def open(self, path):
        self.events.clear()
        self.call("Page.navigate", url="file://" + urllib.request.pathname2url(os.path.abspath(path)))
        self.wait("document.readyState === 'complete'")

    def run(self, expression):
        """Value of a JavaScript expression; promises are awaited."""
        result = self.call("Runtime.evaluate", expression=expression, awaitPromise=True, returnByValue=True, userGesture=True)
        if "exceptionDetails" in result:
            raise RuntimeError(expression + ": " + json.dumps(result["exceptionDetails"])[:800])
        return result["result"].get("value")

    def wait(self, expression, seconds=30):
        end = time.time() + seconds
        while time.time() < end:
            if self.run("Boolean(%s)" % expression):
                return
            time.sleep(0.05)
        raise AssertionError("waited in vain for " + expression)

    def mouse(self, kind, x, y, buttons=0):
        self.call("Input.dispatchMouseEvent", type=kind, x=x, y=y, button="left" if kind != "mouseMoved" or buttons else "none", buttons=buttons, clickCount=1 if kind != "mouseMoved" else 0)

    def click(self, x, y):
        self.mouse("mouseMoved", x, y)
        self.mouse("mousePressed", x, y, 1)
        self.mouse("mouseReleased", x, y)

    def drag(self, x1, y1, x2, y2):
        self.mouse("mouseMoved", x1, y1)
        self.mouse("mousePressed", x1, y1, 1)
        for k in range(1, 6):
            self.mouse("mouseMoved", x1 + (x2 - x1) * k / 5, y1 + (y2 - y1) * k / 5, 1)
        self.mouse("mouseReleased", x2, y2)

    def key(self, key, code=None, virtual=0):
        for kind in ("keyDown", "keyUp"):
            self.call("Input.dispatchKeyEvent", type=kind, key=key, code=code or key, windowsVirtualKeyCode=virtual)

    def screenshot(self, path, whole=False):
        picture = self.call("Page.captureScreenshot", format="png", captureBeyondViewport=whole)
        if whole:
            box = self.call("Page.getLayoutMetrics")["cssContentSize"]
            picture = self.call("Page.captureScreenshot", format="png", captureBeyondViewport=True, clip={"x": 0, "y": 0, "width": box["width"], "height": min(box["height"], 16000), "scale": 1})
        with open(path, "wb") as out:
            out.write(base64.b64decode(picture["data"]))

    def complaints(self):
        """Errors and warnings of the console, exceptions, log entries."""
        found = []
        for event in self.events:
            p = event["params"]
            if event["method"] == "Runtime.exceptionThrown":
                found.append(json.dumps(p["exceptionDetails"])[:600])
            elif event["method"] == "Runtime.consoleAPICalled" and p["type"] in ("error", "warning", "assert"):
                found.append(json.dumps(p["args"])[:600])
            elif event["method"] == "Log.entryAdded" and p["entry"]["level"] in ("error", "warning"):
                found.append(json.dumps(p["entry"])[:600])
        return found

    def requests(self):
        return [e["params"]["request"]["url"] for e in self.events if e["method"] == "Network.requestWillBeSent"]
