#!/usr/bin/python3
"""Makes the pictures of the guide's chapter "Reading the page" from the page of a run.

usage: docs/screenshots/make.py PAGE [OUTPUT-FOLDER]

Needs Debian's chromium; drives it with tests/report/browser.py. Pictures go beside this script unless told otherwise.
"""
import os
import sys
import time

HERE = os.path.dirname(os.path.abspath(__file__))
sys.path.insert(0, os.path.join(HERE, "..", "..", "tests", "report"))
from browser import Browser, find_chromium  # noqa: E402


def settle(browser, identity):
    """Scrolls to a section or chart and waits until the charts in sight are drawn."""
    browser.run("document.getElementById('%s').scrollIntoView()" % identity)
    browser.wait("[...document.querySelectorAll('.plot')].filter((p) => { const r = p.getBoundingClientRect(); return r.bottom > 0 && r.top < innerHeight; })"
                 ".every((p) => p.dataset.drawn === 'yes')")
    time.sleep(0.4)


def main():
    if len(sys.argv) < 2:
        print(__doc__)
        return 2
    if not find_chromium():
        print("chromium is not installed (apt install chromium)")
        return 1
    page, out = sys.argv[1], sys.argv[2] if len(sys.argv) > 2 else HERE
    os.makedirs(out, exist_ok=True)
    with Browser(1280, 860) as b:
        b.open(page)
        settle(b, "top")
        b.screenshot(os.path.join(out, "first-screen.png"))
        for identity, name in (("residuals", "residuals"), ("choices", "choices"), ("light-curves", "light-curves")):
            if b.run("Boolean(document.getElementById('%s'))" % identity):
                settle(b, identity)
                b.screenshot(os.path.join(out, name + ".png"))
        if b.run("Boolean(document.getElementById('hubble'))"):
            settle(b, "hubble")
            r = b.run("(() => { const r = document.querySelector('#hubble .plot').getBoundingClientRect(); return [r.left, r.top, r.width, r.height]; })()")
            b.drag(r[0] + 0.25 * r[2], r[1] + 10, r[0] + 0.45 * r[2], r[1] + 0.6 * r[3])
            time.sleep(0.6)
            b.screenshot(os.path.join(out, "marked.png"))
            b.key("Escape", "Escape", 27)
        b.run("document.querySelector('#list-body tr button').click()")
        b.wait("document.querySelector('#panel[open] svg')")
        b.screenshot(os.path.join(out, "light-curve.png"))
    return 0


if __name__ == "__main__":
    sys.exit(main())
