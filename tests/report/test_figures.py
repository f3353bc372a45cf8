"""The static figures, read by poppler: one page each, fonts embedded, ink where axes and data belong, same bytes twice.

Exit code 77: skipped, pdftoppm is absent.
"""
import os
import shutil
import subprocess
import sys
import tempfile
import xml.etree.ElementTree

HERE = os.path.dirname(os.path.abspath(__file__))
TOOL = os.path.join(os.environ.get("THIRDRUNG_TOOLS", "tools"), "report_page")
NAMES = ["hubble", "residuals", "standardisation", "populations", "calibrators", "scans", "budget"]
MILLIMETRES = {"one": 88, "two": 180}


def check(condition, text):
    if not condition:
        raise AssertionError(text)
    print("ok   " + text, flush=True)


def grey_picture(pdf):
    """Rows of bytes, 0 black to 255 white, at 144 dots an inch (2 a point)."""
    data = subprocess.run(["pdftoppm", "-r", "144", "-gray", pdf], check=True, capture_output=True).stdout
    magic, size, depth, rest = data.split(b"\n", 3)
    width, height = map(int, size.split())
    assert magic == b"P5" and depth == b"255"
    return [rest[k * width:(k + 1) * width] for k in range(height)]


def ink(rows, x0, x1, y0, y1):
    """Share of dark dots in a part of the page, given as fractions of width and height from the upper left."""
    height, width = len(rows), len(rows[0])
    part = [row[int(x0 * width):int(x1 * width)] for row in rows[int(y0 * height):int(y1 * height)]]
    return sum(b < 160 for row in part for b in row) / max(1, sum(map(len, part)))


def long_lines(rows):
    """Number of rows and of columns that are dark over 30 % of the page: frames of plots."""
    height, width = len(rows), len(rows[0])
    across = sum(sum(b < 160 for b in row) > 0.3 * width for row in rows)
    columns = [sum(row[x] < 160 for row in rows) for x in range(width)]
    return across, sum(c > 0.2 * height for c in columns)


def main():
    if not shutil.which("pdftoppm"):
        print("skipped: pdftoppm is not installed (apt install poppler-utils)")
        return 77
    with tempfile.TemporaryDirectory() as top:
        run = os.path.join(top, "run")
        subprocess.run([sys.executable, os.path.join(HERE, "make_results.py"), run, "150"], check=True)
        for width in ("one", "two"):
            out = os.path.join(top, width)
            files = subprocess.run([TOOL, "figures", run, out, width], check=True, capture_output=True).stdout.decode().split()
            check(sorted(os.path.basename(f) for f in files) == sorted(n + e for n in NAMES for e in (".svg", ".pdf")), "seven figures as SVG and PDF, %s" % width)
            again = os.path.join(top, width + "-again")
            subprocess.run([TOOL, "figures", run, again, width], check=True, stdout=subprocess.DEVNULL)
            for name in NAMES:
                pdf = os.path.join(out, name + ".pdf")
                info = subprocess.run(["pdfinfo", pdf], check=True, capture_output=True).stdout.decode()
                points = float(next(line for line in info.splitlines() if line.startswith("Page size")).split()[2])
                # Tolerance: pdfinfo prints hundredths of a point.
                check("Pages:           1" in info and abs(points - MILLIMETRES[width] / 25.4 * 72) < 0.02, "%s: one page, %d mm wide" % (name, MILLIMETRES[width]))
                fonts = subprocess.run(["pdffonts", pdf], check=True, capture_output=True).stdout.decode().splitlines()[2:]
                check(fonts and all(line.split()[-5] == "yes" for line in fonts), "%s: %d fonts, all embedded" % (name, len(fonts)))
                rows = grey_picture(pdf)
                across, down = long_lines(rows)
                check(across >= 2 and down >= 2, "%s: frames drawn (%d long lines across, %d down)" % (name, across, down))
                check(ink(rows, 0.0, 1.0, 0.93, 1.0) > 0.002 or ink(rows, 0.0, 1.0, 0.9, 1.0) > 0.002, "%s: title of the axis below" % name)
                check(ink(rows, 0.0, 0.3, 0.1, 0.9) > 0.003, "%s: numbers or labels on the left" % name)
                check(0.004 < ink(rows, 0.3, 0.95, 0.08, 0.85) < 0.5, "%s: data in the middle, and not only ink" % name)
                for ending in (".pdf", ".svg"):
                    check(open(os.path.join(out, name + ending), "rb").read() == open(os.path.join(again, name + ending), "rb").read(), "%s%s: the same bytes twice" % (name, ending))
                root = xml.etree.ElementTree.parse(os.path.join(out, name + ".svg")).getroot()
                check(root.tag.endswith("svg") and len(list(root.iter())) > 50 and not any("href" in k and not v.startswith("#") for e in root.iter() for k, v in e.attrib.items()), "%s.svg: well formed, refers to nothing outside" % name)
    print("all passed")
    return 0


if __name__ == "__main__":
    sys.exit(main())
