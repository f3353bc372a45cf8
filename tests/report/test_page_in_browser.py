"""The page in a headless Chromium: what a person would see, click, brush, search and sort.

Outside of our own code: the browser (it reports errors and requests), summary.json (read here by Python) and the tables that
make_results.py writes. Pictures for a person to look at go to <build>/report-pictures.
Exit code 77: skipped, chromium is absent.
"""
import csv
import glob
import json
import os
import re
import resource
import subprocess
import sys
import tempfile
import time

HERE = os.path.dirname(os.path.abspath(__file__))
sys.path.insert(0, HERE)
from browser import Browser, find_chromium  # noqa: E402
from make_results import HOSTILE  # noqa: E402

TOOL = os.path.join(os.environ.get("THIRDRUNG_TOOLS", "tools"), "report_page")
PICTURES = os.path.join(os.getcwd(), "report-pictures")
LIMIT_SCALE = float(os.environ.get("THIRDRUNG_TIME_SCALE", "1"))  # For machines that do other work at the same time.


def check(condition, text):
    if not condition:
        raise AssertionError(text)
    print("ok   " + text, flush=True)


def table(folder, name):
    with open(os.path.join(folder, name + ".ecsv"), encoding="utf-8") as lines:
        return list(csv.DictReader(line for line in lines if not line.startswith("#")))


def make(folder, count, *options):
    subprocess.run([sys.executable, os.path.join(HERE, "make_results.py"), folder, str(count), *options], check=True)


def write_page(folder, output, *more):
    start = time.time()
    subprocess.run([TOOL, "page", folder, output, *more], check=True, stdout=subprocess.DEVNULL)
    return time.time() - start


def see_all_charts(b):
    """Scrolls through the page as a reader would; each chart must have drawn itself."""
    for k in range(b.run("document.querySelectorAll('.plot').length")):
        # Charts above that draw themselves late push this one out of view: it is scrolled to until it is drawn.
        b.wait("((plot) => (plot.scrollIntoView({block: 'center'}), plot.dataset.drawn === 'yes'))"
               "(document.querySelectorAll('.plot')[%d])" % k)


def box(b, selector):
    return b.run("(() => { const r = document.querySelector(%s).getBoundingClientRect(); return {x: r.left, y: r.top, w: r.width, h: r.height}; })()" % json.dumps(selector))


def sections_and_marks(b):
    check(b.complaints() == [], "no error and no warning in the console")
    requests = [r for r in b.requests() if not r.startswith("data:")]
    check(len(requests) == 1 and requests[0].startswith("file:"), "one request: the page itself")
    see_all_charts(b)
    expected = {"hubble", "residual-redshift", "residual-stretch", "residual-colour", "residual-mass", "residual-phase", "residual-chi2", "residual-survey", "residual-sky",
                "relation-stretch", "relation-colour", "relation-mass", "population-stretch", "population-colour", "calibrators", "h0-shares", "zrange-grid", "sky-halves", "scans", "budget", "influence", "velocity-field"}
    marks = b.run("Object.fromEntries([...document.querySelectorAll('figure.chart')].map((f) => [f.id, f.querySelectorAll("
                  "'.mark-symbol > *, .mark-rect > *, .mark-rule > *, .mark-line > *').length]))")
    check(expected <= set(marks), "every chart of the list is there")
    few = {k: v for k, v in marks.items() if v < 5}
    check(not few, "every chart has drawn marks (fewest: %d)" % min(marks.values()))
    check(b.complaints() == [], "still nothing in the console after all charts are drawn")


def numbers(b, folder):
    with open(os.path.join(folder, "summary.json"), encoding="utf-8") as file:
        summary = json.load(file)
    ab = summary["a_b"]
    shown = b.run("document.getElementById('answer').textContent")
    found = [float(x) for x in re.findall(r"\d+\.\d+", shown)]
    check(len(found) == 3, "the answer shows value, statistical and systematic error: " + shown)
    decimals = len(re.findall(r"\.(\d+)", shown)[0])
    for value, expected in zip(found, (ab["value"], ab["error_stat"], ab["error_sys"])):
        # Tolerance: half of the last digit shown.
        check(abs(value - expected) <= 0.5000001 * 10 ** -decimals, "%g on the page is %g of summary.json" % (value, expected))
    facts = b.run("document.getElementById('facts').textContent")
    check(str(summary["supernovae"]) in facts and "%.3f mag" % summary["scatter_mag"] in facts, "number and scatter of summary.json are on the page")
    cuts = b.run("[...document.querySelectorAll('#cuts tbody tr')].map((r) => [...r.children].map((c) => c.textContent))")
    expected = [[c["rule"], str(c["removed_alone"]), str(c["removed_in_order"]), "", str(c["left"])] for c in summary["cuts"]]
    check(cuts == expected, "the table of cuts equals summary.json")
    text = subprocess.run([TOOL, "text", folder], check=True, capture_output=True).stdout.decode()
    for number in re.findall(r"\d+\.\d+", shown):
        check(number in text, "the terminal summary has %s too" % number)
    # The terminal text is wrapped; compare words.
    qualification = b.run("document.getElementById('qualification').textContent")
    check(" ".join(qualification.split()) in " ".join(text.split()), "page and terminal qualify the answer in the same words")


def hostile_names(b):
    names = b.run("[...document.querySelectorAll('#list-body th')].map((c) => c.textContent)")
    for name in HOSTILE:
        check(name in names, "shown as text: " + name[:40])
    check(b.run("document.querySelectorAll('#main img, #main b, #main script').length") == 0, "no name became markup")
    check(not any("alert" in json.dumps(e) and e["method"] == "Page.javascriptDialogOpening" for e in b.events), "no name was run")
    check("<i>few</i>" in b.run("document.getElementById('warnings').textContent"), "a warning with markup is shown as text")


def click_opens(b, folder):
    """On a supernova that is used and has mistrusted epochs."""
    used = {s["supernova"] for s in table(folder, "sample") if s["used"] == "True"}
    name = next(f["supernova"] for f in table(folder, "lightcurve-fits") if f["supernova"] in used and f["supernova"] not in HOSTILE and int(f["mistrusted_epochs"]) > 0)
    b.run("document.getElementById('hubble').scrollIntoView()")
    b.wait("document.querySelector('#hubble .plot').dataset.drawn === 'yes'")
    find = "[...document.querySelectorAll('#list-body tr')].find((r) => r.querySelector('th').textContent === %s)" % json.dumps(name)
    # Place of the supernova on the chart, found by hovering over its row: the page draws a ring on every chart.
    b.run(find + ".dispatchEvent(new PointerEvent('pointerenter'))")
    b.wait("document.querySelector('#hubble .ring span')")
    ring = box(b, "#hubble .ring span")
    b.click(ring["x"] + ring["w"] / 2, ring["y"] + ring["h"] / 2)
    b.wait("document.querySelector('#panel[open] svg')")
    check(b.run("document.getElementById('panel-name').textContent") == name, "a click on the point of %s opens its light curve" % name)
    return name


def panel_content(b, folder, name):
    points = [p for p in table(folder, "lightcurve-points") if p["supernova"] == name]
    bands = sorted({p["passband"] for p in points})
    drawn = b.run("document.querySelectorAll('#panel .point, #panel .mistrusted, #panel .limit').length")
    check(drawn == len(points), "its %d points are drawn" % len(points))
    check(b.run("document.querySelectorAll('#panel .model').length") == len(bands) and b.run("document.querySelectorAll('#panel .error-band').length") == len(bands), "a model and an error band in each of %d bands" % len(bands))
    bad = sum(p["mistrusted"] == "True" for p in points)
    check(b.run("document.querySelectorAll('#panel .mistrusted').length") == bad, "%d mistrusted epochs are crossed" % bad)
    fit = next(f for f in table(folder, "lightcurve-fits") if f["supernova"] == name)
    words = b.run("document.querySelector('#panel .words').textContent")
    stretch, error = re.search(r"Stretch s = (\d\.\d+) ± (\d\.\d+)", words).groups()
    half = 0.5000001 * 10 ** -len(stretch.split(".")[1])
    check(abs(float(stretch) - float(fit["s"])) <= half and abs(float(error) - float(fit["s_error"])) <= half, "its stretch stands there in words, as fitted: %s ± %s" % (stretch, error))
    check(all(band in words for band in bands), "with its bands")
    check(b.run("document.querySelectorAll('#panel svg').length") == 1 and "viewBox" in b.run("document.querySelector('#panel svg').outerHTML"), "the drawing is SVG")
    b.key("ArrowRight", "ArrowRight", 39)
    b.wait("document.getElementById('panel-name').textContent !== %s" % json.dumps(name))
    b.run("document.getElementById('panel-scale').click()")
    b.wait("document.querySelector('#panel svg')")
    check("magnitude" in b.run("document.querySelector('#panel svg').textContent"), "magnitudes on request")
    b.screenshot(os.path.join(PICTURES, "panel-magnitudes.png"))
    b.run("document.getElementById('panel-scale').click()")
    b.key("Escape", "Escape", 27)
    b.wait("!document.getElementById('panel').open")
    check(True, "arrow keys turn the panel's pages, Escape closes it")


def brush(b, folder):
    b.run("document.getElementById('hubble').scrollIntoView()")
    plot = box(b, "#hubble .plot")
    b.drag(plot["x"] + plot["w"] * 0.6, plot["y"] + 8, plot["x"] + plot["w"] - 4, plot["y"] + plot["h"] * 0.55)
    b.wait("!document.getElementById('marked').hidden")
    count = int(b.run("document.getElementById('marked-count').textContent").split()[0])
    check(3 < count < 150, "a brush marks supernovae (%d)" % count)
    b.run("document.querySelector('input[name=show][value=marked]').click()")
    listed = b.run("[...document.querySelectorAll('#list-body tr')].map((r) => r.querySelector('th').textContent)")
    check(len(listed) == count, "the list shows the same number")
    z = {s["supernova"]: float(s["z_flow"]) for s in table(folder, "sample")}
    check(min(z[n] for n in listed) > 0.05, "all of them lie on the right of the chart, at higher redshift")
    see_all_charts(b)
    faded = b.run("[...document.querySelectorAll('#residual-colour .mark-symbol.role-mark path')].filter((p) => Number(p.getAttribute('opacity')) < 0.3).length")
    bright = b.run("[...document.querySelectorAll('#residual-colour .mark-symbol.role-mark path')].filter((p) => Number(p.getAttribute('opacity')) > 0.5).length")
    check(faded > 10 and bright >= count, "another chart fades the others (%d) and keeps these" % faded)
    b.screenshot(os.path.join(PICTURES, "brushed.png"))
    b.key("Escape", "Escape", 27)
    check(b.run("document.getElementById('marked').hidden"), "Escape clears the marks")
    # Over the bars of a histogram.
    b.run("document.getElementById('population-stretch').scrollIntoView()")
    plot = box(b, "#population-stretch .plot")
    b.drag(plot["x"] + plot["w"] * 0.15, plot["y"] + plot["h"] * 0.5, plot["x"] + plot["w"] * 0.4, plot["y"] + plot["h"] * 0.8)
    b.wait("!document.getElementById('marked').hidden")
    check(True, "a brush over a histogram marks: " + b.run("document.getElementById('marked-count').textContent"))
    b.run("document.getElementById('unmark').click()")
    b.run("document.querySelector('input[name=show][value=all]').click()")


def search_and_sort(b, folder):
    rows = table(folder, "sample")
    b.run("(() => { const s = document.getElementById('search'); s.value = 'lantern'; s.dispatchEvent(new Event('input')); })()")
    found = b.run("document.getElementById('list-count').textContent")
    expected = sum("lantern" in (r["supernova"] + r["surveys"]).lower() for r in rows)
    check(found.startswith("%d of %d" % (expected, len(rows))), "search finds the %d of one survey" % expected)
    check(b.run("document.querySelectorAll('.tile').length") == expected, "the light curves follow the search")
    b.run("(() => { const s = document.getElementById('search'); s.value = ''; s.dispatchEvent(new Event('input')); })()")
    for direction in (1, -1):
        b.run("document.querySelector('#list th[data-key=z] button').click()")
        z = [float(x) for x in b.run("[...document.querySelectorAll('#list-body tr')].map((r) => r.querySelectorAll('td')[2].textContent)")]
        check(z == sorted(z, reverse=direction < 0) and len(set(z)) > 50, "sorting by redshift, " + ("rising" if direction > 0 else "falling"))
    b.run("document.querySelector('input[name=show][value=out]').click()")
    out = [r for r in rows if r["used"] == "False"]
    check(b.run("document.querySelectorAll('#list-body tr').length") == len(out), "the %d left out can be listed alone" % len(out))
    flags = " ".join(b.run("[...document.querySelectorAll('#list-body td.flags')].map((c) => c.textContent)"))
    check(all(rule in flags for r in out for rule in r["removed_by_all"].split("; ")), "with every rule that removed them")
    b.run("document.querySelector('input[name=show][value=all]').click()")


def keyboard(b):
    b.run("document.querySelector('#hubble .plot').focus()")
    for _ in range(3):
        b.key("ArrowRight", "ArrowRight", 39)
    check(not b.run("document.getElementById('tip').hidden"), "arrow keys step through a chart")
    name = b.run("document.querySelector('#tip .tip-name').textContent")
    b.key("Enter", "Enter", 13)
    b.wait("document.getElementById('panel').open")
    check(b.run("document.getElementById('panel-name').textContent") == name, "Enter opens what they reached")
    b.key("Escape", "Escape", 27)
    b.wait("!document.getElementById('panel').open")


def downloads(b, folder):
    b.call("Browser.setDownloadBehavior", behavior="allow", downloadPath=folder)
    b.run("[...document.querySelectorAll('#hubble .saves button')].forEach((button) => button.click())")
    end = time.time() + 30
    names = ["hubble.svg", "hubble.png", "hubble.csv"]
    while time.time() < end and not all(os.path.exists(os.path.join(folder, n)) for n in names):
        b.run("1")
        time.sleep(0.1)
    time.sleep(0.5)
    check(open(os.path.join(folder, "hubble.svg"), encoding="utf-8").read().startswith("<svg"), "a chart is saved as SVG")
    check(open(os.path.join(folder, "hubble.png"), "rb").read(8) == b"\x89PNG\r\n\x1a\n", "and as PNG")
    rows = list(csv.DictReader(open(os.path.join(folder, "hubble.csv"), encoding="utf-8", newline="")))
    check(len(rows) > 100 and rows[0]["supernova"] == HOSTILE[0], "and its data as CSV (%d rows)" % len(rows))


def pictures(page):
    for name, width, height, dark in (("light", 1440, 900, False), ("dark", 1440, 900, True), ("narrow", 420, 900, False)):
        with Browser(width, height, dark) as b:
            b.open(page)
            see_all_charts(b)
            b.run("document.getElementById('light-curves').scrollIntoView()")
            time.sleep(0.5)
            b.run("scrollTo(0, 0)")
            b.screenshot(os.path.join(PICTURES, name + ".png"), whole=True)
            check(b.run("document.documentElement.scrollWidth") <= width, "no sideways scrolling at %d pixels (%s)" % (width, name))
            check(b.complaints() == [], "no complaint (%s)" % name)
            if name == "dark":
                dark_paper = b.run("getComputedStyle(document.body).backgroundColor")
                b.run("document.getElementById('theme').click()")
                check(b.run("getComputedStyle(document.body).backgroundColor") != dark_paper, "the button changes the colours")


def main():
    if not find_chromium():
        print("skipped: chromium is not installed (apt install chromium)")
        return 77
    os.makedirs(PICTURES, exist_ok=True)
    with tempfile.TemporaryDirectory() as top:
        folder = os.path.join(top, "run")
        make(folder, 150)
        page = os.path.join(folder, "report.html")
        seconds = write_page(folder, page, "A title with <b>markup</b> & \"quotes\"")
        check(seconds < 2 * LIMIT_SCALE, "page of 150 supernovae written in %.2f s" % seconds)
        first = open(page, "rb").read()
        write_page(folder, page, "A title with <b>markup</b> & \"quotes\"")
        check(open(page, "rb").read() == first, "the same tables give the same bytes")
        with Browser() as b:
            b.open(page)
            check(b.run("document.querySelector('h1').textContent") == "A title with <b>markup</b> & \"quotes\"", "the title is text")
            sections_and_marks(b)
            numbers(b, folder)
            hostile_names(b)
            name = click_opens(b, folder)
            panel_content(b, folder, name)
            brush(b, folder)
            search_and_sort(b, folder)
            keyboard(b)
            downloads(b, top)
            check(b.complaints() == [], "nothing in the console at the end")
        pictures(page)

        # A run that stopped early: sections without tables are left out.
        part = os.path.join(top, "part")
        make(part, 40, *sum((["--without", n] for n in ("summary", "cuts", "standardisation", "standardised", "scans", "zrange-grid", "sky-halves", "budget", "calibration-derivatives", "influence", "fields", "sample", "join", "calibrators")), []))
        write_page(part, os.path.join(part, "report.html"))
        with Browser() as b:
            b.open(os.path.join(part, "report.html"))
            see_all_charts(b)
            ids = b.run("[...document.querySelectorAll('section')].map((s) => s.id)")
            check(ids == ["list-of-supernovae", "light-curves"] and b.complaints() == [], "a run of light-curve fits alone shows list and light curves, nothing empty")
        blind = os.path.join(top, "blind")
        make(blind, 40, "--blind")
        write_page(blind, os.path.join(blind, "report.html"))
        with Browser() as b:
            b.open(os.path.join(blind, "report.html"))
            check("blind" in b.run("document.getElementById('answer').textContent"), "a blind run says so in the line of the answer")

        three = os.path.join(top, "three-hundred")
        make(three, 300)
        write_page(three, os.path.join(three, "report.html"))
        size = os.path.getsize(os.path.join(three, "report.html")) / 1e6
        check(size < 6 and not glob.glob(os.path.join(three, "*-lightcurves")), "300 supernovae with all light curves in one file of %.2f MB" % size)

        many = os.path.join(top, "many")
        make(many, 3000)
        page = os.path.join(many, "page of many.html")
        seconds = write_page(many, page)
        memory = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss / 1024
        check(seconds < 20 * LIMIT_SCALE, "page of 3000 supernovae written in %.1f s" % seconds)
        check(memory < 1024, "with %.0f MiB at most" % memory)
        check(os.path.getsize(page) < 6e6, "the page alone has %.2f MB" % (os.path.getsize(page) / 1e6))
        with Browser() as b:
            b.open(page)
            see_all_charts(b)
            b.run("document.querySelectorAll('#list-body th button')[120].click()")
            b.wait("document.querySelector('#panel[open] svg')")
            outside = [r for r in b.requests() if not r.startswith("data:")]
            check(all(r.startswith("file:") for r in outside) and any("part-" in r for r in outside), "its light curves come from files beside it, on demand")
            check(b.complaints() == [], "nothing in the console")
            b.screenshot(os.path.join(PICTURES, "three-thousand.png"))
    print("all passed; pictures in " + PICTURES)
    return 0


if __name__ == "__main__":
    sys.exit(main())
